package calculation

import (
	"context"
	"errors"
	"fmt"
	"slices"
	"strings"
	"sync"
	"sync/atomic"

	"halfwidth/funcs"
)

// Results is what a plan gave: the outcome of every row, and what has no column
// to stand in.
type Results struct {
	Rows        []*RowResult
	Diagnostics []Diagnostic // of layouts, and of rows whose block has no `> note`
	Tables      []TableSheet
}

// RowResult is the outcome of one row.
type RowResult struct {
	Row      *Row
	Status   funcs.Status
	Findings []Diagnostic   // the most serious first
	Outcome  *funcs.Outcome // nil where the call was refused before it was made, or made for each group
	Groups   []GroupOutcome // of a sample given `for each`
	Edits    []Edit
	Kept     bool // the outcome is that of an earlier run (RunAfter)

	table   *TableSheet
	skipped int // of a sample given `for each`
}

// GroupOutcome is the outcome for one group.
type GroupOutcome struct {
	Name    string
	Outcome *funcs.Outcome // nil where the call was refused before it was made
	Note    string         // why, then
}

// Note joins the messages of the findings.
func (r *RowResult) Note() string {
	list := make([]funcs.Finding, len(r.Findings))
	for i, f := range r.Findings {
		list[i] = f.Finding
	}
	return funcs.Note(list)
}

// Run works the rows out, by at most so many workers at once. The results do
// not depend on their number. The error is the context's.
func (p *Plan) Run(ctx context.Context, workers int) (*Results, error) {
	return p.RunAfter(ctx, workers, nil)
}

// inParallel calls work for 0 to n-1 from this and other goroutines and gives
// the error of the lowest.
func inParallel(ctx context.Context, workers, n int, work func(int) error) error {
	workers = max(1, min(workers, n))
	errs := make([]error, n)
	var next atomic.Int64
	var group sync.WaitGroup
	worker := func() {
		for i := int(next.Add(1) - 1); i < n && ctx.Err() == nil; i = int(next.Add(1) - 1) {
			errs[i] = work(i)
		}
	}
	for range workers - 1 {
		group.Go(worker)
	}
	worker()
	group.Wait()
	if err := ctx.Err(); err != nil {
		return err
	}
	return errors.Join(errs...)
}

// levels puts the rows in an order in which each comes after those whose
// results it reads. Rows in a circle are refused already and read nothing.
func (p *Plan) levels() [][]*Row {
	depth := make([]int, len(p.Rows))
	var find func(r *Row) int
	find = func(r *Row) int {
		if depth[r.order] == 0 {
			depth[r.order] = 1
			if len(r.faults) == 0 {
				for _, n := range r.needs {
					depth[r.order] = max(depth[r.order], find(n.row)+1)
				}
			}
		}
		return depth[r.order]
	}
	var levels [][]*Row
	for _, r := range p.Rows {
		for len(levels) < find(r) {
			levels = append(levels, nil)
		}
		levels[depth[r.order]-1] = append(levels[depth[r.order]-1], r)
	}
	return levels
}

// byReading puts rows that read the same sample first beside one another, so
// that few samples are held at a time.
func byReading(level []*Row) []*Row {
	first := map[cacheKey]int{}
	place := func(r *Row) int {
		for _, in := range r.Inputs {
			if key, ok := keyOf(in.term); ok {
				if _, seen := first[key]; !seen {
					first[key] = len(first)
				}
				return first[key]
			}
		}
		return -1
	}
	places := make(map[*Row]int, len(level))
	for _, r := range level {
		places[r] = place(r)
	}
	level = slices.Clone(level)
	slices.SortStableFunc(level, func(a, b *Row) int { return places[a] - places[b] })
	return level
}

// resultOf gives a result of a row that is worked out.
func resultOf(r *RowResult, c resultCell) (Cell, *fault) {
	at := c.address()
	if r == nil || r.Status == funcs.StatusRefused {
		return Cell{}, bad("no-value", fmt.Sprintf("is read from %s, but row %d is refused; see its reason", at, c.row.Number))
	}
	v, ok := r.value(c.name)
	if !ok {
		return Cell{}, bad("no-value", fmt.Sprintf("is read from %s, but row %d gives no %s", at, c.row.Number, c.name))
	}
	switch v := v.(type) {
	case float64:
		return Cell{Kind: Number, Number: v}, nil
	case int:
		return Cell{Kind: Number, Number: float64(v)}, nil
	case bool:
		cell := Cell{Kind: Bool}
		if v {
			cell.Number = 1
		}
		return cell, nil
	case string:
		return Cell{Kind: Text, Text: v}, nil
	}
	return Cell{}, bad("no-value", "is no value")
}

