package page

import (
	"context"
	"math"
	"strings"

	"gonum.org/v1/plot/vg"

	"halfwidth/funcs"
)

// law is a continuous law of probability, as a function of the catalogue gives
// it.
type law struct {
	function string // gives the probability from one value to another
	fixed    map[string]any
}

// between is the probability from one value to another; NaN where there is none.
func (l law) between(ctx context.Context, from, to float64) (float64, error) {
	args := map[string]any{}
	for name, v := range l.fixed {
		args[name] = v
	}
	if !math.IsInf(from, 0) {
		args["from"] = from
	}
	if !math.IsInf(to, 0) {
		args["to"] = to
	}
	return askNumber(ctx, l.function, "probability", args)
}

// ends are values between which nearly all of the law lies.
func (l law) ends(ctx context.Context) (lo, hi float64, err error) {
	const out = 0.001
	quantile := strings.TrimSuffix(l.function, "-probability") + "-quantile"
	if _, err := funcs.Lookup(quantile); err == nil {
		for _, end := range []struct {
			at   *float64
			from string
		}{{&lo, "below"}, {&hi, "above"}} {
			args := map[string]any{"probability": out, "counted-from": end.from}
			for name, v := range l.fixed {
				args[name] = v
			}
			if *end.at, err = askNumber(ctx, quantile, "value", args); err != nil {
				return 0, 0, err
			}
		}
		return lo, hi, nil
	}
	if hi, err = l.reach(ctx, 1, out); err != nil {
		return 0, 0, err
	}
	lo, err = l.reach(ctx, -1, out)
	return lo, hi, err
}

// reach searches, upward or downward from 0, for a value beyond which a
// probability of about so much lies.
func (l law) reach(ctx context.Context, side, out float64) (float64, error) {
	beyond := func(x float64) (p float64, err error) {
		if side > 0 {
			return l.between(ctx, side*x, math.Inf(1))
		}
		return l.between(ctx, math.Inf(-1), side*x)
	}
	near, far := 0.0, 1.0
	for range 40 {
		p, err := beyond(far)
		if err != nil {
			return 0, err
		}
		if !(p > out) {
			break
		}
		near, far = far, far*2
	}
	for range 12 {
		mid := near + (far-near)/2
		p, err := beyond(mid)
		if err != nil {
			return 0, err
		}
		if p > out {
			near = mid
		} else {
			far = mid
		}
	}
	return side * far, nil
}

// cells is how many steps a density is drawn in.
const cells = 72

// panel draws the density, with the part from one value to another shaded.
// Densities are probabilities of small steps over their width.
func (l law) panel(ctx context.Context, title string, from, to float64, refs []reference) (*panel, error) {
	lo, hi, err := l.ends(ctx)
	if err != nil {
		return nil, err
	}
	seen := append(valuesOf(refs), lo, hi)
	for _, v := range []float64{from, to} {
		if !math.IsInf(v, 0) {
			seen = append(seen, v)
		}
	}
	low, high := spanOf(seen...)
	negative, err := l.between(ctx, math.Inf(-1), 0)
	if err != nil {
		return nil, err
	}
	if negative == 0 && low < (high-low)/8 && !(from < 0 && !math.IsInf(from, 0)) {
		low = 0 // a law of positive values
	}
	if !(low < high) || math.IsInf(high-low, 0) {
		return nil, nil
	}
	step := (high - low) / cells
	xs, ys := make([]float64, cells), make([]float64, cells)
	most := 0.0
	for i := range cells {
		x := low + step*float64(i)
		p, err := l.between(ctx, x, x+step)
		if err != nil {
			return nil, err
		}
		if math.IsNaN(p) {
			p = 0
		}
		xs[i], ys[i] = x+step/2, p
		if i > 0 { // the density may be without bound at its start
			most = math.Max(most, p)
		}
	}
	p := newPanel(low, high, title)
	p.addReferences(refs)
	p.row(90, func(g pen) {
		at := func(x, y float64) vg.Point {
			return vg.Point{X: g.x(x), Y: g.down(90) + 86*vg.Length(math.Min(y/most, 1))}
		}
		height := func(x float64) float64 { // between the middles of steps
			k := (x-low)/step - 0.5
			i := int(math.Floor(k))
			switch {
			case i < 0:
				return ys[0]
			case i >= cells-1:
				return ys[cells-1]
			}
			return ys[i] + (k-float64(i))*(ys[i+1]-ys[i])
		}
		a, b := math.Max(from, low), math.Min(to, high)
		if a < b {
			shade := []vg.Point{at(a, 0), at(a, height(a))}
			for i, x := range xs {
				if x > a && x < b {
					shade = append(shade, at(x, ys[i]))
				}
			}
			g.area(bandInk, append(shade, at(b, height(b)), at(b, 0))...)
		}
		var curve []vg.Point
		for i, x := range xs {
			curve = append(curve, at(x, ys[i]))
		}
		g.line(gridInk, 1, vg.Point{X: g.Min.X, Y: g.down(90)}, vg.Point{X: g.Max.X, Y: g.down(90)})
		g.line(lineInk, 1.6, curve...)
		for _, v := range []float64{from, to} {
			if v >= low && v <= high {
				g.line(intervalInk, 2, at(v, 0), at(v, height(v)))
			}
		}
	})
	return p, nil
}

