package calculation

import (
	"bytes"
	"fmt"
	"io"
	"math"
	"strconv"
	"strings"
	"unicode/utf8"
)

// CSVError says what is wrong with a text file, and where.
type CSVError struct {
	Line   int // from 1
	Reason string
}

// Error words the fault; it goes on from the file's name.
func (e *CSVError) Error() string { return fmt.Sprintf("is damaged in line %d: %s", e.Line, e.Reason) }

// csvField is one cell of a text file. text is what it reads, without quotes;
// it is kept until the next record.
type csvField struct {
	span   Span // with its quotes, in bytes from the start of the file
	text   []byte
	quoted bool
}

var byteOrderMark = []byte("\xef\xbb\xbf")

// csvScanner reads a text file record by record, in one pass.
type csvScanner struct {
	in      io.Reader
	dialect dialect
	buf     []byte
	at      int   // of the next byte in buf
	base    int   // offset in the file of buf's start
	ended   bool  // in has no more
	err     error // of in
	line    int   // of the next byte
	fields  []csvField
	scratch []byte
	end     Span // of the line break after the record
}

// maxRecord is the length of one record, against files that are no tables.
const maxRecord = 16 << 20

func newCSVScanner(in io.Reader, d dialect) *csvScanner {
	return &csvScanner{in: in, dialect: d, line: 1}
}

// fill reads more and reports whether there is a byte at offset i past at.
func (s *csvScanner) fill(i int) bool {
	for s.at+i >= len(s.buf) && !s.ended {
		if len(s.buf)-s.at > maxRecord {
			s.err = &CSVError{s.line, fmt.Sprintf("a row is longer than %d bytes", maxRecord)}
			s.ended = true
			return false
		}
		if cap(s.buf)-len(s.buf) < readAhead {
			grown := make([]byte, len(s.buf), 2*cap(s.buf)+64<<10)
			copy(grown, s.buf)
			s.buf = grown
		}
		n, err := s.in.Read(s.buf[len(s.buf):cap(s.buf)])
		s.buf = s.buf[:len(s.buf)+n]
		if err != nil {
			s.ended = true
			if err != io.EOF {
				s.err = err
			}
		}
	}
	return s.at+i < len(s.buf)
}

// readAhead is how much is read at least before a record that may be cut off at
// the end of the buffer, so that records seldom are.
const readAhead = 16 << 10

// rewind moves what is left to the front of the buffer and reads on. It is
// called between records only, since their fields lie in the buffer.
func (s *csvScanner) rewind() {
	if s.ended || len(s.buf)-s.at >= readAhead {
		return
	}
	s.base += s.at
	s.buf = s.buf[:copy(s.buf, s.buf[s.at:])]
	s.at = 0
	s.fill(len(s.buf))
}

// next reads a record. It is false at the end, or where err is set.
func (s *csvScanner) next() bool {
	s.fields, s.scratch = s.fields[:0], s.scratch[:0]
	s.rewind()
	if !s.fill(0) || s.err != nil {
		return false
	}
	if s.base == 0 && s.at == 0 && s.fill(2) && bytes.HasPrefix(s.buf, byteOrderMark) {
		s.at = len(byteOrderMark)
		if !s.fill(0) {
			return false
		}
	}
	first := s.line
	// The bytes of a record stay in the buffer until it is whole.
	pos := 0
	for {
		f, next, ok := s.field(pos)
		if !ok {
			return false
		}
		if len(s.fields) == MaxCol {
			s.err = &CSVError{first, fmt.Sprintf("it has more than %d columns", MaxCol)}
			return false
		}
		s.fields = append(s.fields, f)
		pos = next
		if s.fill(pos) && s.buf[s.at+pos] == s.dialect.separator {
			pos++
			continue
		}
		break
	}
	breakAt := pos
	if s.fill(pos) && s.buf[s.at+pos] == '\r' {
		pos++
	}
	if s.fill(pos) && s.buf[s.at+pos] == '\n' {
		pos++
	}
	if pos > breakAt {
		s.line++
	}
	s.end = Span{s.base + s.at + breakAt, s.base + s.at + pos}
	for _, f := range s.fields {
		if !utf8.Valid(f.text) {
			s.err = &CSVError{first, "the text is not in UTF-8; save the file as CSV UTF-8"}
			return false
		}
	}
	s.at += pos
	return s.err == nil
}

// field reads the field at pos, up to its separator or the end of the line.
func (s *csvScanner) field(pos int) (f csvField, next int, ok bool) {
	start := pos
	span := func(end int) Span { return Span{s.base + s.at + start, s.base + s.at + end} }
	if s.fill(pos) && s.buf[s.at+pos] == '"' {
		return s.quotedField(pos)
	}
	for s.fill(pos) {
		c := s.buf[s.at+pos]
		if c == s.dialect.separator || c == '\n' || c == '\r' {
			break
		}
		pos++
	}
	if s.err != nil {
		return f, 0, false
	}
	return csvField{span: span(pos), text: s.buf[s.at+start : s.at+pos]}, pos, true
}

