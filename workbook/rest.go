package workbook

import (
	"strings"
	"unicode/utf8"

	"halfwidth/workbook/ooxml"
)

// restOn reports whether a formula of the book may rest on a changed cell, so
// that it must be worked out again. Where that cannot be told cheaply (names of
// formulas, functions that build addresses) the answer is yes.
func (b *Book) restOn(edits map[int][]ooxml.Edit) (bool, error) {
	d := newDependence(b, edits)
	if len(d.areas) == 0 {
		return false, nil
	}
	for at, s := range b.Sheets() {
		if s.Kind != ooxml.Worksheet || b.noFormulas[at] {
			continue
		}
		rest := false
		_, err := b.Scan(at, ooxml.ScanOptions{Columns: &ooxml.Columns{}, Formula: func(row, col int, text []byte) {
			rest = rest || d.rests(text, at)
		}}, func(*ooxml.Row) error { return nil })
		if rest || err != nil {
			return rest, err
		}
	}
	return false, nil
}

// dependence finds out which formulas may rest on edits.
type dependence struct {
	book  *Book
	edits map[int][]ooxml.Edit
	areas map[int]ooxml.Range // the rectangle around the edits of a sheet
	names map[string]bool     // names and tables, in lower case, that may stand for an edited cell
}

func newDependence(b *Book, edits map[int][]ooxml.Edit) *dependence {
	d := &dependence{book: b, edits: edits, areas: map[int]ooxml.Range{}, names: map[string]bool{}}
	for sheet, list := range edits {
		for i, e := range list {
			area := d.areas[sheet]
			if i == 0 {
				area = ooxml.Range{FirstRow: e.Row, FirstCol: e.Col}
			}
			d.areas[sheet] = ooxml.Range{FirstRow: min(area.FirstRow, e.Row), FirstCol: min(area.FirstCol, e.Col),
				LastRow: max(area.LastRow, e.Row), LastCol: max(area.LastCol, e.Col)}
		}
	}
	if len(d.areas) == 0 {
		return d
	}
	for _, n := range b.DefinedNames() {
		if sheet, _, ok := reference(n.Ref); !ok || d.edited(b.SheetIndex(sheet)) {
			d.names[strings.ToLower(n.Name)] = true
		}
	}
	for _, t := range b.Tables() {
		if d.edited(t.Sheet) {
			d.names[strings.ToLower(t.Name)] = true
		}
	}
	return d
}

func (d *dependence) edited(sheet int) bool {
	_, ok := d.areas[sheet]
	return ok
}

// rests reports whether a formula on a sheet may rest on an edit. It passes once
// over the formula's words (ECMA-376 part 1, 18.17.2); what stands in quotes is
// text, or the name of a sheet.
func (d *dependence) rests(text []byte, on int) bool {
	if len(text) == 0 { // a follower of a shared formula, whose cells are not worked out here
		return d.edited(on)
	}
	for i := 0; i < len(text); {
		switch c := text[i]; {
		case c == '"':
			i = closingQuote(text, i)
		case c == '\'':
			from := i + 1
			i = closingQuote(text, i)
			if i == len(text) || text[i] != '!' {
				continue
			}
			if d.onSheet(strings.ReplaceAll(string(text[from:i-1]), "''", "'")) {
				return true
			}
			i = referenceEnd(text, i+1)
		case c == '[': // columns of a table, or the number of another workbook
			i = closingBracket(text, i)
		case partOfName(c):
			from := i
			i = wordEnd(text, i)
			next := byte(0)
			if i < len(text) {
				next = text[i]
			}
			end := referenceEnd(text, from)
			switch {
			case next == '!':
				if d.onSheet(string(text[from:i])) {
					return true
				}
				i = referenceEnd(text, i+1)
			case next == '(':
				if d.builds(string(text[from:i]), on) {
					return true
				}
			case end < len(text) && text[end] == '!': // First:Last!A1, over several sheets
				return true
			case end < len(text) && text[end] == '(': // A1:INDEX(…)
				if d.edited(on) {
					return true
				}
				i = end
			case d.named(text[from:i]) || end > i && d.named(text[i+1:end]) || d.covers(text[from:end], on):
				return true
			default:
				i = end
			}
		default:
			i++
		}
	}
	return false
}

