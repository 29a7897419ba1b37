package calculation

import (
	"context"
	"fmt"
	"math"
	"slices"

	"halfwidth/funcs"
)

// differentRows is why two samples cannot be paired.
const differentRows = "these are different rows; use difference-interval, or give both columns of one table"

// pair evaluates two samples that must pair: by rows of one place, by a key, or
// number by number where both are written out. Both come back with one value a
// pair; a value without its partner stands beside NaN.
func pair(ctx context.Context, first, second *term, look lookUp, kept *cache) (a, b *argument, err error) {
	if f := cannotPair(first, second); f != nil {
		a, b = &argument{}, &argument{}
		b.refuse(f)
		return a, b, nil
	}
	if first.query == nil && first.area == nil {
		if a, err = first.evaluate(ctx, look, kept); err != nil {
			return nil, nil, err
		}
		b, err = second.evaluate(ctx, look, kept)
		return a, b, err
	}
	one, err := first.read(ctx)
	if err != nil {
		return nil, nil, err
	}
	two, err := second.read(ctx)
	if err != nil {
		return nil, nil, err
	}
	if one.refused() == nil && two.refused() == nil {
		p := &pairing{one: one, two: two}
		switch {
		case first.query != nil && first.query.query.Matched != nil:
			p.byKey(first.query, second.query)
		case sameRows(first, second, one, two):
			p.byRow()
			// Conditions that no row meets together ask for different rows too.
			if !p.together && one.tally.used > 0 && two.tally.used > 0 {
				p.refuse()
			}
		default:
			p.refuse()
		}
		p.finish()
	}
	mergeFaults(one, two)
	a, b = first.newArgument(), second.newArgument()
	a.fromReading(first, one)
	b.fromReading(second, two)
	return a, b, nil
}

// mergeFaults takes out of the second reading what the first says already, as
// where both have the same conditions over the same rows.
func mergeFaults(one, two *reading) {
	said := func(f fault) bool {
		return f.Severity != funcs.Refused && slices.ContainsFunc(one.faults, func(o fault) bool { return o.Message == f.Message })
	}
	if one.sheet == two.sheet && one.tally.undecided == two.tally.undecided {
		two.tally.undecided = skip{}
	}
	two.faults = slices.DeleteFunc(two.faults, said)
}

// newArgument is an argument with the origin that a term has before its sheet
// is read.
func (t *term) newArgument() *argument {
	a := &argument{}
	a.from.Origin = &funcs.Origin{Unit: t.unit}
	for _, n := range t.notes {
		a.from.Origin.Findings = append(a.from.Origin.Findings, n.Finding)
	}
	return a
}

// read gathers a term that is a query or a range.
func (t *term) read(ctx context.Context) (*reading, error) {
	if t.query != nil {
		return t.query.gather(ctx, true, &rooms{})
	}
	return t.area.gather(ctx)
}

// cannotPair refuses samples of which one is read and the other written out,
// or of which one has a key or groups.
func cannotPair(first, second *term) *fault {
	isRead := func(t *term) bool { return t.query != nil || t.area != nil }
	key := func(t *term) bool { return t.query != nil && t.query.query.Matched != nil }
	each := func(t *term) bool { return t.query != nil && t.query.query.ForEach != nil }
	refuse := func(message string) *fault {
		return &fault{Finding: funcs.Finding{Code: "different-rows", Severity: funcs.Refused, Message: message}}
	}
	switch {
	case each(first) || each(second):
		return refuse("Pairs cannot be taken for each group. Leave out for each, and give every group a row with a condition.")
	case isRead(first) != isRead(second):
		return refuse(ended("One sample is read from a sheet and the other written out: " + differentRows))
	case key(first) != key(second):
		return refuse("One sample has matched by and the other has none. Give both the column of the key.")
	}
	return nil
}

// sameRows reports whether two samples come from rows of one place.
func sameRows(first, second *term, one, two *reading) bool {
	if one.sheet != two.sheet {
		return false
	}
	switch {
	case first.query != nil && second.query != nil:
		return first.query.header == second.query.header
	case first.query == nil && second.query == nil:
		a, b := one.area, two.area
		width := func(x Area) int { return x.LastCol - x.FirstCol }
		byColumn := width(a) == width(b) && a.FirstRow == b.FirstRow && a.LastRow == b.LastRow
		byRow := a.FirstRow == a.LastRow && b.FirstRow == b.LastRow && a.FirstCol == b.FirstCol && a.LastCol == b.LastCol
		return byColumn || byRow
	}
	q, r := first.query, two
	if q == nil {
		q, r = second.query, one
	}
	return r.area.FirstCol == r.area.LastCol && r.area.FirstRow == q.first && r.area.LastRow == q.last
}

// pairing lines up the values of two readings.
type pairing struct {
	one, two *reading
	out      [2]series
	dropped  skip
	together bool // some row belongs to both samples
}

// refuse says that the samples come from different rows.
func (p *pairing) refuse() {
	p.two.faults = append(p.two.faults, fault{Finding: funcs.Finding{Code: "different-rows", Severity: funcs.Refused,
		Message: ended(fmt.Sprintf("%s and %s: %s", p.one.text, p.two.text, differentRows))}})
}

