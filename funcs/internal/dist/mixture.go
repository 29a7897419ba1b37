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
type poissonMixture struct {
	mean   float64                                // half the noncentrality, > 0
	saddle float64                                // where weight(j)*drop(j) is largest
	tails  func(j float64) (lower, upper float64) // the central law's tails
	drop   func(j float64) float64                // lower(j) - lower(j+1)
	ratio  func(j float64) float64                // drop(j+1)/drop(j)
}

// manyTerms is the Poisson mean past which the sum over j is replaced by the
// trapezoidal rule with steps of many units; between whole numbers weight and
// tails go on as analytic functions of j.
const manyTerms = 1e5

func (m poissonMixture) weight(j float64) float64 { return GammaPrefactor(j+1, m.mean) / m.mean }

// term is weight(j) times one central tail.
func (m poissonMixture) term(j float64, upper bool) float64 {
	low, high := m.tails(j)
	if upper {
		low = high
	}
	return m.weight(j) * low
}

// peak brackets the largest term, which lies between the peak of the weights
// and the saddle, to about one width of the weights. The terms are log-concave.
func (m poissonMixture) peak(upper bool) (from, to float64) {
	from, to = math.Floor(min(m.mean, m.saddle)), math.Ceil(max(m.mean, m.saddle))
	if m.saddle < m.mean == upper {
		// The side of the mixture where the central tails are near 1.
		from, to = math.Floor(m.mean), math.Ceil(m.mean)
	}
	for to-from > 8+float64(4*math.Sqrt(to)) {
		mid := math.Floor(from/2 + to/2)
		here, next := m.term(mid, upper), m.term(mid+1, upper)
		rising := next > here
		if here == next {
			if here > 0 {
				return mid, mid
			}
			// Both underflow: the weight, if mid is too far from the mean, or
			// else the central tail.
			rising = upper != (m.weight(mid) == 0)
		}
		if rising {
			from = mid
		} else {
			to = mid + 1
		}
	}
	return from, to
}

// tail is the lower or the upper tail of the mixture.
func (m poissonMixture) tail(upper bool) float64 {
	from, to := m.peak(upper)
	if m.mean > manyTerms {
		// At whole numbers, so that j+1 is not rounded.
		centre := math.Floor(from/2 + to/2)
		step := 64 * math.Ceil(1.2*math.Sqrt(centre)/64)
		f := func(j float64) float64 {
			if j < 0 {
				return 0
			}
			return m.term(j, upper)
		}
		return min(num.Trapezoid(f, centre, step, 1e-8), 1)
	}
	// Beyond these ends the weights, and so the terms, have fallen by 1e-18 from
	// the largest: a Poisson law of mean c has less at c - 9.2 sqrt(c) - 1 and at
	// c + 9.2 sqrt(c) + 16.
	from = max(0, math.Floor(from-float64(9.2*math.Sqrt(from)))-1)
	to = math.Ceil(to+float64(9.2*math.Sqrt(to))) + 16
	// The recurrence adds: upwards for the upper tail, downwards for the lower.
	if upper {
		from = m.firstInRange(from, to, true)
		_, t := m.tails(from)
		w, d := m.weight(from), m.drop(from)
		sum := float64(w * t)
		for j := from; j < to; j++ {
			t += d
			d *= m.ratio(j)
			w *= m.mean / (j + 1)
			sum += float64(w * t)
		}
		return min(sum, 1)
	}
	to = m.firstInRange(to, from, false)
	t, _ := m.tails(to)
	w, d := m.weight(to), m.drop(to)
	sum := float64(w * t)
	for j := to - 1; j >= from; j-- {
		d /= m.ratio(j)
		t += d
		w *= (j + 1) / m.mean
		sum += float64(w * t)
	}
	return min(sum, 1)
}

// between is a sum of weight(j) times what each central law has between two
// limits, where the tails nearly cancel; centre is about the largest term.
func (m poissonMixture) between(centre float64, central func(j float64) float64) float64 {
	centre = math.Round(max(centre, 0))
	f := func(j float64) float64 {
		if j < 0 {
			return 0
		}
		return m.weight(j) * central(j)
	}
	step := 1.0
	if centre > 200 {
		// Wide enough for the trapezoidal rule in j.
		step = math.Ceil(1.2 * math.Sqrt(centre))
		return num.Trapezoid(f, centre, step, 1e-8)
	}
	return walk(f, centre, step, centre) + walk(f, centre-step, -step, 0)
}

// firstInRange is start, or where the weight or the central tail underflows there
// the nearest number on the way to end from which they do not.
func (m poissonMixture) firstInRange(start, end float64, upper bool) float64 {
	inRange := func(j float64) bool {
		low, high := m.tails(j)
		if upper {
			low = high
		}
		return low >= 1e-300 && m.weight(j) >= 1e-300
	}
	if inRange(start) {
		return start
	}
	for math.Abs(end-start) > 1 {
		mid := math.Floor((start + end) / 2)
		if inRange(mid) {
			end = mid
		} else {
			start = mid
		}
	}
	return end
}

// solvePositive finds x > 0 from a small tail of a law on the positive numbers
// whose centre and spread of log x are about those given.
func solvePositive(tail func(float64) float64, p, centre, spread float64) float64 {
	target := num.Log(p)
	f := func(u float64) float64 { return num.Log(tail(num.Exp(u))) - target }
	u := crossing(f, num.Log(centre), min(max(spread, 1e-12), 1), -745, 709.7, math.Abs(target))
	return num.Exp(u)
}
