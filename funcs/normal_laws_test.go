package funcs

import (
	"context"
	"strings"
	"testing"
)

// lawArguments gives the degrees of freedom of a published row as inputs of the
// law that its quantity names.
func lawArguments(t *testing.T, p publishedRow, law string) map[string]any {
	t.Helper()
	if law == "f" {
		return map[string]any{"first-df": p.number(t, "df1"), "second-df": p.number(t, "df2")}
	}
	return map[string]any{"df": p.number(t, "df")}
}

// quantileBothWays checks a published lower quantile counted from below and,
// as its complement, from above.
func quantileBothWays(t *testing.T, p publishedRow, law string, probability float64) {
	t.Helper()
	arguments := lawArguments(t, p, law)
	arguments["probability"] = probability
	p.check(t, resultOf(t, answer(t, law+"-quantile", arguments), "value"))
	arguments["probability"], arguments["counted-from"] = 1-probability, "above"
	p.check(t, resultOf(t, answer(t, law+"-quantile", arguments), "value"))
}

func TestQuantilesReproduceThePublishedTables(t *testing.T) {
	for table, law := range map[string]string{"nist-t-0975": "t", "nist-chi2-upper": "chi-square", "nist-f-095": "f"} {
		for _, p := range publishedTable(t, table) {
			quantileBothWays(t, p, law, p.number(t, "p"))
		}
	}
	for _, p := range publishedTable(t, "gum-g2-t") {
		df := p.inputs["df"]
		if df == "inf" {
			df = Infinite
		}
		arguments := map[string]any{"df": df, "probability": (1 + p.number(t, "central_fraction")) / 2}
		p.check(t, resultOf(t, answer(t, "t-quantile", arguments), "value"))
	}
	for _, id := range []string{"gum-g41.t95_at_19_df", "gum-h1.t99_at_16_df"} {
		p := publishedExample(t, id)
		arguments := map[string]any{"df": p.number(t, "df"), "probability": (1 - p.number(t, "level")) / 2, "counted-from": "above"}
		p.check(t, resultOf(t, answer(t, "t-quantile", arguments), "value"))
	}
}

func TestQuantilesReproduceThoseOfWorkedExamples(t *testing.T) {
	laws := map[string]string{"t quantile": "t", "chi-square quantile": "chi-square", "F quantile": "f"}
	tested := 0
	for _, p := range publishedExamples(t, "mean_interval", "two_sample_mean", "anova", "homogeneity_of_variance", "variance_test",
		"variance_ratio", "goodness_of_fit", "one_sample_test", "sample_size_mean", "tolerance_interval", "proportion_test", "variance_interval") {
		for prefix, law := range laws {
			if strings.HasPrefix(p.quantity, prefix) {
				quantileBothWays(t, p, law, p.number(t, "p"))
				tested++
			}
		}
	}
	if tested < 21 {
		t.Errorf("only %d quantiles of worked examples were tested", tested)
	}
}

// High-precision values of testdata/references/numerics: student_t.csv,
// chi_square.csv and f.csv, through the functions a caller uses.
func TestLawsReachHighPrecision(t *testing.T) {
	const tolerance = 1e-13
	for _, c := range []struct {
		file, prefix, law, argument string
		parameters                  map[string]string // input: column
	}{
		{"student_t.csv", "student_t", "t", "t", map[string]string{"df": "df"}},
		{"chi_square.csv", "chi_square", "chi-square", "x", map[string]string{"df": "df"}},
		{"f.csv", "f", "f", "x", map[string]string{"first-df": "df1", "second-df": "df2"}},
	} {
		for _, r := range preciseValues(t, c.file) {
			arguments := map[string]any{}
			for input, column := range c.parameters {
				arguments[input] = r.arg(t, column)
			}
			switch strings.TrimPrefix(r.function, c.prefix) {
			case "_cdf":
				arguments["to"] = r.arg(t, c.argument)
				r.check(t, resultOf(t, answer(t, c.law+"-probability", arguments), "probability"), tolerance)
			case "_sf":
				arguments["from"] = r.arg(t, c.argument)
				r.check(t, resultOf(t, answer(t, c.law+"-probability", arguments), "probability"), tolerance)
			case "_quantile":
				arguments["probability"] = r.arg(t, "p")
				r.check(t, resultOf(t, answer(t, c.law+"-quantile", arguments), "value"), tolerance)
			case "_upper_quantile":
				arguments["probability"], arguments["counted-from"] = r.arg(t, "q"), "above"
				r.check(t, resultOf(t, answer(t, c.law+"-quantile", arguments), "value"), tolerance)
			default:
				t.Errorf("%s: unknown function %s", c.file, r.function)
			}
		}
	}
}

