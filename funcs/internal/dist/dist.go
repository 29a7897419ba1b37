// Package dist gives the probability laws behind the functions: both tails and
// the inverse from either tail.
package dist

import "math"

// Distribution is one continuous law; no tail is formed as one minus the other.
type Distribution interface {
	CDF(x float64) float64           // P(X <= x)
	SF(x float64) float64            // P(X > x)
	Between(a, b float64) float64    // P(a <= X <= b), accurate also when tiny
	Quantile(p float64) float64      // x with CDF(x) = p
	UpperQuantile(q float64) float64 // x with SF(x) = q
}

// difference is P(a <= X <= b) from the nearer tails.
func difference(d Distribution, a, b float64) float64 {
	if math.IsNaN(a) || math.IsNaN(b) {
		return math.NaN()
	}
	if a >= b {
		return 0
	}
	if d.CDF(a) > 0.5 {
		return d.SF(a) - d.SF(b)
	}
	if d.CDF(b) > 0.5 {
		return 1 - d.CDF(a) - d.SF(b)
	}
	return d.CDF(b) - d.CDF(a)
}

// invert finds x in (lo, hi) with tail(x) = p by bisection.
func invert(tail func(float64) float64, p, lo, hi float64, increasing bool) float64 {
	for range 2100 {
		var mid float64
		switch {
		case lo > 0 && hi/lo > 4:
			mid = math.Sqrt(lo) * math.Sqrt(hi)
		case lo == 0 && hi > 1e-300:
			mid = hi * 1e-4
		default:
			mid = lo/2 + hi/2
		}
		if mid <= lo || mid >= hi {
			return mid
		}
		if (tail(mid) < p) == increasing {
			lo = mid
		} else {
			hi = mid
		}
	}
	return lo/2 + hi/2
}
