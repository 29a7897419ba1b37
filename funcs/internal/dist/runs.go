package dist

import "math"

// Runs is the law of the number of runs in a random order of First things of one
// kind and Second of another (Swed & Eisenhart 1943, Annals of Mathematical
// Statistics 14, 66-87).
//
// With k runs of the one kind and l of the other there are C(a-1, k-1) C(b-1, l-1)
// orders for each kind that may come first, out of C(a+b, a); |k - l| is 0 or 1.
// By Vandermonde's sum the three cases are hypergeometric laws: even numbers of
// runs 2k have 2ab/(N(N-1)) times one in k-1, odd ones 2k+1 have
// a(a-1)/(N(N-1)) and b(b-1)/(N(N-1)) times two in k. Tails add up theirs.
type Runs struct{ First, Second int }

func (d Runs) valid() bool { return d.First >= 0 && d.Second >= 0 && d.First+d.Second > 0 }

// mixture sums a probability of the three laws, given the numbers to ask for.
func (d Runs) mixture(probability func(h Hypergeometric, k int) float64, even, odd int) float64 {
	a, b := float64(d.First), float64(d.Second)
	n := a + b
	all := d.First + d.Second - 2
	share := func(weight float64, h Hypergeometric, k int) float64 {
		if weight == 0 {
			return 0
		}
		return weight * probability(h, k)
	}
	p := share(2*(a/n)*(b/(n-1)), Hypergeometric{all, d.First - 1, d.Second - 1}, even)
	p += share(a/n*((a-1)/(n-1)), Hypergeometric{all, d.First - 1, d.Second}, odd)
	p += share(b/n*((b-1)/(n-1)), Hypergeometric{all, d.Second - 1, d.First}, odd)
	return min(1, p)
}

// onlyOne tells that all things are alike, so that they form one run.
func (d Runs) onlyOne() bool { return d.First == 0 || d.Second == 0 }

// CDF is P(R <= r).
func (d Runs) CDF(r int) float64 {
	switch {
	case !d.valid():
		return math.NaN()
	case r < 1:
		return 0
	case d.onlyOne():
		return 1
	}
	return d.mixture(Hypergeometric.CDF, r/2-1, (r-1)/2)
}

// SF is P(R > r).
func (d Runs) SF(r int) float64 {
	switch {
	case !d.valid():
		return math.NaN()
	case r < 1:
		return 1
	case d.onlyOne():
		return 0
	}
	return d.mixture(Hypergeometric.SF, r/2-1, (r-1)/2)
}
