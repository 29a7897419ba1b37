package funcs

import (
	"math"
	"strings"
	"testing"
)

func TestGeometricMeanIsTheMeanOfLogarithms(t *testing.T) {
	logs := make([]float64, len(sixTimes))
	for i, x := range sixTimes {
		logs[i] = math.Log(x)
	}
	for _, d := range everyDirection {
		a := answer(t, "geometric-mean-interval", map[string]any{"sample": sixTimes, "direction": d})
		b := answer(t, "mean-interval", map[string]any{"sample": logs, "direction": d})
		limitsExist(t, a, d)
		for _, r := range [][2]string{{"geometric-mean", "mean"}, {"lower", "lower"}, {"upper", "upper"}, {"geometric-sd", "sd"}} {
			if v, ok := b.Get(r[1]); ok {
				within(t, r[0], resultOf(t, a, r[0]), math.Exp(v.(float64)), 1e-13)
			}
		}
	}
}

// Both scale with the values, and the geometric mean of reciprocals is the
// reciprocal.
func TestLogarithmicIntervalsScale(t *testing.T) {
	scaled, inverted := make([]float64, len(sixTimes)), make([]float64, len(sixTimes))
	for i, x := range sixTimes {
		scaled[i], inverted[i] = 1e6*x, 1/x
	}
	for name, estimate := range map[string]string{"geometric-mean-interval": "geometric-mean", "lognormal-mean-interval": "mean"} {
		a, b := answer(t, name, map[string]any{"sample": sixTimes}), answer(t, name, map[string]any{"sample": scaled})
		for _, r := range []string{estimate, "lower", "upper"} {
			within(t, name+" "+r, resultOf(t, b, r), 1e6*resultOf(t, a, r), 1e-13)
		}
	}
	a := answer(t, "geometric-mean-interval", map[string]any{"sample": sixTimes})
	b := answer(t, "geometric-mean-interval", map[string]any{"sample": inverted})
	within(t, "geometric-mean", resultOf(t, b, "geometric-mean"), 1/resultOf(t, a, "geometric-mean"), 1e-13)
	within(t, "lower", resultOf(t, b, "lower"), 1/resultOf(t, a, "upper"), 1e-13)
}

// Olsson 2005 by its formula, at one and two limits; t quantiles 3.1824463052837096
// (0.975) and 2.3533634348018239 (0.95) of 3 degrees of freedom by JCGM 100 Table G.2 (3.18, 2.35).
func TestModifiedCoxByHand(t *testing.T) {
	values := []float64{1, math.E, math.E, math.E * math.E} // logarithms 0, 1, 1, 2: mean 1, variance 2/3
	centre, se := 1+1.0/3, math.Sqrt(2.0/3/4+4.0/9/6)
	out := answer(t, "lognormal-mean-interval", map[string]any{"sample": values})
	within(t, "mean", resultOf(t, out, "mean"), math.Exp(centre), 1e-14)
	within(t, "lower", resultOf(t, out, "lower"), math.Exp(centre-3.1824463052837096*se), 1e-13)
	within(t, "upper", resultOf(t, out, "upper"), math.Exp(centre+3.1824463052837096*se), 1e-13)
	one := answer(t, "lognormal-mean-interval", map[string]any{"sample": values, "direction": above})
	limitsExist(t, one, above)
	within(t, "lower alone", resultOf(t, one, "lower"), math.Exp(centre-2.3533634348018239*se), 1e-13)
}

func TestLogarithmsNeedPositiveValues(t *testing.T) {
	cell := func(_, i int) string { return []string{"C2", "C3", "C4"}[i] }
	for _, name := range []string{"geometric-mean-interval", "lognormal-mean-interval"} {
		for _, bad := range []float64{0, -2} {
			out := answer(t, name, map[string]any{"sample": From{Value: []float64{3, bad, 4}, Origin: &Origin{Address: cell}}})
			refusedFor(t, out, "not-positive")
			checkDeclared(t, out.Function, out)
			if f := out.Findings[0]; f.Cells[0] != "C3" || !strings.HasPrefix(f.Message, "Value 2 of sample is "+FormatNumber(bad)+", and only positive values have a logarithm") {
				t.Errorf("%v %s", f.Cells, f.Message)
			}
		}
		refusedFor(t, answer(t, name, map[string]any{"sample": []float64{3}}), "few-values")
		refusedFor(t, answer(t, name, map[string]any{"sample": []float64{1e-300, 1e300}}), "too-large-to-hold")
	}
}
