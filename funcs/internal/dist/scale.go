package dist

import (
	"math"

	"halfwidth/funcs/internal/num"
)

// Many laws here divide by an estimated standard deviation: they are averages
// over s = chi/sqrt(df). This file has the density of log s, in which the
// trapezoidal rule converges exponentially (Trefethen & Weideman 2014, SIAM
// Review 56, 385-458).

// manyDF is where a scale is as good as known: the laws that divide by it
// differ from their limit by less than x^4/df, here 2e-14 at the x = 38 at which
// normal tails end.
const manyDF = 1e20

// scaleDensity1 is the density of log s at s = 1, its peak:
// 2 (df/2)^(df/2) e^(-df/2) / Gamma(df/2).
func scaleDensity1(df float64) float64 { return 2 * gammaShape(max(df/2, 1e-300)) }

// scaleExponent is u - (exp(2u) - 1)/2, so that the density of u = log s is
// scaleDensity1(df) * exp(df*scaleExponent(u)).
func scaleExponent(u float64) float64 {
	return -expm1mx(2*u) / 2
}

// expm1mx is exp(x) - 1 - x, about x^2/2 near 0.
func expm1mx(x float64) float64 {
	if math.Abs(x) > 0.5 {
		return num.Expm1(x) - x
	}
	sum := 0.0
	for k := len(inverseFactorials) - 1; k >= 0; k-- {
		sum = float64(sum*x) + inverseFactorials[k]
	}
	return float64(x*x) * sum
}

// 1/2!, 1/3!, ... as far as 0.5^k needs them.
var inverseFactorials = [...]float64{
	1.0 / 2, 1.0 / 6, 1.0 / 24, 1.0 / 120, 1.0 / 720, 1.0 / 5040, 1.0 / 40320, 1.0 / 362880,
	1.0 / 3628800, 1.0 / 39916800, 1.0 / 479001600, 1.0 / 6227020800, 1.0 / 87178291200,
}

// normalHazard is phi(x)/Phi(x), the derivative of log Phi.
func normalHazard(x float64) float64 {
	if x < 0 {
		return 1 / (mills(-x) * math.Sqrt(2*math.Pi))
	}
	return Normal{}.Density(x) / Normal{}.CDF(x)
}
