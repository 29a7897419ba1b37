package num

import (
	"math"
	"math/rand/v2"
	"testing"
)

// Roots known in closed form, smooth, flat, steep and of any size.
func TestRootFindsTheChangeOfSign(t *testing.T) {
	for _, c := range []struct {
		f            func(float64) float64
		lo, hi, want float64
	}{
		{func(x float64) float64 { return x*x - 2 }, 0, 2, math.Sqrt2},
		{func(x float64) float64 { return 2 - x*x }, 0, 1e9, math.Sqrt2},
		{func(x float64) float64 { return math.Exp(x) - 1e100 }, -700, 700, 100 * math.Ln10},
		{func(x float64) float64 { return x*x*x*x*x - 1e-50 }, 0, 1, 1e-10},
		{func(x float64) float64 { return math.Atan(1e8 * (x - 0.3)) }, -1, 1, 0.3},
		{func(x float64) float64 { return x - 1e-200 }, -1, 1, 1e-200},
		{func(x float64) float64 { return x }, -3, 0, 0},
	} {
		calls := 0
		x, ok := Root(func(x float64) float64 { calls++; return c.f(x) }, c.lo, c.hi)
		if !ok || math.Abs(x-c.want) > 4e-16*math.Abs(c.want) {
			t.Errorf("got %v (%v), want %v", x, ok, c.want)
		}
		if calls > 1500 {
			t.Errorf("%d evaluations for the root %v", calls, c.want)
		}
	}
	calls := 0
	Root(func(x float64) float64 { calls++; return math.Erf(x) - 0.9 }, 0, 4)
	if calls > 20 {
		t.Errorf("%d evaluations for a smooth function, want at most 20", calls)
	}
}

func TestRootRefusesWhatHasNone(t *testing.T) {
	for _, f := range []func(float64) float64{
		func(float64) float64 { return 1 },
		func(float64) float64 { return math.NaN() },
		func(x float64) float64 { return math.Sqrt(x - 0.5) },
	} {
		if x, ok := Root(f, 0, 1); ok {
			t.Errorf("found %v where there is no root", x)
		}
	}
}

func TestSmallestFindsTheFirstThatHolds(t *testing.T) {
	random := rand.New(rand.NewPCG(3, 1))
	for range 2000 {
		lo := random.IntN(100) - 50
		hi := lo + random.IntN(1000)
		want := lo + random.IntN(hi-lo+3) // past hi: none
		n, found := Smallest(lo, hi, lo-5+random.IntN(hi-lo+10), func(n int) bool {
			if n < lo || n > hi {
				t.Fatalf("asked for %d outside %d to %d", n, lo, hi)
			}
			return n >= want
		})
		if found != (want <= hi) || (found && n != want) {
			t.Errorf("%d to %d: got %d (%v), want %d", lo, hi, n, found, want)
		}
	}
	calls := 0
	n, _ := Smallest(2, 1_000_000_000, 1000, func(n int) bool { calls++; return n >= 1003 })
	if n != 1003 || calls > 8 {
		t.Errorf("n = %d after %d questions, want 1003 after 8 at most", n, calls)
	}
	if _, found := Smallest(5, 4, 5, func(int) bool { return true }); found {
		t.Error("found something in an empty range")
	}
}
