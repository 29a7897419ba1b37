package funcs

import (
	"context"
	"errors"
	"math"
	"testing"
)

// The mean of n draws from a population of variance v has variance v/n; the
// standard error of that variance over B draws is about v/n·√(2/B).
func TestSimulatedMeansHaveTheStandardErrorOfTheirLaw(t *testing.T) {
	for _, c := range []struct {
		name string
		args map[string]any
		want float64 // standard error of the mean, by hand
	}{
		{"coverage-check", map[string]any{"sample": []float64{1, 2, 1, 2, math.NaN()}, "n": 4, "checks": false}, 0.5 / 2},
		{"coverage-check", map[string]any{"sample": []float64{0, 0, 0, 4}, "checks": false}, math.Sqrt(3) / 2},
		{"population-coverage", map[string]any{"shape": "exponential", "n": 25}, 1.0 / 5},
		{"population-coverage", map[string]any{"shape": "bernoulli", "parameter": 0.2, "n": 16}, 0.4 / 4},
	} {
		out, err := Answer(context.Background(), c.name, c.args)
		if err != nil {
			t.Fatal(err)
		}
		means, err := SampleMeans(context.Background(), out, 5000)
		if err != nil {
			t.Fatal(err)
		}
		if math.Abs(means.StandardError/c.want-1) > 1e-12 {
			t.Errorf("%s %v: standard error %g, want %g", c.name, c.args, means.StandardError, c.want)
		}
		var squares float64
		for _, x := range means.Values {
			squares += x * x
		}
		if got := math.Sqrt(squares / float64(len(means.Values))); math.Abs(got/c.want-1) > 0.06 {
			t.Errorf("%s %v: the means spread by %g, want about %g", c.name, c.args, got, c.want)
		}
	}
}

func TestSimulatedMeansAreThoseThatTheCoverageCounted(t *testing.T) {
	// Two values: an interval from two equal draws has no width and misses, one
	// from two unequal draws has mean 0 and holds it.
	out, err := Answer(context.Background(), "coverage-check", map[string]any{"sample": []float64{1, 2}, "n": 2, "resamples": 1000, "checks": false})
	if err != nil {
		t.Fatal(err)
	}
	means, err := SampleMeans(context.Background(), out, 2000)
	if err != nil {
		t.Fatal(err)
	}
	held := 0
	for _, x := range means.Values {
		if x == 0 {
			held++
		}
	}
	if coverage, _ := out.Get("coverage"); len(means.Values) != 1000 || float64(held)/1000 != coverage {
		t.Errorf("%d of %d means are at the target, coverage %v", held, len(means.Values), coverage)
	}
}

func TestSampleMeansAsksForACoverage(t *testing.T) {
	out, err := Answer(context.Background(), "mean-interval", map[string]any{"sample": []float64{1, 2, 3}})
	if err != nil {
		t.Fatal(err)
	}
	if _, err := SampleMeans(context.Background(), out, 10); !errors.Is(err, ErrInternal) {
		t.Errorf("error %v", err)
	}
	out, err = Answer(context.Background(), "population-coverage", map[string]any{"shape": "cauchy", "resamples": 200})
	if err != nil {
		t.Fatal(err)
	}
	if means, err := SampleMeans(context.Background(), out, 10); err != nil || means.StandardError != 0 {
		t.Errorf("%+v, %v: a cauchy mean has no normal law", means, err)
	}
}
