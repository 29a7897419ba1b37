package funcs

import (
	"fmt"
	"math"
	"math/rand/v2"
	"testing"

	"halfwidth/funcs/internal/dist"
)

// orders calls with every order of a things above and b below.
func orders(a, b int, call func(up []bool)) {
	up := make([]bool, a+b)
	var place func(i, left int)
	place = func(i, left int) {
		if i == len(up) {
			if left == 0 {
				call(up)
			}
			return
		}
		up[i] = false
		place(i+1, left)
		if left > 0 {
			up[i] = true
			place(i+1, left-1)
		}
	}
	place(0, a)
}

// cut splits an order into stretches.
func cut(up []bool, lengths []int) [][]bool {
	var out [][]bool
	for _, l := range lengths {
		out, up = append(out, up[:l]), up[l:]
	}
	return out
}

func TestRunsOfEveryOrderAreCounted(t *testing.T) {
	for _, c := range []struct {
		a, b    int
		lengths []int
	}{{4, 5, []int{9}}, {4, 5, []int{5, 4}}, {6, 5, []int{1, 4, 6}}, {3, 7, []int{2, 2, 2, 2, 2}}, {1, 1, []int{1, 1}}} {
		counts, all, sum, squares := map[int]float64{}, 0.0, 0.0, 0.0
		orders(c.a, c.b, func(up []bool) {
			r := countRuns(cut(up, c.lengths)).runs
			counts[r]++
			all++
			sum += float64(r)
			squares += float64(r * r)
		})
		for r := range counts {
			law := runCount{c.a, c.b, r, c.lengths}
			var atMost, atLeast float64
			for k, n := range counts {
				if k <= r {
					atMost += n / all
				}
				if k >= r {
					atLeast += n / all
				}
			}
			p, how := law.pValue()
			within(t, fmt.Sprint(c, r), p, math.Min(1, 2*math.Min(atMost, atLeast)), 1e-12)
			if how != "exact p-value" {
				t.Error(how)
			}
		}
		if c.a+c.b > 3 {
			mean, sd := runCount{above: c.a, below: c.b, lengths: c.lengths}.moments()
			within(t, "mean", mean, sum/all, 1e-12)
			within(t, "sd", sd, math.Sqrt(squares/all-sum/all*sum/all), 1e-11)
		}
	}
}

// The state by state count of one stretch is the law of Swed & Eisenhart; and
// past 50 a side the normal law is near it.
func TestLawsOfRunsAgree(t *testing.T) {
	for _, runs := range []int{20, 38, 51, 60} {
		r := runCount{50, 50, runs, []int{100}}
		atMost, atLeast := r.exactTails()
		law := dist.Runs{First: 50, Second: 50}
		within(t, "at most", atMost, law.CDF(runs), 1e-11)
		within(t, "at least", atLeast, law.SF(runs-1), 1e-11)
	}
	for _, runs := range []int{90, 100, 110, 121} {
		two := runCount{100, 100, runs, []int{1, 199}}
		one := runCount{100, 100, runs, []int{200}}
		p, how := two.pValue()
		if how != "normal p-value with continuity correction" {
			t.Error(how)
		}
		exact, _ := one.pValue()
		if math.Abs(p-exact) > 0.12 { // the gap after the first value adds half a run
			t.Errorf("%d runs: %v beside %v", runs, p, exact)
		}
	}
}

func TestGapsEndRunsAndTiesDoNot(t *testing.T) {
	nan := math.NaN()
	// Median 3.5: + + - - | gap joins nothing.
	out := answer(t, "independence-check", map[string]any{"sample": []float64{5, 6, nan, 7, 1, 2, nan, 1}})
	within(t, "runs", resultOf(t, out, "runs"), 4, 0) // 56 | 7, 12 | 1
	// Median 3: left out, its neighbours 5 and 6 become neighbours.
	tied := answer(t, "independence-check", map[string]any{"sample": []float64{1, 2, 5, 3, 6}})
	within(t, "runs", resultOf(t, tied, "runs"), 2, 0)
	within(t, "p", resultOf(t, tied, "p-value"), 2.0/3, 1e-14) // 2 of the 6 orders of 2 and 2 have two runs; doubled
}

func TestEffectiveN(t *testing.T) {
	rng := rand.New(rand.NewPCG(31, 1))
	values := noise(rng, 400, 0, 1)
	for i := 1; i < len(values); i++ {
		values[i] += 0.5 * values[i-1]
	}
	out := answer(t, "independence-check", map[string]any{"sample": values})
	r := resultOf(t, out, "lag-1-autocorrelation")
	within(t, "effective-n", resultOf(t, out, "effective-n"), 400*(1-r)/(1+r), 1e-14)
	if !raises(out, "neighbours-alike") || resultOf(t, out, "p-value") > 1e-4 {
		t.Errorf("dependent values: p = %v, %v", resultOf(t, out, "p-value"), out.Findings)
	}
	checkDeclared(t, out.Function, out)
	alternating := answer(t, "independence-check", independenceCheck.Example.arguments())
	within(t, "at most n", resultOf(t, alternating, "effective-n"), 10, 0)
	same := answer(t, "sample-summary", map[string]any{"sample": values})
	within(t, "lag 1", r, resultOf(t, same, "lag-1-autocorrelation"), 0)
}

func TestIndependenceRefusals(t *testing.T) {
	refusedFor(t, answer(t, "independence-check", map[string]any{"sample": []float64{1, 2}}), "few-values")
	refusedFor(t, answer(t, "independence-check", map[string]any{"sample": []float64{2, 2, 2}}), "no-spread")
	out := answer(t, "independence-check", map[string]any{"sample": []float64{1, 1, 1, 5}})
	if !raises(out, "one-sided-median") {
		t.Errorf("%v", out.Findings)
	}
	checkDeclared(t, out.Function, out)
	absent(t, out, "runs", "p-value")
}
