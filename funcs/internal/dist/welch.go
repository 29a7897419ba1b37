package dist

import (
	"math"

	"halfwidth/funcs/internal/num"
)

// WelchDesign is a comparison of two means by Welch's t test: N1 and N2 (2 or
// more) values, normal with the standard deviations SD1 and SD2, of which one may
// be 0.
type WelchDesign struct {
	N1, N2   int
	SD1, SD2 float64
}

// Power is the probability that the test at the given significance finds the
// difference: first above second for twoSided false, either way for true.
//
// Given how the two sums of squares share their total, U to 1-U with U ~
// Beta(df1/2, df2/2), the total is chi-square with df1+df2 degrees of freedom,
// independent of U, so that Welch's t is a noncentral t over sqrt(c(U)) and its
// critical value, at Satterthwaite's df for that share, is fixed. Power is the
// mean of the noncentral t's tails over U, by the trapezoidal rule in log U/(1-U).
// Relative error 1e-12.
func (w WelchDesign) Power(difference, significance float64, twoSided bool) float64 {
	df1, df2 := float64(w.N1)-1, float64(w.N2)-1
	unit := max(w.SD1, w.SD2)
	if !(df1 >= 1 && df2 >= 1 && w.SD1 >= 0 && w.SD2 >= 0 && unit > 0 && !math.IsInf(unit, 1)) ||
		!(significance > 0 && significance < 1) || math.IsNaN(difference) {
		return math.NaN()
	}
	v1, v2 := w.SD1/unit*(w.SD1/unit)/float64(w.N1), w.SD2/unit*(w.SD2/unit)/float64(w.N2)
	total := v1 + v2
	tail := significance
	if twoSided {
		tail /= 2
	}
	df := df1 + df2
	delta := difference / unit / math.Sqrt(total)
	// Shares of the squared standard error that the two sums of squares carry.
	a, b := v1/total/df1, v2/total/df2
	f := func(v float64) float64 {
		// log U/(1-U) = x, with ends that fall doubly exponentially in v.
		up, down := num.Exp(v-3), num.Exp(-v-3)
		x := v + (up - down)
		u, rest := shares(df1, df2, x)
		weight := num.Exp(logShareWeight(df1, df2, x)) * (1 + (up + down))
		if weight == 0 {
			return 0
		}
		first, second := float64(a*u), float64(b*rest)
		both := first + second
		satterthwaite := both / (first*(first/both)/df1 + second*(second/both)/df2)
		critical := Student{satterthwaite}.UpperQuantile(tail)
		return weight * TPower(df, delta, critical*math.Sqrt(df*both), twoSided)
	}
	sd := math.Sqrt(2/df1 + 2/df2)
	step := min(0.5, 1.1*sd)
	return min(1, num.Trapezoid(f, 0, step, 1e-7)*num.Exp(logSharePeak(df1, df2)))
}

// shares is U and 1-U for log U/(1-U) = log(df1/df2) + x.
func shares(df1, df2, x float64) (u, rest float64) {
	e := num.Exp(-math.Abs(x))
	if x > 0 {
		return df1 / (df1 + float64(df2*e)), df2 * e / (df1 + float64(df2*e))
	}
	return df1 * e / (float64(df1*e) + df2), df2 / (float64(df1*e) + df2)
}

// logShareWeight is log of the density of log U/(1-U) at log(df1/df2) + x over
// that at its peak, x = 0. With p = df1/(df1+df2) it is
// -(df1+df2)/2 log(p e^(qx) + q e^(-px)), q = 1-p.
func logShareWeight(df1, df2, x float64) float64 {
	p, q := df1/(df1+df2), df2/(df1+df2)
	left, right := float64(q*x), -float64(p*x)
	if max(left, right) > 1 {
		top := max(left, right)
		return -(df1 + df2) / 2 * (top + num.Log(float64(p*num.Exp(left-top))+float64(q*num.Exp(right-top))))
	}
	// p e^left + q e^right - 1, where p left + q right = 0.
	excess := float64(p*expm1mx(left)) + float64(q*expm1mx(right))
	return -(df1 + df2) / 2 * num.Log1p(excess)
}

// logSharePeak is log of p^(df1/2) q^(df2/2) / B(df1/2, df2/2).
func logSharePeak(df1, df2 float64) float64 {
	return num.Log(BetaPrefactor(df1/(df1+df2), df2/(df1+df2), df1/2, df2/2))
}
