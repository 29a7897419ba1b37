package num

import (
	"math"
	"math/rand/v2"
	"slices"
	"testing"
)

func TestRanksShareTies(t *testing.T) {
	ranks, ties := Ranks([]float64{3, 1, 3, 2, 3, 1, math.Inf(1), math.Copysign(0, -1), 0})
	if want := []float64{7, 3.5, 7, 5, 7, 3.5, 9, 1.5, 1.5}; !slices.Equal(ranks, want) {
		t.Errorf("ranks %v, want %v", ranks, want)
	}
	if want := []int{2, 2, 3}; !slices.Equal(ties, want) {
		t.Errorf("ties %v, want %v", ties, want)
	}
}

// By definition the rank of x counts the smaller values and half the equal ones.
func TestRanksCountSmallerValues(t *testing.T) {
	rng := rand.New(rand.NewPCG(5, 1))
	for range 50 {
		xs := make([]float64, 1+rng.IntN(40))
		for i := range xs {
			xs[i] = float64(rng.IntN(12))
		}
		ranks, _ := Ranks(xs)
		for i, x := range xs {
			want := 0.5
			for _, y := range xs {
				if y < x {
					want++
				} else if y == x {
					want += 0.5
				}
			}
			if ranks[i] != want {
				t.Fatalf("%v: rank of %v is %v, want %v", xs, x, ranks[i], want)
			}
		}
	}
}

// Worked by hand from the definitions of Hyndman and Fan (1996): positions
// h = 11/4, 13/4 and 35/12 of ten values for p = 1/4.
func TestQuantilesFollowTheirDefinition(t *testing.T) {
	ten := []float64{1, 2, 4, 7, 11, 16, 22, 29, 37, 46}
	for _, c := range []struct {
		p    float64
		t    QuantileType
		want float64
	}{
		{0.25, Type6, 3.5}, {0.25, Type7, 4.75}, {0.25, Type8, 2 + 2*11.0/12},
		{0.5, Type6, 13.5}, {0.5, Type7, 13.5}, {0.5, Type8, 13.5},
		{0, Type6, 1}, {0, Type7, 1}, {0, Type8, 1}, {1, Type6, 46}, {1, Type7, 46}, {1, Type8, 46},
		{0.01, Type6, 1}, {0.99, Type8, 46},
	} {
		if got := Quantile(ten, c.p, c.t); math.Abs(got-c.want) > 1e-14*c.want {
			t.Errorf("type %d, p = %v: %v, want %v", c.t, c.p, got, c.want)
		}
	}
}

func TestQuantilesRiseWithinTheirEnds(t *testing.T) {
	rng := rand.New(rand.NewPCG(5, 2))
	for _, kind := range []QuantileType{Type6, Type7, Type8} {
		for range 50 {
			xs := make([]float64, 1+rng.IntN(9))
			for i := range xs {
				xs[i] = rng.NormFloat64() * math.Pow(10, float64(rng.IntN(600)-300))
			}
			slices.Sort(xs)
			last := xs[0]
			for p := 0.0; p <= 1; p += 1.0 / 256 {
				q := Quantile(xs, p, kind)
				if !(q >= last && q <= xs[len(xs)-1]) {
					t.Fatalf("type %d of %v at %v: %v after %v", kind, xs, p, q, last)
				}
				last = q
			}
		}
	}
}

func TestQuantilesAtTheEdges(t *testing.T) {
	huge := []float64{-math.MaxFloat64, math.MaxFloat64}
	if got := Median(huge); got != 0 {
		t.Errorf("median of %v is %v", huge, got)
	}
	if got := Quantile([]float64{7}, 0.3, Type8); got != 7 {
		t.Errorf("quantile of one value is %v", got)
	}
	for _, q := range []float64{Median(nil), Quantile(huge, math.NaN(), Type7), Quantile(huge, 1.5, Type7), Quantile(huge, 0.5, 3)} {
		if !math.IsNaN(q) {
			t.Errorf("got %v, want NaN", q)
		}
	}
}

func TestSortedLeavesItsInputAlone(t *testing.T) {
	xs := []float64{3, 1, 2}
	if s := Sorted(xs); !slices.Equal(s, []float64{1, 2, 3}) || xs[0] != 3 {
		t.Errorf("%v from %v", s, xs)
	}
}

// Sorting is the other way to the same values.
func TestSelectAgreesWithSorting(t *testing.T) {
	rng := rand.New(rand.NewPCG(3, 4))
	for _, n := range slices.Concat(slices.Repeat([]int{1, 2, 3, 5, 20, 199}, 30), slices.Repeat([]int{601, 2000, 30011}, 10)) {
		v := make([]float64, n)
		for i := range v {
			v[i] = float64(rng.IntN(1 + n/2)) // with ties
		}
		sorted := Sorted(v)
		k := rng.IntN(n)
		if got := Select(v, k); got != sorted[k] {
			t.Fatalf("n = %d: value %d is %v, want %v", n, k, got, sorted[k])
		}
		for i, x := range v {
			if i < k && x > v[k] || i > k && x < v[k] {
				t.Fatalf("n = %d: %v at %d on the wrong side of %v at %d", n, x, i, v[k], k)
			}
		}
		if got := MedianOf(v); got != Median(sorted) {
			t.Fatalf("n = %d: median %v, want %v", n, got, Median(sorted))
		}
	}
}
