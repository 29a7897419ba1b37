package rpc

import (
	"fmt"
	"strings"
	"unicode/utf16"
	"unicode/utf8"
)

// scanner walks over JSON text (RFC 8259) without building anything. It keeps
// no recursion, so that nesting costs one byte a level, and accepts exactly
// what encoding/json accepts among texts that are valid UTF-8.
type scanner struct {
	data    []byte
	pos     int
	nest    []byte // the open brackets of the value being passed
	deepest int    // the deepest nest met, counted from the start of each value
}

// syntaxError is a place where text stops being JSON.
type syntaxError struct {
	at    int
	found string
	want  string
}

func (e *syntaxError) Error() string {
	return fmt.Sprintf("at byte %d stands %s where %s is expected", e.at, e.found, e.want)
}

func (s *scanner) unexpected(want string) error {
	found := "the end"
	if s.pos < len(s.data) {
		found = "a control character"
		if r, _ := utf8.DecodeRune(s.data[s.pos:]); r >= ' ' {
			found = fmt.Sprintf("%q", r)
		}
	}
	return &syntaxError{at: s.pos, found: found, want: want}
}

// peek gives the byte at the position, or 0 at the end; 0 never is JSON.
func (s *scanner) peek() byte {
	if s.pos < len(s.data) {
		return s.data[s.pos]
	}
	return 0
}

func (s *scanner) space() {
	for s.pos < len(s.data) && (s.data[s.pos] == ' ' || s.data[s.pos] == '\n' || s.data[s.pos] == '\r' || s.data[s.pos] == '\t') {
		s.pos++
	}
}

// plainInText marks the bytes that a string may hold as they are.
var plainInText = func() (t [256]bool) {
	for i := range t {
		t[i] = i >= ' ' && i != '"' && i != '\\'
	}
	return t
}()

// text passes a string and gives what stands between its quotes, still escaped.
func (s *scanner) text() (raw []byte, escaped bool, err error) {
	if s.peek() != '"' {
		return nil, false, s.unexpected("a text in double quotes")
	}
	s.pos++
	start := s.pos
	for s.pos < len(s.data) {
		c := s.data[s.pos]
		if plainInText[c] {
			s.pos++
			continue
		}
		switch c {
		case '"':
			s.pos++
			return s.data[start : s.pos-1], escaped, nil
		case '\\':
			escaped = true
			s.pos++
			if err := s.escape(); err != nil {
				return nil, false, err
			}
		default:
			return nil, false, s.unexpected("text (control characters are written as escapes)")
		}
	}
	return nil, false, s.unexpected("the closing quote of a text")
}

func (s *scanner) escape() error {
	switch s.peek() {
	case '"', '\\', '/', 'b', 'f', 'n', 'r', 't':
		s.pos++
		return nil
	case 'u':
		s.pos++
		for range 4 {
			if !isHex(s.peek()) {
				return s.unexpected("a hexadecimal digit")
			}
			s.pos++
		}
		return nil
	}
	return s.unexpected(`an escape (one of "\/bfnrtu)`)
}

func isHex(c byte) bool {
	return '0' <= c && c <= '9' || 'a' <= c && c <= 'f' || 'A' <= c && c <= 'F'
}

func isDigit(c byte) bool { return '0' <= c && c <= '9' }

func (s *scanner) digits() error {
	if !isDigit(s.peek()) {
		return s.unexpected("a digit")
	}
	pos := s.pos + 1
	for pos < len(s.data) && isDigit(s.data[pos]) {
		pos++
	}
	s.pos = pos
	return nil
}

func (s *scanner) number() error {
	if s.peek() == '-' {
		s.pos++
	}
	if s.peek() == '0' {
		s.pos++
	} else if err := s.digits(); err != nil {
		return err
	}
	if s.peek() == '.' {
		s.pos++
		if err := s.digits(); err != nil {
			return err
		}
	}
	if c := s.peek(); c == 'e' || c == 'E' {
		s.pos++
		if c := s.peek(); c == '+' || c == '-' {
			s.pos++
		}
		return s.digits()
	}
	return nil
}

