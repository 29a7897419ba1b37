// Package num holds the arithmetic that the statistical functions rest on:
// compensated sums and moments, ranks and quantiles of data, bracketing
// searches, the trapezoidal rule, and the elementary functions in a form whose
// digits do not depend on the processor. It knows no laws of probability, which
// are package dist's above it, and no missing values: callers leave gaps out.
package num

import "math"

// Summary holds the moments of a list of numbers about their mean.
type Summary struct {
	N          int
	Mean       float64
	MeanLow    float64 // the mean is Mean + MeanLow to about 30 digits
	SumSquares float64 // sum of squared deviations from the mean
	Sum3       float64 // sum of cubed deviations
	Sum4       float64 // sum of fourth powers of the deviations
}

// addTo adds x to a sum carried as hi + lo: the rounding error of each addition
// is kept exactly (Knuth, TAOCP 2, 4.2.2), so that hi + lo at the end is right to
// the last digit unless almost everything cancels.
func addTo(hi, lo, x float64) (float64, float64) {
	s := hi + x
	v := s - hi
	return s, lo + ((hi - (s - v)) + (x - v))
}

// total is a finished sum; past the range of float64 the low part is not a
// number, and the sum infinite.
func total(hi, lo float64) float64 {
	if math.IsInf(hi, 0) {
		return hi
	}
	return hi + lo
}

// Sum is the sum of xs, correctly rounded or nearly so. Partial sums past the
// range of float64 do no harm where the whole is within it.
func Sum(xs []float64) float64 {
	hi, lo, down := sumOf(xs)
	return total(hi, lo) / down
}

// sumOf is the sum of xs times down, which is 1 unless the plain sum leaves the
// range of float64 on the way.
func sumOf(xs []float64) (hi, lo, down float64) {
	for _, x := range xs {
		hi, lo = addTo(hi, lo, x)
	}
	if !math.IsInf(hi, 0) && !math.IsNaN(hi) {
		return hi, lo, 1
	}
	down = 0x1p-64 // a list of 2^64 numbers does not exist
	hi, lo = 0, 0
	for _, x := range xs {
		hi, lo = addTo(hi, lo, float64(x*down))
	}
	if math.IsInf(hi, 0) {
		lo = 0
	}
	return hi, lo, down
}

// Mean is the arithmetic mean of xs, NaN when there are none.
func Mean(xs []float64) float64 { return wideMean(xs).Float() }

// wideMean is the mean to about 30 digits.
func wideMean(xs []float64) Wide {
	hi, lo, down := sumOf(xs)
	m := quickTwoSum(hi, lo).Over(float64(len(xs)))
	return Wide{m.Hi / down, m.Lo / down}
}

// Moments gives the moments of xs about their mean. Relative error some 1e-16
// for the mean and the sum of squares, whatever the offset of the values; sums of
// cubes and fourth powers are right to that of the sum of their sizes.
// Squares of deviations beyond 1e154 leave the range of float64 and come out
// infinite, those below 1e-154 lose digits.
func Moments(xs []float64) Summary {
	if len(xs) == 0 {
		return Summary{Mean: math.NaN()}
	}
	m := wideMean(xs)
	var s2, e2, s3, e3, s4, e4 float64
	for _, x := range xs {
		d := (x - m.Hi) - m.Lo
		q := float64(d * d)
		s2, e2 = addTo(s2, e2, q)
		s3, e3 = addTo(s3, e3, float64(q*d))
		s4, e4 = addTo(s4, e4, float64(q*q))
	}
	return Summary{len(xs), m.Hi, m.Lo, total(s2, e2), total(s3, e3), total(s4, e4)}
}

// SumProducts is the sum of x[i]*y[i] over the shorter of the two lists, each
// product taken without error.
func SumProducts(x, y []float64) float64 {
	var hi, lo float64
	for i := range min(len(x), len(y)) {
		p := TwoProduct(x[i], y[i])
		hi, lo = addTo(hi, lo, p.Hi)
		lo += p.Lo
	}
	return total(hi, lo)
}

// Lag1 is the lag-1 autocorrelation of xs in their order: the sum of products of
// the deviations of neighbours from the mean over the sum of squared deviations.
// NaN stands for a gap, across which nobody is a neighbour. NaN where there is no
// spread.
func Lag1(xs []float64) float64 {
	var hi, lo float64
	n := 0
	for _, x := range xs {
		if !math.IsNaN(x) {
			hi, lo = addTo(hi, lo, x)
			n++
		}
	}
	m := quickTwoSum(hi, lo).Over(float64(n))
	var c, ec, s, es float64
	last := math.NaN()
	for _, x := range xs {
		d := (x - m.Hi) - m.Lo
		if !math.IsNaN(d) {
			s, es = addTo(s, es, float64(d*d))
			if p := float64(d * last); !math.IsNaN(p) {
				c, ec = addTo(c, ec, p)
			}
		}
		last = d
	}
	return (c + ec) / (s + es)
}
