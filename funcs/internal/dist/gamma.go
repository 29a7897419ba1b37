package dist

import (
	"math"

	"halfwidth/funcs/internal/num"
)

// Gamma is the gamma law with the given shape and scale 1.
type Gamma struct{ Shape float64 }

// CDF is P(X <= x).
func (g Gamma) CDF(x float64) float64 { l, _ := GammaTails(g.Shape, x); return l }

// SF is P(X > x).
func (g Gamma) SF(x float64) float64 { _, u := GammaTails(g.Shape, x); return u }

// Between is P(a <= X <= b).
func (g Gamma) Between(a, b float64) float64 {
	return between(g, a, b, func() float64 {
		// From the end with the larger density outwards; by log x where the ends
		// are far apart, which takes a small shape.
		p, q := gammaPointAt(g.Shape, num.Widen(a)), gammaPointAt(g.Shape, num.Widen(b))
		switch {
		case b > 2*a:
		case q.excess.Hi < 0:
			return float64(q.factor * gammaLowerIntegral(g.Shape, -q.excess.Hi, (b-a)/b))
		default:
			return float64(p.factor * gammaUpperIntegral(g.Shape, p.excess.Hi, (b-a)/a))
		}
		return panels(num.Log1p((b-a)/a), func(w float64) float64 {
			return GammaPrefactor(g.Shape, float64(a*num.Exp(w)))
		})
	})
}

// Quantile is x with P(X <= x) = p.
func (g Gamma) Quantile(p float64) float64 { return g.inverse(p, 1-p) }

// UpperQuantile is x with P(X > x) = q.
func (g Gamma) UpperQuantile(q float64) float64 { return g.inverse(1-q, q) }

func (g Gamma) inverse(lower, upper float64) float64 {
	switch {
	case !(g.Shape > 0) || math.IsInf(g.Shape, 1) || !(lower >= 0) || !(upper >= 0):
		return math.NaN()
	case lower == 0:
		return 0
	case upper == 0:
		return math.Inf(1)
	}
	return gammaInverse(g.Shape, lower, upper)
}

// ChiSquare is the chi-square law with DF degrees of freedom.
type ChiSquare struct{ DF float64 }

func (c ChiSquare) gamma() Gamma {
	if c.DF > 0 && c.DF < 1e-100 {
		return Gamma{1e-100} // DF/2 may underflow
	}
	return Gamma{c.DF / 2}
}

// CDF is P(X <= x).
func (c ChiSquare) CDF(x float64) float64 { return c.gamma().CDF(x / 2) }

// SF is P(X > x).
func (c ChiSquare) SF(x float64) float64 { return c.gamma().SF(x / 2) }

// Between is P(a <= X <= b).
func (c ChiSquare) Between(a, b float64) float64 { return c.gamma().Between(a/2, b/2) }

// Quantile is x with P(X <= x) = p.
func (c ChiSquare) Quantile(p float64) float64 { return 2 * c.gamma().Quantile(p) }

// UpperQuantile is x with P(X > x) = q.
func (c ChiSquare) UpperQuantile(q float64) float64 { return 2 * c.gamma().UpperQuantile(q) }
