package rpc

import (
	"bytes"
	"context"
	"encoding/json"
	"errors"
	"io"
	"strconv"

	"github.com/sourcegraph/jsonrpc2"
)

// stream is the library's ObjectStream over our frames. The library keeps the
// calls and notifications of ours: what it sends goes through the one writer, and
// it reads the replies, once checked. Requests and notifications of the client go
// to the session as they came. (The library would close the connection on a
// fractional id or a batch, take id null for a notification, echo -1 as
// 18446744073709551615 and re-encode the params.) Faulty messages are answered
// here.
type stream struct {
	session *Session
	frames  *frameReader
	split   splitter
	replies chan []byte
}

func newStream(in io.Reader, session *Session) *stream {
	s := &stream{session: session, replies: make(chan []byte)}
	s.frames = newFrameReader(flushingReader{in, session.writer}, session.limits)
	s.split.maxDepth = session.limits.Depth
	return s
}

// flushingReader lets replies leave before it waits for more input.
type flushingReader struct {
	in     io.Reader
	writer *frameWriter
}

func (r flushingReader) Read(p []byte) (int, error) {
	r.writer.flush()
	return r.in.Read(p)
}

// read reads messages until no more come, or another goroutine reads on. At the
// end of the input it returns only after what is under way has been answered or
// given up.
func (s *stream) read() {
	for {
		s.session.writer.waitRoom(s.session.limits.UnsentBytes)
		if s.session.now() == over {
			return
		}
		body, fault, err := s.frames.next()
		switch {
		case err != nil:
			s.ended(err)
			return
		case fault != nil:
			if fault.headerless {
				s.session.remarks.say("%s", wantHeader)
			} else {
				s.session.remarks.say("%s", fault.Message)
			}
			s.session.answerFault(nil, fault.Error)
		case !s.message(body):
			return
		}
	}
}

// message hands on what a body holds, and reports whether to read on.
func (s *stream) message(body []byte) (readsOn bool) {
	e, fault := s.split.split(body)
	switch {
	case fault != nil && e.reply:
		s.session.remarks.say("a reply could not be read: %s", fault.Message)
		return true
	case fault != nil:
		if fault.Code == CodeParse {
			s.frames.spoilt(body)
		}
		s.session.answerFault(e.id, fault)
		return true
	case !e.reply:
		return s.session.handle(e)
	}
	reply, err := checkedReply(e)
	if err != nil {
		s.session.remarks.say("a reply was passed over: %v", err)
		return true
	}
	select {
	case s.replies <- reply:
	case <-s.session.ended:
	}
	return true
}

// ReadObject gives the library its next message, which is a reply.
func (s *stream) ReadObject(v any) error {
	for {
		select {
		case reply := <-s.replies:
			err := v.(json.Unmarshaler).UnmarshalJSON(reply)
			if err == nil {
				return nil
			}
			s.session.remarks.say("a reply could not be handed on: %v", err)
		case <-s.session.ended:
			return io.EOF
		}
	}
}

// checkedReply gives a reply in the form that the library reads without fault.
// Ids of our calls are whole numbers. Some clients write both result and error,
// as JSON-RPC 1.0 did, and null for the one that does not apply. An error that
// cannot be read is one all the same, since something may wait for it.
func checkedReply(e envelope) ([]byte, error) {
	if _, err := strconv.ParseUint(string(e.id), 10, 64); err != nil {
		return nil, errors.New("its id is none of ours")
	}
	if e.result != nil && e.failure != nil {
		switch {
		case string(e.failure) == "null":
			e.failure = nil
		case string(e.result) != "null":
			return nil, errors.New("it has both result and error")
		}
	}
	var b bytes.Buffer
	b.WriteString(`{"id":`)
	b.Write(e.id)
	if e.failure == nil {
		b.WriteString(`,"result":`)
		b.Write(e.result)
	} else {
		var failure jsonrpc2.Error
		if err := json.Unmarshal(e.failure, &failure); err != nil {
			failure = jsonrpc2.Error{Code: CodeInternal, Message: "the client's error has no whole code and no text"}
		}
		b.WriteString(`,"error":`)
		if err := encodeJSON(&b, failure); err != nil {
			return nil, err
		}
	}
	b.WriteByte('}')
	return b.Bytes(), nil
}

// ended is told why no more input comes.
func (s *stream) ended(err error) {
	switch {
	case err == io.ErrUnexpectedEOF:
		s.session.remarks.say("the input ended inside a message")
	case err != io.EOF:
		s.session.remarks.say("the input cannot be read any more: %v", err)
	}
	s.session.inputEnded()
}

// WriteObject sends a call or notification that the library has made.
func (s *stream) WriteObject(v any) error {
	body, err := v.(json.Marshaler).MarshalJSON()
	if err != nil {
		return err
	}
	return s.session.writer.send(body)
}

// Handle would run a request that the library has read: there is none.
func (s *stream) Handle(context.Context, *jsonrpc2.Conn, *jsonrpc2.Request) {}

// Close is called by the library; input and output belong to Serve's caller.
func (s *stream) Close() error { return nil }