// work works out one row.
func (p *Plan) work(ctx context.Context, r *Row, look lookUp) (*RowResult, error) {
	result := &RowResult{Row: r}
	result.Findings = append(result.Findings, r.faults...)
	if len(r.faults) == 0 {
		result.Findings = append(result.Findings, r.cautions...)
		args, err := p.arguments(ctx, r, look)
		if err != nil {
			return nil, err
		}
		for _, in := range r.Inputs {
			for _, f := range args[in.Name].faults {
				result.addFault(in, &f)
			}
		}
		if len(result.Findings) == len(r.cautions) {
			if err := p.answer(ctx, result, args); err != nil {
				return nil, err
			}
		} else {
			result.addOrigins(args)
		}
	}
	slices.SortStableFunc(result.Findings, func(a, b Diagnostic) int { return int(b.Severity) - int(a.Severity) })
	result.Status = statusOf(result.Findings)
	result.tabulate()
	result.Edits = result.edits()
	return result, nil
}

func statusOf(list []Diagnostic) funcs.Status {
	findings := make([]funcs.Finding, len(list))
	for i, d := range list {
		findings[i] = d.Finding
	}
	return funcs.StatusOf(findings)
}

// arguments evaluates the inputs of a row, by name.
func (p *Plan) arguments(ctx context.Context, r *Row, look lookUp) (map[string]*argument, error) {
	terms := make(map[string]*term, len(r.Inputs))
	for _, in := range r.Inputs {
		terms[in.Name] = in.term
	}
	return evaluateAll(ctx, r.Function, terms, look, &p.cache)
}

// evaluateAll evaluates the terms of one call. Samples that must pair are read
// together, and names of lists are spelt as those of the groups.
func evaluateAll(ctx context.Context, f *funcs.Function, terms map[string]*term, look lookUp, kept *cache) (map[string]*argument, error) {
	args := make(map[string]*argument, len(terms))
	first, second := terms["sample"], terms["second-sample"]
	if f.Paired && first != nil && second != nil {
		a, b, err := pair(ctx, first, second, look, kept)
		if err != nil {
			return nil, err
		}
		args["sample"], args["second-sample"] = a, b
	}
	for _, in := range f.Inputs {
		t := terms[in.Name]
		if t == nil || args[in.Name] != nil {
			continue
		}
		a, err := t.evaluate(ctx, look, kept)
		if err != nil {
			return nil, err
		}
		args[in.Name] = a
	}
	spellNames(f, args)
	sayOnce(f, args)
	return args, nil
}

// sayOnce keeps of findings that several inputs share, such as two samples of
// one table, only the first.
func sayOnce(f *funcs.Function, args map[string]*argument) {
	said := map[string]bool{}
	for _, in := range f.Inputs {
		a := args[in.Name]
		if a == nil || a.from.Origin == nil {
			continue
		}
		a.from.Origin.Findings = slices.DeleteFunc(a.from.Origin.Findings, func(f funcs.Finding) bool {
			again := said[f.Message]
			said[f.Message] = true
			return again
		})
	}
}

// spellNames gives the names in lists and texts the spelling of the groups they
// go with, where only case and space differ.
func spellNames(f *funcs.Function, args map[string]*argument) {
	spelling := map[string]string{}
	learn := func(names []string) {
		for _, n := range names {
			if _, ok := spelling[fold(n)]; !ok {
				spelling[fold(n)] = n
			}
		}
	}
	for _, in := range f.Inputs {
		if a := args[in.Name]; a != nil && in.Kind == funcs.Samples {
			groups, _ := a.from.Value.([]funcs.Group)
			for _, g := range groups {
				learn([]string{g.Name})
			}
		}
	}
	for _, in := range f.Inputs {
		a := args[in.Name]
		if a == nil {
			continue
		}
		switch v := a.from.Value.(type) {
		case funcs.List:
			learn(v.Names)
			names := slices.Clone(v.Names)
			for i, n := range names {
				names[i] = spelling[fold(n)]
			}
			a.from.Value = funcs.List{Names: names, Values: v.Values}
		case string:
			if s, ok := spelling[fold(v)]; ok && in.Kind == funcs.Text {
				a.from.Value = s
			}
		}
	}
}

// addFault adds why an input cannot be used.
func (r *RowResult) addFault(in *Input, f *fault) {
	finding := placed(in.Name, in.Cell.String(), f)
	if finding.Cells == nil {
		finding.Cells = []string{r.Row.Block.calc.sheet.address(in.Cell.Row, in.Cell.Col)}
	}
	d := Diagnostic{Finding: finding, Sheet: r.Row.Block.Sheet, Cell: in.Cell}
	in.term.point(&d, f)
	r.Findings = append(r.Findings, d)
}

