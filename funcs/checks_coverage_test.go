package funcs

import (
	"context"
	"fmt"
	"math"
	"strings"
	"testing"

	"halfwidth/funcs/internal/dist"
)

// errors4 fails where a simulated share is more than 4 simulation errors off.
func errors4(t *testing.T, what string, out *Outcome, result string, want float64) {
	t.Helper()
	got, resamples := resultOf(t, out, result), 20000.0
	if r, ok := out.Arguments["resamples"].Value.(int); ok {
		resamples = float64(r)
	}
	if e := math.Sqrt((want*(1-want) + 1/resamples) / resamples); math.Abs(got-want) > 4*e {
		t.Errorf("%s: %s %v, want %v ± %v", what, result, got, want, 4*e)
	}
}

// Every draw of n from a few values, each as likely.
func TestCoverageOfEveryDraw(t *testing.T) {
	values := []float64{0, 1, 5}
	const n = 5
	for _, d := range everyDirection {
		for _, confidence := range []float64{0.8, 0.95} {
			q := dist.Student{DF: n - 1}.UpperQuantile(tail(confidence, d))
			var hits, low, high float64
			for code := range 243 {
				x, rest := make([]float64, n), code
				for i := range x {
					x[i] = values[rest%3] - 2 // less the mean
					rest /= 3
				}
				s := summarise(x)
				reach := q * s.sd / math.Sqrt(n)
				switch {
				case d != below && s.mean-reach > 0:
					high++
				case d != above && s.mean+reach < 0:
					low++
				default:
					hits++
				}
			}
			out := answer(t, "coverage-check", map[string]any{"sample": values, "n": n, "confidence": confidence, "direction": d})
			what := fmt.Sprint(d, confidence)
			errors4(t, what, out, "coverage", hits/243)
			errors4(t, what, out, "interval-below", low/243)
			errors4(t, what, out, "interval-above", high/243)
			within(t, "the three shares", resultOf(t, out, "coverage")+resultOf(t, out, "interval-below")+resultOf(t, out, "interval-above"), 1, 1e-15)
			c := (resultOf(t, out, "coverage")*20000 + 1) / 20002
			within(t, "simulation-error", resultOf(t, out, "simulation-error"), math.Sqrt(c*(1-c)/20000), 1e-12)
		}
	}
}

// Draws without spread hold the target only where they equal it: of 1, 2 and 3
// drawn twice, 1 of 3 such draws.
func TestDrawsWithoutSpread(t *testing.T) {
	for _, c := range []struct {
		dir  string
		x    []float64
		want int8
	}{{either, []float64{0, 0, 0}, 0}, {either, []float64{1, 1}, 1}, {either, []float64{-1, -1}, -1}, {above, []float64{-1, -1}, 0}, {below, []float64{1, 1}, 0}} {
		if got, mean := place(c.x, 2, c.dir); got != c.want || mean != c.x[0] {
			t.Errorf("%v, direction %s: got %v and mean %v", c.x, c.dir, got, mean)
		}
	}
	out := answer(t, "coverage-check", map[string]any{"sample": []float64{1, 2, 3}, "n": 2})
	errors4(t, "1, 2 and 3", out, "coverage", 7.0/9) // the six unequal pairs and (2, 2)
}

