package funcs

import (
	"math"

	"halfwidth/funcs/internal/dist"
)

// The power of a test of proportions is a sum over counts, and it does not rise
// steadily with n: whenever the region of rejection loses a count, the power
// drops a little. Two bounds tame this. Let the region be wider, or narrower, by
// one count than the p-value allows: with limits of the region that need not be
// whole the power would rise steadily, and it would lie between the two. So no n
// up to one at which the wider region falls short can hold, and every n from one
// at which the narrower region suffices does hold. Only the n between are looked
// at one by one.

// sharesTest is a test of one or two proportions.
type sharesTest interface {
	// power of n, with the region of rejection wider by so many counts; narrower
	// where that is negative, and then without its side away from the truth.
	power(n, wider int) float64
	// cost of one power, in units of one count looked at.
	cost(n int) float64
	// largest is the largest n that may be planned.
	largest() int
}

// affordable is how much a plan may cost when it goes through n by n.
const affordable = 1.5e7

// sharesPlan is the answer of planShares.
type sharesPlan struct {
	n, first int
	excess   int // how far n may lie above the smallest, where n is only a bound
	found    bool
}

// planShares finds the smallest n from which every n' up to 2n holds too, and
// the first n that holds. Where the n between the bounds would cost too much, n
// is the upper bound and first is 0.
func (c *Call) planShares(t sharesTest, wanted, guess float64) (sharesPlan, error) {
	var stopped error
	holds := func(n, wider int) bool {
		if stopped == nil {
			stopped = c.cancelled()
		}
		return stopped != nil || reaches(t.power(n, wider), wanted)
	}
	start := clampPlan(guess, smallestGroup, t.largest())
	high, found := passing(smallestGroup, t.largest(), start, start/256, func(n int) bool { return holds(n, -1) })
	if !found || stopped != nil {
		return sharesPlan{}, stopped
	}
	low, _ := passing(smallestGroup, high, start, start/256, func(n int) bool { return holds(n, +1) })
	if float64(high-low)*t.cost(high) > affordable {
		return sharesPlan{n: high, excess: high - low, found: true}, stopped
	}
	first := low
	for first < high && !holds(first, 0) {
		first++
	}
	n := high
	for m, fails := high-1, math.MaxInt; m >= first; m-- {
		switch {
		case !holds(m, 0):
			fails = m
			if fails <= 2*first {
				return sharesPlan{n: n, first: first, found: true}, stopped
			}
		case 2*m < fails:
			n = m
		}
	}
	return sharesPlan{n: n, first: first, found: true}, stopped
}

// shareTest is the test of one proportion by its exact binomial p-value.
type shareTest struct {
	share, reference, significance float64
	direction                      string
}

func (s shareTest) largest() int { return largestPlan }

// cost is that of half a dozen binomial tails.
func (s shareTest) cost(int) float64 { return 500 }

func (s shareTest) power(n, wider int) float64 {
	m := float64(n)
	each := oneTail(s.significance, s.direction)
	spread := math.Sqrt(m * s.reference * (1 - s.reference))
	reach := dist.Normal{}.UpperQuantile(each) * spread
	step := int(spread / 32)
	var total float64
	if s.direction != below && (wider >= 0 || s.share > s.reference) {
		x, _ := passing(0, n+1, clampPlan(m*s.reference+reach, 0, n+1), step, func(x int) bool {
			return staysIn(binomialAtLeast(float64(x), m, s.reference), each)
		})
		total += binomialAtLeast(float64(x-wider), m, s.share)
	}
	if s.direction != above && (wider >= 0 || s.share < s.reference) {
		// Counted from above, as failures.
		x, _ := passing(0, n+1, clampPlan(m*(1-s.reference)+reach, 0, n+1), step, func(x int) bool {
			return staysIn(binomialAtMost(float64(n-x), m, s.reference), each)
		})
		total += binomialAtMost(float64(n-x+wider), m, s.share)
	}
	return math.Min(1, total)
}

// oneTail is the significance of one rejection tail.
func oneTail(significance float64, direction string) float64 {
	if direction == either {
		return significance / 2
	}
	return significance
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
	crit := dist.Normal{}.UpperQuantile(oneTail(s.significance, s.direction) * (1 + planSlack))
	z := func(x, y int) float64 { return pooledScoreZ(float64(x), float64(n), float64(y), float64(m)) }
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
			for last < top && z(x, last+1) >= crit {
				last++
			}
			tail += cumulated.atMost(last + wider)
		}
		if lower {
			for next <= top && z(x, next) > -crit {
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
	var down, up []float64
	for k, x := mode, 1.0; k > 0; k-- {
		x *= float64(k) / float64(n-k+1) * (q / p)
		if x < negligibleMass {
			break
		}
		down = append(down, x)
	}
	for k, x := mode, 1.0; k < n; k++ {
		x *= float64(n-k) / float64(k+1) * (p / q)
		if x < negligibleMass {
			break
		}
		up = append(up, x)
	}
	all := masses{from: mode - len(down), mass: make([]float64, 0, len(down)+1+len(up))}
	var sum float64
	for i := len(down) - 1; i >= 0; i-- {
		all.mass = append(all.mass, down[i])
		sum += down[i]
	}
	all.mass = append(append(all.mass, 1), up...)
	sum++
	for _, x := range up {
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
