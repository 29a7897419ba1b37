package num

import (
	"fmt"
	"math"
	"math/rand/v2"
	"slices"
	"testing"
)

// lists are lists of many shapes, some of them unlike what a regular part of
// them shows.
func lists() map[string][]float64 {
	rng := rand.New(rand.NewPCG(3, 4))
	out := map[string][]float64{}
	add := func(name string, n int, at func(i int) float64) {
		v := make([]float64, n)
		for i := range v {
			v[i] = at(i)
		}
		out[fmt.Sprintf("%s of %d", name, n)] = v
	}
	for _, n := range []int{1, 2, 3, 10, 11, fewFrom - 1, fewFrom, fewFrom + 1, 50_000, 50_001} {
		add("normal", n, func(int) float64 { return rng.NormFloat64() })
		add("ascending", n, func(i int) float64 { return float64(i) })
		add("alike", n, func(int) float64 { return 7 })
		add("coarse", n, func(int) float64 { return float64(rng.IntN(3)) })
		add("heavy", n, func(int) float64 { return 1 / rng.Float64() })
	}
	// Periods of which a part taken at equal steps sees only one side.
	for step := 30; step < 50; step++ {
		add(fmt.Sprintf("period %d", step), 50_000, func(i int) float64 {
			if i%step == 0 {
				return -100
			}
			return float64(i%7) + rng.Float64()
		})
	}
	return out
}

func TestMedianAndFarthestAsOfTheSortedList(t *testing.T) {
	for name, v := range lists() {
		before := slices.Clone(v)
		if got, want := MedianIn(v), Median(Sorted(v)); got != want {
			t.Errorf("%s: the median is %v, want %v", name, got, want)
		}
		centre := MedianIn(v)
		distances := make([]float64, len(v))
		for i, x := range v {
			distances[i] = math.Abs(x - centre)
		}
		slices.Sort(distances)
		for _, k := range []int{1, min(len(v), 10), min(len(v), int(math.Sqrt(float64(len(v))))+1), len(v)} {
			if got := Farthest(v, centre, k); !slices.Equal(got, distances[len(v)-k:]) {
				t.Errorf("%s: other %d farthest values", name, k)
			}
		}
		if !slices.Equal(v, before) {
			t.Errorf("%s was rearranged", name)
		}
	}
}
