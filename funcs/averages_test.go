package funcs

import (
	"context"
	"fmt"
	"math"
	"math/rand/v2"
	"slices"
	"strings"
	"testing"
)

var everyDirection = []string{either, above, below}

// altered is a copy of arguments with others set.
func altered(arguments map[string]any, pairs ...any) map[string]any {
	out := map[string]any{}
	for name, v := range arguments {
		out[name] = v
	}
	for i := 0; i < len(pairs); i += 2 {
		out[pairs[i].(string)] = pairs[i+1]
	}
	return out
}

// refuses fails where a call does not give exactly that error.
func refuses(t *testing.T, name string, arguments map[string]any, want string) {
	t.Helper()
	if _, err := Answer(context.Background(), name, arguments); err == nil || err.Error() != name+": "+want {
		t.Errorf("got  %v\nwant %s: %s", err, name, want)
	}
}

// limitsExist fails where an outcome's limits are not those of its direction.
func limitsExist(t *testing.T, out *Outcome, direction string) {
	t.Helper()
	_, lower := out.Get("lower")
	_, upper := out.Get("upper")
	if lower != (direction != below) || upper != (direction != above) {
		t.Errorf("%s, %s: lower %t, upper %t", out.Function.Name, direction, lower, upper)
	}
	if d, _ := out.Get("direction"); d != direction {
		t.Errorf("%s: direction is %v, want %s", out.Function.Name, d, direction)
	}
}

// mirrored fails where b is not the mirror image of a about 0.
func mirrored(t *testing.T, a, b *Outcome, estimate string, tolerance float64) {
	t.Helper()
	for name, other := range map[string]string{estimate: estimate, "lower": "upper", "upper": "lower"} {
		v, ok := a.Get(name)
		w, okToo := b.Get(other)
		if ok != okToo {
			t.Errorf("%s: %s given: %t, mirrored %t", a.Function.Name, name, ok, okToo)
		} else if ok {
			within(t, a.Function.Name+" "+name, v.(float64), -w.(float64), tolerance)
		}
	}
}

var sixTimes = []float64{31.2, 28.4, 35.1, 30.0, 27.3, 33.9}

func TestASampleAndItsSummaryGiveTheSameDigits(t *testing.T) {
	rng := rand.New(rand.NewPCG(20, 1))
	for _, n := range []int{2, 3, 10, 500} {
		values := noise(rng, n, 7, 3)
		s := summarise(values)
		for _, name := range []string{"mean-interval", "prediction-interval", "tolerance-interval"} {
			for _, d := range everyDirection {
				a := answer(t, name, map[string]any{"sample": values, "direction": d})
				b := answer(t, name, map[string]any{"mean": s.mean, "sd": s.sd, "n": s.n, "direction": d})
				sameResults(t, a, b)
				limitsExist(t, a, d)
			}
		}
		zeros := make([]float64, n)
		a := answer(t, "paired-interval", map[string]any{"sample": values, "second-sample": zeros})
		b := answer(t, "paired-interval", map[string]any{"mean": s.mean, "sd": s.sd, "n": s.n})
		sameResults(t, a, b) // no correlation either, as the second sample has no spread
	}
}

func TestMeanIntervalOfTwoValues(t *testing.T) {
	// t with 1 degree of freedom is tan(π·0.475) = 12.7062; the standard error of 1 and 3 is 1.
	out := answer(t, "mean-interval", map[string]any{"sample": []float64{1, 3}, "reference": 1.0})
	q := math.Tan(math.Pi * 0.475)
	within(t, "lower", resultOf(t, out, "lower"), 2-q, 1e-13)
	within(t, "upper", resultOf(t, out, "upper"), 2+q, 1e-13)
	within(t, "half-width", resultOf(t, out, "half-width"), q, 1e-13)
	within(t, "p", resultOf(t, out, "p-value"), 0.5, 1e-14) // t = 1: the quartile of the Cauchy law
	if !raises(out, "few-values") {
		t.Error("two values without a caution")
	}
}

