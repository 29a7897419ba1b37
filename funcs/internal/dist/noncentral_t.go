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
		nu, delta := d.DF, d.Noncentrality
		switch {
		case nu > manyDF:
			return Normal{}.Between(a-delta, b-delta)
		case d.far() && a < 0:
			return d.mirror().betweenOverZ(-b, -a)
		case d.far():
			return d.betweenOverZ(a, b)
		}
		// The density of T at t is largest in s at the positive root of
		// (nu + t^2) s^2 - t delta s - (nu + 1) = 0.
		t := a/2 + b/2
		p, q := nu/(nu+float64(t*t)), t/(nu+float64(t*t))*delta
		s := q/2 + math.Sqrt(float64(q*q)/4+float64(p*(1+1/nu)))
		f := func(w float64) float64 {
			x := s * num.Exp(w)
			inside := logInterval(math.Abs(float64(t*x)-delta), (b-a)/2*x)
			return num.Exp(float64(nu*scaleExponent(num.Log(s)+w)) + inside)
		}
		step := min(0.18, 1/num.Hypot(math.Sqrt(2*nu)*max(1, s), float64(math.Abs(t)*s)+8))
		return scaleDensity1(nu) * num.Trapezoid(f, 0, step, 1e-8)
	})
}

// betweenOverZ is P(a <= T <= b) for a > 0 and a large noncentrality.
func (d NoncentralT) betweenOverZ(a, b float64) float64 {
	nu, delta := d.DF, d.Noncentrality
	root := math.Sqrt(nu) / b
	f := func(z float64) float64 {
		low, high := (z+delta)/b, (z+delta)/a
		if low <= 0 {
			return 0
		}
		return num.Exp(-float64(z*z)/2) * Gamma{nu / 2}.Between(nu/2*low*low, nu/2*high*high)
	}
	y := (delta + num.Hypot(delta, 2*math.Sqrt(nu)*num.Hypot(1, root))) / 2 / (1 + float64(root*root))
	step := min(0.5, 0.8/num.Hypot(1, num.Hypot(root, math.Sqrt(nu)/y)))
	return num.Trapezoid(f, y-delta, step, 1e-8) / math.Sqrt(2*math.Pi)
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
	// Beyond far the tail is a power of t: s has to be so small that its density
	// is one, to a relative 1e-20.
	if far := 1e10 * (math.Abs(delta) + 40) * max(1, math.Sqrt(d.DF)); t > far {
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
	case q > 0.5:
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
	y := crossing(f, first, step, -710, 710, math.Abs(target))
	return num.Sinh(y)
}
