package funcs

import (
	"math"

	"halfwidth/funcs/internal/dist"
	"halfwidth/funcs/internal/num"
)

// shareTest is the test of one proportion by its exact binomial p-value.
type shareTest struct {
	share, reference, significance float64
	direction                      string
}

func (s shareTest) largest() int { return largestPlan }

// cost is that of a few binomial tails.
func (s shareTest) cost(int) float64 { return 500 }

func (s shareTest) power(n, wider int) float64 {
	m := float64(n)
	var total float64
	if s.direction != below && (wider >= 0 || s.share > s.reference) {
		total += binomialAtLeast(float64(s.fromAbove(n)-wider), m, s.share)
	}
	if s.direction != above && (wider >= 0 || s.share < s.reference) {
		total += binomialAtMost(float64(s.fromBelow(n)+wider), m, s.share)
	}
	return math.Min(1, total)
}

// fromAbove is the smallest count that speaks for a larger share.
func (s shareTest) fromAbove(n int) int {
	return criticalCount(n, s.reference, oneTail(s.significance, s.direction), func(x int) float64 {
		return binomialAtLeast(float64(x), float64(n), s.reference)
	})
}

// fromBelow is the largest count that speaks for a smaller share, found from the
// other side as a number of failures.
func (s shareTest) fromBelow(n int) int {
	return n - criticalCount(n, 1-s.reference, oneTail(s.significance, s.direction), func(x int) float64 {
		return binomialAtMost(float64(n-x), float64(n), s.reference)
	})
}

// criticalCount is the smallest count from 0 to n+1 whose tail is no more than
// the significance; the search starts at its quantile by Cornish and Fisher.
func criticalCount(n int, p, significance float64, tail func(x int) float64) int {
	m, z := float64(n), dist.Normal{}.UpperQuantile(significance)
	guess := m*p + z*math.Sqrt(m*p*(1-p)) + (float64(z*z)-1)*(1-2*p)/6 + 0.5
	x, _ := num.Smallest(0, n+1, clampPlan(math.Ceil(guess), 0, n+1), func(x int) bool { return staysIn(tail(x), significance) })
	return x
}

// run is the last n with the same region, told in counts of what is rare. With
// such a region one tail only rises and the other only falls, and the one on the
// side of the truth is by far the larger.
func (s shareTest) run(n int) int {
	const rare = 0.05
	region := func(n int) (upper, lower int) { return s.fromAbove(n), s.fromBelow(n) }
	switch {
	case s.reference < rare:
	case s.reference > 1-rare: // failures
		region = func(n int) (upper, lower int) { return n - s.fromAbove(n), n - s.fromBelow(n) }
	default:
		return n
	}
	upper, lower := region(n)
	next, _ := num.Smallest(n, s.largest(), n+1, func(n int) bool {
		u, l := region(n)
		return u != upper || l != lower || n == s.largest()
	})
	return next - 1
}

// sharesPairTest is the test of two proportions by the pooled score z.
type sharesPairTest struct {
	first, second, significance float64
	direction                   string
	ratio                       float64 // second-n over n
	secondN                     int     // where it is given instead
}

func (s sharesPairTest) size(n int) int {
	if s.secondN > 0 {
		return s.secondN
	}
	return secondSize(n, s.ratio)
}

func (s sharesPairTest) largest() int { return int(largestPlan / math.Max(1, s.ratio)) }

// run is a stretch over which no count is expected to change by more than a
// hundredth, where both groups' counts are rare: the power, which changes with
// the expected counts, rises or falls all the way.
func (s sharesPairTest) run(n int) int {
	rarity := math.Max(math.Min(s.first, 1-s.first), math.Min(s.second, 1-s.second)*math.Max(1, s.ratio))
	return n + int(math.Min(0.01/rarity, largestPlan))
}

func (s sharesPairTest) cost(n int) float64 {
	spread := func(n int, p float64) float64 { return 17 * math.Sqrt(float64(n)*p*(1-p)) }
	return spread(n, s.first) + spread(s.size(n), s.second)
}

