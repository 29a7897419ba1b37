package funcs

import (
	"fmt"
	"math"
	"testing"

	"halfwidth/funcs/internal/dist"
)

// mirroredShare fails where b is not the mirror image of a in 1 - p.
func mirroredShare(t *testing.T, a, b *Outcome) {
	t.Helper()
	for name, other := range map[string]string{"proportion": "proportion", "lower": "upper", "upper": "lower"} {
		v, ok := a.Get(name)
		w, okToo := b.Get(other)
		if ok != okToo || ok && math.Abs(v.(float64)-(1-w.(float64))) > 1e-14 {
			t.Errorf("%s is %v, of the complement %v", name, v, w)
		}
	}
}

func TestShareLimitsSwapUnderComplement(t *testing.T) {
	for _, kind := range []string{wilson, exactShare} {
		for _, population := range []any{nil, 40} {
			for _, d := range everyDirection {
				turned := map[string]string{either: either, above: below, below: above}[d]
				for _, x := range []int{0, 1, 5, 17, 19, 20} {
					a := map[string]any{"successes": x, "n": 20, "kind": kind, "direction": d, "population-size": population, "reference": 0.375}
					b := altered(a, "successes", 20-x, "direction", turned, "reference", 0.625)
					outA, outB := answer(t, "proportion-interval", a), answer(t, "proportion-interval", b)
					limitsExist(t, outA, d)
					mirroredShare(t, outA, outB)
					within(t, fmt.Sprint(kind, d, x, " p"), resultOf(t, outA, "p-value"), resultOf(t, outB, "p-value"), 1e-12)
				}
			}
		}
	}
}

func TestShareAtTheEnds(t *testing.T) {
	for _, kind := range []string{wilson, exactShare} {
		none := answer(t, "proportion-interval", map[string]any{"successes": 0, "n": 7, "kind": kind})
		within(t, "lower at none", resultOf(t, none, "lower"), 0, 0)
		all := answer(t, "proportion-interval", map[string]any{"successes": 7, "n": 7, "kind": kind})
		within(t, "upper at all", resultOf(t, all, "upper"), 1, 0)
	}
	// Clopper-Pearson at none is 1 - α^(1/n), α = 0.025; Wilson z²/(n + z²).
	exact := answer(t, "proportion-interval", map[string]any{"successes": 0, "n": 7, "kind": exactShare})
	within(t, "exact upper", resultOf(t, exact, "upper"), 1-math.Pow(0.025, 1.0/7), 1e-13)
	z2 := 1.959963984540054 * 1.959963984540054
	score := answer(t, "proportion-interval", map[string]any{"successes": 0, "n": 7})
	within(t, "wilson upper", resultOf(t, score, "upper"), z2/(7+z2), 1e-14)
	huge := answer(t, "proportion-interval", map[string]any{"successes": largestCount / 2, "n": largestCount})
	within(t, "huge n", resultOf(t, huge, "upper")-0.5, 1.959963984540054/2/math.Sqrt(1<<53), 1e-6)
}

// The score test and the exact one give p = 1 - confidence at their limits.
func TestShareIntervalAndTestAgree(t *testing.T) {
	for _, kind := range []string{wilson, exactShare} {
		for _, d := range everyDirection {
			for _, x := range []int{1, 4, 13} {
				arguments := map[string]any{"successes": x, "n": 14, "kind": kind, "direction": d, "confidence": 0.9}
				out := answer(t, "proportion-interval", arguments)
				for _, limit := range []string{"lower", "upper"} {
					if v, ok := out.Get(limit); ok {
						at := answer(t, "proportion-interval", altered(arguments, "reference", v))
						within(t, fmt.Sprint(kind, d, x, limit), resultOf(t, at, "p-value"), 0.1, 1e-11)
					}
				}
				if d != either {
					two := answer(t, "proportion-interval", altered(arguments, "direction", either, "confidence", 0.8))
					for _, limit := range []string{"lower", "upper"} {
						if v, ok := out.Get(limit); ok {
							within(t, "one-sided "+limit, v.(float64), resultOf(t, two, limit), 1e-13)
						}
					}
				}
			}
		}
	}
}

