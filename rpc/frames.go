package rpc

import (
	"bytes"
	"fmt"
	"io"
	"math"
	"strings"
)

// frameReader cuts a stream of bytes into message bodies, as the base protocol
// of LSP 3.17 frames them: header lines, a blank line, a body of Content-Length
// bytes. Header names count in any case, other headers are passed over, lines
// may end in LF alone, blanks before a header are skipped.
//
// Where the stream is not so framed, next reports one fault and goes on at the
// next line that says Content-Length and a number. No JSON text can hold such
// a line (a line break inside a string must be escaped), so that a cut-short
// body is told from a long one as soon as the next header arrives.
//
// Memory grows with what has come in, not with what a header promises: at most
// 8 times the bytes received of a body, and a fixed buffer.
type frameReader struct {
	in          io.Reader
	headerBytes int
	bodyBytes   int

	buf       []byte // buf[r:w] has been read and not yet used
	r, w      int
	head      []byte // the header being read
	searching bool   // the next header is to be searched for
	skip      int64  // while searching: bytes left of a body that is too long, or 0
	err       error  // the error that ended the input
}

const (
	frameBuffer = 64 << 10
	firstBody   = 4 << 10
)

// frameFault is a part of the stream that is no message we can take.
type frameFault struct {
	*Error
	headerless bool // bytes stood where a header belongs
}

func newFrameReader(in io.Reader, limits Limits) *frameReader {
	return &frameReader{in: in, headerBytes: limits.HeaderBytes, bodyBytes: limits.MessageBytes, buf: make([]byte, frameBuffer)}
}

// next gives the next body, or a fault, or the error that ends the input:
// io.EOF between messages, io.ErrUnexpectedEOF inside one.
func (f *frameReader) next() ([]byte, *frameFault, error) {
	length, found := int64(-1), false
	if f.searching {
		var err error
		length, found, err = f.search()
		if err != nil {
			return nil, nil, err
		}
		f.searching, f.skip = false, 0
	}
	if !found {
		length = -1
	}
	length, charset, fault, err := f.header(length)
	switch {
	case err != nil:
		return nil, nil, err
	case fault != nil:
		f.searching = true
		return nil, fault, nil
	case length > int64(f.bodyBytes):
		f.searching, f.skip = true, length
		return nil, &frameFault{Error: invalidRequest(fmt.Sprintf("The message has %s bytes; at most %d are taken.", sayLength(length), f.bodyBytes))}, nil
	}
	body, fault, err := f.body(int(length))
	if err == nil && fault == nil && charset != "" {
		fault = &frameFault{Error: parseFault(fmt.Sprintf("its charset is %q, not utf-8", charset))}
	}
	return body, fault, err
}

func sayLength(length int64) string {
	if length == math.MaxInt64 {
		return "too many"
	}
	return fmt.Sprint(length)
}

// header reads the lines up to and with the blank one. A length of 0 or more
// was found by a search already.
func (f *frameReader) header(length int64) (_ int64, charset string, _ *frameFault, _ error) {
	f.head = f.head[:0]
	if length < 0 {
		if err := f.blanks(); err != nil {
			return 0, "", nil, err
		}
	}
	first := length < 0
	for {
		start := len(f.head)
		problem, headerless, err := f.line(first)
		if err != nil {
			return 0, "", nil, err
		}
		first = false
		name, value := splitHeader(f.head[start:])
		switch {
		case problem != "":
		case name == "":
			if length >= 0 {
				return length, charset, nil, nil
			}
			problem = "there is no Content-Length"
		case strings.EqualFold(name, "Content-Length"):
			n, ok := parseLength(value)
			if !ok {
				problem = fmt.Sprintf("Content-Length is %.40q, not a number of bytes", value)
			} else if length >= 0 && n != length {
				// Which of the two is right cannot be told, so neither is searched for again.
				return 0, "", &frameFault{Error: headerFault("Content-Length is given twice, differently")}, nil
			} else {
				length = n
			}
		case strings.EqualFold(name, "Content-Type"):
			charset = otherCharset(value)
		}
		if problem != "" {
			if length < 0 && len(f.head) <= f.headerBytes {
				f.unread(f.head) // a good header may begin inside what looked like one
			}
			if headerless {
				return 0, "", &frameFault{Error: &Error{Code: CodeParse, Message: wantHeader}, headerless: true}, nil
			}
			return 0, "", &frameFault{Error: headerFault(problem)}, nil
		}
	}
}

// wantHeader is said where bytes stand in a header's place.
const wantHeader = `A message begins with a header: "Content-Length: N", CR LF, an empty line, then N bytes of JSON in UTF-8.`

func headerFault(problem string) *Error {
	return &Error{Code: CodeParse, Message: "The message has no good header: " + problem + "."}
}

// blanks skips white space before a header.
func (f *frameReader) blanks() error {
	for {
		c, err := f.byte()
		if err != nil {
			return err
		}
		if c != ' ' && c != '\t' && c != '\r' && c != '\n' {
			f.r--
			return nil
		}
	}
}

