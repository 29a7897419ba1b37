package funcs

import (
	"context"
	"math"
	"strings"
	"testing"
)

func TestNormalProbabilityReproducesThePublishedTable(t *testing.T) {
	for _, p := range publishedExamples(t, "normal_arithmetic") {
		out := answer(t, "normal-probability", map[string]any{"from": 0.0, "to": p.number(t, "x")})
		p.check(t, resultOf(t, out, "probability"))
	}
}

func TestNormalQuantileReproducesPublishedFactors(t *testing.T) {
	for _, p := range publishedTable(t, "gum-g1-normal") {
		outside := (1 - p.number(t, "central_fraction")) / 2
		p.check(t, resultOf(t, answer(t, "normal-quantile", map[string]any{"probability": outside, "counted-from": "above"}), "value"))
	}
	for _, id := range []string{"gum-g23.95_half_width_sigma_normal", "gum-g23.99_half_width_sigma_normal"} {
		p := publishedExample(t, id)
		outside := (1 - p.number(t, "level")) / 2
		p.check(t, resultOf(t, answer(t, "normal-quantile", map[string]any{"probability": outside, "counted-from": "above"}), "value"))
	}
}

// High-precision values of testdata/references/numerics/normal.csv.
func TestNormalFunctionsReachHighPrecision(t *testing.T) {
	for _, r := range preciseValues(t, "normal.csv") {
		switch r.function {
		case "normal_cdf":
			out := answer(t, "normal-probability", map[string]any{"to": r.arg(t, "z")})
			r.check(t, resultOf(t, out, "probability"), 1e-14)
			score := answer(t, "standard-score", map[string]any{"value": r.arg(t, "z"), "mean": 0.0, "sd": 1.0})
			r.check(t, resultOf(t, score, "probability-below"), 1e-14)
		case "normal_sf":
			out := answer(t, "normal-probability", map[string]any{"to": r.arg(t, "z")})
			r.check(t, resultOf(t, out, "probability-outside"), 1e-14)
			score := answer(t, "standard-score", map[string]any{"value": r.arg(t, "z"), "mean": 0.0, "sd": 1.0})
			r.check(t, resultOf(t, score, "probability-above"), 1e-14)
		case "normal_quantile":
			r.check(t, resultOf(t, answer(t, "normal-quantile", map[string]any{"probability": r.arg(t, "p")}), "value"), 1e-14)
			above := answer(t, "normal-quantile", map[string]any{"probability": r.arg(t, "p"), "counted-from": "above"})
			r.check(t, -resultOf(t, above, "value"), 1e-14)
		case "normal_interval":
			out := answer(t, "normal-probability", map[string]any{"from": r.arg(t, "a"), "to": r.arg(t, "b")})
			r.check(t, resultOf(t, out, "probability"), 1e-14)
		default:
			t.Errorf("normal.csv: unknown function %s", r.function)
		}
	}
}

// Arguments are the doubles nearest to the decimals; wanted values by mpmath at
// 50 digits from those doubles.
func TestStandardisingCostsNoDigits(t *testing.T) {
	for _, c := range []struct {
		name                string
		from, to            any
		mean, sd            float64
		probability, within float64
	}{
		{"a narrow interval", 1.0, 1 + 0x1p-30, 0, 3, 1.171551730711842892793917e-10, 1e-15},
		{"31 standard deviations above a large mean", 1000000003.1, nil, 1e9, 0.1, 2.69523014005976092026552e-211, 2e-15},
		{"37 standard deviations below", nil, 0.1, 100.3, 2.7, 9.298326198865378873692191e-302, 2e-15},
	} {
		out := answer(t, "normal-probability", map[string]any{"from": c.from, "to": c.to, "mean": c.mean, "sd": c.sd})
		within(t, c.name, resultOf(t, out, "probability"), c.probability, c.within)
	}
}

