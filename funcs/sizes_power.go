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
	return dist.Student{DF: df}.UpperQuantile(oneTail(significance, dir))
}

// beyond is the chance that a noncentral t lies beyond the critical value.
func beyond(df, noncentrality, crit float64, dir string) float64 {
	if dir == below {
		noncentrality = -noncentrality
	}
	return dist.TPower(df, noncentrality, crit, dir == either)
}

// tPower is the power of a t test whose statistic is noncentral t.
func tPower(df, noncentrality, significance float64, dir string) float64 {
	return beyond(df, noncentrality, critical(df, significance, dir), dir)
}

// groupsTest is a t test of the difference of two means.
type groupsTest struct {
	first, second float64 // the sds
	significance  float64
	direction     string
	pooled        bool
}

// power is exact also where the sds differ: for separate variances by the Welch
// integral, for one variance pooled over unlike ones by pooledUnlike.
func (g groupsTest) power(n, m int, difference float64) float64 {
	se, _ := differenceError(g.first, g.second, n, m, false)
	switch {
	case g.pooled && g.first == g.second:
		return tPower(float64(n-1)+float64(m-1), difference/se, g.significance, g.direction)
	case g.pooled:
		return g.pooledUnlike(n, m, difference/se)
	}
	if g.direction == below {
		difference = -difference
	}
	return dist.WelchDesign{N1: n, N2: m, SD1: g.first / se, SD2: g.second / se}.Power(difference/se, g.significance, g.direction == either)
}

// pooledUnlike is the power of the pooled test where the true variances differ.
// Let χ₁ and χ₂ be the sums of squares, each over its true variance. U = χ₁/(χ₁+χ₂)
// is Beta(ν₁/2, ν₂/2) and independent of χ₁+χ₂; given U the statistic is a
// noncentral t over √c(U), c(U) = (1/n+1/m)(Uσ₁²+(1-U)σ₂²)/(σ₁²/n+σ₂²/m). The power
// is the mean over U, by the trapezoidal rule in its log odds.
func (g groupsTest) pooledUnlike(n, m int, noncentrality float64) float64 {
	n1, n2 := float64(n), float64(m)
	df1, df2 := n1-1, n2-1
	unit := math.Max(g.first, g.second)
	v1, v2 := float64(g.first/unit*g.first/unit), float64(g.second/unit*g.second/unit)
	factor := (1/n1 + 1/n2) / (v1/n1 + v2/n2)
	crit := critical(df1+df2, g.significance, g.direction)
	mean := func(logOdds float64) float64 {
		u, v := 1/(1+num.Exp(-logOdds)), 1/(1+num.Exp(logOdds))
		weight := dist.BetaPrefactor(u, v, df1/2, df2/2)
		if weight == 0 {
			return 0
		}
		return weight * beyond(df1+df2, noncentrality, crit*math.Sqrt(factor*(float64(u*v1)+float64(v*v2))), g.direction)
	}
	step := 1 / math.Sqrt(1+math.Min(df1, df2))
	return math.Min(1, num.Trapezoid(mean, num.Log(df1/df2), step, 1e-9))
}