// onSheet reports whether a reference to a sheet, or to several as in First:Last,
// may meet an edit.
func (d *dependence) onSheet(name string) bool {
	return strings.Contains(name, ":") || d.edited(d.book.SheetIndex(name))
}

// builds reports whether a function may build the address of an edited cell.
func (d *dependence) builds(function string, on int) bool {
	switch strings.ToLower(function) {
	case "indirect", "offset":
		return true
	case "index": // a range from one cell to what it gives
		return d.edited(on)
	}
	return false
}

// named reports whether a name or table may stand for an edited cell.
func (d *dependence) named(word []byte) bool {
	return len(d.names) > 0 && d.names[strings.ToLower(string(word))]
}

// covers reports whether a reference such as C2, $C$2:D9, C:D or 2:9 to the
// formula's own sheet holds an edited cell.
func (d *dependence) covers(text []byte, on int) bool {
	around, ok := d.areas[on]
	if !ok {
		return false
	}
	area, ok := anyRange(string(text))
	if !ok || area.LastRow < around.FirstRow || area.FirstRow > around.LastRow || area.LastCol < around.FirstCol || area.FirstCol > around.LastCol {
		return false
	}
	for _, e := range d.edits[on] {
		if area.Contains(e.Row, e.Col) {
			return true
		}
	}
	return false
}

// anyRange reads a cell, a range, or whole columns or rows.
func anyRange(text string) (ooxml.Range, bool) {
	if r, ok := ooxml.ParseRange(text); ok {
		return r, true
	}
	from, to, found := strings.Cut(text, ":")
	if !found {
		return ooxml.Range{}, false
	}
	sheet := ooxml.Limits{}.WithDefaults()
	if r, ok := ooxml.ParseRange(from + "1:" + to + "1"); ok {
		r.LastRow = sheet.Rows
		return r, true
	}
	r, ok := ooxml.ParseRange("A" + strings.TrimPrefix(from, "$") + ":A" + strings.TrimPrefix(to, "$"))
	r.LastCol = sheet.Columns
	return r, ok
}

// closingQuote gives the index after the quote that closes the one at i; a quote
// inside is doubled.
func closingQuote(text []byte, i int) int {
	quote := text[i]
	for i++; i < len(text); i++ {
		if text[i] == quote {
			if i+1 == len(text) || text[i+1] != quote {
				return i + 1
			}
			i++
		}
	}
	return i
}

// closingBracket gives the index after the bracket that closes the one at i; an
// apostrophe keeps the bracket after it from counting.
func closingBracket(text []byte, i int) int {
	for depth := 0; i < len(text); i++ {
		switch text[i] {
		case '\'':
			i++
		case '[':
			depth++
		case ']':
			if depth--; depth == 0 {
				return i + 1
			}
		}
	}
	return len(text)
}

// wordEnd gives the index after the name, number or cell that starts at i.
func wordEnd(text []byte, i int) int {
	for i < len(text) && partOfName(text[i]) {
		i++
	}
	return i
}

// referenceEnd gives the index after the cell or range that starts at i.
func referenceEnd(text []byte, i int) int {
	i = wordEnd(text, i)
	if i+1 < len(text) && text[i] == ':' && partOfName(text[i+1]) {
		i = wordEnd(text, i+1)
	}
	return i
}

// partOfName reports whether a byte may stand in a name or in a cell's address.
func partOfName(b byte) bool {
	switch b {
	case '_', '.', '$', '\\', '?':
		return true
	}
	return b >= utf8.RuneSelf || b >= '0' && b <= '9' || b >= 'A' && b <= 'Z' || b >= 'a' && b <= 'z'
}
