package num

import (
	"math"
	"math/rand/v2"
	"testing"
)

// Against all differences laid out and sorted.
func TestPairwiseDifferenceIsTheKthSmallest(t *testing.T) {
	rng := rand.New(rand.NewPCG(5, 1))
	for range 40 {
		x, y := make([]float64, 1+rng.IntN(12)), make([]float64, 1+rng.IntN(12))
		for _, v := range [][]float64{x, y} {
			for i := range v {
				v[i] = float64(rng.IntN(20)-10) * 0.1 // ties, both signs and 0
			}
		}
		x, y = Sorted(x), Sorted(y)
		var all []float64
		for _, a := range x {
			for _, b := range y {
				all = append(all, a-b)
			}
		}
		all = Sorted(all)
		for k := range all {
			if got := PairwiseDifference(x, y, k+1); got != all[k] {
				t.Fatalf("x %v, y %v, k %d: %v, want %v", x, y, k+1, got, all[k])
			}
		}
	}
}

func TestPairwiseDifferenceAtTheEndsOfTheDoubles(t *testing.T) {
	tiny, huge := math.SmallestNonzeroFloat64, math.MaxFloat64
	for _, c := range []struct {
		x, y []float64
		k    int
		want float64
	}{
		{[]float64{tiny}, []float64{0}, 1, tiny},
		{[]float64{-tiny, tiny}, []float64{0}, 1, -tiny},
		{[]float64{-huge, huge}, []float64{0}, 2, huge},
		{[]float64{5}, []float64{5}, 1, 0},
	} {
		if got := PairwiseDifference(c.x, c.y, c.k); got != c.want {
			t.Errorf("x %v, y %v, k %d: %v, want %v", c.x, c.y, c.k, got, c.want)
		}
	}
	for _, k := range []int{0, 2} {
		if got := PairwiseDifference([]float64{1}, []float64{2}, k); !math.IsNaN(got) {
			t.Errorf("k %d of one difference: %v, want NaN", k, got)
		}
	}
}

func TestPairwiseDifferenceOfLongLists(t *testing.T) {
	n := 100_000
	x, y := make([]float64, n), make([]float64, n)
	for i := range n {
		x[i], y[i] = float64(i), float64(i)
	}
	// Differences i - j: d stands n - |d| times, so the middle pair is 0.
	if got := PairwiseDifference(x, y, n*n/2); got != 0 {
		t.Errorf("the middle difference is %v, want 0", got)
	}
	if got := PairwiseDifference(x, y, 3); got != float64(2-n) { // 1 + 2 differences: 1-n, 2-n twice
		t.Errorf("the third smallest difference is %v, want %v", got, 2-n)
	}
}
