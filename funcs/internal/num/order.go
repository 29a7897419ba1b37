package num

import (
	"cmp"
	"math"
	"slices"
)

// Sorted is a sorted copy of xs, which must hold no NaN.
func Sorted(xs []float64) []float64 {
	c := slices.Clone(xs)
	slices.Sort(c)
	return c
}

// Ranks gives the ranks of xs from 1, tied values sharing the mean of their
// ranks, and the sizes of the groups of ties (two or more equal values), in the
// order of their values. xs must hold no NaN.
func Ranks(xs []float64) (ranks []float64, ties []int) {
	type item struct {
		value float64
		index int
	}
	items := make([]item, len(xs))
	for i, x := range xs {
		items[i] = item{x, i}
	}
	slices.SortFunc(items, func(a, b item) int { return cmp.Compare(a.value, b.value) })
	ranks = make([]float64, len(xs))
	for i := 0; i < len(items); {
		j := i + 1
		for j < len(items) && items[j].value == items[i].value {
			j++
		}
		for k := i; k < j; k++ {
			ranks[items[k].index] = float64(i+j+1) / 2
		}
		if j-i > 1 {
			ties = append(ties, j-i)
		}
		i = j
	}
	return ranks, ties
}

// A QuantileType is one of the definitions of a sample quantile in R. Hyndman
// and Y. Fan (1996), Sample quantiles in statistical packages. Each interpolates
// between the order statistics next to a position h.
type QuantileType int

// The types that the functions offer.
const (
	Type6 QuantileType = 6 // h = (n+1) p: the mean of p over each gap is k/(n+1)
	Type7 QuantileType = 7 // h = (n-1) p + 1: the extremes are the 0 and 1 quantiles
	Type8 QuantileType = 8 // h = (n+1/3) p + 1/3: nearly free of median bias for any law
)

// Quantile is the p quantile of sorted data, 0 <= p <= 1. The position h is kept
// within 1 and n. NaN without data, for p outside its range or another type.
func Quantile(sorted []float64, p float64, t QuantileType) float64 {
	n := float64(len(sorted))
	if n == 0 || !(p >= 0 && p <= 1) {
		return math.NaN()
	}
	var h float64
	switch t {
	case Type6:
		h = float64((n + 1) * p)
	case Type7:
		h = float64((n-1)*p) + 1
	case Type8:
		h = float64((n+1.0/3)*p) + 1.0/3
	default:
		return math.NaN()
	}
	whole, part := math.Modf(min(max(h, 1), n))
	k := int(whole)
	a := sorted[k-1]
	if part == 0 {
		return a
	}
	b := sorted[k]
	if gap := b - a; !math.IsInf(gap, 0) {
		return min(a+float64(part*gap), b)
	}
	return float64((1-part)*a) + float64(part*b)
}

// Median is the median of sorted data, NaN when there are none.
func Median(sorted []float64) float64 { return Quantile(sorted, 0.5, Type7) }

// Select puts the k-th smallest value (k from 0) in its place in v, no greater
// ones before it and no smaller ones behind, and gives it. It takes time in
// proportion to the length, where sorting takes more.
func Select(v []float64, k int) float64 { return selectIn(v, 0, len(v)-1, k) }

// selectIn is Select between lo and hi. In a long stretch the pivot is a guess at
// the value sought, from a small part of it (Floyd & Rivest 1975), so that little
// more than one pass is needed.
func selectIn(v []float64, lo, hi, k int) float64 {
	for rounds := 0; lo < hi; rounds++ {
		if rounds > 60 { // a list made to be slow
			slices.Sort(v[lo : hi+1])
			break
		}
		a, b, c := v[lo], v[lo+(hi-lo)/2], v[hi]
		pivot := max(min(a, b), min(max(a, b), c)) // the middle one of three
		if n := hi - lo + 1; n > 600 && rounds < 8 {
			part := math.Cbrt(float64(n)) * math.Cbrt(float64(n)) / 2
			before := int(part * (float64(k-lo) / float64(n)))
			from := max(lo, k-before)
			pivot = selectIn(v, from, min(hi, from+int(part)), k)
		}
		i, j := lo, hi
		for i <= j {
			for v[i] < pivot {
				i++
			}
			for v[j] > pivot {
				j--
			}
			if i <= j {
				v[i], v[j] = v[j], v[i]
				i, j = i+1, j-1
			}
		}
		switch {
		case k <= j:
			hi = j
		case k >= i:
			lo = i
		default:
			return v[k]
		}
	}
	return v[k]
}

// MedianOf is the median of values in any order, which it puts in another.
func MedianOf(v []float64) float64 {
	n := len(v)
	if n == 0 {
		return math.NaN()
	}
	upper := Select(v, n/2)
	if n%2 == 1 {
		return upper
	}
	return Median([]float64{slices.Max(v[:n/2]), upper})
}
