package funcs

import (
	"fmt"
	"math"
	"math/rand/v2"
	"slices"
	"testing"

	"halfwidth/funcs/internal/num"
)

// Whole shares of n are cut whole, whatever the last bit of the product.
func TestTrimmingCutsTheFloor(t *testing.T) {
	for _, c := range []struct {
		n     int
		share float64
		g     int
	}{{15, 0.2, 3}, {10, 0.3, 3}, {10, 0.29, 2}, {9, 0.2, 1}, {4, 0.2, 0}, {7, 0, 0}, {1000, 0.057, 57}, {29, 1.0 / 29, 1}} {
		out := answer(t, "trimmed-mean-interval", map[string]any{"sample": counting(c.n), "trimmed-each-end": c.share})
		within(t, fmt.Sprint("df of ", c), resultOf(t, out, "df"), float64(c.n-2*c.g-1), 0)
		within(t, "mean", resultOf(t, out, "trimmed-mean"), float64(c.n+1)/2, 0)
	}
}

func TestTrimmingNothingIsTheMeanInterval(t *testing.T) {
	for _, d := range everyDirection {
		a := answer(t, "trimmed-mean-interval", map[string]any{"sample": sixTimes, "trimmed-each-end": 0.0, "direction": d})
		b := answer(t, "mean-interval", map[string]any{"sample": sixTimes, "direction": d})
		for _, r := range [][2]string{{"trimmed-mean", "mean"}, {"lower", "lower"}, {"upper", "upper"}, {"df", "df"}} {
			if v, ok := b.Get(r[1]); ok {
				within(t, r[0], resultOf(t, a, r[0]), v.(float64), 1e-14)
			}
		}
	}
}

func TestTrimmedMeanDoesNotFeelTheEnds(t *testing.T) {
	values := counting(10)
	far := slices.Clone(values)
	far[9], far[0] = 1e9, -1e9
	sameResults(t, answer(t, "trimmed-mean-interval", map[string]any{"sample": values}), answer(t, "trimmed-mean-interval", map[string]any{"sample": far}))
}

func TestTrimmedMeanRefusals(t *testing.T) {
	for _, c := range []struct {
		values []float64
		share  float64
		code   string
		note   string
	}{
		{[]float64{1, 2, 3}, 0.4, "few-values", "Only 1 value left after trimming 1 at each end, but at least 2 are needed; measure more or trim less."},
		{[]float64{5}, 0.2, "few-values", "Only 1 value left after trimming 0 at each end, but at least 2 are needed; measure more or trim less."},
		{[]float64{1, 2}, math.Nextafter(0.5, 0), "few-values", "Only 0 values left after trimming 1 at each end, but at least 2 are needed; measure more or trim less."},
		{[]float64{1, 7, 7, 7, 9}, 0.2, "no-spread", "The values kept are all equal, so there is neither a spread nor an interval; trim less."},
	} {
		out := answer(t, "trimmed-mean-interval", map[string]any{"sample": c.values, "trimmed-each-end": c.share})
		refusedFor(t, out, c.code)
		if Note(out.Findings) != c.note {
			t.Errorf("got %s", Note(out.Findings))
		}
	}
	refuses(t, "trimmed-mean-interval", map[string]any{"sample": sixTimes, "trimmed-each-end": 0.5}, "trimmed-each-end is 0.5, but must be at least 0, less than 0.5")
}

// The jackknife in one pass against leaving out each value and computing anew.
func TestLeavingOneOutIsComputingAnew(t *testing.T) {
	rng := rand.New(rand.NewPCG(22, 1))
	for _, of := range []string{"mean", "median", "sd", "trimmed-mean"} {
		for n := 3; n < 30; n++ {
			sorted := num.Sorted(noise(rng, n, 5, 2))
			c := &Call{args: map[string]From{"of": {Value: of}, "trimmed-each-end": {Value: 0.15}}}
			q, err := c.bootstrapQuantity(n)
			if err != nil {
				t.Fatal(err)
			}
			anew := make([]float64, n)
			for i := range sorted {
				anew[i] = q.of(slices.Delete(slices.Clone(sorted), i, i+1))
			}
			got := q.leavingOneOut(sorted)
			shift := num.Mean(anew) - num.Mean(got) // only differences count
			for i := range got {
				if d := math.Abs(got[i] + shift - anew[i]); d > 1e-13 {
					t.Errorf("%s, n = %d, without value %d: off by %v", of, n, i, d)
				}
			}
			within(t, of+" acceleration", acceleration(got)+1, acceleration(anew)+1, 1e-12)
		}
	}
}
