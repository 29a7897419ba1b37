package calculation

import "slices"

// Change is a new value of a cell; the blank Cell empties it.
type Change struct {
	At    CellRef
	Value Cell
}

// With gives a frame with changed cells and leaves f as it is. Both share what
// did not change, so that a change of a few cells of a large sheet costs little.
// f must keep all its columns; hidden rows stay hidden.
func (f *Frame) With(changes []Change) *Frame {
	g := &Frame{flags: slices.Clone(f.flags), columns: slices.Clone(f.columns), texts: slices.Clip(f.texts), ids: map[string]uint32{},
		compact: f.compact, lastRow: f.lastRow, lastCol: f.lastCol}
	own := map[*Column]map[int]bool{} // the columns and chunks that are g's own
	for _, c := range changes {
		column := g.ownColumn(c.At.Col, own)
		if at := (c.At.Row - 1) >> chunkBits; at < len(column.chunks) && !own[column][at] {
			k := column.chunks[at]
			column.chunks[at] = chunk{slices.Clone(k.kinds), slices.Clone(k.numbers), slices.Clone(k.texts)}
			own[column][at] = true
		}
		if kind, flags := column.kind(c.At.Row); kind != Blank || flags != 0 {
			k, i := column.kindByte(c.At.Row)
			k.kinds[i] = 0
		}
		g.Set(c.At.Row, c.At.Col, c.Value)
	}
	for _, c := range changes {
		g.reflag(c.At.Row)
	}
	for g.lastRow > 0 && g.flags[g.lastRow-1]&RowFilled == 0 {
		g.lastRow--
	}
	if len(g.texts) > 2*g.compact+1024 {
		return g.rebuilt()
	}
	return g
}

// ownColumn gives a column of g that is not shared with another frame.
func (f *Frame) ownColumn(col int, own map[*Column]map[int]bool) *Column {
	old := f.column(col)
	if own[old] != nil {
		return old
	}
	column := f.Column(col) // a new one where there was none
	if old != nil {
		column = &Column{frame: f, col: col, chunks: slices.Clone(old.chunks)}
		f.columns[col-1] = column
	}
	own[column] = map[int]bool{}
	return column
}

// reflag finds anew whether a row is filled and whether it names a total.
func (f *Frame) reflag(row int) {
	flags := f.flags[row-1] & RowHidden
	for _, c := range f.columns {
		if c == nil {
			continue
		}
		cell := c.At(row)
		if isFilled(cell) {
			flags |= RowFilled
		}
		if cell.Kind == Text && StartsLikeTotal(cell.Text) {
			flags |= RowTotal
		}
	}
	f.flags[row-1] = flags
}

// rebuilt gives the same frame without the texts that no cell holds any more.
func (f *Frame) rebuilt() *Frame {
	g := NewFrame()
	for i, flags := range f.flags {
		g.SetRow(i+1, flags)
	}
	for _, c := range f.columns {
		if c == nil {
			continue
		}
		for row := 1; row <= len(c.chunks)<<chunkBits; row++ {
			if cell := c.At(row); cell != (Cell{}) {
				g.Set(row, c.col, cell)
			}
		}
	}
	g.compact = len(g.texts)
	return g
}
