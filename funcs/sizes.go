package funcs

import "fmt"

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
