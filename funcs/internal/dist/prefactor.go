package dist

import (
	"math"

	"halfwidth/funcs/internal/num"
)

// The incomplete beta and gamma ratios are a prefactor times a slowly varying
// sum. The prefactors are formed from the deviance and the error of Stirling's
// formula, never from differences of log-gamma functions, which would cost all
// digits at large arguments: C. Loader (2000), Fast and accurate computation of
// binomial probabilities. The deviance is carried to double length, so that a
// tail of 1e-300 keeps as many digits as one of 0.1.

// stirlingFrom is where the nine terms of Stirling's series reach float64.
const stirlingFrom = 10

// stirlingCoefficients are B(2k)/(2k(2k-1)).
var stirlingCoefficients = [...]float64{
	1.0 / 12, -1.0 / 360, 1.0 / 1260, -1.0 / 1680, 1.0 / 1188, -691.0 / 360360, 1.0 / 156,
	-3617.0 / 122400, 43867.0 / 244188,
}

// stirlingError is log Gamma(a) - ((a-1/2) log a - a + log(2 pi)/2) for a >= 10.
func stirlingError(a float64) float64 {
	r := 1 / a
	z := float64(r * r)
	c := &stirlingCoefficients
	if a > 1e4 {
		return float64(r * (c[0] + float64(z*(c[1]+float64(z*c[2])))))
	}
	s := c[8]
	for k := 7; k >= 0; k-- {
		s = c[k] + float64(z*s)
	}
	return float64(r * s)
}

// gammaSeries holds 1 - Euler's constant and (-1)**k (zeta(k)-1)/k for k >= 2:
// log Gamma(2+t) is the sum of gammaSeries[k-1] t**k (Abramowitz and Stegun
// 6.1.33).
var gammaSeries = [...]float64{
	0.42278433509846713939348790991759757,
	0.32246703342411321823620758332301259, -0.06735230105319809513324605383714999,
	0.02058080842778454787900092413529198, -0.00738555102867398526627309729140683,
	0.00289051033074152328575298829848675, -0.00119275391170326097711393569282811,
	0.00050966952474304242233565481358156, -0.00022315475845357937976141880360134,
	9.945751278180853371459589003190e-05, -4.492623673813314170020750240636e-05,
	2.050721277567069155316650397831e-05, -9.439488275268395903987425104415e-06,
	4.374866789907487804181793223952e-06, -2.039215753801366236781900709671e-06,
	9.551412130407419832857179772951e-07, -4.492469198764566044329429033119e-07,
	2.120718480555466586923135101078e-07, -1.004322482396809960872083050053e-07,
	4.769810169363980565760193417247e-08, -2.271109460894316491031998116062e-08,
	1.083865921489695409107491757968e-08, -5.183475041970046655121248647058e-09,
	2.483674543802478317185008663992e-09, -1.192140140586091207442548202775e-09,
	5.731367241678862013330194857961e-10, -2.759522885124233145178149692816e-10,
	1.330476437424448948149715720858e-10,
}

// logGamma2 is log Gamma(2+t) for |t| <= 0.5, with full relative accuracy at its
// zero t = 0.
func logGamma2(t float64) float64 {
	c := &gammaSeries
	z := float64(t * t)
	even, odd := c[26], c[27]
	for k := 24; k >= 0; k -= 2 {
		even = c[k] + float64(z*even)
		odd = c[k+1] + float64(z*odd)
	}
	return float64(t * (even + float64(t*odd)))
}

// logGamma1p is log Gamma(1+a) for 0 <= a <= 1.5, with full relative accuracy at
// its zeros 0 and 1.
func logGamma1p(a float64) float64 {
	if a > 0.5 {
		return logGamma2(a - 1)
	}
	return logGamma2(a) - num.Log1p(a)
}

// gammaShape is a**a e**-a / Gamma(a), the gamma prefactor at its mean.
func gammaShape(a float64) float64 {
	if a >= stirlingFrom {
		return float64(math.Sqrt(float64(a*(1/(2*math.Pi)))) * num.Exp(-stirlingError(a)))
	}
	// Gamma(a) = Gamma(2+t) times or over the factors between; a - n is exact.
	t, factor := a, 1.0
	switch {
	case a <= 0.5:
		factor = float64(a * (1 + a))
	case a <= 1.5:
		t, factor = a-1, a
	default:
		below := 1.0
		for t = a - 2; t > 0.5; t-- {
			below *= t + 1
		}
		factor = 1 / below
	}
	e := num.Widen(0)
	if a > 1e-300 {
		e = num.LogWide(num.Widen(a)).Times(a)
	}
	return float64(factor * num.ExpWide(e.Plus(-a).Plus(-logGamma2(t))))
}

