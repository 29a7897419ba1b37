package calculation

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
