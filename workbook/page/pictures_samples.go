package page

import (
	"context"
	"fmt"
	"math"
	"strings"

	"gonum.org/v1/plot/vg"

	"halfwidth/funcs"
)

// The heights of strips: alone, and one of several.
const (
	tallStrip  = 84
	shortStrip = 44
)

// drawSample shows one sample as a strip with its interval below. An interval
// of something that lies elsewhere than the values, such as their standard
// deviation, has an axis of its own.
func drawSample(_ context.Context, a answer) (*picture, error) {
	v, refs := a.interval(), a.references()
	own := false
	switch {
	case gives("sd-lower")(a.Function):
		v = a.intervalOf("sd-lower", "sd-upper")
		v.name, v.estimate, own = "sd", a.result("sd"), true
		for i := range refs {
			refs[i] = reference{"root of the reference:", math.Sqrt(refs[i].value), true}
		}
	case a.word("of") == "sd":
		own = true
	}
	s := newStrip("", a.sample("sample"), mostDots)
	f := &picture{}
	if s.n == 0 {
		return drawInterval(context.Background(), a)
	}
	f.says = append(f.says, s.says())
	f.caption = append(f.caption, captionOf(s))
	if own {
		lo, hi := spanOf(s.lo, s.hi)
		p := newPanel(lo, hi, a.titled("values"))
		p.addTall(s)
		f.panels = append(f.panels, p)
		f.addInterval(a.titled("standard deviation"), v, refs)
		return f, nil
	}
	lo, hi := spanOf(append(append(v.within(), s.lo, s.hi), valuesOf(refs)...)...)
	p := newPanel(lo, hi, a.unit())
	p.addReferences(refs)
	p.addTall(s)
	p.addBracket(v)
	f.panels = append(f.panels, p)
	f.explain(v, refs)
	return f, nil
}

// drawInterval shows an interval alone, where there are no values to show.
func drawInterval(_ context.Context, a answer) (*picture, error) {
	v, refs := a.interval(), a.references()
	switch {
	case gives("sd-lower")(a.Function):
		v = a.intervalOf("sd-lower", "sd-upper")
		v.name, v.estimate = "sd", a.result("sd")
		for i := range refs {
			refs[i] = reference{"root of the reference:", math.Sqrt(refs[i].value), true}
		}
	}
	f := &picture{}
	f.addInterval(a.unit(), v, refs)
	return f, nil
}

// addInterval adds a panel with one interval on an axis of its own.
func (f *picture) addInterval(title string, v interval, refs []reference) {
	f.addIntervals(title, []interval{v}, refs)
	f.explain(v, refs)
}

// addIntervals adds a panel with intervals below one another on one axis.
func (f *picture) addIntervals(title string, list []interval, refs []reference) *panel {
	seen := valuesOf(refs)
	for _, v := range list {
		seen = append(seen, v.within()...)
	}
	lo, hi := spanOf(seen...)
	for _, v := range list { // room for the arrow of an open side
		if v.has() && math.IsNaN(v.lower) {
			lo -= (hi - lo) / 5
			break
		}
	}
	for _, v := range list {
		if v.has() && math.IsNaN(v.upper) {
			hi += (hi - lo) / 5
			break
		}
	}
	p := newPanel(lo, hi, title)
	p.addReferences(refs)
	for _, v := range list {
		p.row(6, func(pen) {})
		p.addBracket(v)
	}
	f.panels = append(f.panels, p)
	return p
}

// explain says in words what bracket and dashed line are.
func (f *picture) explain(v interval, refs []reference) {
	if text := v.says(); text != "" {
		f.says = append(f.says, text)
	}
	for _, r := range refs {
		f.says = append(f.says, sentence(r.label()))
	}
	bracket := ""
	switch {
	case v.has() && v.level != "":
		bracket = "bracket: " + v.level + " interval"
	case v.has():
		bracket = "bracket: the interval"
	}
	if v.has() && (math.IsNaN(v.lower) || math.IsNaN(v.upper)) {
		bracket += ", open where the arrow points"
	}
	if !math.IsNaN(v.estimate) && v.name != "" {
		if bracket != "" {
			bracket += "; "
		}
		bracket += "dot on it: the " + v.name
	}
	if bracket != "" {
		f.caption = append(f.caption, sentence(bracket))
	}
	if len(refs) > 0 {
		f.caption = append(f.caption, "Dashed: "+strings.TrimSuffix(refs[0].name, ":")+".")
	}
}

