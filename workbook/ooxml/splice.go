package ooxml

import (
	"bytes"
	"fmt"
	"io"
	"math"
	"unicode/utf8"
)

// maxText is the longest text of a cell, in UTF-16 units.
const maxText = 32767

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
// merged range but not first, is refused, as are two edits of one cell; nothing
// is written to dst then.
//
// text gives the shared strings of the book, so that a cell that holds the
// same text already is left alone; it may be nil.
func Splice(dst io.Writer, src io.Reader, edits []Edit, text func(index int) (string, error)) (changed int, err error) {
	data, err := io.ReadAll(src)
	if err != nil {
		return 0, err
	}
	r, _, err := xmlReader(bytes.NewReader(data))
	if err != nil {
		return 0, err
	}
	p, err := newPlanner(edits, text)
	if err != nil {
		return 0, err
	}
	limits := Limits{}.WithDefaults()
	s := newScanner(newLexer(r, min(len(data)+1, blockSize), limits), ScanOptions{Columns: new(Columns)}, nil)
	s.plan = p
	if err := s.run(); err != nil {
		return 0, err
	}
	if err := p.finish(&s.facts); err != nil {
		return 0, err
	}
	return len(p.changed), p.splice(dst, bytes.NewReader(data))
}

// Changes gives those of the edits that would change their cell, in order of
// rows and columns, and refuses those that Splice refuses.
func (b *Book) Changes(sheet int, edits []Edit) ([]Edit, error) {
	p, err := b.plan(sheet, edits)
	if err != nil {
		return nil, err
	}
	return p.changes(), nil
}

// plan passes over a sheet to find out what its edits come to. The last plan of a
// sheet is kept, since a save asks again what Changes asked.
func (b *Book) plan(sheet int, edits []Edit) (*planner, error) {
	entry, err := b.sheetEntry(sheet)
	if err != nil {
		return nil, err
	}
	if p := b.plans[sheet]; p.answers(edits) {
		return p, nil
	}
	name, part := b.sheets[sheet].Name, b.name(entry)
	p, err := newPlanner(edits, b.SharedString)
	if err != nil {
		return nil, place(err, b.file, part, name)
	}
	p.known = b.whatIsKnown(sheet)
	facts, err := b.scanEntry(sheet, entry, ScanOptions{Columns: new(Columns)}, nil, p)
	if err != nil {
		return nil, err
	}
	if err := p.finish(&facts); err != nil {
		return nil, place(err, b.file, part, name)
	}
	if b.plans == nil {
		b.plans = map[int]*planner{}
	}
	b.plans[sheet] = p
	return p, nil
}

// splice copies the part from src with the patches that were planned.
func (p *planner) splice(dst io.Writer, src io.Reader) error {
	r, order, err := xmlReader(src)
	if err != nil {
		return err
	}
	if order != nil {
		dst = &utf16Writer{dst: dst, order: order}
	}
	return applyPatches(dst, r, p.patches)
}

// check refuses values that no cell can hold.
func (v Value) check() *Error {
	switch {
	case v.kind == valueNumber && (math.IsNaN(v.number) || math.IsInf(v.number, 0)):
		return &Error{Kind: ErrEdit, Reason: "the number to write is not finite", Advice: "empty the cell instead"}
	case v.kind == valueText && !utf8.ValidString(v.text):
		return &Error{Kind: ErrEdit, Reason: "the text to write is not valid UTF-8", Advice: "write valid text"}
	case v.kind == valueText && utf16Length([]byte(v.text)) > maxText:
		return &Error{Kind: ErrEdit, Reason: fmt.Sprintf("the text to write has %d characters; a cell holds %d", utf16Length([]byte(v.text)), maxText), Advice: "shorten it"}
	}
	return nil
}

// cellType gives the type attribute that a cell with this value needs.
func (v Value) cellType() string {
	switch v.kind {
	case valueText:
		return "inlineStr"
	case valueBool:
		return "b"
	}
	return ""
}

// appendContent writes the value as the content of a cell.
func (v Value) appendContent(dst []byte, prefix string) []byte {
	switch v.kind {
	case valueNumber, valueBool:
		dst = fmt.Appendf(dst, "<%sv>", prefix)
		dst = appendNumber(dst, v.number)
		dst = fmt.Appendf(dst, "</%sv>", prefix)
	case valueText:
		space := ""
		if needsSpace(v.text) {
			space = ` xml:space="preserve"`
		}
		dst = fmt.Appendf(dst, "<%[1]sis><%[1]st%[2]s>", prefix, space)
		dst = appendEscaped(dst, v.text)
		dst = fmt.Appendf(dst, "</%[1]st></%[1]sis>", prefix)
	}
	return dst
}

// appendCell writes a new cell; nothing where there is no value.
func (v Value) appendCell(dst []byte, prefix string, row, col, style int) []byte {
	if v.kind == valueEmpty {
		return dst
	}
	dst = fmt.Appendf(dst, `<%sc r="`, prefix)
	dst = append(appendCellName(dst, row, col), '"')
	if style > 0 {
		dst = fmt.Appendf(dst, ` s="%d"`, style)
	}
	if kind := v.cellType(); kind != "" {
		dst = fmt.Appendf(dst, ` t="%s"`, kind)
	}
	dst = v.appendContent(append(dst, '>'), prefix)
	return fmt.Appendf(dst, "</%sc>", prefix)
}
