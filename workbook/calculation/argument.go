package calculation

import (
	"context"
	"fmt"
	"math"
	"slices"
	"strings"

	"halfwidth/funcs"
)

// argument is what a term gives once the sheets are read.
type argument struct {
	from    funcs.From
	each    []eachGroup // of a sample given `for each`: one a group
	eachBy  string      // the column of the groups, as written
	faults  []fault     // why it cannot be used
	reading *reading    // of an expression
}

// eachGroup is the sample of one group.
type eachGroup struct {
	name string
	from funcs.From
}

// lookUp gives the value of another row's result.
type lookUp func(resultCell) (Cell, *fault)

// evaluate reads what a term stands for. The readings of queries come from the
// cache, where there is one.
func (t *term) evaluate(ctx context.Context, look lookUp, kept *cache) (*argument, error) {
	a := t.newArgument()
	switch {
	case t.result != nil:
		a.fromResult(t, look)
	case t.list != nil:
		a.fromList(t, look)
	case t.query != nil:
		r, err := kept.gather(ctx, t.written, t.query)
		if err != nil {
			return nil, err
		}
		a.fromReading(t, r)
	case t.area != nil && t.one:
		a.fromCell(t)
	case t.area != nil:
		r, err := t.area.gather(ctx)
		if err != nil {
			return nil, err
		}
		a.fromReading(t, r)
	default:
		a.from.Value = t.value
	}
	return a, nil
}

func (a *argument) refuse(f *fault) { a.faults = append(a.faults, *f) }

func (a *argument) fromResult(t *term, look lookUp) {
	cell, f := look(*t.result)
	if f == nil {
		a.from.Value, f = resultValue(t.input, cell)
	}
	if f != nil {
		a.refuse(f)
		return
	}
	a.from.Origin.Range = t.result.address()
}

// resultValue gives the value of another row's result for an input.
func resultValue(in funcs.Input, cell Cell) (any, *fault) {
	if cell.Kind != Text {
		return valueOf(in, cell)
	}
	switch in.Kind {
	case funcs.Text, funcs.Choice:
		return cell.Text, nil
	}
	return nil, bad("bad-value", fmt.Sprintf("is the result %s, but must be %s", quote(cell.Text), expects(in)))
}

// address is the result's cell.
func (c *resultCell) address() string {
	for _, bc := range c.row.Block.Columns {
		if bc.Role == ResultColumn && bc.Name == c.name {
			return c.row.Block.calc.sheet.address(c.row.Number, bc.Col)
		}
	}
	return c.row.Block.Sheet
}

func (a *argument) fromList(t *term, look lookUp) {
	values := make([]float64, len(t.list))
	var names []string
	var read []string
	for i, item := range t.list {
		values[i] = item.number
		if item.name != "" {
			names = append(names, trim(item.name))
		}
		if item.text != "" {
			read = append(read, item.text)
		}
		if item.result == nil {
			continue
		}
		cell, f := look(*item.result)
		if f == nil && cell.Kind != Number {
			f = bad("bad-value", fmt.Sprintf("names %s, which gives %s, but must be a number", item.text, cellText(cell)))
		}
		if f != nil {
			a.refuse(f)
			return
		}
		values[i] = cell.Number
	}
	if read != nil {
		a.from.Origin.Range = strings.Join(read, "; ")
	}
	switch t.input.Kind {
	case funcs.Numbers:
		a.from.Value = funcs.List{Names: names, Values: values}
	case funcs.Sample:
		a.from.Value = values
	default:
		a.from.Value = values[0]
	}
}

