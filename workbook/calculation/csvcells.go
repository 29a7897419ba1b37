package calculation

import "context"

// NoTablesInText says why a text calculation sheet has no table sheets; see
// Options.NoTables.
const NoTablesInText = "a text file has no second sheet for a table. Give every group a row with a condition such as where depot = North, ask in a workbook"

// Columns counts the cells of a row.
func (t *TextSheet) Columns(row int) int {
	if row < 1 || row > len(t.rows) {
		return 0
	}
	return len(t.rows[row-1].fields)
}

// Quoted reports whether a cell stands in quotes in the file.
func (t *TextSheet) Quoted(c CellRef) bool {
	s, ok := t.CellSpan(c)
	return ok && s.Start < s.End && t.data[s.Start] == '"'
}

// Encode writes a text as it stands in the file as a whole cell: in quotes where
// it needs them.
func (t *TextSheet) Encode(text string) string { return t.encode(text) }

// ValueText writes a value as a cell of the file reads it.
func (t *TextSheet) ValueText(v any) string { return t.valueText(v) }

// Layout finds the blocks and rows of the sheet. What the inputs of rows mean is
// not read, so that it takes little time.
func (t *TextSheet) Layout() *Plan {
	p := &Plan{lib: newLibrary(t.Source(nil)), tables: map[string]*Row{}}
	_ = p.findSheets(context.Background()) // reading from memory has no error
	for _, c := range p.calcs {
		p.Sheets = append(p.Sheets, c.sheet.name)
		p.addBlocks(newCalcSheet(c.sheet))
	}
	return p
}
