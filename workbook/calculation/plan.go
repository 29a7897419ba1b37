package calculation

import (
	"context"
	"fmt"
	"slices"
	"strings"

	"halfwidth/funcs"
)

// Options say what a plan is to take for calculation sheets, and where it may
// write.
type Options struct {
	// Sheets names calculation sheets besides those that are ones by their name
	// or their cell A1.
	Sheets []string
	// Only leaves out calculation sheets that Sheets does not name.
	Only bool
	// MayReplace reports whether a sheet that exists may be written anew as a
	// table sheet: one that an earlier fill made. Nil allows none.
	MayReplace func(sheet string) bool
	// Kept says why a sheet that MayReplace allows must stay as it is all the
	// same, as the rest of a sentence that starts with its name; empty where
	// nothing speaks against it. It may be nil.
	Kept func(sheet string) string
	// KeepValues keeps the samples that were read in the Arguments of outcomes, as
	// a page needs them. Otherwise a row's samples are let go once it is worked
	// out, so that many rows over a large sheet take little memory.
	KeepValues bool
	// NoTables says why no table sheet can be added, as to a text file, and what
	// to do instead, without a full stop; empty where they can.
	NoTables string
	// Progress is told by a run how many of its rows are worked out, by several
	// goroutines at once. It may be nil.
	Progress func(done, total int)
}

// Plan is the calculation sheets of a book, read and resolved: blocks, rows,
// functions, what each input stands for, and all faults. Nothing is computed.
type Plan struct {
	Sheets []string // the calculation sheets, in the order of the book
	Blocks []*Block
	Rows   []*Row // in the order of sheets, rows and columns

	lib     *library
	calcs   []*calcSheet
	options Options
	tables  map[string]*Row // who writes the table sheet of that folded name
	cache   cache
}

// NewPlan reads the calculation sheets of a book and resolves their rows; every
// other sheet that an expression names is read once. The error is the context's,
// that of reading a calculation sheet, or a *funcs.UnknownError for a sheet of
// Options that is not there.
func NewPlan(ctx context.Context, source Source, options Options) (*Plan, error) {
	p := &Plan{lib: newLibrary(source), options: options, tables: map[string]*Row{}}
	if err := p.findSheets(ctx); err != nil {
		return nil, err
	}
	for _, c := range p.calcs {
		p.Sheets = append(p.Sheets, c.sheet.name)
		p.addBlocks(newCalcSheet(c.sheet))
	}
	for i, r := range p.Rows {
		r.order = i
	}
	for _, r := range p.Rows {
		p.readInputs(r.Block.calc, r)
		p.claimTable(r)
	}
	if err := p.lib.read(ctx); err != nil {
		return nil, err
	}
	for _, r := range p.Rows {
		p.checkRead(r)
	}
	p.findCircles()
	return p, nil
}

// addBlocks adds the blocks of a sheet, in the order of their header rows, then
// columns, and their rows.
func (p *Plan) addBlocks(c *calcSheet) {
	p.calcs[slices.IndexFunc(p.calcs, func(o *calcSheet) bool { return o.sheet == c.sheet })] = c
	p.Blocks = append(p.Blocks, c.blocks...)
	var rows []*Row
	for _, b := range c.blocks {
		rows = append(rows, b.Rows...)
	}
	slices.SortStableFunc(rows, func(a, b *Row) int {
		if a.Number != b.Number {
			return a.Number - b.Number
		}
		return a.Block.FirstCol - b.Block.FirstCol
	})
	p.Rows = append(p.Rows, rows...)
}

