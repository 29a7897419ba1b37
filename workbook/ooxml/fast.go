package ooxml

import "bytes"

// The fast paths read rows and cells that are written the way programs write
// them: double quotes, single spaces, the attributes in any order, values
// without references. They change nothing and step back for everything else,
// mistakes included, which the general path then reads or refuses. Both give
// the same results; a test holds them against each other.

// maxFastPrefix is the longest namespace prefix that the fast paths take, so
// that they stay within the padding when they look ahead.
const maxFastPrefix = 16

// maxFastTail is how far before the end of the block a step back may come from
// the block's end and not from what is written there.
const maxFastTail = 4 << 10

type fastResult uint8

const (
	fastNot  fastResult = iota // to be read by the general path
	fastGot                    // a cell was read
	fastDone                   // the row's end tag was read
)

// rowAttribute gives one bit for each attribute of a row that may be passed over
// or is read here, and 0 for all others.
func rowAttribute(name []byte) uint16 {
	switch string(name) {
	case "r":
		return rowNumber
	case "hidden":
		return rowHidden
	case "spans":
		return 4
	case "s":
		return 8
	case "customFormat":
		return 16
	case "ht":
		return 32
	case "customHeight":
		return 64
	case "outlineLevel":
		return 128
	case "collapsed":
		return 256
	case "thickTop":
		return 512
	case "thickBot":
		return 1024
	case "ph":
		return 2048
	case "x14ac:dyDescent":
		return 4096
	}
	return 0
}

const rowNumber, rowHidden = 1, 2

// fastRow reads the start tag of a row at pos.
func (s *scanner) fastRow() bool {
	if s.careful || s.single || len(s.prefix) > maxFastPrefix {
		return false
	}
	for {
		i := s.pos
		for isXMLSpace(s.buf[i]) {
			i++
		}
		if next, number, hidden, ok := s.rowTagAt(i); ok {
			if number < 1 || number > s.limits.Rows || s.rowSeen(number) || s.plan.wants(number) {
				return false
			}
			s.resetRow()
			s.row.Hidden = hidden
			s.rowTag = tagAt{from: s.offset(i), to: s.offset(next), style: -1}
			s.open(s.buf[i+1 : i+1+len(s.prefix)+len("row")])
			s.start, s.pos = i, next
			s.fast = true
			s.takeRow(number)
			return true
		}
		s.start = s.pos
		if s.end-s.pos > maxFastTail || !s.fill() {
			return false
		}
	}
}

// rowTagAt reads the start tag of a row at an index of buf.
func (s *scanner) rowTagAt(i int) (next, number int, hidden, ok bool) {
	b := s.buf
	if b[i] != '<' {
		return 0, 0, false, false
	}
	i++
	if !bytes.HasPrefix(b[i:], s.prefix) {
		return 0, 0, false, false
	}
	i += len(s.prefix)
	if b[i] != 'r' || b[i+1] != 'o' || b[i+2] != 'w' {
		return 0, 0, false, false
	}
	i += 3
	var seen uint16
	for b[i] == ' ' {
		i++
		from := i
		for isLetter(b[i]) || b[i] == ':' || '0' <= b[i] && b[i] <= '9' {
			i++
		}
		bit := rowAttribute(b[from:i])
		if bit == 0 || seen&bit != 0 || b[i] != '=' || b[i+1] != '"' {
			return 0, 0, false, false
		}
		seen |= bit
		i += 2
		from = i
		for b[i] != '"' {
			if b[i] == '<' || b[i] == 0 {
				return 0, 0, false, false
			}
			i++
		}
		switch value := b[from:i]; bit {
		case rowNumber:
			if number, ok = parseIndex(value); !ok || number == 0 {
				return 0, 0, false, false
			}
		case rowHidden:
			hidden = len(value) == 1 && value[0] == '1'
			if !hidden && (len(value) != 1 || value[0] != '0') {
				return 0, 0, false, false
			}
		}
		i++
	}
	return i + 1, number, hidden, b[i] == '>' && seen&rowNumber != 0
}
