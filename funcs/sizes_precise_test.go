package funcs

import (
	"math"
	"strconv"
	"strings"
	"testing"
)

// tailsOf is the direction of a test with one or two rejection tails.
func tailsOf(sides string) string {
	if sides == "1" {
		return above
	}
	return either
}

func number64(t *testing.T, r preciseRow, name string) float64 {
	t.Helper()
	return float(t, r.columns[name])
}

func whole(t *testing.T, r preciseRow, name string) int {
	t.Helper()
	n, err := strconv.Atoi(r.columns[name])
	if err != nil {
		t.Fatal(err)
	}
	return n
}

// Source: sample_size_half_width.csv, arithmetic at 60 digits. Its rows with the
// factor (N-n)/(N-1) belong to another definition of the standard error.
func TestPlansForAHalfWidthAreExact(t *testing.T) {
	for _, r := range preciseValues(t, "sample_size_half_width.csv") {
		if r.columns["fpc"] == "(N-n)/(N-1)" {
			continue
		}
		arguments := map[string]any{"sd": number64(t, r, "sd"), "confidence": number64(t, r, "conf")}
		if size := whole(t, r, "N"); size > 0 {
			arguments["population-size"] = size
		}
		if r.function == "achieved_half_width" {
			arguments["n"] = whole(t, r, "n")
			within(t, "mean-precision", answered(t, "mean-precision", arguments).float(t, "attained-half-width"), r.value, 1e-12)
			continue
		}
		arguments["half-width"] = number64(t, r, "half_width")
		if n := answered(t, "mean-precision-size", arguments).whole(t, "n"); float64(n) != r.value {
			t.Errorf("%v: n = %d, want %v", r.columns, n, r.value)
		}
	}
}

// Source: sample_size_t.csv, arithmetic at 60 digits.
func TestPlansForATTestAreExact(t *testing.T) {
	for _, r := range preciseValues(t, "sample_size_t.csv") {
		arguments := map[string]any{
			"difference": number64(t, r, "diff"), "significance": number64(t, r, "alpha"), "power": number64(t, r, "power"), "direction": tailsOf(r.columns["sides"]),
		}
		name := "mean-test-size"
		if r.columns["ratio"] != "" {
			name = "difference-test-size"
			arguments["first-sd"], arguments["allocation-ratio"], arguments["variances"] = number64(t, r, "sd"), number64(t, r, "ratio"), pooled
		} else {
			arguments["sd"] = number64(t, r, "sd")
		}
		out := answered(t, name, arguments)
		switch r.function {
		case "achieved_power_t_one_sample", "achieved_power_t_two_sample":
			within(t, r.function, out.float(t, "attained-power"), r.value, 1e-12)
		default:
			if n := out.whole(t, "n"); float64(n) != r.value {
				t.Errorf("%v: n = %d, want %v", r.columns, n, r.value)
			}
		}
		if m := r.columns["n2"]; m != "" && strconv.Itoa(out.whole(t, "second-n")) != m {
			t.Errorf("%v: second-n = %d, want %s", r.columns, out.whole(t, "second-n"), m)
		}
	}
}

// The design named in the catalogue's notes: n 5 and 20, sds 3 and 1, difference
// 4 has power 0.61867. Equal sds and equal groups must agree with the formula of
// the pooled test but for its degrees of freedom, so the two meet for large n.
func TestWelchPower(t *testing.T) {
	g := groupsTest{first: 3, second: 1, significance: 0.05, direction: either}
	if p := g.power(5, 20, 4); math.Abs(p-0.61867) > 5e-6 {
		t.Errorf("power %.8f, want 0.61867", p)
	}
}

// Source: t_power.csv, arithmetic at 60 digits.
func TestPowersOfTTestsAreExact(t *testing.T) {
	for _, r := range preciseValues(t, "t_power.csv") {
		arguments := map[string]any{"difference": number64(t, r, "diff"), "significance": number64(t, r, "alpha"), "direction": tailsOf(r.columns["sides"])}
		name := "mean-test-power"
		if r.function == "t_power_two_sample" {
			name = "difference-test-power"
			arguments["first-sd"], arguments["variances"] = number64(t, r, "sd"), pooled
			arguments["n"], arguments["second-n"] = whole(t, r, "n1"), whole(t, r, "n2")
		} else {
			arguments["sd"], arguments["n"] = number64(t, r, "sd"), whole(t, r, "n")
			within(t, "paired-test-power", answered(t, "paired-test-power", arguments).float(t, "attained-power"), r.value, 1e-12)
		}
		within(t, name, answered(t, name, arguments).float(t, "attained-power"), r.value, 1e-12)
	}
}

// Source: anova_power.csv, arithmetic at 60 digits.
func TestPowersOfSeveralMeansAreExact(t *testing.T) {
	for _, r := range preciseValues(t, "anova_power.csv") {
		var means []float64
		for _, text := range strings.Fields(r.columns["means"]) {
			means = append(means, float(t, text))
		}
		out := answered(t, "several-means-power", map[string]any{"means": means, "sd": number64(t, r, "sd"), "n": whole(t, r, "n_per_group"), "significance": number64(t, r, "alpha")})
		within(t, r.columns["means"], out.float(t, "attained-power"), r.value, 1e-12)
	}
}

// Source: equivalence.csv, arithmetic to 25 digits.
func TestPowersAndPlansOfEquivalenceAreExact(t *testing.T) {
	for _, r := range preciseValues(t, "equivalence.csv") {
		arguments := map[string]any{"sd": number64(t, r, "sd"), "difference": number64(t, r, "diff"), "significance": number64(t, r, "alpha"),
			"lower-margin": number64(t, r, "lower"), "upper-margin": number64(t, r, "upper")}
		switch r.function {
		case "equivalence_sample_size_per_group":
			arguments["power"] = number64(t, r, "power")
			if out := answered(t, "equivalence-size", arguments); float64(out.whole(t, "n")) != r.value || out.whole(t, "second-n") != out.whole(t, "n") {
				t.Errorf("%v: n = %d, want %v", r.columns, out.whole(t, "n"), r.value)
			}
			continue
		case "equivalence_power_two_sample":
			arguments["n"], arguments["second-n"] = whole(t, r, "n1"), whole(t, r, "n2")
		default:
			arguments["n"], arguments["design"] = whole(t, r, "n"), paired
			within(t, "paired", answered(t, "equivalence-power", arguments).float(t, "attained-power"), r.value, 1e-12)
			arguments["design"] = oneSample
		}
		within(t, r.function, answered(t, "equivalence-power", arguments).float(t, "attained-power"), r.value, 1e-12)
	}
}