// fromCell gives the value of a single cell of a data sheet.
func (a *argument) fromCell(t *term) {
	if t.area.sheet.err != nil {
		a.refuse(t.area.sheet.unreadable(t.area.rng.Span))
		return
	}
	ref := t.area.rng.Area
	at := t.area.sheet.address(ref.FirstRow, ref.FirstCol)
	cell := t.area.sheet.frame.At(ref.FirstRow, ref.FirstCol)
	a.from.Origin.Range = at
	var f *fault
	switch {
	case cell.Unsaved:
		f = t.area.sheet.unsaved(ref.FirstRow, ref.FirstCol, t.area.rng.Span)
	case cell.Kind == Blank:
		f = bad("no-value", fmt.Sprintf("is read from %s, which is blank; write a value there", at))
	case cell.Kind == Text || cell.Kind == Error:
		f = bad("bad-value", fmt.Sprintf("is read from %s, which holds %s, but must be %s", at, cellText(cell), expects(t.input)))
	default:
		a.from.Value, f = valueOf(t.input, cell)
	}
	if f != nil {
		a.refuse(f)
		return
	}
	if cell.Formula {
		a.from.Origin.Findings = append(a.from.Origin.Findings, savedIn(t.area.sheet, at))
	}
}

// savedIn tells that a data cell holds the saved result of a formula.
func savedIn(sh *sheet, at string) funcs.Finding {
	t := tally{sheet: sh}
	f := funcs.Finding{Code: "saved-formula-values", Severity: funcs.Information, Cells: []string{at}, Message: at + " is the last saved result of a formula."}
	if t.sheet.shelf.source.RecalculatesLate() {
		f.Severity = funcs.Caution
		f.Message = at + " is the last saved result of a formula, and this book recalculates by hand or on load. Recalculate and save it first."
	}
	return f
}

// fromReading gives an input what its expression read.
func (a *argument) fromReading(t *term, r *reading) {
	a.reading = r
	origin := a.from.Origin
	origin.Range = r.text
	if origin.Unit == "" {
		origin.Unit = r.unit
	}
	for _, f := range r.faults {
		if f.Severity == funcs.Refused {
			a.faults = append(a.faults, f)
		} else {
			origin.Findings = append(origin.Findings, f.Finding)
		}
	}
	if r.series == nil && (len(a.faults) > 0) {
		return
	}
	origin.Skipped = r.tally.left()
	origin.Facts = &r.facts
	origin.Address = r.address
	origin.Unordered = r.isRange && r.area.LastCol > r.area.FirstCol && r.area.LastRow > r.area.FirstRow
	q := (*Query)(nil)
	if t.query != nil {
		q = t.query.query
	}
	switch {
	case q != nil && (q.What == Count || q.What == Sum):
		a.fromNumbers(t, r, q)
	case t.input.Kind == funcs.Samples:
		a.fromGroups(r, q)
	case t.input.Kind == funcs.Sample && q != nil && q.ForEach != nil:
		a.fromEach(r, q)
	case t.input.Kind == funcs.Numbers && q != nil && q.ForEach != nil:
		a.oneEach(r, q)
	case t.input.Kind == funcs.Numbers:
		values := slices.Clone(r.series[0].values) // the reading may be gone before the call's outcome
		if !t.input.MayBeGaps {
			values = slices.DeleteFunc(values, math.IsNaN)
			origin.Address = nil
		}
		a.from.Value = funcs.List{Values: values}
	default:
		a.from.Value = r.series[0].values
		a.checkAny(r.series[0], q)
	}
}

// checkAny refuses a sample without a number, and says why it has none.
func (a *argument) checkAny(s *series, q *Query) {
	if len(a.faults) > 0 || slices.ContainsFunc(s.values, func(x float64) bool { return !math.IsNaN(x) }) {
		return
	}
	r := a.reading
	why := r.text + " holds no number"
	if q != nil && len(q.Where) > 0 && r.rows == 0 {
		why = fmt.Sprintf("No row meets the condition of %s", r.text)
	}
	a.refuse(&fault{Finding: funcs.Finding{Code: "no-numbers", Severity: funcs.Refused, Message: ended(why) + " Check the column and the conditions."}, span: spanOf(q)})
}

func spanOf(q *Query) Span {
	if q == nil {
		return Span{}
	}
	return q.Span
}

