package calculation

import (
	"fmt"
	"slices"

	"halfwidth/funcs"
)

// bound is a query tied to its sheet: where the header stands, which columns
// the names are, which rows the data take.
type bound struct {
	query *Query
	at    located
	names []ColumnRef // every column that the query names, each once
	cols  []int       // their columns, once found
	// header is the header's row, 0 while it is not found.
	header      int
	first, last int // rows of data; last is known once the sheet is read
	fault       *fault
}

// bind ties a query to a place and asks for its columns.
func (lib *library) bind(q *Query) *bound {
	b := &bound{query: q}
	at, f := lib.locate(&q.Place)
	if f != nil {
		b.fault = f
		return b
	}
	b.at = at
	b.names = q.columnNames()
	lib.want(at.sheet, func(head *Frame) Columns {
		if b.findHeader(head, true) {
			return Columns{List: b.cols}
		}
		if b.fault != nil {
			return Columns{}
		}
		if at.place.Kind == Sheet {
			return Columns{All: true}
		}
		c := Columns{}
		for col := at.place.FirstCol; col <= at.place.LastCol; col++ {
			c.List = append(c.List, col)
		}
		return c
	})
	return b
}

// columnNames lists the columns that a query names: values first, then those
// of conditions, groups and key.
func (q *Query) columnNames() []ColumnRef {
	var out []ColumnRef
	add := func(c ColumnRef) {
		if !slices.ContainsFunc(out, func(o ColumnRef) bool { return headerForm(o.Name) == headerForm(c.Name) }) {
			out = append(out, c)
		}
	}
	for _, c := range q.Columns {
		add(c)
	}
	for _, c := range q.Where {
		if c.Op != RowIsVisible {
			add(c.Column)
		}
	}
	if q.ForEach != nil {
		add(*q.ForEach)
	}
	if q.Matched != nil {
		add(*q.Matched)
	}
	return out
}

// col gives the column of a name that the query uses.
func (b *bound) col(c ColumnRef) int {
	for i, n := range b.names {
		if headerForm(n.Name) == headerForm(c.Name) {
			return b.cols[i]
		}
	}
	return 0
}

// ready finds the header where the head did not show it, and the last row.
func (b *bound) ready() *fault {
	sh := b.at.sheet
	if b.fault == nil && sh.err != nil {
		return sh.unreadable(b.query.Place.Span)
	}
	if b.fault == nil && b.header == 0 {
		b.findHeader(sh.frame, false)
	}
	if b.fault != nil {
		return b.fault
	}
	b.first = b.header + 1
	b.last = sh.frame.LastRow()
	if p := b.at.place; p.Kind != Sheet {
		b.last = min(b.last, p.LastRow-p.TotalsRows)
	}
	for b.last >= b.first && sh.frame.Row(b.last)&RowFilled == 0 {
		b.last--
	}
	b.checkWidths()
	return b.fault
}

// findHeader looks for the header. In the head it gives up without a fault
// where the header may stand below it.
func (b *bound) findHeader(f *Frame, isHead bool) bool {
	first, last := 1, HeadRows
	p := b.at.place
	if p.Kind != Sheet {
		first, last = p.FirstRow, min(p.LastRow, p.FirstRow+HeadRows-1)
	}
	if p.Kind == Table {
		last = p.FirstRow + p.HeaderRows - 1
	}
	if n := b.query.Place.HeaderRow; n > 0 {
		if p.Kind != Sheet && (n < p.FirstRow || n > p.LastRow) {
			b.refuse(b.query.Place.Span, fmt.Sprintf("Row %d is not a row of %s, which is %s!%s. Give a row of the sheet that lies in it.",
				n, p.Name, b.at.sheet.label, p.area()))
			return false
		}
		first, last = n, n
	}
	if p.Kind == Table && p.HeaderRows == 0 && b.query.Place.HeaderRow == 0 {
		b.refuse(b.query.Place.Span, fmt.Sprintf("The table %s has no header row. Turn it on, or name a range.", p.Name))
		return false
	}
	if isHead && last > HeadRows {
		return first <= HeadRows && b.found(f, first, HeadRows)
	}
	if b.header == 0 && !b.found(f, first, min(last, f.LastRow())) && b.fault == nil {
		b.notFound(f, first, last)
	}
	return b.fault == nil
}

// area is the place's range.
func (p Place) area() Area {
	return Area{FirstRow: p.FirstRow, LastRow: p.LastRow, FirstCol: p.FirstCol, LastCol: p.LastCol}
}

func (b *bound) refuse(span Span, message string, cells ...string) {
	b.fault = &fault{Finding: funcs.Finding{Code: "unknown-name", Severity: funcs.Refused, Message: message, Cells: cells}, span: span}
}

// columnRange gives the columns that the header may take.
func (b *bound) columnRange(f *Frame) (first, last int) {
	if p := b.at.place; p.Kind != Sheet {
		return p.FirstCol, p.LastCol
	}
	return 1, f.LastCol()
}

// found looks for the first row that holds every name, each once.
func (b *bound) found(f *Frame, first, last int) bool {
	if len(b.names) == 0 {
		return b.plainHeader(f, first, last)
	}
	for row := first; row <= last; row++ {
		cols := make([]int, len(b.names))
		if b.match(f, row, cols) < len(b.names) {
			continue
		}
		b.header, b.cols = row, cols
		return b.fault == nil
	}
	return false
}

