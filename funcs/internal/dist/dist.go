// Package dist gives the probability laws behind the functions: both tails and
// the inverse from either tail. Each tail is computed as itself, so that a
// p-value of 1e-200 has as many right digits as one of 0.05, and the digits do
// not depend on the processor. Arguments outside a law's range give the limit
// (a probability of 0 or 1); parameters outside their domain give NaN.
// funcs/ACCURACY.md says how closely each law agrees with values of 60 digits.
// The arithmetic below is package num's; samples and findings are package funcs'.
package dist

import (
	"math"

	"halfwidth/funcs/internal/num"
)

// Distribution is one continuous law; no tail is formed as one minus the other.
type Distribution interface {
	CDF(x float64) float64           // P(X <= x)
	SF(x float64) float64            // P(X > x)
	Between(a, b float64) float64    // P(a <= X <= b), accurate also when tiny; 0 where a > b
	Quantile(p float64) float64      // x with CDF(x) = p
	UpperQuantile(q float64) float64 // x with SF(x) = q
}

// between is P(a <= X <= b): the difference of the nearer tails, unless they
// nearly cancel; then narrow integrates the density from a to b.
func between(d Distribution, a, b float64, narrow func() float64) float64 {
	lowerB, upperA := d.CDF(b), d.SF(a)
	lowerA, upperB := d.CDF(a), d.SF(b)
	var p, whole float64
	switch {
	case math.IsNaN(lowerB) || math.IsNaN(upperA):
		return math.NaN()
	case a >= b:
		return 0
	case lowerA >= 0.5:
		p, whole = upperA-upperB, upperA
	case upperB >= 0.5:
		p, whole = lowerB-lowerA, lowerB
	default:
		p, whole = (1-lowerA)-upperB, 1
	}
	if p < 0.3*whole && narrow != nil {
		return narrow()
	}
	return p
}

// difference is P(a <= X <= b) from the nearer tails alone, for laws whose
// density is not at hand; where the tails nearly cancel, so do digits.
func difference(d Distribution, a, b float64) float64 { return between(d, a, b, nil) }

// panels integrates a smooth f from 0 to end in panels of at most length 2.
func panels(end float64, f func(float64) float64) float64 {
	n := math.Ceil(end / 2)
	if !(n > 0 && n < 1e4) {
		return 0
	}
	var sum float64
	step := end / n
	for i := 0.0; i < n; i++ {
		sum += num.Legendre(f, float64(i*step), float64((i+1)*step))
	}
	return sum
}