func TestProbabilityAndItsComplement(t *testing.T) {
	for _, c := range []struct {
		function  string
		arguments map[string]any
	}{
		{"normal-probability", map[string]any{"from": -1.0, "to": 3.0}},
		{"t-probability", map[string]any{"df": 3.5, "from": -1.0, "to": 30.0}},
		{"t-probability", map[string]any{"df": "infinite", "from": 2.0}},
		{"chi-square-probability", map[string]any{"df": 7.0, "from": 1.0, "to": 9.0}},
		{"chi-square-probability", map[string]any{"df": 7.0, "from": -4.0, "to": 9.0}},
		{"f-probability", map[string]any{"first-df": 3.0, "second-df": "infinite", "from": 0.1, "to": 2.0}},
		{"f-probability", map[string]any{"first-df": 3.0, "second-df": 12.0, "to": 2.0}},
	} {
		out := answer(t, c.function, c.arguments)
		inside, outside := resultOf(t, out, "probability"), resultOf(t, out, "probability-outside")
		within(t, c.function, inside+outside, 1, 1e-15)
		if !(inside > 0 && outside > 0) {
			t.Errorf("%s %v: %v and %v", c.function, c.arguments, inside, outside)
		}
	}
}

// t² with df is F with 1 and df; chi-square/df is F with df and infinitely many;
// t with infinitely many is normal.
func TestLawsAgreeWithOneAnother(t *testing.T) {
	for _, x := range []float64{1e-3, 0.7, 2.5, 40} {
		for _, df := range []float64{0.5, 3, 88, 1e6} {
			squared := answer(t, "f-probability", map[string]any{"first-df": 1.0, "second-df": df, "from": x * x})
			tail := answer(t, "t-probability", map[string]any{"df": df, "from": -x, "to": x})
			within(t, "t squared", resultOf(t, squared, "probability"), resultOf(t, tail, "probability-outside"), 1e-13)
			ratio := answer(t, "f-probability", map[string]any{"first-df": df, "second-df": "infinite", "from": x})
			chi := answer(t, "chi-square-probability", map[string]any{"df": df, "from": x * df})
			// x·df is rounded: half a unit of its last place moves the tail by up to x·df times that.
			within(t, "chi-square over df", resultOf(t, ratio, "probability"), resultOf(t, chi, "probability"), 1e-13+1e-16*x*df)
		}
		normal := answer(t, "normal-probability", map[string]any{"from": x})
		student := answer(t, "t-probability", map[string]any{"df": "infinite", "from": x})
		within(t, "normal", resultOf(t, student, "probability"), resultOf(t, normal, "probability"), 1e-14)
	}
}

func TestLawArgumentErrors(t *testing.T) {
	for _, c := range []struct {
		function  string
		arguments map[string]any
		want      string
	}{
		{"t-probability", map[string]any{"to": 1.0, "df": 0.0}, `df is 0, but must be greater than 0, or the text "infinite"`},
		{"t-quantile", map[string]any{"df": "many", "probability": 0.5}, `df is "many", but must be a number (greater than 0, or the text "infinite")`},
		{"chi-square-probability", map[string]any{"to": 1.0, "df": "infinite"}, `df is "infinite", but must be a number (greater than 0)`},
		{"f-quantile", map[string]any{"first-df": 2.0, "probability": 0.0},
			"second-df is missing; give degrees of freedom of the denominator\nf-quantile: probability is 0, but must be strictly between 0 and 1"},
		{"f-probability", map[string]any{"first-df": 2.0, "second-df": 3.0, "from": 5.0, "to": 1.0},
			"from is 5, but must not be greater than to (1); exchange the two"},
		{"t-probability", map[string]any{"df": 4.0}, "from is missing; give either from (and perhaps to), or to"},
	} {
		_, err := Answer(context.Background(), c.function, c.arguments)
		if err == nil || err.Error() != c.function+": "+c.want {
			t.Errorf("%s %v: got\n%v\nwant\n%s", c.function, c.arguments, err, c.want)
		}
	}
}

func TestLawSentences(t *testing.T) {
	for _, c := range []struct {
		function  string
		arguments map[string]any
		want      string
	}{
		{"t-quantile", map[string]any{"df": 10.0, "probability": 0.025, "counted-from": "above"},
			"Under Student's t distribution with 10 degrees of freedom, a value is more than 2.2281 with probability 0.025."},
		{"t-probability", map[string]any{"df": 1.0, "from": -1.0, "to": 1.0},
			"Under Student's t distribution with 1 degree of freedom, a value from -1 to 1 has probability 0.5, any other value 0.5."},
		{"f-probability", map[string]any{"first-df": 3.0, "second-df": "infinite", "from": 0.0},
			"Under the F distribution with 3 and infinite degrees of freedom, a value from 0 upward has probability 1, any other value 0."},
		{"chi-square-quantile", map[string]any{"df": 2.5, "probability": 0.5},
			"Under the chi-square distribution with 2.5 degrees of freedom, a value is at most 1.8738 with probability 0.5."},
	} {
		if got, _ := answer(t, c.function, c.arguments).Get("sentence"); got != c.want {
			t.Errorf("%s: got\n%v\nwant\n%s", c.function, got, c.want)
		}
	}
}

// A quantile that no double holds is refused, not given as infinite.
func TestAQuantileBeyondDoubles(t *testing.T) {
	out := answer(t, "t-quantile", map[string]any{"df": 0.01, "probability": 1e-10})
	refusedFor(t, out, "too-large-to-hold")
}
