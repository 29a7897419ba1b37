package dist

import (
	"math"

	"halfwidth/funcs/internal/num"
)

// The inverses solve log tail = log p in the logarithm of the argument (gamma)
// or its log odds (beta). There both tails are log-concave whatever the
// parameters, so that Newton's method can't go astray; the second derivative is
// known from the tail itself, and so each step uses it.

// newtonStep is the step in the argument w, along which the tail rises with
// slope 1/ratio of its logarithm, from a point where the tail is gap = log
// tail - log p too high. drift is the slope of the log density.
func newtonStep(gap, ratio, drift float64) float64 {
	h := 1 / ratio
	curve := min(drift-h, 0) // the second derivative over h
	if gap > 0 {
		// A parabola, as for a normal tail.
		return -2 * gap / (h + math.Sqrt(float64(h*(h-2*float64(gap*curve)))))
	}
	return -gap * ratio / max(1-gap*curve/(2*h), 0.25)
}

// gapTo is log tail - log p, free of cancellation near 0.
func gapTo(tail, p, logTail, logP float64) float64 {
	if r := tail / p; r > 0.5 && r < 2 && p > 1e-307 {
		return num.Log1p((tail - p) / p)
	}
	return logTail - logP
}

// settled says that the next step, of third order, ends at float64 resolution,
// or that the tail no longer tells one step from another.
func settled(gap, step float64) bool {
	gap = math.Abs(gap)
	return gap < 1e-5 && math.Abs(step) < 0.01 || gap < 4e-16
}

// leadingOnly is the logarithm of an argument so small that the leading term of
// the lower tail is all of it. That term is inverted in logarithms, for with
// shapes near 1e-3 the argument moves a thousand times as fast as its tail.
const leadingOnly = -40

// logProbability is log p to double length, where p + q = 1 and the smaller of
// the two is exact.
func logProbability(p, q float64) num.Wide {
	if p <= q {
		return num.LogWide(num.Widen(p))
	}
	return num.LogWide(num.TwoSum(1, -q))
}

// gammaInverse is x with P(a, x) = lower or Q(a, x) = upper, whichever is
// smaller; the two sum to 1.
func gammaInverse(a, lower, upper float64) float64 {
	a = inRange(a)
	if a < 1 {
		// P(a, x) = x^a/Gamma(1+a) for small x.
		if l := logProbability(lower, upper).Plus(logGamma1p(a)).Over(a); l.Hi < leadingOnly {
			return num.ExpWide(l)
		}
	}
	p, sign := lower, 1.0
	if upper < lower {
		p, sign = upper, -1
	}
	logP := num.Log(p)
	x := gammaStart(a, p, logP, sign)
	lo, hi := 0.0, math.Inf(1)
	for range 100 {
		t := gammaTailsAt(a, num.Widen(x))
		var gap, ratio float64
		if sign > 0 {
			gap, ratio = gapTo(t.lower, p, t.logLower(), logP), t.lowerRatio
		} else {
			gap, ratio = gapTo(t.upper, p, t.logUpper(), logP), t.upperRatio
		}
		step := float64(sign * newtonStep(gap, ratio, float64(sign*(a-x))))
		if settled(gap, step) {
			return x + float64(x*num.Expm1(max(min(step, 0.01), -0.01)))
		}
		if gap*sign > 0 {
			hi = x
		} else {
			lo = x
		}
		next := x * num.Exp(max(min(step, 700), -700))
		if !(next > lo && next < hi) {
			next = math.Sqrt(lo) * math.Sqrt(hi)
		}
		if next == x || next < 1e-307 || next > 1e308 {
			return next
		}
		x = next
	}
	return x
}

// gammaStart is a first guess, at best to a few digits.
func gammaStart(a, p, logP, sign float64) float64 {
	var x float64
	if a >= 0.7 {
		// Wilson and Hilferty's cube.
		z := sign * Normal{}.Quantile(p)
		c := 1 - 1/(9*a) + z/(3*math.Sqrt(a))
		if c > 0 {
			x = a * c * c * c
		}
	}
	if sign < 0 {
		if a < 0.7 {
			// P(X > x) <= e^-x/Gamma(a) for x >= 1.
			x = max(num.Log(a)-logP, 0.2)
		}
		return x
	}
	// P(X <= x) <= x^a/Gamma(1+a), nearly equal for small x.
	var l float64
	if a < 1 {
		l = logGamma1p(a)
	} else {
		l = float64(a*num.Log(a)) - a - num.Log(gammaShape(a)/a)
	}
	return max(x, num.Exp(max((logP+l)/a, -700)))
}

// betaRoot is a solution of the beta inverse: x, y = 1 - x, and x/y.
type betaRoot struct{ x, y, odds float64 }

// swapped is the root of the mirrored law.
func (r betaRoot) swapped() betaRoot { return betaRoot{r.y, r.x, 1 / r.odds} }

