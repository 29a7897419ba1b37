package dist

import (
	"math"

	"halfwidth/funcs/internal/num"
)

// The double integral behind noncentral t, in both orders: over the scale s with
// a normal probability inside, and over the normal variable with a probability
// of s inside.

// logSFOverScale integrates over log s, with s = exp(u), u = peak + w.
func (d NoncentralT) logSFOverScale(t float64) float64 {
	nu, delta := d.DF, d.Noncentrality
	peak := d.peakLogScale(t)
	sPeak := num.Exp(peak)
	logIntegrand := func(w float64) float64 {
		u := peak + w
		var x float64
		if math.Abs(u) < 0.5 {
			x = (delta - t) - float64(t*num.Expm1(u))
		} else {
			x = delta - float64(t*(sPeak*num.Exp(w)))
		}
		return float64(nu*scaleExponent(u)) + NormalLogCDF(x)
	}
	top := logIntegrand(0)
	if top < -2000 {
		return top // far below the smallest float64
	}
	f := func(w float64) float64 { return num.Exp(logIntegrand(w) - top) }
	apart := 0.0
	switch {
	case nu < 0.5 && t < 0:
		// A step of Phi on a nearly level density: Phi(delta) apart, the rest
		// E P(delta < Z < delta - t s) vanishes with s.
		apart = NormalLogCDF(delta)
		f = func(w float64) float64 {
			u := peak + w
			rise := Normal{}.Between(delta, delta-float64(t*(sPeak*num.Exp(w))))
			return num.Exp(float64(nu*scaleExponent(u)) + num.Log(rise) - top)
		}
	case nu < 30:
		// With w = v - exp(-v-3) the slow left tail exp(nu*u) of few degrees of
		// freedom ends doubly exponentially in v; nothing changes near the peak.
		g := f
		f = func(v float64) float64 {
			e := num.Exp(-v - 3)
			return g(v-e) * (1 + e)
		}
	}
	// The frequencies that the integrand holds: those of the density, and those
	// of Phi(delta - t s), which changes over 1/(t s): at the peak where it is
	// small there, else where t s is about delta.
	ts := math.Abs(t) * sPeak
	edge := min(ts*(1+9/math.Sqrt(2*nu)), math.Abs(delta)+8)
	if delta-math.Copysign(ts, t) < 0 {
		edge = max(edge, ts)
	}
	band := num.Hypot(math.Sqrt(2*nu)*max(1, sPeak), edge)
	step := min(0.18, 1/band)
	integral := top + num.Log(scaleDensity1(nu)*num.Trapezoid(f, 0, step, 1e-8))
	if apart != 0 {
		integral = num.Log(num.Exp(integral) + num.Exp(apart))
	}
	return integral
}

// peakLogScale is log s where the density of log s times Phi(delta - t s) is
// largest, to a small part of the width of that peak. There is one peak only.
func (d NoncentralT) peakLogScale(t float64) float64 {
	nu, delta := d.DF, d.Noncentrality
	u := 0.0
	if delta-t < 0 {
		// With log Phi(x) about -x^2/2: (nu + t^2) s^2 - t delta s - nu = 0.
		a := math.Abs(t)
		along := math.Copysign(delta, delta*math.Copysign(1, t))
		root := num.Hypot(delta, 2*math.Sqrt(nu)*num.Hypot(1, math.Sqrt(nu)/a))
		if along > 0 {
			u = num.Log((along + root) / 2 / (a + nu/a))
		} else {
			u = num.Log(2 * nu / a / (root - along))
		}
	}
	for range 50 {
		s := num.Exp(u)
		x := delta - float64(t*s)
		ts, r := t*s, normalHazard(x)
		slope := nu - float64(nu*s*s) - float64(ts*r)
		bend := float64(2*nu*s*s) + float64(ts*r) + float64(ts*ts*r*(x+r))
		move := math.Copysign(0.5, slope)
		if bend > 0 {
			move = min(max(slope/bend, -1), 1)
		}
		u += move
		if math.Abs(move)*math.Sqrt(math.Abs(bend)) < 0.1 || math.Abs(move) < 1e-9 {
			break
		}
	}
	return u
}

