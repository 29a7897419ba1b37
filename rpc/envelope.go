package rpc

import (
	"bytes"
	"fmt"
	"slices"
	"unicode/utf8"
)

// envelope is a message split into its members. Values are the bytes as they
// came, nil where the member is absent.
type envelope struct {
	id      []byte // a string, a number or null
	method  string
	params  []byte // an object or an array; nil too where null was given
	result  []byte
	failure []byte // the member "error"
	reply   bool   // an answer to a call of ours: a result or an error, no method
}

// envelopeNames are the members that mean something. Others are passed over,
// as JSON-RPC 2.0 sets no rule against them. A name counts in this spelling only.
var envelopeNames = [...]string{"jsonrpc", "id", "method", "params", "result", "error"}

// splitter splits messages; it is reused so that its scanner's memory is.
type splitter struct {
	scanner
	maxDepth int
}

// split checks that a body is one JSON-RPC 2.0 message and splits it. Its error
// is -32700 where the body is no JSON, then nothing is known of the message;
// else -32600, and the id is given wherever it could be read without doubt.
// A member given twice is refused: readers differ on which of the two counts.
func (s *splitter) split(body []byte) (envelope, *Error) {
	var e envelope
	if !utf8.Valid(body) {
		return e, parseFault(fmt.Sprintf("byte %d is not UTF-8", firstInvalid(body)))
	}
	s.data, s.pos, s.deepest = body, 0, 0
	defer func() { s.data = nil }()
	s.space()
	if s.pos == len(body) {
		return e, parseFault("it is empty")
	}
	first := s.peek()
	var found [len(envelopeNames)][]byte
	repeated := -1
	var err error
	if first == '{' {
		repeated, err = s.members(&found)
		s.deepest++
	} else {
		_, err = s.value()
	}
	if err == nil {
		if s.space(); s.pos < len(body) {
			err = s.unexpected("the end of the message")
		}
	}
	switch {
	case err != nil:
		return e, parseFault(err.Error())
	case first == '[':
		return e, invalidRequest("A list of messages (a batch) is not taken; send each message in a frame of its own.")
	case first != '{':
		return e, invalidRequest("A message is a JSON object with the members jsonrpc, id, method and params.")
	}
	return s.judge(found, repeated)
}

// members fills in the values of the members of an object that mean something.
func (s *splitter) members(found *[len(envelopeNames)][]byte) (repeated int, err error) {
	repeated = -1
	s.pos++
	s.space()
	if s.peek() == '}' {
		s.pos++
		return repeated, nil
	}
	for {
		s.space()
		raw, escaped, err := s.key()
		if err != nil {
			return repeated, err
		}
		if escaped {
			raw = []byte(plain(raw, true))
		}
		start, err := s.value()
		if err != nil {
			return repeated, err
		}
		for i, name := range envelopeNames {
			if string(raw) == name {
				if found[i] != nil {
					repeated = i
				}
				found[i] = s.data[start:s.pos:s.pos]
			}
		}
		s.space()
		switch s.peek() {
		case ',':
			s.pos++
		case '}':
			s.pos++
			return repeated, nil
		default:
			return repeated, s.unexpected("a comma or } in an object")
		}
	}
}

func (s *splitter) judge(found [len(envelopeNames)][]byte, repeated int) (envelope, *Error) {
	version, id, method, params := found[0], found[1], found[2], found[3]
	e := envelope{result: found[4], failure: found[5]}
	e.reply = method == nil && (e.result != nil || e.failure != nil)
	if repeated == 1 {
		return e, invalidRequest(`The member "id" is given twice.`)
	}
	if id != nil && id[0] != '"' && id[0] != '-' && id[0] != 'n' && !isDigit(id[0]) {
		return e, invalidRequest("The id of a request is a text or a number.")
	}
	e.id = id
	switch {
	case repeated >= 0:
		return e, invalidRequest(fmt.Sprintf("The member %q is given twice.", envelopeNames[repeated]))
	case s.deepest > s.maxDepth:
		return e, invalidRequest(fmt.Sprintf("The message is nested %d deep; at most %d are taken.", s.deepest, s.maxDepth))
	case e.reply:
		return e, nil
	case version == nil:
		return e, invalidRequest(`The member "jsonrpc" is missing; write "jsonrpc": "2.0".`)
	case !isText(version, "2.0"):
		return e, invalidRequest(`The member "jsonrpc" is not "2.0".`)
	case method == nil:
		return e, invalidRequest(`The member "method" is missing.`)
	case method[0] != '"':
		return e, invalidRequest("The name of a method is a text.")
	case e.result != nil || e.failure != nil:
		return e, invalidRequest("A message with a method has neither result nor error.")
	}
	e.method = textOf(method)
	if params != nil && !bytes.Equal(params, []byte("null")) {
		if params[0] != '{' && params[0] != '[' {
			return e, invalidRequest("The params of a request are an object.")
		}
		e.params = params
	}
	return e, nil
}

// textOf gives the characters of a JSON string known to be well formed.
func textOf(raw []byte) string {
	inner := raw[1 : len(raw)-1]
	return plain(inner, bytes.IndexByte(inner, '\\') >= 0)
}

func isText(raw []byte, text string) bool { return raw[0] == '"' && textOf(raw) == text }

func firstInvalid(body []byte) int {
	at := 0
	for at < len(body) {
		r, size := utf8.DecodeRune(body[at:])
		if r == utf8.RuneError && size == 1 {
			break
		}
		at += size
	}
	return at
}

func parseFault(detail string) *Error {
	return &Error{Code: CodeParse, Message: "The message is no JSON text: " + detail + "."}
}

func invalidRequest(message string) *Error {
	return &Error{Code: CodeInvalidRequest, Message: message}
}

// memberOf gives the value of one member of a JSON object that is known to be
// well formed, or nil. Where the member stands twice the last one counts.
func memberOf(object []byte, name string) []byte {
	value, _ := memberAt(object, name)
	return value
}

// cutMember gives an object with null in the place of a member, and the member.
func cutMember(object []byte, name string) (rest, value []byte) {
	value, start := memberAt(object, name)
	if value == nil {
		return object, nil
	}
	return slices.Concat(object[:start], []byte("null"), object[start+len(value):]), value
}

func memberAt(object []byte, name string) (value []byte, at int) {
	s := scanner{data: object}
	s.space()
	if s.peek() != '{' {
		return nil, 0
	}
	for {
		s.pos++
		s.space()
		raw, escaped, err := s.key()
		if err != nil {
			return value, at
		}
		start, err := s.value()
		if err != nil {
			return value, at
		}
		if plainEqual(raw, escaped, name) {
			value, at = s.data[start:s.pos:s.pos], start
		}
		s.space()
		if s.peek() != ',' {
			return value, at
		}
	}
}

func plainEqual(raw []byte, escaped bool, name string) bool {
	if escaped {
		return plain(raw, true) == name
	}
	return string(raw) == name
}
