package funcs

import (
	"math"
	"testing"

	"halfwidth/funcs/internal/dist"
)

// D'Agostino & Stephens 1986, table 4.7, case 3: A*² at 10%, 5%, 2.5% and 1%
// (values not compared with the print).
func TestAndersonDarlingAtPublishedPercentagePoints(t *testing.T) {
	for level, a := range map[float64]float64{0.10: 0.631, 0.05: 0.752, 0.025: 0.873, 0.01: 1.035} {
		if p := andersonDarlingP(a); math.Abs(p/level-1) > 0.03 {
			t.Errorf("p = %v at the %v point %v", p, level, a)
		}
	}
	// The four pieces meet, and p falls all the way.
	last := 2.0
	for a := 0.0; a < 200; a += 0.001 {
		p := andersonDarlingP(a)
		if !(p <= last+2e-3 && p >= 0 && p <= 1) {
			t.Fatalf("p is %v at %v, %v just before", p, a, last)
		}
		last = p
	}
}

func TestNormalityByDefinition(t *testing.T) {
	// n = 3: W = (x₃-x₁)²/2 over the squares; 0, 1, 3 has 4.5/(14/3); p exact.
	out := answer(t, "normality-check", map[string]any{"sample": []float64{1, 0, 3}})
	w := 4.5 / (14.0 / 3)
	within(t, "W", resultOf(t, out, "shapiro-wilk"), w, 1e-14)
	within(t, "p", resultOf(t, out, "shapiro-wilk-p-value"), 6/math.Pi*(math.Asin(math.Sqrt(w))-math.Pi/3), 1e-13)
	absent(t, out, "anderson-darling", "anderson-darling-p-value", "excess-kurtosis")
	// The smallest W of three values, ¾, has p = 0, the largest, 1, has p = 1.
	within(t, "p of two alike", resultOf(t, answer(t, "normality-check", map[string]any{"sample": []float64{1, 1, 3}}), "shapiro-wilk-p-value"), 0, 1e-7)
	within(t, "p of even steps", resultOf(t, answer(t, "normality-check", map[string]any{"sample": []float64{1, 2, 3}}), "shapiro-wilk-p-value"), 1, 1e-7)
	// A² of 1…9 by its definition, summed plainly.
	sum, sd := 0.0, math.Sqrt(7.5)
	for i := 1; i <= 9; i++ {
		z := func(k int) float64 { return float64(k-5) / sd }
		sum += float64(2*i-1) * (math.Log(dist.Normal{}.CDF(z(i))) + math.Log(dist.Normal{}.SF(z(10-i))))
	}
	nine := answer(t, "normality-check", map[string]any{"sample": counting(9)})
	within(t, "A²", resultOf(t, nine, "anderson-darling"), -9-sum/9, 1e-12)
	within(t, "skewness", resultOf(t, nine, "skewness"), 0, 1e-15)
	absent(t, answer(t, "normality-check", map[string]any{"sample": counting(5001)}), "shapiro-wilk")
	refusedFor(t, answer(t, "normality-check", map[string]any{"sample": []float64{1, 2}}), "few-values")
	refusedFor(t, answer(t, "normality-check", map[string]any{"sample": []float64{2, 2, 2}}), "no-spread")
}

func TestNormalityDoesNotFeelOrderShiftOrScale(t *testing.T) {
	a := answer(t, "normality-check", map[string]any{"sample": tenTimes})
	moved := make([]float64, len(tenTimes)+1)
	for i, x := range tenTimes {
		moved[len(moved)-2-i] = 1000 - 8*x
	}
	moved[len(moved)-1] = math.NaN()
	b := answer(t, "normality-check", map[string]any{"sample": moved})
	for _, r := range []string{"shapiro-wilk", "shapiro-wilk-p-value", "anderson-darling", "anderson-darling-p-value", "excess-kurtosis"} {
		within(t, r, resultOf(t, b, r), resultOf(t, a, r), 1e-11)
	}
	within(t, "skewness", resultOf(t, b, "skewness"), -resultOf(t, a, "skewness"), 1e-11)
	// Exact normal quantiles look normal, a far value does not, however far.
	quantiles := make([]float64, 50)
	for i := range quantiles {
		quantiles[i] = dist.Normal{}.Quantile((float64(i) + 0.5) / 50)
	}
	fine := answer(t, "normality-check", map[string]any{"sample": quantiles})
	quantiles[0] = 1e8
	far := answer(t, "normality-check", map[string]any{"sample": quantiles})
	for _, p := range []string{"shapiro-wilk-p-value", "anderson-darling-p-value"} {
		if !(resultOf(t, fine, p) > 0.5 && resultOf(t, far, p) < 1e-10) {
			t.Errorf("%s: %v of normal quantiles, %v with a far value", p, resultOf(t, fine, p), resultOf(t, far, p))
		}
	}
}
