package funcs

import (
	"context"
	"errors"
	"fmt"
	"maps"
	"slices"
	"strings"
	"testing"
)

// many are so many numbers in the input's domain, or groups of two values.
func many(in Input, n int) any {
	x := 1.0
	if !in.Domain.Contains(x) {
		x = in.Domain.Low + (in.Domain.High-in.Domain.Low)/2
	}
	if in.Kind == Samples {
		groups := make([]Group, n)
		for i := range groups {
			groups[i] = Group{fmt.Sprintf("group %d", i+1), []float64{x, x + float64(i%7) + 1}}
		}
		return groups
	}
	return List{Values: slices.Repeat([]float64{x}, n)}
}

// The bounds are those of the descriptors, so that a new one is held to itself.
func TestMoreThanTheMostIsNamed(t *testing.T) {
	bounded := 0
	for _, f := range All() {
		for _, in := range f.Inputs {
			if in.Most == 0 {
				if len(f.Table) > 0 && (in.Kind == Numbers || in.Kind == Samples) {
					t.Errorf("%s: %s makes rows without bound", f.Name, in.Name)
				}
				continue
			}
			bounded++
			beyond := func(n int) *ArgumentError {
				arguments := maps.Clone(f.Example.arguments())
				arguments[in.Name] = many(in, n)
				var wrong ArgumentErrors
				errors.As(f.Check(arguments), &wrong)
				for _, e := range wrong {
					if e.Argument == in.Name && strings.Contains(e.Reason, "may be at most") {
						return e
					}
				}
				return nil
			}
			if e := beyond(in.Most); e != nil {
				t.Errorf("%s: %v", f.Name, e)
			}
			if e := beyond(in.Most + 1); e == nil || e.Advice == "" || !strings.Contains(e.Got, fmt.Sprint(in.Most+1)) {
				t.Errorf("%s: %d of %s gives %v", f.Name, in.Most+1, in.Name, e)
			}
		}
	}
	if bounded == 0 {
		t.Error("no input has a bound")
	}
}

// As many groups as may be are worked out, whatever the method.
func TestTheMostIsWorkedOut(t *testing.T) {
	samplesOf := func(n int) any { return many(samples.Input, n) }
	for _, c := range []struct {
		function  string
		arguments map[string]any
		rows      int
	}{
		{"pairwise-differences", map[string]any{"samples": samplesOf(150)}, 11175},
		{"pairwise-differences", map[string]any{"samples": samplesOf(150), "variances": separate}, 11175},
		{"differences-from-control", map[string]any{"samples": samplesOf(250), "control": "group 1"}, 249},
		{"proportions-comparison", map[string]any{"successes": many(groupSuccesses.Input, 300), "ns": List{Values: slices.Repeat([]float64{3}, 300)}}, 44850},
		{"adjusted-p-values", map[string]any{"p-values": many(pValues.Input, 100_000)}, 100_000},
		{"normal-sum", map[string]any{"means": many(itemMeans.Input, 100_000), "sds": many(itemSDs.Input, 100_000)}, 100_000},
		{"stratified-size", map[string]any{"sizes": List{Values: slices.Repeat([]float64{90}, 10_000)}, "sds": many(sds.Input, 10_000), "half-width": 0.1}, 10_000},
		{"analysis-of-variance", map[string]any{"samples": samplesOf(10_000)}, 0},
	} {
		out, err := Answer(context.Background(), c.function, c.arguments)
		if err != nil {
			t.Errorf("%s: %v", c.function, err)
		} else if out.Status == StatusRefused || len(out.Rows) != c.rows {
			t.Errorf("%s: %v, %d rows, want %d: %v", c.function, out.Status, len(out.Rows), c.rows, out.Findings)
		}
	}
}

// Thirty numbers of values and no more are worked out together, and fifteen where
// the control is much smaller than a group.
func TestTooManyDifferentSizesAreRefused(t *testing.T) {
	answer := func(n, control int) *Outcome {
		sizes := List{Values: make([]float64, n+1)} // the control first
		for i := range sizes.Values {
			sizes.Values[i] = float64(40 + i)
		}
		sizes.Values[0] = float64(control)
		names := make([]string, n+1)
		for i := range names {
			names[i] = fmt.Sprintf("depot %d", i)
		}
		sizes.Names = names
		same := List{Values: slices.Repeat([]float64{2}, n+1)}
		out, err := Answer(context.Background(), "differences-from-control", map[string]any{"means": same, "sds": same, "ns": sizes, "control": "depot 0"})
		if err != nil {
			t.Fatal(err)
		}
		return out
	}
	for _, c := range []struct{ control, most int }{{40, 30}, {3, 15}} {
		if out := answer(c.most, c.control); out.Status == StatusRefused || len(out.Rows) != c.most {
			t.Errorf("%d sizes: %v", c.most, out.Findings)
		}
		out := answer(c.most+1, c.control)
		if out.Status != StatusRefused || out.Findings[0].Code != "too-many-sizes" || out.Findings[0].Input != "ns" {
			t.Errorf("%d sizes: %v", c.most+1, out.Findings)
		}
	}
}

// A list of names is matched to another in any order, and by name, however long.
func TestManyNamesAreMatched(t *testing.T) {
	const k = 10_000
	var ns, sds List
	for i := range k {
		sds.Names, sds.Values = append(sds.Names, fmt.Sprintf("depot %d", i)), append(sds.Values, float64(i%3+1))
		ns.Names, ns.Values = append(ns.Names, fmt.Sprintf("depot %d", k-1-i)), append(ns.Values, float64((k-1-i)%3+2))
	}
	out, err := Answer(context.Background(), "pooled-variance", map[string]any{"sds": sds, "ns": ns})
	if err != nil {
		t.Fatal(err)
	}
	// Σ(n-1)s² over Σ(n-1): (3334·1·1 + 3333·2·4 + 3333·3·9) / (3334 + 3333·2 + 3333·3).
	want := float64(3334+3333*8+3333*27) / float64(3334+3333*2+3333*3)
	within(t, "pooled-variance", resultOf(t, out, "pooled-variance"), want, 1e-14)
	ns.Names[7] = "elsewhere"
	_, err = Answer(context.Background(), "pooled-variance", map[string]any{"sds": sds, "ns": ns})
	if err == nil || !strings.Contains(err.Error(), `"elsewhere"`) {
		t.Errorf("got %v", err)
	}
}
