package ooxml

import (
	"bytes"
	"fmt"
	"io"
	"strings"
)

type tokenKind uint8

const (
	tokenEOF tokenKind = iota
	tokenStart
	tokenEnd
	tokenText
)

// lexer splits the XML of one part into tags and texts, block by block, and
// knows at which byte each of them stands. Comments and processing
// instructions are passed over. It checks that tags pair up, that attributes
// are quoted and given once, and that nothing stands outside the root.
type lexer struct {
	src    io.Reader // nil once it has ended
	buf    []byte    // the block, and padding zeros after end
	pos    int       // the next byte to look at
	end    int       // the end of the bytes read
	keep   int       // bytes from here on stay in the block; -1: none but the token's
	base   int64     // the place in the part of buf[0]
	err    error     // why src ended early
	unread error     // err, where it came from src
	limits Limits
	lent   *[]byte // the block, where it is to be given back
	step   int     // how much was asked for last

	// The current token. Its slices are good until the next call.
	kind    tokenKind
	start   int // where its first byte is in buf
	name    []byte
	local   []byte // the name without its prefix
	space   namespace
	attrs   []attr
	single  bool // a start tag that is its own end
	text    []byte
	literal bool // text in a CDATA section: no references

	names    []byte // the names of the open elements, one after another
	opens    []int  // where each of them starts in names
	spaces   []binding
	rootSeen bool
}

// blockSize is how much of a part is in memory at once, as long as no single
// tag or text is longer.
const blockSize = 128 << 10

// padding is how many zeros follow the last byte, so that the fast paths may
// look a few bytes ahead without asking whether there are any.
const padding = 64

// firstRead is how much of a part is read at first.
const firstRead = 32 << 10

// newLexer reads UTF-8 XML from src, size bytes at a time.
func newLexer(src io.Reader, size int, limits Limits) *lexer {
	x := &lexer{src: src, keep: -1, limits: limits}
	if size == blockSize {
		x.lent = blocks.Get().(*[]byte)
		x.buf = *x.lent
		clear(x.buf[:padding])
	} else {
		x.buf = make([]byte, size+padding)
	}
	return x
}

// release gives a lent block back. The lexer must not be used any more.
func (x *lexer) release() {
	if x.lent != nil {
		blocks.Put(x.lent)
		x.lent, x.buf = nil, nil
	}
}

// dataLexer reads XML that is in memory. It needs its own copy for the padding.
func dataLexer(data []byte, limits Limits) *lexer {
	buf := make([]byte, len(data)+padding)
	copy(buf, data)
	return &lexer{buf: buf, end: len(data), keep: -1, limits: limits}
}

// ownLexer reads XML that is in memory and whose owner does not use it any more;
// it needs no copy where there is room for the padding.
func ownLexer(data []byte, limits Limits) *lexer {
	if cap(data)-len(data) < padding {
		return dataLexer(data, limits)
	}
	buf := data[:len(data)+padding]
	clear(buf[len(data):])
	return &lexer{buf: buf, end: len(data), keep: -1, limits: limits}
}

// fill reads more bytes behind end. Indexes into buf move by the change of base.
// It is false at the end of the part or after an error.
func (x *lexer) fill() bool {
	if x.src == nil {
		return false
	}
	from := x.start
	if x.keep >= 0 && x.keep < from {
		from = x.keep
	}
	if from > 0 {
		copy(x.buf, x.buf[from:x.end])
		x.base += int64(from)
		x.start -= from
		x.pos -= from
		x.end -= from
		if x.keep >= 0 {
			x.keep -= from
		}
	}
	room := len(x.buf) - padding
	if x.end == room {
		if room >= x.limits.TokenBytes+blockSize {
			x.src = nil
			x.err = beyond(fmt.Sprintf("one tag or text is longer than %d bytes", x.limits.TokenBytes), "TokenBytes")
			return false
		}
		larger := make([]byte, 2*room+padding)
		copy(larger, x.buf[:x.end])
		x.buf = larger
		room *= 2
	}
	// The first reads are small: often only the head of a part is wanted.
	x.step = min(max(2*x.step, firstRead), blockSize)
	n, err := io.ReadFull(x.src, x.buf[x.end:min(room, x.end+x.step)])
	x.end += n
	clear(x.buf[x.end : x.end+padding])
	if err != nil {
		x.src = nil
		if err != io.EOF && err != io.ErrUnexpectedEOF {
			x.err, x.unread = err, err
			return false
		}
	}
	return n > 0
}

