package calculation

import (
	"fmt"
	"slices"
	"strings"

	"halfwidth/funcs"
)

// readRows makes the rows of a block: function, label, the cells of results.
// What the inputs mean is read later, when all result cells are known.
func (c *calcSheet) readRows(b *Block) {
	if !b.gives() {
		return
	}
	for number := b.Header + 1; number <= b.LastRow; number++ {
		if !c.isCalculation(b, number) {
			continue
		}
		r := &Row{Block: b, Number: number, Function: b.Function}
		if col := b.column(LabelColumn, ""); col != nil {
			r.Label = labelText(c.at(number, col.Col))
		} else if b.named {
			r.Label = labelText(c.at(number, b.work))
		}
		if b.refused != nil {
			r.faults = append(r.faults, Diagnostic{Finding: b.refused.Finding, Sheet: b.Sheet, Cell: CellRef{b.Header, b.work},
				Span: b.refused.span, Instead: b.refused.instead})
		}
		if !b.named {
			c.readFunction(r)
		}
		c.readTable(r)
		for _, bc := range b.resultColumns() {
			c.results[CellRef{number, bc.Col}] = resultCell{r, bc.Name}
		}
		c.checkResultCells(r)
		c.checkLine(r)
		b.Rows = append(b.Rows, r)
	}
}

// isCalculation reports whether a row of a block is one: not where only the
// user's own columns, or the label of a row without function and inputs, hold
// something.
func (c *calcSheet) isCalculation(b *Block, row int) bool {
	for _, bc := range b.Columns {
		if !isFilled(c.at(row, bc.Col)) {
			continue
		}
		switch bc.Role {
		case InputColumn, ResultColumn, WorkColumn, TableColumn:
			return true
		}
	}
	return false
}

func labelText(cell Cell) string {
	switch cell.Kind {
	case Text:
		return trim(cell.Text)
	case Number, Date, Bool:
		return groupName(cell)
	}
	return ""
}

// readFunction reads the function's name of a row.
func (c *calcSheet) readFunction(r *Row) {
	cell := c.at(r.Number, r.Block.work)
	at := CellRef{r.Number, r.Block.work}
	switch {
	case cell.Kind == Text && fold(cell.Text) != "":
		f, err := funcs.Lookup(nameForm(cell.Text))
		if err != nil {
			r.refuse(at, Span{}, "unknown-name", ended(fmt.Sprintf("%s names no function: %s", at, err)))
			r.lastFault().Instead = closestOf(err)
		}
		r.Function = f
	case !isFilled(cell):
		r.refuse(at, Span{}, "no-function", fmt.Sprintf("%s names no function. Write one, such as mean-interval, or empty the row.", at))
	default:
		r.refuse(at, Span{}, "unknown-name", fmt.Sprintf("%s holds %s, which is no function's name. Write one, such as mean-interval.", at, describe(cell)))
	}
}

// describe words what a cell holds, unsaved formulas too.
func describe(c Cell) string {
	if c.Unsaved {
		return "a formula of which no value is saved"
	}
	return cellText(c)
}

// refuse adds a reason why a row is not worked out.
func (r *Row) refuse(at CellRef, span Span, code, message string, cells ...string) {
	if cells == nil {
		cells = []string{r.Block.calc.sheet.address(at.Row, at.Col)}
	}
	r.faults = append(r.faults, Diagnostic{Sheet: r.Block.Sheet, Cell: at, Span: span,
		Finding: funcs.Finding{Code: code, Severity: funcs.Refused, Message: message, Cells: cells}})
}

// caution adds something that should be known about a row.
func (r *Row) caution(at CellRef, severity funcs.Severity, code, message string) {
	r.cautions = append(r.cautions, Diagnostic{Sheet: r.Block.Sheet, Cell: at,
		Finding: funcs.Finding{Code: code, Severity: severity, Message: message}})
}

// checkResultCells refuses a row of which a result cell must not be
// overwritten.
func (c *calcSheet) checkResultCells(r *Row) {
	var reasons []string
	cells := map[string][]CellRef{}
	for _, bc := range r.Block.resultColumns() {
		at := CellRef{r.Number, bc.Col}
		why := c.whyClosed(at)
		if why == "" {
			continue
		}
		if r.closed == nil {
			r.closed = map[int]bool{}
		}
		r.closed[bc.Col] = true
		if cells[why] == nil {
			reasons = append(reasons, why)
		}
		cells[why] = append(cells[why], at)
	}
	for _, why := range reasons {
		var names, addresses []string
		for _, at := range cells[why] {
			names, addresses = append(names, at.String()), append(addresses, c.sheet.address(at.Row, at.Col))
		}
		who := names[0]
		if len(names) > 1 {
			who += " (like " + few(names[1:]) + ")"
		}
		r.refuse(cells[why][0], Span{}, "result-cell-taken", who+" "+why, addresses...)
	}
}

