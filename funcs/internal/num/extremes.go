package num

import (
	"math"
	"slices"
)

// fewFrom is the length from which a list is looked through instead of copied
// and rearranged.
const fewFrom = 1024

// sampleOf takes every so many-th value, some n^(2/3) of them, sorted.
func sampleOf(v []float64, of func(float64) float64) []float64 {
	size := math.Cbrt(float64(len(v)))
	step := max(1, len(v)/int(size*size))
	s := make([]float64, 0, len(v)/step+1)
	for i := 0; i < len(v); i += step {
		s = append(s, of(v[i]))
	}
	slices.Sort(s)
	return s
}

// MedianIn is the median of values in any order, which stay as they are; NaN when
// there are none. A small part of a long list tells between which two values the
// median must lie, and one pass over the list takes out those few.
func MedianIn(v []float64) float64 {
	n := len(v)
	if n < fewFrom {
		return MedianOf(slices.Clone(v))
	}
	s := sampleOf(v, func(x float64) float64 { return x })
	off := int(2 * math.Sqrt(float64(len(s))))
	low, high := s[max(0, len(s)/2-off)], s[min(len(s)-1, len(s)/2+off)]
	// Which side a value is on is a toss-up that no processor foresees, so it is
	// counted without a branch; few values are near the middle.
	middle, reach := low/2+high/2, (high/2-low/2)*(1+0x1p-40)
	below := 0
	between := make([]float64, 0, len(s))
	for _, x := range v {
		var under int
		if x < low {
			under = 1
		}
		below += under
		if math.Abs(x-middle) <= reach && low <= x && x <= high {
			between = append(between, x)
		}
	}
	lower, upper := (n-1)/2-below, n/2-below // places of the middle values among those between
	if lower < 0 || upper >= len(between) {
		return MedianOf(slices.Clone(v))
	}
	b := Select(between, upper)
	if lower == upper {
		return b
	}
	return Median([]float64{slices.Max(between[:upper]), b})
}

// Farthest gives the k largest distances of the values from a centre, in
// ascending order; the values stay as they are. k is at most their number.
func Farthest(v []float64, centre float64, k int) []float64 {
	distance := func(x float64) float64 { return math.Abs(x - centre) }
	least, room := math.Inf(-1), len(v)
	if len(v) >= fewFrom {
		room = 2 * k
		s := sampleOf(v, distance)
		above := float64(k) / float64(len(v)) * float64(len(s))
		least = s[max(0, len(s)-1-int(above+4*math.Sqrt(above)+8))]
	}
	far := make([]float64, 0, room)
	for _, x := range v {
		if d := distance(x); d >= least {
			far = append(far, d)
		}
	}
	if len(far) < k { // the part looked at was not like the rest
		far = far[:0]
		for _, x := range v {
			far = append(far, distance(x))
		}
	}
	Select(far, len(far)-k)
	far = far[len(far)-k:]
	slices.Sort(far)
	return far
}
