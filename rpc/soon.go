package rpc

import (
	"context"
	"sync"
	"time"
)

// waitInTurn is how long messages wait for an answer that should be quick.
const waitInTurn = 50 * time.Millisecond

// left is the result of a call whose work outlasted its turn: the goroutine
// that did it has answered the call, and does not read messages any more.
type left struct{}

// soon does quick work in turn. If it turns out long, as for an argument at the
// end of its domain, or on a machine with too much to do, another goroutine
// reads on, and this one answers the call when the work has come to its end: no
// argument keeps the server from reading. While as many works of that sort go on
// as there are workers, work of a kind that was long once is left to a worker.
func (c *Call) soon(kind string, work func(ctx context.Context) (any, error)) (any, error) {
	s := c.Session
	if s.slow[kind] && int(s.runaways.Load()) >= s.limits.Workers {
		return Later(work)
	}
	w := &inTurn{call: c, kind: kind, since: time.Now()}
	w.ctx, w.cancel = context.WithCancel(s.ctx)
	s.turn.begin(w)
	result, err := c.guard(func() (any, error) { return work(w.ctx) })
	if s.turn.end(w) {
		w.cancel()
		delete(s.slow, kind)
		return result, err
	}
	s.runaways.Add(-1)
	c.settle(result, err)
	s.pool.work(s.pool.take())
	return left{}, nil
}

// inTurn is work that is done by the goroutine that reads messages.
type inTurn struct {
	call   *Call
	kind   string
	since  time.Time
	ctx    context.Context
	cancel context.CancelFunc
}

// turn watches the work that is done in turn. Looking at it now and then costs
// less than a timer, or a goroutine, for each.
type turn struct {
	session *Session
	wait    time.Duration

	mu      sync.Mutex
	work    *inTurn // nil between works
	looking bool    // look will be called
}

func (t *turn) begin(w *inTurn) {
	t.mu.Lock()
	defer t.mu.Unlock()
	t.work = w
	if !t.looking {
		t.looking = true
		time.AfterFunc(t.wait, t.look)
	}
}

// end reports whether messages were kept waiting for the work to its end.
func (t *turn) end(w *inTurn) bool {
	t.mu.Lock()
	defer t.mu.Unlock()
	kept := t.work == w
	if kept {
		t.work = nil
	}
	return kept
}

// look reads messages on in the place of a goroutine whose work lasts too long.
func (t *turn) look() {
	t.mu.Lock()
	w := t.work
	if w != nil {
		if rest := t.wait - time.Since(w.since); rest > 0 {
			time.AfterFunc(rest, t.look)
			t.mu.Unlock()
			return
		}
		t.work = nil
		t.session.outlasted(w)
	}
	t.looking = false
	t.mu.Unlock()
	if w != nil {
		t.session.stream.read()
	}
}

// giveUp answers the call of the work that is under way when another goroutine
// ends the session. Nobody reads on.
func (t *turn) giveUp() {
	t.mu.Lock()
	defer t.mu.Unlock()
	if w := t.work; w != nil {
		t.work = nil
		t.session.outlasted(w)
	}
}

// outlasted makes a long call of one whose work was begun in turn. The goroutine
// at work on it counts as a worker, also where that makes one too many.
func (s *Session) outlasted(w *inTurn) {
	s.slow[w.kind] = true
	s.runaways.Add(1)
	s.pool.begun()
	if !s.enlist(w.call, nil, w.ctx, w.cancel) {
		w.call.answer(nil, errEnding, false)
	}
}
