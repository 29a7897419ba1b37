package page

import (
	"context"
	"math"
	"slices"
	"strings"

	"gonum.org/v1/plot/vg"

	"halfwidth/funcs"
)

// plan is the curve behind a size: what a number of values attains.
type plan struct {
	function *funcs.Function // that tells what a number attains
	x, y     string          // the input and the result of it
	fixed    map[string]any
	ratio    float64 // second-n over n, NaN where there is one group
	chosen   float64
	attained float64
	wanted   float64 // NaN where nothing is
	over     string  // instead of x: the input that is varied, x being the result n
}

// planOf finds the function that goes the other way than a size, by its name:
// mean-test-size is answered by mean-test-power, mean-precision-size by
// mean-precision. A function that takes n itself is its own.
func (a answer) planOf() *plan {
	p := &plan{function: a.Function, ratio: math.NaN(), wanted: math.NaN()}
	isSize := false
	if base, ok := strings.CutSuffix(a.Function.Name, "-size"); ok {
		isSize = true
		p.function = nil
		for _, end := range []string{"", "-power", "-confidence"} {
			if f, err := funcs.Lookup(base + end); err == nil {
				p.function = f
			}
		}
	}
	if p.function != nil {
		for _, x := range []string{"n", "exposure"} {
			if _, ok := p.function.Input(x); ok {
				p.x = x
			}
		}
	}
	if p.function == nil || p.x == "" {
		return a.inversePlan()
	}
	p.y = p.function.Results[0].Name
	p.fixed = a.arguments(p.function)
	delete(p.fixed, p.x)
	p.chosen = a.given(p.x)
	if isSize {
		p.chosen = a.result(p.x)
		delete(p.fixed, "design-effect") // n is what counts, after losses
		delete(p.fixed, "non-response")
	}
	p.attained = a.result(p.y)
	delete(p.fixed, "second-n")
	if second := a.result("second-n"); !math.IsNaN(second) {
		p.ratio = second / p.chosen
		if r := a.given("allocation-ratio"); !math.IsNaN(r) {
			p.ratio = r
		}
	} else if second := a.given("second-n"); !math.IsNaN(second) {
		p.ratio = second / p.chosen
	}
	if isSize {
		for _, name := range []string{strings.TrimPrefix(p.y, "attained-"), "relative-half-width", "power"} {
			if v := a.given(name); !math.IsNaN(v) && math.IsNaN(p.wanted) {
				p.wanted = v
			}
		}
	}
	return p
}

// inversePlan is for a size that no function answers: it is asked again with
// other levels, and its n is where they are attained.
func (a answer) inversePlan() *plan {
	i := slices.IndexFunc(a.Function.Results, func(r funcs.Result) bool {
		return strings.HasPrefix(r.Name, "attained") || strings.HasPrefix(r.Name, "predicted")
	})
	if i < 0 {
		return nil
	}
	p := &plan{function: a.Function, x: "n", y: a.Function.Results[i].Name, fixed: a.arguments(a.Function), ratio: math.NaN(), wanted: math.NaN()}
	p.over = "confidence"
	if _, ok := a.Function.Input("allowed-shortfall"); ok {
		p.over = "allowed-shortfall"
		p.wanted = a.given("confidence") - a.given("allowed-shortfall")
	} else {
		p.wanted = a.given("confidence")
	}
	p.chosen, p.attained = a.result("n"), a.result(p.y)
	return p
}

// at is what a number attains; NaN where there is no answer.
func (p *plan) at(ctx context.Context, x float64) (float64, error) {
	args := map[string]any{p.x: x}
	for name, v := range p.fixed {
		args[name] = v
	}
	if !math.IsNaN(p.ratio) {
		args["second-n"] = math.Max(2, math.Ceil(p.ratio*x-1e-9))
	}
	return askNumber(ctx, p.function.Name, p.y, args)
}

// numbers are those at which the curve is worked out: whole ones from a quarter
// of the chosen one, or from the smallest possible, to twice as many.
func (p *plan) numbers() []float64 {
	lo, hi := p.chosen/4, 2*p.chosen
	in, _ := p.function.Input(p.x)
	whole := in.Kind == funcs.Count
	if whole {
		lo, hi = math.Max(math.Floor(lo), in.Domain.Low), math.Max(math.Ceil(hi), in.Domain.Low+8)
		if hi <= 40 {
			lo = in.Domain.Low
		}
		if size := asNumber(p.fixed["population-size"]); !math.IsNaN(size) {
			hi = math.Min(hi, size)
		}
	}
	const points = 24
	out := []float64{p.chosen}
	for i := range points + 1 {
		x := lo + (hi-lo)*float64(i)/points
		if whole {
			x = math.Round(x)
		}
		out = append(out, x)
	}
	slices.Sort(out)
	return slices.Compact(out)
}

// curve gives the points of the curve.
func (p *plan) curve(ctx context.Context) (xs, ys []float64, err error) {
	add := func(x, y float64) {
		if !math.IsNaN(x) && !math.IsNaN(y) {
			xs, ys = append(xs, x), append(ys, y)
		}
	}
	if p.over == "" {
		for _, x := range p.numbers() {
			y, err := p.at(ctx, x)
			if err != nil {
				return nil, nil, err
			}
			add(x, y)
		}
		return xs, ys, nil
	}
	middle := asNumber(p.fixed[p.over])
	for _, factor := range []float64{4, 2.8, 2, 1.7, 1.4, 1.2, 1, 0.85, 0.7, 0.6, 0.5} {
		args := map[string]any{}
		for name, v := range p.fixed {
			args[name] = v
		}
		level := middle * factor
		if p.over == "confidence" {
			level = 1 - (1-middle)*factor
		}
		if !(level > 0 && level < 1) {
			continue
		}
		args[p.over] = level
		out, err := ask(ctx, p.function.Name, args)
		if err != nil {
			return nil, nil, err
		}
		if out != nil {
			b := answer{Outcome: out}
			add(b.result(p.x), b.result(p.y))
		}
	}
	return xs, ys, nil
}

