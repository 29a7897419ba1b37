package funcs

import (
	"context"
	"math"
	"testing"
)

// Harter 1960, upper 5% points, through the quantile and back.
func TestStudentizedRangeReproducesThePublishedTable(t *testing.T) {
	for _, p := range publishedTable(t, "studentized-range-095") {
		df := p.inputs["df"]
		if df == "inf" {
			df = Infinite
		}
		arguments := map[string]any{"groups": p.number(t, "groups"), "df": df, "probability": p.number(t, "p")}
		p.check(t, resultOf(t, answer(t, "studentized-range-quantile", arguments), "value"))
	}
}

// High-precision values of testdata/references/numerics/studentized_range.csv.
func TestStudentizedRangeReachesHighPrecision(t *testing.T) {
	for _, r := range preciseValues(t, "studentized_range.csv") {
		arguments := map[string]any{"groups": r.arg(t, "k"), "df": r.degrees(t, "df")}
		switch r.function {
		case "studentized_range_cdf":
			arguments["to"] = r.arg(t, "q")
			r.check(t, resultOf(t, answer(t, "studentized-range-probability", arguments), "probability"), 1e-13)
		case "studentized_range_sf":
			arguments["from"] = r.arg(t, "q")
			r.check(t, resultOf(t, answer(t, "studentized-range-probability", arguments), "probability"), 1e-13)
		case "studentized_range_quantile":
			arguments["probability"] = r.arg(t, "p")
			r.check(t, resultOf(t, answer(t, "studentized-range-quantile", arguments), "value"), 1e-11)
		default:
			t.Errorf("unknown function %s", r.function)
		}
	}
}

// The range of two means is √2 times |t|.
func TestTheRangeOfTwoIsStudents(t *testing.T) {
	for _, df := range []any{1.0, 5.5, 60.0, Infinite} {
		for _, x := range []float64{0.1, 1.5, 6, 25} {
			of2 := answer(t, "studentized-range-probability", map[string]any{"groups": 2, "df": df, "to": x * math.Sqrt2})
			student := answer(t, "t-probability", map[string]any{"df": df, "from": -x, "to": x})
			for _, name := range []string{"probability", "probability-outside"} {
				// x·√2 is rounded, which moves a normal tail by up to x² times as much.
				within(t, name, resultOf(t, of2, name), resultOf(t, student, name), 1e-13+2e-16*x*x)
			}
		}
	}
}

// Very many groups: the quantile found there leaves 5% above it by mpmath's
// quadrature of the defining integral (40 digits).
func TestStudentizedRangeOfManyGroups(t *testing.T) {
	for groups, want := range map[int]float64{1000: 7.369627485138347, 100000: 9.461408445461535} {
		out := answer(t, "studentized-range-quantile", map[string]any{"groups": groups, "df": "infinite", "probability": 0.05, "counted-from": "above"})
		within(t, "upper 5% point", resultOf(t, out, "value"), want, 1e-13)
	}
}

func TestStudentizedRangeArgumentErrors(t *testing.T) {
	for _, c := range []struct {
		function  string
		arguments map[string]any
		want      string
	}{
		{"studentized-range-probability", map[string]any{"groups": 1, "df": 5.0, "to": 3.0}, "groups is 1, but must be a whole number, from 2 to 100000"},
		{"studentized-range-quantile", map[string]any{"groups": 3.5, "df": 5.0, "probability": 0.5}, "groups is 3.5, but must be a whole number, from 2 to 100000"},
		{"studentized-range-quantile", map[string]any{"groups": 3, "df": 0.0, "probability": 0.5}, `df is 0, but must be 0.5 or more, or the text "infinite"`},
		{"studentized-range-probability", map[string]any{"groups": 3, "df": 5.0, "from": 3.0, "to": 1.0}, "from is 3, but must not be greater than to (1); exchange the two"},
	} {
		_, err := Answer(context.Background(), c.function, c.arguments)
		if err == nil || err.Error() != c.function+": "+c.want {
			t.Errorf("%s %v: got\n%v\nwant\n%s", c.function, c.arguments, err, c.want)
		}
	}
}

func TestStudentizedRangeSentence(t *testing.T) {
	out := answer(t, "studentized-range-quantile", map[string]any{"groups": 4, "df": "infinite", "probability": 0.05, "counted-from": "above"})
	want := "Under the studentized range of 4 groups with infinite degrees of freedom, a value is more than 3.6332 with probability 0.05."
	if got, _ := out.Get("sentence"); got != want { // 3.63 in Harter's table
		t.Errorf("got  %v\nwant %s", got, want)
	}
}
