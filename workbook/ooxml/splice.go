package ooxml

import "io"

// Value is what an edit puts into a cell. The zero Value empties the cell.
type Value struct {
	kind   valueKind
	number float64
	text   string
}

type valueKind uint8

const (
	valueEmpty valueKind = iota
	valueNumber
	valueText
	valueBool
)

// EmptyValue empties a cell and keeps its style.
func EmptyValue() Value { return Value{} }

// NumberValue is a number, written in the shortest form that reads back as the
// same double. It must be finite; -0 is written as 0.
func NumberValue(x float64) Value { return Value{kind: valueNumber, number: x} }

// BoolValue is TRUE or FALSE.
func BoolValue(x bool) Value {
	v := Value{kind: valueBool}
	if x {
		v.number = 1
	}
	return v
}

// TextValue is a text; the empty text empties the cell.
func TextValue(s string) Value {
	if s == "" {
		return Value{}
	}
	return Value{kind: valueText, text: s}
}

// Edit puts a value into a cell.
type Edit struct {
	Row, Col int
	Value    Value
}

// Splice copies the XML of a worksheet from src to dst with the edits made, and
// gives the number of cells that changed. Every other byte is kept: the cells'
// styles, the attributes of rows, all that stands around them. Rows and cells
// are added where there are none, with the style of their row or column, and
// the dimension grows with them. A cell that holds its edit's value already
// keeps its bytes, so that splicing the same edits again changes nothing.
// Text is written in the cell, never to the shared strings. XML in UTF-16 comes
// out in UTF-16.
//
// A cell with a formula, inside the range of an array formula, or inside a
// merged range but not first, is refused, as are two edits of one cell. What
// was written to dst by then is of no use.
//
// text gives the shared strings of the book, so that a cell that holds the
// same text already is left alone; it may be nil.
func Splice(dst io.Writer, src io.Reader, edits []Edit, text func(index int) (string, error)) (changed int, err error) {
	return 0, damaged("not read yet")
}

// Changes gives those of the edits that would change their cell, in order of
// rows and columns, and refuses those that Splice refuses.
func (b *Book) Changes(sheet int, edits []Edit) ([]Edit, error) { return nil, damaged("not read yet") }
