package num

import "math"

// Root finds where the monotone function f changes sign between lo and hi. ok
// is false when f has the same sign at both ends, or is NaN on the way.
func Root(f func(float64) float64, lo, hi float64) (x float64, ok bool) {
	flo, fhi := f(lo), f(hi)
	switch {
	case flo == 0:
		return lo, true
	case fhi == 0:
		return hi, true
	case !(flo < 0 && fhi > 0) && !(flo > 0 && fhi < 0):
		return math.NaN(), false
	}
	for {
		mid := lo/2 + hi/2
		if mid <= lo || mid >= hi {
			return mid, true
		}
		fm := f(mid)
		switch {
		case fm == 0:
			return mid, true
		case math.IsNaN(fm):
			return fm, false
		case (fm < 0) == (flo < 0):
			lo = mid
		default:
			hi = mid
		}
	}
}

// Smallest is the smallest n in [lo, hi] for which ok holds, where ok, once it
// holds, holds for every larger n. The search starts at start. found is false
// when ok does not hold at hi.
func Smallest(lo, hi, start int, ok func(n int) bool) (n int, found bool) {
	if lo > hi || !ok(hi) {
		return 0, false
	}
	for lo < hi {
		mid := lo + (hi-lo)/2
		if ok(mid) {
			hi = mid
		} else {
			lo = mid + 1
		}
	}
	return lo, true
}
