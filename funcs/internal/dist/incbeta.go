package dist

import (
	"math"

	"halfwidth/funcs/internal/num"
)

// betaTailsAt gives both incomplete beta ratios for a, b > 0 and 0 < x < 1, to
// some units in the last place relative to each, however small. With x taken as
// the side below the mean a/(a+b):
//   - the positive series of I_x where it is quick;
//   - else the continued fraction of DiDonato and Morris, which starts from the
//     distance to the mean and so loses nothing near it;
//   - quadrature of the density where both parameters are large and x is near
//     the mean, so that the fraction is slow;
//   - where a < 1 and b x is small, the power series of I_x, with the upper ratio
//     formed by expm1.
//
// The regions follow A. DiDonato and A. Morris (1992), Algorithm 708: Significant
// digit computation of the incomplete beta function ratios, with quadrature in
// the place of its asymptotic expansions.
func betaTailsAt(x, y num.Wide, a, b float64) tails {
	a, b = inRange(a), inRange(b)
	swap := false
	switch {
	case a < 1 && b < 1:
		swap = x.Hi > 0.5
	case a < 1:
	case b < 1:
		swap = true
	default:
		swap = float64(b*x.Hi) > float64(a*y.Hi)
	}
	if swap {
		t := betaTailsOrdered(y, x, b, a)
		t.lower, t.upper = t.upper, t.lower
		t.lowerRatio, t.upperRatio = t.upperRatio, t.lowerRatio
		return t
	}
	return betaTailsOrdered(x, y, a, b)
}

// betaTailsOrdered takes the law with a < 1, or with x not above the mean.
func betaTailsOrdered(x, y num.Wide, a, b float64) tails {
	if a < 1 && x.Hi <= 0.5 && float64(b*x.Hi) <= 1.2 {
		return betaSmall(x, y, a, b)
	}
	p := betaPointAt(x, y, a, b)
	t := tails{log: p.log, factor: p.factor}
	if a < 1 {
		// The mean is far below x: the upper tail, seen from its own side.
		t.fromUpper(betaNearRatio(y.Hi, x.Hi, b, a, -p.below.Hi))
	} else {
		t.fromLower(betaNearRatio(x.Hi, y.Hi, a, b, p.below.Hi))
	}
	return t
}

// betaNearRatio is I_x(a, b) over its prefactor for x not above the mean;
// below = a - (a+b) x.
func betaNearRatio(x, y, a, b, below float64) float64 {
	switch {
	case x < 0.7 && float64(x*(a+b)) < 0.7*(a+1):
		return betaSeries(x, a, b)
	case min(a, b) > quadratureFrom && below < 0.3*min(a, b):
		return betaIntegral(x/y, a, b, below, y, reach(a, below/y, b, x/y))
	}
	return betaFraction(x, y, a, b, below)
}

// betaSmall is for a < 1 and b x up to about 1: with c = x^a/(a B(a, b)),
// I_x = c (1 + a sum over n >= 1 of (1-b)_n x^n/(n! (a+n))).
func betaSmall(x, y num.Wide, a, b float64) tails {
	sum, power := 0.0, 1.0
	for n := 1.0; n < 200; n++ {
		power *= float64((n-b)/n) * x.Hi
		term := power / (a + n)
		sum += term
		if math.Abs(term) < 1e-18*math.Abs(sum) || term == 0 {
			break
		}
	}
	l := logGammaRise(b, a) - logGamma1p(a)
	return smallTails(a, x, l, sum, num.PowWide(y, b))
}

// betaSeries is I_x(a, b) over its prefactor, the sum of (a+b)_n x^n/(a)_(n+1).
func betaSeries(x, a, b float64) float64 {
	term, sum := 1/a, 1/a
	for n := 0.0; term > 1e-17*sum; n++ {
		term = float64(term * (float64(x*(a+b+n)) / (a + 1 + n)))
		sum += term
	}
	return sum
}

