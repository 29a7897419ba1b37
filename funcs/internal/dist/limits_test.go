package dist

import (
	"fmt"
	"math"
	"testing"
	"time"
)

// Any argument gets an answer: a probability between 0 and 1, or NaN for a NaN
// or a parameter outside its domain, within 10 ms. From the definitions alone.
func TestLawsStandAnyArgument(t *testing.T) {
	inf := math.Inf(1)
	parameters := []float64{math.NaN(), -inf, -1, 0, 5e-324, 1e-300, 1e-100, 1e-9, 0.01, 0.5, 1, 2, 17.3, 1e3, 1e6, 1e10, 1e17, 1e30, 1e100, 1e160, 1e308, inf}
	arguments := []float64{math.NaN(), 0, 5e-324, 1e-300, 1e-160, 1e-20, 0.1, 0.5, 1 - 0x1p-53, 1, 1.3, 8, 39, 700, 1e6, 1e10, 1e20, 1e155, 1e300, math.MaxFloat64, inf}
	levels := []float64{math.NaN(), -0.1, 0, 5e-324, 1e-308, 1e-300, 1e-20, 0.02, 0.4999, 0.5, 0.5001, 0.98, 1 - 0x1p-53, 1, 1.1}
	var laws []Distribution
	for _, a := range parameters {
		laws = append(laws, Student{a}, ChiSquare{a}, Gamma{a})
		for _, b := range parameters {
			laws = append(laws, F{a, b}, Beta{a, b})
		}
	}
	laws = append(laws, Normal{})
	slowest := time.Duration(0)
	for _, law := range laws {
		valid := !math.IsNaN(law.CDF(0.25))
		for _, sign := range []float64{1, -1} {
			for i, x := range arguments {
				x *= sign
				start := time.Now()
				lower, upper := law.CDF(x), law.SF(x)
				slowest = max(slowest, time.Since(start))
				switch {
				case math.IsNaN(x) || !valid:
					if !math.IsNaN(lower) || !math.IsNaN(upper) {
						t.Errorf("%T%v at %v: %v and %v, want NaN", law, law, x, lower, upper)
					}
				case !(lower >= 0 && lower <= 1 && upper >= 0 && upper <= 1 && math.Abs(lower+upper-1) < 1e-12):
					t.Errorf("%T%v at %v: %v and %v", law, law, x, lower, upper)
				}
				if p := law.Between(x, arguments[(i+5)%len(arguments)]); !(p >= 0 && p <= 1) && !math.IsNaN(p) {
					t.Errorf("%T%v from %v: %v", law, law, x, p)
				}
			}
		}
		for _, p := range levels {
			start := time.Now()
			x, z := law.Quantile(p), law.UpperQuantile(p)
			slowest = max(slowest, time.Since(start))
			if want := !valid || !(p >= 0 && p <= 1); math.IsNaN(x) != want || math.IsNaN(z) != want {
				t.Errorf("%T%v at level %v: %v and %v", law, law, p, x, z)
			}
			if !valid || !domain(law) || !(p > 1e-300 && p < 1) || !(x > 1e-300 && x < inf) {
				continue
			}
			below, above := law.CDF(math.Nextafter(x, -inf)), law.CDF(math.Nextafter(x, inf))
			if !(below <= p*(1+1e-12) && above >= p*(1-1e-12)) {
				t.Errorf("%T%v at level %v: quantile %v has probability %v to %v", law, law, p, x, below, above)
			}
		}
	}
	t.Logf("slowest pair of calls: %v", slowest)
	if slowest > time.Second {
		t.Errorf("slowest pair of calls took %v", slowest)
	}
}

// domain says that the law is an ordinary one.
func domain(law Distribution) bool {
	ok := func(v ...float64) bool {
		for _, x := range v {
			if !(x >= 0.01 && x <= 1e10) {
				return false
			}
		}
		return true
	}
	switch l := law.(type) {
	case Student:
		return ok(l.DF)
	case ChiSquare:
		return ok(l.DF)
	case Gamma:
		return ok(l.Shape)
	case F:
		return ok(l.DF1, l.DF2)
	case Beta:
		return ok(l.A, l.B)
	case Normal:
		return true
	}
	panic(fmt.Sprintf("no domain for %T", law))
}
