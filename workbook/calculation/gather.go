package calculation

import (
	"cmp"
	"context"
	"math"
	"slices"
	"strconv"
	"strings"

	"halfwidth/funcs"
)

// series is the values of one sample with the rows they stand in; for a count
// or a sum, the one number.
type series struct {
	name    string
	order   float64 // the name as a number, NaN where it is none
	col     int
	values  []float64
	rows    rowList
	totals  totals
	sum     compensated
	count   int
	skipped int // cells that were not blank
}

// add adds a value and the row that it stands in.
func (s *series) add(x float64, row int) {
	s.values = append(s.values, x)
	s.rows.add(row)
}

// reading is what an expression gave: its samples, and what is to be said of
// how they were read.
type reading struct {
	series []*series
	tally  tally
	faults []fault
	text   string // addresses and conditions as resolved
	unit   string
	sheet  *sheet
	rows   int // rows that met the conditions
	facts  funcs.Facts
	// Of a range: where value i stands.
	area    Area
	isRange bool
}

// refused gives the first fault that keeps the reading from being used.
func (r *reading) refused() *fault {
	for i := range r.faults {
		if r.faults[i].Severity == refusedSeverity {
			return &r.faults[i]
		}
	}
	return nil
}

// address gives the cell of value i of a series.
func (r *reading) address(group, i int) string {
	if group < 0 || group >= len(r.series) || i < 0 {
		return ""
	}
	if r.isRange {
		width := r.area.LastCol - r.area.FirstCol + 1
		return r.sheet.address(r.area.FirstRow+i/width, r.area.FirstCol+i%width)
	}
	s := r.series[group]
	if i >= s.rows.n {
		return ""
	}
	return r.sheet.address(s.rows.at(i), s.col)
}

// valueColumn is a column that a query takes numbers from.
type valueColumn struct {
	ref    ColumnRef
	col    int
	column *Column
	factor float64
	series *series // where there are no groups
}

// gather reads what a query asks for from its sheet, which must be read.
// keepSkips also lists the rows whose cells were skipped.
func (b *bound) gather(ctx context.Context, keepSkips bool, room *rooms) (*reading, error) {
	r := &reading{sheet: b.at.sheet}
	if f := b.ready(); f != nil {
		r.faults = append(r.faults, *f)
		return r, nil
	}
	r.tally = tally{sheet: b.at.sheet, keepSkips: keepSkips}
	r.text = b.text()
	g := &gathering{bound: b, reading: r, room: room}
	if f := g.prepare(); f != nil {
		r.faults = append(r.faults, *f)
		return r, nil
	}
	if err := g.run(ctx); err != nil {
		return nil, err
	}
	g.finish()
	return r, nil
}

// gathering is the work of one gather.
type gathering struct {
	*bound
	reading *reading
	room    *rooms
	tests   []*test
	columns []valueColumn
	group   *Column
	counts  []int32 // how many rows hold each text of the group's column
	groups  map[string]*series
	byText  []*series // the group of each text, as far as met
	blank   []bool    // of each text: asked, and blank
	inside  runningRows
	plain   bool // the numbers of one column as they are, which is done in fewer steps
}

// runningRows is the first and last row that gave a value.
type runningRows struct{ first, last int }

func (r *runningRows) add(row int) {
	if r.first == 0 {
		r.first = row
	}
	r.last = row
}

func (g *gathering) prepare() *fault {
	q, sh := g.query, g.at.sheet
	for _, c := range q.Where {
		t, f := g.newTest(c)
		if f != nil {
			return f
		}
		g.tests = append(g.tests, t)
		g.reading.faults = append(g.reading.faults, g.matchesNothing(c)...)
	}
	for _, c := range q.Columns {
		col := g.col(c)
		v := valueColumn{ref: c, col: col, column: sh.frame.column(col), factor: unitSeconds(c.Unit)}
		g.reading.unit = c.Unit
		if q.ForEach == nil {
			v.series = &series{name: trim(c.Name), col: col}
			g.reading.series = append(g.reading.series, v.series)
		}
		g.columns = append(g.columns, v)
	}
	g.plain = q.What == Values && len(g.columns) == 1 && g.columns[0].factor == 0
	if q.Matched != nil {
		col := g.col(*q.Matched)
		if f := sh.unusable(sh.columnFacts(col, g.first, g.last), col, *q.Matched, "key"); f != nil {
			return f
		}
	}
	if q.What == Count && q.ForEach == nil {
		g.reading.series = []*series{{}}
	}
	if q.ForEach == nil {
		return nil
	}
	col := g.col(*q.ForEach)
	if f := sh.unusable(sh.columnFacts(col, g.first, g.last), col, *q.ForEach, "group"); f != nil {
		return f
	}
	g.group = sh.frame.column(col)
	g.counts = sh.columnFacts(col, g.first, g.last).counts
	g.groups = map[string]*series{}
	g.byText = make([]*series, len(sh.frame.texts))
	g.blank = make([]bool, len(sh.frame.texts))
	return nil
}

