package page

import (
	"context"
	"encoding/xml"
	"errors"
	"io"
	"math"
	"math/rand/v2"
	"slices"
	"strings"
	"testing"

	"halfwidth/funcs"
)

// outcomeOf answers a function's own example.
func outcomeOf(t *testing.T, f *funcs.Function) *funcs.Outcome {
	t.Helper()
	args := map[string]any{}
	for _, a := range f.Example.Arguments {
		args[a.Name] = a.Value
	}
	return answered(t, f.Name, args)
}

func answered(t *testing.T, name string, args map[string]any) *funcs.Outcome {
	t.Helper()
	out, err := funcs.Answer(context.Background(), name, args)
	if err != nil {
		t.Fatalf("%s: %v", name, err)
	}
	return out
}

func drawn(t *testing.T, name string, args map[string]any) *picture {
	t.Helper()
	p, err := drawPicture(context.Background(), answer{Outcome: answered(t, name, args)})
	if err != nil {
		t.Fatalf("%s: %v", name, err)
	}
	if p == nil {
		t.Fatalf("%s: no picture", name)
	}
	return p
}

// wellFormed reads SVG to its end as XML.
func wellFormed(svg string) error {
	d := xml.NewDecoder(strings.NewReader(svg))
	for {
		if _, err := d.Token(); errors.Is(err, io.EOF) {
			return nil
		} else if err != nil {
			return err
		}
	}
}

// check holds what every picture must satisfy.
func (p *picture) check(t *testing.T, what string) {
	t.Helper()
	svg := string(p.svg("p"))
	if err := wellFormed(svg); err != nil {
		t.Errorf("%s: %v", what, err)
	}
	if strings.Contains(svg, "NaN") || strings.Contains(svg, "Inf") || strings.Contains(svg, "922337203685477580") {
		t.Errorf("%s: a place that does not exist:\n%s", what, svg)
	}
	if len(svg) > 24_000 {
		t.Errorf("%s: %d bytes", what, len(svg))
	}
	if alt := p.alt(); len(alt) < 10 || !strings.HasSuffix(alt, ".") || !strings.ContainsAny(alt, "0123456789") {
		t.Errorf("%s: the text in its place reads %q", what, alt)
	}
	for _, c := range p.caption {
		if !strings.HasSuffix(c, ".") {
			t.Errorf("%s: a caption reads %q", what, c)
		}
	}
	if len(p.caption) == 0 {
		t.Errorf("%s: no caption", what)
	}
	if other := string(p.svg("p")); strings.Count(svg, "<svg") != 1 || len(other) == 0 {
		t.Errorf("%s: not one picture", what)
	}
}

func TestEveryFunctionHasAPicture(t *testing.T) {
	for _, f := range funcs.All() {
		p, err := drawPicture(context.Background(), answer{Outcome: outcomeOf(t, f)})
		switch {
		case err != nil:
			t.Errorf("%s: %v", f.Name, err)
		case p == nil:
			t.Errorf("%s: no picture", f.Name)
		default:
			p.check(t, f.Name)
		}
	}
}

// normal gives values with seeded noise.
func normal(n int, mean, sd float64) []float64 {
	rng := rand.New(rand.NewPCG(7, uint64(n)))
	out := make([]float64, n)
	for i := range out {
		out[i] = mean + sd*rng.NormFloat64()
	}
	return out
}