func TestPredictedCoverageAndNNeeded(t *testing.T) {
	skewed := []float64{1, 1, 2, 2, 3, 4, 5, 9, 14, 30}
	for _, d := range everyDirection {
		out := answer(t, "coverage-check", map[string]any{"sample": skewed, "direction": d, "resamples": 1000})
		s := answer(t, "sample-summary", map[string]any{"sample": skewed})
		g, k := resultOf(t, s, "skewness"), resultOf(t, s, "excess-kurtosis")
		// The catalogue's formula, with z of 0.975 or 0.95.
		z := map[string]float64{either: 1.959963984540054, above: 1.6448536269514722, below: 1.6448536269514722}[d]
		density := math.Exp(-z*z/2) / math.Sqrt(2*math.Pi)
		want := 0.95 + 2.0/10*density*z*(k*(z*z-3)/12-g*g*(z*z*z*z+2*z*z-3)/18)
		switch d {
		case above:
			want = 0.95 + g*(2*z*z+1)*density/(6*math.Sqrt(10))
		case below:
			want = 0.95 - g*(2*z*z+1)*density/(6*math.Sqrt(10))
		}
		within(t, d+" predicted", resultOf(t, out, "predicted-coverage"), math.Min(1, want), 1e-12)
		plan := answer(t, "enough-n-for-mean", map[string]any{"sample": skewed, "direction": d})
		within(t, d+" n-needed", numberOf(t, out, "n-needed"), numberOf(t, plan, "n"), 0)
	}
	out := answer(t, "coverage-check", map[string]any{"sample": skewed})
	if !raises(out, "coverage-short") {
		t.Errorf("coverage %v without a caution", resultOf(t, out, "coverage"))
	}
	checkDeclared(t, out.Function, out)
}

// What coverage-check says of data that are skewed, of data so heavy-tailed that
// no n helps, and what it leaves out then.
func TestCoverageIsToldInPlainWords(t *testing.T) {
	skewed := answer(t, "coverage-check", map[string]any{"sample": []float64{1, 1, 2, 2, 3, 4, 5, 9, 14, 30}, "resamples": 1000})
	sentence, _ := skewed.Get("sentence")
	needed := numberOf(t, skewed, "n-needed")
	for _, want := range []string{
		"For data shaped like these, the 95% t interval (direction either) from n = 10 holds the true mean in ", " percentage points; predicted roughly 84%; ",
		fmt.Sprintf(" It is predicted to come within 1 percentage point of 95%% from n = %.0f on.", needed),
	} {
		if !strings.Contains(sentence.(string), want) {
			t.Errorf("got %s\nwant %s", sentence, want)
		}
	}
	if note := Note(skewed.Findings); !strings.Contains(note, fmt.Sprintf("; measure about %.0f, or use median-interval or bootstrap-interval.", needed)) {
		t.Errorf("note: %s", note)
	}
	heavy := answer(t, "coverage-check", map[string]any{"sample": paretoQuantiles(1000, 0.8), "resamples": 1000})
	absent(t, heavy, "n-needed", "predicted-coverage")
	if s, _ := heavy.Get("sentence"); !strings.HasSuffix(s.(string), " No n is enough if the tails are as heavy as they look.") || !raises(heavy, "heavy-tail") {
		t.Errorf("heavy tails: %s", s)
	}
}

// The rule of thumb of 30 stands beside the number needed, as what it is.
func TestThirtyIsToldAsARuleOfThumb(t *testing.T) {
	for want, arguments := range map[string]map[string]any{
		"Measure n = 90, planned for a coverage of at least 94%: the 95% interval (either direction) is predicted to hold the true mean in 94.01% of cases " +
			"(predicted coverage of the t interval for skewness 2 and excess kurtosis 6); Cochran's rule asks for n = 101. " +
			"The rule of thumb n = 30, which asks nothing of the values, is predicted to give 92.02%, which is too little.": {"skewness": 2.0, "excess-kurtosis": 6.0},
		"is predicted to give roughly 69%, which is too little.": {"skewness": 6.18, "excess-kurtosis": 110.0},
		"is predicted to give 94.97%, which is enough. So few values make a wide interval, and the prediction is rough for them: plan the half-width with": {"skewness": 0.2, "excess-kurtosis": 0.0},
	} {
		out := answer(t, "enough-n-for-mean", arguments)
		if s, _ := out.Get("sentence"); !strings.Contains(s.(string), want) {
			t.Errorf("got  %s\nwant %s", s, want)
		}
	}
	heavy := answer(t, "population-coverage", map[string]any{"shape": "pareto", "parameter": 1.5, "n": 100, "resamples": 1000})
	if note := Note(heavy.Findings); !strings.Contains(note, "of cases instead of 95%; no n is enough: use median-interval.") {
		t.Error(note)
	}
}