// fromNumbers gives counts or sums.
func (a *argument) fromNumbers(t *term, r *reading, q *Query) {
	list := funcs.List{}
	for _, s := range r.series {
		x := float64(s.count)
		if q.What == Sum {
			x = s.sum.value()
			if s.count == 0 {
				name := ""
				if q.ForEach != nil {
					name = " in the group " + quote(s.name)
				}
				a.refuse(&fault{Finding: funcs.Finding{Code: "no-numbers", Severity: funcs.Refused,
					Message: fmt.Sprintf("There is no number to sum%s (%s). Check the column and the conditions.", name, r.text)}, span: q.Span})
				return
			}
		}
		if q.ForEach != nil {
			list.Names = append(list.Names, s.name)
		}
		list.Values = append(list.Values, x)
	}
	a.from.Origin.Address = nil
	if t.input.Kind == funcs.Numbers {
		a.from.Value = list
		return
	}
	a.from.Value = list.Values[0]
}

// fromGroups gives samples by name. A group without a number is left out.
func (a *argument) fromGroups(r *reading, q *Query) {
	var groups []funcs.Group
	var kept []int
	for i, s := range r.series {
		if !slices.ContainsFunc(s.values, func(x float64) bool { return !math.IsNaN(x) }) {
			a.from.Origin.Findings = append(a.from.Origin.Findings, funcs.Finding{Code: "cells-skipped", Severity: funcs.Caution,
				Message: fmt.Sprintf("The group %s holds no number and was left out. Check its cells.", quote(s.name))})
			continue
		}
		groups = append(groups, funcs.Group{Name: s.name, Values: s.values})
		kept = append(kept, i)
	}
	a.from.Value = groups
	a.from.Origin.Address = func(group, i int) string {
		if group < 0 || group >= len(kept) {
			return ""
		}
		return r.address(kept[group], i)
	}
	if len(groups) == 0 && len(a.faults) == 0 {
		a.refuse(&fault{Finding: funcs.Finding{Code: "no-numbers", Severity: funcs.Refused,
			Message: ended(r.text+" holds no number") + " Check the columns and the conditions."}, span: spanOf(q)})
	}
}

// fromEach gives one sample a group, for a function of one sample.
func (a *argument) fromEach(r *reading, q *Query) {
	a.eachBy = q.ForEach.Name
	for i, s := range r.series {
		origin := &funcs.Origin{Unit: a.from.Origin.Unit, Skipped: s.skipped,
			Facts:   &r.facts,
			Range:   fmt.Sprintf("%s = %s", r.text, nameText(s.name)),
			Address: func(_, k int) string { return r.address(i, k) }}
		a.each = append(a.each, eachGroup{s.name, funcs.From{Value: s.values, Origin: origin}})
	}
	if len(a.each) == 0 && len(a.faults) == 0 {
		a.refuse(&fault{Finding: funcs.Finding{Code: "no-numbers", Severity: funcs.Refused,
			Message: ended(r.text+" has no group") + " Check the columns and the conditions."}, span: q.Span})
	}
}

// oneEach gives a list with the one number of each group.
func (a *argument) oneEach(r *reading, q *Query) {
	list := funcs.List{}
	for _, s := range r.series {
		values := slices.DeleteFunc(slices.Clone(s.values), math.IsNaN)
		if len(values) != 1 {
			a.refuse(&fault{Finding: funcs.Finding{Code: "bad-value", Severity: funcs.Refused,
				Message: fmt.Sprintf("The list needs one number for each %s, but %s has %s. Write sum of %s in …, or correct the rows.",
					quote(q.ForEach.Name), quote(s.name), plural(len(values), "number"), nameText(q.Columns[0].Name))}, span: q.Span})
			return
		}
		list.Names, list.Values = append(list.Names, s.name), append(list.Values, values[0])
	}
	a.from.Origin.Address = nil
	a.from.Value = list
}
