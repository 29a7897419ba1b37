package calculation

import (
	"slices"
	"strconv"
	"strings"
	"unicode/utf8"
)

// Span is a stretch of a text, in bytes: from Start up to, not including, End.
type Span struct{ Start, End int }

// UTF16 gives the span of the same stretch in UTF-16 units, as editors count.
func (s Span) UTF16(text string) Span {
	return Span{ByteToUTF16(text, s.Start), ByteToUTF16(text, s.End)}
}

// ByteToUTF16 converts a byte offset of a text to UTF-16 units.
func ByteToUTF16(text string, offset int) int {
	n := 0
	for i, r := range text {
		if i >= offset {
			return n
		}
		n += utf16Len(r)
	}
	return n
}

// UTF16ToByte converts an offset in UTF-16 units to bytes; inside a pair of
// units it gives the start of their character, past the end the end.
func UTF16ToByte(text string, units int) int {
	n := 0
	for i, r := range text {
		n += utf16Len(r)
		if n > units {
			return i
		}
	}
	return len(text)
}

func utf16Len(r rune) int {
	if r >= 0x10000 {
		return 2
	}
	return 1
}

// ByteToCharacter converts a byte offset to the number of the character there,
// from 1, as messages count.
func ByteToCharacter(text string, offset int) int {
	return utf8.RuneCountInString(text[:min(offset, len(text))]) + 1
}

// Lines converts between offsets of a text and lines with columns in UTF-16
// units, both from 0, as editors count. A line ends with \n, \r\n or \r.
type Lines struct {
	text   string
	starts []int
}

// NewLines finds the lines of a text.
func NewLines(text string) *Lines {
	l := &Lines{text: text, starts: []int{0}}
	for i := 0; i < len(text); i++ {
		if text[i] == '\n' || text[i] == '\r' && (i+1 == len(text) || text[i+1] != '\n') {
			l.starts = append(l.starts, i+1)
		}
	}
	return l
}

// ByteToLine gives the line and the column of a byte offset.
func (l *Lines) ByteToLine(offset int) (line, column int) {
	offset = max(0, min(offset, len(l.text)))
	line, found := slices.BinarySearch(l.starts, offset)
	if !found {
		line--
	}
	return line, ByteToUTF16(l.text[l.starts[line]:], offset-l.starts[line])
}

// LineToByte gives the byte offset of a column of a line; past the end of the
// line that end, past the last line the end of the text.
func (l *Lines) LineToByte(line, column int) int {
	if line >= len(l.starts) {
		return len(l.text)
	}
	line = max(0, line)
	end := len(l.text)
	if line+1 < len(l.starts) {
		end = l.starts[line+1]
	}
	content := strings.TrimRight(l.text[l.starts[line]:end], "\r\n")
	return l.starts[line] + UTF16ToByte(content, max(0, column))
}

// The greatest sheet of the format (ECMA-376 part 1, 18.3.1.73 and 18.3.1.4).
const (
	MaxRow = 1048576
	MaxCol = 16384
)

// CellRef is the row and the column of a cell, from 1.
type CellRef struct{ Row, Col int }

// String writes the address, such as C7.
func (c CellRef) String() string { return ColumnLetters(c.Col) + strconv.Itoa(c.Row) }

// ColumnLetters writes the letters of a column, such as C.
func ColumnLetters(col int) string {
	var b [4]byte
	i := len(b)
	for ; col > 0 && i > 0; col = (col - 1) / 26 {
		i--
		b[i] = byte('A' + (col-1)%26)
	}
	return string(b[i:])
}

// Area is a rectangle of cells, ends included. WholeCols and WholeRows say that
// it was written as C:D or 3:4, so that it ends where the sheet's values end.
type Area struct {
	FirstRow, FirstCol, LastRow, LastCol int
	WholeCols, WholeRows                 bool
}

// String writes the area as A1 references do: C2:C61, C7, C:C, 3:3.
func (a Area) String() string {
	switch {
	case a.WholeCols:
		return ColumnLetters(a.FirstCol) + ":" + ColumnLetters(a.LastCol)
	case a.WholeRows:
		return strconv.Itoa(a.FirstRow) + ":" + strconv.Itoa(a.LastRow)
	case a.Single():
		return CellRef{a.FirstRow, a.FirstCol}.String()
	}
	return CellRef{a.FirstRow, a.FirstCol}.String() + ":" + CellRef{a.LastRow, a.LastCol}.String()
}

// Single reports whether the area is one cell.
func (a Area) Single() bool { return a.FirstRow == a.LastRow && a.FirstCol == a.LastCol }

// Contains reports whether the cell lies in the area.
func (a Area) Contains(c CellRef) bool {
	return a.FirstRow <= c.Row && c.Row <= a.LastRow && a.FirstCol <= c.Col && c.Col <= a.LastCol
}

// within gives the part of the area down to a last row and column.
func (a Area) within(lastRow, lastCol int) Area {
	a.LastRow, a.LastCol = min(a.LastRow, lastRow), min(a.LastCol, lastCol)
	return a
}

// ParseArea reads C2:C61, C7, C:D or 3:4, with or without dollar signs, letters
// in either case, corners in either order.
func ParseArea(s string) (Area, bool) {
	first, last, isRange := strings.Cut(s, ":")
	r1, c1, ok := parseCorner(first)
	if !ok {
		return Area{}, false
	}
	if !isRange {
		return Area{FirstRow: r1, FirstCol: c1, LastRow: r1, LastCol: c1}, r1 > 0 && c1 > 0
	}
	r2, c2, ok := parseCorner(last)
	if !ok || (r1 == 0) != (r2 == 0) || (c1 == 0) != (c2 == 0) {
		return Area{}, false
	}
	a := Area{FirstRow: min(r1, r2), LastRow: max(r1, r2), FirstCol: min(c1, c2), LastCol: max(c1, c2)}
	if r1 == 0 {
		a.WholeCols, a.FirstRow, a.LastRow = true, 1, MaxRow
	}
	if c1 == 0 {
		a.WholeRows, a.FirstCol, a.LastCol = true, 1, MaxCol
	}
	return a, true
}

// ParseCell reads the address of one cell.
func ParseCell(s string) (CellRef, bool) {
	row, col, ok := parseCorner(s)
	return CellRef{row, col}, ok && row > 0 && col > 0
}

// parseCorner reads C7, C or 7; what is left out is 0.
func parseCorner(s string) (row, col int, ok bool) {
	i := 0
	if i < len(s) && s[i] == '$' {
		i++
	}
	letters := i
	for i < len(s) && 'a' <= s[i]|0x20 && s[i]|0x20 <= 'z' {
		col = col*26 + int(s[i]|0x20-'a') + 1
		if i++; i-letters > 3 {
			return 0, 0, false
		}
	}
	if i > letters && i < len(s) && s[i] == '$' {
		i++
	}
	digits := i
	for i < len(s) && '0' <= s[i] && s[i] <= '9' {
		row = row*10 + int(s[i]-'0')
		if i++; i-digits > 7 {
			return 0, 0, false
		}
	}
	leadingZero := i > digits && s[digits] == '0'
	dangling := i > 0 && s[i-1] == '$'
	return row, col, i == len(s) && i > 0 && !leadingZero && !dangling && row <= MaxRow && col <= MaxCol
}
