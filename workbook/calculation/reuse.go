package calculation

import (
	"context"
	"reflect"
	"slices"
	"sync/atomic"
)

// RunAfter is Run where an earlier state of the book has been worked out: a row
// that asks the same of cells which did not change keeps its outcome, and
// RowResult.Kept says so. Its results are those of Run. Sheets whose frames come
// from those of before by Frame.With are compared in the time that the changes
// took; others cell by cell. before may be nil.
func (p *Plan) RunAfter(ctx context.Context, workers int, before *Results) (*Results, error) {
	done := make([]*RowResult, len(p.Rows))
	look := func(c resultCell) (Cell, *fault) { return resultOf(done[c.row.order], c) }
	earlier := newEarlier(before)
	var worked atomic.Int64
	tell := func() {
		if p.options.Progress != nil {
			p.options.Progress(int(worked.Add(1)), len(p.Rows))
		}
	}
	levels := p.levels()
	p.cache = cache{keep: p.options.KeepValues}
	p.cache.expect(levels)
	for _, level := range levels {
		var anew []*Row
		for _, r := range level {
			if old := earlier.keeps(r, look); old != nil {
				done[r.order] = old.movedTo(r)
				p.cache.done(r)
				tell()
			} else {
				anew = append(anew, r)
			}
		}
		anew = byReading(anew)
		err := inParallel(ctx, workers, len(anew), func(i int) error {
			result, err := p.work(ctx, anew[i], look)
			done[anew[i].order] = result
			p.cache.done(anew[i])
			tell()
			return err
		})
		if err != nil {
			return nil, err
		}
	}
	return p.collect(done), nil
}

// collect makes the results of a plan of those of its rows.
func (p *Plan) collect(done []*RowResult) *Results {
	out := &Results{Rows: done, Diagnostics: p.Diagnostics()}
	for _, r := range done {
		if note := r.Row.Block.column(ResultColumn, "note"); note == nil || r.Row.closed[note.Col] {
			out.Diagnostics = append(out.Diagnostics, r.Findings...)
		}
		if r.table != nil {
			out.Tables = append(out.Tables, *r.table)
		}
	}
	return out
}

// movedTo gives an outcome to the same row of a later plan.
func (r *RowResult) movedTo(row *Row) *RowResult {
	moved := &RowResult{Row: row, Status: r.Status, Findings: r.Findings, Outcome: r.Outcome, Groups: r.Groups, Kept: true, skipped: r.skipped}
	moved.tabulate()
	moved.Edits = moved.edits()
	return moved
}

// earlier is what an earlier plan gave, and how the sheets that it read differ
// from those of now.
type earlier struct {
	rows  map[rowPlace]*RowResult
	diffs map[[2]*Frame]*difference
}

// rowPlace is where a calculation stands.
type rowPlace struct {
	sheet         string
	number, block int // the row, and the first column of its block
}

func (r *Row) place() rowPlace { return rowPlace{r.Block.Sheet, r.Number, r.Block.FirstCol} }

func newEarlier(before *Results) *earlier {
	e := &earlier{rows: map[rowPlace]*RowResult{}, diffs: map[[2]*Frame]*difference{}}
	if before == nil {
		return e
	}
	for _, r := range before.Rows {
		e.rows[r.Row.place()] = r
	}
	return e
}

// keeps gives the earlier outcome of a row, nil where it must be worked out.
func (e *earlier) keeps(r *Row, look lookUp) *RowResult {
	old := e.rows[r.place()]
	if old == nil || r.Function == nil || len(r.faults) > 0 || !e.sameRow(old.Row, r) {
		return nil
	}
	for i, need := range r.needs {
		was := old.Row.needs[i]
		now, f := look(need)
		then, g := resultOf(e.rows[was.row.place()], was)
		if now != then || f != nil || g != nil {
			return nil
		}
	}
	return old
}

// sameRow reports that two rows ask the same of the same cells, but for the
// results of other rows.
func (e *earlier) sameRow(old, now *Row) bool {
	names := func(r *Row) (out []string) {
		for _, c := range r.Block.resultColumns() {
			out = append(out, c.Name)
		}
		return out
	}
	if old.Function != now.Function || len(old.faults) > 0 || old.table != now.table || len(old.needs) != len(now.needs) ||
		len(old.Inputs) != len(now.Inputs) || old.Block.calc.sheet.label != now.Block.calc.sheet.label || old.Block.work != now.Block.work ||
		!slices.Equal(names(old), names(now)) ||
		!reflect.DeepEqual(old.cautions, now.cautions) {
		return false
	}
	for i, need := range now.needs {
		if was := old.needs[i]; was.name != need.name || was.row.place() != need.row.place() || was.address() != need.address() {
			return false
		}
	}
	for i, in := range now.Inputs {
		if was := old.Inputs[i]; was.Name != in.Name || was.Cell != in.Cell || was.Default != in.Default || !e.sameTerm(was.term, in.term) {
			return false
		}
	}
	return true
}

