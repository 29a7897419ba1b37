package funcs

import (
	"context"
	"math"
	"strings"
	"testing"
)

// High-precision values of testdata/references/numerics: noncentral_t.csv,
// noncentral_chi_square.csv and noncentral_f.csv.
func TestNoncentralLawsReachHighPrecision(t *testing.T) {
	for _, c := range []struct {
		file, function, argument string
		parameters               map[string]string // input: column
	}{
		{"noncentral_t.csv", "noncentral-t-probability", "t", map[string]string{"df": "df", "noncentrality": "delta"}},
		{"noncentral_chi_square.csv", "noncentral-chi-square-probability", "x", map[string]string{"df": "df", "noncentrality": "lambda"}},
		{"noncentral_f.csv", "noncentral-f-probability", "x", map[string]string{"first-df": "df1", "second-df": "df2", "noncentrality": "lambda"}},
	} {
		for _, r := range preciseValues(t, c.file) {
			arguments := map[string]any{}
			for input, column := range c.parameters {
				arguments[input] = r.arg(t, column)
			}
			inside, outside := "to", "probability-outside"
			if strings.HasSuffix(r.function, "_sf") {
				inside = "from"
			}
			arguments[inside] = r.arg(t, c.argument)
			r.check(t, resultOf(t, answer(t, c.function, arguments), "probability"), 1e-13)
			// The same tail as what lies outside its other side.
			delete(arguments, inside)
			arguments[map[string]string{"to": "from", "from": "to"}[inside]] = r.arg(t, c.argument)
			r.check(t, resultOf(t, answer(t, c.function, arguments), outside), 1e-13)
		}
	}
}

// e-Handbook 7.2.6.3: the noncentral t quantile printed for n = 43 leaves the
// confidence below it, to its last printed place.
func TestNoncentralTReproducesThePublishedQuantile(t *testing.T) {
	p := publishedExample(t, "nist-prc-263.noncentral_t_quantile")
	value, unit := printed(t, p.text)
	n := p.number(t, "n")
	z := resultOf(t, answer(t, "normal-quantile", map[string]any{"probability": p.number(t, "coverage")}), "value")
	below := func(x float64) float64 {
		out := answer(t, "noncentral-t-probability", map[string]any{"df": n - 1, "noncentrality": z * math.Sqrt(n), "to": x})
		return resultOf(t, out, "probability")
	}
	if confidence := p.number(t, "confidence"); !(below(value-unit/2) < confidence && confidence < below(value+unit/2)) {
		t.Errorf("%s: %v is not between %v and %v", p.id, confidence, below(value-unit/2), below(value+unit/2))
	}
}

// One degree of freedom is the square of one normal variable; noncentrality 0 is
// the central law; infinite degrees of freedom of t are a shifted normal.
func TestNoncentralLawsAtTheirLimits(t *testing.T) {
	for _, lambda := range []float64{0.04, 1, 9, 49} {
		for _, x := range []float64{0.25, 4, 60.25} {
			square := answer(t, "noncentral-chi-square-probability", map[string]any{"df": 1.0, "noncentrality": lambda, "to": x})
			root, shift := math.Sqrt(x), math.Sqrt(lambda)
			normal := answer(t, "normal-probability", map[string]any{"mean": shift, "from": -root, "to": root})
			for _, name := range []string{"probability", "probability-outside"} {
				within(t, "squared normal", resultOf(t, square, name), resultOf(t, normal, name), 1e-13)
			}
		}
	}
	for _, x := range []float64{0.3, 2, 11} {
		for function, parameters := range map[string]map[string]any{
			"chi-square-probability": {"df": 3.5}, "f-probability": {"first-df": 3.0, "second-df": 8.5}, "t-probability": {"df": 6.0},
		} {
			central, noncentral := map[string]any{"from": x}, map[string]any{"from": x, "noncentrality": 0.0}
			for name, value := range parameters {
				central[name], noncentral[name] = value, value
			}
			within(t, function, resultOf(t, answer(t, "noncentral-"+function, noncentral), "probability"),
				resultOf(t, answer(t, function, central), "probability"), 1e-13)
		}
		shifted := answer(t, "noncentral-t-probability", map[string]any{"df": "infinite", "noncentrality": 2.5, "from": x})
		normal := answer(t, "normal-probability", map[string]any{"mean": 2.5, "from": x})
		within(t, "shifted normal", resultOf(t, shifted, "probability"), resultOf(t, normal, "probability"), 1e-13)
		ratio := answer(t, "noncentral-f-probability", map[string]any{"first-df": 4.0, "second-df": "infinite", "noncentrality": 3.0, "from": x})
		sum := answer(t, "noncentral-chi-square-probability", map[string]any{"df": 4.0, "noncentrality": 3.0, "from": 4 * x})
		within(t, "infinite second-df", resultOf(t, ratio, "probability"), resultOf(t, sum, "probability"), 1e-13)
	}
}

// T with noncentrality -d is -T with noncentrality d.
func TestNoncentralTMirrors(t *testing.T) {
	a := answer(t, "noncentral-t-probability", map[string]any{"df": 7.0, "noncentrality": -3.0, "from": -5.0, "to": -1.0})
	b := answer(t, "noncentral-t-probability", map[string]any{"df": 7.0, "noncentrality": 3.0, "from": 1.0, "to": 5.0})
	for _, name := range []string{"probability", "probability-outside"} {
		within(t, name, resultOf(t, a, name), resultOf(t, b, name), 1e-14)
	}
}

func TestNoncentralArgumentErrors(t *testing.T) {
	for _, c := range []struct {
		function  string
		arguments map[string]any
		want      string
	}{
		{"noncentral-chi-square-probability", map[string]any{"df": 2.0, "noncentrality": -1.0, "to": 3.0}, "noncentrality is -1, but must be 0 or more"},
		{"noncentral-t-probability", map[string]any{"df": 2.0, "to": 3.0},
			"noncentrality is missing; give the mean of the normal variable above the line, in T = (Z + noncentrality)/√(χ²/df)"},
		{"noncentral-f-probability", map[string]any{"first-df": 2.0, "second-df": 3.0, "noncentrality": 1.0},
			"from is missing; give either from (and perhaps to), or to"},
	} {
		_, err := Answer(context.Background(), c.function, c.arguments)
		if err == nil || err.Error() != c.function+": "+c.want {
			t.Errorf("%s %v: got\n%v\nwant\n%s", c.function, c.arguments, err, c.want)
		}
	}
}

func TestNoncentralSentence(t *testing.T) {
	out := answer(t, "noncentral-f-probability", map[string]any{"first-df": 2.0, "second-df": 24.0, "noncentrality": 9.0, "from": 3.4})
	want := "Under the noncentral F distribution with 2 and 24 degrees of freedom and noncentrality 9, a value from 3.4 upward has probability 0.7137, any other value 0.2863."
	if got, _ := out.Get("sentence"); got != want {
		t.Errorf("got  %v\nwant %s", got, want)
	}
}
