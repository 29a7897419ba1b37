package funcs

import (
	"math"
	"testing"

	"halfwidth/funcs/internal/dist"
)

// Double integrals over the common mean and the sd by the trapezoidal rule, in
// a program of its own.
func TestJointPredictionFactors(t *testing.T) {
	for _, c := range []struct {
		n, future  int
		confidence float64
		direction  string
		quantile   float64 // of the largest (value - mean)/sd, or of its size
	}{
		{10, 3, 0.95, either, 3.0235898271153467},
		{10, 3, 0.95, above, 2.587426799088033},
		{5, 20, 0.9, below, 0},
		{5, 20, 0.9, either, 4.738095497809803},
	} {
		out := answer(t, "prediction-interval", map[string]any{"mean": 2.0, "sd": 3.0, "n": c.n, "future": c.future, "confidence": c.confidence, "direction": c.direction})
		limitsExist(t, out, c.direction)
		factor := resultOf(t, out, "factor")
		if c.quantile > 0 {
			within(t, "factor", factor, c.quantile, 1e-10)
		}
		if c.direction != below {
			within(t, "lower", resultOf(t, out, "lower"), 2-3*factor, 1e-15)
		}
		if c.direction != above {
			within(t, "upper", resultOf(t, out, "upper"), 2+3*factor, 1e-15)
		}
		within(t, "df", resultOf(t, out, "df"), float64(c.n-1), 0)
	}
}

func TestPredictionFactorsLieBetweenOneAndBonferroni(t *testing.T) {
	for _, d := range everyDirection {
		for _, n := range []int{2, 5, 30, 1000} {
			before := 0.0
			for _, future := range []int{1, 2, 3, 10, 100} {
				out := answer(t, "prediction-interval", map[string]any{"mean": 0.0, "sd": 1.0, "n": n, "future": future, "direction": d})
				k := resultOf(t, out, "factor")
				q := tail(0.95, d)
				law, scale := dist.Student{DF: float64(n - 1)}, math.Sqrt(1+1/float64(n))
				if future == 1 {
					within(t, "one value is Student's t", k, law.UpperQuantile(q)*scale, 1e-15)
				} else if bonferroni := law.UpperQuantile(q/float64(future)) * scale; !(k > before && k < bonferroni) {
					t.Errorf("n = %d, %d values, %s: factor %v, want between %v and %v", n, future, d, k, before, bonferroni)
				}
				before = k
				mean := answer(t, "prediction-interval", map[string]any{"mean": 0.0, "sd": 1.0, "n": n, "future": future, "of": "mean", "direction": d})
				within(t, "of the mean", resultOf(t, mean, "factor"), law.UpperQuantile(q)*math.Sqrt(1/float64(n)+1/float64(future)), 1e-15)
			}
		}
	}
}

// The mean of very many further values is the population's: a mean interval.
func TestPredictionOfAMeanOfManyIsAMeanInterval(t *testing.T) {
	a := answer(t, "prediction-interval", map[string]any{"sample": sixTimes, "future": largestCount, "of": "mean"})
	b := answer(t, "mean-interval", map[string]any{"sample": sixTimes})
	for _, limit := range []string{"lower", "upper"} {
		within(t, limit, resultOf(t, a, limit), resultOf(t, b, limit), 1e-14)
	}
	refuses(t, "prediction-interval", map[string]any{"sample": sixTimes, "future": 0}, "future is 0, but must be a whole number, 1 or more")
	refuses(t, "prediction-interval", map[string]any{"sample": sixTimes, "of": "all"}, `of is "all", but must be one of its choices; write each or mean`)
	if out := answer(t, "prediction-interval", map[string]any{"mean": 0.0, "sd": 1.0, "n": largestCount, "future": largestCount}); out.Status != StatusOK {
		t.Errorf("%s: %s", out.Status, Note(out.Findings))
	}
}