// match finds the names in a row and counts those found; it raises the fault
// for one that stands there twice, where all are found.
func (b *bound) match(f *Frame, row int, cols []int) int {
	count := 0
	first, last := b.columnRange(f)
	twice := -1
	var twins [2]int
	forms := b.at.sheet.headerForms(f, row)
	for i, n := range b.names {
		for _, col := range forms[headerForm(n.Name)] {
			switch {
			case col < first || col > last:
			case cols[i] == 0:
				cols[i] = col
				count++
			case twice < 0:
				twice, twins = i, [2]int{cols[i], col}
			}
		}
	}
	if twice >= 0 && count == len(b.names) {
		sh := b.at.sheet
		one, two := sh.address(row, twins[0]), sh.address(row, twins[1])
		b.refuse(b.names[twice].Span, fmt.Sprintf("The header has %s twice, in %s and %s. Rename one of them, or write the range.",
			quote(b.names[twice].Name), one, two), one, two)
	}
	return count
}

// headerForms gives the columns of each text of a row, by the form in which
// names are compared. What was found before columns were dropped is kept.
func (sh *sheet) headerForms(f *Frame, row int) map[string][]int {
	if forms, ok := sh.headers[row]; ok {
		return forms
	}
	forms := map[string][]int{}
	for col := 1; col <= f.LastCol(); col++ {
		if text := headerText(f.At(row, col)); text != "" {
			form := headerForm(text)
			forms[form] = append(forms[form], col)
		}
	}
	if sh.headers == nil {
		sh.headers = map[int]map[string][]int{}
	}
	sh.headers[row] = forms
	return forms
}

// headerText gives what a header cell reads.
func headerText(c Cell) string {
	switch c.Kind {
	case Text:
		return c.Text
	case Number:
		return funcs.FormatNumber(c.Number)
	case Date:
		return dateText(c.Number, c.Number == float64(int(c.Number)))
	}
	return ""
}

// plainHeader finds the header of a query that names no column: the first row
// with a value. It must be texts alone, and not one text above wider rows, which
// would be a title.
func (b *bound) plainHeader(f *Frame, first, last int) bool {
	for row := first; row <= last; row++ {
		texts, others := b.rowKinds(f, row)
		if texts+others == 0 {
			continue
		}
		plain := others == 0 && (texts > 1 || !b.wider(f, row+1, last))
		if b.at.place.Kind != Table && b.query.Place.HeaderRow == 0 && !plain {
			place := b.query.Place
			place.HeaderRow = row + 1
			b.refuse(place.Span, fmt.Sprintf("The header of %s is not plain to see. Give its row, such as: count in %s.", b.query.Place.String(), place.String()))
			return false
		}
		b.header, b.cols = row, []int{}
		return true
	}
	return false
}

// wider reports whether a row has more than one value.
func (b *bound) wider(f *Frame, first, last int) bool {
	for row := first; row <= last; row++ {
		if texts, others := b.rowKinds(f, row); texts+others > 1 {
			return true
		}
	}
	return false
}

func (b *bound) rowKinds(f *Frame, row int) (texts, others int) {
	first, last := b.columnRange(f)
	for col := first; col <= last; col++ {
		switch f.At(row, col).Kind {
		case Blank:
		case Text:
			texts++
		default:
			others++
		}
	}
	return texts, others
}

// notFound raises the fault of a header that is nowhere, with the closest names
// of the row that comes nearest to being it.
func (b *bound) notFound(f *Frame, first, last int) {
	where := b.at.place.Name
	if b.query.Place.File != "" {
		where = b.at.sheet.label
	}
	if len(b.names) == 0 {
		b.refuse(b.query.Place.Span, fmt.Sprintf("%s holds no rows.", where))
		return
	}
	given := b.query.Place.HeaderRow > 0
	last = min(last, f.LastRow())
	best, most, cols := 0, 0, make([]int, len(b.names))
	for row := first; row <= last; row++ {
		c := make([]int, len(b.names))
		if n := b.match(f, row, c); n > most {
			best, most, cols = row, n, c
		}
	}
	missing := slices.Index(cols, 0)
	name := b.names[missing]
	texts := b.headerTexts(f, first, last, best)
	defer func() {
		for _, near := range funcs.Closest(name.Name, texts) {
			b.fault.instead = append(b.fault.instead, ColumnRef{Name: near, Unit: name.Unit}.String())
		}
	}()
	switch {
	case best > 0:
		b.refuse(name.Span, fmt.Sprintf("The header of %s in row %d has no column %s. %s", where, best, quote(name.Name), suggest(name.Name, texts)))
	case given && len(texts) == 0:
		b.refuse(name.Span, fmt.Sprintf("Row %d of %s holds no names of columns.", first, where))
	case given || first == last:
		b.refuse(name.Span, fmt.Sprintf("Row %d of %s has no column %s. %s", first, where, quote(name.Name), suggest(name.Name, texts)))
	default:
		b.refuse(name.Span, fmt.Sprintf("No row from %d to %d of %s holds a column %s. %s", first, max(last, first), where, quote(name.Name),
			suggest(name.Name, texts)))
	}
}

// headerTexts lists the texts of one row, or of all rows where best is 0.
func (b *bound) headerTexts(f *Frame, first, last, best int) []string {
	var texts []string
	seen := map[string]bool{}
	from, to := b.columnRange(f)
	if best > 0 {
		first, last = best, best
	}
	for row := first; row <= last; row++ {
		for col := from; col <= min(to, f.LastCol()); col++ {
			cell := f.At(row, col)
			if text := trim(cell.Text); cell.Kind == Text && text != "" && !seen[text] {
				seen[text] = true
				texts = append(texts, text)
			}
		}
	}
	return texts
}
