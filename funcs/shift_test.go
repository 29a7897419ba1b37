package funcs

import (
	"fmt"
	"math"
	"math/rand/v2"
	"testing"
)

// All rank orders counted in whole numbers: P(U <= k-1) and the tied law.
func TestShiftOfAssemblyTimes(t *testing.T) {
	old, fresh := assembly(t)
	for _, c := range []struct {
		direction          string
		lower, upper       float64
		attained, p        float64
		hasLower, hasUpper bool
	}{
		{either, 0, 8, 80079.0 / 83980, 2399.0 / 41990, true, true},
		{above, 1, 0, 0.95241128840200047630, 0.02856632531555132, true, false},
		{below, 0, 7, 0.95241128840200047630, 0.973791378899738, false, true},
	} {
		out := answer(t, "shift-interval", map[string]any{"sample": old, "second-sample": fresh, "direction": c.direction})
		within(t, "shift", resultOf(t, out, "shift"), 4, 0)
		within(t, "u", resultOf(t, out, "u"), 74.5, 0)
		within(t, c.direction+" attained", resultOf(t, out, "attained-confidence"), c.attained, 1e-13)
		within(t, c.direction+" p", resultOf(t, out, "p-value"), c.p, 1e-13)
		if c.hasLower {
			within(t, c.direction+" lower", resultOf(t, out, "lower"), c.lower, 0)
		} else {
			absent(t, out, "lower")
		}
		if c.hasUpper {
			within(t, c.direction+" upper", resultOf(t, out, "upper"), c.upper, 0)
		} else {
			absent(t, out, "upper")
		}
	}
}

func TestTheShiftMirrorsWhenTheSamplesAreSwapped(t *testing.T) {
	rng := rand.New(rand.NewPCG(4, 1))
	for _, n := range [][2]int{{5, 9}, {30, 20}, {120, 90}} {
		x, y := noise(rng, n[0], 3, 2), noise(rng, n[1], 2, 1)
		for d, mirrored := range map[string]string{either: either, above: below, below: above} {
			a := answer(t, "shift-interval", map[string]any{"sample": x, "second-sample": y, "direction": d, "reference": 0.5})
			b := answer(t, "shift-interval", map[string]any{"sample": y, "second-sample": x, "direction": mirrored, "reference": -0.5})
			for name, other := range map[string]string{"shift": "shift", "lower": "upper", "upper": "lower"} {
				v, ok := a.Get(name)
				w, okToo := b.Get(other)
				if ok != okToo || ok && v.(float64) != -w.(float64) {
					t.Errorf("n %v, %s: %s is %v, mirrored %v", n, d, name, v, w)
				}
			}
			within(t, "u", resultOf(t, a, "u"), float64(n[0]*n[1])-resultOf(t, b, "u"), 0)
			within(t, "p", resultOf(t, a, "p-value"), resultOf(t, b, "p-value"), 1e-12)
			within(t, "attained", resultOf(t, a, "attained-confidence"), resultOf(t, b, "attained-confidence"), 1e-12)
		}
	}
}

// Inside the limits the test does not reject at the attained level, just
// outside it does.
func TestShiftIntervalAndTestAgree(t *testing.T) {
	rng := rand.New(rand.NewPCG(4, 2))
	for _, n := range [][2]int{{6, 7}, {15, 25}, {110, 100}} {
		x, y := noise(rng, n[0], 3, 2), noise(rng, n[1], 2, 1)
		for _, d := range []string{either, above, below} {
			arguments := map[string]any{"sample": x, "second-sample": y, "direction": d}
			out := answer(t, "shift-interval", arguments)
			level := 1 - resultOf(t, out, "attained-confidence")
			if level > 0.05 {
				t.Errorf("n %v: attained %v", n, 1-level)
			}
			for limit, outward := range map[string]float64{"lower": -1, "upper": 1} {
				v, ok := out.Get(limit)
				if !ok {
					continue
				}
				arguments["reference"] = v.(float64) + outward*1e-9
				if p := resultOf(t, answer(t, "shift-interval", arguments), "p-value"); !(p <= level*(1+1e-9)) {
					t.Errorf("n %v, %s: just outside %s p is %v, level %v", n, d, limit, p, level)
				}
				arguments["reference"] = v.(float64) - outward*1e-9
				if p := resultOf(t, answer(t, "shift-interval", arguments), "p-value"); !(p > 0.05) {
					t.Errorf("n %v, %s: just inside %s p is %v", n, d, limit, p)
				}
			}
			delete(arguments, "reference")
		}
	}
}

