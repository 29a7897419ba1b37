package dist

import (
	"math"

	"halfwidth/funcs/internal/num"
)

// F is the law of the ratio of two independent mean squares with DF1 and DF2
// degrees of freedom. Either may be infinite: the mean square is then 1.
type F struct{ DF1, DF2 float64 }

func (f F) valid() bool { return f.DF1 > 0 && f.DF2 > 0 }

// shapes are DF1/2 and DF2/2.
func (f F) shapes() (a, b float64) { return inRange(f.DF1 / 2), inRange(f.DF2 / 2) }

// infinite says which of the two is as good as infinite.
func (f F) infinite() (first, second bool) { return f.DF1 > 1e100, f.DF2 > 1e100 }

// edge is where x or 1-x of a beta law is so small that a tail of a few degrees
// of freedom is its leading power, and x itself may soon leave the doubles.
const edge = 1e-270

// beta gives X = a x/(a x + b), which follows Beta(a, b), and 1 - X.
func (f F) beta(x num.Wide) (num.Wide, num.Wide) {
	// Scaled so that neither product overflows.
	s := 1.0
	if x.Hi > 1e150 {
		s = 0x1p-660
	}
	a, b := f.shapes()
	u := x.Times(a * s)
	v := num.Widen(b * s)
	sum := u.Add(v)
	return u.Div(sum), v.Div(sum)
}

func (f F) tails(x float64) (lower, upper float64) {
	inf1, inf2 := f.infinite()
	switch {
	case !f.valid() || math.IsNaN(x):
		return math.NaN(), math.NaN()
	case x <= 0:
		return 0, 1
	case math.IsInf(x, 1):
		return 1, 0
	case inf1 && inf2:
		if x < 1 {
			return 0, 1
		}
		return 1, 0
	}
	a, b := f.shapes()
	switch {
	case inf2:
		t := gammaTailsAt(a, num.TwoProduct(a, x))
		return t.lower, t.upper
	case inf1:
		t := gammaTailsAt(b, num.Widen(b).Over(x))
		return t.upper, t.lower
	}
	X, Y := f.beta(num.Widen(x))
	if X.Hi <= 0 {
		return 0, 1
	}
	if Y.Hi <= 0 {
		return 1, 0
	}
	t := betaTailsAt(X, Y, a, b)
	return t.lower, t.upper
}

// CDF is P(X <= x).
func (f F) CDF(x float64) float64 { l, _ := f.tails(x); return l }

// SF is P(X > x).
func (f F) SF(x float64) float64 { _, u := f.tails(x); return u }

// Between is P(a <= X <= b).
func (f F) Between(a, b float64) float64 {
	return between(f, a, b, func() float64 {
		inf1, inf2 := f.infinite()
		s1, s2 := f.shapes()
		switch {
		case inf2:
			return narrowly(a, b, func(x num.Wide) float64 { return gammaPointAt(s1, x.Times(s1)).factor })
		case inf1:
			return narrowly(a, b, func(x num.Wide) float64 { return gammaPointAt(s2, num.Widen(s2).Div(x)).factor })
		}
		xa, ya := f.beta(num.Widen(a))
		xb, yb := f.beta(num.Widen(b))
		if ya.Hi < edge {
			return float64(f.SF(a) * lostBetween(s2, a, b))
		}
		if xb.Hi < edge {
			return float64(f.CDF(b) * lostBetween(s1, a, b))
		}
		width := xb.Hi * ya.Hi * ((b - a) / b)
		return betaNarrow(xa, ya, xb, yb, width, s1, s2)
	})
}

// Quantile is x with P(X <= x) = p.
func (f F) Quantile(p float64) float64 { return f.inverse(p, 1-p) }

// UpperQuantile is x with P(X > x) = q.
func (f F) UpperQuantile(q float64) float64 { return f.inverse(1-q, q) }

func (f F) inverse(lower, upper float64) float64 {
	inf1, inf2 := f.infinite()
	switch {
	case !f.valid() || !(lower >= 0) || !(upper >= 0):
		return math.NaN()
	case lower == 0:
		return 0
	case upper == 0:
		return math.Inf(1)
	case inf1 && inf2:
		return 1
	}
	a, b := f.shapes()
	switch {
	case inf2:
		return gammaInverse(a, lower, upper) / a
	case inf1:
		return b / gammaInverse(b, upper, lower)
	}
	odds := betaInverse(a, b, lower, upper).odds
	// Where the odds leave the doubles the ratio itself may not: so far out the
	// tail is a power of it, so that a nearer root can be moved outwards.
	const far = 0x1p200
	switch {
	case odds < edge && lower < 1e-20:
		near := float64(lower * num.Exp(float64(200*math.Ln2)*a))
		return betaInverse(a, b, near, 1-near).odds * (b / a) / far
	case odds > 1/edge && upper < 1e-20:
		near := float64(upper * num.Exp(float64(200*math.Ln2)*b))
		return betaInverse(a, b, 1-near, near).odds * (b / a) * far
	}
	return odds * (b / a)
}
