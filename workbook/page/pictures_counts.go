package page

import (
	"context"
	"math"

	"gonum.org/v1/plot/vg"
)

// onShares is a panel over 0 to 1, or part of it where all of the numbers lie
// close to one end.
func onShares(title string, seen ...float64) *panel {
	largest, smallest := 0.0, 1.0
	for _, v := range seen {
		if !math.IsNaN(v) {
			largest, smallest = math.Max(largest, v), math.Min(smallest, v)
		}
	}
	switch {
	case largest < 0.1:
		step, _ := roundStep(largest * 1.15)
		return newPanel(0, math.Max(step, 1e-12), title+", from 0")
	case smallest > 0.9:
		step, _ := roundStep((1 - smallest) * 1.15)
		return newPanel(1-math.Max(step, 1e-12), 1, title+", up to 1")
	}
	return newPanel(0, 1, title+", from 0 to 1")
}

// drawShare shows a share with its interval on the scale of shares.
func drawShare(_ context.Context, a answer) (*picture, error) {
	v, refs := a.interval(), a.references()
	f := &picture{says: []string{figure(a.given("successes")) + " of " + figure(a.given("n")) + "."}}
	p := onShares("share", append(v.within(), valuesOf(refs)...)...)
	p.addReferences(refs)
	p.row(6, func(pen) {})
	p.addBracket(v)
	f.panels = append(f.panels, p)
	f.explain(v, refs)
	return f, nil
}

// drawRate shows a rate with its interval on a scale from 0.
func drawRate(_ context.Context, a answer) (*picture, error) {
	v, refs := a.interval(), a.references()
	f := &picture{says: []string{"Count " + figure(a.given("count")) + " over an exposure of " + figure(a.given("exposure")) + "."}}
	_, hi := spanOf(append(append(v.within(), 0), valuesOf(refs)...)...)
	if math.IsNaN(v.upper) {
		hi *= 1.25
	}
	p := newPanel(0, hi, "rate, from 0")
	p.addReferences(refs)
	p.row(6, func(pen) {})
	p.addBracket(v)
	f.panels = append(f.panels, p)
	f.explain(v, refs)
	return f, nil
}

// part is one of several shares or rates, as the catalogue works it out alone.
func part(ctx context.Context, name, function, result string, arguments map[string]any) (interval, error) {
	v := interval{name: name, estimate: math.NaN(), lower: math.NaN(), upper: math.NaN()}
	out, err := ask(ctx, function, arguments)
	if out != nil {
		b := answer{Outcome: out}
		v.estimate, v.lower, v.upper, v.level = b.result(result), b.result("lower"), b.result("upper"), b.level()
	}
	return v, err
}

// addParts adds shares or rates below one another.
func (f *picture) addParts(p *panel, list []interval) {
	for _, v := range list {
		p.row(6, func(pen) {})
		p.addBracket(v)
		f.says = append(f.says, v.says())
	}
	f.panels = append(f.panels, p)
}

// drawTwoShares shows two shares with their intervals, and their difference on
// an axis of its own.
func drawTwoShares(ctx context.Context, a answer) (*picture, error) {
	f := &picture{}
	var parts []interval
	var seen []float64
	for _, name := range []string{"first", "second"} {
		v, err := part(ctx, name+" share", "proportion-interval", "proportion", map[string]any{
			"successes": a.Arguments[name+"-successes"].Value, "n": a.Arguments[name+"-n"].Value, "confidence": a.given("confidence")})
		if err != nil {
			return nil, err
		}
		parts, seen = append(parts, v), append(seen, v.within()...)
	}
	f.addParts(onShares("shares", seen...), parts)
	f.caption = append(f.caption, "Above: each share with its own interval.")
	f.addInterval("difference of the shares", a.interval(), []reference{{name: "no difference:"}})
	return f, nil
}

// drawTwoRates shows two rates with their intervals, and their ratio on an axis
// of its own.
func drawTwoRates(ctx context.Context, a answer) (*picture, error) {
	f := &picture{}
	var parts []interval
	seen := []float64{0}
	for _, name := range []string{"first", "second"} {
		v, err := part(ctx, name+" rate", "rate-interval", "rate", map[string]any{
			"count": a.Arguments[name+"-count"].Value, "exposure": a.given(name + "-exposure"), "confidence": a.given("confidence")})
		if err != nil {
			return nil, err
		}
		parts, seen = append(parts, v), append(seen, v.within()...)
	}
	_, hi := spanOf(seen...)
	f.addParts(newPanel(0, hi, "rates, from 0"), parts)
	f.caption = append(f.caption, "Above: each rate with its own interval.")
	f.addInterval("ratio of the rates", a.interval(), a.references())
	return f, nil
}

// drawSeveralShares shows each group's share, and the differences of all pairs.
func drawSeveralShares(ctx context.Context, a answer) (*picture, error) {
	f := &picture{}
	successes, ns := a.list("successes"), a.list("ns")
	var parts []interval
	var seen []float64
	for i, name := range a.names("successes", "ns") {
		if i == mostGroups {
			break
		}
		v, err := part(ctx, name, "proportion-interval", "proportion", map[string]any{
			"successes": of(successes, name, i), "n": of(ns, name, i), "confidence": a.given("confidence")})
		if err != nil {
			return nil, err
		}
		v.named = true
		parts, seen = append(parts, v), append(seen, v.within()...)
	}
	f.addParts(onShares("shares", seen...), parts)
	f.caption = append(f.caption, "Above: each share with its own interval.")
	f.addRows(a)
	return f, nil
}

// drawAdjusted shows each p-value beside what it becomes.
func drawAdjusted(_ context.Context, a answer) (*picture, error) {
	p := newPanel(0, 1, "p-values, from 0 to 1")
	f := &picture{panels: []*panel{p}}
	shown := 0
	for i, row := range a.Rows {
		before, ok := row.Values["p-value"]
		if !ok {
			continue
		}
		if shown++; shown > 2*mostGroups {
			f.caption = append(f.caption, "The first "+plural(2*mostGroups, "p-value")+" are drawn.")
			break
		}
		from, to := asNumber(before), asNumber(row.Values["adjusted"])
		p.row(12, func(g pen) {
			y := g.down(6)
			g.line(axisInk, 1, vg.Point{X: g.x(from), Y: y}, vg.Point{X: g.x(to), Y: y})
			g.rings(ringInk, 3, []vg.Point{{X: g.x(from), Y: y}})
			g.dots(intervalInk, 7, []vg.Point{{X: g.x(to), Y: y}})
		})
		f.says = append(f.says, "Test "+figure(float64(i+1))+": "+figure(from)+" becomes "+figure(to)+".")
	}
	f.caption = append(f.caption, "One line a test, in the order given. Ring: the p-value as given. Dot: adjusted.")
	return f, nil
}