func TestMeanIntervalAndTestAgree(t *testing.T) {
	for _, extra := range []map[string]any{{}, {"population-size": 9}, {"known-sd": 2.5}, {"known-sd": 2.5, "population-size": 40}} {
		for _, d := range everyDirection {
			arguments := altered(extra, "sample", sixTimes, "direction", d, "confidence", 0.9)
			out := answer(t, "mean-interval", arguments)
			limitsExist(t, out, d)
			for _, limit := range []string{"lower", "upper"} {
				if v, ok := out.Get(limit); ok {
					at := answer(t, "mean-interval", altered(arguments, "reference", v))
					within(t, fmt.Sprint(extra, d, " p at ", limit), resultOf(t, at, "p-value"), 0.1, 1e-12)
				}
			}
			if d != either { // one limit at 90% is that of both at 80%
				two := answer(t, "mean-interval", altered(arguments, "direction", either, "confidence", 0.8))
				for _, limit := range []string{"lower", "upper"} {
					if v, ok := out.Get(limit); ok {
						within(t, limit, v.(float64), resultOf(t, two, limit), 1e-14)
					}
				}
			}
		}
	}
}

func TestMeanIntervalShiftsAndScales(t *testing.T) {
	plain := answer(t, "mean-interval", map[string]any{"sample": sixTimes, "reference": 30.0})
	moved := make([]float64, len(sixTimes))
	for i, x := range sixTimes {
		moved[i] = 1000 - 4*x
	}
	out := answer(t, "mean-interval", map[string]any{"sample": moved, "reference": 880.0})
	within(t, "lower", resultOf(t, out, "lower"), 1000-4*resultOf(t, plain, "upper"), 1e-13)
	within(t, "upper", resultOf(t, out, "upper"), 1000-4*resultOf(t, plain, "lower"), 1e-13)
	within(t, "half-width", resultOf(t, out, "half-width"), 4*resultOf(t, plain, "half-width"), 1e-13)
	within(t, "t", resultOf(t, out, "t"), -resultOf(t, plain, "t"), 1e-11)
	within(t, "p", resultOf(t, out, "p-value"), resultOf(t, plain, "p-value"), 1e-11)
}

func TestALargeOffsetCostsNoHalfWidth(t *testing.T) {
	noise := []float64{3, 7, 1.5, 4.25, -2, 11, 6, 0.5, -0.25} // times 2^-18: exact beside 1e9
	plain, shifted := make([]float64, len(noise)), make([]float64, len(noise))
	for i, x := range noise {
		plain[i] = math.Ldexp(x, -18)
		shifted[i] = 1e9 + plain[i]
	}
	for _, name := range []string{"mean-interval", "trimmed-mean-interval", "median-interval", "prediction-interval"} {
		a := answer(t, name, map[string]any{"sample": plain})
		b := answer(t, name, map[string]any{"sample": shifted})
		for _, limit := range []string{"lower", "upper"} { // to the last place of 1e9
			within(t, name+" "+limit, resultOf(t, b, limit)-1e9, resultOf(t, a, limit), 1.2e-7/math.Abs(resultOf(t, a, limit)))
		}
	}
	a, b := answer(t, "mean-interval", map[string]any{"sample": plain}), answer(t, "mean-interval", map[string]any{"sample": shifted})
	within(t, "sd", resultOf(t, b, "sd"), resultOf(t, a, "sd"), 1e-14)
}

