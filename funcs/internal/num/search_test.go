package num

import (
	"fmt"
	"math"
	"math/rand/v2"
	"testing"
)

func TestRootEndsAtNeighbouringDoubles(t *testing.T) {
	for _, c := range []struct {
		name   string
		f      func(float64) float64
		lo, hi float64
		want   float64 // NaN: no root; the exact root otherwise
	}{
		{"linear", func(x float64) float64 { return 3*x - 1 }, -5, 9, 1.0 / 3},
		{"falling", func(x float64) float64 { return 2 - x*x }, 0, 1e10, math.Sqrt2},
		{"ends swapped", func(x float64) float64 { return x*x - 2 }, 7, 0, math.Sqrt2},
		{"flat cubic", func(x float64) float64 { d := x - 0.1; return d * d * d }, -1, 1, 0.1},
		{"wide range", func(x float64) float64 { return x*0x1p900 - 3 }, 1e-300, 1e10, 0x3p-900},
		{"step", func(x float64) float64 { return math.Copysign(1, x-0.3) }, -1e300, 1e300, 0.3},
		{"infinite", func(x float64) float64 { return 1/(1-x) - 1/x }, 0, 1, 0.5},
		{"root at an end", func(x float64) float64 { return x }, 0, 1, 0},
		{"near zero", func(x float64) float64 { return x - 1e-310 }, -1, 1, 1e-310},
		{"no change of sign", func(x float64) float64 { return x*x + 1 }, -1, 1, math.NaN()},
		{"not a number", func(x float64) float64 { return math.Sqrt(x) - 0.5 }, -1, 1, math.NaN()},
	} {
		calls := 0
		x, ok := Root(func(x float64) float64 { calls++; return c.f(x) }, c.lo, c.hi)
		switch {
		case math.IsNaN(c.want):
			if ok || !math.IsNaN(x) {
				t.Errorf("%s: got %v, %v", c.name, x, ok)
			}
		case !ok || doublesBetween(x, c.want) > 1:
			// One double beside the exact root when f itself rounds there.
			t.Errorf("%s: got %v, %v, want %v", c.name, x, ok, c.want)
		}
		if calls > 270 {
			t.Errorf("%s: %d calls", c.name, calls)
		}
	}
}

func TestRootIsQuickOnSmoothFunctions(t *testing.T) {
	rng := rand.New(rand.NewPCG(5, 3))
	total := 0
	for range 200 {
		k, target := 0.1+5*rng.Float64(), 10*rng.Float64()
		x, ok := Root(func(x float64) float64 { total++; return math.Expm1(k*x) - target }, -1, 20)
		if want := math.Log1p(target) / k; !ok || math.Abs(x/want-1) > 1e-14 {
			t.Fatalf("k %v, target %v: %v, want %v", k, target, x, want)
		}
	}
	if total > 200*30 {
		t.Errorf("%d calls for 200 roots", total)
	}
}

func TestSmallestFindsTheFirstFromAnyStart(t *testing.T) {
	for lo := -3; lo <= 3; lo++ {
		for hi := lo; hi <= 40; hi += 3 {
			for first := lo; first <= hi+1; first++ {
				for start := lo - 2; start <= hi+2; start += 2 {
					what := fmt.Sprintf("first %d in [%d, %d] from %d", first, lo, hi, start)
					n, found := Smallest(lo, hi, start, func(n int) bool {
						if n < lo || n > hi {
							t.Fatalf("%s: asked for %d", what, n)
						}
						return n >= first
					})
					if found != (first <= hi) || found && n != first {
						t.Fatalf("%s: got %d, %v", what, n, found)
					}
				}
			}
		}
	}
	if _, found := Smallest(2, 1, 1, func(int) bool { return true }); found {
		t.Error("found a number in an empty range")
	}
}

func TestSmallestAsksFewTimesNearItsStart(t *testing.T) {
	for _, c := range []struct{ first, start, most int }{{1000, 1000, 2}, {1003, 1000, 6}, {1, 1 << 30, 90}, {math.MaxInt - 1, 5, 140}} {
		calls := 0
		n, found := Smallest(1, math.MaxInt-1, c.start, func(n int) bool { calls++; return n >= c.first })
		if !found || n != c.first || calls > c.most {
			t.Errorf("first %d from %d: got %d, %v after %d calls", c.first, c.start, n, found, calls)
		}
	}
}
