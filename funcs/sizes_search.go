package funcs

import (
	"math"

	"halfwidth/funcs/internal/num"
)

// The search for the smallest n, of one group or of two.

// largestPlan is the largest n that is worth planning.
const largestPlan = 1_000_000_000

// smallestGroup is the smallest sample with a standard deviation of its own.
const smallestGroup = 2

// planSlack is the relative slack with which a criterion holds: far above
// rounding, far below the change that one more value makes.
const planSlack = 1e-12

func reaches(attained, wanted float64) bool { return attained >= wanted*(1-planSlack) }
func staysIn(attained, wanted float64) bool { return attained <= wanted*(1+planSlack) }

// clampPlan makes a guess, which may be infinite or no number at all, a place to
// start a search.
func clampPlan(x float64, lo, hi int) int {
	if !(x > float64(lo)) {
		return lo
	}
	return int(math.Min(float64(hi), x))
}

func withinWhole(x, whole float64) bool {
	return math.Abs(x-whole) <= math.Max(1e-9, 4e-16*math.Abs(x))
}

// ceilWhole and floorWhole round up and down, but take a value within 1e-9 of a
// whole number (or within rounding of it, where that is more) as that number:
// 0.1·3/0.1 is 3, not 4.
func ceilWhole(x float64) float64 {
	if r := math.Round(x); withinWhole(x, r) {
		return r
	}
	return math.Ceil(x)
}

func floorWhole(x float64) float64 {
	if r := math.Round(x); withinWhole(x, r) {
		return r
	}
	return math.Floor(x)
}

// watched is a criterion that looks at the call's context first; once the call is
// given up it holds without work, so that the search ends, and err says so.
func (c *Call) watched(err *error, holds func(n int) bool) func(n int) bool {
	return func(n int) bool {
		if *err == nil {
			*err = c.cancelled()
		}
		return *err != nil || holds(n)
	}
}

// watchedRoot is num.Root of an f that looks at the call's context first; once the
// call is given up, f seems to have found its root.
func (c *Call) watchedRoot(f func(float64) float64, lo, hi float64) (x float64, found bool, err error) {
	x, found = num.Root(func(x float64) float64 {
		if err == nil {
			err = c.cancelled()
		}
		if err != nil {
			return 0
		}
		return f(x)
	}, lo, hi)
	return x, found, err
}

// smallestPlan finds the smallest n from smallestGroup to hi from which every n' up
// to 2n holds, for a criterion that may hold by luck for a few values, then fails,
// and from some n on holds for good. The search starts at a guess. found is false
// where the criterion does not hold at hi.
func (c *Call) smallestPlan(hi int, guess float64, holds func(n int) bool) (n int, found bool, err error) {
	watched := c.watched(&err, holds)
	for n := smallestGroup; n <= min(2*smallestGroup, hi); n++ {
		if !watched(n) {
			n, found = num.Smallest(n+1, hi, clampPlan(guess, smallestGroup, hi), watched)
			return n, found, err
		}
	}
	return smallestGroup, smallestGroup <= hi, err
}

// planN finds n and gives it with what to plan for it, or refuses the input to
// blame, with what even the largest n attains.
func (c *Call) planN(input string, hi int, guess float64, holds func(n int) bool, attains func(n int) string) (int, error) {
	n, found, err := c.smallestPlan(hi, guess, holds)
	switch {
	case err != nil:
		return 0, err
	case !found:
		return 0, tooMany(input, attains(hi))
	}
	return n, c.setPlan(n)
}

// planGroups is planN for two groups.
func (c *Call) planGroups(input string, ratio, guess float64, holds func(n, second int) bool, attains func(n, second int) string) (n, second int, err error) {
	n, second, found, err := c.smallestGroups(ratio, guess, holds)
	switch {
	case err != nil:
		return 0, 0, err
	case !found:
		if n, second, err = largestGroups(ratio); err != nil {
			return 0, 0, err
		}
		return 0, 0, tooMany(input, attains(n, second))
	}
	return n, second, c.setGroups(n, second)
}

// secondSize is the size of the second group beside n in the first; one more
// than largestPlan stands for all that is larger.
func secondSize(n int, ratio float64) int {
	return int(math.Min(ceilWhole(float64(ratio*float64(n))), largestPlan+1))
}

// smallestGroups is smallestPlan for two groups. With a ratio below 1 the second
// group stays the same over blocks of n, and within a block more values in the
// first group may make things worse (they take degrees of freedom from a Welch
// interval that hangs on the second group). The worst of a block is then its
// last n, and the last n of the blocks improve steadily; so the block is found
// first, and n inside it.
func (c *Call) smallestGroups(ratio, start float64, holds func(n, second int) bool) (n, second int, found bool, err error) {
	largest := func(k int) int { // the largest n beside which the second group has k
		n, _ := num.Smallest(1, largestPlan+1, clampPlan(float64(k)/ratio, 1, largestPlan),
			func(n int) bool { return n > largestPlan || secondSize(n, ratio) > k })
		return n - 1
	}
	if ratio >= 1 {
		hi := largest(largestPlan)
		n, found, err = c.smallestPlan(hi, start, func(n int) bool { return holds(n, secondSize(n, ratio)) })
		return n, secondSize(n, ratio), found, err
	}
	k, found, err := c.smallestPlan(secondSize(largestPlan, ratio), ceilWhole(start*ratio),
		func(k int) bool { return holds(largest(k), k) })
	if !found || err != nil {
		return 0, 0, false, err
	}
	first := max(largest(k-1)+1, smallestGroup)
	n, found = num.Smallest(first, largest(k), first, c.watched(&err, func(n int) bool { return holds(n, k) }))
	return n, k, found, err
}

// tooMany refuses a plan that largestPlan does not reach.
func tooMany(input, attained string) error {
	return refuse("too-many", input, "Not even %d values would do (they attain %s); ask for less, or find a less variable measure.", largestPlan, attained)
}

// largestGroups are the sizes of two groups of which one has largestPlan values;
// refused where the other is then too small.
func largestGroups(ratio float64) (n, second int, err error) {
	n, second = largestPlan, largestPlan
	if ratio < 1 {
		second = secondSize(largestPlan, ratio)
	} else {
		n = int(largestPlan / ratio)
	}
	if n < smallestGroup || second < smallestGroup {
		err = refuse("too-many", "allocation-ratio", "With an allocation-ratio of %s one group has more than %d values before the other has %d; give a less extreme ratio.",
			brief(ratio), largestPlan, smallestGroup)
	}
	return n, second, err
}