// drawLaw shows the density of the law that a probability or a quantile belongs
// to.
func drawLaw(ctx context.Context, a answer) (*picture, error) {
	l := law{function: a.Function.Name, fixed: a.arguments(a.Function)}
	from, to := math.Inf(-1), math.Inf(1)
	says, probability := "", a.result("probability")
	if takes("from", "to")(a.Function) {
		if v := a.given("from"); !math.IsNaN(v) {
			from = v
		}
		if v := a.given("to"); !math.IsNaN(v) {
			to = v
		}
	} else {
		l.function = strings.TrimSuffix(l.function, "-quantile") + "-probability"
		probability = a.given("probability")
		if a.word("counted-from") == "above" {
			from = a.result("value")
		} else {
			to = a.result("value")
		}
	}
	for _, name := range []string{"from", "to", "probability", "counted-from"} {
		delete(l.fixed, name)
	}
	p, err := l.panel(ctx, a.unit(), from, to, nil)
	if p == nil {
		return nil, err
	}
	switch {
	case math.IsInf(from, 0):
		says = "up to " + figure(to)
	case math.IsInf(to, 0):
		says = "from " + figure(from) + " upward"
	default:
		says = "from " + figure(from) + " to " + figure(to)
	}
	text := "probability " + figure(probability) + " " + says
	p.row(lineHeight+8, func(g pen) {
		g.label(markWordInk, (g.x(math.Max(from, p.x.min))+g.x(math.Min(to, p.x.max)))/2, g.down(6), text)
	})
	return &picture{panels: []*panel{p}, says: []string{"Density of the law. " + sentence(text)},
		caption: []string{"Curve: the density. Shaded: the part that the probability counts."}}, nil
}

// normalLaw is the normal law of that mean and standard deviation.
func normalLaw(mean, sd float64) law {
	return law{"normal-probability", map[string]any{"mean": mean, "sd": sd}}
}

// drawScore shows a value in its normal law.
func drawScore(ctx context.Context, a answer) (*picture, error) {
	value := a.given("value")
	p, err := normalLaw(a.given("mean"), a.given("sd")).panel(ctx, a.unit(), math.Inf(-1), value, nil)
	if p == nil {
		return nil, err
	}
	side := "above"
	if a.result("score") < 0 {
		side = "below"
	}
	text := figure(value) + " lies " + figure(math.Abs(a.result("score"))) + " sd " + side + " the mean"
	p.row(lineHeight+8, func(g pen) { g.label(markWordInk, g.x(value), g.down(6), text) })
	return &picture{panels: []*panel{p},
		says:    []string{"Density of the normal law. " + sentence(text), "Below it lies a probability of " + figure(a.result("probability-below")) + "."},
		caption: []string{"Curve: the normal density. Shaded: the probability of a smaller value."}}, nil
}

// drawTransform shows the normal law that the transformed quantity has.
func drawTransform(ctx context.Context, a answer) (*picture, error) {
	mean, sd := a.result("mean"), a.result("sd")
	v := interval{name: "mean", estimate: mean, lower: mean - sd, upper: mean + sd}
	f := &picture{}
	var p *panel
	if sd > 0 {
		var err error
		if p, err = normalLaw(mean, sd).panel(ctx, "after multiplying and adding", math.Inf(-1), math.Inf(-1), nil); err != nil {
			return nil, err
		}
	}
	if p == nil {
		f.addIntervals("after multiplying and adding", []interval{v}, nil)
	} else {
		p.addBracket(v)
		f.panels = append(f.panels, p)
		f.caption = append(f.caption, "Curve: the density of a normal quantity.")
	}
	f.caption = append(f.caption, "Bracket: one standard deviation to either side of the mean.")
	f.says = append(f.says, "Mean "+figure(mean)+", standard deviation "+figure(sd)+".")
	return f, nil
}
