package funcs

import (
	"fmt"
	"math"
	"strconv"

	"halfwidth/funcs/internal/num"
)

// The plans of this family all do the same: they give the smallest n for which
// an exact criterion holds, looked at for n itself and for n - 1. A size and the
// function that goes the other way share the code of the criterion.

var sizesFamily = []*Function{
	meanPrecisionSize, meanPrecisionOf,
	differencePrecisionSize, differencePrecisionOf,
	proportionPrecisionSize, proportionPrecisionOf,
	ratePrecisionSize, ratePrecisionOf,
	meanTestSize, meanTestPower, meanTestDetectable,
	pairedTestSize, pairedTestPower, pairedTestDetectable,
	differenceTestSize, differenceTestPower, differenceTestDetectable,
	equivalenceSize, equivalencePowerOf,
	proportionTestSize, proportionTestPower,
	proportionDifferenceSize, proportionDifferencePower,
	severalMeansSize, severalMeansPower,
	varianceSize, variancePowerOf,
	stratifiedSize,
	discoverySize, discoveryConfidence,
	distributionFreeToleranceSize,
	enoughNForMean,
}

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

// Inputs that the plans share.
var (
	expectedSD      = number("sd", "the standard deviation expected", positive, SameUnit)
	firstPlannedSD  = number("first-sd", "the standard deviation expected in the first group", positive, SameUnit)
	secondPlannedSD = number("second-sd", "the standard deviation expected in the second group; that of the first where left out", positive, SameUnit).optional()
	trueDifference  = number("difference", "the true difference that is to be found: first - second, or from the reference", anyNumber, SameUnit)
	planPopulation  = populationSize.within(wholeFrom(smallestGroup))
	plannedN        = count("n", "how many are to be measured", smallestGroup)
	plannedSecondN  = count("second-n", "how many are to be measured in the second group; as many as in the first where left out", smallestGroup).optional()
)

// Results that the plans share.
var (
	resultPlanN      = Result{"n", Whole, NoUnit, "how many values are needed"}
	resultPlanSecond = Result{"second-n", Whole, NoUnit, "how many values are needed in the second group"}
	resultPlanned    = Result{"n-planned", Whole, NoUnit, "how many to plan for, with the design effect and what will be lost"}
	resultPlanned2   = Result{"second-n-planned", Whole, NoUnit, "how many to plan for in the second group"}
	resultHalfWidth  = Result{"attained-half-width", Number, SameUnit, "the half-width that n attains"}
	resultPower      = Result{"attained-power", Number, NoUnit, "the power that n attains"}
	resultDetectable = Result{"difference", Number, SameUnit, "the smallest difference that is found with the power wanted"}
)

// The findings of plans.
var (
	tooManyKind      = FindingKind{"too-many", "not even a billion values would be enough"}
	noDifferenceKind = FindingKind{"no-difference", "the difference to be found is the reference itself"}
	wrongSideKind    = FindingKind{"against-direction", "the difference lies on the other side than the direction claims"}
	lowPowerKind     = FindingKind{"power-not-above-significance", "the power wanted is no more than the significance"}
	populationKind   = FindingKind{"losses-exceed-population", "after the losses even the whole population leaves fewer than n"}
	lowLevelKind     = FindingKind{"level-too-low", "one limit at a confidence of 50% or less has no half-width"}
)

var (
	precisionFindings = []FindingKind{tooManyKind, lowLevelKind}
	testSizeFindings  = []FindingKind{tooManyKind, noDifferenceKind, wrongSideKind, lowPowerKind}
)

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

// smallestPlan finds the smallest n in [lo, hi] from which every n' up to 2n
// holds, for a criterion that may hold by luck for a few values, then fails, and
// from some n on holds for good. found is false where it does not hold at hi.
func (c *Call) smallestPlan(lo, hi, start int, holds func(n int) bool) (n int, found bool, err error) {
	watched := c.watched(&err, holds)
	for n := lo; n <= min(2*lo, hi); n++ {
		if !watched(n) {
			n, found = num.Smallest(n+1, hi, start, watched)
			return n, found, err
		}
	}
	return lo, lo <= hi, err
}