func TestTheShiftMovesWithTheSamples(t *testing.T) {
	x, y := []float64{2.25, 3.5, 3.75, 6, 4.5, 9}, []float64{1, 2.5, 1.75, 2, 5.5}
	far := make([]float64, len(x))
	for i := range x {
		far[i] = 1024 + x[i] // exact in binary
	}
	a := answer(t, "shift-interval", map[string]any{"sample": x, "second-sample": y})
	b := answer(t, "shift-interval", map[string]any{"sample": far, "second-sample": y, "reference": 1024.0})
	for _, name := range []string{"shift", "lower", "upper"} {
		within(t, name, resultOf(t, b, name), 1024+resultOf(t, a, name), 0)
	}
	for _, name := range []string{"u", "p-value", "attained-confidence"} {
		within(t, name, resultOf(t, b, name), resultOf(t, a, name), 0)
	}
	// Gaps count for nothing.
	x = append([]float64{math.NaN()}, x...)
	sameResults(t, a, answer(t, "shift-interval", map[string]any{"sample": x, "second-sample": y}))
}

// Past 10,000 pairs the normal law takes over; at 100 and 100 values both can be had.
func TestTheNormalLawOfRanksIsNearTheExactOne(t *testing.T) {
	ranks := make([]float64, 200)
	for i := range ranks {
		ranks[i] = float64(i + 1)
	}
	exact := lawOfRanks(ranks, nil, 100)
	normal := lawOfRanks(append(ranks, 201), nil, 100)
	for _, u := range []float64{4000, 4200, 4600, 5000, 5400} {
		// One value more in the second sample moves u by about half of 100.
		within(t, fmt.Sprintf("P(U <= %v)", u), normal.atMost(u*1.01), exact.atMost(u), 0.06)
		within(t, fmt.Sprintf("P(U >= %v)", u), normal.atLeast(u*1.01), exact.atLeast(u), 0.06)
	}
}

// Ties shrink the variance of u: 60 zeros and 60 ones in each sample leave
// n₁n₂/12·(N+1 - Σ(t³-t)/(N(N-1))) with two ties of N/2.
func TestTheNormalLawOfRanksIsCorrectedForTies(t *testing.T) {
	var x, y []float64
	for i := range 120 {
		x = append(x, float64(i%2))
		if i < 100 {
			y = append(y, float64(i%2))
		}
	}
	y[1] = 0 // u is 50 above its centre
	out := answer(t, "shift-interval", map[string]any{"sample": x, "second-sample": y})
	n, zeros, ones := 220.0, 111.0, 109.0
	variance := 12000.0 / 12 * (n + 1 - (zeros*zeros*zeros-zeros+ones*ones*ones-ones)/(n*(n-1)))
	z := (resultOf(t, out, "u") - 6000 - 0.5) / math.Sqrt(variance)
	within(t, "u", resultOf(t, out, "u"), 6060, 0)
	within(t, "p-value", resultOf(t, out, "p-value"), math.Erfc(z/math.Sqrt2), 1e-12)
}

func TestLargeSamplesShiftQuickly(t *testing.T) {
	x, y := make([]float64, 50_000), make([]float64, 40_000)
	for i := range x {
		x[i] = float64(i*7919%50_000) + 1000
	}
	for i := range y {
		y[i] = float64(i*7919%40_000) + 5000
	}
	out := answer(t, "shift-interval", map[string]any{"sample": x, "second-sample": y, "checks": false})
	// x is uniform on 1000…50999, y on 5000…44999: both centres at 24999.5 + 1000.
	within(t, "shift", resultOf(t, out, "shift"), 1000, 0)
	if lower, upper := resultOf(t, out, "lower"), resultOf(t, out, "upper"); !(lower < 1000 && 1000 < upper) {
		t.Errorf("limits %v and %v", lower, upper)
	}
}

func TestShiftRefusals(t *testing.T) {
	out := answer(t, "shift-interval", map[string]any{"sample": []float64{1, 2}, "second-sample": []float64{3, 5, 4}})
	refusedFor(t, out, "few-values")
	if want := "With 2 and 3 values no limits by ranks reach the confidence 95%; at most 80% is attainable. Measure more, or ask for less."; Note(out.Findings) != want {
		t.Errorf("got  %s\nwant %s", Note(out.Findings), want)
	}
	out = answer(t, "shift-interval", map[string]any{"sample": []float64{1, 2}, "second-sample": []float64{3, 5, 4}, "confidence": 0.8})
	within(t, "attained", resultOf(t, out, "attained-confidence"), 0.8, 1e-15)
	within(t, "lower", resultOf(t, out, "lower"), -4, 0)
	refusedFor(t, answer(t, "shift-interval", map[string]any{"sample": []float64{1, 1, 1, 1}, "second-sample": []float64{3, 3, 3, 3}}), "no-spread")
}

func TestShiftSentence(t *testing.T) {
	out := answer(t, "shift-interval", shiftInterval.Example.arguments())
	got, _ := out.Get("sentence")
	if want := "The shift (first - second) is 4.0, 95% interval 0.0 to 8.0 (half-width 4.0, either direction, n = 11 and 9; Hodges-Lehmann estimate with limits " +
		"from the exact law of the rank sum, attained confidence 95.35%). Against the reference 0: u = 74.5, two-sided p = 0.0571."; got != want {
		t.Errorf("got  %s\nwant %s", got, want)
	}
}