// Cochran 1977, equation 2.20: √(1 - n/N) on the standard error.
func TestMeanIntervalOfAFinitePopulation(t *testing.T) {
	infinite := answer(t, "mean-interval", map[string]any{"sample": sixTimes})
	out := answer(t, "mean-interval", map[string]any{"sample": sixTimes, "population-size": 8})
	within(t, "half-width", resultOf(t, out, "half-width"), resultOf(t, infinite, "half-width")/2, 1e-14)
	within(t, "standard-error", resultOf(t, out, "standard-error"), resultOf(t, infinite, "standard-error")/2, 1e-14)
	for _, r := range [][2]string{{"total", "mean"}, {"total-lower", "lower"}, {"total-upper", "upper"}} {
		within(t, r[0], resultOf(t, out, r[0]), 8*resultOf(t, out, r[1]), 1e-15)
	}
	absent(t, infinite, "total", "total-lower", "total-upper", "t", "p-value", "z")
	absent(t, answer(t, "mean-interval", map[string]any{"sample": sixTimes, "population-size": 8, "direction": above}), "upper", "total-upper")

	whole := answer(t, "mean-interval", map[string]any{"sample": sixTimes, "population-size": 6, "reference": 30.0})
	for _, limit := range []string{"lower", "upper"} {
		within(t, limit, resultOf(t, whole, limit), resultOf(t, whole, "mean"), 0)
	}
	within(t, "standard-error", resultOf(t, whole, "standard-error"), 0, 0)
	absent(t, whole, "t", "p-value")
	equal := answer(t, "mean-interval", map[string]any{"sample": []float64{4, 4, 4}, "population-size": 3})
	within(t, "mean of a whole population of equal values", resultOf(t, equal, "upper"), 4, 0)
	refuses(t, "mean-interval", map[string]any{"sample": sixTimes, "population-size": 5},
		"population-size is 5, but is smaller than the sample (n = 6); give the number in the whole population")

	// 1 - n/N in whole numbers, though n/N rounds to 1 - 2^-50 and the like.
	big := answer(t, "mean-interval", map[string]any{"mean": 1.0, "sd": 1.0, "n": math.MaxInt>>13 - 2, "population-size": math.MaxInt>>13 + 1})
	within(t, "standard-error of nearly all", resultOf(t, big, "standard-error"), math.Sqrt(3)/math.Ldexp(1, 50), 1e-14)
}

func TestMeanIntervalWithAKnownSD(t *testing.T) {
	// z = 1.959963984540054 (JCGM 100 Table G.1 has 1.960).
	out := answer(t, "mean-interval", map[string]any{"sample": []float64{5, 6, 7, 10}, "known-sd": 2.0, "reference": 6.0})
	within(t, "half-width", resultOf(t, out, "half-width"), 1.959963984540054, 1e-14)
	within(t, "z", resultOf(t, out, "z"), 1, 1e-15)
	within(t, "p", resultOf(t, out, "p-value"), 0.31731050786291410, 1e-14) // 2·Q(1)
	absent(t, out, "t", "df")
	one := answer(t, "mean-interval", map[string]any{"sample": []float64{5}, "known-sd": 2.0})
	within(t, "of one value", resultOf(t, one, "standard-error"), 2, 0)
	absent(t, one, "sd", "df")
	equal := answer(t, "mean-interval", map[string]any{"sample": []float64{5, 5, 5, 5, 5}, "known-sd": 2.0})
	within(t, "of equal values", resultOf(t, equal, "mean"), 5, 0)
	absent(t, answer(t, "mean-interval", map[string]any{"mean": 5.0, "n": 9, "known-sd": 2.0}), "sd", "df")
}

func TestMeanIntervalOfAHugeSummary(t *testing.T) {
	out := answer(t, "mean-interval", map[string]any{"mean": 0.0, "sd": 1.0, "n": largestCount})
	within(t, "half-width", resultOf(t, out, "half-width"), 1.959963984540054/math.Sqrt(1<<53), 1e-13)
}

