package funcs

import (
	"math/rand/v2"
	"testing"
)

func TestToleranceDirections(t *testing.T) {
	arguments := map[string]any{"sample": sixTimes, "content": 0.9}
	for _, d := range everyDirection {
		out := answer(t, "tolerance-interval", altered(arguments, "direction", d))
		limitsExist(t, out, d)
		s, k := summarise(sixTimes), resultOf(t, out, "factor")
		if d != below {
			within(t, "lower", resultOf(t, out, "lower"), s.mean-k*s.sd, 1e-15)
		}
		if d != above {
			within(t, "upper", resultOf(t, out, "upper"), s.mean+k*s.sd, 1e-15)
		}
		within(t, "attained-confidence", resultOf(t, out, "attained-confidence"), 0.95, 0)
	}
	// One limit lies within the two that hold as much between them.
	one, two := answer(t, "tolerance-interval", altered(arguments, "direction", below)), answer(t, "tolerance-interval", arguments)
	if !(resultOf(t, one, "upper") < resultOf(t, two, "upper")) {
		t.Error("one limit lies beyond both")
	}
}

// Wilks 1941: 46 values hold 90% between them with 95% confidence, 45 do not;
// 29 values do on one side, 28 do not (1 - 0.9^28 = 0.948).
func TestDistributionFreeLimitsAreTheExtremes(t *testing.T) {
	for _, c := range []struct {
		direction string
		n         int
	}{{either, 46}, {above, 29}, {below, 29}} {
		values := noise(rand.New(rand.NewPCG(24, 1)), c.n, 0, 1)
		arguments := map[string]any{"sample": values, "content": 0.9, "kind": distributionFree, "direction": c.direction}
		out := answer(t, "tolerance-interval", arguments)
		limitsExist(t, out, c.direction)
		s := answer(t, "sample-summary", map[string]any{"sample": values})
		if c.direction != below {
			within(t, "lower", resultOf(t, out, "lower"), resultOf(t, s, "minimum"), 0)
		}
		if c.direction != above {
			within(t, "upper", resultOf(t, out, "upper"), resultOf(t, s, "maximum"), 0)
		}
		if a := resultOf(t, out, "attained-confidence"); !(a >= 0.95 && a < 0.96) {
			t.Errorf("%s: attained %v", c.direction, a)
		}
		absent(t, out, "factor")
		refusedFor(t, answer(t, "tolerance-interval", altered(arguments, "sample", values[1:])), "confidence-not-attainable")
		size := answer(t, "distribution-free-tolerance-size", map[string]any{"content": 0.9, "direction": c.direction})
		within(t, "planned n", numberOf(t, size, "n"), float64(c.n), 0)
	}
	// 1 - n cⁿ⁻¹ + (n-1)cⁿ at n = 2, c = ½ is ¼ exactly.
	exact := answer(t, "tolerance-interval", map[string]any{"sample": []float64{1, 2}, "content": 0.5, "kind": distributionFree, "confidence": 0.25})
	within(t, "attained", resultOf(t, exact, "attained-confidence"), 0.25, 1e-15)
}

func TestToleranceRefusals(t *testing.T) {
	out := answer(t, "tolerance-interval", map[string]any{"mean": 1.0, "sd": 1.0, "n": 50, "kind": distributionFree})
	refusedFor(t, out, "kind-needs-sample")
	if want := "Distribution-free limits are values of the sample itself; give the sample, or use kind normal."; Note(out.Findings) != want {
		t.Errorf("got %s", Note(out.Findings))
	}
	refusedFor(t, answer(t, "tolerance-interval", map[string]any{"mean": 1.0, "sd": 0.0, "n": 50}), "no-spread")
	out = answer(t, "tolerance-interval", map[string]any{"sample": counting(10), "kind": distributionFree})
	if want := "With n = 10 the smallest and largest value hold 95% of the population with only 8.61% confidence; " +
		"measure more (see distribution-free-tolerance-size), or ask for less."; Note(out.Findings) != want { // 1 - 10·0.95⁹ + 9·0.95¹⁰
		t.Errorf("got %s", Note(out.Findings))
	}
	refuses(t, "tolerance-interval", map[string]any{"sample": counting(10), "content": 90.0}, "content is 90, but must be strictly between 0 and 1; write 90% or 0.9")
}