// line appends one header line to head. It stops at the first byte that cannot
// stand in a header's name, so that a client which sends bare JSON is told so
// at once rather than when a line has ended.
func (f *frameReader) line(first bool) (problem string, headerless bool, err error) {
	inName, gap, at := true, false, 0
	for ; ; at++ {
		c, err := f.byte()
		if err == io.EOF {
			err = io.ErrUnexpectedEOF
		}
		if err != nil {
			return "", false, err
		}
		f.head = append(f.head, c)
		switch {
		case len(f.head) > f.headerBytes:
			return fmt.Sprintf("it is longer than %d bytes", f.headerBytes), false, nil
		case c == '\n':
			if inName && len(bytes.TrimRight(f.head[len(f.head)-at-1:], " \t\r\n")) > 0 {
				return "a line has no colon", first, nil
			}
			return "", false, nil
		case !inName || c == '\r':
		case c == ':':
			if at == 0 {
				return "a line begins with a colon", first, nil
			}
			inName = false
		case c == ' ' || c == '\t':
			if at == 0 && !first {
				inName = false // a continued line, as in old mail headers
			}
			gap = true
		case gap || !inHeaderName[c]:
			return "a line is no header", first, nil
		}
	}
}

// inHeaderName marks the characters of a header's name (RFC 9110, token).
var inHeaderName = func() (t [256]bool) {
	for c := range t {
		b := byte(c)
		t[c] = isDigit(b) || 'a' <= b|0x20 && b|0x20 <= 'z' || strings.IndexByte("!#$%&'*+-.^_`|~", b) >= 0
	}
	return t
}()

// splitHeader gives name and value of a line; the name of a continued line is " ".
func splitHeader(line []byte) (name, value string) {
	if len(line) > 0 && (line[0] == ' ' || line[0] == '\t') && len(bytes.TrimSpace(line)) > 0 {
		return " ", ""
	}
	before, after, _ := bytes.Cut(line, []byte(":"))
	return string(bytes.TrimRight(before, " \t\r\n")), string(bytes.Trim(bytes.TrimSuffix(bytes.TrimSuffix(after, []byte("\n")), []byte("\r")), " \t"))
}

// parseLength reads a number of bytes; one that no 63 bits hold is the largest.
func parseLength(text string) (int64, bool) {
	var n int64
	for i := range len(text) {
		if !isDigit(text[i]) {
			return 0, false
		}
		n = appendDigit(n, text[i])
	}
	return n, text != ""
}

func appendDigit(n int64, digit byte) int64 {
	if n > (math.MaxInt64-9)/10 {
		return math.MaxInt64
	}
	return n*10 + int64(digit-'0')
}

// otherCharset gives the charset that a Content-Type names, if it is not UTF-8.
func otherCharset(value string) string {
	_, parameters, _ := strings.Cut(value, ";")
	for parameter := range strings.SplitSeq(parameters, ";") {
		name, charset, _ := strings.Cut(strings.TrimSpace(parameter), "=")
		charset = strings.Trim(strings.TrimSpace(charset), `"`)
		if strings.EqualFold(strings.TrimSpace(name), "charset") && !strings.EqualFold(charset, "utf-8") && !strings.EqualFold(charset, "utf8") {
			return charset
		}
	}
	return ""
}

// body reads a body, growing as it comes in.
func (f *frameReader) body(length int) ([]byte, *frameFault, error) {
	size := min(length, max(firstBody, f.w-f.r))
	body := make([]byte, 0, size)
	for len(body) < length {
		if len(body) == cap(body) {
			size = min(length, 4*len(body))
			if size > length/2 {
				size = length
			}
			body = append(make([]byte, 0, size), body...)
		}
		had := len(body)
		n, err := f.read(body[had:cap(body)])
		body = body[:had+n]
		if start := headerInside(body, had); start >= 0 {
			f.unread(body[start:])
			return nil, &frameFault{Error: headerFault("the next header came before the body had ended")}, nil
		}
		if err == io.EOF {
			err = io.ErrUnexpectedEOF
		}
		if err != nil && len(body) < length {
			return nil, nil, err
		}
	}
	return body, nil, nil
}

// byte gives the next byte of the input.
func (f *frameReader) byte() (byte, error) {
	for f.r == f.w {
		if f.err != nil {
			return 0, f.err
		}
		f.fill()
	}
	f.r++
	return f.buf[f.r-1], nil
}

// fill reads into the empty buffer.
func (f *frameReader) fill() {
	if len(f.buf) != frameBuffer {
		f.buf = make([]byte, frameBuffer)
	}
	f.r = 0
	f.w, f.err = f.in.Read(f.buf)
}

// read gives what is buffered, else what the input has.
func (f *frameReader) read(p []byte) (int, error) {
	if f.r < f.w {
		n := copy(p, f.buf[f.r:f.w])
		f.r += n
		return n, nil
	}
	if f.err != nil {
		return 0, f.err
	}
	if len(p) < frameBuffer {
		f.fill()
		n := copy(p, f.buf[:f.w])
		f.r = n
		return n, nil
	}
	var n int
	n, f.err = f.in.Read(p)
	return n, f.err
}

// unread puts bytes back before those still unused.
func (f *frameReader) unread(p []byte) {
	if f.r >= len(p) && bytes.Equal(f.buf[f.r-len(p):f.r], p) {
		f.r -= len(p)
		return
	}
	rest := f.buf[f.r:f.w]
	buf := make([]byte, 0, len(p)+len(rest))
	f.buf = append(append(buf, p...), rest...)
	f.r, f.w = 0, len(f.buf)
}
