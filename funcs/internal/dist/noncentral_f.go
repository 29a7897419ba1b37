package dist

import (
	"math"

	"halfwidth/funcs/internal/num"
)

// NoncentralF is the law of (X/DF1)/(Y/DF2), with X noncentral chi-square and Y
// independent chi-square. DF1 and DF2 (> 0) may be infinite.
// Relative error of both tails 1e-13 for noncentralities to 1e4, 1e-12 beyond.
type NoncentralF struct{ DF1, DF2, Noncentrality float64 }

func (d NoncentralF) valid() bool { return d.DF1 > 0 && d.DF2 > 0 && d.Noncentrality >= 0 }

func (d NoncentralF) tail(x float64, upper bool) float64 {
	atZero, atInfinity := 0.0, 1.0
	if upper {
		atZero, atInfinity = 1, 0
	}
	switch {
	case !d.valid() || math.IsNaN(x):
		return math.NaN()
	case x <= 0:
		return atZero
	case math.IsInf(x, 1):
		return atInfinity
	case math.IsInf(d.Noncentrality, 1):
		return atZero
	case d.Noncentrality/2 == 0 || math.IsInf(d.DF1, 1):
		if upper {
			return F{d.DF1, d.DF2}.SF(x)
		}
		return F{d.DF1, d.DF2}.CDF(x)
	case d.DF2 > manyDF:
		return NoncentralChiSquare{d.DF1, d.Noncentrality}.tail(d.DF1*x, upper)
	}
	if d.Noncentrality > hugeNoncentrality {
		// The numerator is as good as its mean; large x is a small denominator.
		below, above := GammaTails(d.DF2/2, d.DF2/2*((1+d.Noncentrality/d.DF1)/x))
		if upper {
			return below
		}
		return above
	}
	r := d.DF1 / d.DF2 * x
	if math.IsInf(r, 1) {
		return atInfinity
	}
	if r == 0 {
		return atZero
	}
	return d.mixture(r).tail(upper)
}

// mixture is the mixture for arguments about x, given as r = DF1 x/DF2.
func (d NoncentralF) mixture(r float64) poissonMixture {
	a, b := max(d.DF1/2, 1e-100), max(d.DF2/2, 1e-100)
	y, z := r/(1+r), 1/(1+r)
	mean := d.Noncentrality / 2
	// j (a + j) = mean y (a + b + j)
	c := float64(mean * y)
	root := num.Hypot(a-c, 2*math.Sqrt(c)*math.Sqrt(a+b))
	saddle := (c - a + root) / 2
	if a > c {
		saddle = 2 * c * ((a + b) / (a - c + root))
	}
	return poissonMixture{
		mean:   mean,
		saddle: saddle,
		tails:  func(j float64) (float64, float64) { return BetaTails(y, z, a+j, b) },
		drop:   func(j float64) float64 { return BetaPrefactor(y, z, a+j, b) / (a + j) },
		ratio:  func(j float64) float64 { return y * ((a + b + j) / (a + j + 1)) },
	}
}

// CDF is P(X <= x).
func (d NoncentralF) CDF(x float64) float64 { return d.tail(x, false) }

// SF is P(X > x).
func (d NoncentralF) SF(x float64) float64 { return d.tail(x, true) }

// Between is P(a <= X <= b).
func (d NoncentralF) Between(a, b float64) float64 {
	return between(d, a, b, func() float64 {
		switch r := d.DF1 / d.DF2 * (a/2 + b/2); {
		case d.Noncentrality/2 == 0 || math.IsInf(d.DF1, 1):
			return F{d.DF1, d.DF2}.Between(a, b)
		case d.Noncentrality > hugeNoncentrality:
			c := 1 + d.Noncentrality/d.DF1
			return Gamma{d.DF2 / 2}.Between(d.DF2/2*(c/b), d.DF2/2*(c/a))
		case d.DF2 > manyDF:
			return NoncentralChiSquare{d.DF1, d.Noncentrality}.Between(d.DF1*a, d.DF1*b)
		case !(r > 0) || math.IsInf(r, 1):
			return difference(d, a, b)
		default:
			m := d.mixture(r)
			return m.between(m.saddle, func(j float64) float64 {
				// The central ratio j has DF1+2j degrees of freedom above.
				scale := d.DF1 / (d.DF1 + 2*j)
				return F{d.DF1 + 2*j, d.DF2}.Between(scale*a, scale*b)
			})
		}
	})
}

// Quantile is x with P(X <= x) = p.
func (d NoncentralF) Quantile(p float64) float64 { return d.solve(p, 1-p) }

// UpperQuantile is x with P(X > x) = q.
func (d NoncentralF) UpperQuantile(q float64) float64 { return d.solve(1-q, q) }

// solve finds x from whichever tail is smaller.
func (d NoncentralF) solve(p, q float64) float64 {
	switch {
	case !d.valid() || !(p >= 0 && q >= 0):
		return math.NaN()
	case math.IsInf(d.Noncentrality, 1) || q == 0:
		return math.Inf(1)
	case p == 0:
		return 0
	}
	centre, spread := 1.0, math.Sqrt(2/d.DF2)
	if !math.IsInf(d.DF1, 1) {
		mean := d.DF1 + d.Noncentrality
		centre = mean / d.DF1
		spread = num.Hypot(spread, math.Sqrt(2*(mean+d.Noncentrality))/mean)
	}
	if p <= q {
		return solvePositive(d.CDF, p, centre, spread)
	}
	return solvePositive(d.SF, q, centre, spread)
}
