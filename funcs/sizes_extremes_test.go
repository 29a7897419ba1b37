package funcs

import (
	"context"
	"errors"
	"math/rand/v2"
	"testing"
)

// Whatever is asked, a plan is an outcome or an error about an argument: never a
// panic, never a result that is not finite.
func TestPlansStandExtremeArguments(t *testing.T) {
	random := rand.New(rand.NewPCG(13, 1))
	extremes := map[Kind][]any{
		Number:  {1e-300, 1e-9, 1e-3, 0.5, 0.999999999999, 1.0, 3.0, 1e9, 1e300, -1.0, -1e300, 0.0},
		Level:   {1e-300, 1e-9, 0.05, 0.5, 0.95, 0.999999999999},
		Count:   {0, 1, 2, 3, 17, 1000, 1_000_000_000, largestCount},
		Numbers: {List{Values: []float64{1, 1e-300, 5}}, List{Values: []float64{1e300, 3, 1}}, List{Values: []float64{2, 40, 1e12}}, List{Values: []float64{7, 7, 7}}},
		Sample:  {[]float64{1, 2, 4, 9}, []float64{1e300, -1e300, 5}, []float64{3}, []float64{2, 2}},
		YesNo:   {true, false},
	}
	answers := 0
	for _, f := range sizesFamily {
		for range 150 {
			arguments := f.Example.arguments()
			for range 1 + random.IntN(3) {
				in := f.Inputs[random.IntN(len(f.Inputs))]
				values := extremes[in.Kind]
				if in.Kind == Choice {
					arguments[in.Name] = in.Choices[random.IntN(len(in.Choices))]
				} else {
					arguments[in.Name] = values[random.IntN(len(values))]
				}
			}
			out, err := f.Answer(context.Background(), arguments)
			var wrong ArgumentErrors
			switch {
			case errors.As(err, &wrong):
			case err != nil:
				t.Errorf("%s(%v): %v", f.Name, arguments, err)
			default:
				answers++
				checkDeclared(t, f, out)
			}
		}
	}
	if answers < 1000 {
		t.Errorf("only %d answers", answers)
	}
}

func TestAPlanStopsWhenTheCallerGivesUp(t *testing.T) {
	ctx, cancel := context.WithCancel(context.Background())
	cancel()
	for _, name := range []string{"mean-test-size", "difference-test-size", "proportion-test-size", "proportion-difference-size", "difference-test-detectable"} {
		f, err := Lookup(name)
		if err != nil {
			t.Fatal(err)
		}
		if _, err := f.Answer(ctx, f.Example.arguments()); !errors.Is(err, context.Canceled) {
			t.Errorf("%s: %v, want the context's error", name, err)
		}
	}
}
