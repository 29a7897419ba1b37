package ooxml

import (
	"bytes"
	"fmt"
	"math"
)

// stringTable is the shared strings part: its XML, and where each string lies.
// Strings are decoded when they are asked for.
type stringTable struct {
	data    []byte // the part, followed by padding
	decoded []byte // texts that the part does not hold as they are
	items   []stringItem
	limits  Limits
}

// stringItem says where a shared string lies: in data where its text needs no
// decoding, else in decoded, whose places count on from the end of data.
type stringItem struct{ from, to uint32 }

// sharedStrings loads the table once.
func (b *Book) sharedStrings() (*stringTable, error) {
	b.stringsOnce.Do(func() {
		if b.stringPart < 0 {
			b.strings = &stringTable{}
			return
		}
		data, _, err := b.document(b.stringPart)
		if err == nil {
			b.strings, err = newStringTable(data, b.limits)
		}
		b.stringsErr = place(err, b.file, b.name(b.stringPart), "")
	})
	return b.strings, b.stringsErr
}

// newStringTable passes once over the part.
func newStringTable(data []byte, limits Limits) (*stringTable, error) {
	// What is decoded is no longer than what it is decoded from.
	if 2*uint64(len(data))+padding > math.MaxUint32 {
		return nil, beyond("the shared strings are longer than 2 GiB", "HeldBytes")
	}
	x := ownLexer(data, limits)
	t := &stringTable{data: x.buf, limits: limits}
	if err := x.next(); err != nil {
		return nil, err
	}
	for x.kind == tokenText {
		if err := x.next(); err != nil {
			return nil, err
		}
	}
	if !x.is("sst") {
		return nil, x.wrong("the part holds a <%.40s>, not shared strings", x.local)
	}
	prefixed := bytes.IndexByte(x.name, ':') >= 0
	for {
		for !prefixed && t.plainItem(x) {
		}
		if err := x.next(); err != nil {
			return nil, err
		}
		switch {
		case x.kind == tokenEOF:
			return t, nil
		case x.kind == tokenStart && x.depth() == 2 && x.is("si"):
			from := len(t.decoded)
			decoded, err := x.richText(t.decoded)
			if err != nil {
				return nil, err
			}
			t.decoded = decoded
			t.items = append(t.items, stringItem{from: uint32(len(t.data) + from), to: uint32(len(t.data) + len(decoded))})
		case x.kind == tokenStart && x.depth() == 2:
			if err := x.stray(); err != nil {
				return nil, err
			}
		}
	}
}

// plainItem takes an item of the form <si><t>text</t></si> whose text needs no
// decoding, as nearly all are.
func (t *stringTable) plainItem(x *lexer) bool {
	b, i := x.buf, x.pos
	if x.depth() != 1 || x.single || !bytes.HasPrefix(b[i:], []byte("<si><t")) {
		return false
	}
	i += len("<si><t")
	if bytes.HasPrefix(b[i:], []byte(` xml:space="preserve"`)) {
		i += len(` xml:space="preserve"`)
	}
	if b[i] != '>' {
		return false
	}
	i++
	n := bytes.IndexByte(b[i:x.end], '<')
	if n < 0 || !bytes.HasPrefix(b[i+n:], []byte("</t></si>")) || n > t.limits.TextLength || !plain(b[i:i+n]) {
		return false
	}
	t.items = append(t.items, stringItem{uint32(i), uint32(i + n)})
	x.pos = i + n + len("</t></si>")
	return true
}

// bytes gives the text of the string with this index, which must exist.
func (t *stringTable) bytes(index int) []byte {
	item, held := t.items[index], uint32(len(t.data))
	if item.from >= held {
		return t.decoded[item.from-held : item.to-held]
	}
	return t.data[item.from:item.to]
}

func (t *stringTable) string(index int) string { return string(t.bytes(index)) }

// richText reads on to the end of the current element, a string item or an
// inline string, and appends its text: that of its own <t> and of the <t> of
// its runs, phonetic runs left out (ECMA-376 part 1, 18.4.8).
func (x *lexer) richText(dst []byte) ([]byte, error) {
	depth, from := x.depth(), len(dst)
	for {
		if err := x.next(); err != nil {
			return dst, err
		}
		switch {
		case x.kind == tokenEnd && x.depth() < depth:
			return dst, checkLength(dst[from:], x.limits)
		case x.kind != tokenStart:
		case x.is("t"):
			var err error
			if dst, err = x.elementText(dst); err != nil {
				return dst, err
			}
		case x.is("r") && x.depth() == depth+1:
		case x.is("rPr") || x.is("rPh") || x.is("phoneticPr"):
			if err := x.skip(); err != nil {
				return dst, err
			}
		default:
			if err := x.stray(); err != nil {
				return dst, err
			}
		}
	}
}

// elementText reads on to the end of the current element and appends its
// text, checked and with _xHHHH_ decoded.
func (x *lexer) elementText(dst []byte) ([]byte, error) {
	depth, from := x.depth(), len(dst)
	for {
		err := x.next()
		if err != nil {
			return dst, err
		}
		switch {
		case x.kind == tokenEnd && x.depth() < depth:
			if err := x.checkText(dst[from:]); err != nil {
				return dst, err
			}
			return dst[:from+len(unescape(dst[from:]))], nil
		case x.kind == tokenStart:
			if err := x.stray(); err != nil {
				return dst, err
			}
		case x.kind == tokenText && x.depth() == depth:
			if dst, err = x.appendText(dst, x.text, x.literal); err != nil {
				return dst, err
			}
		}
	}
}

// SharedString gives the text of a shared string: rich text as plain text,
// phonetic text left out.
func (b *Book) SharedString(index int) (string, error) {
	t, err := b.sharedStrings()
	if err != nil {
		return "", err
	}
	if index < 0 || index >= len(t.items) {
		e := damaged(outOfTable(index, len(t.items)))
		e.File = b.file
		return "", e
	}
	return t.string(index), nil
}

// SharedStrings counts the shared strings.
func (b *Book) SharedStrings() (int, error) {
	t, err := b.sharedStrings()
	if err != nil {
		return 0, err
	}
	return len(t.items), nil
}

// CellText gives the text of a cell of a text type or of an error, and an
// empty text for other types. The cell must come from a scan of this book.
func (b *Book) CellText(c *Cell) (string, error) {
	switch c.Type {
	case TypeShared:
		return b.SharedString(int(c.Index))
	case TypeInline, TypeString, TypeError:
		return string(c.Text), nil
	}
	return "", nil
}

func outOfTable(index, count int) string {
	return fmt.Sprintf("the cell points to shared string %d, of %d", index, count)
}

// empty tells whether the string with this index, which must exist, is empty.
func (t *stringTable) empty(index int) bool {
	return t.items[index].from == t.items[index].to
}