// run goes through the rows, or through those that may meet the conditions.
func (g *gathering) run(ctx context.Context) error {
	frame := g.at.sheet.frame
	repeated := g.repeatedHeaders()
	visit := func(row int) {
		flags := frame.Row(row)
		if flags&RowFilled == 0 {
			return
		}
		for len(repeated) > 0 && repeated[0] < row {
			repeated = repeated[1:]
		}
		if (len(repeated) == 0 || repeated[0] != row) && g.meets(row) {
			g.row(row, flags)
		}
	}
	const often = 0x3fff
	if rows, ok := g.candidates(); ok {
		if len(g.tests) == 0 && len(repeated) == 0 {
			g.makeRoom(len(rows), rows) // each of them gives a value
		} else {
			g.makeRoom(len(rows), nil)
		}
		for i, row := range rows {
			if i&often == 0 && ctx.Err() != nil {
				return ctx.Err()
			}
			visit(int(row))
		}
		return nil
	}
	if len(g.tests) == 0 {
		g.makeRoom(g.last-g.first+1, nil)
	}
	for row := g.first; row <= g.last; row++ {
		if row&often == 0 && ctx.Err() != nil {
			return ctx.Err()
		}
		visit(row)
	}
	return nil
}

// makeRoom makes room for so many values in each sample that is no group; rows are
// those that they will stand in, where that is known.
func (g *gathering) makeRoom(n int, rows []int32) {
	for _, c := range g.columns {
		if c.series != nil && g.query.What != Sum {
			c.series.rows = rowList{list: rows, lent: rows != nil}
			g.makeRoomFor(c.series, max(0, n))
		}
	}
}

// meets reports whether a row meets all conditions; a row that none of them
// rules out but one cannot decide is counted.
func (g *gathering) meets(row int) bool {
	var open *test
	for _, t := range g.tests {
		switch t.at(row) {
		case fails:
			return false
		case undecided:
			if open == nil {
				open = t
			}
		}
	}
	if open != nil {
		g.reading.tally.undecided.add(row, open.column.col, cellText(open.column.At(row)))
	}
	return open == nil
}

// row takes the values of a row that meets the conditions.
func (g *gathering) row(row int, flags RowFlags) {
	r := g.reading
	r.rows++
	if flags == RowFilled && g.plain {
		c := &g.columns[0]
		if x, ok := c.column.plainNumber(row); ok {
			s := c.series
			if s == nil {
				s = g.seriesFor(row, c)
			}
			if s != nil {
				r.tally.used++
				g.inside.add(row)
				s.totals.add(row, x, false)
				s.add(x, row)
			}
			return
		}
	}
	byText := flags&RowTotal != 0
	if g.query.What == Count {
		s := g.seriesFor(row, nil)
		if s == nil {
			return
		}
		s.count++
		r.tally.used++
		r.tally.hide(flags)
		g.inside.add(row)
		if byText {
			s.totals.add(row, math.NaN(), true)
		}
		return
	}
	for i := range g.columns {
		c := &g.columns[i]
		s := g.seriesFor(row, c)
		if s == nil {
			continue
		}
		before := r.tally.used
		x := r.tally.take(c.column, row, flags, c.ref, c.factor)
		if r.tally.used > before {
			g.inside.add(row)
			s.totals.add(row, x, byText)
		} else if kind, _ := c.column.kind(row); kind != Blank {
			s.skipped++
		}
		if g.query.What == Sum {
			if !math.IsNaN(x) {
				s.sum.add(x)
				s.count++
			}
			continue
		}
		s.add(x, row)
	}
}

// seriesFor gives the series that a row belongs to: that of the column, or of
// the row's group; nil where the group's cell is blank or an error.
func (g *gathering) seriesFor(row int, c *valueColumn) *series {
	if g.group == nil {
		if c != nil {
			return c.series
		}
		return g.reading.series[0]
	}
	kind, _ := g.group.kind(row)
	if kind == Text {
		id := g.group.text(row)
		if g.byText[id] == nil && !g.blank[id] {
			if name := trim(g.at.sheet.frame.texts[id]); name == "" {
				g.blank[id] = true
			} else {
				g.byText[id] = g.named(name, c)
				g.roomForGroup(g.byText[id], id)
			}
		}
		if !g.blank[id] {
			return g.byText[id]
		}
	} else if name := groupName(g.group.At(row)); name != "" {
		return g.named(name, c)
	}
	g.reading.tally.noGroup.add(row, g.group.col, "")
	return nil
}