// quotedField reads a field in quotes, a quote doubled inside.
func (s *csvScanner) quotedField(start int) (f csvField, next int, ok bool) {
	line := s.line
	pos := start + 1
	from := len(s.scratch)
	for s.fill(pos) {
		c := s.buf[s.at+pos]
		pos++
		if c == '\n' {
			s.line++
		}
		if c != '"' {
			s.scratch = append(s.scratch, c)
			continue
		}
		if s.fill(pos) && s.buf[s.at+pos] == '"' {
			s.scratch = append(s.scratch, '"')
			pos++
			continue
		}
		for s.fill(pos) && s.buf[s.at+pos] == ' ' { // space after the quote belongs to no text
			pos++
		}
		if s.fill(pos) && s.buf[s.at+pos] != s.dialect.separator && s.buf[s.at+pos] != '\n' && s.buf[s.at+pos] != '\r' {
			s.err = &CSVError{s.line, "text follows a closing quote; double the quotes inside a text"}
			return f, 0, false
		}
		return csvField{span: Span{s.base + s.at + start, s.base + s.at + pos}, text: s.scratch[from:len(s.scratch):len(s.scratch)], quoted: true}, pos, true
	}
	if s.err == nil {
		s.err = &CSVError{line, "a quote is opened and never closed"}
	}
	return f, 0, false
}

// setField puts a field into a frame as the cell that it reads as, and gives
// the flags of its row.
func (d dialect) setField(f *Frame, row, col int, field []byte) RowFlags {
	text := bytes.TrimSpace(field)
	if len(text) == 0 {
		return 0
	}
	flags := RowFilled
	if strings.IndexByte("tTsSaA", text[0]) >= 0 && StartsLikeTotal(string(text)) {
		flags |= RowTotal
	}
	c := f.Column(col)
	if c == nil {
		return flags
	}
	if kind, x, ok := d.numberIn(text); ok {
		c.SetNumber(row, kind, x)
		return flags
	}
	switch {
	case len(text) <= 5 && (bytes.EqualFold(text, []byte("true")) || bytes.EqualFold(text, []byte("false"))):
		c.SetBool(row, text[0]|0x20 == 't')
	case text[0] == '#' && isErrorCode(string(text)):
		c.SetText(row, Error, f.InternBytes(text))
	default:
		c.SetText(row, Text, f.InternBytes(field))
	}
	return flags
}

// isErrorCode reports whether a text is an error value of spreadsheets
// (ECMA-376 part 1, 18.17.3).
func isErrorCode(text string) bool {
	switch strings.ToUpper(text) {
	case "#N/A", "#DIV/0!", "#VALUE!", "#REF!", "#NAME?", "#NUM!", "#NULL!":
		return true
	}
	return false
}

// numberIn reads a number, a percentage, a date or a duration.
func (d dialect) numberIn(text []byte) (CellKind, float64, bool) {
	switch c := text[0]; {
	case '0' <= c && c <= '9', c == '-', c == '+', c == '.', c == ',' && d.decimalComma, c == 0xe2: // 0xe2 begins a minus sign
	default:
		return 0, 0, false
	}
	s := string(text)
	plain := s
	if d.decimalComma {
		if strings.ContainsRune(s, '.') {
			return 0, 0, false
		}
		plain = strings.Replace(s, ",", ".", 1)
	}
	if x, ok := parseNumber(plain); ok {
		return Number, x, true
	}
	if len(s) >= 10 {
		if x, _, ok := parseDate(s); ok {
			return Date, x, true
		}
	}
	if x, ok := parseDuration(s); ok {
		return Duration, x, true
	}
	return 0, 0, false
}

// parseDuration reads h:mm or h:mm:ss, in days.
func parseDuration(s string) (float64, bool) {
	parts := strings.Split(s, ":")
	if len(parts) < 2 || len(parts) > 3 || len(parts[0]) > 5 {
		return 0, false
	}
	seconds := 0.0
	for i, part := range parts {
		whole, fraction, hasFraction := strings.Cut(part, ".")
		if i > 0 && len(whole) != 2 || hasFraction && (i < 2 || fraction == "") {
			return 0, false
		}
		for _, c := range whole + fraction {
			if c < '0' || c > '9' {
				return 0, false
			}
		}
		x, err := strconv.ParseFloat(part, 64)
		if err != nil || i > 0 && x >= 60 {
			return 0, false
		}
		seconds += float64(x * math.Pow(60, float64(2-i)))
	}
	return seconds / secondsPerDay, true
}
