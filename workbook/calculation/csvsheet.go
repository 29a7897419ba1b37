package calculation

import (
	"bytes"
	"context"
	"errors"
	"fmt"
	"slices"
	"strings"

	"halfwidth/funcs"
)

// TextSheet is a calculation sheet that is a CSV or TSV file. It keeps the
// bytes of every cell, so that results can be written into it and all else
// stays as it is.
type TextSheet struct {
	name    string
	data    []byte
	dialect dialect
	rows    []textRow
	frame   *Frame
}

// textRow is one record: its cells and where its line break begins.
type textRow struct {
	fields []textField
	end    int
}

type textField struct {
	span Span
	text string
}

// TextSheetName is the name of the one sheet of a text calculation sheet.
const TextSheetName = "Calculations"

// ParseTextSheet reads a text calculation sheet. The name decides by its ending
// whether it is a .tsv file. The error is a *CSVError.
func ParseTextSheet(name string, data []byte) (*TextSheet, error) {
	t := &TextSheet{name: name, data: data, dialect: findDialect(name, data, false)}
	s := newCSVScanner(bytes.NewReader(data), t.dialect)
	for s.next() {
		r := textRow{end: s.end.Start}
		if len(t.rows) >= MaxRow {
			return nil, &CSVError{s.line, fmt.Sprintf("a sheet has at most %d rows", MaxRow)}
		}
		for _, f := range s.fields {
			r.fields = append(r.fields, textField{f.span, string(f.text)})
		}
		t.rows = append(t.rows, r)
	}
	if s.err != nil {
		return nil, s.err
	}
	t.dialect.decimalComma = t.hasDecimalComma()
	t.frame = NewFrame()
	for i, r := range t.rows {
		t.frame.SetRow(i+1, 0)
		line := lineWidth{row: i + 1, cells: len(r.fields)}
		for j, f := range r.fields {
			if f.text != "" {
				line.last = j + 1
			}
			if isFormulaText(f.text) {
				t.frame.Set(i+1, j+1, Cell{Unsaved: true})
				continue
			}
			t.frame.SetRow(i+1, t.dialect.setField(t.frame, i+1, j+1, []byte(f.text)))
		}
		t.frame.lines = append(t.frame.lines, line)
	}
	return t, nil
}

// isFormulaText reports whether spreadsheet programs take a text for a formula.
// Texts of ours that begin so have a space before them.
func isFormulaText(text string) bool { return len(text) > 1 && text[0] == '=' }

// Marked reports whether the first cell makes the file a calculation sheet.
func (t *TextSheet) Marked() bool { return marksSheet(t.frame.At(1, 1)) }

// Dimensions gives the number of rows, and the columns of the longest.
func (t *TextSheet) Dimensions() (rows, columns int) {
	for _, r := range t.rows {
		columns = max(columns, len(r.fields))
	}
	return len(t.rows), columns
}

// hasDecimalComma looks for `default decimal-mark` with a comma right of it.
func (t *TextSheet) hasDecimalComma() bool {
	for _, r := range t.rows {
		for j, f := range r.fields {
			if nameForm(f.text) == "default-"+decimalMark && j+1 < len(r.fields) && isComma(r.fields[j+1].text) {
				return true
			}
		}
	}
	return false
}

// isComma reads the value of the decimal mark.
func isComma(text string) bool {
	text = strings.Trim(fold(text), `"'`)
	return text == "," || text == "comma"
}

// Source gives the sheet as a source; beside opens the files that it names.
func (t *TextSheet) Source(beside func(file string, options FileOptions) (Source, error)) Source {
	return &textSheetSource{t, beside}
}

type textSheetSource struct {
	sheet  *TextSheet
	beside func(string, FileOptions) (Source, error)
}

func (s *textSheetSource) Places() []Place {
	return []Place{{Kind: Sheet, Name: TextSheetName, Sheet: TextSheetName}}
}

func (s *textSheetSource) Read(_ context.Context, _ string, choose func(*Frame) Columns) (*Frame, error) {
	choose(s.sheet.frame)
	return s.sheet.frame, nil
}

func (s *textSheetSource) Beside(file string, options FileOptions) (Source, error) {
	if s.beside == nil {
		return nil, errors.New("cannot be read here")
	}
	return s.beside(file, options)
}

func (s *textSheetSource) RecalculatesLate() bool { return false }

// CellSpan gives where a cell stands in the file, with its quotes; of a cell
// past the end of its row, where it would be added. It is false for a row that
// is not there.
func (t *TextSheet) CellSpan(c CellRef) (Span, bool) {
	if c.Row < 1 || c.Row > len(t.rows) || c.Col < 1 {
		return Span{}, false
	}
	r := t.rows[c.Row-1]
	if c.Col > len(r.fields) {
		return Span{r.end, r.end}, true
	}
	return r.fields[c.Col-1].span, true
}

// CellText gives the text of a cell.
func (t *TextSheet) CellText(c CellRef) string {
	if c.Row < 1 || c.Row > len(t.rows) || c.Col < 1 || c.Col > len(t.rows[c.Row-1].fields) {
		return ""
	}
	return t.rows[c.Row-1].fields[c.Col-1].text
}

