package funcs

import (
	"context"
	"errors"
	"math"
	"math/rand/v2"
	"testing"

	"halfwidth/funcs/internal/dist"
)

// simulated is a question about samples of a population that meets the
// function's own assumptions, so that its interval must hold the truth as often
// as its confidence says.
type simulated struct {
	function string
	draw     func(r *rand.Rand) map[string]any
	truth    float64
	lower    string // the results that are the limits; "" for lower and upper
	upper    string
	slack    float64 // of an approximate interval: how far its coverage may lie from the confidence
	atLeast  bool    // the interval is exact but discrete: its coverage is at least the confidence
	few      bool    // a slow function: fewer samples
	// holds tells whether the interval holds what it is for, where that is no
	// fixed truth; nil compares the limits with truth.
	holds func(out *Outcome, l limits, r *rand.Rand) bool
}

// holds tells whether limits, of which one may be absent, hold x.
func (l limits) holds(x float64) bool {
	return (!l.hasLower || l.lower <= x) && (!l.hasUpper || x <= l.upper)
}

// allRowsHold tells whether every row of a table holds its true difference, by
// the names of the groups.
func allRowsHold(first, second string, means map[string]float64) func(*Outcome, limits, *rand.Rand) bool {
	return func(out *Outcome, _ limits, _ *rand.Rand) bool {
		for _, row := range out.Rows {
			truth := means[row.Values[first].(string)] - means[second]
			if name, ok := row.Values["second"].(string); ok {
				truth = means[row.Values[first].(string)] - means[name]
			}
			var l limits
			l.lower, l.hasLower = row.Values["lower"].(float64)
			l.upper, l.hasUpper = row.Values["upper"].(float64)
			if !l.holds(truth) {
				return false
			}
		}
		return len(out.Rows) > 0
	}
}

// normals draws n normal values.
func normals(r *rand.Rand, n int, mean, sd float64) []float64 {
	x := make([]float64, n)
	for i := range x {
		x[i] = mean + sd*r.NormFloat64()
	}
	return x
}

func binomial(r *rand.Rand, n int, p float64) int {
	x := 0
	for range n {
		if r.Float64() < p {
			x++
		}
	}
	return x
}

func poisson(r *rand.Rand, mean float64) int {
	x := 0
	for t := r.ExpFloat64(); t < mean; t += r.ExpFloat64() {
		x++
	}
	return x
}

func exponentials(v []float64) []float64 {
	for i := range v {
		v[i] = math.Exp(v[i])
	}
	return v
}