// findSheets finds the calculation sheets and reads them whole.
func (p *Plan) findSheets(ctx context.Context) error {
	own := p.lib.own
	named := map[string]bool{}
	for _, name := range p.options.Sheets {
		i := slices.IndexFunc(own.places, func(pl Place) bool { return pl.Kind == Sheet && fold(pl.Name) == fold(name) })
		if i < 0 {
			unknown := &funcs.UnknownError{What: "sheet", Name: name, Closest: funcs.Closest(name, own.names(Sheet))}
			if len(unknown.Closest) == 0 {
				return fmt.Errorf("%w; its sheets are %s", unknown, few(own.names(Sheet)))
			}
			return unknown
		}
		named[own.places[i].Name] = true
	}
	for _, place := range own.places {
		if place.Kind != Sheet {
			continue
		}
		if !named[place.Name] && p.options.Only {
			continue
		}
		is := named[place.Name] || isCalculationSheet(place.Name)
		if !is {
			_, err := own.source.Read(ctx, place.Name, func(head *Frame) Columns {
				is = marksSheet(head.At(1, 1))
				return Columns{}
			})
			if err != nil {
				return fmt.Errorf("%s cannot be read: %w", own.sheet(place.Name).label, err)
			}
		}
		if !is {
			continue
		}
		sh := own.sheet(place.Name)
		p.lib.want(sh, func(*Frame) Columns { return Columns{All: true} })
		if err := p.lib.read(ctx); err != nil {
			return err
		}
		if sh.err != nil {
			return fmt.Errorf("%s cannot be read: %w", sh.label, sh.err)
		}
		p.calcs = append(p.calcs, &calcSheet{sheet: sh})
	}
	return nil
}

// claimTable checks that the table sheet of a row may be written.
func (p *Plan) claimTable(r *Row) {
	if r.table == "" {
		return
	}
	bc := r.Block.column(TableColumn, "")
	at := CellRef{r.Number, bc.Col}
	key := fold(r.table)
	own := p.lib.own
	taken := slices.IndexFunc(own.places, func(pl Place) bool { return (pl.Kind == Sheet || pl.Kind == OtherSheet) && fold(pl.Name) == key })
	switch first := p.tables[key]; {
	case r.Function != nil && r.Function.Table == nil && r.each == nil:
		r.caution(at, funcs.Caution, "no-table", fmt.Sprintf("%s gives no table here, so no sheet %s is written. Empty %s, or give the sample for each group.", r.Function.Name, quote(r.table), at))
		r.table = ""
	case first != nil:
		r.refuse(at, Span{}, "given-twice", fmt.Sprintf("%s: the sheet %s is written by row %d already. Write another name.", at, quote(r.table), first.Number))
		r.table = ""
	case taken >= 0 && (p.options.MayReplace == nil || !p.options.MayReplace(own.places[taken].Name)):
		r.refuse(at, Span{}, "sheet-taken", fmt.Sprintf("%s: there is a sheet %s already that no fill made, and it is never written over. Write another name.", at, quote(own.places[taken].Name)))
		r.table = ""
	case taken >= 0 && p.kept(own.places[taken].Name) != "":
		r.refuse(at, Span{}, "sheet-taken", fmt.Sprintf("%s: the sheet %s %s, or write another name.", at, quote(own.places[taken].Name), p.kept(own.places[taken].Name)))
		r.table = ""
	case taken < 0 && p.options.NoTables != "":
		r.refuse(at, Span{}, "no-table-sheet", fmt.Sprintf("%s: %s, or empty the cell.", at, p.options.NoTables))
		r.table = ""
	default:
		if taken >= 0 {
			r.table = own.places[taken].Name
		}
		p.tables[key] = r
	}
}

func (p *Plan) kept(sheet string) string {
	if p.options.Kept == nil {
		return ""
	}
	return p.options.Kept(sheet)
}

// checkRead refuses what can only be seen once the sheets are read: headers
// that are nowhere, ranges over result cells and over sheets that this fill
// writes.
func (p *Plan) checkRead(r *Row) {
	for _, in := range r.Inputs {
		f := p.faultOf(in.term)
		if f == nil {
			continue
		}
		finding := placed(in.Name, in.Cell.String(), f)
		address := r.Block.calc.sheet.address(in.Cell.Row, in.Cell.Col)
		r.refuse(in.Cell, Span{}, f.Code, finding.Message, append([]string{address}, f.Cells...)...)
		in.term.point(r.lastFault(), f)
	}
	p.checkTableUse(r)
}