// TextSpan gives where a stretch of a cell's text stands in the file. Inside a
// text in quotes, a quote doubled before it moves it on.
func (t *TextSheet) TextSpan(c CellRef, within Span) (Span, bool) {
	cell, ok := t.CellSpan(c)
	if !ok || cell.Start == cell.End {
		return cell, ok
	}
	if within == (Span{}) {
		return cell, true
	}
	if t.data[cell.Start] != '"' {
		return Span{min(cell.Start+within.Start, cell.End), min(cell.Start+within.End, cell.End)}, true
	}
	place := func(offset int) int {
		at := cell.Start + 1
		for ; offset > 0 && at < cell.End-1; offset-- {
			if t.data[at] == '"' {
				at++
			}
			at++
		}
		return min(at, cell.End-1)
	}
	return Span{place(within.Start), place(within.End)}, true
}

// CellAt gives the cell that an offset of the file lies in or at the end of,
// and the offset within its text as far as it is not in quotes.
func (t *TextSheet) CellAt(offset int) (c CellRef, within int, ok bool) {
	i, _ := slices.BinarySearchFunc(t.rows, offset, func(r textRow, at int) int {
		if r.end < at {
			return -1
		}
		return 1
	})
	if i == len(t.rows) {
		return CellRef{}, 0, false
	}
	for j, f := range t.rows[i].fields {
		if offset > f.span.End {
			continue
		}
		within = max(0, offset-f.span.Start)
		if f.span.Start < f.span.End && t.data[f.span.Start] == '"' {
			raw := t.data[f.span.Start+1 : max(f.span.Start+1, min(offset, f.span.End-1))]
			within = len(raw) - bytes.Count(raw, []byte(`""`))
		}
		return CellRef{i + 1, j + 1}, min(within, len(f.text)), true
	}
	return CellRef{}, 0, false
}

// TextEdit replaces a stretch of a file.
type TextEdit struct {
	Span Span
	New  string
}

// Holds reports whether a cell reads as the value already: the same double, the
// same text, however it is spelt.
func (t *TextSheet) Holds(e Edit) bool {
	if t.CellText(e.Cell) == t.valueText(e.Value) {
		return true
	}
	cell := t.frame.At(e.Cell.Row, e.Cell.Col)
	switch v := e.Value.(type) {
	case float64:
		return cell.Kind == Number && cell.Number == v
	case int:
		return cell.Kind == Number && cell.Number == float64(v)
	case bool:
		return cell.Kind == Bool && (cell.Number != 0) == v
	}
	return false
}

// Value gives what a cell reads as: a float64, a bool, or its text; nil where it
// is empty.
func (t *TextSheet) Value(c CellRef) any {
	switch cell := t.frame.At(c.Row, c.Col); cell.Kind {
	case Number:
		return cell.Number
	case Bool:
		return cell.Number != 0
	}
	if text := t.CellText(c); text != "" {
		return text
	}
	return nil
}

// Changes gives what the edits change in the file, in its order. A cell that
// reads as it should already keeps its bytes.
func (t *TextSheet) Changes(edits []Edit) []TextEdit {
	byRow := map[int][]Edit{}
	for _, e := range edits {
		byRow[e.Cell.Row] = append(byRow[e.Cell.Row], e)
	}
	var out []TextEdit
	for i := range t.rows {
		if list := byRow[i+1]; list != nil {
			out = append(out, t.rowChanges(&t.rows[i], list)...)
		}
	}
	return out
}

// rowChanges gives the changes of one row, separators added where it is too
// short.
func (t *TextSheet) rowChanges(r *textRow, edits []Edit) []TextEdit {
	slices.SortStableFunc(edits, func(a, b Edit) int { return a.Cell.Col - b.Cell.Col })
	var out []TextEdit
	var added strings.Builder
	columns := len(r.fields)
	for _, e := range edits {
		text := t.valueText(e.Value)
		if e.Cell.Col <= len(r.fields) {
			if !t.Holds(e) {
				out = append(out, TextEdit{r.fields[e.Cell.Col-1].span, t.encode(text)})
			}
			continue
		}
		if text == "" {
			continue
		}
		for ; columns < e.Cell.Col; columns++ {
			added.WriteByte(t.dialect.separator)
		}
		added.WriteString(t.encode(text))
	}
	if added.Len() > 0 {
		out = append(out, TextEdit{Span{r.end, r.end}, added.String()})
	}
	return out
}

// valueText writes a value as a cell of the file reads it. A text that a
// spreadsheet program would take for a formula gets a space before it.
func (t *TextSheet) valueText(v any) string {
	switch v := v.(type) {
	case float64:
		text := funcs.FormatNumber(v)
		if t.dialect.decimalComma {
			text = strings.Replace(text, ".", ",", 1)
		}
		return text
	case int:
		return decimal(v)
	case bool:
		if v {
			return "TRUE"
		}
		return "FALSE"
	case string:
		if v != "" && strings.ContainsRune("=+-@", rune(v[0])) {
			return " " + v
		}
		return v
	}
	return ""
}

// encode puts a cell's text in quotes where it needs them.
func (t *TextSheet) encode(text string) string {
	if strings.IndexByte(text, t.dialect.separator) >= 0 || strings.ContainsAny(text, "\"\r\n") {
		return quote(text)
	}
	return text
}

// Apply gives the file with the edits made; the bytes given to ParseTextSheet
// where nothing changes.
func (t *TextSheet) Apply(edits []Edit) []byte {
	changes := t.Changes(edits)
	if len(changes) == 0 {
		return t.data
	}
	var b bytes.Buffer
	at := 0
	for _, c := range changes {
		b.Write(t.data[at:c.Span.Start])
		b.WriteString(c.New)
		at = c.Span.End
	}
	b.Write(t.data[at:])
	return b.Bytes()
}
