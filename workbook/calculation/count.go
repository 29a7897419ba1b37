package calculation

import (
	"context"

	"halfwidth/funcs"
)

// Count reads the samples of all rows and keeps how many values each has, where
// they stand and what was found about them, but not the values: what a preview
// shows. Inputs that rest on results of other rows stay open.
func (p *Plan) Count(ctx context.Context, workers int) error {
	return inParallel(ctx, workers, len(p.Rows), func(i int) error { return p.countRow(ctx, p.Rows[i]) })
}

func (p *Plan) countRow(ctx context.Context, r *Row) error {
	if len(r.faults) > 0 {
		return nil
	}
	open := func(resultCell) (Cell, *fault) { return Cell{Kind: Number}, nil }
	args, err := p.arguments(ctx, r, open)
	if err != nil {
		return err
	}
	for _, in := range r.Inputs {
		a := args[in.Name]
		if a == nil || in.term.result != nil {
			continue
		}
		for _, f := range a.faults {
			finding := placed(in.Name, in.Cell.String(), &f)
			d := Diagnostic{Finding: finding, Sheet: r.Block.Sheet, Cell: in.Cell}
			in.term.point(&d, &f)
			r.faults = append(r.faults, d)
		}
		if o := a.from.Origin; o != nil {
			in.Range, in.Skipped = o.Range, o.Skipped
			for _, f := range o.Findings {
				f.Input = in.Name
				r.cautions = append(r.cautions, in.found(f, r.Block.Sheet, a))
			}
		}
		in.Used, in.Groups = sizes(a)
	}
	return nil
}

// sizes counts the values of an argument and names its groups.
func sizes(a *argument) (used int, groups []string) {
	present := func(values []float64) int {
		n := 0
		for _, x := range values {
			if x == x {
				n++
			}
		}
		return n
	}
	for _, g := range a.each {
		values, _ := g.from.Value.([]float64)
		used += present(values)
		groups = append(groups, g.name)
	}
	switch v := a.from.Value.(type) {
	case []float64:
		used += present(v)
	case []funcs.Group:
		for _, g := range v {
			used += present(g.Values)
			groups = append(groups, g.Name)
		}
	case funcs.List:
		used, groups = present(v.Values), v.Names
	}
	return used, groups
}
