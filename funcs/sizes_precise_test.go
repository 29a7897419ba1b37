package funcs

import (
	"math"
	"strconv"
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