var simulations = []simulated{
	{function: "mean-interval", truth: 30, draw: func(r *rand.Rand) map[string]any { return map[string]any{"sample": normals(r, 6, 30, 5)} }},
	{function: "mean-interval", truth: 30, draw: func(r *rand.Rand) map[string]any {
		return map[string]any{"sample": normals(r, 6, 30, 5), "known-sd": 5.0}
	}},
	{function: "paired-interval", truth: -2, draw: func(r *rand.Rand) map[string]any {
		a := normals(r, 7, 30, 5)
		b := normals(r, 7, 2, 3)
		for i := range b {
			b[i] += a[i]
		}
		return map[string]any{"sample": a, "second-sample": b}
	}},
	{function: "geometric-mean-interval", truth: math.Exp(2), draw: func(r *rand.Rand) map[string]any {
		return map[string]any{"sample": exponentials(normals(r, 6, 2, 0.7))}
	}},
	{function: "lognormal-mean-interval", truth: math.Exp(2 + 0.125), slack: 0.015, draw: func(r *rand.Rand) map[string]any {
		return map[string]any{"sample": exponentials(normals(r, 40, 2, 0.5))}
	}},
	{function: "median-interval", truth: 30, atLeast: true, draw: func(r *rand.Rand) map[string]any { return map[string]any{"sample": normals(r, 11, 30, 5)} }},
	{function: "trimmed-mean-interval", truth: 30, slack: 0.015, draw: func(r *rand.Rand) map[string]any { return map[string]any{"sample": normals(r, 20, 30, 5)} }},
	{function: "stratified-interval", truth: 32, slack: 0.015, draw: func(r *rand.Rand) map[string]any {
		return map[string]any{"sizes": []float64{600000, 400000}, "samples": []Group{{"North", normals(r, 15, 30, 5)}, {"Quay", normals(r, 12, 35, 7)}}}
	}},
	{function: "ratio-of-sums-interval", truth: 3, slack: 0.02, draw: func(r *rand.Rand) map[string]any {
		x := normals(r, 40, 20, 4)
		y := normals(r, 40, 0, 5)
		for i := range y {
			y[i] += 3 * x[i]
		}
		return map[string]any{"sample": y, "second-sample": x}
	}},
	{function: "pooled-variance", truth: 25, lower: "variance-lower", upper: "variance-upper", draw: func(r *rand.Rand) map[string]any {
		return map[string]any{"samples": []Group{{"a", normals(r, 4, 1, 5)}, {"b", normals(r, 6, 9, 5)}, {"c", normals(r, 3, 2, 5)}}}
	}},
	{function: "variance-interval", truth: 5, lower: "sd-lower", upper: "sd-upper", draw: func(r *rand.Rand) map[string]any {
		return map[string]any{"sample": normals(r, 8, 30, 5)}
	}},
	{function: "variance-ratio-interval", truth: 4, draw: func(r *rand.Rand) map[string]any {
		return map[string]any{"sample": normals(r, 8, 30, 6), "second-sample": normals(r, 6, 10, 3)}
	}},
	{function: "difference-interval", truth: 4, draw: func(r *rand.Rand) map[string]any {
		return map[string]any{"sample": normals(r, 6, 34, 5), "second-sample": normals(r, 9, 30, 5), "variances": pooled}
	}},
	{function: "difference-interval", truth: 4, slack: 0.01, draw: func(r *rand.Rand) map[string]any {
		return map[string]any{"sample": normals(r, 8, 34, 9), "second-sample": normals(r, 12, 30, 3)}
	}},
	{function: "ratio-interval", truth: 1.25, draw: func(r *rand.Rand) map[string]any {
		return map[string]any{"sample": normals(r, 8, 50, 5), "second-sample": normals(r, 8, 40, 5), "variances": pooled}
	}},
	{function: "shift-interval", truth: 4, atLeast: true, draw: func(r *rand.Rand) map[string]any {
		return map[string]any{"sample": normals(r, 7, 34, 5), "second-sample": normals(r, 8, 30, 5)}
	}},
	{function: "proportion-interval", truth: 0.2, atLeast: true, draw: func(r *rand.Rand) map[string]any {
		return map[string]any{"successes": binomial(r, 30, 0.2), "n": 30, "kind": exactShare}
	}},
	{function: "proportion-interval", truth: 0.3, slack: 0.02, draw: func(r *rand.Rand) map[string]any {
		return map[string]any{"successes": binomial(r, 60, 0.3), "n": 60}
	}},
	{function: "proportion-difference-interval", truth: 0.2, slack: 0.02, draw: func(r *rand.Rand) map[string]any {
		return map[string]any{"first-successes": binomial(r, 60, 0.5), "first-n": 60, "second-successes": binomial(r, 50, 0.3), "second-n": 50}
	}},
	{function: "prediction-interval", draw: func(r *rand.Rand) map[string]any {
		return map[string]any{"sample": normals(r, 7, 30, 5), "future": 3}
	}, holds: func(_ *Outcome, l limits, r *rand.Rand) bool {
		for _, x := range normals(r, 3, 30, 5) {
			if !l.holds(x) {
				return false
			}
		}
		return true
	}},
	{function: "tolerance-interval", few: true, draw: func(r *rand.Rand) map[string]any {
		return map[string]any{"sample": normals(r, 9, 0, 1), "content": 0.8}
	}, holds: func(_ *Outcome, l limits, _ *rand.Rand) bool {
		law, content := dist.Normal{}, 1.0
		if l.hasLower {
			content -= law.CDF(l.lower)
		}
		if l.hasUpper {
			content -= law.SF(l.upper)
		}
		return content >= 0.8
	}},
	{function: "bootstrap-interval", truth: 30, slack: 0.05, few: true, draw: func(r *rand.Rand) map[string]any {
		return map[string]any{"sample": normals(r, 25, 30, 5), "resamples": 999}
	}},
	{function: "pairwise-differences", few: true, draw: func(r *rand.Rand) map[string]any {
		return map[string]any{"samples": []Group{{"a", normals(r, 5, 1, 5)}, {"b", normals(r, 5, 9, 5)}, {"c", normals(r, 5, 2, 5)}}}
	}, holds: allRowsHold("first", "", map[string]float64{"a": 1, "b": 9, "c": 2})},
	{function: "differences-from-control", few: true, draw: func(r *rand.Rand) map[string]any {
		return map[string]any{"samples": []Group{{"a", normals(r, 5, 1, 5)}, {"b", normals(r, 8, 9, 5)}, {"c", normals(r, 6, 2, 5)}}, "control": "b"}
	}, holds: allRowsHold("group", "b", map[string]float64{"a": 1, "b": 9, "c": 2})},
	{function: "rate-interval", truth: 7, atLeast: true, draw: func(r *rand.Rand) map[string]any { return map[string]any{"count": poisson(r, 7)} }},
	{function: "rate-ratio-interval", truth: 2, atLeast: true, draw: func(r *rand.Rand) map[string]any {
		return map[string]any{"first-count": poisson(r, 12), "second-count": poisson(r, 6)}
	}},
}

