package funcs

import (
	"bytes"
	"context"
	"crypto/sha256"
	"errors"
	"math"
	"slices"
	"strings"
	"testing"
)

// answer evaluates a function and fails the test on an error.
func answer(t *testing.T, name string, arguments map[string]any) *Outcome {
	t.Helper()
	out, err := Answer(context.Background(), name, arguments)
	if err != nil {
		t.Fatalf("%s: %v", name, err)
	}
	return out
}

func TestEveryBadArgumentIsReportedAtOnceInCatalogueOrder(t *testing.T) {
	_, err := Answer(context.Background(), "mean-interval", map[string]any{
		"confidence": 95.0, "mean": 1.0, "sd": -1.0, "n": 1, "smple": 3.0, "direction": "abov", "checks": "perhaps",
	})
	want := []string{
		"sd is -1, but must be 0 or more",
		"n is 1, but must be a whole number, 2 or more",
		"confidence is 95, but must be strictly between 0 and 1; write 95% or 0.95",
		`direction is "abov", but must be one of its choices; did you mean "above"? The choices are either, above and below`,
		`checks is "perhaps", but must be yes or no; write yes or no`,
		`smple is no input of mean-interval; did you mean "sample"?`,
	}
	var all ArgumentErrors
	if !errors.As(err, &all) || !errors.Is(err, ErrArgument) {
		t.Fatalf("got %v, want ArgumentErrors", err)
	}
	var got []string
	for _, e := range all {
		got = append(got, e.Error())
	}
	if strings.Join(got, "\n") != strings.Join(want, "\n") {
		t.Errorf("got\n%s\nwant\n%s", strings.Join(got, "\n"), strings.Join(want, "\n"))
	}
}

func TestAlternativesMustBeGivenOnceAndWhole(t *testing.T) {
	five := []float64{1, 2, 3, 4, 6}
	for _, c := range []struct {
		name      string
		arguments map[string]any
		want      string // of the error; "" where the call is right
	}{
		{"the sample", map[string]any{"sample": five}, ""},
		{"the summary", map[string]any{"mean": 1.0, "sd": 1.0, "n": 3}, ""},
		{"a known sd stands for sd", map[string]any{"mean": 1.0, "known-sd": 1.0, "n": 3}, ""},
		{"both", map[string]any{"sample": five, "sd": 1.0}, "sd cannot be given together with sample; give either sample, or mean with sd and n"},
		{"half of one", map[string]any{"mean": 1.0, "n": 3}, "sd is missing; with mean and n give sd too"},
		{"neither", nil, "sample is missing; give either sample, or mean with sd and n"},
	} {
		_, err := Answer(context.Background(), "mean-interval", c.arguments)
		switch {
		case c.want == "" && err != nil:
			t.Errorf("%s: %v", c.name, err)
		case c.want != "" && (err == nil || !strings.Contains(err.Error(), c.want)):
			t.Errorf("%s: got %v, want %s", c.name, err, c.want)
		}
	}
}

func TestASampleIsChecked(t *testing.T) {
	for _, c := range []struct {
		values []float64
		want   string
	}{
		{[]float64{}, "sample holds no number"},
		{[]float64{math.NaN()}, "sample holds no number"},
		{[]float64{1, math.Inf(1)}, "sample, value 2 is +Inf, but must be a finite number"},
	} {
		_, err := Answer(context.Background(), "mean-interval", map[string]any{"sample": c.values})
		if err == nil || !strings.Contains(err.Error(), c.want) {
			t.Errorf("%v: got %v, want %s", c.values, err, c.want)
		}
	}
}

func TestARefusalIsAnOutcomeWithoutResults(t *testing.T) {
	for _, c := range []struct {
		values []float64
		code   string
	}{
		{[]float64{5}, "few-values"},
		{[]float64{5, 5, 5}, "no-spread"},
		{[]float64{1e308, -1e308, 1.5e308}, "too-large-to-hold"},
	} {
		out := answer(t, "mean-interval", map[string]any{"sample": c.values})
		if out.Status != StatusRefused || out.Results() != nil || out.Findings[0].Code != c.code {
			t.Errorf("%v: status %s, results %v, findings %v; want a refusal by %s", c.values, out.Status, out.Results(), out.Findings, c.code)
		}
		if note, _ := out.Get("note"); note == "" {
			t.Errorf("%v: a refusal without its reason in the note", c.values)
		}
	}
}

func TestResultsBeyondADoubleAreNamedInCatalogueOrder(t *testing.T) {
	for range 20 { // a map's order would show
		out := answer(t, "analysis-of-variance", map[string]any{"samples": []Group{{"a", []float64{-1e300, 1e300}}, {"b", []float64{0, 1e300}}}})
		var named []string
		for _, f := range out.Findings {
			if f.Code == "too-large-to-hold" {
				named = append(named, strings.Fields(f.Message)[1])
			}
		}
		want := []string{"f", "p-value", "sum-squares-between", "sum-squares-within", "mean-square-between", "mean-square-within", "r-squared", "residual-sd"}
		if !slices.Equal(named, want) {
			t.Fatalf("named %v, want %v", named, want)
		}
	}
}

