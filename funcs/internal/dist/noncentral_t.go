package dist

import (
	"math"

	"halfwidth/funcs/internal/num"
)

// NoncentralT is the law of T = (Z + Noncentrality)/s, where Z is standard
// normal and s^2 an independent chi-square over its DF (> 0, may be infinite).
//
// Each tail is its own positive integral, E Phi(Noncentrality - t s) above t and
// E Phi(t s - Noncentrality) below (Johnson & Welch 1940, Biometrika 31,
// 362-389; Owen 1965, Biometrika 52, 437-446), by the trapezoidal rule in log s.
// Relative error 1e-13 for |Noncentrality| to 100 and tails to 1e-100, 1e-12
// farther out.
type NoncentralT struct{ DF, Noncentrality float64 }

func (d NoncentralT) valid() bool { return d.DF > 0 && !math.IsNaN(d.Noncentrality) }

// SF is P(T > t).
func (d NoncentralT) SF(t float64) float64 { return min(1, num.Exp(d.logSF(t))) }

// CDF is P(T <= t).
func (d NoncentralT) CDF(t float64) float64 { return d.mirror().SF(-t) }

// mirror is the law of -T.
func (d NoncentralT) mirror() NoncentralT { return NoncentralT{d.DF, -d.Noncentrality} }

// Between is P(a <= T <= b): where the tails nearly cancel, as an average over s,
// or over Z, of the probability that the other lies between its limits.
func (d NoncentralT) Between(a, b float64) float64 {
	return between(d, a, b, func() float64 {
		switch {
		case d.DF > manyDF:
			return Normal{}.Between(a-d.Noncentrality, b-d.Noncentrality)
		case b < 0 && (d.far() || -b > d.power()):
			return d.mirror().Between(-b, -a)
		case a > d.power():
			return float64(d.SF(a) * lostBetween(d.DF, a, b))
		case d.far() && a > 0:
			return narrowly(a, b, d.densityOverZ)
		}
		return d.betweenOverScale(a, b)
	})
}

// farNoncentrality is where integrating over Z takes the place of integrating
// over s: the step that Phi makes in log s is then too narrow beside the width
// of the density.
const farNoncentrality = 100

// logSF is log P(T > t).
func (d NoncentralT) logSF(t float64) float64 {
	delta := d.Noncentrality
	switch {
	case !d.valid() || math.IsNaN(t):
		return math.NaN()
	case math.IsInf(t, 1):
		return math.Inf(-1)
	case math.IsInf(t, -1):
		return 0
	case math.IsInf(delta, 0):
		return min(delta, 0)
	case math.Abs(t) < 1e-170:
		return NormalLogCDF(delta) // t s is nothing beside delta for any likely s
	case d.DF > manyDF:
		return NormalLogCDF(delta - t)
	}
	if far := d.power(); t > far {
		return d.logSF(far) - float64(d.DF*num.Log(t/far))
	}
	// Where this is not the smaller tail, take the complement.
	if t < delta {
		if below := num.Exp(d.mirror().integral(-t)); below < 0.99 {
			return num.Log1p(-below)
		}
	}
	return d.integral(t)
}

// power is where the tail becomes a power of t: s has to be so small that its
// density is one, to a relative 1e-20.
func (d NoncentralT) power() float64 {
	return 1e10 * (math.Abs(d.Noncentrality) + 40) * max(1, math.Sqrt(d.DF))
}

// integral is log P(T > t), by whichever order of integration is smoother.
func (d NoncentralT) integral(t float64) float64 {
	if d.far() {
		return d.logSFOverZ(t)
	}
	return d.logSFOverScale(t)
}

func (d NoncentralT) far() bool {
	delta := math.Abs(d.Noncentrality)
	return delta > farNoncentrality && delta > 7*math.Sqrt(d.DF)
}

// UpperQuantile is t with P(T > t) = q.
func (d NoncentralT) UpperQuantile(q float64) float64 {
	switch {
	case !d.valid() || !(q >= 0 && q <= 1):
		return math.NaN()
	case math.IsInf(d.Noncentrality, 0):
		return d.Noncentrality
	case q == 0:
		return math.Inf(1)
	case q == 1:
		return math.Inf(-1)
	}
	if math.Abs(d.Noncentrality) < 1 && d.DF <= manyDF {
		// Near 0, t is known by what lies between 0 and it.
		central := Normal{}.Between(0, math.Abs(d.Noncentrality))
		if h := math.Copysign(central, d.Noncentrality) - (q - 0.5); h == 0 {
			return 0
		} else if h < 0 && h > -0.1 {
			return -d.mirror().fromZero(-h)
		} else if h > 0 && h < 0.1 {
			return d.fromZero(h)
		}
	}
	if q > 0.5 {
		return -d.mirror().solveUpper(1 - q)
	}
	return d.solveUpper(q)
}

// Quantile is t with P(T <= t) = p.
func (d NoncentralT) Quantile(p float64) float64 { return -d.mirror().UpperQuantile(p) }

// TPower is the probability that a t test with the given critical value (> 0)
// rejects: above it, and with twoSided also below its mirror image.
func TPower(df, noncentrality, tCritical float64, twoSided bool) float64 {
	d := NoncentralT{df, noncentrality}
	power := d.SF(tCritical)
	if twoSided {
		power += d.CDF(-tCritical)
	}
	return min(power, 1)
}

// fromZero is t with P(0 < T < t) = p for small p.
func (d NoncentralT) fromZero(p float64) float64 {
	logP := num.Log(p)
	f := func(u float64) float64 { return num.Log(d.Between(0, num.Exp(u))) - logP }
	t := num.Exp(crossing(f, logP+1, 0.5, -745, 709, math.Abs(logP)))
	if p < 1e-6 {
		t *= p / d.Between(0, t) // proportional, near 0
	}
	return t
}

// solveUpper finds t from its upper tail q <= 1/2, in asinh t, which is t near 0
// and its logarithm far out.
func (d NoncentralT) solveUpper(q float64) float64 {
	nu, delta := d.DF, d.Noncentrality
	z := Normal{}.UpperQuantile(q)
	if nu > manyDF || math.IsInf(delta, 0) {
		return delta + z
	}
	target := num.Log(q)
	f := func(y float64) float64 { return d.logSF(num.Sinh(y)) - target }
	spread := num.Hypot(1, delta/math.Sqrt(2*nu))
	start := delta + float64(z*min(spread, 1e150))
	step := 0.5
	if spread < 1e150 {
		step = min(spread/num.Hypot(1, start), 0.5)
	}
	first := math.Copysign(num.Log(math.Abs(start)+num.Hypot(start, 1)), start)
	y := crossing(f, first, step, -largestLog, largestLog, math.Abs(target))
	if math.Abs(y) >= largestLog {
		return math.Copysign(math.Inf(1), y)
	}
	return num.Sinh(y)
}