// hypergeometricTails are P(X <= x) and P(X >= x) from whole-number counts.
func hypergeometricTails(population, marked, draws, x int) (atMost, atLeast float64) {
	choose := func(n, k int) float64 {
		if k < 0 || k > n {
			return 0
		}
		c := 1.0
		for i := range k {
			c = c * float64(n-i) / float64(i+1)
		}
		return c
	}
	for k := 0; k <= draws; k++ {
		p := choose(marked, k) * choose(population-marked, draws-k) / choose(population, draws)
		if k <= x {
			atMost += p
		}
		if k >= x {
			atLeast += p
		}
	}
	return atMost, atLeast
}

func TestFinitePopulationLimitsAreTheMarkedNotRejected(t *testing.T) {
	const size = 30
	for n := 1; n <= size; n += 4 {
		for x := 0; x <= n; x++ {
			for _, d := range everyDirection {
				q := tail(0.9, d) * (1 + 1e-12) // a tie is a rejection, whatever its last bit
				first, last := -1, -1
				for marked := 0; marked <= size; marked++ {
					atMost, atLeast := hypergeometricTails(size, marked, n, x)
					if first < 0 && atLeast > q {
						first = marked
					}
					if atMost > q {
						last = marked
					}
				}
				out := answer(t, "proportion-interval", map[string]any{"successes": x, "n": n, "kind": exactShare, "population-size": size, "confidence": 0.9, "direction": d})
				if d != below {
					within(t, fmt.Sprint(n, x, d, " fewest"), resultOf(t, out, "total-lower"), float64(first), 0)
					within(t, "lower", resultOf(t, out, "lower"), float64(first)/size, 0)
				}
				if d != above {
					within(t, fmt.Sprint(n, x, d, " most"), resultOf(t, out, "total-upper"), float64(last), 0)
				}
			}
			atMost, atLeast := hypergeometricTails(size, 12, n, x)
			if n < size {
				out := answer(t, "proportion-interval", map[string]any{"successes": x, "n": n, "kind": exactShare, "population-size": size, "reference": 0.4})
				within(t, "p", resultOf(t, out, "p-value"), math.Min(1, 2*math.Min(atMost, atLeast)), 1e-12)
			}
		}
	}
}

func TestShareOfAWholePopulation(t *testing.T) {
	for _, kind := range []string{wilson, exactShare} {
		out := answer(t, "proportion-interval", map[string]any{"successes": 3, "n": 12, "population-size": 12, "kind": kind, "reference": 0.5})
		for _, limit := range []string{"proportion", "lower", "upper"} {
			within(t, kind+limit, resultOf(t, out, limit), 0.25, 0)
		}
		within(t, "total", resultOf(t, out, "total-upper"), 3, 0)
		absent(t, out, "p-value")
	}
	refuses(t, "proportion-interval", map[string]any{"successes": 3, "n": 12, "population-size": 11},
		"population-size is 11, but is smaller than the sample (n = 12); give the number in the whole population")
	refuses(t, "proportion-interval", map[string]any{"successes": 13, "n": 12}, "successes is 13, but must be at most n (12); give how many of the 12 have the property")
	refuses(t, "proportion-interval", map[string]any{"successes": 3.5, "n": 12}, "successes is 3.5, but must be a whole number, 0 or more")
	refuses(t, "proportion-interval", map[string]any{"successes": 3, "n": 12, "reference": 1.0}, "reference is 1, but must be strictly between 0 and 1")
	out := answer(t, "proportion-interval", map[string]any{"successes": 3, "n": 12, "population-size": 30, "kind": exactShare, "reference": 0.33})
	if !raises(out, "reference-between-counts") || out.Status != StatusOK {
		t.Errorf("%s %v", out.Status, out.Findings)
	}
	checkDeclared(t, out.Function, out)
	absent(t, out, "p-value")
	// A finite population narrows the score interval as sampling without replacement does.
	wide := answer(t, "proportion-interval", map[string]any{"successes": 40, "n": 100})
	narrow := answer(t, "proportion-interval", map[string]any{"successes": 40, "n": 100, "population-size": 133}) // 100·132/33 = 400
	within(t, "of 133", resultOf(t, narrow, "upper"), resultOf(t, answer(t, "proportion-interval", map[string]any{"successes": 160, "n": 400}), "upper"), 1e-14)
	if !(resultOf(t, narrow, "upper") < resultOf(t, wide, "upper")) {
		t.Error("not narrower")
	}
}