// drawSummary shows a sample with its mean and quartiles marked below.
func drawSummary(_ context.Context, a answer) (*picture, error) {
	s := newStrip("", a.sample("sample"), mostDots)
	lo, hi := spanOf(s.lo, s.hi)
	p := newPanel(lo, hi, a.unit())
	p.addTall(s)
	marks := []struct{ result, name string }{{"lower-quartile", "lower quartile"}, {"median", "median"}, {"upper-quartile", "upper quartile"}}
	p.row(bracketHeight, func(g pen) {
		y := g.down(8)
		g.line(intervalInk, 1, vg.Point{X: g.x(a.result("lower-quartile")), Y: y}, vg.Point{X: g.x(a.result("upper-quartile")), Y: y})
		for _, m := range marks {
			x := g.x(a.result(m.result))
			g.line(intervalInk, 2, vg.Point{X: x, Y: y - 5}, vg.Point{X: x, Y: y + 5})
		}
		x := g.x(a.result("mean"))
		g.rings(intervalInk, 3.5, []vg.Point{{X: x, Y: y}})
		g.label(markWordInk, g.x(a.result("median")), g.down(16), "median "+short(a.result("median"))+", mean "+short(a.result("mean")))
	})
	return &picture{
		panels: []*panel{p},
		says: []string{s.says(), fmt.Sprintf("Mean %s, lower quartile %s, median %s, upper quartile %s.", figure(a.result("mean")),
			figure(a.result("lower-quartile")), figure(a.result("median")), figure(a.result("upper-quartile")))},
		caption: []string{captionOf(s), "Three strokes below: lower quartile, median, upper quartile. Ring: mean."},
	}, nil
}

// drawOutliers shows a sample with the values found to be outliers ringed.
func drawOutliers(_ context.Context, a answer) (*picture, error) {
	s := newStrip("", a.sample("sample"), mostDots)
	lo, hi := spanOf(s.lo, s.hi)
	p := newPanel(lo, hi, a.unit())
	found := int(a.result("outliers"))
	var values []float64
	for _, row := range a.Rows[:min(found, len(a.Rows))] {
		values = append(values, asNumber(row.Values["value"]))
	}
	p.addTall(s)
	text := "no outliers found"
	if found > 0 {
		text = plural(found, "outlier")
	}
	p.row(bracketHeight, func(g pen) {
		var at []vg.Point
		for _, v := range values {
			x := g.x(v)
			at = append(at, vg.Point{X: x, Y: g.down(8)})
		}
		g.rings(intervalInk, 4, at)
		x := (g.Min.X + g.Max.X) / 2
		if len(values) > 0 {
			x = g.x(values[0])
		}
		g.label(markWordInk, x, g.down(16), text)
	})
	f := &picture{panels: []*panel{p}, says: []string{s.says(), sentence(text)}, caption: []string{captionOf(s)}}
	if found > 0 {
		f.caption = append(f.caption, "Rings below: the outliers.")
	}
	return f, nil
}

// drawDifferences shows the differences of pairs as a strip, with the interval
// of their mean.
func drawDifferences(_ context.Context, a answer) (*picture, error) {
	first, second := a.sample("sample"), a.sample("second-sample")
	if first == nil || second == nil {
		f := &picture{}
		f.addInterval(a.titled("difference"), a.interval(), a.references())
		return f, nil
	}
	differences := make([]float64, min(len(first), len(second)))
	for i := range differences {
		differences[i] = first[i] - second[i]
	}
	s := newStrip("", differences, mostDots)
	v, refs := a.interval(), a.references()
	lo, hi := spanOf(append(append(v.within(), s.lo, s.hi), valuesOf(refs)...)...)
	p := newPanel(lo, hi, a.titled("first less second, pair by pair"))
	p.addReferences(refs)
	p.addTall(s)
	p.addBracket(v)
	f := &picture{panels: []*panel{p}, says: []string{"Differences of pairs: " + s.says()}, caption: []string{"Each dot is the difference of one pair."}}
	f.explain(v, refs)
	return f, nil
}

