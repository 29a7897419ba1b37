package funcs

import (
	"context"
	"math"
	"testing"
)

// Aitchison & Brown 1957, the reproductive property: log median Σp·log(median),
// log variance Σ(p·log(g))². Here 2·√9/5 = 1.2.
func TestLognormalProductFollowsItsDefinition(t *testing.T) {
	medians, gsds, powers := []float64{2, 9, 5}, []float64{1.5, 1.2, 2}, []float64{1, 0.5, -1}
	out := answer(t, "lognormal-product", map[string]any{"medians": medians, "geometric-sds": gsds, "powers": powers, "threshold": 3.0})
	s := math.Sqrt(math.Pow(math.Log(1.5), 2) + math.Pow(math.Log(1.2)/2, 2) + math.Pow(math.Log(2), 2))
	within(t, "median", resultOf(t, out, "median"), 1.2, 1e-15)
	within(t, "geometric-sd", resultOf(t, out, "geometric-sd"), math.Exp(s), 1e-15)
	within(t, "mean", resultOf(t, out, "mean"), 1.2*math.Exp(s*s/2), 1e-15)
	lower, upper := resultOf(t, out, "lower"), resultOf(t, out, "upper")
	within(t, "lower times upper", lower*upper, 1.44, 1e-14)
	z := resultOf(t, answer(t, "normal-quantile", map[string]any{"probability": 0.975}), "value")
	within(t, "upper", upper, 1.2*math.Exp(z*s), 1e-14)
	above := answer(t, "normal-probability", map[string]any{"from": math.Log(2.5) / s})
	within(t, "probability-above", resultOf(t, out, "probability-above"), resultOf(t, above, "probability"), 1e-14)
}

// The logarithm of a lognormal product is a normal sum.
func TestLognormalProductAgreesWithNormalSum(t *testing.T) {
	medians, gsds := []float64{0.3, 40, 7}, []float64{1.1, 3, 1.4}
	var means, sds []float64
	for i := range medians {
		means, sds = append(means, math.Log(medians[i])), append(sds, math.Log(gsds[i]))
	}
	product := answer(t, "lognormal-product", map[string]any{"medians": medians, "geometric-sds": gsds, "powers": []float64{2}, "probability": 0.9})
	sum := answer(t, "normal-sum", map[string]any{"means": means, "sds": sds, "weights": []float64{2}, "probability": 0.9})
	for a, b := range map[string]string{"median": "mean", "geometric-sd": "sd", "lower": "lower", "upper": "upper"} {
		within(t, a, math.Log(resultOf(t, product, a)), resultOf(t, sum, b), 1e-14)
	}
}

func TestLognormalProductHoldsAtTheEdges(t *testing.T) {
	// Factors whose product leaves the range of a double on the way, not in the end.
	out := answer(t, "lognormal-product", map[string]any{"medians": []float64{1e300, 1e300, 1e-300, 1e-300}, "geometric-sds": []float64{2, 2, 2, 2}})
	within(t, "median", resultOf(t, out, "median"), 1, 1e-13) // 1e300·1e-300 as doubles: 1 to about 2e-16, squared
	within(t, "geometric-sd", resultOf(t, out, "geometric-sd"), 4, 1e-15)
	far := answer(t, "lognormal-product", map[string]any{"medians": []float64{1}, "geometric-sds": []float64{2}, "threshold": 1e6})
	// 1 - Phi(log(1e6)/log 2), mpmath at 50 digits.
	within(t, "far tail", resultOf(t, far, "probability-above"), 1.083320054002992825678725e-88, 1e-11)
	refusedFor(t, answer(t, "lognormal-product", map[string]any{"medians": []float64{2, 3}, "geometric-sds": []float64{1, 1}}), "no-spread")
	refusedFor(t, answer(t, "lognormal-product", map[string]any{"medians": []float64{2}, "geometric-sds": []float64{3}, "powers": []float64{0}}), "no-spread")
	refusedFor(t, answer(t, "lognormal-product", map[string]any{"medians": []float64{1e300, 1e300}, "geometric-sds": []float64{2, 2}}), "too-large-to-hold")
}

func TestLognormalProductArgumentErrors(t *testing.T) {
	for _, c := range []struct {
		arguments map[string]any
		want      string
	}{
		{map[string]any{"medians": []float64{0}, "geometric-sds": []float64{2}}, "medians, value 1 is 0, but must be greater than 0"},
		{map[string]any{"medians": []float64{1}, "geometric-sds": []float64{0.5}}, "geometric-sds, value 1 is 0.5, but must be 1 or more"},
		{map[string]any{"medians": []float64{1, 2}, "geometric-sds": []float64{2}},
			"geometric-sds is 1 number, but must have one for each item of medians (2 numbers); give one an item, in the same order"},
		{map[string]any{"medians": []float64{1}, "geometric-sds": []float64{2}, "threshold": -1.0}, "threshold is -1, but must be greater than 0"},
		{map[string]any{"medians": []float64{1}}, "geometric-sds is missing; give the geometric standard deviation of each factor: exp of the standard deviation of its logarithm"},
	} {
		_, err := Answer(context.Background(), "lognormal-product", c.arguments)
		if err == nil || err.Error() != "lognormal-product: "+c.want {
			t.Errorf("%v: got\n%v\nwant\n%s", c.arguments, err, c.want)
		}
	}
}

func TestLognormalProductSentence(t *testing.T) {
	out := answer(t, "lognormal-product", map[string]any{"medians": From{Value: []float64{40, 1.5}, Origin: &Origin{Unit: "minutes"}},
		"geometric-sds": []float64{1.2, 1.1}, "threshold": 80.0})
	want := "The product of 2 factors has median 60 minutes and geometric standard deviation 1.228 and lies from 40.09 to 89.8 with probability 95% " +
		"(normal law of the sum of logarithms, factors independent). It passes 80 minutes with probability 0.08101."
	if got, _ := out.Get("sentence"); got != want {
		t.Errorf("got  %v\nwant %s", got, want)
	}
}
