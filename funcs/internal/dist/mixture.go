package dist

import (
	"math"

	"halfwidth/funcs/internal/num"
)

// poissonMixture is a law that is a Poisson(mean) mixture of central laws
// numbered j = 0, 1, ..., the noncentral chi-square and F: their tails are
// sums of weight(j) times the central tail, all terms positive (Ding 1992,
// AS 275; Lenth 1987, AS 226; Benton & Krishnamoorthy 2003, Computational
// Statistics & Data Analysis 43, 249-267).
//
// Each central law has a prefactor, its density times x (gamma) or x (1-x)
// (beta), and what its lower tail loses from j to j+1 is the prefactor over
// shape + j.
type poissonMixture struct {
	mean   float64                 // half the noncentrality, > 0
	shape  float64                 // of central law 0; law j has shape + j
	saddle float64                 // where weight(j) times the prefactor is largest
	tails  func(j float64) tails   // the central law's tails
	factor func(j float64) float64 // its prefactor

	// ratio is the prefactor of j+1 over that of j, and by which part of itself
	// its rounded sums leave it too small: a shape with a fraction rounds alike
	// at every j, which adds up over thousands of terms.
	ratio func(j float64) (ratio, rest float64)
}

// manyTerms is the Poisson mean past which the sum over j is replaced by the
// trapezoidal rule with steps of many units; between whole numbers weight and
// tails go on as analytic functions of j.
const manyTerms = 1e5

// manySteps is the step for that rule about centre, a multiple of many units in
// its last place: j must not be rounded when the step is halved, either.
func manySteps(centre float64) float64 {
	_, exponent := math.Frexp(centre)
	unit := math.Ldexp(1, max(6, exponent-46))
	return unit * math.Ceil(1.2*math.Sqrt(centre)/unit)
}

// weight is the Poisson probability of j, and its logarithm.
func (m poissonMixture) weight(j float64) (w, log float64) {
	s := num.TwoSum(j, 1) // past 2^53, j+1 is rounded
	p := gammaPointAt(s.Hi, num.Widen(m.mean))
	grow := gammaGrowth(s, m.mean)
	return (p.factor + float64(p.factor*num.Expm1(grow))) / m.mean, p.log + grow - num.Log(m.mean)
}

// logTerm is the logarithm of weight(j) times one central tail.
func (m poissonMixture) logTerm(j float64, upper bool) float64 {
	_, w := m.weight(j)
	t := m.tails(j)
	return w + t.logOf(upper)
}

// peak brackets the largest term, which lies between the peak of the weights
// and the saddle, to the given number of widths of the weights. The terms are
// log-concave.
func (m poissonMixture) peak(upper bool, widths float64) (from, to float64) {
	from, to = math.Floor(min(m.mean, m.saddle)), math.Ceil(max(m.mean, m.saddle))
	if m.saddle < m.mean == upper {
		// The side of the mixture where the central tails are near 1.
		from = math.Floor(m.mean)
		return from, from
	}
	for to-from > float64(widths*math.Sqrt(to)) {
		mid := math.Floor(from/2 + to/2)
		if m.logTerm(mid+1, upper) > m.logTerm(mid, upper) {
			from = mid + 1
		} else {
			to = mid
		}
	}
	return from, to
}

// tail is the lower or the upper tail of the mixture.
func (m poissonMixture) tail(upper bool) float64 {
	if m.mean > manyTerms {
		from, to := m.peak(upper, 4)
		// At whole numbers, so that j+1 is not rounded.
		centre := math.Floor(from/2 + to/2)
		if m.logTerm(centre, upper) < -800 {
			return 0
		}
		step := manySteps(centre)
		f := func(j float64) float64 {
			if j < 0 {
				return 0
			}
			return m.term(j, upper)
		}
		return min(num.Trapezoid(f, centre, step, 1e-8)/raised, 1)
	}
	peak, _ := m.peak(upper, 0)
	// Beyond these ends the weights, and so the terms, have fallen by 1e-18 from
	// the largest: a Poisson law of mean c has less at c - 9.2 sqrt(c) - 1 and at
	// c + 9.2 sqrt(c) + 16.
	low := max(0, math.Floor(peak-float64(9.2*math.Sqrt(peak)))-1)
	high := math.Ceil(peak+float64(9.2*math.Sqrt(peak))) + 16
	// The recurrence adds: upwards for the upper tail, downwards for the lower.
	if upper {
		return m.sum(m.first(low, peak, true), high, true)
	}
	return m.sum(m.first(high, peak, false), low, false)
}

// raised keeps terms in range whose sum is above 1e-300.
const (
	raised    = 0x1p900
	logRaised = 900 * math.Ln2
)

// term is weight(j) times one central tail, raised.
func (m poissonMixture) term(j float64, upper bool) float64 {
	w, logW := m.weight(j)
	t := m.tails(j)
	if size := t.of(upper); w > 1e-290 && size > 1e-290 {
		return float64(float64(w*raised) * size)
	}
	return num.Exp(logW + t.logOf(upper) + logRaised)
}

