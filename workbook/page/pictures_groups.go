package page

import (
	"context"
	"math"

	"gonum.org/v1/plot/vg"

	"halfwidth/funcs"
)

// drawGroups shows several groups as strips, each with the interval of its own
// mean or standard deviation, and below what the function compares.
func drawGroups(ctx context.Context, a answer) (*picture, error) {
	f := &picture{}
	spread := a.Function.Family == "spread"
	strips, own, err := a.groupIntervals(ctx, spread)
	if err != nil {
		return nil, err
	}
	whole := interval{estimate: math.NaN(), lower: math.NaN(), upper: math.NaN()}
	if gives("mean", "lower", "upper")(a.Function) {
		whole = a.interval()
		whole.name = "mean"
	}
	if strips != nil && spread {
		f.addStrips(a.titled("values"), strips, nil, a)
	}
	switch {
	case strips != nil && !spread:
		f.addStrips(a.titled("values"), strips, own, a)
	case len(own) > 0:
		title := a.titled("means")
		var refs []reference
		if spread {
			title = a.titled("standard deviations")
			if pooled := a.result("pooled-sd"); !math.IsNaN(pooled) {
				refs = []reference{{"pooled sd", pooled, true}}
			}
		}
		f.addIntervals(title, own, refs)
		if len(refs) > 0 {
			f.caption = append(f.caption, "Dashed: "+refs[0].name+".")
			f.says = append(f.says, sentence(refs[0].label()))
		}
	}
	for _, v := range own {
		f.says = append(f.says, v.says())
	}
	if len(own) > 0 {
		what := "mean"
		if spread {
			what = "standard deviation"
		}
		text := "Brackets: each group's own " + what
		if own[0].level != "" {
			text += " with its " + own[0].level + " interval"
		}
		f.caption = append(f.caption, text+".")
	}
	if whole.has() {
		f.addInterval(a.titled("mean of the population"), whole, a.references())
	}
	f.addRows(a)
	return f, nil
}

// groupIntervals gives the groups' strips, where there are values, and an
// interval for each group, as the catalogue works it out for that group alone.
func (a answer) groupIntervals(ctx context.Context, spread bool) (strips []strip, own []interval, err error) {
	confidence := a.given("confidence")
	if math.IsNaN(confidence) {
		confidence = 0.95
	}
	function, lower, upper, name := "mean-interval", "lower", "upper", "mean"
	if spread {
		function, lower, upper, name = "variance-interval", "sd-lower", "sd-upper", "sd"
	}
	add := func(group string, arguments map[string]any, otherwise float64) error {
		arguments["confidence"] = confidence
		out, err := ask(ctx, function, arguments)
		if err != nil {
			return err
		}
		v := interval{name: group + ": " + name, estimate: otherwise, lower: math.NaN(), upper: math.NaN(), level: percent(confidence), named: true}
		if out != nil {
			b := answer{Outcome: out}
			v.estimate, v.lower, v.upper = b.result(name), b.result(lower), b.result(upper)
		}
		own = append(own, v)
		return nil
	}
	for _, g := range a.groups() {
		s := newStrip(g.Name, g.Values, mostBeside)
		strips = append(strips, s)
		otherwise := math.NaN()
		if s.n == 1 && !spread {
			otherwise = s.lo
		}
		if err := add(g.Name, map[string]any{"sample": g.Values}, otherwise); err != nil {
			return nil, nil, err
		}
	}
	if strips != nil {
		return strips, own, nil
	}
	means, sds, ns := a.list("means"), a.list("sds"), a.list("ns")
	for i, group := range a.names("means", "sds", "ns") {
		arguments := map[string]any{"sd": of(sds, group, i), "n": of(ns, group, i)}
		if !spread {
			arguments["mean"] = of(means, group, i)
		}
		if err := add(group, arguments, of(means, group, i)); err != nil {
			return nil, nil, err
		}
	}
	return nil, own, nil
}

// mostGroups is how many groups a picture shows one by one.
const mostGroups = 24