// checkTableUse asks for a sheet where a row's answer is a table.
func (p *Plan) checkTableUse(r *Row) {
	if r.table != "" || r.Function == nil || len(r.faults) > 0 {
		return
	}
	switch {
	case r.each != nil && p.options.NoTables != "":
		r.refuse(r.each.Cell, r.each.term.span(r.each.term.query.query.ForEach.Span), "no-table-sheet", fmt.Sprintf(
			"%s (%s): for each gives a row for every group, and they need a sheet, but %s, or leave out for each.", r.each.Cell, r.each.Name, p.options.NoTables))
	case r.each != nil:
		r.refuse(r.each.Cell, r.each.term.span(r.each.term.query.query.ForEach.Span), "no-table-sheet", fmt.Sprintf(
			"%s (%s): for each gives a row for every group, and they need a sheet. Name one in a column headed `table sheet`, or write a condition such as where %s = …",
			r.each.Cell, r.each.Name, nameText(r.each.term.query.query.ForEach.Name)))
	case r.Function.Table != nil && len(r.Function.Results) == 0:
		r.caution(CellRef{r.Number, r.Block.work}, funcs.Caution, "no-table-sheet", fmt.Sprintf(
			"The answer of %s is a table, and no sheet is named for it. Name one in a column headed `table sheet`.", r.Function.Name))
	}
}

// faultOf gives the fault of a term whose sheet is read.
func (p *Plan) faultOf(t *term) *fault {
	switch {
	case t.query != nil:
		if f := t.query.ready(); f != nil {
			return f
		}
		q := t.query
		if c := q.at.sheet.calc; c != nil {
			for _, col := range q.cols {
				if at, ok := c.resultWithin(Area{FirstRow: q.first, LastRow: max(q.first, q.last), FirstCol: col, LastCol: col}); ok {
					return touches(t.query.query.Span, c, at)
				}
			}
		}
		return p.writtenSheet(q.at.sheet, q.query.Place.Span)
	case t.area != nil:
		a, f := t.area.resolved()
		if f != nil {
			return f
		}
		if c := t.area.sheet.calc; c != nil {
			if at, ok := c.resultWithin(a); ok {
				return touches(t.area.rng.Span, c, at)
			}
		}
		return p.writtenSheet(t.area.sheet, t.area.rng.Span)
	}
	return nil
}

func touches(span Span, c *calcSheet, at CellRef) *fault {
	address := c.sheet.address(at.Row, at.Col)
	return &fault{Finding: funcs.Finding{Code: "touches-results", Severity: funcs.Refused, Cells: []string{address},
		Message: fmt.Sprintf("touches %s, a result cell, which this fill writes; name single cells, or a range beside the results", address)}, span: span, tail: true}
}

// writtenSheet refuses a sheet that this fill writes anew.
func (p *Plan) writtenSheet(sh *sheet, span Span) *fault {
	r := p.tables[fold(sh.name)]
	if sh.shelf != p.lib.own || r == nil {
		return nil
	}
	return &fault{Finding: funcs.Finding{Code: "touches-results", Severity: funcs.Refused,
		Message: fmt.Sprintf("reads the sheet %s, which row %d writes in this fill; read the data that it comes from", quote(sh.name), r.Number)}, span: span, tail: true}
}

// resultWithin gives the first result cell in an area, by blocks.
func (c *calcSheet) resultWithin(a Area) (CellRef, bool) {
	for _, b := range c.blocks {
		first, last := max(a.FirstRow, b.Header+1), min(a.LastRow, b.LastRow)
		if first > last {
			continue
		}
		for _, bc := range b.Columns {
			if bc.Role == ResultColumn && a.FirstCol <= bc.Col && bc.Col <= a.LastCol {
				return CellRef{first, bc.Col}, true
			}
		}
	}
	return CellRef{}, false
}

