package rpc

import (
	"bytes"
	"context"
	"encoding/json"
	"fmt"
	"runtime/debug"
	"strings"
	"sync"
	"sync/atomic"
	"time"

	"github.com/sourcegraph/jsonrpc2"
)

// Session is one client's connection from the first message to the exit code.
// What is not guarded by mu belongs to the goroutine that reads messages.
type Session struct {
	options Options
	limits  Limits
	methods map[string]*Method
	names   []string // of the methods, in the table's order
	stream  *stream
	writer  *frameWriter
	remarks *remarks
	conn    *jsonrpc2.Conn
	books   books
	live    map[string]*liveBook
	slow    map[string]bool // kinds of work that took too long in turn
	ctx     context.Context // ends when the session does
	stop    context.CancelFunc

	// Changed in turn by lifecycle.go, read anywhere.
	mu       sync.Mutex
	phase    phase
	client   Client
	encoding string
	trace    string
	ended    chan struct{}
	code     int

	// Calls that have been left to workers, and what else is under way. A call
	// leaves calls and byKey before its reply is queued, unsent after.
	calls   map[*Call]struct{}
	byKey   map[string]*Call
	unsent  int        // calls without a queued reply
	others  int        // work that Go has begun
	settled *sync.Cond // unsent or others has fallen, or waiting for them is over
	pool    pool
	turn    turn

	runaways atomic.Int32 // works that have outlasted their turn and go on
	unheard  atomic.Int32 // requests of tell without a reply
}

type phase uint8

const (
	fresh    phase = iota // nothing but initialize is taken
	open                  // initialize has been answered
	shutDown              // nothing but exit is taken
	over                  // nothing is taken
)

func newSession(ctx context.Context, out *frameWriter, remarks *remarks, opts Options) *Session {
	s := &Session{
		options: opts, limits: opts.Limits, writer: out, remarks: remarks,
		methods: map[string]*Method{}, encoding: "utf-16", trace: "off", ended: make(chan struct{}),
		slow: map[string]bool{}, live: map[string]*liveBook{}, calls: map[*Call]struct{}{}, byKey: map[string]*Call{},
	}
	s.settled = sync.NewCond(&s.mu)
	s.ctx, s.stop = context.WithCancel(ctx)
	s.pool.limits = s.limits
	s.turn = turn{session: s, wait: opts.waitInTurn}
	for i := range opts.Methods {
		m := &opts.Methods[i]
		s.methods[m.Name] = m
		s.names = append(s.names, m.Name)
	}
	return s
}

// handle runs a request or notification, as far as it is run in turn, and
// reports whether this goroutine is to read on.
func (s *Session) handle(e envelope) (readsOn bool) {
	call := &Call{Method: e.method, Params: json.RawMessage(e.params), Session: s, id: e.id, key: idKey(e.id), came: time.Now()}
	method := s.methods[e.method]
	if call.id == nil {
		s.notified(call, method)
		return true
	}
	if refusal := s.refusal(call, method); refusal != nil {
		call.answer(nil, refusal, true)
		return true
	}
	return s.start(call, method)
}

// notified runs a notification to its end. None is ever answered.
func (s *Session) notified(call *Call, method *Method) {
	now := s.now()
	switch {
	case now == over:
	case method == nil && strings.HasPrefix(call.Method, "$/"):
	case method == nil:
		s.remarks.say("the notification %.100q is unknown and was passed over%s", call.Method, ask(near(call.Method, s.names)))
	case !method.Notification:
		s.remarks.say("%s came without an id, so its answer would reach nobody; it was passed over", call.Method)
	case method.When != Always && now != open:
		s.remarks.say("%s came before initialize or after shutdown and was passed over", call.Method)
	default:
		_, err := call.guard(func() (any, error) { return s.byName(call, method) })
		call.answer(nil, err, true)
	}
}

// refusal says why a request is not run, or nil.
func (s *Session) refusal(call *Call, method *Method) *Error {
	s.mu.Lock()
	defer s.mu.Unlock()
	if _, taken := s.byKey[call.key]; taken {
		// Under its own id the refusal would pass for the other's answer.
		id := call.id
		call.id, call.key = []byte("null"), ""
		return invalidRequest(fmt.Sprintf("The id %.100s belongs to a request that has not been answered yet; give each request an id of its own.", id))
	}
	starting := method != nil && method.When == Starting
	switch {
	case s.phase == fresh && !starting && (method == nil || method.When != Always):
		return &Error{Code: CodeNotInitialized, Message: fmt.Sprintf("Send initialize before %.100s.", call.Method)}
	case s.phase == shutDown || s.phase == over:
		return invalidRequest("The server has been shut down; only the notification exit is taken now.")
	case method == nil:
		best := near(call.Method, s.names)
		e := &Error{Code: CodeMethodNotFound, Message: fmt.Sprintf("There is no method %.100q%s", call.Method, ask(best))}
		if best != "" {
			e.Data = &ErrorData{Suggestion: best}
		}
		return e
	case method.Notification:
		return invalidRequest(fmt.Sprintf("%s is a notification; send it without an id.", call.Method))
	case starting && s.phase != fresh:
		return invalidRequest("initialize has been answered already; it is sent once.")
	}
	return nil
}