// A shift and a scale that round nothing leave every digit alone.
func TestNormalProbabilityShiftsAndScales(t *testing.T) {
	for _, z := range []struct{ from, to float64 }{{-1, 2}, {0.5, 0.5009765625}, {3, 8}, {-8.5, -8}, {-30, -2}, {-0.25, 40}} {
		plain := answer(t, "normal-probability", map[string]any{"from": z.from, "to": z.to})
		for _, c := range []struct{ mean, sd float64 }{{1e9, 1}, {-1e9, 0x1p-10}, {0x1p80, 0x1p40}, {1e300, 0x1p960}, {0, 0x1p-900}} {
			from, to := c.mean+z.from*c.sd, c.mean+z.to*c.sd
			if from-c.mean != z.from*c.sd || to-c.mean != z.to*c.sd {
				t.Fatalf("the case %v with mean %v and sd %v is not exact", z, c.mean, c.sd)
			}
			out := answer(t, "normal-probability", map[string]any{"from": from, "to": to, "mean": c.mean, "sd": c.sd})
			for _, name := range []string{"probability", "probability-outside"} {
				within(t, name, resultOf(t, out, name), resultOf(t, plain, name), 0)
			}
		}
	}
}

func TestNormalProbabilityAtTheEdges(t *testing.T) {
	for _, c := range []struct {
		arguments       map[string]any
		inside, outside float64
	}{
		{map[string]any{"from": 2.0, "to": 2.0}, 0, 1},
		{map[string]any{"from": -1e300}, 1, 0},
		{map[string]any{"to": -1e300}, 0, 1},
		{map[string]any{"from": -math.MaxFloat64, "to": math.MaxFloat64, "sd": 5e-324}, 1, 0},
		{map[string]any{"to": math.MaxFloat64, "mean": -math.MaxFloat64, "sd": 1.0}, 1, 0},
		// Twice the largest double lies one sd of that size, and half of it, from the mean.
		{map[string]any{"from": math.MaxFloat64, "mean": -math.MaxFloat64, "sd": math.MaxFloat64}, 0.022750131948179207, 0.9772498680518208},
		{map[string]any{"to": 0.0}, 0.5, 0.5},
	} {
		out := answer(t, "normal-probability", c.arguments)
		within(t, "probability", resultOf(t, out, "probability"), c.inside, 1e-15)
		within(t, "probability-outside", resultOf(t, out, "probability-outside"), c.outside, 1e-15)
	}
}

func TestQuantileAndProbabilityAreInverse(t *testing.T) {
	for _, p := range []float64{1e-300, 1e-20, 1e-5, 0.1, 0.5} {
		for _, side := range []string{"below", "above"} {
			value := resultOf(t, answer(t, "normal-quantile", map[string]any{"mean": 5.0, "sd": 2.0, "probability": p, "counted-from": side}), "value")
			end := map[string]string{"below": "to", "above": "from"}[side]
			back := answer(t, "normal-probability", map[string]any{"mean": 5.0, "sd": 2.0, end: value})
			// The value's last place moves the probability by up to |z| times its size.
			within(t, side, resultOf(t, back, "probability"), p, 1e-12)
		}
	}
}

func TestStandardScore(t *testing.T) {
	out := answer(t, "standard-score", map[string]any{"value": 90.0, "mean": 100.0, "sd": 5.0})
	within(t, "score", resultOf(t, out, "score"), -2, 0)
	// Phi(-2), mpmath at 50 digits.
	within(t, "probability-below", resultOf(t, out, "probability-below"), 0.02275013194817920720028264, 1e-15)
	within(t, "probability-above", resultOf(t, out, "probability-above"), 0.9772498680518207927997174, 1e-15)
	for z, want := range map[float64]string{0: "at", 1: "1 standard deviation above", -2.5: "2.5 standard deviations below"} {
		if got := scoreText(z); got != want {
			t.Errorf("scoreText(%v) = %q, want %q", z, got, want)
		}
	}
}

func TestNormalTransform(t *testing.T) {
	out := answer(t, "normal-transform", map[string]any{"mean": 10.0, "sd": 3.0, "multiply": -2.0, "add": 5.0})
	within(t, "mean", resultOf(t, out, "mean"), -15, 0)
	within(t, "sd", resultOf(t, out, "sd"), 6, 0)
	within(t, "variance", resultOf(t, out, "variance"), 36, 0)
	for _, c := range []struct {
		arguments map[string]any
		input     string
	}{
		{map[string]any{"mean": 4.0, "sd": 1.0, "multiply": 0.0, "add": 7.0}, "multiply"},
		{map[string]any{"mean": 7.0, "sd": 0.0}, "sd"},
	} {
		fixed := answer(t, "normal-transform", c.arguments)
		if fixed.Status != StatusCaution || !raises(fixed, "no-spread") || fixed.Findings[0].Input != c.input {
			t.Errorf("%v: %v", c.arguments, fixed.Findings)
		}
		within(t, "mean", resultOf(t, fixed, "mean"), 7, 0)
		within(t, "sd", resultOf(t, fixed, "sd"), 0, 0)
	}
	huge := answer(t, "normal-transform", map[string]any{"mean": 1e200, "sd": 1.0, "multiply": 1e200})
	refusedFor(t, huge, "too-large-to-hold")
}

