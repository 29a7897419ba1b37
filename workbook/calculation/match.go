package calculation

import (
	"fmt"
	"math"
	"strings"

	"halfwidth/funcs"
)

// verdict is what a condition says of a cell.
type verdict uint8

const (
	unknown   verdict = iota // not asked yet
	fails                    // the cell does not meet the condition
	meets                    // it does
	undecided                // the two cannot be compared
)

// test is a condition made ready for the rows of one sheet.
type test struct {
	condition Condition
	frame     *Frame
	column    *Column
	factor    float64 // seconds in the unit of durations, 0 without one
	numbers   []interval
	dates     []interval
	texts     []verdict // of each text, as far as asked
	words     []literalText
}

// interval is the numbers from low to high, both included.
type interval struct{ low, high float64 }

// literalText is a text to compare with, folded, and what it says of TRUE and
// FALSE.
type literalText struct {
	folded string
	truth  verdict // meets for yes, fails for no, unknown for other words
}

// newTest makes a condition ready. The fault says why it cannot be used.
func (b *bound) newTest(c Condition) (*test, *fault) {
	sh := b.at.sheet
	t := &test{condition: c, frame: sh.frame}
	if c.Op == RowIsVisible {
		return t, nil
	}
	col := b.col(c.Column)
	t.column = sh.frame.column(col)
	t.texts = make([]verdict, len(sh.frame.texts))
	f := sh.columnFacts(col, b.first, b.last)
	if fault := sh.unusable(f, col, c.Column, "condition"); fault != nil {
		return nil, fault
	}
	t.factor = unitSeconds(c.Column.Unit)
	for _, l := range c.Literals {
		switch l.Kind {
		case NumberLiteral:
			if f.durations > 0 && t.factor == 0 {
				return nil, sh.noUnit(f.durations, col, c.Column)
			}
			t.numbers = append(t.numbers, numberInterval(c.Op, l.Number, l.Number))
		case DateLiteral:
			end := l.Number
			if l.Day {
				end = math.Nextafter(l.Number+1, 0)
			}
			t.dates = append(t.dates, numberInterval(c.Op, l.Number, end))
		case WordLiteral:
			t.words = append(t.words, literalText{fold(l.Text), truthOf(l.Text)})
		case QuotedLiteral:
			t.words = append(t.words, literalText{fold(l.Text), unknown})
		}
	}
	return t, nil
}

// unusable gives the fault of a column that holds merged cells or formulas
// without a value where every row's value is needed.
func (sh *sheet) unusable(f *columnFacts, col int, name ColumnRef, use string) *fault {
	switch {
	case f.covered > 0:
		at := sh.address(f.covered, col)
		return &fault{Finding: funcs.Finding{Code: "merged-cells", Severity: funcs.Refused, Cells: []string{at}, Message: fmt.Sprintf(
			"The %s column %s has merged cells (%s): it is not plain which rows the value belongs to. Unmerge them and fill in every row.",
			use, quote(name.Name), at)}, span: name.Span}
	case f.unsaved > 0:
		return sh.unsaved(f.unsaved, col, name.Span)
	}
	return nil
}

// unsaved gives the fault of a formula of which no value is saved.
func (sh *sheet) unsaved(row, col int, span Span) *fault {
	at := sh.address(row, col)
	return &fault{Finding: funcs.Finding{Code: "formula-without-value", Severity: funcs.Refused, Cells: []string{at}, Message: fmt.Sprintf(
		"%s holds a formula of which no value is saved. Open the book in a spreadsheet program, recalculate and save it.", at)}, span: span}
}

// noUnit gives the fault of durations that no unit was named for.
func (sh *sheet) noUnit(row, col int, name ColumnRef) *fault {
	at := sh.address(row, col)
	column := name.Name
	if column == "" {
		column = "NAME"
	}
	offers := make([]string, len(units))
	for i, u := range units {
		offers[i] = ColumnRef{Name: column, Unit: u.name}.String()
	}
	message := fmt.Sprintf("%s is a duration, kept as a fraction of a day. Name the unit you want: %s.", at, funcs.OrList(offers))
	if name.Name == "" {
		message = fmt.Sprintf("%s is a duration, kept as a fraction of a day. Name its column and the unit you want, in SHEET: %s.", at, funcs.OrList(offers))
	}
	return &fault{Finding: funcs.Finding{Code: "duration-without-unit", Severity: funcs.Refused, Cells: []string{at}, Message: message}, span: name.Span}
}

// unitSeconds gives the seconds of a unit of durations, 0 for none.
func unitSeconds(unit string) float64 {
	switch unit {
	case "seconds":
		return 1
	case "minutes":
		return 60
	case "hours":
		return 3600
	case "days":
		return secondsPerDay
	}
	return 0
}

// inUnit converts a duration in days. Programs keep a time of day as a fraction
// of a day, so that whole milliseconds come out a few units in the last place
// off; these are set right.
func inUnit(days, factor float64) float64 {
	seconds := days * secondsPerDay
	if whole := math.Round(seconds*1000) / 1000; math.Abs(seconds-whole) <= 1e-9*math.Max(1, math.Abs(seconds)) {
		seconds = whole
	}
	return seconds / factor
}

// truthOf reads yes and no, true and false.
func truthOf(word string) verdict {
	switch fold(word) {
	case "yes", "true":
		return meets
	case "no", "false":
		return fails
	}
	return unknown
}