// have tells whether n bytes follow pos.
func (x *lexer) have(n int) bool {
	for x.end-x.pos < n {
		if !x.fill() {
			return false
		}
	}
	return true
}

// find gives the distance from pos to the next mark, at least from bytes away.
func (x *lexer) find(mark string, from int) (int, error) {
	for {
		if x.pos+from < x.end {
			block := x.buf[x.pos+from : x.end]
			var i int
			if len(mark) == 1 {
				i = bytes.IndexByte(block, mark[0])
			} else {
				i = bytes.Index(block, []byte(mark))
			}
			if i >= 0 {
				return from + i, nil
			}
			from = max(from, x.end-x.pos-len(mark)+1)
		}
		if !x.fill() {
			return 0, x.early()
		}
	}
}

// early is the error for XML that stops before it is complete.
func (x *lexer) early() error {
	if x.err != nil {
		return x.err
	}
	return damaged(fmt.Sprintf("the XML ends early, after %d bytes", x.base+int64(x.end)))
}

// wrong is the error for XML that is not well formed at the current token.
func (x *lexer) wrong(format string, args ...any) error {
	return damaged(fmt.Sprintf(format, args...) + fmt.Sprintf(" (byte %d)", x.base+int64(x.start)))
}

// next moves on to the next start tag, end tag, text, or the end of the part.
// A tag that is its own end comes as a start and an end.
func (x *lexer) next() error {
	if x.single {
		x.start = x.pos
		x.endElement()
		return nil
	}
	for {
		x.start = x.pos
		if !x.have(1) {
			return x.finish()
		}
		if x.buf[x.pos] != '<' {
			if x.base+int64(x.pos) == 0 && x.have(3) && string(x.buf[x.pos:x.pos+3]) == "\xEF\xBB\xBF" {
				x.pos += 3
				continue
			}
			return x.charData()
		}
		if !x.have(2) {
			return x.early()
		}
		var err error
		switch x.buf[x.pos+1] {
		case '/':
			return x.endTag()
		case '?':
			err = x.instruction()
		case '!':
			if x.have(9) && string(x.buf[x.pos:x.pos+9]) == "<![CDATA[" {
				return x.cdata()
			}
			err = x.comment()
		default:
			return x.startTag()
		}
		if err != nil {
			return err
		}
	}
}

// nextIn is next within an element of a depth that holds no text itself, as all
// do that hold cells or lists: text there is a value that lost its tag.
func (x *lexer) nextIn(depth int) error {
	if err := x.next(); err != nil {
		return err
	}
	if x.kind == tokenText && x.depth() == depth && len(trimSpace(x.text)) > 0 {
		return x.wrong("the text %.40q stands where it has no place", trimSpace(x.text))
	}
	return nil
}

// finish ends the part, if all that was opened is closed.
func (x *lexer) finish() error {
	if x.err != nil || len(x.opens) > 0 || !x.rootSeen {
		return x.early()
	}
	x.kind = tokenEOF
	return nil
}

func (x *lexer) charData() error {
	n, err := x.find("<", 0)
	if err != nil {
		if x.err != nil || len(x.opens) > 0 {
			return err
		}
		n = x.end - x.pos
	}
	x.kind, x.literal = tokenText, false
	x.text = x.buf[x.pos : x.pos+n]
	if len(x.opens) == 0 && len(trimSpace(x.text)) > 0 {
		return x.wrong("text stands outside the XML's root element")
	}
	x.pos += n
	return nil
}