func TestPicturesStandUnusualInputs(t *testing.T) {
	gaps := append(normal(40, 5, 1), math.NaN(), math.NaN())
	many := normal(100_000, 50, 9)
	far := append(normal(150, 0, 1), 1e6)
	ties := make([]float64, 3000)
	for i := range ties {
		ties[i] = float64(i % 4)
	}
	groups := func(n int, values []float64) []funcs.Group {
		var out []funcs.Group
		for i := range n {
			out = append(out, funcs.Group{Name: "group \x01<" + strings.Repeat("long ", i+1) + ">", Values: values})
		}
		return out
	}
	for name, samples := range map[string][][]float64{
		"mean-interval": {gaps, many, far, ties, {1, 2}}, "median-interval": {many, ties}, "bootstrap-interval": {gaps},
		"sample-summary": {gaps, many, {3}, {5, 5}}, "normality-check": {gaps, normal(4000, 0, 1), {1, 2, 4}}, "outlier-check": {far, gaps},
		"independence-check": {gaps, many}, "tail-check": {far, many}, "variance-interval": {many, {1, 2}}, "coverage-check": {gaps},
		"prediction-interval": {far},
	} {
		for _, values := range samples {
			args := map[string]any{"sample": values}
			out := answered(t, name, args)
			if out.Status == funcs.StatusRefused {
				if p, err := drawPicture(context.Background(), answer{Outcome: out}); p != nil || err != nil {
					t.Errorf("%s, refused: %v, %v", name, p, err)
				}
				continue
			}
			drawn(t, name, args).check(t, name)
		}
	}
	for _, name := range []string{"analysis-of-variance", "pooled-variance", "equal-spread-test", "pairwise-differences"} {
		drawn(t, name, map[string]any{"samples": groups(3, gaps)}).check(t, name)
	}
	drawn(t, "mean-interval", map[string]any{"sample": gaps, "direction": "above", "reference": 4.0}).check(t, "above")
	drawn(t, "mean-interval", map[string]any{"mean": 12.0, "sd": 3.0, "n": 9, "direction": "below"}).check(t, "below")
	drawn(t, "proportion-interval", map[string]any{"successes": 0, "n": 100000}).check(t, "no success")
	drawn(t, "proportion-interval", map[string]any{"successes": 999, "n": 1000}).check(t, "nearly all")
	drawn(t, "rate-ratio-interval", map[string]any{"first-count": 4, "second-count": 0}).check(t, "no upper limit")
	drawn(t, "normal-probability", map[string]any{"from": 30.0}).check(t, "far tail")
	drawn(t, "chi-square-probability", map[string]any{"df": 0.5, "to": 1.0}).check(t, "density without bound")
	drawn(t, "normal-transform", map[string]any{"mean": 3.0, "sd": 0.0}).check(t, "no spread")
	drawn(t, "population-coverage", map[string]any{"shape": "cauchy", "resamples": 500}).check(t, "no variance")
	drawn(t, "stratified-interval", map[string]any{"samples": groups(2, gaps), "sizes": funcs.List{Values: []float64{900, 60}}}).check(t, "strata")
}

func TestAnInterruptEndsAPicture(t *testing.T) {
	ctx, cancel := context.WithCancel(context.Background())
	cancel()
	out := answered(t, "mean-test-size", map[string]any{"sd": 3.0, "difference": 1.0})
	if _, err := drawPicture(ctx, answer{Outcome: out}); !errors.Is(err, context.Canceled) {
		t.Errorf("error %v", err)
	}
}

func TestTheCurveOfASizePassesThroughItsAnswer(t *testing.T) {
	found := 0
	for _, f := range funcs.All() {
		if f.Family != "sizes" || ruleFor(f) == nil || hasResult(f.Table, "stratum") {
			continue
		}
		a := answer{Outcome: outcomeOf(t, f)}
		p := a.planOf()
		if p == nil {
			t.Errorf("%s: nothing to plan", f.Name)
			continue
		}
		if p.over != "" {
			continue // its points are answers themselves
		}
		found++
		y, err := p.at(context.Background(), p.chosen)
		if err != nil || !(math.Abs(y/p.attained-1) < 1e-9) {
			t.Errorf("%s: %s = %g attains %g on the curve, %g in the answer (%v)", f.Name, p.x, p.chosen, y, p.attained, err)
		}
		xs, ys, err := p.curve(context.Background())
		if err != nil || len(xs) < 5 || len(xs) != len(ys) || !slices.IsSorted(xs) {
			t.Errorf("%s: the curve has %d points: %v (%v)", f.Name, len(xs), xs, err)
		}
	}
	if found < 25 {
		t.Errorf("only %d sizes have a curve", found)
	}
}

func TestLabelsCarryTheNumbersOfTheAnswer(t *testing.T) {
	for _, c := range []struct {
		name string
		args map[string]any
		want string
	}{
		// t(4 df, 0.975) = 2.776445, so 12.18 ± 2.776445·0.319374/√5
		{"mean-interval", map[string]any{"sample": []float64{12.1, 11.8, 12.6, 12.0, 12.4}}, "mean 12.18, 95% interval 11.78 to 12.58"},
		{"mean-interval", map[string]any{"sample": []float64{12.1, 11.8, 12.6, 12.0, 12.4}, "reference": 12.0}, ">reference 12<"},
		{"proportion-interval", map[string]any{"successes": 4, "n": 20, "kind": "clopper-pearson", "confidence": 0.9}, "proportion 0.20, 90% interval 0.07 to 0.40"},
		{"normal-probability", map[string]any{"from": 0.0, "to": 1.96}, "probability 0.475002 from 0 to 1.96"},
		{"standard-score", map[string]any{"value": -2.0, "mean": 0.0, "sd": 1.0}, "−2 lies 2 sd below the mean"},
		{"mean-precision-size", map[string]any{"sd": 6.5, "half-width": 1.0}, ">n = 165: "},
		{"outlier-check", map[string]any{"sample": []float64{1, 2, 3, 2, 1, 2, 3, 2, 1, 2, 3, 2, 1, 2, 3, 50}}, ">1 outlier<"},
	} {
		if svg := string(drawn(t, c.name, c.args).svg("p")); !strings.Contains(svg, c.want) {
			t.Errorf("%s: %q is not in\n%s", c.name, c.want, svg)
		}
	}
}

