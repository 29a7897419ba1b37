package funcs

import (
	"math"
	"strings"
	"testing"
)

func limitNamed(function string) string { return function[strings.LastIndexByte(function, '_')+1:] }

func TestLimitsOfSharesAgreeWithHighPrecisionArithmetic(t *testing.T) {
	for _, r := range preciseValues(t, "proportion.csv") {
		arguments := map[string]any{"confidence": r.arg(t, "conf")}
		name := "proportion-interval"
		if strings.HasPrefix(r.function, "newcombe_difference_") {
			name = "proportion-difference-interval"
			for argument, column := range map[string]string{"first-successes": "x1", "first-n": "n1", "second-successes": "x2", "second-n": "n2"} {
				arguments[argument] = r.arg(t, column)
			}
		} else {
			arguments["successes"], arguments["n"] = r.arg(t, "x"), r.arg(t, "n")
			if strings.HasPrefix(r.function, "clopper_pearson_") {
				arguments["kind"] = exactShare
			}
		}
		r.check(t, resultOf(t, answer(t, name, arguments), limitNamed(r.function)), 1e-12)
	}
}

func TestLimitsOfRatesAgreeWithHighPrecisionArithmetic(t *testing.T) {
	for _, r := range preciseValues(t, "poisson.csv") {
		out := answer(t, "rate-interval", map[string]any{"count": r.arg(t, "x"), "confidence": r.arg(t, "conf")})
		r.check(t, resultOf(t, out, limitNamed(r.function)), 1e-12)
	}
}

func TestToleranceFactorsAgreeWithHighPrecisionArithmetic(t *testing.T) {
	for _, r := range preciseValues(t, "tolerance_k.csv") {
		arguments := map[string]any{"mean": 0.0, "sd": 1.0, "n": r.arg(t, "n"), "content": r.arg(t, "coverage"), "confidence": r.arg(t, "confidence")}
		if r.function == "tolerance_k_one_sided" {
			arguments["direction"] = below
		}
		r.check(t, resultOf(t, answer(t, "tolerance-interval", arguments), "factor"), 1e-12)
	}
}

// One limit at confidence p is the t quantile; 1 - p is exact from p = 0.5.
func TestLimitsOfMeansAgreeWithHighPrecisionArithmetic(t *testing.T) {
	tested := 0
	for _, r := range preciseValues(t, "student_t.csv", "student_t_quantile") {
		df, p := r.arg(t, "df"), r.arg(t, "p")
		if df != math.Trunc(df) || p <= 0.5 {
			continue
		}
		tested++
		arguments := map[string]any{"mean": 0.0, "sd": 1.0, "n": df + 1, "confidence": p, "direction": below}
		root := math.Sqrt(df + 1)
		r.check(t, resultOf(t, answer(t, "mean-interval", arguments), "upper")*root, 1e-12)
		r.check(t, resultOf(t, answer(t, "paired-interval", arguments), "upper")*root, 1e-12)
		r.check(t, resultOf(t, answer(t, "prediction-interval", arguments), "upper")/math.Sqrt(1+1/(df+1)), 1e-12)
	}
	if tested < 5 {
		t.Errorf("only %d quantiles were tested", tested)
	}
}