// power adds up, over the counts of the first group, the chance of each times
// the chance that the second group's count lies in the region of rejection. The
// statistic falls as the second count rises, so the region has two ends for each
// first count, and both ends rise with it.
func (s sharesPairTest) power(n, wider int) float64 {
	m := s.size(n)
	if m < smallestGroup {
		return 0
	}
	one, two := binomialMasses(n, s.first), binomialMasses(m, s.second)
	cumulated := two.cumulated()
	// The pooled score z passes the critical value when the squares do: with the
	// counts x and y, z² = (xm-yn)²N/(nm(x+y)(N-x-y)), N = n+m. The product of two
	// counts up to largestPlan is exact in 64 bits. No count passes where the pooled
	// share is 0 or 1.
	crit := dist.Normal{}.UpperQuantile(oneTail(s.significance, s.direction) * (1 + planSlack))
	scale := float64(crit*crit) * float64(n) * float64(m) / float64(n+m)
	beyond := func(x, y int, sign float64) bool {
		d := sign * float64(int64(x)*int64(m)-int64(y)*int64(n))
		return d > 0 && d*d >= scale*float64(x+y)*float64(n-x+m-y)
	}
	upper := s.direction != below && (wider >= 0 || s.first > s.second)
	lower := s.direction != above && (wider >= 0 || s.first < s.second)
	top := two.from + len(two.mass) - 1
	// The largest second count that speaks for a larger first share, and the
	// smallest that speaks for a smaller one, as far as they have weight.
	last, next := two.from-1, two.from
	var total float64
	for i, mass := range one.mass {
		x := one.from + i
		var tail float64
		if upper {
			for last < top && beyond(x, last+1, 1) {
				last++
			}
			tail += cumulated.atMost(last + wider)
		}
		if lower {
			for next <= top && !beyond(x, next, -1) {
				next++
			}
			tail += cumulated.atLeast(next - wider)
		}
		total += float64(mass * tail)
	}
	return math.Min(1, total)
}

// masses are the probabilities of the counts from, from+1, ... of a binomial law;
// what is left out on either side is below 1e-20 of the largest.
type masses struct {
	from int
	mass []float64
}

const negligibleMass = 1e-20

// binomialMasses builds the masses from the mode outwards, each from its
// neighbour, and scales them to sum to 1.
func binomialMasses(n int, p float64) masses {
	q := 1 - p
	mode := min(int(float64(n+1)*p), n)
	reach := int(10*math.Sqrt(float64(n)*p*q)) + 50
	down := make([]float64, 0, min(reach, mode))
	for k, x := mode, 1.0; k > 0; k-- {
		if x *= float64(k) * q / (float64(n-k+1) * p); x < negligibleMass {
			break
		}
		down = append(down, x)
	}
	all := masses{from: mode - len(down), mass: make([]float64, len(down), len(down)+1+min(reach, n-mode))}
	var sum float64
	for i, x := range down {
		all.mass[len(down)-1-i] = x
	}
	for _, x := range all.mass {
		sum += x
	}
	all.mass = append(all.mass, 1)
	sum++
	for k, x := mode, 1.0; k < n; k++ {
		if x *= float64(n-k) * p / (float64(k+1) * q); x < negligibleMass {
			break
		}
		all.mass = append(all.mass, x)
		sum += x
	}
	for i := range all.mass {
		all.mass[i] /= sum
	}
	return all
}

// cumulatedMasses are the masses added up from below and from above.
type cumulatedMasses struct {
	from         int
	below, above []float64
}

func (m masses) cumulated() cumulatedMasses {
	c := cumulatedMasses{m.from, make([]float64, len(m.mass)), make([]float64, len(m.mass))}
	var low, high float64
	for i, j := 0, len(m.mass)-1; i < len(m.mass); i, j = i+1, j-1 {
		low += m.mass[i]
		high += m.mass[j]
		c.below[i], c.above[j] = low, high
	}
	return c
}

// atMost is P(X <= x).
func (c cumulatedMasses) atMost(x int) float64 {
	if i := x - c.from; i < 0 {
		return 0
	} else if i < len(c.below) {
		return c.below[i]
	}
	return 1
}

// atLeast is P(X >= x).
func (c cumulatedMasses) atLeast(x int) float64 {
	if i := x - c.from; i >= len(c.above) {
		return 0
	} else if i >= 0 {
		return c.above[i]
	}
	return 1
}