// logGammaRise is log(Gamma(b+a)/Gamma(b)) for 0 < a <= 1, to full accuracy
// relative to a however small a is.
func logGammaRise(b, a float64) float64 {
	shifted := 0.0
	for ; b < stirlingFrom; b++ {
		shifted += num.Log1p(a / b)
	}
	// Stirling's formula at b+a and b, every difference proportional to a.
	u := num.Log1p(a / b)
	r := 1 / b
	z := float64(r * r)
	errors := 0.0
	for k, c := range stirlingCoefficients {
		errors += float64(float64(c*r) * num.Expm1(-float64(float64(2*k+1)*u)))
		r *= z
		if r < 1e-20 {
			break
		}
	}
	// (b-1/2) u - a is b (u - a/b) - u/2.
	main := float64(b*num.Log1pmx(a/b)) - float64(0.5*u) + float64(a*num.Log(b+a))
	return (main + errors) - shifted
}

// A gammaPoint is x^a e^-x / Gamma(a) and what belongs to it: the distance of x
// from a, without rounding error, and the logarithm of the prefactor.
type gammaPoint struct {
	excess num.Wide // x - a
	log    float64
	factor float64
}

func gammaPointAt(a float64, x num.Wide) gammaPoint {
	p := gammaPoint{excess: x.Plus(-a)}
	// x^a e^-x / Gamma(a) = gammaShape(a) exp(a (log(x/a) - (x-a)/a)).
	e := deviance(x, num.Widen(a), p.excess.Over(a)).Times(a)
	g := gammaShape(a)
	p.factor = float64(g * num.ExpWide(e))
	p.log = e.Hi + num.Log(g)
	return p
}

// A betaPoint is x^a y^b / B(a, b) and what belongs to it.
type betaPoint struct {
	below  num.Wide // a y - b x = a - (a+b) x, positive below the mean
	log    float64  // of the prefactor
	factor float64  // x^a y^b / B(a, b)
}

// betaPointAt takes x and y = 1 - x.
func betaPointAt(x, y num.Wide, a, b float64) betaPoint {
	p := betaPoint{below: y.Times(a).Sub(x.Times(b))}
	ab := num.TwoSum(a, b)
	// With p = a/(a+b): a log(x/p) + b log(y/q), where x/p - 1 = -below/a and
	// y/q - 1 = below/b, so that the first-order terms cancel by themselves.
	e := deviance(x, num.Widen(a).Div(ab), p.below.Neg().Over(a)).Times(a)
	e = e.Add(deviance(y, num.Widen(b).Div(ab), p.below.Over(b)).Times(b))
	g := betaShape(a, b)
	p.factor = float64(g * num.ExpWide(e))
	p.log = e.Hi + num.Log(g)
	return p
}

// deviance is log(x/mean) - (x/mean - 1), where excess is x/mean - 1.
func deviance(x, mean, excess num.Wide) num.Wide {
	if x.Hi < 1e-280 {
		// The quotient may fall below the normal numbers.
		return num.LogWide(x).Sub(num.LogWide(mean)).Sub(excess)
	}
	return num.Log1pmxWide(x.Div(mean), excess)
}

// betaShape is the beta prefactor at its mean.
func betaShape(a, b float64) float64 {
	if a >= stirlingFrom && b >= stirlingFrom {
		d := stirlingError(a) + (stirlingError(b) - stirlingError(a+b))
		root := math.Sqrt(float64(a/(a+b)*b) / (2 * math.Pi))
		return float64(root * num.Exp(-d))
	}
	return float64(gammaShape(a) * float64(gammaShape(b)/gammaShape(a+b)))
}

// BetaPrefactor is x^a y^b / B(a, b), where x + y = 1 and the smaller of the two
// is taken as exact. It is the beta density times x y.
func BetaPrefactor(x, y, a, b float64) float64 {
	if !(x > 0) || !(y > 0) || !(a > 0) || !(b > 0) {
		if math.IsNaN(x + y + a + b) {
			return math.NaN()
		}
		return 0
	}
	xw, yw := complement(x, y)
	return betaPointAt(xw, yw, inRange(a), inRange(b)).factor
}

// GammaPrefactor is x^a e^-x / Gamma(a), the gamma density times x.
func GammaPrefactor(a, x float64) float64 {
	if !(x > 0) || !(a > 0) || x > 1e160 {
		if math.IsNaN(x + a) {
			return math.NaN()
		}
		return 0
	}
	if a < 1e-100 {
		return float64(a * num.Exp(-x)) // x^a and Gamma(1+a) are 1
	}
	return gammaPointAt(inRange(a), num.Widen(x)).factor
}

// complement gives x and y = 1 - x to double length, taking the smaller of the
// two as exact.
func complement(x, y float64) (num.Wide, num.Wide) {
	if x <= y {
		return num.Widen(x), num.TwoSum(1, -x)
	}
	return num.TwoSum(1, -y), num.Widen(y)
}