func TestGapsAndOrderDoNotMatter(t *testing.T) {
	gaps := []float64{math.NaN(), 31.2, 28.4, math.NaN(), 35.1, 30.0, 27.3, 33.9}
	turned := slices.Clone(sixTimes)
	slices.Reverse(turned)
	for _, name := range []string{"mean-interval", "prediction-interval", "tolerance-interval", "geometric-mean-interval", "lognormal-mean-interval",
		"median-interval", "trimmed-mean-interval"} {
		arguments := map[string]any{"sample": sixTimes}
		a := answer(t, name, arguments)
		sameResults(t, a, answer(t, name, map[string]any{"sample": gaps}))
		sameResults(t, a, answer(t, name, map[string]any{"sample": turned}))
		if used, _ := a.Get("used"); used != 6 {
			t.Errorf("%s: used %v", name, used)
		}
	}
}

func TestEqualValuesAreRefused(t *testing.T) {
	for n := 2; n < 40; n++ {
		values := slices.Repeat([]float64{0.1}, n)
		for _, name := range []string{"mean-interval", "prediction-interval", "tolerance-interval", "geometric-mean-interval", "lognormal-mean-interval"} {
			refusedFor(t, answer(t, name, map[string]any{"sample": values}), "no-spread")
		}
		refusedFor(t, answer(t, "paired-interval", map[string]any{"sample": values, "second-sample": slices.Repeat([]float64{7}, n)}), "no-spread")
		if n > 2 {
			refusedFor(t, answer(t, "trimmed-mean-interval", map[string]any{"sample": values}), "no-spread")
			refusedFor(t, answer(t, "bootstrap-interval", map[string]any{"sample": values}), "no-spread")
		}
	}
	for _, c := range []struct {
		name, want string
		arguments  map[string]any
	}{
		{"mean-interval", "All values of the sample are equal, so neither an interval nor a test exists; check whether the values were rounded or copied down.",
			map[string]any{"sample": []float64{5, 5}}},
		{"prediction-interval", "The sd is 0, so neither an interval nor a test exists; check whether the values were rounded or copied down.",
			map[string]any{"mean": 5.0, "sd": 0.0, "n": 9}},
		{"paired-interval", "All differences are equal, so neither an interval nor a test exists; check whether one column was computed from the other.",
			map[string]any{"sample": []float64{1.1, 2.1, 3.3}, "second-sample": []float64{1, 2, 3.2}}},
		{"paired-interval", "The sd is 0, so neither an interval nor a test exists; check whether the values were rounded or copied down.",
			map[string]any{"mean": 5.0, "sd": 0.0, "n": 9}},
		{"mean-interval", "The sample has 1 value, but at least 2 are needed; measure more, or widen the condition.", map[string]any{"sample": []float64{5}}},
		{"paired-interval", "Only one pair is complete, but at least 2 are needed; fill in the missing partners.",
			map[string]any{"sample": []float64{5, math.NaN()}, "second-sample": []float64{4, 7}}},
	} {
		out := answer(t, c.name, c.arguments)
		if note := Note(out.Findings); out.Status != StatusRefused || note != c.want {
			t.Errorf("%s: %s\nwant %s", c.name, note, c.want)
		}
	}
}

