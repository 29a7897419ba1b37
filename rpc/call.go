package rpc

import (
	"bytes"
	"container/list"
	"context"
	"encoding/json"
	"fmt"
	"runtime/debug"
	"strings"
	"sync"
	"time"
)

// Call is one request or notification on its way.
type Call struct {
	Method  string
	Params  json.RawMessage // as it came, well formed; nil where it was absent or null
	Session *Session

	id   []byte // as it came; nil in a notification
	key  string // under which it can be cancelled; "" where it cannot
	came time.Time

	// Of calls left to a worker, or that became long:
	listed bool // among the session's calls
	ctx    context.Context
	cancel context.CancelFunc
	run    later
	place  *list.Element // in the queue; nil once taken
	size   int

	mu       sync.Mutex // answered and progress
	answered bool
	progress *Progress
}

// idKey gives equal texts the same key, however they were escaped, and none to null.
func idKey(id []byte) string {
	switch {
	case len(id) == 0 || id[0] == 'n':
		return ""
	case id[0] == '"':
		return `"` + textOf(id)
	}
	return string(id)
}

// guard runs a part of a call; a panic in it is a fault of ours, told to the
// error stream in full and to the client in one sentence.
func (c *Call) guard(run func() (any, error)) (result any, err error) {
	defer func() {
		if fault := recover(); fault != nil {
			c.Session.remarks.trace(fmt.Sprintf("fault in %s: %v", c.Method, fault), debug.Stack())
			result, err = nil, &Error{Code: CodeInternal, Message: internalFault}
		}
	}()
	return run()
}

// answer sends the reply, unless the call has been answered before. Progress
// ends before it, and the id is free again before the client can see it.
func (c *Call) answer(result any, err error, inTurn bool) {
	if c.id == nil {
		if err != nil {
			c.Session.remarks.say("%s (a notification) was not done: %v", c.Method, err)
			wire, level := wireError(err), LogWarning
			if wire.Code == CodeInternal {
				level = LogError
			}
			c.Session.LogMessage(level, fmt.Sprintf("%.100s was not done: %s.", c.Method, strings.TrimSuffix(wire.Message, ".")))
		}
		return
	}
	c.mu.Lock()
	already, progress := c.answered, c.progress
	c.answered = true
	c.mu.Unlock()
	if already {
		return
	}
	if progress != nil {
		progress.end()
	}
	c.Session.reply(c, result, err, inTurn)
}

// reply encodes and queues a reply. In turn means that the reader calls it.
func (s *Session) reply(c *Call, result any, err error, inTurn bool) {
	buf := buffers.Get().(*bytes.Buffer)
	defer func() {
		if buf.Cap() <= keepBuffer {
			buffers.Put(buf)
		}
	}()
	if err == nil {
		_, err = c.guard(func() (any, error) { return nil, encodeReply(buf, c.id, result) })
		if err != nil {
			s.remarks.say("the result of %s cannot be sent: %v", c.Method, err)
			err = &Error{Code: CodeInternal, Message: internalFault}
		}
	}
	if err != nil {
		encodeFailure(buf, c.id, wireError(err))
	}
	s.forget(c)
	if inTurn {
		_ = s.writer.gather(buf.Bytes()) // the writer itself tells of its errors
	} else {
		_ = s.writer.send(buf.Bytes())
	}
	if s.traced() { // behind the reply: before that to initialize no such notification may be sent
		s.logTrace(fmt.Sprintf("%s (id %s) answered after %v", c.Method, c.id, time.Since(c.came).Round(time.Microsecond)), func() string {
			return fmt.Sprintf("%d bytes of params, %d bytes of reply", len(c.Params), buf.Len())
		})
	}
	s.sent(c)
}

// encoded is a result that a handler has written as JSON by itself.
type encoded []byte

var buffers = sync.Pool{New: func() any { return new(bytes.Buffer) }}

// encodeReply writes a reply with the id's own text.
func encodeReply(buf *bytes.Buffer, id []byte, result any) error {
	buf.Reset()
	buf.WriteString(`{"jsonrpc":"2.0","id":`)
	buf.Write(id)
	buf.WriteString(`,"result":`)
	if text, ok := result.(encoded); ok {
		buf.Write(text)
	} else if err := encodeJSON(buf, result); err != nil {
		return err
	}
	buf.WriteByte('}')
	return nil
}

func encodeFailure(buf *bytes.Buffer, id []byte, failure *Error) {
	if id == nil {
		id = []byte("null")
	}
	buf.Reset()
	buf.WriteString(`{"jsonrpc":"2.0","id":`)
	buf.Write(id)
	buf.WriteString(`,"error":`)
	_ = encodeJSON(buf, failure) // texts and a whole number cannot fail
	buf.WriteByte('}')
}

// encodeJSON writes a value without a line break and with <, > and & as they
// are. Numbers are the shortest text that reads back as the same double, which
// is encoding/json's rule; it refuses NaN and infinite numbers.
func encodeJSON(buf *bytes.Buffer, value any) error {
	enc := json.NewEncoder(buf)
	enc.SetEscapeHTML(false)
	if err := enc.Encode(value); err != nil {
		return err
	}
	buf.Truncate(buf.Len() - 1)
	return nil
}