// byName runs the handler, unless the params came by position where it takes
// them by name. Methods without params pass over whatever came.
func (s *Session) byName(call *Call, method *Method) (any, error) {
	if method.Params != nil && len(call.Params) > 0 && call.Params[0] == '[' {
		return nil, badParams("", "params", "came as a list", fmt.Sprintf("%s takes them by name, as an object", call.Method))
	}
	ctx := call.ctx
	if ctx == nil {
		ctx = s.ctx
	}
	return method.Handler(ctx, call)
}

// start runs a request in turn, or as far as its handler wants and the rest by a worker.
func (s *Session) start(call *Call, method *Method) (readsOn bool) {
	run := later(func(ctx context.Context) (any, error) { return s.byName(call, method) })
	if !method.Long {
		result, err := call.guard(func() (any, error) { return run(s.ctx) })
		switch rest := result.(type) {
		case later:
			run = rest
		case left:
			return false
		default:
			call.answer(result, err, true)
			return true
		}
	}
	ctx, cancel := context.WithCancel(s.ctx)
	switch {
	case !s.enlist(call, run, ctx, cancel):
		call.answer(nil, errEnding, true)
	case !s.pool.add(call):
		call.answer(nil, &Error{Code: CodeServerCancelled, Message: fmt.Sprintf("%d long calls are waiting already; send this one again when some have been answered.", s.limits.Queue)}, true)
	}
	return true
}

// enlist counts a call among those under way, where it can be cancelled. It
// fails if the session has been ended by another goroutine, which will not see
// this call.
func (s *Session) enlist(call *Call, run later, ctx context.Context, cancel context.CancelFunc) bool {
	s.mu.Lock()
	defer s.mu.Unlock()
	call.ctx, call.cancel = ctx, cancel
	if s.phase == over {
		cancel()
		return false
	}
	call.listed, call.run, call.size = true, run, len(call.Params)
	s.calls[call] = struct{}{}
	if call.key != "" {
		s.byKey[call.key] = call
	}
	s.unsent++
	return true
}

// forget frees the id of a call whose reply is about to be queued.
func (s *Session) forget(call *Call) {
	if !call.listed {
		return
	}
	s.mu.Lock()
	delete(s.calls, call)
	if call.key != "" {
		delete(s.byKey, call.key)
	}
	s.mu.Unlock()
	call.cancel()
}

// sent is told of a call whose reply has been queued.
func (s *Session) sent(call *Call) {
	if !call.listed {
		return
	}
	s.mu.Lock()
	s.unsent--
	s.settled.Broadcast()
	s.mu.Unlock()
}

// cancelCall answers a call that its client has given up, waiting or running.
func (s *Session) cancelCall(key string) {
	s.mu.Lock()
	call := s.byKey[key]
	s.mu.Unlock()
	if call == nil || key == "" {
		return // answered already, or never sent: LSP wants no error
	}
	s.pool.drop(call)
	call.cancel()
	call.answer(nil, errCancelled, true)
}

// inputEnded lets what is under way come to its end, up to the limit, and ends
// the session.
func (s *Session) inputEnded() {
	s.mu.Lock()
	late := false
	timer := time.AfterFunc(s.limits.Drain, func() {
		s.mu.Lock()
		late = true
		s.settled.Broadcast()
		s.mu.Unlock()
	})
	for s.unsent+s.others > 0 && !late && s.phase != over {
		s.settled.Wait()
	}
	s.mu.Unlock()
	timer.Stop()
	s.end("")
}

// end ends the session: with 0 after shutdown, else with 1. A reason is told
// to the error stream. Calls under way are answered.
func (s *Session) end(reason string) {
	s.mu.Lock()
	if s.phase == over {
		s.mu.Unlock()
		return
	}
	s.code = 1
	if s.phase == shutDown {
		s.code = 0
	}
	s.phase = over
	var left []*Call
	for call := range s.calls {
		left = append(left, call)
	}
	s.settled.Broadcast()
	s.mu.Unlock()
	if reason != "" {
		s.remarks.say("%s", reason)
	}
	s.turn.giveUp()
	for _, call := range left {
		s.pool.drop(call)
		call.answer(nil, errEnding, false)
	}
	s.mu.Lock()
	for s.unsent > 0 { // a worker is queueing the reply of a call that has just come to its end
		s.settled.Wait()
	}
	s.mu.Unlock()
	s.stop()
	close(s.ended)
}

func (s *Session) now() phase {
	s.mu.Lock()
	defer s.mu.Unlock()
	return s.phase
}

// Go runs work that belongs to no call, such as publishing results after a
// change. Its context ends with the session; at end of input it is waited for
// like a call. A panic in it is told to the error stream.
func (s *Session) Go(name string, work func(ctx context.Context)) {
	s.mu.Lock()
	s.others++
	s.mu.Unlock()
	go func() {
		defer func() {
			if fault := recover(); fault != nil {
				s.remarks.trace(fmt.Sprintf("fault in %s: %v", name, fault), debug.Stack())
			}
			s.mu.Lock()
			s.others--
			s.settled.Broadcast()
			s.mu.Unlock()
		}()
		work(s.ctx)
	}()
}

func (s *Session) traced() bool {
	s.mu.Lock()
	defer s.mu.Unlock()
	return s.trace != "off" && s.phase == open
}

// answerFault answers a message that could not be taken. The id is null where
// it could not be read.
func (s *Session) answerFault(id []byte, fault *Error) {
	buf := buffers.Get().(*bytes.Buffer)
	defer buffers.Put(buf)
	encodeFailure(buf, id, fault)
	_ = s.writer.gather(buf.Bytes())
}