// drawTwoSamples shows both samples on one axis, and what their comparison
// gives on an axis of its own below.
func drawTwoSamples(_ context.Context, a answer) (*picture, error) {
	f := &picture{}
	first, second := newStrip("first", a.sample("sample"), mostBeside), newStrip("second", a.sample("second-sample"), mostBeside)
	first.written, second.written = a.expression("sample"), a.expression("second-sample")
	if first.n > 0 && second.n > 0 {
		lo, hi := spanOf(first.lo, first.hi, second.lo, second.hi)
		p := newPanel(lo, hi, a.titled("values"))
		size := p.fit([]strip{first, second}, shortStrip+6)
		for _, s := range []strip{first, second} {
			p.addNamed(s, size, shortStrip+6)
			f.says = append(f.says, s.says())
		}
		f.panels = append(f.panels, p)
		f.caption = append(f.caption, captionOf(first, second))
	}
	refs := a.references()
	v := a.interval()
	if !math.IsNaN(a.given("significance")) {
		v.level = percent(1 - 2*a.given("significance"))
	}
	title := spaced(a.Function.Results[0].Name)
	if a.Function.Results[0].Unit == funcs.SameUnit {
		title = a.titled(title)
	}
	if _, ok := a.Function.Input("margin"); ok {
		refs = a.margins()
	}
	f.addInterval(title, v, refs)
	return f, nil
}

// margins are the limits within which a difference counts as none.
func (a answer) margins() []reference {
	lower, upper := a.given("lower-margin"), a.given("upper-margin")
	if m := a.given("margin"); !math.IsNaN(m) {
		centre := a.given("reference")
		if math.IsNaN(centre) {
			centre = 0
		}
		lower, upper = centre-m, centre+m
	}
	return []reference{{name: "margin", value: lower}, {name: "margin", value: upper}}
}

// addNamed adds a strip with its name and count above it.
func (p *panel) addNamed(s strip, size, height vg.Length) {
	name := s.name + ", n = " + figure(float64(s.n))
	if s.written != "" {
		name += ": " + s.written
	}
	p.row(lineHeight, func(g pen) { g.left(wordInk, g.down(0), name) })
	p.addStrip(s, size, height)
	p.row(6, func(g pen) {
		g.line(gridInk, 1, vg.Point{X: g.Min.X, Y: g.down(1)}, vg.Point{X: g.Max.X, Y: g.down(1)})
	})
}

// drawRatioOfSums shows the pairs as points, and the ratio as the slope of a
// line from the origin between those of its limits.
func drawRatioOfSums(_ context.Context, a answer) (*picture, error) {
	top, bottom := a.sample("sample"), a.sample("second-sample")
	var xs, ys []float64
	for i := range min(len(top), len(bottom)) {
		if !math.IsNaN(top[i]) && !math.IsNaN(bottom[i]) {
			xs, ys = append(xs, bottom[i]), append(ys, top[i])
		}
	}
	every := max(1, (len(xs)+mostDots-1)/mostDots)
	lox, hix := spanOf(append([]float64{0}, xs...)...)
	loy, hiy := spanOf(append([]float64{0}, ys...)...)
	p := newPanel(lox, hix, "sample (upward) against second-sample (rightward), row by row")
	p.vertical(loy, hiy, 190)
	v := a.interval()
	p.over(func(g pen) {
		var dots []vg.Point
		for i := 0; i < len(xs); i += every {
			dots = append(dots, vg.Point{X: g.x(xs[i]), Y: g.y(ys[i])})
		}
		g.dots(dotInk, 3.5, dots)
		ray := func(slope float64, dashed bool) {
			if math.IsNaN(slope) {
				return
			}
			end := hix
			if slope > 0 {
				end = math.Min(hix, hiy/slope)
			} else if slope < 0 {
				end = math.Min(hix, loy/slope)
			}
			points := []vg.Point{{X: g.x(0), Y: g.y(0)}, {X: g.x(end), Y: g.y(slope * end)}}
			if dashed {
				g.dashed(intervalInk, 1.2, points...)
			} else {
				g.line(intervalInk, 2, points...)
			}
		}
		ray(v.estimate, false)
		ray(v.lower, true)
		ray(v.upper, true)
	})
	f := &picture{panels: []*panel{p}, says: []string{plural(len(xs), "pair") + " of values.", v.says()},
		caption: []string{"Each dot is one row.", "Solid line: the ratio as a slope. Dashed: its limits."}}
	if every > 1 {
		f.caption[0] = fmt.Sprintf("Each dot is one row; every %dth of %d is drawn.", every, len(xs))
	}
	return f, nil
}