// whyClosed says why a result cell must not be overwritten; "" where it may.
func (c *calcSheet) whyClosed(at CellRef) string {
	cell := c.at(at.Row, at.Col)
	switch {
	case cell.Formula || cell.Unsaved:
		return "holds a formula, which is never overwritten. Empty the cell, or move the formula to a column of its own."
	case cell.Covered:
		return "lies inside merged cells, so nothing can stand in it. Unmerge them."
	}
	for _, t := range c.tables {
		if at.Col < t.FirstCol || at.Col > t.LastCol {
			continue
		}
		if at.Row >= t.FirstRow && at.Row < t.FirstRow+t.HeaderRows {
			return fmt.Sprintf("lies in the header row of the table %s, which is never overwritten. Move the row.", t.Name)
		}
		if at.Row <= t.LastRow && at.Row > t.LastRow-t.TotalsRows {
			return fmt.Sprintf("lies in the totals row of the table %s, which is never overwritten. Move the row.", t.Name)
		}
	}
	return ""
}

// maxSheetName is the length of a sheet's name, as spreadsheet programs agree.
const maxSheetName = 31

// readTable reads the name under `table sheet`.
func (c *calcSheet) readTable(r *Row) {
	bc := r.Block.column(TableColumn, "")
	if bc == nil {
		return
	}
	at := CellRef{r.Number, bc.Col}
	cell := c.at(at.Row, at.Col)
	if !isFilled(cell) {
		return
	}
	name := labelText(cell)
	switch {
	case name == "":
		r.refuse(at, Span{}, "bad-value", fmt.Sprintf("%s holds %s, which cannot name a sheet. Write a name, or empty the cell.", at, describe(cell)))
	case strings.ContainsAny(name, `[]:*?/\`) || strings.HasPrefix(name, "'") || strings.HasSuffix(name, "'"):
		r.refuse(at, Span{}, "bad-value", fmt.Sprintf("%s: a sheet's name holds none of [ ] : * ? / \\ and no single quote at its ends. Write another name.", at))
	case strings.EqualFold(name, "History"):
		r.refuse(at, Span{}, "bad-value", fmt.Sprintf("%s: spreadsheet programs keep the name %s for a sheet of their own. Write another name.", at, name))
	case ByteToUTF16(name, len(name)) > maxSheetName:
		r.refuse(at, Span{}, "bad-value", fmt.Sprintf("%s: a sheet's name has at most %d characters. Write a shorter one.", at, maxSheetName))
	default:
		r.table = name
	}
}

// readInputs reads what the cells of a row's inputs mean, and the defaults that
// apply to it.
func (p *Plan) readInputs(c *calcSheet, r *Row) {
	f := r.Function
	if f == nil || r.Block.refused != nil {
		return
	}
	p.lib.options, p.lib.asking = c.fileOptions(r.Block), c.sheet.name
	given := map[string]bool{}
	for _, bc := range r.Block.Columns {
		if bc.Role != InputColumn {
			continue
		}
		at := CellRef{r.Number, bc.Col}
		cell := c.at(at.Row, at.Col)
		in, ok := f.Input(bc.Name)
		if !ok {
			if isFilled(cell) {
				r.refuse(at, Span{}, "not-an-input", fmt.Sprintf("%s: %s takes no %s. Empty the cell; its inputs are %s.", at, f.Name, bc.Name, funcs.AndList(inputNames(f))))
			}
			continue
		}
		given[bc.Name] = isFilled(cell) || cell.Covered
		p.readInput(c, r, in, at, bc.Unit, false)
	}
	for _, in := range f.Inputs {
		if s := c.setting(in.Name, r.Block); s != nil && !given[in.Name] && c.applies(s, in) {
			p.readInput(c, r, in, s.cell, "", true)
		}
	}
	p.checkSamples(r)
	r.resultUnit()
}

func inputNames(f *funcs.Function) []string {
	names := make([]string, len(f.Inputs))
	for i, in := range f.Inputs {
		names[i] = in.Name
	}
	return names
}

// applies reports whether a default is meant for an input: a choice that only
// other functions know under the same name is not.
func (c *calcSheet) applies(s *setting, in funcs.Input) bool {
	cell := c.at(s.cell.Row, s.cell.Col)
	if in.Kind != funcs.Choice || cell.Kind != Text && cell.Kind != Number {
		return true
	}
	word := nameForm(labelText(cell))
	has := func(choices []string) bool {
		return slices.ContainsFunc(choices, func(s string) bool { return nameForm(s) == word })
	}
	if has(in.Choices) {
		return true
	}
	return !slices.ContainsFunc(funcs.All(), func(f *funcs.Function) bool {
		other, ok := f.Input(in.Name)
		return ok && has(other.Choices)
	})
}

// readInput reads one input from a cell of the row or of a default.
func (p *Plan) readInput(c *calcSheet, r *Row, in funcs.Input, at CellRef, unit string, isDefault bool) {
	cell := c.at(at.Row, at.Col)
	address := c.sheet.address(at.Row, at.Col)
	reader := &reader{lib: p.lib, calc: c, visited: []string{address}}
	t, f := reader.term(in, cell)
	if f != nil {
		finding := placed(in.Name, at.String(), f)
		r.refuse(at, f.span, f.Code, finding.Message, append([]string{address}, f.Cells...)...)
		r.lastFault().Instead = f.instead
		return
	}
	if t == nil {
		return
	}
	t.unit = unit
	r.Inputs = append(r.Inputs, &Input{Name: in.Name, Written: writtenText(cell), Cell: at, Default: isDefault, term: t})
	if t.result != nil {
		r.needs = append(r.needs, *t.result)
	}
	for _, item := range t.list {
		if item.result != nil {
			r.needs = append(r.needs, *item.result)
		}
	}
}

// writtenText gives a cell as it was written, as far as that is known.
func writtenText(c Cell) string {
	if c.Kind == Text {
		return trim(c.Text)
	}
	return cellText(c)
}

// placed words a fault with the input and the cell it belongs to.
func placed(input, cell string, f *fault) funcs.Finding {
	finding := f.Finding
	finding.Input = input
	who := input
	if cell != "" {
		who = cell + " (" + input + ")"
	}
	switch {
	case f.tail:
		finding.Message = ended(who + " " + f.Message)
	case cell != "" && f.Severity == funcs.Refused:
		finding.Message = who + ": " + f.Message
	}
	return finding
}

// checkSamples refuses keys where nothing pairs, and finds the one sample that
// is given `for each`.
func (p *Plan) checkSamples(r *Row) {
	samples := 0
	for _, in := range r.Function.Inputs {
		if in.Kind == funcs.Sample {
			samples++
		}
	}
	for _, in := range r.Inputs {
		q := in.term.query
		if q == nil {
			continue
		}
		if q.query.Matched != nil && !r.Function.Paired {
			r.refuse(in.Cell, in.term.span(q.query.Matched.Span), "bad-value", fmt.Sprintf("%s (%s): %s does not pair its samples. Leave out matched by %s, or use paired-interval.",
				in.Cell, in.Name, r.Function.Name, nameText(q.query.Matched.Name)))
		}
		if in.term.input.Kind != funcs.Sample || q.query.ForEach == nil {
			continue
		}
		if samples > 1 {
			r.refuse(in.Cell, in.term.span(q.query.ForEach.Span), "bad-value", fmt.Sprintf("%s (%s): %s takes two samples, so it cannot be given for each %s. Give every group a row with a condition.",
				in.Cell, in.Name, r.Function.Name, nameText(q.query.ForEach.Name)))
			continue
		}
		r.each = in
	}
}

// resultUnit takes over the unit that a result's header names, where no input
// has one.
func (r *Row) resultUnit() {
	unit := ""
	for _, bc := range r.Block.resultColumns() {
		if res, ok := r.Function.Result(bc.Name); ok && res.Unit == funcs.SameUnit && bc.Unit != "" {
			unit = bc.Unit
			break
		}
	}
	for _, in := range r.Inputs {
		if in.term.input.Unit == funcs.SameUnit && in.term.unit == "" {
			in.term.unit = unit
		}
	}
}

// fileOptions gives how text files are read for a block.
func (c *calcSheet) fileOptions(b *Block) FileOptions {
	s := c.setting(decimalMark, b)
	if s == nil {
		return FileOptions{}
	}
	return FileOptions{DecimalComma: isComma(labelText(c.at(s.cell.Row, s.cell.Col)))}
}