// Below one half a single limit lies on the other side of the estimate, as the
// exact one does.
func TestLimitsOfLittleConfidence(t *testing.T) {
	for _, x := range []int{0, 4, 20} {
		out := answer(t, "proportion-interval", map[string]any{"successes": x, "n": 20, "confidence": 0.2, "direction": above})
		turned := answer(t, "proportion-interval", map[string]any{"successes": x, "n": 20, "confidence": 0.8, "direction": below})
		within(t, "wilson", resultOf(t, out, "lower"), resultOf(t, turned, "upper"), 1e-13)
		half := answer(t, "proportion-interval", map[string]any{"successes": x, "n": 20, "confidence": 0.5, "direction": above})
		within(t, "at z = 0", resultOf(t, half, "lower"), float64(x)/20, 1e-15)
	}
	counts := map[string]any{"first-successes": 9, "first-n": 12, "second-successes": 2, "second-n": 15}
	a := answer(t, "proportion-difference-interval", altered(counts, "confidence", 0.2, "direction", above))
	b := answer(t, "proportion-difference-interval", altered(counts, "confidence", 0.8, "direction", below))
	within(t, "newcombe", resultOf(t, a, "lower"), resultOf(t, b, "upper"), 1e-13)
}

func TestShareDifferencesMirrorWhenSwapped(t *testing.T) {
	for _, c := range [][4]int{{9, 12, 2, 15}, {0, 12, 0, 15}, {12, 12, 0, 15}, {12, 12, 15, 15}, {1, 1, 0, 1}} {
		for _, d := range everyDirection {
			turned := map[string]string{either: either, above: below, below: above}[d]
			a := answer(t, "proportion-difference-interval", map[string]any{"first-successes": c[0], "first-n": c[1], "second-successes": c[2], "second-n": c[3], "direction": d})
			b := answer(t, "proportion-difference-interval", map[string]any{"first-successes": c[2], "first-n": c[3], "second-successes": c[0], "second-n": c[1], "direction": turned})
			limitsExist(t, a, d)
			mirrored(t, a, b, "difference", 1e-14)
			within(t, "p", resultOf(t, a, "p-value"), resultOf(t, b, "p-value"), 1e-14)
			if c[0] == 0 && c[2] == 0 || c[0] == c[1] && c[2] == c[3] {
				within(t, "p of nothing to tell apart", resultOf(t, a, "p-value"), 1, 0)
			}
		}
	}
	refuses(t, "proportion-difference-interval", map[string]any{"first-successes": 1, "first-n": 2, "second-successes": 9, "second-n": 8},
		"second-successes is 9, but must be at most second-n (8); give how many of the 8 have the property")
}

// The pooled score z squared is Pearson's chi-square of the 2 by 2 table.
func TestShareDifferenceAndComparisonAgree(t *testing.T) {
	a := answer(t, "proportion-difference-interval", map[string]any{"first-successes": 9, "first-n": 12, "second-successes": 2, "second-n": 15})
	b := answer(t, "proportions-comparison", map[string]any{"successes": []float64{9, 2}, "ns": []float64{12, 15}})
	within(t, "p", resultOf(t, a, "p-value"), resultOf(t, b, "p-value"), 1e-13)
	within(t, "chi-square", resultOf(t, b, "chi-square"), math.Pow(pooledScoreZ(9, 12, 2, 15), 2), 1e-13)
	for _, r := range []string{"difference", "lower", "upper"} {
		within(t, r, b.Rows[0].Values[r].(float64), resultOf(t, a, r), 0)
	}
}

// Newcombe's limits and the score test part ways near the edge; every case of
// two small groups is tried.
func TestIntervalAndTestOfSharesDisagreeOpenly(t *testing.T) {
	disagree := 0
	for n1 := 2; n1 <= 9; n1++ {
		for x1 := 0; x1 <= n1; x1++ {
			for x2 := 0; x2 <= 8; x2++ {
				out := answer(t, "proportion-difference-interval", map[string]any{"first-successes": x1, "first-n": n1, "second-successes": x2, "second-n": 8})
				holds := resultOf(t, out, "lower") <= 0 && resultOf(t, out, "upper") >= 0
				rejects := resultOf(t, out, "p-value") < 1-0.95
				if raises(out, "interval-and-test-disagree") != (holds == rejects) {
					t.Errorf("%d of %d, %d of 8: %v", x1, n1, x2, out.Findings)
				}
				if holds == rejects {
					disagree++
					checkDeclared(t, out.Function, out)
				}
			}
		}
	}
	if disagree == 0 {
		t.Error("no case was found in which they disagree")
	}
}

