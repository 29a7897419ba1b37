package dist

import (
	"math"

	"halfwidth/funcs/internal/num"
)

// tails is the answer at one point of a law: both tails, each also divided by
// the prefactor. The prefactor is the density of the logarithm (gamma) or of the
// log odds (beta), so that density/lower and density/upper are the slopes that
// Newton's method on a log tail needs, and they do not underflow.
type tails struct {
	lower, upper           float64
	lowerRatio, upperRatio float64 // tail over prefactor
	log, factor            float64 // the prefactor and its logarithm
}

// fromLower fills t when the lower tail is ratio times the prefactor and far
// enough from 1 for the upper tail to be one minus it.
func (t *tails) fromLower(ratio float64) {
	t.lowerRatio = ratio
	t.lower = min(float64(t.factor*ratio), 1)
	t.upper = 1 - t.lower
	t.upperRatio = t.upper / t.factor
}

func (t *tails) fromUpper(ratio float64) {
	t.upperRatio = ratio
	t.upper = min(float64(t.factor*ratio), 1)
	t.lower = 1 - t.upper
	t.lowerRatio = t.lower / t.factor
}

// logLower is the logarithm of the lower tail, right also where it underflows.
func (t *tails) logLower() float64 {
	if t.lower > 0.5 {
		return num.Log1p(-t.upper)
	}
	return t.log + num.Log(t.lowerRatio)
}

func (t *tails) logUpper() float64 {
	if t.upper > 0.5 {
		return num.Log1p(-t.lower)
	}
	return t.log + num.Log(t.upperRatio)
}

// of is one of the tails, logOf its logarithm.
func (t *tails) of(upper bool) float64 {
	if upper {
		return t.upper
	}
	return t.lower
}

func (t *tails) logOf(upper bool) float64 {
	if upper {
		return t.logUpper()
	}
	return t.logLower()
}

// moveShape corrects the tails for a shape that was rounded: grow is what the
// logarithm of the prefactor gains by the rest, and lost what the lower tail
// loses by it, in prefactors.
func (t *tails) moveShape(grow, lost float64) {
	if t.factor == 0 {
		return // what is lost may be more than a tail that is 0
	}
	t.lowerRatio = float64((t.lowerRatio - lost) * (1 - grow))
	t.upperRatio = float64((t.upperRatio + lost) * (1 - grow))
	t.lower -= float64(lost * t.factor)
	t.upper += float64(lost * t.factor)
	t.log += grow
	t.factor += float64(t.factor * grow)
}

// quadratureFrom is the shape past which a slow series or fraction gives way to
// quadrature of the density.
const quadratureFrom = 100

// gammaTailsAt gives both incomplete gamma ratios for a > 0 and 0 < x < Inf, to
// some units in the last place relative to each, however small:
//   - x small and a < 1: the power series of Gamma(a, x); the upper ratio is
//     formed by expm1, for it may be small where the lower one is near 1;
//   - x <= a: the positive series of the lower ratio;
//   - x > a: Legendre's continued fraction of the upper ratio;
//   - a large and x so near to a that these are slow: quadrature of the density.
//
// The regions follow A. Gil, J. Segura and N. Temme (2012), Efficient and
// accurate algorithms for the computation and inversion of the incomplete gamma
// function ratios, with quadrature in the place of the uniform expansion.
func gammaTailsAt(a float64, x num.Wide) tails {
	a = inRange(a)
	switch {
	case !(x.Hi > 0):
		return tails{upper: 1, upperRatio: math.Inf(1), log: math.Inf(-1)}
	case x.Hi > 1e160:
		return tails{lower: 1, lowerRatio: math.Inf(1), log: math.Inf(-1)}
	case a < 1 && x.Hi <= 1.2:
		return gammaSmall(a, x)
	}
	p := gammaPointAt(a, x)
	t := tails{log: p.log, factor: p.factor}
	near := a > quadratureFrom && math.Abs(p.excess.Hi) < 0.3*a
	switch {
	case p.excess.Hi <= 0 && near:
		t.fromLower(gammaLowerIntegral(a, -p.excess.Hi, reach(a, -p.excess.Hi, 0, 0)))
	case p.excess.Hi <= 0:
		t.fromLower(gammaLowerSeries(a, x.Hi))
	case near:
		t.fromUpper(gammaUpperIntegral(a, p.excess.Hi, reach(0, p.excess.Hi, a, 1)))
	default:
		t.fromUpper(gammaUpperFraction(a, p.excess.Hi))
	}
	return t
}

