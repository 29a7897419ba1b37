package num

import (
	"math"
	"slices"
)

// Sorted is a sorted copy of xs.
func Sorted(xs []float64) []float64 {
	c := slices.Clone(xs)
	slices.Sort(c)
	return c
}

// Ranks gives the ranks of xs from 1, tied values sharing the mean of their
// ranks, and the sizes of the groups of ties (two or more equal values), in the
// order of their values.
func Ranks(xs []float64) (ranks []float64, ties []int) {
	order := make([]int, len(xs))
	for i := range order {
		order[i] = i
	}
	slices.SortStableFunc(order, func(a, b int) int {
		switch {
		case xs[a] < xs[b]:
			return -1
		case xs[a] > xs[b]:
			return 1
		}
		return 0
	})
	ranks = make([]float64, len(xs))
	for i := 0; i < len(order); {
		j := i + 1
		for j < len(order) && xs[order[j]] == xs[order[i]] {
			j++
		}
		for k := i; k < j; k++ {
			ranks[order[k]] = float64(i+j+1) / 2
		}
		if j-i > 1 {
			ties = append(ties, j-i)
		}
		i = j
	}
	return ranks, ties
}

// A QuantileType is one of Hyndman and Fan's definitions of a sample quantile.
type QuantileType int

// The types that the functions offer.
const (
	Type6 QuantileType = 6
	Type7 QuantileType = 7
	Type8 QuantileType = 8
)

// Quantile is the p quantile of sorted data.
func Quantile(sorted []float64, p float64, t QuantileType) float64 {
	n := float64(len(sorted))
	if n == 0 || !(p >= 0 && p <= 1) {
		return math.NaN()
	}
	var h float64
	switch t {
	case Type6:
		h = (n + 1) * p
	case Type7:
		h = (n-1)*p + 1
	default:
		h = (n+1.0/3)*p + 1.0/3
	}
	h = min(max(h, 1), n)
	k := int(h)
	if k >= len(sorted) {
		return sorted[len(sorted)-1]
	}
	return sorted[k-1] + (h-float64(k))*(sorted[k]-sorted[k-1])
}

// Median is the median of sorted data.
func Median(sorted []float64) float64 { return Quantile(sorted, 0.5, Type7) }