func TestSeveralSharesAdjustByHolm(t *testing.T) {
	out := answer(t, "proportions-comparison", proportionsComparison.Example.arguments())
	// Pooled z of the pairs, adjusted by Holm 1979: times 3, 2 and 1, running maximum.
	p := func(a, b float64) float64 {
		return math.Erfc(math.Abs(a-b) / 100 / math.Sqrt((a+b)/200*(1-(a+b)/200)/50) / math.Sqrt2)
	}
	for i, want := range []float64{p(12, 8), 2 * p(12, 25), 3 * p(8, 25)} {
		within(t, "adjusted", out.Rows[i].Values["adjusted-p-value"].(float64), want, 1e-12)
	}
	within(t, "p", resultOf(t, out, "p-value"), math.Exp(-resultOf(t, out, "chi-square")/2), 1e-13) // chi-square of 2 degrees of freedom
	if names := fmt.Sprint(out.Rows[0].Values["first"], out.Rows[1].Values["second"], out.Rows[2].Values["first"]); names != "NorthMillQuay" {
		t.Error(names)
	}
	want := "Over 3 groups (n = 300 in all) the shares give chi-square = 12.39 with 2 degrees of freedom, p = 0.00204; " +
		"the 3 pairs have 95% intervals (method 10 of Newcombe), each alone, and p-values adjusted by Holm's method."
	if got, _ := out.Get("sentence"); got != want {
		t.Errorf("got  %s\nwant %s", got, want)
	}
}

func TestSeveralSharesRefusals(t *testing.T) {
	for _, c := range []struct {
		code  string
		x, ns []float64
	}{{"few-groups", []float64{3}, []float64{9}}, {"no-spread", []float64{0, 0}, []float64{9, 8}}, {"no-spread", []float64{9, 8}, []float64{9, 8}}} {
		out := answer(t, "proportions-comparison", map[string]any{"successes": c.x, "ns": c.ns})
		refusedFor(t, out, c.code)
		checkDeclared(t, out.Function, out)
	}
	few := answer(t, "proportions-comparison", map[string]any{"successes": []float64{3, 1}, "ns": []float64{9, 9}})
	if !raises(few, "few-expected") {
		t.Error("expected counts of 2 without a caution")
	}
	refuses(t, "proportions-comparison", map[string]any{"successes": List{Names: []string{"North", "Quay"}, Values: []float64{3, 10}}, "ns": List{Names: []string{"Quay", "North"}, Values: []float64{9, 9}}},
		"successes is 10, but must be at most the number of Quay (9); give how many of the group have the property")
	refuses(t, "proportions-comparison", map[string]any{"successes": []float64{3, 1}, "ns": []float64{9}},
		"ns is 1 number, but must have one for each of the 2 groups of successes; give one a group, in the same order or by name")
}

// Exact coverage of the limits over all outcomes: Clopper-Pearson never below
// its confidence, Wilson near it on average.
func TestShareLimitsCover(t *testing.T) {
	const n = 15
	average, least := map[string]float64{}, map[string]float64{exactShare: 1, wilson: 1}
	const grid = 99
	for _, kind := range []string{wilson, exactShare} {
		var lower, upper [n + 1]float64
		for x := range n + 1 {
			out := answer(t, "proportion-interval", map[string]any{"successes": x, "n": n, "kind": kind})
			lower[x], upper[x] = resultOf(t, out, "lower"), resultOf(t, out, "upper")
		}
		for i := 1; i <= grid; i++ {
			p, covered := float64(i)/(grid+1), 0.0
			for x := range n + 1 {
				if lower[x] <= p && p <= upper[x] {
					covered += dist.Binomial{N: n, P: p}.PMF(x)
				}
			}
			average[kind] += covered / grid
			least[kind] = math.Min(least[kind], covered)
		}
	}
	if least[exactShare] < 0.95-1e-12 || math.Abs(average[wilson]-0.95) > 0.01 {
		t.Errorf("least %v, average %v", least, average)
	}
}
