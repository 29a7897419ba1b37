package rpc

import (
	"bytes"
	"encoding/json"
	"errors"
	"io"
	"strconv"

	"github.com/sourcegraph/jsonrpc2"
)

// stream is the library's ObjectStream over our frames. It shows the library
// only what the library handles rightly:
//   - of a request or notification a mark, in the place of its method; the session takes the message itself
//     from the stream, with id and params as they came. (The library would close
//     the connection on a fractional id or a batch, take id null for a
//     notification, echo -1 as 18446744073709551615 and re-encode the params.)
//   - replies to calls of ours, once checked.
//
// Faulty messages are answered here and never reach it. What the library sends,
// calls and notifications of ours, goes through the one writer.
type stream struct {
	session *Session
	frames  *frameReader
	split   splitter
	ready   chan struct{} // closed when the session may be used

	seq     uint64
	waiting bool // current has not been taken
	current envelope
}

func newStream(in io.Reader, session *Session) *stream {
	s := &stream{session: session, ready: make(chan struct{})}
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

// ReadObject gives the library its next message. At the end of the input it
// returns only after what is under way has been answered or given up.
func (s *stream) ReadObject(v any) error {
	<-s.ready
	for {
		s.session.writer.waitRoom(s.session.limits.UnsentBytes)
		if s.session.now() == over {
			return io.EOF
		}
		body, fault, err := s.frames.next()
		switch {
		case err != nil:
			return s.ended(err)
		case fault != nil:
			if fault.headerless {
				s.session.remarks.say("%s", wantHeader)
			} else {
				s.session.remarks.say("%s", fault.Message)
			}
			s.session.answerFault(nil, fault.Error)
			continue
		}
		if mark := s.message(body); mark != nil {
			if err := v.(json.Unmarshaler).UnmarshalJSON(mark); err != nil {
				s.session.remarks.say("a message could not be handed on: %v", err)
				continue
			}
			return nil
		}
	}
}

// message reads a body and gives what the library is to see of it, or nil.
func (s *stream) message(body []byte) []byte {
	e, fault := s.split.split(body)
	switch {
	case fault != nil && e.reply:
		s.session.remarks.say("a reply could not be read: %s", fault.Message)
		return nil
	case fault != nil:
		if fault.Code == CodeParse {
			s.frames.spoilt(body)
		}
		s.session.answerFault(e.id, fault)
		return nil
	case e.reply:
		reply, err := checkedReply(e)
		if err != nil {
			s.session.remarks.say("a reply was passed over: %v", err)
		}
		return reply
	}
	s.seq++
	s.current, s.waiting = e, true
	return append(strconv.AppendUint([]byte(`{"method":"`), s.seq, 10), `"}`...)
}

// take gives the message of a mark, once.
func (s *stream) take(mark string) (envelope, bool) {
	if !s.waiting || mark != strconv.FormatUint(s.seq, 10) {
		return envelope{}, false
	}
	e := s.current
	s.current, s.waiting = envelope{}, false
	return e, true
}

// checkedReply gives a reply in the form that the library reads without fault.
// Ids of our calls are whole numbers.
func checkedReply(e envelope) ([]byte, error) {
	if _, err := strconv.ParseUint(string(e.id), 10, 64); err != nil {
		return nil, errors.New("its id is none of ours")
	}
	if e.result != nil && e.failure != nil {
		return nil, errors.New("it has both result and error")
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
			return nil, errors.New("its error has no whole code and no text")
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
func (s *stream) ended(err error) error {
	switch {
	case err == io.ErrUnexpectedEOF:
		s.session.remarks.say("the input ended inside a message")
	case err != io.EOF:
		s.session.remarks.say("the input cannot be read any more: %v", err)
	}
	s.session.inputEnded()
	return io.EOF
}

// WriteObject sends a call or notification that the library has made.
func (s *stream) WriteObject(v any) error {
	body, err := v.(json.Marshaler).MarshalJSON()
	if err != nil {
		return err
	}
	return s.session.writer.send(body)
}

// Close is called by the library; input and output belong to Serve's caller.
func (s *stream) Close() error { return nil }
