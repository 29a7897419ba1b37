package dist

import (
	"math"

	"halfwidth/funcs/internal/num"
)

// Beta is the beta law on (0, 1).
type Beta struct{ A, B float64 }

// CDF is P(X <= x).
func (d Beta) CDF(x float64) float64 { l, _ := BetaTails(x, 1-x, d.A, d.B); return l }

// SF is P(X > x).
func (d Beta) SF(x float64) float64 { _, u := BetaTails(x, 1-x, d.A, d.B); return u }

// Between is P(a <= X <= b).
func (d Beta) Between(a, b float64) float64 {
	a, b = max(a, 0), min(b, 1)
	return between(d, a, b, func() float64 {
		xa, ya := complement(a, 1-a)
		xb, yb := complement(b, 1-b)
		return betaNarrow(xa, ya, xb, yb, b-a, d.A, d.B)
	})
}

// betaNarrow is the probability from xa to xb = xa + width: by quadrature of the
// density from the end with the larger density outwards, or over the log odds
// where the ends are far apart, which takes a small parameter.
func betaNarrow(xa, ya, xb, yb num.Wide, width, a, b float64) float64 {
	odds := num.Log1p(width/xa.Hi) + num.Log1p(width/yb.Hi)
	if odds > 1 {
		x, y := xb.Hi, yb.Hi
		return panels(odds, func(w float64) float64 {
			e := float64(x * num.Exp(-w))
			return BetaPrefactor(e/(e+y), y/(e+y), a, b)
		})
	}
	p := betaPointAt(xb, yb, a, b)
	if p.below.Hi > 0 {
		return float64(p.factor * betaIntegral(xb.Hi/yb.Hi, a, b, p.below.Hi, yb.Hi, width/xb.Hi))
	}
	p = betaPointAt(ya, xa, b, a)
	return float64(p.factor * betaIntegral(ya.Hi/xa.Hi, b, a, p.below.Hi, xa.Hi, width/ya.Hi))
}

// Quantile is x with P(X <= x) = p.
func (d Beta) Quantile(p float64) float64 { x, _ := BetaQuantile(p, 1-p, d.A, d.B); return x }

// UpperQuantile is x with P(X > x) = q.
func (d Beta) UpperQuantile(q float64) float64 { x, _ := BetaQuantile(1-q, q, d.A, d.B); return x }

// BetaQuantile finds x and y = 1 - x with I_x(a, b) = lower and its complement
// upper, each to full relative accuracy. Only the smaller of lower and upper is
// used; the other must be one minus it.
func BetaQuantile(lower, upper, a, b float64) (x, y float64) {
	switch {
	case !(a > 0) || !(b > 0) || math.IsInf(a, 1) || math.IsInf(b, 1) || !(lower >= 0) || !(upper >= 0):
		return math.NaN(), math.NaN()
	case lower == 0:
		return 0, 1
	case upper == 0:
		return 1, 0
	}
	r := betaInverse(a, b, lower, upper)
	return r.x, r.y
}
