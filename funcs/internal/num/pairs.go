package num

import "math"

// PairwiseDifference is the k-th smallest (k from 1) of all differences
// x[i] - y[j], each rounded to a float64. Both lists must be sorted. The
// differences are never laid out: bisection over the doubles between the
// smallest and the largest, with one pass over both lists a step, needs at most
// 64 passes.
func PairwiseDifference(x, y []float64, k int) float64 {
	if len(x) == 0 || len(y) == 0 || k < 1 || k > len(x)*len(y) {
		return math.NaN()
	}
	low, high := orderOf(x[0]-y[len(y)-1]), orderOf(x[len(x)-1]-y[0])
	for low < high {
		mid := low + (high-low)/2
		if countUpTo(x, y, ofOrder(mid)) >= k {
			high = mid
		} else {
			low = mid + 1
		}
	}
	return ofOrder(low)
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
