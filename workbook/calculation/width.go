package calculation

import (
	"fmt"

	"halfwidth/funcs"
)

// lineWidths is how long the lines of a text file are, as far as a header may be
// held against them: of the first HeadRows all, of those below only each that is
// longer than all before it.
type lineWidths struct {
	head    []lineWidth // by row - 1
	longest []lineWidth
}

// lineWidth is how many cells a line has, and the last of them that is not blank.
type lineWidth struct{ row, cells, last int }

// SetWidth tells how many cells the line of a text file has, and which of them is
// the last that is not blank. Lines come in order.
func (f *Frame) SetWidth(row, cells, last int) {
	w := lineWidth{row, cells, last}
	switch n := len(f.widths.longest); {
	case row <= HeadRows:
		f.widths.head = append(f.widths.head, w)
	case n == 0 || last > f.widths.longest[n-1].last:
		f.widths.longest = append(f.widths.longest, w)
	}
}

// longLine finds the first line below a header that goes on beyond it. A mark in
// a cell without quotes, such as a decimal comma, makes two cells of one, so that
// the cells after it stand under the names of others.
func (f *Frame) longLine(header int) (long, head lineWidth, found bool) {
	if header < 1 || header > len(f.widths.head) {
		return long, head, false
	}
	head = f.widths.head[header-1]
	for _, list := range [][]lineWidth{f.widths.head[header:], f.widths.longest} {
		for _, w := range list {
			if w.last > head.cells {
				return w, head, true
			}
		}
	}
	return long, head, false
}

// checkWidths refuses a text file of which a line is longer than its header. What
// follows a blank line may be another table, with a header of its own.
func (b *bound) checkWidths() {
	sh := b.at.sheet
	long, head, found := sh.frame.longLine(b.header)
	if !found || long.row > b.last {
		return
	}
	if gaps := sh.gaps(b.first, b.last); len(gaps) > 0 && gaps[0].first < long.row {
		return
	}
	at := sh.address(long.row, head.cells+1)
	b.refuse(b.query.Place.Span, fmt.Sprintf("%s lies beyond the header, row %d with %s, so a cell of row %d may be cut in two. Put cells that hold the separator in quotes, or give the header a name for each column.",
		at, b.header, plural(head.cells, "cell"), long.row), at)
}

// checkLine holds the line of a row in a text sheet against the line of its
// header. Where it has more cells, one may be cut in two, as 1; 2; 3 is in a file
// that is separated by semicolons; the cells after it then stand in the columns
// of results, and nothing is written over them. A remark may stand right of a row.
func (c *calcSheet) checkLine(r *Row) {
	lines := c.sheet.frame.lines
	if r.Number > len(lines) || r.Function == nil {
		return
	}
	most := 0
	for _, b := range c.blocks {
		if b.Header < r.Number && r.Number <= b.LastRow {
			most = max(most, lines[b.Header-1].cells)
		}
	}
	line := lines[r.Number-1]
	if line.cells <= most {
		return
	}
	what := fmt.Sprintf("The line of row %d has %s, and that of its header %d, so a cell of it may be cut in two. Put cells that hold the separator in quotes", r.Number, plural(line.cells, "cell"), most)
	for _, bc := range r.Block.Columns {
		in, ok := r.Function.Input(bc.Name)
		isList := ok && (in.Kind == funcs.Sample || in.Kind == funcs.Samples || in.Kind == funcs.Numbers)
		if at := (CellRef{r.Number, bc.Col}); bc.Role == InputColumn && isList && c.at(at.Row, at.Col).Kind == Number {
			r.closed = map[int]bool{}
			for _, result := range r.Block.resultColumns() {
				r.closed[result.Col] = true
			}
			r.refuse(at, Span{}, "long-line", what+".")
			return
		}
	}
	if line.last <= most {
		r.caution(CellRef{r.Number, r.Block.work}, funcs.Caution, "long-line", what+", or delete the separators at its end.")
	}
}