func TestAnUnlikelyConfidenceIsPointedOut(t *testing.T) {
	out := answer(t, "mean-interval", map[string]any{"mean": 1.0, "sd": 1.0, "n": 9, "confidence": 0.05})
	if out.Status != StatusCaution || !strings.Contains(out.Findings[0].Message, "0.05 is a 5% interval; did you mean 95%?") {
		t.Errorf("got %s %v", out.Status, out.Findings)
	}
}

func TestAPanicInAComputationIsAnInternalError(t *testing.T) {
	f := *meanInterval
	f.compute = func(*Call) error { panic("our mistake") }
	_, err := f.Answer(context.Background(), map[string]any{"sample": []float64{1, 2}})
	if !errors.Is(err, ErrInternal) {
		t.Errorf("got %v, want an internal error", err)
	}
}

// The digits were computed from the documented byte layout by an independent
// program (SHA-256 of Python's hashlib over the bytes written out by hand).
func TestFingerprintFollowsTheDocumentedBytes(t *testing.T) {
	out := answer(t, "normal-transform", map[string]any{"mean": math.Copysign(0, -1), "sd": 2.0, "multiply": 3.0})
	if got, _ := out.Get("fingerprint"); got != "cd61f768e731302a" {
		t.Errorf("got %v", got)
	}
}

func TestLongListsEnterTheFingerprintNumberByNumber(t *testing.T) {
	for _, n := range []int{0, 1, 127, 128, 129, 2000} {
		whole, single := &digest{Hash: sha256.New()}, &digest{Hash: sha256.New()}
		v := make([]float64, n)
		for i := range v {
			v[i] = []float64{float64(i) / 7, math.NaN(), math.Copysign(0, -1)}[i%3]
		}
		whole.numbers(v)
		single.length(n)
		for _, x := range v {
			single.number(x)
		}
		if !bytes.Equal(whole.Sum(nil), single.Sum(nil)) {
			t.Errorf("a list of %d numbers has another fingerprint than its numbers", n)
		}
	}
}

func TestFingerprintTellsInputsApart(t *testing.T) {
	print := func(arguments map[string]any) any {
		v, _ := answer(t, "mean-interval", arguments).Get("fingerprint")
		return v
	}
	sample := map[string]any{"sample": []float64{1, 2, 3, 5, 9}}
	same := map[string]any{"sample": []float64{1, 2, 3, 5, 9}, "confidence": 0.95, "checks": true}
	gap := map[string]any{"sample": []float64{1, 2, math.NaN(), 3, 5, 9}}
	other := map[string]any{"sample": []float64{1, 2, 3, 5, 9}, "confidence": 0.9}
	if print(sample) != print(same) {
		t.Error("a default given and a default left out differ")
	}
	if print(sample) == print(gap) || print(sample) == print(other) {
		t.Error("other inputs have the same fingerprint")
	}
}

func TestNumbersInSentencesRoundTheExactDecimal(t *testing.T) {
	for _, c := range []struct {
		x     float64
		place int
		want  string
	}{
		{0.125, -2, "0.12"}, {0.375, -2, "0.38"}, // exact ties go to even
		{0.15, -1, "0.1"}, {0.25, -1, "0.2"}, // 0.15 is a little less than 0.15
		{-0.04, -1, "0.0"},
		{45678, 2, "45700"}, {250, 2, "200"}, {350, 2, "400"}, {-350, 2, "-400"}, {49, 2, "0"},
	} {
		if got := toPlace(c.x, c.place); got != c.want {
			t.Errorf("toPlace(%v, %d) = %q, want %q", c.x, c.place, got, c.want)
		}
	}
	// 0.0995 is 0.09950000000000000622…, so 0.10 to two digits, its last place the hundredth.
	if got := lastPlace(0.0995, 1); got != -2 {
		t.Errorf("lastPlace(0.0995) = %d, want -2", got)
	}
}

func TestDomainsWordThemselves(t *testing.T) {
	for _, c := range []struct {
		d    Domain
		want string
	}{
		{anyNumber, "any number"}, {positive, "greater than 0"}, {nonNegative, "0 or more"},
		{betweenZeroAndOne, "strictly between 0 and 1"}, {fromZeroToOne, "from 0 to 1"},
		{wholeFrom(2), "a whole number, 2 or more"},
		{Domain{Low: 0, High: 1, HighOpen: true}, "at least 0, less than 1"},
	} {
		if got := c.d.String(); got != c.want {
			t.Errorf("got %q, want %q", got, c.want)
		}
	}
	if positive.Contains(math.NaN()) || anyNumber.Contains(math.NaN()) {
		t.Error("NaN lies in no domain")
	}
}