// inRange keeps a parameter where no product of two parameters, or quotient,
// leaves the range of float64. Beyond these limits a law is a step for any
// purpose, and so it stays.
func inRange(a float64) float64 { return min(max(a, 1e-120), 1e150) }

// gammaSmall is for a < 1 and x up to about 1: with c = x^a/Gamma(1+a),
// P = c (1 + a sum over n >= 1 of (-x)^n/(n! (a+n))).
func gammaSmall(a float64, x num.Wide) tails {
	sum, power := 0.0, 1.0
	for n := 1.0; n < 60; n++ {
		power *= -x.Hi / n
		term := power / (a + n)
		sum += term
		if math.Abs(term) < 1e-18*math.Abs(sum) || term == 0 {
			break
		}
	}
	return smallTails(a, x, -logGamma1p(a), sum, num.Exp(-x.Hi))
}

// smallTails gives the tails whose lower one is c (1 + a sum), where
// c = x^a e^l; the prefactor is a c other.
func smallTails(a float64, x num.Wide, l, sum, other float64) tails {
	e := num.LogWide(x).Times(a).Plus(l)
	c := num.ExpWide(e)
	tail := float64(a * sum)
	t := tails{factor: float64(float64(a*c) * other)}
	t.log = e.Hi + num.Log(float64(a*other))
	t.lower = min(c+float64(c*tail), 1)
	t.lowerRatio = (1 + tail) / float64(a*other)
	if t.lower <= 0.5 {
		t.upper = 1 - t.lower
	} else {
		t.upper = max(-num.Expm1(e.Hi)-float64(c*tail), 0)
		t.lower = 1 - t.upper
	}
	t.upperRatio = t.upper / t.factor
	return t
}

// gammaLowerSeries is P(a, x) over the prefactor, the sum of x^n/(a)_(n+1).
func gammaLowerSeries(a, x float64) float64 {
	term, sum := 1/a, 1/a
	for n := a + 1; term > 1e-17*sum; n++ {
		term = float64(term * (x / n))
		sum += term
	}
	return sum
}

// gammaUpperFraction is Q(a, x) over the prefactor by the even part of
// Legendre's continued fraction, 1/(x+1-a - 1(1-a)/(x+3-a - 2(2-a)/(x+5-a - ...,
// by the forward recurrence of its convergents; excess is x - a.
func gammaUpperFraction(a, excess float64) float64 {
	b := excess + 1
	p0, q0, p1, q1 := 0.0, 1.0, 1.0, b
	last := 1 / b
	for n := 1.0; n < 5000; n++ {
		b += 2
		c := float64(n * (a - n))
		p0, p1 = p1, float64(b*p1)+float64(c*p0)
		q0, q1 = q1, float64(b*q1)+float64(c*q0)
		r := 1 / q1
		p0, q0, p1, q1 = float64(p0*r), float64(q0*r), float64(p1*r), 1
		if math.Abs(p1-last) <= 1e-16*p1 {
			return p1
		}
		last = p1
	}
	return last
}

// gammaLowerIntegral is the integral from 0 to width of
// exp(a (log(1-t) + t) - below t)/(1-t), the part of the gamma law between
// x (1-width) and x over its prefactor at x = a - below.
func gammaLowerIntegral(a, below, width float64) float64 {
	return num.Legendre(func(t float64) float64 {
		return num.Exp(float64(a*num.Log1pmx(-t))-float64(below*t)) / (1 - t)
	}, 0, width)
}