// findCircles refuses the rows that read one another's results in a circle,
// with the cells.
func (p *Plan) findCircles() {
	for _, group := range p.circles() {
		inside := map[*Row]bool{}
		for _, r := range group {
			inside[r] = true
		}
		var cells []string
		for _, r := range group {
			for _, n := range r.needs {
				if at := n.address(); inside[n.row] && !slices.Contains(cells, at) {
					cells = append(cells, at)
				}
			}
		}
		for _, r := range group {
			for _, in := range r.Inputs {
				if !in.readsFrom(inside) {
					continue
				}
				message := fmt.Sprintf("%s (%s) reads %s, which rests on this row again: a circle through %s. Write the value in one of these cells.",
					in.Cell, in.Name, in.Written, strings.Join(cells, ", "))
				r.refuse(in.Cell, Span{}, "circle", message, cells...)
			}
		}
	}
}

// readsFrom reports whether an input reads the result of one of the rows.
func (in *Input) readsFrom(rows map[*Row]bool) bool {
	return in.term.result != nil && rows[in.term.result.row] ||
		slices.ContainsFunc(in.term.list, func(l listTerm) bool { return l.result != nil && rows[l.result.row] })
}

// circles gives the groups of rows that rest on one another: the strongly
// connected components with an edge inside (Tarjan 1972), in order.
func (p *Plan) circles() [][]*Row {
	t := &tarjan{index: make([]int, len(p.Rows)), low: make([]int, len(p.Rows)), on: make([]bool, len(p.Rows))}
	for _, r := range p.Rows {
		if t.index[r.order] == 0 {
			t.visit(r)
		}
	}
	slices.SortFunc(t.found, func(a, b []*Row) int { return a[0].order - b[0].order })
	return t.found
}

type tarjan struct {
	next       int
	index, low []int
	on         []bool
	stack      []*Row
	found      [][]*Row
}

func (t *tarjan) visit(r *Row) {
	t.next++
	v := r.order
	t.index[v], t.low[v], t.on[v] = t.next, t.next, true
	t.stack = append(t.stack, r)
	self := false
	for _, n := range r.needs {
		w := n.row.order
		self = self || n.row == r
		if t.index[w] == 0 {
			t.visit(n.row)
			t.low[v] = min(t.low[v], t.low[w])
		} else if t.on[w] {
			t.low[v] = min(t.low[v], t.index[w])
		}
	}
	if t.low[v] != t.index[v] {
		return
	}
	at := slices.Index(t.stack, r)
	group := slices.Clone(t.stack[at:])
	t.stack = t.stack[:at]
	for _, g := range group {
		t.on[g.order] = false
	}
	if len(group) > 1 || self {
		slices.SortFunc(group, func(a, b *Row) int { return a.order - b.order })
		t.found = append(t.found, group)
	}
}

// Unreadable gives the error of the first sheet of the book itself that could
// not be read, nil where all were: a damaged book is no smaller sample.
func (p *Plan) Unreadable() error {
	for _, place := range p.lib.own.places {
		if sh := p.lib.own.sheets[place.Sheet]; sh != nil && sh.err != nil {
			return fmt.Errorf("%s cannot be read: %w", sh.label, sh.err)
		}
	}
	return nil
}

// Diagnostics gives what was found about the layout of the calculation sheets,
// in their order.
func (p *Plan) Diagnostics() []Diagnostic {
	var out []Diagnostic
	for _, c := range p.calcs {
		list := slices.Clone(c.found)
		slices.SortStableFunc(list, func(a, b Diagnostic) int {
			if a.Cell.Row != b.Cell.Row {
				return a.Cell.Row - b.Cell.Row
			}
			return a.Cell.Col - b.Cell.Col
		})
		out = append(out, list...)
	}
	return out
}

// Findings gives the faults of a row that are known without computing, then
// what else should be known about it.
func (r *Row) Findings() []Diagnostic { return slices.Concat(r.faults, r.cautions) }