func (s *scanner) word(word string) error {
	for i := range len(word) {
		if s.peek() != word[i] {
			return s.unexpected("the word " + word)
		}
		s.pos++
	}
	return nil
}

// key passes a member's name and its colon.
func (s *scanner) key() (raw []byte, escaped bool, err error) {
	if s.peek() != '"' {
		return nil, false, s.unexpected("a member's name in double quotes")
	}
	raw, escaped, err = s.text()
	if err != nil {
		return nil, false, err
	}
	s.space()
	if s.peek() != ':' {
		return nil, false, s.unexpected("a colon after a member's name")
	}
	s.pos++
	return raw, escaped, nil
}

// value passes one value and the space before it. What it passed is
// s.data[start:s.pos], with start the position after that space.
func (s *scanner) value() (start int, err error) {
	s.nest = s.nest[:0]
	s.space()
	start = s.pos
	for {
		open, err := s.begin()
		if err != nil {
			return start, err
		}
		if open {
			continue
		}
		if done, err := s.end(); done || err != nil {
			return start, err
		}
	}
}

// begin passes a scalar or an empty array or object, or enters a filled one.
func (s *scanner) begin() (entered bool, err error) {
	s.space()
	switch c := s.peek(); {
	case c == '-' || isDigit(c):
		return false, s.number()
	case c == '"':
		_, _, err := s.text()
		return false, err
	case c == '[' || c == '{':
		s.pos++
		s.nest = append(s.nest, c)
		s.deepest = max(s.deepest, len(s.nest))
		s.space()
		if s.peek() == c+2 { // ']' and '}' stand two places after their partners
			s.pos++
			s.nest = s.nest[:len(s.nest)-1]
			return false, nil
		}
		if c == '{' {
			_, _, err = s.key()
		}
		return true, err
	case c == 't':
		return false, s.word("true")
	case c == 'f':
		return false, s.word("false")
	case c == 'n':
		return false, s.word("null")
	}
	return false, s.unexpected("a value")
}

// end passes what follows a value: closing brackets, then a comma before the
// next value. It reports whether the outermost value has ended.
func (s *scanner) end() (done bool, err error) {
	for len(s.nest) > 0 {
		s.space()
		open := s.nest[len(s.nest)-1]
		switch s.peek() {
		case open + 2:
			s.pos++
			s.nest = s.nest[:len(s.nest)-1]
		case ',':
			s.pos++
			if open == '{' {
				s.space()
				_, _, err = s.key()
			}
			return false, err
		default:
			if open == '[' {
				return false, s.unexpected("a comma or ] in a list")
			}
			return false, s.unexpected("a comma or } in an object")
		}
	}
	return true, nil
}

// plain gives the characters of a string that text or key passed. Half a
// surrogate pair becomes U+FFFD.
func plain(raw []byte, escaped bool) string {
	if !escaped {
		return string(raw)
	}
	var b strings.Builder
	b.Grow(len(raw))
	for i := 0; i < len(raw); i++ {
		if raw[i] != '\\' {
			b.WriteByte(raw[i])
			continue
		}
		i++
		switch raw[i] {
		case 'b':
			b.WriteByte('\b')
		case 'f':
			b.WriteByte('\f')
		case 'n':
			b.WriteByte('\n')
		case 'r':
			b.WriteByte('\r')
		case 't':
			b.WriteByte('\t')
		case 'u':
			r := hexRune(raw[i+1 : i+5])
			i += 4
			if utf16.IsSurrogate(r) && i+6 < len(raw) && raw[i+1] == '\\' && raw[i+2] == 'u' {
				if pair := utf16.DecodeRune(r, hexRune(raw[i+3:i+7])); pair != utf8.RuneError {
					r = pair
					i += 6
				}
			}
			b.WriteRune(r) // a surrogate left alone is written as U+FFFD
		default:
			b.WriteByte(raw[i])
		}
	}
	return b.String()
}

func hexRune(digits []byte) rune {
	var r rune
	for _, c := range digits {
		switch {
		case c >= 'a':
			c -= 'a' - 10
		case c >= 'A':
			c -= 'A' - 10
		default:
			c -= '0'
		}
		r = r<<4 | rune(c)
	}
	return r
}
