package calculation

import "fmt"

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
