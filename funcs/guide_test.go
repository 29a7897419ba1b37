package funcs

import (
	"math"
	"os"
	"strings"
	"testing"

	"halfwidth/funcs/internal/num"
)

var sampleRange = &Function{
	Name:      "sample-range",
	Version:   1, // raised when the same inputs give other digits
	Summary:   "largest less smallest value",
	Inputs:    inputs(sample),                                                        // shared inputs live in inputs.go: one name, default and wording everywhere
	Results:   []Result{{"extent", Number, SameUnit, "largest less smallest value"}}, // `range` is a result that every function gives
	Citations: []string{"ISO 3534-1"},
	Example: Example{
		Label:     "three values",
		Arguments: []Argument{{"sample", []float64{3, 9, 5}}},
		Want:      []Argument{{"extent", 6.0}},
		Tolerance: 1e-15,
		Source:    "9 - 3",
	},
	compute: func(c *Call) error {
		values := num.Sorted(withoutGaps(sample.Of(c)))
		extent := values[len(values)-1] - values[0]
		c.set("extent", extent)
		c.method = "largest less smallest value"
		c.sentence = "The values lie within " + brief(extent) + " of each other."
		return nil
	},
}

// The function that DEVELOPERS.md adds as an example is the one above, line for
// line; it holds together and gives what it says.
func TestTheFunctionOfTheGuideWorks(t *testing.T) {
	literal := func(name string) string {
		data, err := os.ReadFile(name)
		if err != nil {
			t.Fatal(err)
		}
		_, text, found := strings.Cut(strings.ReplaceAll(string(data), "\r\n", "\n"), "\nvar sampleRange = ")
		text, _, ended := strings.Cut(text, "\n}\n")
		if !found || !ended {
			t.Fatalf("%s has no such function", name)
		}
		return text
	}
	if shown, here := literal("../DEVELOPERS.md"), literal("guide_test.go"); shown != here {
		t.Errorf("DEVELOPERS.md shows\n%s\nand here stands\n%s", shown, here)
	}
	if err := sampleRange.validate(); err != nil {
		t.Fatal(err)
	}
	out, err := sampleRange.Answer(t.Context(), sampleRange.Example.arguments())
	if err != nil {
		t.Fatal(err)
	}
	for _, want := range sampleRange.Example.Want {
		got, ok := out.Get(want.Name)
		sampleRange.Example.compare(t, sampleRange.Name, got, ok, want)
	}
	// Largest less smallest: -1 to 4 with a gap between is 5, one value is 0.
	for want, values := range map[float64][]float64{5: {4, math.NaN(), -1}, 0: {7}} {
		if out, err = sampleRange.Answer(t.Context(), map[string]any{"sample": values}); err != nil || out.results["extent"] != want {
			t.Errorf("%v: %v (%v)", values, out, err)
		}
	}
	for name, values := range map[string][]float64{"no value": {}, "gaps alone": {math.NaN()}} {
		if out, err := sampleRange.Answer(t.Context(), map[string]any{"sample": values}); err == nil && out.Status != StatusRefused || err != nil && strings.Contains(err.Error(), "panic") {
			t.Errorf("%s: %v (%v)", name, out, err)
		}
	}
}
