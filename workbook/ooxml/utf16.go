package ooxml

import (
	"bytes"
	"encoding/binary"
	"io"
	"unicode/utf16"
	"unicode/utf8"
)

// xmlReader gives the XML of a part as UTF-8. Parts are in UTF-8 or UTF-16
// (ECMA-376 part 2, 6.3.2); a byte-order mark or the first bytes of the XML tell
// which (XML 1.0, appendix F). order is nil for UTF-8.
func xmlReader(src io.Reader) (r io.Reader, order byteOrder, err error) {
	var head [4]byte
	n, err := io.ReadFull(src, head[:])
	if err != nil && err != io.EOF && err != io.ErrUnexpectedEOF {
		return nil, nil, err
	}
	r = &headReader{head: head[:n], src: src}
	switch {
	case n < 4:
		return r, nil, nil
	case head == [4]byte{0xFF, 0xFE, 0, 0}, head == [4]byte{0, 0, 0xFE, 0xFF}, head == [4]byte{'<', 0, 0, 0}, head == [4]byte{0, 0, 0, '<'}:
		return nil, nil, damaged("the part is in UTF-32; only UTF-8 and UTF-16 are allowed")
	case head[0] == 0xFF && head[1] == 0xFE, head[0] == '<' && head[1] == 0:
		order = binary.LittleEndian
	case head[0] == 0xFE && head[1] == 0xFF, head[0] == 0 && head[1] == '<':
		order = binary.BigEndian
	default:
		return r, nil, nil
	}
	return &utf16Reader{src: r, order: order, in: make([]byte, 0, 16<<10)}, order, nil
}

// xmlBytes gives the XML of a part that is in memory as UTF-8.
func xmlBytes(data []byte) ([]byte, byteOrder, error) {
	r, order, err := xmlReader(bytes.NewReader(data))
	if err != nil || order == nil {
		return data, order, err
	}
	data, err = io.ReadAll(r)
	return data, order, err
}

// byteOrder is the order of the bytes of UTF-16.
type byteOrder interface {
	binary.ByteOrder
	binary.AppendByteOrder
}

// headReader gives back bytes that were read ahead.
type headReader struct {
	head []byte
	src  io.Reader
}

func (h *headReader) Read(b []byte) (int, error) {
	if len(h.head) > 0 {
		n := copy(b, h.head)
		h.head = h.head[n:]
		return n, nil
	}
	return h.src.Read(b)
}

// utf16Reader turns UTF-16 into UTF-8 without loss; what has no UTF-8 is refused.
type utf16Reader struct {
	src   io.Reader
	order byteOrder
	in    []byte // bytes read and not yet turned
	out   []byte // bytes turned and not yet handed out
	store []byte // where out lies
	err   error
}

func (u *utf16Reader) Read(b []byte) (int, error) {
	for len(u.out) == 0 {
		if u.err != nil {
			return 0, u.err
		}
		n, err := u.src.Read(u.in[len(u.in):cap(u.in)])
		u.in = u.in[:len(u.in)+n]
		if turned := u.turn(); turned != nil {
			err = turned
		} else if err == io.EOF && len(u.in) > 0 {
			err = damaged("the part's UTF-16 ends in the middle of a character")
		}
		u.err = err
	}
	n := copy(b, u.out)
	u.out = u.out[n:]
	return n, nil
}

func (u *utf16Reader) turn() error {
	u.store = u.store[:0]
	i := 0
	for i+2 <= len(u.in) {
		c := rune(u.order.Uint16(u.in[i:]))
		width := 2
		if utf16.IsSurrogate(c) {
			if i+4 > len(u.in) {
				break
			}
			if c = utf16.DecodeRune(c, rune(u.order.Uint16(u.in[i+2:]))); c == utf8.RuneError {
				return damaged("the part's UTF-16 has half a character")
			}
			width = 4
		}
		u.store = utf8.AppendRune(u.store, c)
		i += width
	}
	u.out = u.store
	u.in = u.in[:copy(u.in, u.in[i:])]
	return nil
}

// utf16Writer turns UTF-8 into UTF-16. Runes may be split between writes.
type utf16Writer struct {
	dst   io.Writer
	order byteOrder
	part  []byte // the start of a split rune
	out   []byte
}

func (u *utf16Writer) Write(b []byte) (int, error) {
	size := len(b)
	if len(u.part) > 0 {
		b = append(u.part, b...)
	}
	u.out = u.out[:0]
	for len(b) > 0 && utf8.FullRune(b) {
		c, n := utf8.DecodeRune(b)
		if high, low := utf16.EncodeRune(c); high != utf8.RuneError {
			u.out = u.order.AppendUint16(u.out, uint16(high))
			c = low
		}
		u.out = u.order.AppendUint16(u.out, uint16(c))
		b = b[n:]
	}
	u.part = append([]byte(nil), b...)
	if _, err := u.dst.Write(u.out); err != nil {
		return 0, err
	}
	return size, nil
}
