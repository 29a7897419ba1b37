package funcs

import (
	"math"

	"halfwidth/funcs/internal/dist"
	"halfwidth/funcs/internal/num"
)

// each draws every value by itself.
func each(value func(*num.Stream) float64) func(*num.Stream, []float64) {
	return func(s *num.Stream, x []float64) {
		for i := range x {
			x[i] = value(s)
		}
	}
}

// studentDraws are a normal value over the root of an independent chi-square over
// its degrees of freedom.
func studentDraws(df float64) func(*num.Stream, []float64) {
	return each(func(s *num.Stream) float64 { return s.Normal() / math.Sqrt(s.Gamma(df/2)) })
}

// poissonDraws are counts less their mean.
func poissonDraws(mean float64) func(*num.Stream, []float64) {
	if mean < fewExpected {
		return each(fewCounts(mean))
	}
	return each(manyCounts(mean))
}

// fewExpected is the mean from which rejection serves (Hörmann 1993).
const fewExpected = 10

// fewCounts inverts the distribution function, going up from 0.
func fewCounts(mean float64) func(*num.Stream) float64 {
	var atMost []float64
	for k := 0; len(atMost) == 0 || atMost[k-1] < 1; k++ {
		atMost = append(atMost, dist.Poisson{Mean: mean}.CDF(k))
	}
	return func(s *num.Stream) float64 {
		u, k := s.Uniform(), 0
		for u > atMost[k] {
			k++
		}
		return float64(k) - mean
	}
}

// manyCounts draws by transformed rejection with squeeze, in a time that does not
// grow with the mean; the law is exact, as the mass itself decides (Hörmann 1993,
// The transformed rejection method for generating Poisson random variables,
// algorithm PTRS).
func manyCounts(mean float64) func(*num.Stream) float64 {
	law := dist.Poisson{Mean: mean}
	b := 0.931 + float64(2.53*math.Sqrt(mean))
	a := float64(0.02483*b) - 0.059
	scale := 1.1239 + 1.1328/(b-3.4)
	squeeze := 0.9277 - 3.6224/(b-2)
	return func(s *num.Stream) float64 {
		for {
			u, v := s.Uniform()-0.5, s.Uniform()
			left := 0.5 - math.Abs(u)
			k := math.Floor(float64((2*a/left+b)*u) + mean + 0.43)
			if left >= 0.07 && v <= squeeze {
				return k - mean
			}
			if k < 0 || left < 0.013 && v > left {
				continue
			}
			if v*scale <= law.PMF(int(k))*(a/float64(left*left)+b) {
				return k - mean
			}
		}
	}
}