// betaFraction is I_x(a, b) over its prefactor by the continued fraction of
// DiDonato and Morris (1992), their equation for BFRAC, whose first element
// holds the distance from the mean.
func betaFraction(x, y, a, b, below float64) float64 {
	c0 := 1 + 1/a
	c := 1 + below
	yp1 := 1 + y
	p, s, n := 1.0, a+1, 0.0
	an, bn, an1 := 0.0, 1.0, 1.0
	bn1 := c / c0
	r := c0 / c
	for n < 20000 {
		n++
		t := n / a
		w := float64(float64(n*(b-n)) * x)
		e := a / s
		alpha := float64(float64(float64(float64(p*(p+b/a))*float64(e*e))) * float64(w*x))
		e = (1 + t) / (c0 + t + t)
		beta := n + w/s + float64(e*(c+float64(n*yp1)))
		p = 1 + t
		s += 2
		an, an1 = an1, float64(alpha*an)+float64(beta*an1)
		bn, bn1 = bn1, float64(alpha*bn)+float64(beta*bn1)
		last := r
		r = an1 / bn1
		if math.Abs(r-last) <= 1e-16*r {
			break
		}
		an, bn, an1, bn1 = an/bn1, bn/bn1, r, 1
	}
	return r
}

// betaIntegral is the part of the beta law between x (1-width) and x over its
// prefactor at x: the integral from 0 to width of
// exp(a (log(1-t) + t) + b (log(1+rt) - rt) - below t/y)/((1-t) (1+rt) y), r = x/y.
func betaIntegral(r, a, b, below, y, width float64) float64 {
	slope := below / y
	return num.Legendre(func(t float64) float64 {
		rt := float64(r * t)
		e := float64(a*num.Log1pmx(-t)) + float64(b*num.Log1pmx(rt)) - float64(slope*t)
		return num.Exp(e) / float64((1-t)*(1+rt))
	}, 0, width) / y
}

// betaTailsBeyond is betaTailsAt for the parameters a + j and b, without rounding
// their sum; as gammaTailsBeyond.
func betaTailsBeyond(x, y num.Wide, a, j, b float64) tails {
	s := num.TwoSum(a, j)
	t := betaTailsAt(x, y, s.Hi, b)
	if r := x.Hi * ((s.Hi + b) / s.Hi); s.Lo != 0 && r > 0.01 && r < 100 {
		t.moveShape(betaGrowth(s, x.Hi, b), s.Lo/(math.Sqrt(s.Hi)*math.Sqrt(s.Hi+b)*math.Sqrt(x.Hi)))
	}
	return t
}

// betaFactorBeyond is x^s y^b / B(s, b) for s = a + j.
func betaFactorBeyond(x, y num.Wide, a, j, b float64) float64 {
	s := num.TwoSum(a, j)
	f := betaPointAt(x, y, inRange(s.Hi), inRange(b)).factor
	return f + float64(f*betaGrowth(s, x.Hi, b))
}

// betaGrowth is what the rest of s adds to log(x^s y^b / B(s, b)).
func betaGrowth(s num.Wide, x, b float64) float64 {
	if s.Lo == 0 {
		return 0
	}
	return float64(s.Lo * (num.Log(x*((s.Hi+b)/s.Hi)) + 1/(2*s.Hi) - 1/(2*(s.Hi+b))))
}

// BetaTails gives I_x(a, b) and 1 - I_x(a, b), each with full relative accuracy
// (1e-14 to a, b = 1e10 and down to 1e-300). y is 1 - x, carried apart: the
// smaller of the two is taken as exact.
func BetaTails(x, y, a, b float64) (lower, upper float64) {
	switch {
	case !(a > 0) || !(b > 0) || math.IsInf(a, 1) || math.IsInf(b, 1) || math.IsNaN(x) || math.IsNaN(y):
		return math.NaN(), math.NaN()
	case x <= 0:
		return 0, 1
	case y <= 0:
		return 1, 0
	}
	xw, yw := complement(x, y)
	t := betaTailsAt(xw, yw, a, b)
	return t.lower, t.upper
}
