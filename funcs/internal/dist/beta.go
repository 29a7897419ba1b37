package dist

import "math"

// BetaTails gives I_x(a, b) and 1 - I_x(a, b), where y = 1 - x. The smaller of x
// and y is taken as exact.
func BetaTails(x, y, a, b float64) (lower, upper float64) {
	switch {
	case math.IsNaN(x) || math.IsNaN(y) || !(a > 0) || !(b > 0):
		return math.NaN(), math.NaN()
	case x <= 0:
		return 0, 1
	case y <= 0:
		return 1, 0
	}
	if x > a/(a+b) {
		upper, lower = BetaTails(y, x, b, a)
		return lower, upper
	}
	d := BetaPrefactor(x, y, a, b)
	term, sum := 1/a, 1/a
	for n := 0.0; n < 1e6; n++ {
		term *= x * (a + b + n) / (a + 1 + n)
		sum += term
		if term < sum*1e-17 {
			break
		}
	}
	lower = min(d*sum, 1)
	return lower, 1 - lower
}

// BetaPrefactor is x^a y^b / B(a, b).
func BetaPrefactor(x, y, a, b float64) float64 {
	la, _ := math.Lgamma(a)
	lb, _ := math.Lgamma(b)
	lab, _ := math.Lgamma(a + b)
	return math.Exp(a*math.Log(x) + b*math.Log(y) + lab - la - lb)
}

// BetaQuantile finds x and y = 1 - x with I_x(a, b) = lower (where lower is the
// smaller) or 1 - I_x(a, b) = upper; the two must sum to 1.
func BetaQuantile(lower, upper, a, b float64) (x, y float64) {
	if lower <= upper {
		x = invert(func(x float64) float64 { l, _ := BetaTails(x, 1-x, a, b); return l }, lower, 0, 1, true)
		return x, 1 - x
	}
	y, x = BetaQuantile(upper, lower, b, a)
	return x, y
}

// Beta is the beta law.
type Beta struct{ A, B float64 }

// CDF is P(X <= x).
func (d Beta) CDF(x float64) float64 { l, _ := BetaTails(x, 1-x, d.A, d.B); return l }

// SF is P(X > x).
func (d Beta) SF(x float64) float64 { _, u := BetaTails(x, 1-x, d.A, d.B); return u }

// Density is the density at x.
func (d Beta) Density(x float64) float64 {
	if !(x > 0 && x < 1) {
		return 0
	}
	return BetaPrefactor(x, 1-x, d.A, d.B) / (x * (1 - x))
}

// Between is P(a <= X <= b).
func (d Beta) Between(a, b float64) float64 { return difference(d, a, b) }

// Quantile is x with P(X <= x) = p.
func (d Beta) Quantile(p float64) float64 { x, _ := BetaQuantile(p, 1-p, d.A, d.B); return x }

// UpperQuantile is x with P(X > x) = q.
func (d Beta) UpperQuantile(q float64) float64 { x, _ := BetaQuantile(1-q, q, d.A, d.B); return x }

// F is the law of the ratio of two independent mean squares; either df may be infinite.
type F struct{ DF1, DF2 float64 }

func (f F) tails(x float64) (lower, upper float64) {
	switch {
	case x <= 0:
		return 0, 1
	case math.IsInf(x, 1):
		return 1, 0
	case math.IsInf(f.DF2, 1):
		return GammaTails(f.DF1/2, f.DF1*x/2)
	case math.IsInf(f.DF1, 1):
		upper, lower = GammaTails(f.DF2/2, f.DF2/x/2)
		return lower, upper
	}
	s := f.DF1*x + f.DF2
	return BetaTails(f.DF1*x/s, f.DF2/s, f.DF1/2, f.DF2/2)
}

// CDF is P(X <= x).
func (f F) CDF(x float64) float64 { l, _ := f.tails(x); return l }

// SF is P(X > x).
func (f F) SF(x float64) float64 { _, u := f.tails(x); return u }

// Between is P(a <= X <= b).
func (f F) Between(a, b float64) float64 { return difference(f, a, b) }

// Quantile is x with P(X <= x) = p.
func (f F) Quantile(p float64) float64 { return invert(f.CDF, p, 0, math.MaxFloat64, true) }

// UpperQuantile is x with P(X > x) = q.
func (f F) UpperQuantile(q float64) float64 { return invert(f.SF, q, 0, math.MaxFloat64, false) }