// numberInterval gives the numbers that stand in the relation to low…high; for
// NotEqual those that do not.
func numberInterval(op Op, low, high float64) interval {
	switch op {
	case Less:
		return interval{math.Inf(-1), math.Nextafter(low, math.Inf(-1))}
	case LessOrEqual:
		return interval{math.Inf(-1), high}
	case Greater:
		return interval{math.Nextafter(high, math.Inf(1)), math.Inf(1)}
	case GreaterOrEqual:
		return interval{low, math.Inf(1)}
	}
	return interval{low, high}
}

// at gives the verdict on a row.
func (t *test) at(row int) verdict {
	op := t.condition.Op
	if op == RowIsVisible {
		return decided(t.frame.Row(row)&RowHidden == 0)
	}
	kind, flags := t.column.kind(row)
	switch kind {
	case Blank:
		return decided(op == IsMissing)
	case Text:
		id := t.column.text(row)
		if t.texts[id] == unknown {
			t.texts[id] = t.onText(t.frame.texts[id])
		}
		return t.texts[id]
	case Error:
		return undecided
	}
	if op == IsMissing || op == IsPresent {
		return decided(op == IsPresent)
	}
	switch {
	case kind == Number:
		return t.onNumber(t.numbers, t.column.number(row))
	case kind == Date:
		return t.onNumber(t.dates, t.column.number(row))
	case kind == Duration && t.factor > 0:
		return t.onNumber(t.numbers, inUnit(t.column.number(row), t.factor))
	case kind == Bool:
		return t.onBool(flags&isTrue != 0)
	}
	return undecided
}

func decided(yes bool) verdict {
	if yes {
		return meets
	}
	return fails
}

func (t *test) onNumber(list []interval, x float64) verdict {
	if len(list) == 0 {
		return undecided
	}
	inside := false
	for _, i := range list {
		inside = inside || i.low <= x && x <= i.high
	}
	return decided(inside != (t.condition.Op == NotEqual))
}

func (t *test) onBool(x bool) verdict {
	v := undecided
	for _, w := range t.words {
		if w.truth == unknown || t.condition.Op != Equal && t.condition.Op != NotEqual && t.condition.Op != IsOneOf {
			continue
		}
		if (w.truth == meets) == x {
			return decided(t.condition.Op != NotEqual)
		}
		v = decided(t.condition.Op == NotEqual)
	}
	return v
}

func (t *test) onText(text string) verdict {
	s := fold(text)
	op := t.condition.Op
	switch {
	case s == "":
		return decided(op == IsMissing)
	case op == IsMissing || op == IsPresent:
		return decided(op == IsPresent)
	case len(t.words) == 0:
		return undecided
	}
	for _, w := range t.words {
		order := strings.Compare(s, w.folded)
		switch {
		case op == Less:
			return decided(order < 0)
		case op == LessOrEqual:
			return decided(order <= 0)
		case op == Greater:
			return decided(order > 0)
		case op == GreaterOrEqual:
			return decided(order >= 0)
		case order == 0:
			return decided(op != NotEqual)
		}
	}
	return decided(op == NotEqual)
}

// matchesNothing gives the cautions for texts that stand nowhere in the column
// of their condition.
func (b *bound) matchesNothing(c Condition) []fault {
	if c.Op != Equal && c.Op != NotEqual && c.Op != IsOneOf {
		return nil
	}
	missing := map[string]bool{}
	for _, l := range c.Literals {
		if l.Kind == WordLiteral || l.Kind == QuotedLiteral {
			missing[fold(l.Text)] = true
		}
	}
	if len(missing) == 0 {
		return nil
	}
	sh := b.at.sheet
	col := b.col(c.Column)
	f := sh.columnFacts(col, b.first, b.last)
	for _, id := range f.texts {
		delete(missing, fold(sh.frame.texts[id]))
	}
	var out []fault
	for _, l := range c.Literals {
		truth := unknown
		if l.Kind == WordLiteral {
			truth = truthOf(l.Text)
		}
		if !missing[fold(l.Text)] || truth == meets && f.isTrue || truth == fails && f.isFalse {
			continue
		}
		f.prepareValues(sh.frame.texts)
		near := f.near.Closest(l.Text)
		fl := fault{Finding: funcs.Finding{Code: "condition-matches-nothing", Severity: funcs.Caution, Message: fmt.Sprintf(
			"%s stands nowhere in the column %s (%s). %s", quote(l.Text), quote(c.Column.Name), b.columnText(col), nearestValues(near, f.values))}, span: l.Span}
		for _, text := range near {
			fl.instead = append(fl.instead, l.inPlace(text))
		}
		out = append(out, fl)
	}
	return out
}

// inPlace writes a text to stand in the literal's place, in quotes where the
// literal stood in some.
func (l Literal) inPlace(text string) string {
	if l.Kind == QuotedLiteral {
		return quote(text)
	}
	return ValueText(text)
}

// nearestValues words which values a column has.
func nearestValues(near, values []string) string {
	if len(near) > 0 {
		return "Did you mean " + funcs.OrList(quoteAll(near)) + "?"
	}
	if len(values) == 0 {
		return "It holds no text at all."
	}
	const most = 5
	if len(values) > most {
		return "It holds " + strings.Join(quoteAll(values[:most]), ", ") + " and others."
	}
	return "It holds " + funcs.AndList(quoteAll(values)) + "."
}

// columnText writes a column's cells with their sheet.
func (b *bound) columnText(col int) string { return b.at.sheet.label + "!" + b.area(col).String() }

// area is the data rows of a column.
func (b *bound) area(col int) Area {
	return Area{FirstRow: b.first, LastRow: max(b.first, b.last), FirstCol: col, LastCol: col}
}
