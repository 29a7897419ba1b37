package dist

import (
	"math"

	"halfwidth/funcs/internal/num"
)

// twoSidedTolerance is the exact law behind the interval mean +- k*sd that holds
// at least a given content of a normal law, from n values (ISO 16269-6; Odeh
// 1978, Communications in Statistics B7, 183-201; Eberhardt, Mee & Reeve 1989,
// Communications in Statistics B18, 397-413). With the mean z sds off, sd must be
// at least r(z)/k, where Phi(z+r) - Phi(z-r) = content, so
//
//	confidence = E P(s >= r(z)/k), z normal with sd 1/sqrt(n), s = chi/sqrt(n-1)
//
// by the trapezoidal rule in sqrt(n) z, in which the integrand is even.
type twoSidedTolerance struct {
	n, content, step float64
	r                []float64 // r at sqrt(n) z = 0, step, 2 step, ...
}

func newTwoSidedTolerance(n int, content float64) *twoSidedTolerance {
	// For few values r(z) bends within one sd of the mean; these steps leave
	// 1e-15 for contents from 1e-6 to 1 - 1e-9.
	step := 0.125
	if n < 8 {
		step = 0.06
	}
	return &twoSidedTolerance{n: float64(n), content: content, step: step}
}

// radius is r at node i.
func (t *twoSidedTolerance) radius(i int) float64 {
	for len(t.r) <= i {
		z := float64(len(t.r)) * t.step / math.Sqrt(t.n)
		start := Normal{}.UpperQuantile((1 - t.content) / 2)
		if len(t.r) > 0 {
			start = t.r[len(t.r)-1]
		}
		t.r = append(t.r, contentRadius(z, t.content, start))
	}
	return t.r[i]
}

// contentRadius is r with P(z-r < Z < z+r) = content.
func contentRadius(z, content, start float64) float64 {
	n := Normal{}
	outside := 1 - content
	if content < 0.5 {
		f := func(u float64) float64 { return logInterval(z, num.Exp(u)) - num.Log(content) }
		return num.Exp(crossing(f, num.Log(start), 0.01, -745, 10, num.Log(1/content)))
	}
	// The logarithm of what lies outside is concave in r, so that Newton's steps
	// come down to the root after the first.
	r := start
	for range 60 {
		out := n.SF(r+z) + n.SF(r-z)
		step := num.Log(out/outside) * out / (n.Density(r+z) + n.Density(r-z))
		r += step
		if !(math.Abs(step) > 1e-15*r) {
			break
		}
	}
	return r
}

// tails is the confidence attained with the factor k, and 1 - confidence.
func (t *twoSidedTolerance) tails(k float64) (confidence, missed float64) {
	a := (t.n - 1) / 2
	peakLow, peakHigh := 0.0, 0.0
	for i := range 4000 {
		y := float64(i) * t.step
		ratio := t.radius(i) / k
		weight := num.Exp(-float64(y*y) / 2)
		if i == 0 {
			weight /= 2
		}
		low, high := GammaTails(a, a*float64(ratio*ratio))
		low = float64(low * weight)
		high = float64(high * weight)
		missed += low
		confidence += high
		peakLow, peakHigh = max(peakLow, low), max(peakHigh, high)
		if y > 8 && !(low > 1e-18*peakLow) && !(high > 1e-18*peakHigh) {
			break
		}
	}
	// Divided by their sum rather than by sqrt(pi/2)/step, which it equals.
	total := confidence + missed
	return confidence / total, missed / total
}

func toleranceDomain(n int, content float64) bool { return n >= 2 && content > 0 && content < 1 }

// ToleranceFactor is the factor k for which mean +- k*sd of n values of a normal
// law holds at least the content with the given confidence. Relative error 1e-12.
func ToleranceFactor(n int, content, confidence float64) float64 {
	if !toleranceDomain(n, content) || !(confidence > 0 && confidence < 1) {
		return math.NaN()
	}
	t := newTwoSidedTolerance(n, content)
	target := min(confidence, 1-confidence)
	f := func(u float64) float64 {
		reached, missed := t.tails(num.Exp(u))
		if confidence <= 0.5 {
			missed = reached
		}
		return num.Log(missed) - num.Log(target)
	}
	// Howe 1969, Journal of the American Statistical Association 64, 610-620, with
	// Wilson & Hilferty's approximation of chi-square, is a few per cent off.
	df := t.n - 1
	z := min(max(Normal{}.UpperQuantile(confidence), -10), 10)
	root := max(1-2/(9*df)+float64(z*math.Sqrt(2/(9*df))), 0.01)
	start := t.radius(0) * math.Sqrt((1+1/t.n)/(root*root*root))
	return num.Exp(crossing(f, num.Log(start), min(0.02, 0.1/math.Sqrt(df)), -700, 700, num.Log(1/target)))
}

// oneSidedTolerance is the law of sqrt(n) k where mean + k*sd is the quantile of
// the law at the content: noncentral t (Johnson & Welch 1940).
func oneSidedTolerance(n int, content float64) NoncentralT {
	z := -Normal{}.UpperQuantile(content)
	if content > 0.5 {
		z = Normal{}.UpperQuantile(1 - content)
	}
	return NoncentralT{float64(n) - 1, z * math.Sqrt(float64(n))}
}

// OneSidedToleranceFactor is the factor k for which mean + k*sd (or mean - k*sd)
// of n values of a normal law has at least the content below (above) it with the
// given confidence. Relative error 1e-12.
func OneSidedToleranceFactor(n int, content, confidence float64) float64 {
	if !toleranceDomain(n, content) || !(confidence > 0 && confidence < 1) {
		return math.NaN()
	}
	return oneSidedTolerance(n, content).Quantile(confidence) / math.Sqrt(float64(n))
}
