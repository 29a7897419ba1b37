package calculation

import (
	"context"
	"fmt"
	"math"

	"halfwidth/funcs"
)

const refusedSeverity = funcs.Refused

// gapFindings tells of blank rows and repeated headers between the values.
func (g *gathering) gapFindings() []fault {
	var out []fault
	sh := g.at.sheet
	say := func(code string, severity funcs.Severity, cells []string, format string, a ...any) {
		out = append(out, fault{Finding: funcs.Finding{Code: code, Severity: severity, Cells: cells, Message: fmt.Sprintf(format, a...)}})
	}
	var inside []gap
	for _, gp := range sh.gaps(g.first, g.last) {
		if g.inside.first < gp.first && gp.last < g.inside.last {
			inside = append(inside, gp)
		}
	}
	if n := len(inside); n > 0 {
		first := inside[0]
		where := "Row " + decimal(first.first) + " of " + sh.label + " is blank"
		if first.last > first.first {
			where = fmt.Sprintf("Rows %d to %d of %s are blank", first.first, first.last, sh.label)
		}
		if n > 1 {
			where += ", and " + plural(n-1, "more gap")
		}
		say("gap-in-table", funcs.Caution, []string{sh.address(first.first, g.firstCol())},
			"%s, but values follow below and were taken. Check that they belong to the same table.", where)
	}
	if repeated := g.repeatedHeaders(); len(repeated) > 0 {
		at := sh.address(repeated[0], g.firstCol())
		say("repeated-header", funcs.Information, []string{at}, "%s left out because the header stands there again; the first is row %d (%s).",
			wereWas(len(repeated), "row"), repeated[0], at)
	}
	return out
}

// firstCol is the first column that the query names.
func (b *bound) firstCol() int {
	if len(b.cols) > 0 {
		return b.cols[0]
	}
	return 1
}

// area ties a range to its sheet and asks for its columns.
func (lib *library) area(r *Range, own *sheet) *boundRange {
	b := &boundRange{rng: r, sheet: own}
	if r.Place == nil {
		if own == nil {
			b.fault = unknownPlace(r.Span, r.Area.String()+" is a cell of a calculation sheet, and there is none here", "Put the sheet before it: Trips!"+r.Area.String()+".")
		}
		return b
	}
	at, f := lib.locate(r.Place)
	if f == nil && at.place.Kind != Sheet {
		f = unknownPlace(r.Place.Span, at.place.Name+" is "+at.place.Kind.String()+", not a sheet", "Write "+at.sheet.label+"!"+r.Area.String()+", or a column: NAME in "+nameText(at.place.Name)+".")
	}
	if f != nil {
		b.fault = f
		return b
	}
	b.sheet = at.sheet
	if b.sheet.frame == nil {
		lib.want(b.sheet, func(*Frame) Columns {
			if r.Area.WholeRows {
				return Columns{All: true}
			}
			c := Columns{}
			for col := r.Area.FirstCol; col <= r.Area.LastCol; col++ {
				c.List = append(c.List, col)
			}
			return c
		})
	}
	return b
}

// boundRange is a range tied to its sheet.
type boundRange struct {
	rng   *Range
	sheet *sheet
	fault *fault
}

// resolved gives the range down to the last value of its sheet.
func (b *boundRange) resolved() (Area, *fault) {
	if b.fault == nil && b.sheet.err != nil {
		return Area{}, b.sheet.unreadable(b.rng.Span)
	}
	if b.fault != nil {
		return Area{}, b.fault
	}
	a := b.rng.Area
	lastCol := a.LastCol
	if a.WholeRows {
		lastCol = b.sheet.frame.LastCol()
	}
	lastRow := a.LastRow
	if a.WholeCols {
		lastRow = b.sheet.frame.LastRow()
	}
	a = a.within(lastRow, lastCol)
	a.WholeCols, a.WholeRows = false, false
	if a.LastRow < a.FirstRow || a.LastCol < a.FirstCol {
		return a, unknownPlace(b.rng.Span, b.sheet.label+"!"+b.rng.Area.String()+" holds no value", "Check the sheet and the columns.")
	}
	return a, nil
}

// gather reads the numbers of a range, row by row from left to right.
func (b *boundRange) gather(ctx context.Context) (*reading, error) {
	r := &reading{sheet: b.sheet, isRange: true}
	area, f := b.resolved()
	if f != nil {
		r.faults = append(r.faults, *f)
		return r, nil
	}
	r.area = area
	r.text = b.sheet.label + "!" + area.String()
	r.tally = tally{sheet: b.sheet, keepSkips: true, ofRange: true}
	s := &series{col: area.FirstCol}
	r.series = []*series{s}
	frame := b.sheet.frame
	last := min(area.LastRow, max(frame.LastRow(), area.FirstRow))
	s.values = make([]float64, 0, max(0, last-area.FirstRow+1)*(area.LastCol-area.FirstCol+1))
	for row := area.FirstRow; row <= last; row++ {
		if row&0x3fff == 0 && ctx.Err() != nil {
			return nil, ctx.Err()
		}
		for col := area.FirstCol; col <= area.LastCol; col++ {
			x := math.NaN()
			if c := frame.column(col); c != nil {
				x = r.tally.take(c, row, frame.Row(row), ColumnRef{Span: b.rng.Span}, 0)
			}
			s.values = append(s.values, x)
			if !math.IsNaN(x) && area.FirstCol == area.LastCol {
				s.totals.add(row, x, frame.Row(row)&RowTotal != 0)
			}
		}
	}
	if r.tally.stray.Code != "" {
		r.faults = append(r.faults, r.tally.stray)
	}
	r.faults = append(r.faults, r.tally.findings()...)
	r.faults = append(r.faults, s.totals.findings(b.sheet, area.FirstCol, b.rng.Span)...)
	return r, nil
}
