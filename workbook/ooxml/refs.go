package ooxml

import (
	"strconv"
	"strings"
)

// Range is a rectangle of cells, ends included, counted from 1.
type Range struct {
	FirstRow, FirstCol, LastRow, LastCol int
}

// Contains tells whether the cell lies in the range.
func (r Range) Contains(row, col int) bool {
	return r.FirstRow <= row && row <= r.LastRow && r.FirstCol <= col && col <= r.LastCol
}

// String writes the range as A1:B2, or as A1 where it is one cell.
func (r Range) String() string {
	first := CellName(r.FirstRow, r.FirstCol)
	if r.FirstRow == r.LastRow && r.FirstCol == r.LastCol {
		return first
	}
	return first + ":" + CellName(r.LastRow, r.LastCol)
}

// CellName writes a cell's address, such as C7.
func CellName(row, col int) string {
	var b [16]byte
	return string(appendCellName(b[:0], row, col))
}

// ColumnName writes a column's letters, such as C. It is empty for a column
// below 1.
func ColumnName(col int) string {
	var b [16]byte
	return string(appendColumnName(b[:0], col))
}

func appendCellName(b []byte, row, col int) []byte {
	return strconv.AppendInt(appendColumnName(b, col), int64(row), 10)
}

func appendColumnName(b []byte, col int) []byte {
	var letters [8]byte
	i := len(letters)
	for ; col > 0 && i > 0; col = (col - 1) / 26 {
		i--
		letters[i] = byte('A' + (col-1)%26)
	}
	return append(b, letters[i:]...)
}

// ParseCell reads an address such as C7 or $C$7, letters in either case. It is
// false for anything else and for cells outside the format's greatest sheet.
func ParseCell(s string) (row, col int, ok bool) {
	s = strings.TrimPrefix(s, "$")
	i := 0
	for i < len(s) && isLetter(s[i]) {
		i++
	}
	if i < len(s) && i > 0 && s[i] == '$' {
		s = s[:i] + s[i+1:]
	}
	return parseCell([]byte(s))
}

func isLetter(c byte) bool { return 'a' <= c|0x20 && c|0x20 <= 'z' }

// parseCell reads the reference of a cell element: letters, then digits.
func parseCell(b []byte) (row, col int, ok bool) {
	i := 0
	for i < len(b) && isLetter(b[i]) {
		col = col*26 + int(b[i]|0x20-'a') + 1
		if i++; i > 3 {
			return 0, 0, false
		}
	}
	if i == 0 || i == len(b) || len(b)-i > 7 || b[i] == '0' {
		return 0, 0, false
	}
	for ; i < len(b); i++ {
		if b[i] < '0' || b[i] > '9' {
			return 0, 0, false
		}
		row = row*10 + int(b[i]-'0')
	}
	return row, col, row <= maxRows && col <= maxColumns
}

// ParseRange reads A1:B2 or A1, with or without $ signs. The corners may come
// in any order. It is false for anything else.
func ParseRange(s string) (Range, bool) {
	first, last, two := strings.Cut(s, ":")
	row1, col1, ok := ParseCell(first)
	if !ok {
		return Range{}, false
	}
	row2, col2 := row1, col1
	if two {
		if row2, col2, ok = ParseCell(last); !ok {
			return Range{}, false
		}
	}
	return Range{min(row1, row2), min(col1, col2), max(row1, row2), max(col1, col2)}, true
}