// add adds a pair, by the places of its values; -1 where there is none.
func (p *pairing) add(i, j int) {
	p.together = p.together || i >= 0 && j >= 0
	x, row, skipped := valueAt(p.one, i)
	y, other, skippedToo := valueAt(p.two, j)
	if math.IsNaN(x) && math.IsNaN(y) {
		return
	}
	if math.IsNaN(x) != math.IsNaN(y) {
		if p.dropped.n == 0 {
			p.dropped.row = max(row, other)
			if row > 0 && other > 0 && row != other {
				p.dropped.row = row
			}
		}
		p.dropped.n++
		// The call counts the pair; its skipped cell is not counted again.
		if skipped {
			p.one.tally.paired++
		}
		if skippedToo {
			p.two.tally.paired++
		}
	}
	p.out[0].add(x, row)
	p.out[1].add(y, other)
}

// valueAt gives value i with its row, and whether its cell was skipped.
func valueAt(r *reading, i int) (x float64, row int, skipped bool) {
	if i < 0 {
		return math.NaN(), 0, false
	}
	s := r.series[0]
	if !r.isRange {
		row = s.rows.at(i)
	} else {
		row = r.area.FirstRow + i/(r.area.LastCol-r.area.FirstCol+1)
	}
	_, skipped = slices.BinarySearch(r.tally.skips, int32(row))
	return s.values[i], row, skipped && math.IsNaN(s.values[i])
}

// byRow pairs the values of the same row; of two rows of a sheet, those of the
// same column.
func (p *pairing) byRow() {
	if p.one.isRange && p.two.isRange {
		for i := range p.one.series[0].values {
			p.add(i, i)
		}
		return
	}
	a, b := rowsOf(p.one), rowsOf(p.two)
	for i, j := 0, 0; i < a.n || j < b.n; {
		switch {
		case j == b.n || i < a.n && a.at(i) < b.at(j):
			p.add(i, -1)
			i++
		case i == a.n || b.at(j) < a.at(i):
			p.add(-1, j)
			j++
		default:
			p.add(i, j)
			i, j = i+1, j+1
		}
	}
}

// rowsOf lists the row of each value.
func rowsOf(r *reading) rowList {
	if !r.isRange {
		return r.series[0].rows
	}
	return rowList{n: len(r.series[0].values), first: r.area.FirstRow}
}

// byKey pairs the values whose rows hold the same key.
func (p *pairing) byKey(first, second *bound) {
	keys, ok := p.keys(p.one, first)
	others, okToo := p.keys(p.two, second)
	if !ok || !okToo {
		return
	}
	taken := make([]bool, len(p.two.series[0].values))
	for i := range p.one.series[0].values {
		key := keyAt(first, p.one.series[0].rows.at(i))
		if key == "" {
			continue
		}
		j, found := others[key]
		if !found {
			p.add(i, -1)
			continue
		}
		taken[j] = true
		p.add(i, j)
	}
	for j := range p.two.series[0].values {
		if key := keyAt(second, p.two.series[0].rows.at(j)); key != "" && !taken[j] {
			if _, found := keys[key]; !found {
				p.add(-1, j)
			}
		}
	}
}

// keys gives the place of the value of each key. A key that stands twice
// refuses the sample.
func (p *pairing) keys(r *reading, b *bound) (map[string]int, bool) {
	rows := r.series[0].rows
	m := make(map[string]int, rows.n)
	col := b.col(*b.query.Matched)
	for i := range rows.n {
		row := rows.at(i)
		key := keyAt(b, row)
		if key == "" {
			if !math.IsNaN(r.series[0].values[i]) {
				r.tally.noKey.add(row, col, "")
			}
			continue
		}
		if first, twice := m[key]; twice {
			one, two := r.sheet.address(rows.at(first), col), r.sheet.address(row, col)
			r.faults = append(r.faults, fault{Finding: funcs.Finding{Code: "key-repeated", Severity: funcs.Refused, Cells: []string{one, two},
				Message: fmt.Sprintf("The key %s stands twice, in %s and %s, so its pair is not plain. Correct it, or leave one out by a condition.",
					cellText(r.sheet.frame.At(row, col)), one, two)}, span: b.query.Matched.Span})
			return nil, false
		}
		m[key] = i
	}
	return m, true
}

// keyAt gives the key of a row, folded; "" where its cell is blank or an error.
func keyAt(b *bound, row int) string {
	cell := b.at.sheet.frame.At(row, b.col(*b.query.Matched))
	if cell.Kind == Text {
		return fold(cell.Text)
	}
	return groupName(cell)
}

// finish gives both readings the pairs in the place of their values, and says
// what was dropped.
func (p *pairing) finish() {
	if p.one.refused() != nil || p.two.refused() != nil {
		return
	}
	for i, r := range []*reading{p.one, p.two} {
		s := r.series[0]
		s.values, s.rows = p.out[i].values, p.out[i].rows
		if r.isRange && r.area.FirstCol == r.area.LastCol {
			s.col, r.isRange = r.area.FirstCol, false
		}
		if n := r.tally.noKey; n.n > 0 {
			at := r.sheet.address(n.row, n.col)
			r.faults = append(r.faults, fault{Finding: funcs.Finding{Code: "cells-skipped", Severity: funcs.Caution, Cells: []string{at},
				Message: fmt.Sprintf("%s left out because the key's cell is blank or an error; the first is %s. Fill in the keys.", wereWas(n.n, "row"), at)}})
		}
	}
	if p.dropped.n > 0 {
		p.one.faults = append(p.one.faults, fault{Finding: funcs.Finding{Code: "cells-skipped", Severity: funcs.Caution,
			Message: fmt.Sprintf("%s dropped because one of the two numbers is missing; the first is that of row %d. Fill in the partners.",
				wereWas(p.dropped.n, "pair"), p.dropped.row)}})
	}
}