// betaInverse solves I_x(a, b) = lower or 1 - I_x(a, b) = upper, whichever is
// smaller; the two sum to 1.
func betaInverse(a, b, lower, upper float64) betaRoot {
	a, b = inRange(a), inRange(b)
	if r, ok := betaEdge(a, b, lower, upper); ok {
		return r
	}
	if r, ok := betaEdge(b, a, upper, lower); ok {
		return r.swapped()
	}
	if upper < lower {
		return betaNewton(b, a, upper).swapped()
	}
	return betaNewton(a, b, lower)
}

// betaEdge inverts I_x(a, b) = x^a/(a B(a, b)) where that is all of it.
func betaEdge(a, b, lower, upper float64) (r betaRoot, ok bool) {
	if a >= 1 {
		return r, false
	}
	l := logProbability(lower, upper)
	if b < 0.5 {
		// Gamma(b)/Gamma(a+b) = (a+b)/b Gamma(1+b)/Gamma(1+a+b), the quotient in full.
		l = l.Add(num.LogWide(num.TwoSum(a, b).Over(b))).Plus(logGamma1p(b) - logGamma1p(a+b))
	} else {
		l = l.Plus(-logGammaRise(b, a))
	}
	l = l.Plus(logGamma1p(a)).Over(a)
	if l.Hi+num.Log(max(b, 1)) >= leadingOnly {
		return r, false
	}
	x := num.ExpWide(l)
	return betaRoot{x, 1, x}, true
}

// betaNewton solves I_x(a, b) = lower for lower <= 1/2.
func betaNewton(a, b, lower float64) betaRoot {
	p, logP := lower, num.Log(lower)
	w := max(min(betaStart(a, b, p, logP), 700), -700)
	e := num.Exp(-math.Abs(w))
	x, y := e/(1+e), 1/(1+e)
	if w > 0 {
		x, y = y, x
	}
	lo, hi := -708.0, 708.0
	for range 100 {
		xw, yw := complement(x, y)
		t := betaTailsAt(xw, yw, a, b)
		gap := gapTo(t.lower, p, t.logLower(), logP)
		drift := float64(a*y) - float64(b*x)
		step := newtonStep(gap, t.lowerRatio, drift)
		if gap > 0 {
			hi = w
		} else {
			lo = w
		}
		done := settled(gap, step)
		if done {
			step = max(min(step, 0.01), -0.01)
		} else if !(w+step > lo && w+step < hi) {
			step = float64(0.5*(lo+hi)) - w
		}
		e := float64(x * num.Exp(step))
		sum := e + y
		if done || step == 0 {
			odds := xw.Div(yw).Float()
			root := betaRoot{e / sum, y / sum, odds + float64(odds*num.Expm1(step))}
			if root.x > root.y {
				root.x = 1 - root.y
			} else {
				root.y = 1 - root.x
			}
			return root
		}
		x, y = e/sum, y/sum
		w += step
		switch {
		case x < 1e-307:
			return betaRoot{x: 0, y: 1, odds: 0}
		case y < 1e-307:
			return betaRoot{x: 1, y: 0, odds: math.Inf(1)}
		}
	}
	return betaRoot{x, y, x / y}
}

// betaStart is a first guess of the log odds for a lower tail p <= 0.5.
func betaStart(a, b, p, logP float64) float64 {
	// I_x is nearly x^a/(a B) for small x, and no more than it for b >= 1.
	power := (logP + logABeta(a, b)) / a
	switch {
	case a >= 1 && b >= 1:
		// Abramowitz and Stegun 26.5.22, with 2a-1 and 2b-1 kept off 1.
		w := num.Log(a / b)
		z := Normal{}.UpperQuantile(p)
		ra, rb := 1/(float64(2*a)-0.9), 1/(float64(2*b)-0.9)
		h := 2 / (ra + rb)
		if l := (float64(z*z) - 3) / 6; h+l > 0 {
			w -= float64(2 * (z*math.Sqrt(h+l)/h - float64((rb-ra)*(l+5.0/6-2/(3*h)))))
		}
		if power < -0.7 {
			w = max(w, power)
		}
		return w
	case a >= 1:
		// Nearly a gamma law with shape b for -log x, upper tail.
		g := gammaStart(b, p, logP, -1) / (a + float64((b-1)/2))
		return -num.Log(num.Expm1(g))
	case power < -0.7:
		return power
	case b >= 1:
		// Nearly a gamma law with shape a for -log y.
		g := gammaStart(a, p, logP, 1) / (b + float64((a-1)/2))
		return num.Log(num.Expm1(g))
	}
	if power = (num.Log1p(-p) + logABeta(b, a)) / b; power < -0.7 {
		return -power
	}
	return 0
}

// logABeta is log(a B(a, b)), good enough for a first guess.
func logABeta(a, b float64) float64 {
	if a < 1 {
		return logGamma1p(a) - logGammaRise(b, a)
	}
	// The prefactor at the mean is mean^a (1-mean)^b / B.
	s := a + b
	return float64(a*num.Log(a/s)) + float64(b*num.Log(b/s)) - num.Log(betaShape(a, b)/a)
}