func TestCoverageDoesNotFeelShiftOrGaps(t *testing.T) {
	a := answer(t, "coverage-check", map[string]any{"sample": tenTimes, "resamples": 2000})
	moved := []float64{math.NaN()}
	for _, x := range tenTimes {
		moved = append(moved, 4*x+1024)
	}
	b := answer(t, "coverage-check", map[string]any{"sample": moved, "resamples": 2000})
	for _, r := range []string{"coverage", "interval-below", "interval-above", "n-needed"} {
		within(t, r, resultOf(t, b, r), resultOf(t, a, r), 0)
	}
	at10 := answer(t, "coverage-check", map[string]any{"sample": tenTimes, "n": 10, "resamples": 2000})
	sameResults(t, a, at10)
}

func TestCoverageRefusals(t *testing.T) {
	for _, c := range []struct {
		code      string
		arguments map[string]any
	}{
		{"few-values", map[string]any{"sample": []float64{3}}},
		{"no-spread", map[string]any{"sample": []float64{3, 3, 3}}},
		{"too-many-draws", map[string]any{"sample": tenTimes, "n": 1_000_000}},
	} {
		out := answer(t, "coverage-check", c.arguments)
		refusedFor(t, out, c.code)
		checkDeclared(t, out.Function, out)
	}
	// 60,000,000 draws fit.
	for _, c := range []struct {
		arguments map[string]any
		want      string
	}{
		{map[string]any{"n": 100_000}, "Only 600 samples of n = 100000 can be drawn in one call, too few for a steady answer; look at an n of at most 60000, or ask for from 100 to 600 resamples."},
		{map[string]any{"n": 1_000_000}, "Only 60 samples of n = 1000000 can be drawn in one call, too few for a steady answer; look at an n of at most 60000."},
		{map[string]any{"n": 100_000, "resamples": 1000}, "1000 resamples of n = 100000 would draw 100000000 values, but at most 60000000 are drawn in one call here; ask for at most 600 resamples."},
		{map[string]any{"n": 1_000_000, "resamples": 20_000}, "20000 resamples of n = 1000000 would draw 20000000000 values, but at most 60000000 are drawn in one call here; ask for an n of at most 600000."},
	} {
		out := answer(t, "coverage-check", altered(c.arguments, "sample", tenTimes))
		refusedFor(t, out, "too-many-draws")
		if got := Note(out.Findings); got != c.want {
			t.Errorf("got  %s\nwant %s", got, c.want)
		}
	}
	refuses(t, "coverage-check", map[string]any{"sample": tenTimes, "n": 1}, "n is 1, but must be a whole number, 2 or more")
	if _, err := Answer(context.Background(), "coverage-check", map[string]any{"sample": tenTimes, "seed": -1}); err == nil {
		t.Error("a seed below 0 is taken")
	}
}

// Where the default does not fit, as many samples are drawn as do, and that number
// stands as the argument; asked for, it gives the same.
func TestFewerResamplesThanTheDefault(t *testing.T) {
	for name, arguments := range map[string]map[string]any{
		"coverage-check":      {"sample": tenTimes, "n": 20_000},
		"population-coverage": {"shape": "t", "parameter": 5.0, "n": 5000},
		"bootstrap-interval":  {"sample": counting(20_000)},
	} {
		out := answer(t, name, arguments)
		if out.Status == StatusRefused || !raises(out, "fewer-resamples") {
			t.Errorf("%s: %s, %s", name, out.Status, Note(out.Findings))
			continue
		}
		checkDeclared(t, out.Function, out)
		asked := answer(t, name, altered(arguments, "resamples", 3000))
		sameResults(t, out, asked)
		if raises(asked, "fewer-resamples") {
			t.Errorf("%s: 3000 resamples as asked: %s", name, Note(asked.Findings))
		}
	}
	out := answer(t, "coverage-check", map[string]any{"sample": tenTimes, "n": 20_000})
	if want := "3000 samples of n = 20000 were drawn instead of 20000, as many as fit in one call; the coverage has a simulation error of 0.00"; !strings.Contains(Note(out.Findings), want) {
		t.Errorf("got %s", Note(out.Findings))
	}
}