// first is start, or where the terms there are too small to count the nearest
// number on the way to the peak from which they do.
func (m poissonMixture) first(start, peak float64, upper bool) float64 {
	least := m.logTerm(peak, upper) - 45
	if m.logTerm(start, upper) >= least {
		return start
	}
	for math.Abs(peak-start) > 1 {
		if mid := math.Floor((start + peak) / 2); m.logTerm(mid, upper) >= least {
			peak = mid
		} else {
			start = mid
		}
	}
	return peak
}

// sum adds the terms from first to last by recurrence. Weight and tail count in
// units of those at first, the tail in far larger ones, for it may grow from
// there by more than a float64 holds.
func (m poissonMixture) sum(first, last float64, upper bool) float64 {
	const unit = 0x1p-500
	t := m.tails(first)
	w, logW := m.weight(first)
	if logW+t.logOf(upper) < -800 {
		return 0
	}
	ratio := t.lowerRatio
	if upper {
		ratio = t.upperRatio
	}
	share, tail, factor, rests := 1.0, unit, unit/ratio, 0.0
	sum := tail
	if upper {
		for j := first; j < last; j++ {
			tail += float64(factor*(1+rests)) / (m.shape + j)
			r, rest := m.ratio(j)
			factor *= r
			rests += rest
			share *= m.mean / (j + 1)
			sum += float64(share * tail)
		}
	} else {
		for j := first - 1; j >= last; j-- {
			r, rest := m.ratio(j)
			factor /= r
			rests -= rest
			tail += float64(factor*(1+rests)) / (m.shape + j)
			share *= (j + 1) / m.mean
			sum += float64(share * tail)
		}
	}
	sum /= unit
	if size := t.of(upper); w > 1e-290 && size > 1e-290 {
		return min(float64(float64(sum*w)*size), 1)
	}
	return min(num.Exp(logW+t.logOf(upper)+num.Log(sum)), 1)
}

// density is the sum of weight(j) times the prefactor.
func (m poissonMixture) density() float64 {
	centre := math.Round(max(m.saddle, 0))
	f := func(j float64) float64 {
		if j < 0 {
			return 0
		}
		w, _ := m.weight(j)
		return float64(w * m.factor(j))
	}
	if centre > manyTerms {
		step := manySteps(centre)
		return num.Trapezoid(f, centre, step, 1e-8)
	}
	peak := f(centre)
	sum, term, rests := peak, peak, 0.0
	for j := centre; term > 1e-18*sum; j++ {
		r, rest := m.ratio(j)
		term *= m.mean / (j + 1) * r
		rests += rest
		sum += float64(term * (1 + rests))
	}
	term, rests = peak, 0
	for j := centre - 1; j >= 0 && term > 1e-18*sum; j-- {
		r, rest := m.ratio(j)
		term *= (j + 1) / m.mean / r
		rests -= rest
		sum += float64(term * (1 + rests))
	}
	return sum
}

// narrowly is the probability from a to b > a > 0, by quadrature of the density;
// perLog is the density of log x at x. Where b is near a, x is carried to double
// length, for the density may be much steeper than x^1e5.
func narrowly(a, b float64, perLog func(x num.Wide) float64) float64 {
	if b > 2*a {
		return panels(num.Log(b/a), func(w float64) float64 { return perLog(num.Widen(float64(a * num.Exp(w)))) })
	}
	width := b - a
	return num.Legendre(func(t float64) float64 {
		x := num.TwoSum(a, float64(t*width))
		return float64(perLog(x) * (width / x.Hi))
	}, 0, 1)
}

// lostBetween is how much less a tail that is proportional to x^-power is at b
// than at a, over what it is at a.
func lostBetween(power, a, b float64) float64 {
	return -num.Expm1(-float64(power * num.Log1p((b-a)/a)))
}

// solvePositive finds x > 0 from a small tail of a law on the positive numbers
// whose centre and spread of log x are about those given.
func solvePositive(tail func(float64) float64, p, centre, spread float64) float64 {
	target := num.Log(p)
	f := func(u float64) float64 { return num.Log(tail(num.Exp(u))) - target }
	u := crossing(f, num.Log(centre), min(max(spread, 1e-12), 1), -745, largestLog, math.Abs(target))
	if u >= largestLog {
		return math.Inf(1)
	}
	// The last place of u is much of x where u is large: one step of a secant more.
	x := num.Exp(u)
	h := 1e-3 * min(max(spread, 1e-12), 1)
	here, there := tail(x), tail(x+float64(x*h))
	gap := gapTo(here, p, num.Log(here), target)
	if slope := gapTo(there, here, num.Log(there), num.Log(here)) / h; math.Abs(gap) < 1e-9 && slope != 0 {
		x -= float64(x * (gap / slope))
	}
	return x
}