func (x *lexer) cdata() error {
	n, err := x.find("]]>", 9)
	if err != nil {
		return err
	}
	if len(x.opens) == 0 {
		return x.wrong("text stands outside the XML's root element")
	}
	x.kind, x.literal = tokenText, true
	x.text = x.buf[x.pos+9 : x.pos+n]
	x.pos += n + 3
	return nil
}

func (x *lexer) comment() error {
	if !x.have(4) {
		return x.early()
	}
	if string(x.buf[x.pos:x.pos+4]) != "<!--" {
		if x.have(9) && string(x.buf[x.pos:x.pos+9]) == "<!DOCTYPE" {
			return x.wrong("the part declares a document type (DOCTYPE), which a workbook must not do")
		}
		return x.wrong("a tag starts with <! and is neither a comment nor a CDATA section")
	}
	n, err := x.find("-->", 4)
	if err != nil {
		return err
	}
	x.pos += n + 3
	return nil
}

func (x *lexer) instruction() error {
	n, err := x.find("?>", 2)
	if err != nil {
		return err
	}
	body := string(x.buf[x.pos+2 : x.pos+n])
	if strings.HasPrefix(body, "xml ") {
		if _, rest, ok := strings.Cut(body, "encoding"); ok {
			rest = strings.TrimLeft(rest, " \t\r\n=")
			if len(rest) > 1 {
				name, _, _ := strings.Cut(rest[1:], rest[:1])
				switch strings.ToLower(name) {
				case "utf-8", "utf8", "utf-16", "utf-16le", "utf-16be", "us-ascii", "ascii":
				default:
					return x.wrong("the part's encoding is %.40q; only UTF-8 and UTF-16 are allowed", name)
				}
			}
		}
	}
	x.pos += n + 2
	return nil
}

func (x *lexer) endTag() error {
	n, err := x.find(">", 2)
	if err != nil {
		return err
	}
	name := bytes.TrimRight(x.buf[x.pos+2:x.pos+n], " \t\r\n")
	if len(x.opens) == 0 {
		return x.wrong("the end tag </%.40s> ends nothing", name)
	}
	if open := x.names[x.opens[len(x.opens)-1]:]; !bytes.Equal(name, open) {
		return x.wrong("the end tag </%.40s> does not end <%.40s>", name, open)
	}
	x.pos += n + 1
	x.endElement()
	return nil
}

// endElement makes the end of the innermost element the current token.
func (x *lexer) endElement() {
	x.kind, x.single = tokenEnd, false
	x.name = x.names[x.opens[len(x.opens)-1]:]
	x.split()
	x.close()
}

// close takes the innermost element off the open ones.
func (x *lexer) close() {
	depth := len(x.opens)
	x.names = x.names[:x.opens[depth-1]]
	x.opens = x.opens[:depth-1]
	for i := len(x.spaces); i > 0 && x.spaces[i-1].depth == depth; i-- {
		x.spaces = x.spaces[:i-1]
	}
}

// open puts an element on the open ones.
func (x *lexer) open(name []byte) {
	x.opens = append(x.opens, len(x.names))
	x.names = append(x.names, name...)
}

// depth counts the open elements.
func (x *lexer) depth() int { return len(x.opens) }

// skip passes over the rest of the element whose start tag is the current token.
func (x *lexer) skip() error {
	depth := len(x.opens)
	for {
		if err := x.next(); err != nil {
			return err
		}
		if x.kind == tokenEnd && len(x.opens) < depth {
			return nil
		}
	}
}

// is tells whether the current token is a tag of the spreadsheet namespace with
// this name.
func (x *lexer) is(local string) bool {
	return x.space == spaceMain && string(x.local) == local
}

// offset is the place in the part of an index into buf.
func (x *lexer) offset(i int) int64 { return x.base + int64(i) }

func trimSpace(b []byte) []byte { return bytes.Trim(b, " \t\r\n") }
