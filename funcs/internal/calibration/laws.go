package main

import (
	"math"

	"halfwidth/funcs/internal/num"
)

// law is a law to draw independent values from, or dependent ones.
type law struct {
	name string
	draw func(s *num.Stream, x []float64)
}

var laws = []law{
	{"normal", each((*num.Stream).Normal)},
	{"exponential", each((*num.Stream).Exponential)},
	{"lognormal, log-sd 1", each(func(s *num.Stream) float64 { return num.Exp(s.Normal()) })},
	{"t with 2 df", each(func(s *num.Stream) float64 { return s.Normal() / math.Sqrt(s.Exponential()) })},
	{"Cauchy", each(func(s *num.Stream) float64 { return s.Normal() / s.Normal() })},
	{"normal, lag-1 correlation 0.5", func(s *num.Stream, x []float64) {
		last := s.Normal() / math.Sqrt(0.75)
		for i := range x {
			last = float64(0.5*last) + s.Normal()
			x[i] = last
		}
	}},
}

// each draws every value by itself.
func each(value func(*num.Stream) float64) func(*num.Stream, []float64) {
	return func(s *num.Stream, x []float64) {
		for i := range x {
			x[i] = value(s)
		}
	}
}

// spread is a pair of normal samples: n values of the first sd, and times n of sd 1.
type spread struct {
	name  string
	sd    float64
	times int
}

var spreads = []spread{
	{"normal, variances 1 to 1, n and n", 1, 1},
	{"normal, variances 1 to 1, n and 3n", 1, 3},
	{"normal, variances 9 to 1, n and n", 3, 1},
	{"normal, variances 9 to 1, n and 3n", 3, 3},
	{"normal, variances 1 to 9, n and 3n", 1.0 / 3, 3},
}