// roomForGroup makes room for the values of a group whose rows have a text.
func (g *gathering) roomForGroup(s *series, id uint32) {
	if s.values == nil && g.query.What == Values && len(g.query.Where) == 0 {
		g.makeRoomFor(s, int(g.counts[id]))
	}
}

func (g *gathering) makeRoomFor(s *series, n int) {
	s.values = g.room.forValues(n)
	if !s.rows.lent && (g.group != nil || len(g.query.Where) > 0) {
		s.rows.list = g.room.forRows(n)
	}
}

// named gives the series of a group's name, a new one where it is the first.
func (g *gathering) named(name string, c *valueColumn) *series {
	name = strings.Map(func(r rune) rune {
		if r == '\u00a0' {
			return ' '
		}
		return r
	}, name)
	key := fold(name)
	s := g.groups[key]
	if s == nil {
		s = &series{name: name, order: math.NaN()}
		if c != nil {
			s.col = c.col
		}
		if x, ok := parseNumber(name); ok {
			s.order = x
		}
		g.groups[key] = s
		g.reading.series = append(g.reading.series, s)
	}
	return s
}

// groupName names the group of a cell that holds no text; "" where it has none.
func groupName(c Cell) string {
	switch c.Kind {
	case Number, Duration:
		return funcs.FormatNumber(c.Number)
	case Date:
		return dateText(c.Number, c.Number == math.Trunc(c.Number))
	case Bool:
		if c.Number != 0 {
			return "yes"
		}
		return "no"
	}
	return ""
}

// orderSeries puts groups in order: numbers by value first, then names by their
// folded code points.
func orderSeries(list []*series) {
	slices.SortStableFunc(list, func(a, b *series) int {
		aNumber, bNumber := !math.IsNaN(a.order), !math.IsNaN(b.order)
		switch {
		case aNumber && bNumber && a.order != b.order:
			return cmp.Compare(a.order, b.order)
		case aNumber != bNumber && aNumber:
			return -1
		case aNumber != bNumber:
			return 1
		}
		return cmp.Or(cmp.Compare(fold(a.name), fold(b.name)), cmp.Compare(a.name, b.name))
	})
}

// finish orders the groups and words what was found.
func (g *gathering) finish() {
	r, q := g.reading, g.query
	if g.group != nil {
		orderSeries(r.series)
	}
	if r.tally.stray.Code != "" {
		r.faults = append(r.faults, r.tally.stray)
	}
	r.faults = append(r.faults, r.tally.findings()...)
	for _, s := range r.series {
		col := s.col
		if col == 0 {
			col = 1
		}
		r.faults = append(r.faults, s.totals.findings(r.sheet, col, q.Span)...)
	}
	r.faults = append(r.faults, g.gapFindings()...)
}

// text writes the addresses and conditions as resolved.
func (b *bound) text() string {
	q := b.query
	unit := func(c ColumnRef) string {
		if c.Unit == "" {
			return ""
		}
		return " in " + c.Unit
	}
	short := func(c ColumnRef) string { return nameText(c.Name) + " (" + b.area(b.col(c)).String() + unit(c) + ")" }
	parts := make([]string, len(q.Columns))
	for i, c := range q.Columns {
		parts[i] = b.area(b.col(c)).String() + unit(c)
	}
	var w strings.Builder
	switch q.What {
	case Count:
		w.WriteString("count of rows " + b.at.sheet.label + "!" + strconv.Itoa(b.first) + ":" + strconv.Itoa(max(b.first, b.last)))
	case Sum:
		w.WriteString("sum of " + b.at.sheet.label + "!" + parts[0])
	default:
		w.WriteString(b.at.sheet.label + "!" + strings.Join(parts, ", "))
	}
	for i, c := range q.Where {
		w.WriteString([]string{" where ", " and "}[min(i, 1)])
		if c.Op == RowIsVisible {
			w.WriteString(c.String())
		} else {
			w.WriteString(short(c.Column) + strings.TrimPrefix(c.String(), c.Column.String()))
		}
	}
	if q.ForEach != nil {
		w.WriteString(" for each " + short(*q.ForEach))
	}
	if q.Matched != nil {
		w.WriteString(" matched by " + short(*q.Matched))
	}
	return w.String()
}

// compensated is a sum that keeps what rounding drops (Neumaier 1974), so that
// it does not depend on the order in which large and small numbers come.
type compensated struct{ sum, low float64 }

func (c *compensated) add(x float64) {
	t := c.sum + x
	if math.Abs(c.sum) >= math.Abs(x) {
		c.low += (c.sum - t) + x
	} else {
		c.low += (x - t) + c.sum
	}
	c.sum = t
}

func (c *compensated) value() float64 { return c.sum + c.low }
