package funcs

import (
	"fmt"
	"math"
	"testing"
)

func TestRateOfNoEvents(t *testing.T) {
	out := answer(t, "rate-interval", map[string]any{"count": 0, "exposure": 4.0})
	within(t, "lower", resultOf(t, out, "lower"), 0, 0)
	within(t, "upper", resultOf(t, out, "upper"), -math.Log(0.025)/4, 1e-14) // exp(-λ) = 0.025
	one := answer(t, "rate-interval", map[string]any{"count": 0, "direction": below})
	within(t, "one-sided", resultOf(t, one, "upper"), -math.Log(0.05), 1e-14)
	limitsExist(t, one, below)
}

func TestRateIntervalAndTestAgree(t *testing.T) {
	for _, d := range everyDirection {
		for _, x := range []int{0, 1, 7, 400} {
			arguments := map[string]any{"count": x, "exposure": 2.5, "direction": d, "confidence": 0.9}
			out := answer(t, "rate-interval", arguments)
			limitsExist(t, out, d)
			for _, limit := range []string{"lower", "upper"} {
				if v, ok := out.Get(limit); ok && v.(float64) > 0 {
					at := answer(t, "rate-interval", altered(arguments, "reference", v))
					within(t, fmt.Sprint(x, d, limit), resultOf(t, at, "p-value"), 0.1, 1e-11)
				}
			}
			scaled := answer(t, "rate-interval", altered(arguments, "exposure", 2500.0))
			for _, r := range []string{"rate", "lower", "upper"} {
				if v, ok := out.Get(r); ok {
					within(t, r, resultOf(t, scaled, r)*1000, v.(float64), 1e-14)
				}
			}
		}
	}
	// P(X >= 3) and P(X <= 3) for a mean of 2, term by term.
	atMost2 := 5 * math.Exp(-2)
	for d, want := range map[string]float64{above: 1 - atMost2, below: atMost2 + 4.0/3*math.Exp(-2), either: 2 * (1 - atMost2)} {
		out := answer(t, "rate-interval", map[string]any{"count": 3, "exposure": 4.0, "reference": 0.5, "direction": d})
		within(t, d+" p", resultOf(t, out, "p-value"), want, 1e-13)
	}
	refuses(t, "rate-interval", map[string]any{"count": 3, "exposure": 0.0}, "exposure is 0, but must be greater than 0")
	refuses(t, "rate-interval", map[string]any{"count": -1}, "count is -1, but must be a whole number, 0 or more")
}

func ratioOf(x1, x2 int, t1, t2 float64) map[string]any {
	return map[string]any{"first-count": x1, "first-exposure": t1, "second-count": x2, "second-exposure": t2}
}

func TestRateRatiosInvertWhenSwapped(t *testing.T) {
	for _, c := range [][2]int{{15, 5}, {1, 1}, {300, 2}, {40, 37}} {
		for _, d := range everyDirection {
			turned := map[string]string{either: either, above: below, below: above}[d]
			a := answer(t, "rate-ratio-interval", altered(ratioOf(c[0], c[1], 3, 7), "direction", d, "reference", 2.0))
			b := answer(t, "rate-ratio-interval", altered(ratioOf(c[1], c[0], 7, 3), "direction", turned, "reference", 0.5))
			limitsExist(t, a, d)
			for name, other := range map[string]string{"ratio": "ratio", "lower": "upper", "upper": "lower"} {
				v, ok := a.Get(name)
				w, okToo := b.Get(other)
				if ok != okToo {
					t.Errorf("%s: %t and %t", name, ok, okToo)
				} else if ok {
					within(t, fmt.Sprint(c, d, name), v.(float64), 1/w.(float64), 1e-12)
				}
			}
			within(t, "p", resultOf(t, a, "p-value"), resultOf(t, b, "p-value"), 1e-12)
		}
	}
}

func TestRateRatioIntervalAndTestAgree(t *testing.T) {
	for _, d := range everyDirection {
		arguments := altered(ratioOf(15, 5, 3, 7), "direction", d, "confidence", 0.9)
		out := answer(t, "rate-ratio-interval", arguments)
		for _, limit := range []string{"lower", "upper"} {
			if v, ok := out.Get(limit); ok {
				at := answer(t, "rate-ratio-interval", altered(arguments, "reference", v))
				within(t, d+limit, resultOf(t, at, "p-value"), 0.1, 1e-11)
			}
		}
	}
	// The limits are those of the share 15 of 20, as odds times the exposures' ratio.
	share := answer(t, "proportion-interval", map[string]any{"successes": 15, "n": 20, "kind": exactShare})
	out := answer(t, "rate-ratio-interval", ratioOf(15, 5, 3, 7))
	for _, limit := range []string{"lower", "upper"} {
		p := resultOf(t, share, limit)
		within(t, limit, resultOf(t, out, limit), p/(1-p)*7/3, 1e-13)
	}
}

func TestRateRatioWithoutEvents(t *testing.T) {
	out := answer(t, "rate-ratio-interval", ratioOf(0, 0, 1, 1))
	refusedFor(t, out, "no-events")
	if want := "Neither group has an event, so the rates cannot be compared; observe longer."; Note(out.Findings) != want {
		t.Errorf("got %s", Note(out.Findings))
	}
	first := answer(t, "rate-ratio-interval", ratioOf(0, 4, 1, 1))
	within(t, "ratio", resultOf(t, first, "ratio"), 0, 0)
	within(t, "lower", resultOf(t, first, "lower"), 0, 0)
	q := math.Pow(0.025, 0.25) // P(X = 0) = (1-θ)⁴ = 0.025
	within(t, "upper", resultOf(t, first, "upper"), (1-q)/q, 1e-13)
	for _, d := range everyDirection {
		second := answer(t, "rate-ratio-interval", altered(ratioOf(4, 0, 1, 1), "direction", d))
		if !raises(second, "unbounded-above") {
			t.Errorf("%s: %v", d, second.Findings)
		}
		checkDeclared(t, second.Function, second)
		absent(t, second, "ratio", "upper")
		if _, ok := second.Get("lower"); ok != (d != below) {
			t.Errorf("%s: lower given: %t", d, ok)
		}
	}
	within(t, "lower beside none", resultOf(t, answer(t, "rate-ratio-interval", ratioOf(4, 0, 1, 1)), "lower"), q/(1-q), 1e-13)
	got, _ := answer(t, "rate-ratio-interval", ratioOf(4, 0, 1, 1)).Get("sentence")
	if want := "The ratio of rates (first / second) is at least 0.6601 with 97.5% confidence (either direction, 4 events and 0 events; " +
		"exact conditional interval of a ratio of Poisson rates). Against the reference 1: exact two-sided p = 0.125."; got != want {
		t.Errorf("got  %s\nwant %s", got, want)
	}
}