// gammaUpperIntegral is the same on the other side, between x and x (1+width)
// at x = a + above.
func gammaUpperIntegral(a, above, width float64) float64 {
	return num.Legendre(func(t float64) float64 {
		return num.Exp(float64(a*num.Log1pmx(t))-float64(above*t)) / (1 + t)
	}, 0, width)
}

// negligible is the fall of an integrand, as a power of e, past which it is left out.
const negligible = 39

// reach is a t at which a (log(1-t)+t) + b (log(1+rt) - rt) - slope t has fallen
// to about -negligible; it errs on the far side.
func reach(a, slope, b, r float64) float64 {
	// A parabola through the curvatures at 0 reaches too far for the first term
	// and not far enough for the second, so Newton's steps follow: the function
	// is concave and each step ends on the far side.
	curve := a + float64(float64(b*r)*r)
	t := 2 * negligible / (slope + math.Sqrt(float64(slope*slope)+float64(2*negligible*curve)))
	if b == 0 {
		return min(t, 1)
	}
	for range 4 {
		if a > 0 && t >= 1 {
			return 1
		}
		f := -float64(slope * t)
		d := -slope
		if a > 0 {
			f += float64(a * num.Log1pmx(-t))
			d -= float64(a*t) / (1 - t)
		}
		f += float64(b * num.Log1pmx(float64(r*t)))
		d -= float64(float64(float64(b*r)*r)*t) / (1 + float64(r*t))
		step := (f + negligible) / d
		t -= step
		if math.Abs(step) < 0.01*t {
			break
		}
	}
	if a > 0 {
		t = min(t, 1)
	}
	return t
}

// gammaTailsBeyond is gammaTailsAt for the shape a + j, without rounding it: at
// 5e9 its last place moves a tail of 1e-300 by 1e-10. The derivative of the lower
// tail by a is nearly what it loses from a - 1/2 to a + 1/2.
func gammaTailsBeyond(a, j float64, x num.Wide) tails {
	s := num.TwoSum(a, j)
	t := gammaTailsAt(s.Hi, x)
	if r := x.Hi / s.Hi; s.Lo != 0 && r > 0.01 && r < 100 {
		t.moveShape(gammaGrowth(s, x.Hi), s.Lo/(math.Sqrt(s.Hi)*math.Sqrt(x.Hi)))
	}
	return t
}

// gammaFactorBeyond is x^s e^-x / Gamma(s) for s = a + j.
func gammaFactorBeyond(a, j float64, x num.Wide) float64 {
	s := num.TwoSum(a, j)
	if s.Hi < 1e-100 || x.Hi > 1e160 {
		return GammaPrefactor(s.Hi, x.Hi)
	}
	f := gammaPointAt(inRange(s.Hi), x).factor
	return f + float64(f*gammaGrowth(s, x.Hi))
}

// gammaGrowth is what the rest of a shape adds to log(x^s e^-x / Gamma(s)).
func gammaGrowth(s num.Wide, x float64) float64 {
	if s.Lo == 0 {
		return 0
	}
	return float64(s.Lo * (num.Log(x/s.Hi) + 1/(2*s.Hi)))
}

// GammaTails gives the incomplete gamma ratios P(a, x) and Q(a, x), each with
// full relative accuracy (1e-14 to a = 1e10 and down to 1e-300).
func GammaTails(a, x float64) (lower, upper float64) {
	switch {
	case !(a > 0) || math.IsInf(a, 1) || math.IsNaN(x):
		return math.NaN(), math.NaN()
	case x <= 0:
		return 0, 1
	case math.IsInf(x, 1):
		return 1, 0
	}
	t := gammaTailsAt(a, num.Widen(x))
	return t.lower, t.upper
}