// ruleOfThumb is the n that is often called enough.
const ruleOfThumb = 30

// drawPlan shows what other numbers of values would attain, with the chosen one
// marked.
func drawPlan(ctx context.Context, a answer) (*picture, error) {
	p := a.planOf()
	if p == nil {
		return nil, nil
	}
	xs, ys, err := p.curve(ctx)
	if err != nil || len(xs) == 0 {
		return nil, err
	}
	thumb := a.result("coverage-at-30") // the rule of thumb stands on the curve too, as what it is
	if at, found := slices.BinarySearch(xs, ruleOfThumb); !math.IsNaN(thumb) && !found {
		xs, ys = slices.Insert(xs, at, ruleOfThumb), slices.Insert(ys, at, thumb)
	}
	lox, hix := spanOf(append(slices.Clone(xs), p.chosen)...)
	seen := append(slices.Clone(ys), p.attained, p.wanted)
	loy, hiy := spanOf(seen...)
	switch {
	case strings.HasSuffix(p.y, "half-width") || p.y == "difference":
		loy = math.Min(loy, 0)
	case strings.HasSuffix(p.y, "power"):
		loy, hiy = math.Min(0, loy), 1.02
	case !math.IsNaN(thumb): // room for its words
		loy, hiy = loy-0.15*(hiy-loy), hiy+0.15*(hiy-loy)
	}
	what := spaced(strings.TrimPrefix(p.y, "attained-"))
	if p.y == "attained" {
		what = "power"
		if !math.IsNaN(a.given("relative-half-width")) || math.IsNaN(a.given("variance-ratio")) {
			what = "relative half-width"
		}
	}
	g := newPanel(lox, hix, what+" (upward) against "+p.x)
	g.vertical(loy, hiy, 170)
	mark := p.x + " = " + short(p.chosen) + ": " + short(p.attained)
	g.over(func(g pen) {
		if !math.IsNaN(p.wanted) {
			y := g.y(p.wanted)
			g.dashed(refInk, 1.6, vg.Point{X: g.Min.X, Y: y}, vg.Point{X: g.Max.X, Y: y})
		}
		points := make([]vg.Point, len(xs))
		for i := range xs {
			points[i] = vg.Point{X: g.x(xs[i]), Y: g.y(ys[i])}
		}
		g.line(lineInk, 1, points...)
		g.dots(dotInk, 4, points)
		if !math.IsNaN(thumb) {
			at, words := vg.Point{X: g.x(ruleOfThumb), Y: g.y(thumb)}, "rule of thumb n = "+short(ruleOfThumb)
			g.rings(refInk, 6, []vg.Point{at})
			if half := widthOf(refWordInk, words) / 2; at.X+12+2*half <= pictureWidth {
				g.label(refWordInk, at.X+12+half, at.Y+lineHeight/2, words)
			} else if ys[len(ys)-1] < ys[0] { // the curve comes from above, so there is room below
				g.label(refWordInk, pictureWidth-half, at.Y-8, words)
			} else {
				g.label(refWordInk, pictureWidth-half, at.Y+lineHeight+8, words)
			}
		}
		if math.IsNaN(p.attained) {
			return
		}
		at := vg.Point{X: g.x(p.chosen), Y: g.y(p.attained)}
		g.line(intervalInk, 2, vg.Point{X: at.X, Y: g.Min.Y - 6}, at)
		g.dots(intervalInk, 9, []vg.Point{at})
		below := at.Y - 8
		if ys[len(ys)-1] < ys[0] { // a falling curve leaves room above
			below = at.Y + lineHeight + 8
		}
		g.label(markWordInk, at.X+widthOf(markWordInk, mark)/2+10, min(max(below, g.Min.Y+lineHeight), g.Max.Y), mark)
	})
	f := &picture{panels: []*panel{g}}
	f.says = append(f.says, "What other numbers attain: "+what+" from "+short(ys[0])+" at "+p.x+" = "+short(xs[0])+
		" to "+short(ys[len(ys)-1])+" at "+p.x+" = "+short(xs[len(xs)-1])+". "+sentence("chosen: "+mark))
	if p.over == "" {
		f.caption = append(f.caption, "Each dot: what that "+p.x+" attains. Large dot: the one of this answer.")
	} else {
		f.caption = append(f.caption, "Each dot: the n for another "+spaced(p.over)+". Large dot: the one of this answer.")
	}
	if !math.IsNaN(thumb) {
		f.caption = append(f.caption, "Ring: the rule of thumb, whatever the values.")
		f.says = append(f.says, "The rule of thumb n = "+short(ruleOfThumb)+" attains "+short(thumb)+".")
	}
	if !math.IsNaN(p.wanted) {
		f.caption = append(f.caption, "Dashed: wanted, "+figure(p.wanted)+".")
		f.says = append(f.says, "Wanted: "+figure(p.wanted)+".")
	}
	if !math.IsNaN(p.ratio) && p.ratio != 1 {
		f.caption = append(f.caption, "The second group has "+figure(p.ratio)+" times as many.")
	}
	return f, nil
}