// One-sided limits are tried too: each leaves the whole of 1 - confidence on its
// side.
func TestEveryIntervalCoversAsItSays(t *testing.T) {
	samples := 3000
	if testing.Short() {
		samples = 400
	}
	for k, s := range simulations {
		for _, dir := range []string{either, above, below} {
			f, err := Lookup(s.function)
			if err != nil {
				t.Fatal(err)
			}
			if _, ok := f.Input("direction"); !ok && dir != either {
				continue
			}
			r := rand.New(rand.NewPCG(uint64(k), 7))
			const wanted = 0.9
			hits, tried, wantedSamples := 0, 0, samples
			if s.few {
				wantedSamples = samples / 10
			}
			for range wantedSamples {
				arguments := s.draw(r)
				arguments["confidence"] = wanted
				if _, ok := f.Input("checks"); ok {
					arguments["checks"] = false
				}
				if _, ok := f.Input("direction"); ok {
					arguments["direction"] = dir
				}
				out, err := f.Answer(context.Background(), arguments)
				if err != nil {
					t.Fatalf("%s: %v", s.function, err)
				}
				if out.Status == StatusRefused {
					continue
				}
				tried++
				low, high := s.lower, s.upper
				if low == "" {
					low, high = "lower", "upper"
				}
				var l limits
				if v, ok := out.Get(low); ok {
					l.lower, l.hasLower = v.(float64), true
				}
				if v, ok := out.Get(high); ok {
					l.upper, l.hasUpper = v.(float64), true
				}
				if s.holds == nil && l.holds(s.truth) || s.holds != nil && s.holds(out, l, r) {
					hits++
				}
			}
			coverage := float64(hits) / float64(tried)
			allowed := 4*math.Sqrt(wanted*(1-wanted)/float64(tried)) + s.slack
			short, long := coverage < wanted-allowed, coverage > wanted+allowed && !s.atLeast
			if short || long || tried < wantedSamples*9/10 {
				t.Errorf("%s, direction %s: the interval held the truth in %.4f of %d samples, want %.2f ± %.4f", s.function, dir, coverage, tried, wanted, allowed)
			}
		}
	}
}

// FuzzAnswer calls functions with arguments put together at random from edges,
// examples and noise: no call may panic, and no result may be NaN or infinite.
func FuzzAnswer(f *testing.F) {
	for i := range All() {
		f.Add(uint16(i), uint64(i))
	}
	f.Fuzz(func(t *testing.T, which uint16, seed uint64) {
		all := All()
		function := all[int(which)%len(all)]
		r := rand.New(rand.NewPCG(seed, 1))
		arguments := function.Example.arguments()
		for _, in := range function.Inputs {
			edges := append(inside(in), outside(in)...)
			switch r.IntN(6) {
			case 0:
				if len(edges) > 0 {
					arguments[in.Name] = edges[r.IntN(len(edges))]
				}
			case 1:
				delete(arguments, in.Name)
			case 2:
				switch in.Kind {
				case Number, Level:
					arguments[in.Name] = math.Exp(6 * r.NormFloat64())
				case Sample:
					arguments[in.Name] = normals(r, r.IntN(30), math.Exp(9*r.NormFloat64()), math.Exp(9*r.NormFloat64()))
				}
			}
		}
		ctx, cancel := context.WithTimeout(context.Background(), slow)
		defer cancel()
		out, err := function.Answer(ctx, arguments)
		if err == nil {
			checkOutcome(t, function.Name, out)
		} else if errors.Is(err, ErrInternal) {
			t.Errorf("%s %v: %v", function.Name, arguments, err)
		}
	})
}
