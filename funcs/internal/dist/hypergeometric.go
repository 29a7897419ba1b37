package dist

import (
	"math"

	"halfwidth/funcs/internal/num"
)

// Hypergeometric is the law of the number of marked items among Draws taken
// without replacement from Population items of which Marked are marked.
type Hypergeometric struct{ Population, Marked, Draws int }

func (d Hypergeometric) valid() bool {
	return d.Population >= 0 && d.Marked >= 0 && d.Draws >= 0 && d.Marked <= d.Population && d.Draws <= d.Population
}

// support is the smallest and the largest possible count.
func (d Hypergeometric) support() (lo, hi int) {
	return max(0, d.Draws-(d.Population-d.Marked)), min(d.Draws, d.Marked)
}

// term is P(X = k), continued to real k inside the support, from three binomial
// probabilities as Loader 2000 (Fast and accurate computation of binomial
// probabilities): with p = draws/population it is
// b(k; marked) b(draws-k; rest)/b(draws; population), in which the rounding of p
// cancels. Relative error 1e-13 for populations to 1e9.
func (d Hypergeometric) term(k float64) float64 {
	all, marked, draws := float64(d.Population), float64(d.Marked), float64(d.Draws)
	p, q := draws/all, float64(d.Population-d.Draws)/all
	return min(1, binomialTerm(k, marked, p, q)*(binomialTerm(draws-k, all-marked, p, q)/binomialTerm(draws, all, p, q)))
}

// CDF is P(X <= k).
func (d Hypergeometric) CDF(k int) float64 { low, _ := d.tails(k); return low }

// SF is P(X > k).
func (d Hypergeometric) SF(k int) float64 { _, up := d.tails(k); return up }

// tails sums the smaller tail term by term, outwards from k, each term from the
// one before it; the sum ends when a term is 1e-18 of it, after at most about 9
// sds. A tail so wide that this takes more than manyCounts terms is integrated.
func (d Hypergeometric) tails(k int) (lower, upper float64) {
	lo, hi := d.support()
	switch {
	case !d.valid():
		return math.NaN(), math.NaN()
	case k < lo:
		return 0, 1
	case k >= hi:
		return 1, 0
	}
	if float64(k) < float64(d.Draws)*(float64(d.Marked)/float64(d.Population)) {
		lower = d.outwards(k, lo, -1)
		return lower, 1 - lower
	}
	upper = d.outwards(k+1, hi, 1)
	return 1 - upper, upper
}

// manyCounts is the number of terms, 0.5 ms, past which a tail is integrated.
const manyCounts = 100000

// outwards is the sum of the probabilities from k to end, in steps of +1 or -1
// away from the mean.
func (d Hypergeometric) outwards(k, end, step int) float64 {
	all, marked, draws := float64(d.Population), float64(d.Marked), float64(d.Draws)
	sd := math.Sqrt(draws * (marked / all) * (1 - marked/all) * (1 - draws/all))
	if 9*sd > manyCounts && math.Abs(float64(end-k)) > manyCounts {
		return d.integrated(float64(k), float64(end), float64(step), sd)
	}
	term := d.term(float64(k))
	sum := term
	rest := all - marked - draws
	for j := float64(k); k != end && term > sum*1e-18; k += step {
		if step < 0 {
			term *= float64(j/(marked-j+1)) * ((rest + j) / (draws - j + 1))
		} else {
			term *= float64((marked-j)/(j+1)) * ((draws - j) / (rest + j + 1))
		}
		sum += term
		j += float64(step)
	}
	return min(sum, 1)
}

// integrated is the same sum by the Euler-Maclaurin formula about the half unit
// before k: the integral of the probability function from there, plus its slope
// over 24. With an sd past 1e4 the next correction is below 1e-13 of the tail.
func (d Hypergeometric) integrated(k, end, step, sd float64) float64 {
	marked, draws := float64(d.Marked), float64(d.Draws)
	rest := float64(d.Population) - marked - draws
	// The probability t units outwards of k. Near 1e9 counts are 1e-7 apart, so
	// what rounding takes off t is made good by the slope of the logarithm.
	f := func(t float64) float64 {
		x := k + float64(step*t)
		lost := float64(step*t) - (x - k)
		ratio := float64((marked-x)/(x+1)) * ((draws - x) / (rest + x + 1))
		return d.term(x) * (1 + float64(lost*num.Log(ratio)))
	}
	from, last := -0.5, (end-k)*step
	sum := 0.0
	for range 200 {
		to := min(from+sd/2, last)
		part := gauss16(f, from, to)
		sum += part
		if !(part > sum*1e-18) || to == last {
			break
		}
		from = to
	}
	return min(1, sum+(d.term(k)-d.term(k-step))/24)
}