// logSFOverZ integrates P(s < (z + delta)/t) over z, for a delta so far from 0
// that the other sign of z + delta has no weight.
func (d NoncentralT) logSFOverZ(t float64) float64 {
	nu, delta := d.DF, d.Noncentrality
	if delta < 0 && t > 0 {
		return math.Inf(-1) // at most Phi(-farNoncentrality)
	}
	if delta > 0 && t < 0 {
		return 0
	}
	tail := func(z float64) float64 {
		r := (z + delta) / t
		if r <= 0 {
			return 0
		}
		below, above := GammaTails(nu/2, nu/2*r*r)
		if t < 0 {
			return above
		}
		return below
	}
	if first, last := tail(-40), tail(40); first == last {
		return num.Log(first) // certain, or too small, over all of z that counts
	}
	// In the tail, z is pulled to where z^2 + nu (r^2 - 2 log r) is smallest.
	root := math.Sqrt(nu) / math.Abs(t)
	z := 0.0
	if t > delta {
		a := math.Abs(delta)
		y := (a + num.Hypot(a, 2*math.Sqrt(nu)*num.Hypot(1, root))) / 2 / (1 + float64(root*root))
		z = y - a
		if t < 0 {
			z = a - y
		}
	}
	step := min(0.5, 0.8/num.Hypot(1, num.Hypot(root, math.Sqrt(nu)/(z+delta))))
	f := func(z float64) float64 { return num.Exp(-float64(z*z)/2) * tail(z) }
	return num.Log(num.Trapezoid(f, z, step, 1e-8) / math.Sqrt(2*math.Pi))
}

// densityOverZ is t times the density of T at t > 0, for a large noncentrality:
// an average over z of the density of log s at (z + delta)/t.
func (d NoncentralT) densityOverZ(t num.Wide) float64 {
	half, delta := d.DF/2, d.Noncentrality
	root := math.Sqrt(d.DF) / t.Hi
	f := func(z float64) float64 {
		r := num.TwoSum(z, delta)
		if r.Hi <= 0 {
			return 0
		}
		r = r.Div(t)
		return num.Exp(-float64(z*z)/2) * gammaPointAt(half, r.Mul(r).Times(half)).factor
	}
	y := (delta + num.Hypot(delta, 2*math.Sqrt(d.DF)*num.Hypot(1, root))) / 2 / (1 + float64(root*root))
	step := min(0.5, 0.8/num.Hypot(1, num.Hypot(root, math.Sqrt(d.DF)/y)))
	return 2 * num.Trapezoid(f, y-delta, step, 1e-8) / math.Sqrt(2*math.Pi)
}

// betweenOverScale is P(a <= T <= b) as an average over s.
func (d NoncentralT) betweenOverScale(a, b float64) float64 {
	nu, delta := d.DF, d.Noncentrality
	// The density of T at t is largest in s at the positive root of
	// (nu + t^2) s^2 - t delta s - (nu + 1) = 0.
	middle := num.TwoSum(a/2, b/2)
	t := middle.Hi
	p, q := nu/(nu+float64(t*t)), t/(nu+float64(t*t))*delta
	s := q/2 + math.Sqrt(float64(q*q)/4+float64(p*(1+1/nu)))
	logS, apart := num.Log(s), middle.Plus(-delta).Float()
	f := func(w float64) float64 {
		u := logS + w
		x := s * num.Exp(w)
		away := float64(t*x) - delta
		if math.Abs(u) < 0.5 {
			away = apart + float64(t*num.Expm1(u))
		}
		inside := logInterval(math.Abs(away), (b-a)/2*x)
		return num.Exp(float64(nu*scaleExponent(u)) + inside)
	}
	step := min(0.18, 1/num.Hypot(math.Sqrt(2*nu)*max(1, s), float64(math.Abs(t)*s)+8))
	return scaleDensity1(nu) * num.Trapezoid(f, 0, step, 1e-8)
}
