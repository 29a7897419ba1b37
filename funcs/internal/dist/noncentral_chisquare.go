package dist

import (
	"math"

	"halfwidth/funcs/internal/num"
)

// NoncentralChiSquare is the law of the sum of DF squared normal variables of
// sd 1 whose squared means sum to Noncentrality. DF > 0 need not be whole.
// Relative error of both tails 1e-13 for noncentralities to 1e4, 1e-12 beyond.
type NoncentralChiSquare struct{ DF, Noncentrality float64 }

// hugeNoncentrality is where the law is normal to 1e-12, its skewness, and its sd
// 1e-12 of its mean.
const hugeNoncentrality = 1e24

// noNoncentrality is what changes no tail that a float64 holds.
const noNoncentrality = 1e-250

func (d NoncentralChiSquare) valid() bool {
	return d.DF > 0 && !math.IsInf(d.DF, 1) && d.Noncentrality >= 0
}

func (d NoncentralChiSquare) tail(at num.Wide, upper bool) float64 {
	x := at.Hi
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
	}
	if d.Noncentrality > hugeNoncentrality {
		if upper {
			return Normal{}.SF(d.score(x))
		}
		return Normal{}.CDF(d.score(x))
	}
	if d.Noncentrality < noNoncentrality {
		low, high := GammaTails(max(d.DF/2, 1e-100), x/2)
		if upper {
			return high
		}
		return low
	}
	return d.mixture(at).tail(upper)
}

// score is x less the mean in sds.
func (d NoncentralChiSquare) score(x float64) float64 {
	return (x/2 - d.DF/2 - d.Noncentrality/2) / math.Sqrt(d.DF/2+d.Noncentrality)
}

// mixture is the mixture for arguments about x.
func (d NoncentralChiSquare) mixture(x num.Wide) poissonMixture {
	a, mean := max(d.DF/2, 1e-100), d.Noncentrality/2
	x = num.Wide{Hi: x.Hi / 2, Lo: x.Lo / 2}
	y := x.Hi
	g := math.Sqrt(mean) * math.Sqrt(y)
	half := a / 2 / g
	return poissonMixture{
		mean:   mean,
		shape:  a,
		saddle: g / (half + num.Hypot(half, 1)), // j (j + a) = mean y
		tails:  func(j float64) tails { return gammaTailsBeyond(a, j, x) },
		factor: func(j float64) float64 { return gammaFactorBeyond(a, j, x) },
		ratio: func(j float64) (ratio, rest float64) {
			s := num.TwoSum(a, j)
			return y / s.Hi, x.Lo/y - s.Lo/s.Hi
		},
	}
}

// CDF is P(X <= x).
func (d NoncentralChiSquare) CDF(x float64) float64 { return d.tail(num.Widen(x), false) }

// SF is P(X > x).
func (d NoncentralChiSquare) SF(x float64) float64 { return d.tail(num.Widen(x), true) }

// Between is P(a <= X <= b).
func (d NoncentralChiSquare) Between(a, b float64) float64 {
	return between(d, a, b, func() float64 {
		switch {
		case d.Noncentrality > hugeNoncentrality:
			return Normal{}.Between(d.score(a), d.score(b))
		case d.Noncentrality < noNoncentrality:
			return ChiSquare{d.DF}.Between(a, b)
		}
		return narrowly(a, b, func(x num.Wide) float64 { return d.mixture(x).density() })
	})
}

// Quantile is x with P(X <= x) = p.
func (d NoncentralChiSquare) Quantile(p float64) float64 {
	return d.solve(p, 1-p)
}

// UpperQuantile is x with P(X > x) = q.
func (d NoncentralChiSquare) UpperQuantile(q float64) float64 {
	return d.solve(1-q, q)
}

// solve finds x from whichever tail is smaller.
func (d NoncentralChiSquare) solve(p, q float64) float64 {
	mean := d.DF + d.Noncentrality
	spread := math.Sqrt(2*mean+2*d.Noncentrality) / mean
	switch {
	case !d.valid() || !(p >= 0 && q >= 0):
		return math.NaN()
	case math.IsInf(d.Noncentrality, 1) || q == 0:
		return math.Inf(1)
	case p == 0:
		return 0
	case p <= q:
		return solvePositive(d.CDF, p, mean, spread)
	}
	return solvePositive(d.SF, q, mean, spread)
}
