package dist

import (
	"math"
	"slices"
)

// MaxRankPairs is the largest product of the two sample sizes for which the exact
// law of the rank-sum statistic is worked out.
const MaxRankPairs = 10000

// RankSum is the exact law, with nothing but chance between two samples, of U =
// the number of pairs in which the value of the first sample is the larger, ties
// counting one half (Mann & Whitney 1947, Annals of Mathematical Statistics 18,
// 50-60), given the ties among the values.
type RankSum struct {
	lower, upper []float64 // P(2U <= s) and P(2U >= s)
}

// NewRankSum works out the law from the pooled ranks of both samples, in any
// order, tied values sharing their mean rank, of which first belong to the first
// sample. ok is false where first is not from 1 to len(ranks)-1, or where the
// pairs are more than MaxRankPairs.
//
// All counts are sums of positive numbers, so each has relative error 1e-13. Two
// samples of 100 take about 0.1 s, of 30 about 1 ms.
func NewRankSum(ranks []float64, first int) (law RankSum, ok bool) {
	second := len(ranks) - first
	if first < 1 || second < 1 || first > MaxRankPairs/second {
		return RankSum{}, false
	}
	sizes := tieSizes(ranks)
	// Counting by the smaller sample is less work. Where it is the second, the pairs
	// counted are those in which its value is the larger: all less those of U.
	c := rankCounts{first: min(first, second), second: max(first, second), unit: 1}
	if len(sizes) < len(ranks) {
		c.unit = 2
	}
	c.ways = make([][]float64, first+1)
	c.ways[0] = []float64{1}
	for _, t := range sizes {
		if t == 1 {
			c.addSingle()
		} else {
			c.addTies(t)
		}
	}
	counts := c.ways[c.first]
	if first > second {
		slices.Reverse(counts)
	}
	if c.unit == 1 {
		// Whole pairs only: between them no halves.
		halves := make([]float64, 2*len(counts)-1)
		for s, n := range counts {
			halves[2*s] = n
		}
		counts = halves
	}
	law = RankSum{make([]float64, len(counts)), make([]float64, len(counts))}
	total := 0.0
	for s, n := range counts {
		total += n
		law.lower[s] = total
	}
	sum := 0.0
	for s := len(counts) - 1; s >= 0; s-- {
		sum += counts[s]
		law.upper[s] = sum / total
		law.lower[s] /= total
	}
	return law, true
}

// tieSizes is the number of values at each distinct rank, from the lowest.
func tieSizes(ranks []float64) []int {
	sorted := slices.Clone(ranks)
	slices.Sort(sorted)
	var sizes []int
	for i, r := range sorted {
		if i == 0 || r != sorted[i-1] {
			sizes = append(sizes, 0)
		}
		sizes[len(sizes)-1]++
	}
	return sizes
}

// rankCounts counts orders of the values taken so far, from the lowest up:
// ways[m][s] choices of m of them for the first sample have U = s/unit. With m of
// the first sample among a values, j of the next t tied ones being from the first
// sample add j(a-m) pairs and j(t-j) halves, in C(t, j) ways.
type rankCounts struct {
	first, second, unit, done int
	ways                      [][]float64
}

// addSingle takes the next value, tied with none, in place.
func (c *rankCounts) addSingle() {
	for m := min(c.first, c.done+1); m >= 0; m-- {
		counts := c.ways[m]
		others := c.done - m
		switch {
		case others >= c.second:
			counts = nil
		case counts == nil:
			counts = make([]float64, 1, c.unit*m*c.second+1)
			counts[0] = 0
		}
		if size := c.unit*m*min(others+1, c.second) + 1; size > len(counts) {
			counts = append(counts, make([]float64, size-len(counts))...)
		}
		if m > 0 && c.ways[m-1] != nil && others+1 <= c.second {
			into := counts[c.unit*(others+1):]
			for s, n := range c.ways[m-1] {
				into[s] += n
			}
		}
		c.ways[m] = counts
	}
	c.done++
}

// addTies takes the next t values, which are tied.
func (c *rankCounts) addTies(t int) {
	after := make([][]float64, c.first+1)
	for m, counts := range c.ways {
		if counts == nil {
			continue
		}
		others := c.done - m
		choose := 1.0
		for j := 0; j <= t; j++ {
			if m+j <= c.first && others+t-j <= c.second {
				if after[m+j] == nil {
					after[m+j] = make([]float64, 2*(m+j)*(others+t-j)+1, 2*(m+j)*c.second+1)
				}
				into := after[m+j][j*(2*others+t-j):]
				for s, n := range counts {
					into[s] += float64(choose * n)
				}
			}
			choose = math.Round(choose * float64(t-j) / float64(j+1))
		}
	}
	c.ways = after
	c.done += t
}

// CDF is P(U <= u).
func (r RankSum) CDF(u float64) float64 {
	s := math.Floor(2 * u)
	switch {
	case math.IsNaN(u) || r.lower == nil:
		return math.NaN()
	case s < 0:
		return 0
	case s >= float64(len(r.lower)-1):
		return 1
	}
	return r.lower[int(s)]
}

// SF is P(U > u). U moves by halves, so P(U >= u) is SF(u - 0.5).
func (r RankSum) SF(u float64) float64 {
	s := math.Floor(2*u) + 1
	switch {
	case math.IsNaN(u) || r.upper == nil:
		return math.NaN()
	case s <= 0:
		return 1
	case s >= float64(len(r.upper)):
		return 0
	}
	return r.upper[int(s)]
}