// addStrips adds a panel with a strip for each group, and its interval below
// each where there are intervals.
func (f *picture) addStrips(title string, strips []strip, own []interval, a answer) {
	var seen []float64
	for i, s := range strips {
		seen = append(seen, s.lo, s.hi)
		if own != nil {
			seen = append(seen, own[i].within()...)
		}
	}
	lo, hi := spanOf(seen...)
	p := newPanel(lo, hi, title)
	size := p.fit(strips, shortStrip)
	for i, s := range strips {
		if i == mostGroups {
			f.caption = append(f.caption, plural(len(strips)-mostGroups, "further group")+" not drawn.")
			break
		}
		if own == nil {
			p.addNamed(s, size, shortStrip)
			continue
		}
		v := own[i]
		p.row(lineHeight, func(g pen) {
			g.left(wordInk, g.down(0), shortened(s.name+", n = "+figure(float64(s.n)), pictureWidth))
		})
		p.addStrip(s, size, shortStrip)
		v.name = "mean"
		p.addBracket(v)
		p.row(6, func(pen) {})
	}
	f.panels = append(f.panels, p)
	if len(strips) > 0 {
		f.caption = append(f.caption, captionOf(strips...))
	}
	for _, s := range strips {
		f.says = append(f.says, s.says())
	}
}

// addRows adds the comparisons of a table, each with its interval, on an axis
// of differences.
func (f *picture) addRows(a answer) {
	if !hasResult(a.Function.Table, "difference") {
		return
	}
	list := a.rowIntervals()
	if len(list) == 0 {
		return
	}
	if len(list) > mostGroups {
		f.caption = append(f.caption, plural(len(list)-mostGroups, "further difference")+" not drawn.")
		list = list[:mostGroups]
	}
	lo, hi := 0.0, 0.0
	for _, v := range list {
		a, b := spanOf(append(v.within(), 0)...)
		lo, hi = math.Min(lo, a), math.Max(hi, b)
	}
	p := newPanel(lo, hi, a.titled("differences"))
	p.over(func(g pen) {
		g.dashed(refInk, 1.6, vg.Point{X: g.x(0), Y: g.Max.Y}, vg.Point{X: g.x(0), Y: g.Min.Y - 6})
	})
	for _, v := range list {
		p.row(lineHeight, func(g pen) { g.left(wordInk, g.down(0), v.name) })
		p.row(bracketHeight, func(g pen) {
			g.bracket(v, g.down(8))
			from, to := g.span(v)
			plain := v
			plain.name, plain.level = "", ""
			g.label(markWordInk, (from+to)/2, g.down(16), plain.label())
		})
		f.says = append(f.says, v.says())
	}
	f.panels = append(f.panels, p)
	f.caption = append(f.caption, "Below: the differences with their intervals; dashed: no difference.")
}

// rowIntervals reads the comparisons of a table.
func (a answer) rowIntervals() []interval {
	var list []interval
	for _, row := range a.Rows {
		get := func(name string) float64 {
			if v, ok := row.Values[name]; ok {
				return asNumber(v)
			}
			return math.NaN()
		}
		word := func(name string) string { s, _ := row.Values[name].(string); return s }
		name := word("first") + " less " + word("second")
		if group := word("group"); group != "" {
			name = group + " less " + a.word("control")
		}
		v := interval{name: name, estimate: get("difference"), lower: get("lower"), upper: get("upper"), level: a.level(), named: true}
		if v.has() || !math.IsNaN(v.estimate) {
			list = append(list, v)
		}
	}
	return list
}

// drawEach shows the answers for the groups of one sample given `for each`.
func drawEach(names []string, outcomes []*funcs.Outcome) *picture {
	f := &picture{}
	var strips []strip
	var own []interval
	var first answer
	for i, out := range outcomes {
		if out == nil || out.Status == funcs.StatusRefused {
			continue
		}
		a := answer{Outcome: out}
		if first.Outcome == nil {
			first = a
		}
		s := newStrip(names[i], a.sample("sample"), mostBeside)
		if s.n == 0 {
			continue
		}
		strips = append(strips, s)
		if gives("lower", "upper")(out.Function) && out.Function.Results[0].Unit == funcs.SameUnit {
			own = append(own, a.interval())
		}
	}
	if len(strips) == 0 {
		return nil
	}
	if len(own) != len(strips) {
		own = nil
	}
	f.addStrips(first.unit(), strips, own, first)
	if own != nil {
		f.caption = append(f.caption, "Brackets: the interval of each group.")
		for i, v := range own {
			v.name, v.named = strips[i].name+": "+v.name, true
			f.says = append(f.says, v.says())
		}
	}
	return f
}
