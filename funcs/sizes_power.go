package funcs

import (
	"math"

	"halfwidth/funcs/internal/dist"
	"halfwidth/funcs/internal/num"
)

// The powers of t tests, exactly: the chance that a test at the significance
// rejects in the direction claimed; for either, in the one tail or the other.

// critical is the critical value of a t test.
func critical(df, significance float64, dir string) float64 {
	if dir == either {
		significance /= 2
	}
	return dist.Student{DF: df}.UpperQuantile(significance)
}

// beyond is the chance that a noncentral t lies beyond the critical value.
func beyond(law dist.NoncentralT, crit float64, dir string) float64 {
	switch dir {
	case above:
		return law.SF(crit)
	case below:
		return law.CDF(-crit)
	}
	return math.Min(1, law.SF(crit)+law.CDF(-crit))
}

// tPower is the power of a t test whose statistic is noncentral t.
func tPower(df, noncentrality, significance float64, dir string) float64 {
	return beyond(dist.NoncentralT{DF: df, Noncentrality: noncentrality}, critical(df, significance, dir), dir)
}

// groupsTest is a t test of the difference of two means.
type groupsTest struct {
	first, second float64 // the sds
	significance  float64
	direction     string
	pooled        bool
}

// power is exact also where the sds differ. Let χ₁ and χ₂ be the sums of squares,
// each over its true variance. U = χ₁/(χ₁+χ₂) is Beta(ν₁/2, ν₂/2) and independent
// of χ₁+χ₂; given U the statistic is a noncentral t times a constant. So the power
// is the mean over U of P(T' > t·√c(U)), with t and c as the kind of test has them.
func (g groupsTest) power(n, m int, difference float64) float64 {
	se, _ := differenceError(g.first, g.second, n, m, false)
	df1, df2 := float64(n-1), float64(m-1)
	df := df1 + df2
	noncentrality := difference / se
	if g.pooled && g.first == g.second {
		return tPower(df, noncentrality, g.significance, g.direction)
	}
	law := dist.NoncentralT{DF: df, Noncentrality: noncentrality}
	// The variances of the two means, as shares of the variance of the difference.
	share1 := float64(g.first/se*g.first/se) / float64(n)
	share2 := float64(g.second/se*g.second/se) / float64(m)
	fixed := critical(df, g.significance, g.direction)
	f := func(logit float64) float64 {
		u, v := 1/(1+num.Exp(-logit)), 1/(1+num.Exp(logit))
		w := dist.BetaPrefactor(u, v, df1/2, df2/2)
		if w == 0 {
			return 0
		}
		a, b := df*u*share1/df1, df*v*share2/df2
		c, t := a+b, fixed
		if g.pooled {
			c = (1/float64(n) + 1/float64(m)) * (u*share1*float64(n) + v*share2*float64(m))
		} else {
			t = critical((a+b)*(a+b)/(a*a/df1+b*b/df2), g.significance, g.direction)
		}
		return w * beyond(law, t*math.Sqrt(c), g.direction)
	}
	step := 1 / math.Sqrt(1+math.Min(df1, df2))
	return math.Min(1, num.Trapezoid(f, num.Log(df1/df2), step, 1e-10))
}
