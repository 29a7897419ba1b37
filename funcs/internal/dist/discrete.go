package dist

import (
	"math"

	"halfwidth/funcs/internal/num"
)

// Binomial is the law of the number of successes in N (0 or more) independent
// trials of probability P (0 to 1).
type Binomial struct {
	N int
	P float64
}

func (d Binomial) valid() bool { return d.N >= 0 && d.P >= 0 && d.P <= 1 }

// PMF is P(X = k), through deviance and Stirling error (Loader 2000, Fast and
// accurate computation of binomial probabilities), which the prefactor of the
// incomplete beta function holds. Relative error 1e-14 for N to 1e9.
func (d Binomial) PMF(k int) float64 {
	switch {
	case !d.valid():
		return math.NaN()
	case k < 0 || k > d.N:
		return 0
	case d.P == 0 || d.P == 1:
		if (k == 0) == (d.P == 0) && (k == d.N) == (d.P == 1) {
			return 1
		}
		return 0
	}
	return binomialTerm(float64(k), float64(d.N), d.P, 1-d.P)
}

// binomialTerm is C(n, k) p^k q^(n-k) with q = 1 - p, for real k and n.
func binomialTerm(k, n, p, q float64) float64 {
	if k < 0 || k > n {
		return 0
	}
	return min(1, BetaPrefactor(p, q, k+1, n-k+1)/((n+1)*p*q))
}

func (d Binomial) tails(k int) (lower, upper float64) {
	switch {
	case !d.valid():
		return math.NaN(), math.NaN()
	case k < 0:
		return 0, 1
	case k >= d.N || d.P == 0:
		return 1, 0
	case d.P == 1:
		return 0, 1
	}
	// P(X > k) is the incomplete beta function of P at k+1 and N-k.
	upper, lower = BetaTails(d.P, 1-d.P, float64(k)+1, float64(d.N-k))
	return lower, upper
}

// CDF is P(X <= k).
func (d Binomial) CDF(k int) float64 { low, _ := d.tails(k); return low }

// SF is P(X > k).
func (d Binomial) SF(k int) float64 { _, up := d.tails(k); return up }

// Quantile is the smallest k with P(X <= k) >= p; -1 outside the domain.
func (d Binomial) Quantile(p float64) int {
	if p > 0.5 {
		return d.UpperQuantile(1 - p)
	}
	if !d.valid() || !(p >= 0) {
		return -1
	}
	return d.first(p, func(k int) bool { return d.CDF(k) >= p })
}

// UpperQuantile is the smallest k with P(X > k) <= q; -1 outside the domain.
func (d Binomial) UpperQuantile(q float64) int {
	if !d.valid() || !(q >= 0 && q <= 1) {
		return -1
	}
	return d.first(1-q, func(k int) bool { return d.SF(k) <= q })
}

// first is the smallest k from 0 to N for which ok holds, which it does at N, near
// the quantile p of a normal law of the same mean and sd.
func (d Binomial) first(p float64, ok func(k int) bool) int {
	n := float64(d.N)
	sd := math.Sqrt(n * d.P * (1 - d.P))
	start := float64(n * d.P)
	if p > 0 && p < 1 {
		start += float64(sd * Normal{}.Quantile(p))
	}
	k, _ := num.Smallest(0, d.N, int(min(max(start, 0), n)), ok)
	return k
}

// Poisson is the law of a count with the given Mean (0 or more).
type Poisson struct{ Mean float64 }

func (d Poisson) valid() bool { return d.Mean >= 0 && !math.IsInf(d.Mean, 1) }

// PMF is P(X = k), through deviance and Stirling error as for Binomial.
func (d Poisson) PMF(k int) float64 {
	switch {
	case !d.valid():
		return math.NaN()
	case k < 0:
		return 0
	case d.Mean == 0:
		if k == 0 {
			return 1
		}
		return 0
	}
	return min(1, GammaPrefactor(float64(k)+1, d.Mean)/d.Mean)
}

func (d Poisson) tails(k int) (lower, upper float64) {
	switch {
	case !d.valid():
		return math.NaN(), math.NaN()
	case k < 0:
		return 0, 1
	}
	upper, lower = GammaTails(float64(k)+1, d.Mean)
	return lower, upper
}

// CDF is P(X <= k).
func (d Poisson) CDF(k int) float64 { low, _ := d.tails(k); return low }

// SF is P(X > k).
func (d Poisson) SF(k int) float64 { _, up := d.tails(k); return up }
