// Package num holds the arithmetic that the statistical functions rest on:
// compensated sums and moments, ranks and quantiles of data, bracketing
// searches, the trapezoidal rule, and the elementary functions in a form whose
// digits do not depend on the processor.
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

// Sum is the sum of xs.
func Sum(xs []float64) float64 {
	var hi, lo float64
	for _, x := range xs {
		s := hi + x
		v := s - hi
		lo += (hi - (s - v)) + (x - v)
		hi = s
	}
	return hi + lo
}

// Mean is the arithmetic mean of xs, NaN when there are none.
func Mean(xs []float64) float64 { return Sum(xs) / float64(len(xs)) }

// Moments gives the moments of xs.
func Moments(xs []float64) Summary {
	s := Summary{N: len(xs), Mean: Mean(xs)}
	for _, x := range xs {
		d := x - s.Mean
		s.SumSquares += d * d
		s.Sum3 += d * d * d
		s.Sum4 += d * d * d * d
	}
	return s
}

// SumProducts is the sum of x[i]*y[i] over the shorter of the two lists.
func SumProducts(x, y []float64) float64 {
	var s float64
	for i := range min(len(x), len(y)) {
		s += x[i] * y[i]
	}
	return s
}

// WeightedMean is the mean of xs with the given weights.
func WeightedMean(xs, weights []float64) float64 { return SumProducts(xs, weights) / Sum(weights) }

// Lag1 is the lag-1 autocorrelation of xs in their order; NaN stands for a gap.
func Lag1(xs []float64) float64 {
	var present []float64
	for _, x := range xs {
		if !math.IsNaN(x) {
			present = append(present, x)
		}
	}
	m := Moments(present)
	var s float64
	for i := 1; i < len(xs); i++ {
		if !math.IsNaN(xs[i]) && !math.IsNaN(xs[i-1]) {
			s += (xs[i] - m.Mean) * (xs[i-1] - m.Mean)
		}
	}
	return s / m.SumSquares
}
