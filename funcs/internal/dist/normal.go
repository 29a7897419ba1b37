package dist

import (
	"math"

	"halfwidth/funcs/internal/num"
)

// Normal is the standard normal law.
type Normal struct{}

// millsCoefficients hold (z+5) exp(z^2/2) P(Z > z) for z >= 0 as a polynomial in
// (z-5)/(z+5), to 2e-17 of its value: the Chebyshev series of that function,
// found at 80 digits, cut after 25 terms and written in powers.
var millsCoefficients = [...]float64{
	0.7691930497500629590721, -0.665382502890056908292, 0.4953056159699762203153,
	-0.313533156671281391756, 0.1650203661703992406950, -0.069118638707071619249,
	0.0207950667994248852856, -0.002993376758978478139, -0.000797869391016415969,
	0.0005448989683735629006, -0.000059375797293002149, -0.000049762327924579515,
	0.0000166816062395530633, 0.0000039793615138292154, -0.000002770667357733369,
	-3.3354271412310539203502e-07, 4.3630855178173227095346e-07, 3.8571448567257586546660e-08,
	-7.0378363909458656596992e-08, -6.9408473740448666079232e-09, 1.1239006700979712128110e-08,
	1.2713759260278231462308e-09, -1.5336075571599544957850e-09, -1.3312107430107020815173e-10,
	1.2469361647253147892804e-10,
}

// mills is exp(z^2/2) P(Z > z) for z >= 0.
func mills(z float64) float64 {
	t := (z - 5) / (z + 5)
	w := float64(t * t)
	c := &millsCoefficients
	even, odd := c[24], c[23]
	for k := 22; k >= 2; k -= 2 {
		even = c[k] + float64(w*even)
		odd = c[k-1] + float64(w*odd)
	}
	return ((c[0] + float64(w*even)) + float64(t*odd)) / (z + 5)
}

// halfSquare is -z^2/2 to double length.
func halfSquare(z float64) num.Wide {
	s := num.TwoProduct(z, z)
	return num.Wide{Hi: -s.Hi / 2, Lo: -s.Lo / 2}
}

// SF is P(Z > z), with a relative error of a few units in the last place down to
// the smallest numbers.
func (Normal) SF(z float64) float64 {
	switch {
	case z < 0:
		return 1 - Normal{}.SF(-z)
	case z > 39:
		return 0
	}
	return float64(mills(z) * num.ExpWide(halfSquare(z)))
}

// CDF is P(Z <= z).
func (n Normal) CDF(z float64) float64 { return n.SF(-z) }

// Density is exp(-z^2/2)/sqrt(2 pi).
func (Normal) Density(z float64) float64 {
	if math.Abs(z) > 39 {
		return 0
	}
	return num.ExpWide(halfSquare(z)) / math.Sqrt(2*math.Pi)
}

// NormalLogSF is log P(Z > z), right also where the tail itself underflows.
func NormalLogSF(z float64) float64 {
	switch {
	case z < 0:
		return num.Log1p(-Normal{}.SF(-z))
	case math.IsInf(z, 1):
		return math.Inf(-1)
	}
	return num.Log(mills(z)) - float64(0.5*float64(z*z))
}

// NormalLogCDF is log P(Z <= z).
func NormalLogCDF(z float64) float64 { return NormalLogSF(-z) }

// Between is P(a <= Z <= b).
func (n Normal) Between(a, b float64) float64 {
	return between(n, a, b, func() float64 {
		// From the end nearer to 0 outwards, relative to the density there.
		if math.Abs(a) > math.Abs(b) {
			a, b = -b, -a
		}
		return float64(n.Density(a) * num.Legendre(func(s float64) float64 {
			return num.Exp(-float64(s * (a + float64(0.5*s))))
		}, 0, b-a))
	})
}

// Quantile is z with P(Z <= z) = p, by the rational functions of M. Wichura
// (1988), Algorithm AS 241, The percentage points of the normal distribution,
// routine PPND16, and outside the middle one step of Newton's method, for a far
// tail moves by z^2 times the relative error of z: that is 1e-16 or little more.
func (n Normal) Quantile(p float64) float64 {
	switch {
	case !(p >= 0 && p <= 1):
		return math.NaN()
	case p == 0:
		return math.Inf(-1)
	case p == 1:
		return math.Inf(1)
	}
	d := p - 0.5
	if math.Abs(d) <= 0.425 {
		return float64(d * wichura(&wichuraCentre, 0.180625-float64(d*d)))
	}
	q := min(p, 1-p)
	r := math.Sqrt(-num.Log(q))
	var z float64
	if r <= 5 {
		z = wichura(&wichuraMiddle, r-1.6)
	} else {
		z = wichura(&wichuraFar, r-5)
	}
	if q > 1e-300 {
		z += float64(math.Sqrt(2*math.Pi) * mills(z) * ((n.SF(z) - q) / q))
	}
	return math.Copysign(z, d)
}

// UpperQuantile is z with P(Z > z) = q.
func (n Normal) UpperQuantile(q float64) float64 { return -n.Quantile(q) }

// wichura is the quotient of two polynomials, coefficients from the constant on.
func wichura(c *[2][8]float64, r float64) float64 {
	top, bottom := c[0][7], c[1][7]
	for k := 6; k >= 0; k-- {
		top = c[0][k] + float64(r*top)
		bottom = c[1][k] + float64(r*bottom)
	}
	return top / bottom
}

var (
	wichuraCentre = [2][8]float64{{
		3.3871328727963666080e0, 1.3314166789178437745e2, 1.9715909503065514427e3, 1.3731693765509461125e4,
		4.5921953931549871457e4, 6.7265770927008700853e4, 3.3430575583588128105e4, 2.5090809287301226727e3,
	}, {
		1, 4.2313330701600911252e1, 6.8718700749205790830e2, 5.3941960214247511077e3,
		2.1213794301586595867e4, 3.9307895800092710610e4, 2.8729085735721942674e4, 5.2264952788528545610e3,
	}}
	wichuraMiddle = [2][8]float64{{
		1.42343711074968357734e0, 4.63033784615654529590e0, 5.76949722146069140550e0, 3.64784832476320460504e0,
		1.27045825245236838258e0, 2.41780725177450611770e-1, 2.27238449892691845833e-2, 7.74545014278341407640e-4,
	}, {
		1, 2.05319162663775882187e0, 1.67638483018380384940e0, 6.89767334985100004550e-1,
		1.48103976427480074590e-1, 1.51986665636164571966e-2, 5.47593808499534494600e-4, 1.05075007164441684324e-9,
	}}
	wichuraFar = [2][8]float64{{
		6.65790464350110377720e0, 5.46378491116411436990e0, 1.78482653991729133580e0, 2.96560571828504891230e-1,
		2.65321895265761230930e-2, 1.24266094738807843860e-3, 2.71155556874348757815e-5, 2.01033439929228813265e-7,
	}, {
		1, 5.99832206555887937690e-1, 1.36929880922735805310e-1, 1.48753612908506148525e-2,
		7.86869131145613259100e-4, 1.84631831751005468180e-5, 1.42151175831644588870e-7, 2.04426310338993978564e-15,
	}}
)
