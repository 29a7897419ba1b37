package rpc

import (
	"bytes"
	"io"
	"strings"
)

// This file finds the next good header after a part of the stream that was none.

// headerInside finds a whole Content-Length line that ends at or after from.
func headerInside(body []byte, from int) (start int) {
	for from < len(body) {
		n := bytes.IndexByte(body[from:], '\n')
		if n < 0 {
			break
		}
		end := from + n
		if start := lengthLine(body[:end]); start >= 0 {
			return start
		}
		from = end + 1
	}
	return -1
}

// lengthLine finds where text ends in "Content-Length: 123", in any case and
// with a CR or not, and gives its start or -1.
func lengthLine(text []byte) int {
	t := bytes.TrimSuffix(text, []byte("\r"))
	t = bytes.TrimRight(t, " \t")
	digits := bytes.TrimRight(t, "0123456789")
	if len(digits) == len(t) {
		return -1
	}
	name, ok := bytes.CutSuffix(bytes.TrimRight(digits, " \t"), []byte(":"))
	if !ok {
		return -1
	}
	name = bytes.TrimRight(name, " \t")
	start := len(name) - len(lengthName)
	if start < 0 || !strings.EqualFold(string(name[start:]), lengthName) {
		return -1
	}
	return start
}

const lengthName = "content-length"

// spoilt is told of a body that is no JSON. Its length may have been wrong: what
// looks like the start of the next header at its end is read again, and bytes
// up to the next header belong to the same fault.
func (f *frameReader) spoilt(body []byte) {
	f.searching = true
	from := max(0, len(body)-80)
	for i := from; i < len(body); i++ {
		if lower(body[i]) != lengthName[0] {
			continue
		}
		m := lengthMatcher{}
		for _, c := range body[i:] {
			m.step(c)
		}
		if m.open && m.taken == len(body)-i {
			f.unread(body[i:])
			return
		}
	}
}

// search passes bytes up to the end of a Content-Length line, or to the end of
// a body that is too long.
func (f *frameReader) search() (length int64, found bool, err error) {
	m := lengthMatcher{}
	left := f.skip
	for f.skip == 0 || left > 0 {
		c, err := f.byte()
		if err != nil {
			if err == io.EOF && f.skip > 0 {
				err = io.ErrUnexpectedEOF
			}
			return 0, false, err
		}
		left--
		if m.step(c) {
			return m.length, true, nil
		}
	}
	return 0, false, nil
}

// lengthMatcher recognises a Content-Length line byte by byte, wherever it
// begins. Only its first letter is a c, so that a mismatch needs no going back.
type lengthMatcher struct {
	open   bool // inside something that may become the line
	taken  int  // bytes of it so far
	named  int  // letters of the name matched
	colon  bool
	digits bool
	after  bool // blanks or CR after the digits
	cr     bool
	length int64
}

func (m *lengthMatcher) step(c byte) (matched bool) {
	if m.open && m.accepts(c) {
		m.taken++
		return c == '\n'
	}
	*m = lengthMatcher{}
	if lower(c) == lengthName[0] {
		m.open, m.taken, m.named = true, 1, 1
	}
	return false
}

func (m *lengthMatcher) accepts(c byte) bool {
	blank := c == ' ' || c == '\t'
	switch {
	case m.named < len(lengthName):
		if lower(c) != lengthName[m.named] {
			return false
		}
		m.named++
	case !m.colon:
		m.colon = c == ':'
		return m.colon || blank
	case !m.digits || !m.after && isDigit(c):
		if blank && !m.digits {
			return true
		}
		if !isDigit(c) {
			return false
		}
		m.digits = true
		m.length = appendDigit(m.length, c)
	case m.cr:
		return c == '\n'
	default:
		m.after = true
		m.cr = c == '\r'
		return blank || m.cr || c == '\n'
	}
	return true
}

func lower(c byte) byte {
	if 'A' <= c && c <= 'Z' {
		return c + 'a' - 'A'
	}
	return c
}