// planN finds n and gives it with what to plan for it, or refuses the input to
// blame, with what even the largest n attains.
func (c *Call) planN(input string, hi int, guess float64, holds func(n int) bool, attains func(n int) string) (int, error) {
	n, found, err := c.smallestPlan(smallestGroup, hi, clampPlan(guess, smallestGroup, hi), holds)
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
		return 0, 0, c.groupsTooMany(input, ratio, attains)
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
		n, found, err = c.smallestPlan(smallestGroup, hi, clampPlan(start, smallestGroup, hi), func(n int) bool { return holds(n, secondSize(n, ratio)) })
		return n, secondSize(n, ratio), found, err
	}
	k, found, err := c.smallestPlan(smallestGroup, secondSize(largestPlan, ratio), clampPlan(ceilWhole(start*ratio), smallestGroup, largestPlan),
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

// groupsTooMany is tooMany for two groups.
func (c *Call) groupsTooMany(input string, ratio float64, attained func(n, second int) string) error {
	n, second := largestPlan, largestPlan
	if ratio < 1 {
		second = secondSize(largestPlan, ratio)
	} else {
		n = int(largestPlan / ratio)
	}
	if n < smallestGroup || second < smallestGroup {
		return refuse("too-many", "allocation-ratio", "With an allocation-ratio of %s one group has more than %d values before the other has %d; give a less extreme ratio.",
			brief(ratio), largestPlan, smallestGroup)
	}
	return tooMany(input, attained(n, second))
}

// planned is the number to plan for n that count: times the design effect, over
// the share that is not lost, and never more than there are.
func (c *Call) planned(n int) (int, error) {
	effect, lost := designEffect.Of(c), nonResponse.Of(c)
	x := ceilWhole(float64(float64(n)*effect) / (1 - lost))
	if size, ok := populationSize.Given(c); ok && x > float64(size) {
		if left := floorWhole(float64(size) * (1 - lost)); left < float64(n) && lost > 0 {
			c.caution("losses-exceed-population", "non-response", "Even if all %d are approached, only about %.0f are left, fewer than the n = %d needed; find ways to lose fewer.",
				size, left, n)
		}
		return size, nil
	}
	if x > largestPlan {
		return 0, refuse("too-many", "design-effect", "With a design effect of %s and %s lost, n = %d becomes more than %d; look for another design.",
			brief(effect), percent(lost), n, largestPlan)
	}
	return max(int(x), 1), nil
}

// counting is how many of n that were planned count: what planned undoes.
func (c *Call) counting(input string, n int) (int, error) {
	if err := c.cancelled(); err != nil {
		return 0, err
	}
	effect, lost := designEffect.Of(c), nonResponse.Of(c)
	x := floorWhole(float64(float64(n)*(1-lost)) / effect)
	if x > largestPlan {
		return 0, refuse("too-many", input, "This is more than %d values; give at most that many.", largestPlan)
	}
	if x < smallestGroup {
		return 0, refuse("few-values", input, "Of n = %d planned only %s count after the design effect and the losses, but at least %d are needed; plan more.",
			n, strconv.FormatFloat(x, 'f', 0, 64), smallestGroup)
	}
	return int(x), nil
}

// countingOf is counting for n of a population, which may be infinite. All of a
// population count whatever the design, but for losses.
func (c *Call) countingOf(population float64) (int, error) {
	n := plannedN.Of(c)
	if float64(n) > population {
		return 0, c.wrong("n", fmt.Sprint(n), fmt.Sprintf("is more than the population-size (%.0f)", population), "give at most that many")
	}
	if float64(n) == population && nonResponse.Of(c) == 0 {
		return n, c.cancelled()
	}
	return c.counting("n", n)
}

// setPlan gives n and what to plan for it.
func (c *Call) setPlan(n int) error {
	planned, err := c.planned(n)
	if err != nil {
		return err
	}
	c.set("n", n)
	c.set("n-planned", planned)
	return nil
}

// setGroups gives both groups' n and what to plan for them.
func (c *Call) setGroups(n, second int) error {
	planned, err := c.planned(second)
	if err != nil {
		return err
	}
	c.set("second-n", second)
	c.set("second-n-planned", planned)
	return c.setPlan(n)
}

// losses words the design effect and the losses; "" where there are none.
func (c *Call) losses() string {
	effect, lost := designEffect.Of(c), nonResponse.Of(c)
	if effect == 1 && lost == 0 {
		return ""
	}
	return fmt.Sprintf("design effect %s and %s lost", brief(effect), percent(lost))
}

// toPlan words the numbers to plan where they are not n itself.
func (c *Call) toPlan() string {
	lost := c.losses()
	if lost == "" {
		return ""
	}
	counts := fmt.Sprint(c.results["n-planned"])
	if second, ok := c.results["second-n-planned"]; ok {
		counts += fmt.Sprintf(" and %d", second)
	}
	return fmt.Sprintf(" Plan %s, for %s.", counts, lost)
}

// nCounting words n, and how many were planned where only a part of them counts.
func (c *Call) nCounting(n int) string {
	if lost := c.losses(); lost != "" {
		return fmt.Sprintf("%s (of %d planned, %s)", nText(n), plannedN.Of(c), lost)
	}
	return nText(n)
}

// secondPlanned is the size planned for the second group: that of the first
// where it was left out.
func (c *Call) secondPlanned() int {
	if m, ok := plannedSecondN.Given(c); ok {
		return m
	}
	return plannedN.Of(c)
}

// countingGroups is counting for two groups.
func (c *Call) countingGroups() (n, second int, err error) {
	if n, err = c.counting("n", plannedN.Of(c)); err != nil {
		return 0, 0, err
	}
	second, err = c.counting("second-n", c.secondPlanned())
	return n, second, err
}

// bothCounting is nCounting for two groups.
func (c *Call) bothCounting(n, second int) string {
	if lost := c.losses(); lost != "" {
		return fmt.Sprintf("%s (of %d and %d planned, %s)", bothN(n, second), plannedN.Of(c), c.secondPlanned(), lost)
	}
	return bothN(n, second)
}

// sized words a half-width: two significant digits.
func (c *Call) sized(x float64) string { return c.withUnit(toPlace(x, lastPlace(x, x)), SameUnit) }

// bothN words the sizes of two groups.
func bothN(n, second int) string { return fmt.Sprintf("n = %d and %d", n, second) }

// inDirection words the direction.
func (c *Call) inDirection() string {
	if dir := direction.Of(c); dir != either {
		return "direction " + dir
	}
	return "either direction"
}

// oneSidedLevel refuses a single limit that lies on the wrong side.
func (c *Call) oneSidedLevel() error {
	if conf := confidence.Of(c); direction.Of(c) != either && conf <= 0.5 {
		return refuse("level-too-low", "confidence", "One limit at a confidence of %s lies on the wrong side of the estimate; give more than 50%%.", percent(conf))
	}
	return nil
}

// findable refuses a difference (from 0) that no test of this direction is meant
// to find.
func (c *Call) findable(input string, difference float64) error {
	dir := direction.Of(c)
	switch {
	case difference == 0:
		return refuse("no-difference", input, "The %s leaves nothing to find: no n separates a value from itself. Give the smallest difference that matters.", input)
	case dir == above && difference < 0, dir == below && difference > 0:
		return refuse("against-direction", input, "The direction %s claims a difference on the other side of the reference; turn the direction or the sign round.", dir)
	}
	return nil
}

// powerAbove refuses a power that a test has without any difference.
func (c *Call) powerAbove() error {
	if wanted, alpha := power.Of(c), significance.Of(c); wanted <= alpha {
		return refuse("power-not-above-significance", "power", "A power of %s is not above the significance of %s, which a test attains without any difference; "+
			"give a larger power.", percent(wanted), percent(alpha))
	}
	return nil
}