// sameTerm reports that two terms give the same, but for results of other rows.
func (e *earlier) sameTerm(old, now *term) bool {
	if old.unit != now.unit || old.written != now.written || old.far != now.far || old.one != now.one ||
		(old.result == nil) != (now.result == nil) || len(old.list) != len(now.list) ||
		(old.query == nil) != (now.query == nil) || (old.area == nil) != (now.area == nil) ||
		!reflect.DeepEqual(old.value, now.value) || !reflect.DeepEqual(old.notes, now.notes) {
		return false
	}
	for i, item := range now.list {
		was := old.list[i]
		if was.name != item.name || was.number != item.number || was.text != item.text || (was.result == nil) != (item.result == nil) {
			return false
		}
	}
	switch {
	case now.query != nil:
		return e.sameQuery(old.query, now.query)
	case now.area != nil:
		return e.sameArea(old.area, now.area)
	}
	return true
}

func (e *earlier) sameQuery(old, now *bound) bool {
	if old.fault != nil || now.fault != nil || old.header != now.header || old.first != now.first || old.last != now.last || now.last < now.first ||
		!slices.Equal(old.cols, now.cols) || old.at.place != now.at.place || old.query.String() != now.query.String() {
		return false
	}
	d := e.difference(old.at.sheet, now.at.sheet)
	return d != nil && !slices.ContainsFunc(now.cols, func(col int) bool { return d.touches(col, now.header, now.last) }) &&
		!d.touchesFlags(now.first, now.last)
}

func (e *earlier) sameArea(old, now *boundRange) bool {
	was, f := old.resolved()
	is, g := now.resolved()
	if f != nil || g != nil || was != is || old.rng.String() != now.rng.String() {
		return false
	}
	d := e.difference(old.sheet, now.sheet)
	if d == nil || d.touchesFlags(is.FirstRow, is.LastRow) {
		return false
	}
	for col := is.FirstCol; col <= is.LastCol; col++ {
		if d.touches(col, is.FirstRow, is.LastRow) {
			return false
		}
	}
	return true
}

// difference finds how a sheet differs from what it was; nil where they are
// not the same sheet.
func (e *earlier) difference(old, now *sheet) *difference {
	if old.label != now.label || old.err != nil || now.err != nil || (old.calc == nil) != (now.calc == nil) ||
		old.shelf.source.RecalculatesLate() != now.shelf.source.RecalculatesLate() {
		return nil
	}
	key := [2]*Frame{old.frame, now.frame}
	d := e.diffs[key]
	if d == nil {
		d = &difference{old: old.frame, now: now.frame, columns: map[int][]int{}}
		d.findFlags()
		e.diffs[key] = d
	}
	return d
}

// difference is the rows in which two frames differ, rising, for each column
// that was asked for.
type difference struct {
	old, now *Frame
	columns  map[int][]int
	flags    []int
}

// touchesFlags reports that the flags of some row between two differ.
func (d *difference) touchesFlags(first, last int) bool { return anyBetween(d.flags, first, last) }

// touches reports that some cell of a column between two rows differs.
func (d *difference) touches(col, first, last int) bool {
	rows, known := d.columns[col]
	if !known {
		rows = d.column(col)
		d.columns[col] = rows
	}
	return anyBetween(rows, first, last)
}

func anyBetween(rising []int, first, last int) bool {
	i, _ := slices.BinarySearch(rising, first)
	return i < len(rising) && rising[i] <= last
}

func (d *difference) findFlags() {
	old, now := d.old.flags, d.now.flags
	if slices.Equal(old, now) {
		return
	}
	for row := 1; row <= max(len(old), len(now)); row++ {
		if d.old.Row(row) != d.now.Row(row) {
			d.flags = append(d.flags, row)
		}
	}
}

// column lists the rows in which a column differs. Chunks that both frames
// share are passed over.
func (d *difference) column(col int) []int {
	old, now := d.old.column(col), d.now.column(col)
	if old == now {
		return nil
	}
	var none Column
	if old == nil {
		old = &none
	}
	if now == nil {
		now = &none
	}
	var rows []int
	for at := range max(len(old.chunks), len(now.chunks)) {
		if at < len(old.chunks) && at < len(now.chunks) && old.chunks[at].shares(&now.chunks[at]) {
			continue
		}
		for row := at<<chunkBits + 1; row <= (at+1)<<chunkBits; row++ {
			if !sameCell(old.At(row), now.At(row)) {
				rows = append(rows, row)
			}
		}
	}
	return rows
}

// shares reports that two chunks are the same memory.
func (k *chunk) shares(other *chunk) bool {
	return sameSlice(k.kinds, other.kinds) && sameSlice(k.numbers, other.numbers) && sameSlice(k.texts, other.texts)
}

func sameSlice[T any](a, b []T) bool {
	return len(a) == len(b) && (len(a) == 0 || &a[0] == &b[0])
}

// sameCell compares cells; a number that is none equals itself.
func sameCell(a, b Cell) bool {
	return a == b || a.Number != a.Number && b.Number != b.Number && a.Kind == b.Kind && a.Text == b.Text
}
