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
	case d.Noncentrality < noNoncentrality || math.IsInf(d.DF1, 1):
		if upper {
			return F{d.DF1, d.DF2}.SF(x)
		}
		return F{d.DF1, d.DF2}.CDF(x)
	case d.DF2 > manyDF:
		return NoncentralChiSquare{d.DF1, d.Noncentrality}.tail(num.TwoProduct(d.DF1, x), upper)
	}
	if d.Noncentrality > hugeNoncentrality {
		// The numerator is as good as its mean; large x is a small denominator.
		below, above := GammaTails(d.DF2/2, d.DF2/2*((1+d.Noncentrality/d.DF1)/x))
		if upper {
			return below
		}
		return above
	}
	X, Y := F{d.DF1, d.DF2}.beta(num.Widen(x))
	// So far out the tail is a power of x.
	switch {
	case Y.Hi < edge:
		t := float64(d.tail(x*0x1p-200, true) * num.Exp(-float64(100*math.Ln2)*d.DF2))
		if upper {
			return t
		}
		return 1 - t
	case X.Hi < edge:
		t := float64(d.tail(x*0x1p200, false) * num.Exp(-float64(100*math.Ln2)*d.DF1))
		if upper {
			return 1 - t
		}
		return t
	}
	return d.mixture(X, Y).tail(upper)
}

// mixture is the mixture for arguments about x, given as DF1 x/(DF1 x + DF2) and
// its complement.
func (d NoncentralF) mixture(x, y num.Wide) poissonMixture {
	a, b := F{d.DF1, d.DF2}.shapes()
	ab, mean := num.TwoSum(a, b), d.Noncentrality/2
	// j (a + j) = mean x (a + b + j)
	c := float64(mean * x.Hi)
	root := num.Hypot(a-c, 2*math.Sqrt(c)*math.Sqrt(a+b))
	saddle := (c - a + root) / 2
	if a > c {
		saddle = 2 * c * ((a + b) / (a - c + root))
	}
	return poissonMixture{
		mean:   mean,
		shape:  a,
		saddle: saddle,
		tails:  func(j float64) tails { return betaTailsBeyond(x, y, a, j, b) },
		factor: func(j float64) float64 { return betaFactorBeyond(x, y, a, j, b) },
		ratio: func(j float64) (ratio, rest float64) {
			s, t := num.TwoSum(a, j), ab.Plus(j)
			return x.Hi * (t.Hi / s.Hi), x.Lo/x.Hi + t.Lo/t.Hi - s.Lo/s.Hi
		},
	}
}

// CDF is P(X <= x).
func (d NoncentralF) CDF(x float64) float64 { return d.tail(x, false) }

// SF is P(X > x).
func (d NoncentralF) SF(x float64) float64 { return d.tail(x, true) }

// Between is P(a <= X <= b).
func (d NoncentralF) Between(a, b float64) float64 {
	return between(d, a, b, func() float64 {
		switch {
		case d.Noncentrality < noNoncentrality || math.IsInf(d.DF1, 1):
			return F{d.DF1, d.DF2}.Between(a, b)
		case d.Noncentrality > hugeNoncentrality:
			c := 1 + d.Noncentrality/d.DF1
			return Gamma{d.DF2 / 2}.Between(d.DF2/2*(c/b), d.DF2/2*(c/a))
		case d.DF2 > manyDF:
			c := NoncentralChiSquare{d.DF1, d.Noncentrality}
			return narrowly(a, b, func(x num.Wide) float64 { return c.mixture(x.Times(d.DF1)).density() })
		}
		law := F{d.DF1, d.DF2}
		if _, y := law.beta(num.Widen(a)); y.Hi < edge {
			return float64(d.SF(a) * lostBetween(d.DF2/2, a, b))
		}
		if x, _ := law.beta(num.Widen(b)); x.Hi < edge {
			return float64(d.CDF(b) * lostBetween(d.DF1/2, a, b))
		}
		return narrowly(a, b, func(x num.Wide) float64 { return d.mixture(law.beta(x)).density() })
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
