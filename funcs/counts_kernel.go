package funcs

import (
	"math"

	"halfwidth/funcs/internal/dist"
	"halfwidth/funcs/internal/num"
)

// What the intervals and tests of counts and their plans share.

// The kinds of interval of a proportion.
const (
	wilson     = "wilson"
	exactShare = "clopper-pearson"
)

var shareKind = choice("kind", "wilson: from the score test, near its confidence on average; clopper-pearson: exact, never below its confidence",
	wilson, exactShare)

// binomialAtLeast is P(X >= x) for X ~ Binomial(n, p); x may be a fraction, as
// the incomplete beta function continues it.
func binomialAtLeast(x, n, p float64) float64 {
	switch {
	case x <= 0:
		return 1
	case x > n:
		return 0
	}
	lower, _ := dist.BetaTails(p, 1-p, x, n-x+1)
	return lower
}

// binomialAtMost is P(X <= x) for X ~ Binomial(n, p).
func binomialAtMost(x, n, p float64) float64 {
	switch {
	case x < 0:
		return 0
	case x >= n:
		return 1
	}
	_, upper := dist.BetaTails(p, 1-p, x+1, n-x)
	return upper
}

// binomialPValue is the exact p-value of x successes in n against the reference;
// rest is 1 - reference, carried apart so that neither loses digits beside 1.
func binomialPValue(x, n, reference, rest float64, direction string) float64 {
	atMost, atLeast := 1.0, 1.0
	if x < n {
		_, atMost = dist.BetaTails(reference, rest, x+1, n-x)
	}
	if x > 0 {
		atLeast, _ = dist.BetaTails(reference, rest, x, n-x+1)
	}
	return tailP(direction, atMost, atLeast)
}

// pooledScoreZ is the score statistic of the difference of two proportions,
// first - second, with the pooled share and no continuity correction. It is 0
// where the pooled share is 0 or 1 and nothing speaks for a difference.
func pooledScoreZ(firstX, firstN, secondX, secondN float64) float64 {
	n := firstN + secondN
	share := (firstX + secondX) / n
	rest := ((firstN - firstX) + (secondN - secondX)) / n
	if share <= 0 || rest <= 0 {
		return 0
	}
	// firstX/firstN - secondX/secondN over one denominator: the difference of the
	// exact products loses nothing.
	a, b := num.TwoProduct(firstX, secondN), num.TwoProduct(secondX, firstN)
	return a.Sub(b).Float() / math.Sqrt(firstN*secondN) / math.Sqrt(n*share*rest)
}

// wilsonDistances are the distances of the Wilson limits (Wilson 1927) from the
// share, in units in which nothing cancels: the limit p-d solves
// d² = z²(p-d)(1-p+d)/n, the limit p+d likewise.
func wilsonDistances(share, n, z float64) (below, above float64) {
	r := float64(z*z) / n
	a, b, c := 1+r, r*(1-2*share), r*share*(1-share)
	root := math.Sqrt(float64(b*b) + float64(4*a*c))
	near, far := 0.0, (math.Abs(b)+root)/(2*a)
	if c > 0 {
		near = 2 * c / (math.Abs(b) + root)
	}
	if b >= 0 {
		return near, far
	}
	return far, near
}

// clopperPearson gives the limits that leave the probability outside each
// (Clopper & Pearson 1934); x may be a fraction.
func clopperPearson(x, n, outside float64) (lower, upper float64) {
	upper = 1
	if x > 0 {
		lower = dist.Beta{A: x, B: n - x + 1}.Quantile(outside)
	}
	if x < n {
		upper = dist.Beta{A: x + 1, B: n - x}.UpperQuantile(outside)
	}
	return lower, upper
}

// garwood gives the limits of a Poisson mean that leave the probability outside
// each (Garwood 1936); the count may be a fraction.
func garwood(count, outside float64) (lower, upper float64) {
	if count > 1e-4 { // below, the limit is under 1e-3000
		lower = dist.Gamma{Shape: count}.Quantile(outside)
	}
	return lower, dist.Gamma{Shape: count + 1}.UpperQuantile(outside)
}
