package dist

import (
	"math"

	"halfwidth/funcs/internal/num"
)

// EquivalencePower is the probability that two one-sided t tests, each at the
// given significance, both find the difference between its margins (Schuirmann
// 1987). toLower is the true difference less the lower margin, toUpper the upper
// margin less the true difference, both in standard errors; df (1 or more) may
// be infinite.
//
// With s = chi/sqrt(df) and critical value t both tests reject when the estimate
// lies t*s inside both margins, so the power is one integral over s,
//
//	E P(t s - toLower < Z < toUpper - t s)
//
// up to the s at which the margins meet (Owen 1965, Biometrika 52, 437-446;
// Phillips 1990, Journal of Pharmacokinetics and Biopharmaceutics 18, 137-144),
// by Gauss-Legendre panels downwards from there. Relative error 1e-12.
func EquivalencePower(df, toLower, toUpper, significance float64) float64 {
	if !(df >= 1) || math.IsNaN(toLower+toUpper) || !(significance > 0 && significance < 1) {
		return math.NaN()
	}
	t := Student{df}.UpperQuantile(significance)
	inside := func(s float64) float64 {
		low, high := float64(t*s)-toLower, toUpper-float64(t*s)
		if !(low < high) {
			return 0
		}
		return Normal{}.Between(low, high)
	}
	if df > manyDF {
		return inside(1)
	}
	// Past 1 + 9.2/sqrt(df) the density of s holds less than 1e-18.
	top := 1 + 9.2/math.Sqrt(df)
	if t > 0 {
		top = min(top, (toLower+toUpper)/2/t)
	}
	// Below 1 the density of s rises: what underflows at top does so everywhere.
	if !(top > 0) || top < 1 && df*scaleExponent(num.Log(top)) < -750 {
		return 0
	}
	peak := scaleDensity1(df)
	f := func(s float64) float64 {
		return peak * num.Exp(df*scaleExponent(num.Log(s))) / s * inside(s)
	}
	// The product is log-concave: its panels grow to one peak and then fall.
	sum, last := 0.0, 0.0
	for range 2000 {
		slope := df * (1 - float64(top*top)) / top
		width := min(3/math.Sqrt(2*df), 3/math.Abs(t), 6/math.Abs(slope), top/2)
		part := gauss16(f, top-width, top)
		sum += part
		if part < last && !(part > 1e-17*sum) {
			break
		}
		last = part
		top -= width
	}
	return min(1, sum)
}
