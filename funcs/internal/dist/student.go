package dist

import (
	"math"

	"halfwidth/funcs/internal/num"
)

// Student is Student's t law with DF degrees of freedom; DF may be infinite,
// which is the normal law.
type Student struct{ DF float64 }

// asNormal says that the law differs from the normal one by less than 1e-17 of
// any tail above 1e-300.
func (s Student) asNormal() bool { return s.DF > 1e25 }

// df is DF, kept where DF/2 does not underflow.
func (s Student) df() float64 { return max(s.DF, 1e-100) }

// farRoot is where t/sqrt(DF) is so large that the tail is its leading term.
const farRoot = 1e9

// tails gives P(T > t) and P(0 < T < t) for t >= 0.
func (s Student) tails(t float64) (upper, central float64) {
	df := s.df()
	root := t / math.Sqrt(df)
	if root > farRoot {
		// x^a/(2 a B(a, 1/2)) with x = DF/t^2, a = DF/2.
		e := num.LogWide(num.Widen(t)).Times(df).Neg()
		e = e.Add(num.LogWide(num.Widen(df)).Times(df / 2))
		e = e.Plus(-logGammaRise(float64(df/2)+0.5, 0.5))
		upper = num.ExpWide(e) / (2 * math.Sqrt(math.Pi))
		return upper, 0.5 - upper
	}
	if t < 1e-100 {
		return 0.5, float64(t * s.Density(0))
	}
	square := num.TwoProduct(t, t)
	sum := square.Plus(df)
	r := betaTailsAt(square.Div(sum), num.Widen(df).Div(sum), 0.5, df/2)
	return r.upper / 2, r.lower / 2
}

// SF is P(T > t).
func (s Student) SF(t float64) float64 {
	switch {
	case !(s.DF > 0) || math.IsNaN(t):
		return math.NaN()
	case s.asNormal():
		return Normal{}.SF(t)
	case math.IsInf(t, 1):
		return 0
	case math.IsInf(t, -1):
		return 1
	}
	upper, central := s.tails(math.Abs(t))
	if t < 0 {
		return 0.5 + central
	}
	return upper
}

// CDF is P(T <= t).
func (s Student) CDF(t float64) float64 { return s.SF(-t) }

// Density is the density at t.
func (s Student) Density(t float64) float64 {
	t = math.Abs(t)
	switch {
	case !(s.DF > 0) || math.IsNaN(t):
		return math.NaN()
	case s.asNormal():
		return Normal{}.Density(t)
	case math.IsInf(t, 1):
		return 0
	case t >= 1:
		return s.scaledDensity(t) / t
	}
	// The density at 0 times (1 + t^2/DF)^(-(DF+1)/2).
	df := s.df()
	peak := num.Exp(logGammaRise(df/2, 0.5)) / math.Sqrt(df) / math.Sqrt(math.Pi)
	o := num.TwoProduct(t, t).Over(df)
	e := num.LogWide(o.Plus(1))
	if o.Hi < 0.5 {
		e = num.Log1pmxWide(o.Plus(1), o).Add(o)
	}
	return float64(peak * num.ExpWide(e.Times(-(df+1)/2)))
}

// scaledDensity is t times the density at t >= 1, which is the prefactor of the
// tails, or DF times the tail where that is its leading term.
func (s Student) scaledDensity(t float64) float64 {
	df := s.df()
	if t/math.Sqrt(df) > farRoot {
		upper, _ := s.tails(t)
		return float64(df * upper)
	}
	square := num.TwoProduct(t, t)
	sum := square.Plus(df)
	return betaPointAt(square.Div(sum), num.Widen(df).Div(sum), 0.5, df/2).factor
}

// Between is P(a <= T <= b).
func (s Student) Between(a, b float64) float64 {
	if s.asNormal() {
		return Normal{}.Between(a, b)
	}
	return between(s, a, b, func() float64 { return s.narrow(a, b) })
}

// narrow integrates the density relative to its value at the inner end: in t up to
// sqrt(DF), or 1, and in log t beyond, where it nears a power of t.
func (s Student) narrow(a, b float64) float64 {
	df := s.df()
	corner := min(1, math.Sqrt(df))
	switch {
	case b <= 0:
		return s.narrow(-b, -a)
	case a < 0:
		return s.narrow(0, -a) + s.narrow(0, b)
	case a < corner && b > corner:
		return s.narrow(a, corner) + s.narrow(corner, b)
	}
	root := math.Sqrt(df + float64(a*a))
	if a > 1e150 {
		root = a
	}
	// (1 + ((a+d)^2 - a^2)/(df + a^2))^(-(df+1)/2)
	relative := func(d float64) float64 {
		return num.Exp(-0.5 * (df + 1) * num.Log1p(float64((d/root)*((a+a+d)/root))))
	}
	if a >= corner {
		scaled := a * s.Density(a)
		if a >= 1 {
			scaled = s.scaledDensity(a)
		}
		return scaled * panels(num.Log1p((b-a)/a), func(w float64) float64 {
			return float64(num.Exp(w) * relative(float64(a*num.Expm1(w))))
		})
	}
	return s.Density(a) * num.Legendre(relative, 0, b-a)
}

// UpperQuantile is t with P(T > t) = q.
func (s Student) UpperQuantile(q float64) float64 {
	switch {
	case !(s.DF > 0) || !(q >= 0 && q <= 1):
		return math.NaN()
	case s.asNormal() || q == 0 || q == 1 || q == 0.5:
		return Normal{}.UpperQuantile(q)
	case q > 0.5:
		return -s.upper(1 - q)
	}
	return s.upper(q)
}

// upper is UpperQuantile for q < 0.5.
func (s Student) upper(q float64) float64 {
	df := s.df()
	// The leading term of the tail, x^a/(2 a B), solved for t = sqrt(DF/x).
	l := num.LogWide(num.Widen(2 * q)).Plus(num.Log(math.Sqrt(math.Pi)) + logGammaRise(float64(df/2)+0.5, 0.5))
	root := l.Over(-df)
	if root.Hi > num.Log(farRoot) {
		return float64(math.Sqrt(df) * num.ExpWide(root))
	}
	r := betaInverse(0.5, df/2, 1-2*q, 2*q)
	return math.Sqrt(r.odds) * math.Sqrt(df)
}

// Quantile is t with P(T <= t) = p.
func (s Student) Quantile(p float64) float64 { return -s.UpperQuantile(p) }
