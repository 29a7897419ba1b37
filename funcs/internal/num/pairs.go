package num

import (
	"math"
	"slices"
)

// PairwiseDifference is the k-th smallest (k from 1) of all differences
// x[i] - y[j], each rounded to a float64. Both lists must be sorted. The
// differences are never laid out all together: each step counts, in one pass over
// both lists, those up to a double between bounds, until so few lie between them
// that they can be sorted. False position with the Illinois rule (Dowell & Jarratt
// 1971, BIT 11, 168-174) needs some ten steps; where ties hold it up, bisection
// over the doubles needs no more than 64 further ones.
func PairwiseDifference(x, y []float64, k int) float64 {
	if len(x) == 0 || len(y) == 0 || k < 1 || k > len(x)*len(y) {
		return math.NaN()
	}
	low, high := orderOf(x[0]-y[len(y)-1])-1, orderOf(x[len(x)-1]-y[0])
	upToLow, upToHigh := 0, len(x)*len(y)
	lowGap, highGap := float64(k)-0.5, float64(upToHigh-k)+0.5
	side := 0 // which bound moved last
	for step := 0; high-low > 1; step++ {
		if upToHigh-upToLow <= len(x)+len(y) {
			between := differencesBetween(x, y, ofOrder(low), ofOrder(high))
			slices.Sort(between)
			return between[k-upToLow-1]
		}
		mid := low + (high-low)/2
		if a, b := ofOrder(low), ofOrder(high); step < 16 {
			if m := orderOf(a + float64((b-a)*(lowGap/(lowGap+highGap)))); m > low && m < high {
				mid = m
			}
		}
		if n := countUpTo(x, y, ofOrder(mid)); n >= k {
			high, upToHigh, highGap = mid, n, float64(n-k)+0.5
			if side > 0 {
				lowGap /= 2
			}
			side = 1
		} else {
			low, upToLow, lowGap = mid, n, float64(k-n)-0.5
			if side < 0 {
				highGap /= 2
			}
			side = -1
		}
	}
	return ofOrder(high)
}

// differencesBetween lists the differences x[i] - y[j] above low and up to high.
func differencesBetween(x, y []float64, low, high float64) (between []float64) {
	j := 0
	for _, a := range x {
		for j < len(y) && !(a-y[j] <= high) {
			j++
		}
		for i := j; i < len(y) && a-y[i] > low; i++ {
			between = append(between, a-y[i])
		}
	}
	return between
}

// countUpTo counts the differences x[i] - y[j] that are at most v. A rounded
// difference grows with x and falls with y, so the first j that counts moves up
// with i.
func countUpTo(x, y []float64, v float64) int {
	count, j := 0, 0
	for _, a := range x {
		for j < len(y) && !(a-y[j] <= v) {
			j++
		}
		if j == len(y) {
			break
		}
		count += len(y) - j
	}
	return count
}

// orderOf maps doubles to whole numbers in the same order, -0 just below 0.
func orderOf(x float64) uint64 {
	b := math.Float64bits(x)
	if b>>63 == 1 {
		return ^b
	}
	return b | 1<<63
}

func ofOrder(o uint64) float64 {
	if o>>63 == 1 {
		return math.Float64frombits(o &^ (1 << 63))
	}
	return math.Float64frombits(^o)
}