// By hand: the only one of 1 value is uniform; the largest of n lies below p
// with probability pⁿ, the smallest above p with (1-p)ⁿ. Normal quantiles from
// JCGM 100:2008, Table G.1.
func TestTheBandOfANormalPlotIsThatOfOrderStatistics(t *testing.T) {
	ctx := context.Background()
	lower, upper, err := orderLimits(ctx, 1, 1)
	if err != nil || math.Abs(lower+1.959964) > 1e-6 || math.Abs(upper-1.959964) > 1e-6 {
		t.Errorf("one value: %g to %g (%v)", lower, upper, err)
	}
	for _, n := range []int{2, 10, 500} {
		lower, upper, err := orderLimits(ctx, n, n)
		if err != nil {
			t.Fatal(err)
		}
		for z, want := range map[float64]float64{lower: 0.025, upper: 0.975} {
			p, err := askNumber(ctx, "normal-probability", "probability", map[string]any{"to": z})
			if err != nil || math.Abs(math.Pow(p, float64(n))-want) > 1e-9 {
				t.Errorf("largest of %d: %g, want %g (%v)", n, math.Pow(p, float64(n)), want, err)
			}
		}
		low, high, err := orderLimits(ctx, n, 1)
		if err != nil || math.Abs(low+upper) > 1e-9 || math.Abs(high+lower) > 1e-9 {
			t.Errorf("smallest of %d: %g to %g mirrors %g to %g (%v)", n, low, high, lower, upper, err)
		}
	}
	z, err := scores(ctx, 3, []int{1, 2, 3}) // Φ⁻¹((1 - 3/8)/3.25) = Φ⁻¹(0.192308) = -0.869424
	if err != nil || math.Abs(z[0]+0.869424) > 1e-6 || z[1] != 0 || math.Abs(z[2]-0.869424) > 1e-6 {
		t.Errorf("scores %v (%v)", z, err)
	}
}

// scaled multiplies every number among arguments that has the sample's unit.
func scaled(f *funcs.Function, by, shift float64) map[string]any {
	args := map[string]any{}
	for _, a := range f.Example.Arguments {
		in, _ := f.Input(a.Name)
		args[a.Name] = a.Value
		if in.Unit != funcs.SameUnit {
			continue
		}
		change := func(list []float64) []float64 {
			out := make([]float64, len(list))
			for i, x := range list {
				out[i] = x*by + shift
			}
			return out
		}
		switch v := a.Value.(type) {
		case float64:
			args[a.Name] = v * by
		case []float64:
			args[a.Name] = change(v)
		case []funcs.Group:
			var groups []funcs.Group
			for _, g := range v {
				groups = append(groups, funcs.Group{Name: g.Name, Values: change(g.Values)})
			}
			args[a.Name] = groups
		case funcs.List:
			args[a.Name] = funcs.List{Names: v.Names, Values: change(v.Values)}
		}
	}
	return args
}

func TestPicturesStandNumbersOfAnySize(t *testing.T) {
	sizes := []float64{1e300, 1e150, 1e12, 1e-12, 1e-150, 1e-300, 1e-310}
	if testing.Short() {
		sizes = []float64{1e300, 1e-310}
	}
	for _, f := range funcs.All() {
		for _, by := range sizes {
			for _, shift := range []float64{0, 1e15} {
				out, err := f.Answer(context.Background(), scaled(f, by, shift))
				if err != nil || out.Status == funcs.StatusRefused {
					continue
				}
				p, err := drawPicture(context.Background(), answer{Outcome: out})
				if err != nil {
					t.Errorf("%s, times %g: %v", f.Name, by, err)
				}
				if p != nil {
					p.check(t, f.Name)
				}
			}
		}
	}
}

// The rule of thumb of 30 is on the curve of the n that these values need.
func TestTheRuleOfThumbIsDrawn(t *testing.T) {
	for _, args := range []map[string]any{{"skewness": 2.0, "excess-kurtosis": 6.0}, {"skewness": 0.2, "excess-kurtosis": 0.0}, {"skewness": 0.0, "excess-kurtosis": 6.0}} {
		p := drawn(t, "enough-n-for-mean", args)
		if svg := string(p.svg("x")); !strings.Contains(p.alt(), "The rule of thumb n = 30 attains 0.9") || strings.Count(svg, ">rule of thumb n = 30<") != 1 {
			t.Errorf("%v: %s", args, p.alt())
		}
	}
}