func TestNormalArgumentErrors(t *testing.T) {
	for _, c := range []struct {
		function  string
		arguments map[string]any
		want      string
	}{
		{"normal-probability", map[string]any{"from": 3.0, "to": 2.0}, "from is 3, but must not be greater than to (2); exchange the two"},
		{"normal-probability", nil, "from is missing; give either from (and perhaps to), or to"},
		{"normal-probability", map[string]any{"to": 2.0, "sd": 0.0}, "sd is 0, but must be greater than 0"},
		{"normal-probability", map[string]any{"to": math.NaN()}, "to is NaN, but must be any number"},
		{"normal-quantile", map[string]any{"probability": 1.0}, "probability is 1, but must be strictly between 0 and 1"},
		{"normal-quantile", map[string]any{"probability": 0.5, "counted-from": "abov"},
			`counted-from is "abov", but must be one of its choices; did you mean "above"? The choices are below and above`},
		{"normal-quantile", nil, "probability is missing; give the probability, strictly between 0 and 1"},
		{"standard-score", map[string]any{"value": 2.0, "mean": 1.0}, "sd is missing; give standard deviation of the distribution"},
		{"normal-transform", map[string]any{"mean": 2.0, "sd": -1.0}, "sd is -1, but must be 0 or more"},
	} {
		_, err := Answer(context.Background(), c.function, c.arguments)
		if err == nil || err.Error() != c.function+": "+c.want {
			t.Errorf("%s %v: got\n%v\nwant\n%s", c.function, c.arguments, err, c.want)
		}
	}
}

func TestNormalSentences(t *testing.T) {
	minutes := From{Value: 100.0, Origin: &Origin{Unit: "minutes"}}
	for _, c := range []struct {
		function  string
		arguments map[string]any
		want      string
	}{
		{"normal-probability", map[string]any{"mean": minutes, "sd": 15.0, "from": 85.0, "to": 115.0},
			"Under the normal distribution with mean 100 minutes and standard deviation 15 minutes, a value from 85 to 115 minutes has probability 0.6827, any other value 0.3173."},
		{"normal-probability", map[string]any{"to": 7.0},
			"Under the standard normal distribution, a value of at most 7 has probability 1 - 1.3e-12, any other value 1.28e-12."},
		{"normal-probability", map[string]any{"from": -2.0},
			"Under the standard normal distribution, a value from -2 upward has probability 0.9772, any other value 0.02275."},
		{"normal-quantile", map[string]any{"mean": 1e6, "probability": 0.025, "counted-from": "above"},
			"Under the normal distribution with mean 1000000 and standard deviation 1, a value is more than 1000001.9600 with probability 0.025."},
		{"standard-score", map[string]any{"value": 115.0, "mean": minutes, "sd": 15.0},
			"115 minutes lies 1 standard deviation above the mean of 100 minutes (standard deviation 15 minutes); " +
				"a smaller value has probability 0.8413, a larger one 0.1587 ((value - mean)/sd; tails of the normal distribution)."},
		{"normal-transform", map[string]any{"mean": 10.0, "sd": 3.0, "multiply": -2.0},
			"-2 times a quantity with mean 10 and standard deviation 3, plus 0, has mean -20.0 and standard deviation 6.0 " +
				"(multiply·mean + add and |multiply|·sd); it is normal if the quantity is."},
	} {
		got, _ := answer(t, c.function, c.arguments).Get("sentence")
		if text, _ := got.(string); strings.TrimSpace(text) != c.want {
			t.Errorf("%s: got\n%v\nwant\n%s", c.function, got, c.want)
		}
	}
}
