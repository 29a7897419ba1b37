package main

import (
	"fmt"
	"math"
	"slices"

	"halfwidth/funcs"
	"halfwidth/funcs/internal/num"
)

// A law draws independent values, or dependent ones.
type law func(s *num.Stream, x []float64)

var (
	normal      = each((*num.Stream).Normal)
	exponential = each((*num.Stream).Exponential)
	lognormal   = each(func(s *num.Stream) float64 { return num.Exp(s.Normal()) })
	student2    = each(func(s *num.Stream) float64 { return s.Normal() / math.Sqrt(s.Exponential()) })
	cauchy      = each(func(s *num.Stream) float64 { return s.Normal() / s.Normal() })
)

// autoregressive has correlation 0.5 between neighbours.
func autoregressive(s *num.Stream, x []float64) {
	last := s.Normal() / math.Sqrt(0.75)
	for i := range x {
		last = float64(0.5*last) + s.Normal()
		x[i] = last
	}
}

// each draws every value by itself.
func each(value func(*num.Stream) float64) law {
	return func(s *num.Stream, x []float64) {
		for i := range x {
			x[i] = value(s)
		}
	}
}

// A trial is a call whose arguments are drawn at random, with n values in each
// sample.
type trial struct {
	name, function string
	draw           func(s *num.Stream, n int) map[string]any
}

// one is mean-interval of one sample.
func one(name string, l law) trial {
	return trial{name, "mean-interval", func(s *num.Stream, n int) map[string]any {
		x := make([]float64, n)
		l(s, x)
		return map[string]any{"sample": x}
	}}
}

// two is difference-interval, with pooled variances, of n normal values of an sd
// and times n of sd 1.
func two(name string, sd float64, times int) trial {
	return trial{name, "difference-interval", func(s *num.Stream, n int) map[string]any {
		first, second := make([]float64, n), make([]float64, times*n)
		normal(s, first)
		for i := range first {
			first[i] *= sd
		}
		normal(s, second)
		return map[string]any{"sample": first, "second-sample": second, "variances": "pooled"}
	}}
}

// ten is analysis-of-variance, with pooled variances, of ten groups of n.
func ten(name string, l law) trial {
	return trial{name, "analysis-of-variance", func(s *num.Stream, n int) map[string]any {
		groups := make([]funcs.Group, 10)
		for i := range groups {
			groups[i] = funcs.Group{Name: fmt.Sprint(i), Values: make([]float64, n)}
			l(s, groups[i].Values)
		}
		return map[string]any{"samples": groups}
	}}
}

var (
	oneNormal    = one("normal", normal)
	twoNormal    = two("normal, variances 1 to 1, n and n", 1, 1)
	twoOfOtherN  = two("normal, variances 1 to 1, n and 3n", 1, 3)
	tenNormal    = ten("normal, ten groups", normal)
	tenLognormal = ten("lognormal, log-sd 1, ten groups", lognormal)

	ofOneSample = []trial{
		oneNormal, tenNormal,
		one("exponential", exponential), one("lognormal, log-sd 1", lognormal), one("t with 2 df", student2), one("Cauchy", cauchy),
		one("normal, lag-1 correlation 0.5", autoregressive),
	}
	ofSpreads = []trial{
		twoNormal, twoOfOtherN, tenNormal,
		two("normal, variances 9 to 1, n and n", 3, 1), two("normal, variances 9 to 1, n and 3n", 3, 3), two("normal, variances 1 to 9, n and 3n", 1.0/3, 3),
	}
)

// rows are the cautions of the table, with the trials that each is put to.
var rows = []struct {
	caution string
	trials  []trial
}{
	{"few-values", []trial{oneNormal}},
	{"skewed-for-n", ofOneSample},
	{"neighbours-alike", ofOneSample},
	{"far-value", ofOneSample},
	{"heavy-tail", append(slices.Clone(ofOneSample), tenLognormal)},
	{"spreads-unlike", ofSpreads},
	{anyCaution, []trial{oneNormal, twoNormal, twoOfOtherN, tenNormal}},
}

// anyCaution counts the calls with the status caution.
const anyCaution = "any of them"