func TestPairedIntervalIsTheMeanIntervalOfTheDifferences(t *testing.T) {
	before := []float64{31.2, 28.4, 35.1, math.NaN(), 27.3, 33.9, 30}
	after := []float64{29.5, 28.9, 31.0, 28, 26.6, math.NaN(), 28.2}
	differences := make([]float64, len(before))
	for i := range before {
		differences[i] = before[i] - after[i]
	}
	for _, d := range everyDirection {
		a := answer(t, "paired-interval", map[string]any{"sample": before, "second-sample": after, "direction": d, "reference": 0.5})
		b := answer(t, "mean-interval", map[string]any{"sample": differences, "direction": d, "reference": 0.5})
		limitsExist(t, a, d)
		for _, name := range []string{"lower", "upper", "half-width", "standard-error", "n", "sd", "df", "t", "p-value"} {
			x, okX := a.Get(name)
			y, okY := b.Get(name)
			if x != y || okX != okY {
				t.Errorf("%s: %v and %v", name, x, y)
			}
		}
		if s, _ := a.Get("skipped"); s != 2 {
			t.Errorf("skipped %v, want the two incomplete pairs", s)
		}
		turned := map[string]string{either: either, above: below, below: above}[d]
		mirrored(t, a, answer(t, "paired-interval", map[string]any{"sample": after, "second-sample": before, "direction": turned, "reference": -0.5}), "difference", 1e-15)
	}
	// Correlation of (1, 2, 3) and (1, 3, 2) is ½ by hand.
	out := answer(t, "paired-interval", map[string]any{"sample": []float64{1, 2, 3}, "second-sample": []float64{1, 3, 2}})
	within(t, "correlation", resultOf(t, out, "correlation"), 0.5, 1e-15)
	refuses(t, "paired-interval", map[string]any{"sample": []float64{1, 2, 3}, "second-sample": []float64{1, 3}},
		"second-sample is 2 values, but must pair with sample (3 values) value by value; give two columns of the same rows, or use difference-interval for separate groups")
	few := answer(t, "paired-interval", map[string]any{"sample": []float64{1, 2, 4}, "second-sample": []float64{1, 3, 2}})
	if want := "The list of differences has only 3 values: the interval rests wholly on the values being normal. Measure at least 5."; Note(few.Findings) != want {
		t.Errorf("got %s", Note(few.Findings))
	}
}

func TestSentencesOfAverages(t *testing.T) {
	minutes := From{Value: sixTimes, Origin: &Origin{Unit: "minutes"}}
	for _, c := range []struct {
		name      string
		arguments map[string]any
		want      string
	}{
		{"mean-interval", map[string]any{"sample": minutes, "reference": 30.0},
			"The mean is 31.0 minutes, 95% interval 27.8 to 34.2 (half-width 3.2, either direction, n = 6; t interval with 5 degrees of freedom, sd with divisor n - 1). " +
				"Against the reference 30 minutes: t = 0.7881, two-sided p = 0.466."},
		{"mean-interval", map[string]any{"sample": minutes, "known-sd": 3.0, "population-size": 60, "direction": above},
			"The mean is 31.0 minutes, at least 29.1 with 95% confidence (half-width 1.9, direction above, n = 6; z interval with the known sd 3, finite population of 60)."},
		{"prediction-interval", map[string]any{"sample": minutes, "future": 3, "direction": below},
			"Values up to 40.3 minutes hold all 3 further values together with 95% confidence (direction below, n = 6; " +
				"joint prediction limits by the equicorrelated t law with 5 degrees of freedom, sd with divisor n - 1)."},
		{"median-interval", map[string]any{"sample": minutes},
			"The median is 30.6 minutes, 95% interval 27.3 to 35.1 (half-width 3.9, either direction, n = 6; order statistics 1 and 6, attained confidence 96.87%)."},
		{"median-interval", map[string]any{"sample": minutes, "direction": below},
			"The median is 30.6 minutes, at most 35.1 with 95% confidence (half-width 4.5, direction below, n = 6; order statistic 6, attained confidence 98.43%)."},
	} {
		if got, _ := answer(t, c.name, c.arguments).Get("sentence"); got != c.want {
			t.Errorf("%s\ngot  %v\nwant %s", c.name, got, c.want)
		}
	}
}

func TestAveragesGiveOnlyWhatTheyDeclare(t *testing.T) {
	for _, f := range averages {
		for _, d := range everyDirection {
			arguments := altered(f.Example.arguments(), "direction", d)
			if f.Name == "bootstrap-interval" {
				arguments["resamples"] = 500
			}
			out := answer(t, f.Name, arguments)
			limitsExist(t, out, d)
			checkDeclared(t, f, out)
			if s, _ := out.Get("sentence"); !strings.Contains(s.(string), d) {
				t.Errorf("%s: the sentence names no direction: %s", f.Name, s)
			}
		}
	}
}