// addOrigins adds what the reading of the inputs found, where the call that
// would report it is not made.
func (r *RowResult) addOrigins(args map[string]*argument) {
	for _, in := range r.Row.Inputs {
		if a := args[in.Name]; a != nil && a.from.Origin != nil {
			for _, f := range a.from.Origin.Findings {
				f.Input = in.Name
				r.add(f, args)
			}
		}
	}
}

// add adds a finding, at the cell of its input.
func (r *RowResult) add(f funcs.Finding, args map[string]*argument) {
	d := Diagnostic{Finding: f, Sheet: r.Row.Block.Sheet, Cell: CellRef{r.Row.Number, r.Row.Block.work}}
	for _, in := range r.Row.Inputs {
		if in.Name == f.Input {
			d = in.found(f, r.Row.Block.Sheet, args[in.Name])
		}
	}
	r.Findings = append(r.Findings, d)
}

// found places a finding at an input's cell. One that came from reading an
// expression, which package funcs hands back without its place there, gets that
// again.
func (in *Input) found(f funcs.Finding, sheet string, a *argument) Diagnostic {
	d := Diagnostic{Finding: f, Sheet: sheet, Cell: in.Cell}
	if a != nil && a.reading != nil {
		same := func(read fault) bool { return read.Code == f.Code && read.Message == f.Message }
		if i := slices.IndexFunc(a.reading.faults, same); i >= 0 {
			in.term.point(&d, &a.reading.faults[i])
		}
	}
	return d
}

// answer makes the call, once or for each group.
func (p *Plan) answer(ctx context.Context, result *RowResult, args map[string]*argument) error {
	r := result.Row
	call := make(map[string]any, len(args))
	for name, a := range args {
		call[name] = a.from
	}
	if r.each == nil {
		out, err := r.Function.Answer(ctx, call)
		if err != nil {
			result.addOrigins(args)
			return result.addError(ctx, err, args)
		}
		result.Outcome = out
		p.letGo(r, out)
		for _, f := range out.Findings {
			result.add(f, args)
		}
		return nil
	}
	result.addOrigins(map[string]*argument{r.each.Name: args[r.each.Name]})
	result.skipped = args[r.each.Name].from.Origin.Skipped
	for _, g := range args[r.each.Name].each {
		call[r.each.Name] = g.from
		out, err := r.Function.Answer(ctx, call)
		group := GroupOutcome{Name: g.name, Outcome: out}
		if err == nil {
			p.letGo(r, out)
		} else {
			if ctx.Err() != nil {
				return ctx.Err()
			}
			group.Note = sentence(strings.Join(errorLines(err), "; "))
		}
		result.Groups = append(result.Groups, group)
	}
	result.sumUpGroups()
	return nil
}

// letGo drops from an outcome what was read from sheets, unless it is to be
// kept: a number too, since its origin holds on to the sheet that it came from.
func (p *Plan) letGo(r *Row, out *funcs.Outcome) {
	if p.options.KeepValues {
		return
	}
	var names []string
	for name, from := range out.Arguments {
		if from.Origin != nil && from.Origin.Range != "" {
			names = append(names, name)
		}
	}
	shown := r.Block.column(ResultColumn, "fingerprint") != nil || (r.each != nil && r.table != "")
	out.Forget(shown, names...)
}

// errorLines gives the faults of a call, without the function's name.
func errorLines(err error) []string {
	var wrong funcs.ArgumentErrors
	if !errors.As(err, &wrong) {
		return []string{err.Error()}
	}
	lines := make([]string, len(wrong))
	for i, e := range wrong {
		lines[i] = e.Error()
	}
	return lines
}

// addError adds the faults of a call as refusals, at the cells of their inputs.
func (r *RowResult) addError(ctx context.Context, err error, args map[string]*argument) error {
	if ctx.Err() != nil {
		return ctx.Err()
	}
	var wrong funcs.ArgumentErrors
	if !errors.As(err, &wrong) {
		r.add(funcs.Finding{Code: "internal-error", Severity: funcs.Refused, Message: sentence(err.Error())}, args)
		return nil
	}
	for _, e := range wrong {
		f := funcs.Finding{Code: "bad-value", Severity: funcs.Refused, Input: e.Argument, Message: e.Error()}
		for _, in := range r.Row.Inputs {
			if in.Name != e.Argument {
				continue
			}
			f.Message = fmt.Sprintf("%s (%s)%s", in.Cell, e.Argument, strings.TrimPrefix(e.Error(), e.Argument))
			f.Cells = []string{r.Row.Block.calc.sheet.address(in.Cell.Row, in.Cell.Col)}
			if o := args[in.Name].from.Origin; o != nil && o.Address != nil && e.Index >= 0 && e.Group == "" {
				if at := o.Address(0, e.Index); at != "" {
					f.Cells = append(f.Cells, at)
				}
			}
		}
		f.Message = ended(f.Message)
		r.add(f, args)
	}
	return nil
}
