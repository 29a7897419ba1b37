package page

import (
	"context"
	"math"
	"strconv"

	"gonum.org/v1/plot/vg"
)

// drawShares shows what each item adds to the variance of a sum, and the sum
// with its range below.
func drawShares(_ context.Context, a answer) (*picture, error) {
	f := &picture{}
	lo, hi := 0.0, 0.0
	rows := a.Rows[:min(len(a.Rows), mostGroups)]
	for _, row := range rows {
		share := 100 * asNumber(row.Values["share"])
		lo, hi = math.Min(lo, share), math.Max(hi, share)
	}
	p := newPanel(lo, math.Max(hi, 1)*1.04, "share of the variance of the sum, in %")
	for _, row := range rows {
		name, _ := row.Values["item"].(string)
		if _, err := strconv.Atoi(name); err == nil { // a place among items without names
			name = "item " + name
		}
		share := asNumber(row.Values["share"])
		p.addBar(name+", "+percentOf(share), 100*share)
		f.says = append(f.says, name+": "+percentOf(share)+" of the variance.")
	}
	f.panels = append(f.panels, p)
	f.caption = append(f.caption, "Bars: what each item adds to the variance of the sum.")
	if more := len(a.Rows) - len(rows); more > 0 {
		f.caption = append(f.caption, plural(more, "further item")+" not drawn.")
	}
	v, refs := a.interval(), a.references()
	if chance := a.given("chance"); !math.IsNaN(chance) {
		refs = append(refs, reference{percent(chance) + " chance to stay below", a.result("value-for-chance"), true})
	}
	f.addIntervals(a.titled("the sum"), []interval{v}, refs)
	f.says = append(f.says, v.says())
	for _, r := range refs {
		f.says = append(f.says, sentence(r.label()))
	}
	f.caption = append(f.caption, "Below: the sum, its mean as a dot, its "+v.level+" interval as a bracket.")
	return f, nil
}

// addBar adds a named bar from 0.
func (p *panel) addBar(name string, value float64) {
	p.row(lineHeight, func(g pen) { g.left(wordInk, g.down(0), name) })
	p.row(11, func(g pen) {
		y := g.down(4)
		g.line(lineInk, 5, vg.Point{X: g.x(0), Y: y}, vg.Point{X: g.x(value), Y: y})
		g.line(axisInk, 1, vg.Point{X: g.x(0), Y: y - 4}, vg.Point{X: g.x(0), Y: y + 4})
	})
}

// drawAllocation shows how many to measure in each stratum.
func drawAllocation(_ context.Context, a answer) (*picture, error) {
	f := &picture{}
	most := 1.0
	rows := a.Rows[:min(len(a.Rows), mostGroups)]
	for _, row := range rows {
		most = math.Max(most, asNumber(row.Values["n"]))
	}
	p := newPanel(0, most*1.04, "how many to measure")
	for _, row := range rows {
		name, _ := row.Values["stratum"].(string)
		n := asNumber(row.Values["n"])
		p.addBar(name+", n = "+figure(n), n)
		f.says = append(f.says, name+": n = "+figure(n)+".")
	}
	f.panels = append(f.panels, p)
	f.caption = append(f.caption, "Bars: how many to measure in each stratum.")
	if more := len(a.Rows) - len(rows); more > 0 {
		f.caption = append(f.caption, plural(more, "further stratum")+" not drawn.")
	}
	return f, nil
}
