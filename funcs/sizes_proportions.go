package funcs

import (
	"fmt"
	"math"
	"slices"
)

var (
	trueShare      = number("proportion", "the true share: the nearest to the reference that must be found", fromZeroToOne, NoUnit)
	referenceShare = number("reference", "the share to compare with", betweenZeroAndOne, NoUnit)
	firstShare     = number("first-proportion", "the true share in the first group", fromZeroToOne, NoUnit)
	secondShare    = number("second-proportion", "the true share in the second group", fromZeroToOne, NoUnit)

	resultFirstN = Result{"first-n", Whole, NoUnit, "the first n that holds, though some larger n up to 2n may not"}

	planIsBoundKind = FindingKind{"plan-is-a-bound", "n holds, and so does every larger n, but a smaller one may hold too"}
	bigAlphaKind    = FindingKind{"significance-too-high", "a one-sided significance of 50% or more"}
)

// sharesSize finds n for a test of proportions and gives its results; effect is
// the difference in standard deviations.
func (c *Call) sharesSize(t sharesTest, effect float64) (n int, err error) {
	wanted := power.Of(c)
	plan, err := c.planShares(t, wanted, normalPower(significance.Of(c), wanted, direction.Of(c))/float64(effect*effect))
	switch {
	case err != nil:
		return 0, err
	case !plan.found:
		return 0, tooMany(c.firstGiven("proportion", "first-proportion"), "power "+brief(t.power(t.largest(), 0)))
	}
	if plan.excess > 0 {
		c.inform("plan-is-a-bound", "", "So large an n is not looked for one by one: this n holds, and so does every larger one, but the smallest may be up to %d less.", plan.excess)
	} else {
		c.set("first-n", plan.first)
	}
	c.set("attained-power", t.power(plan.n, 0))
	return plan.n, nil
}

// sharesSignificance refuses a region of rejection that holds more than half of
// the possible results.
func (c *Call) sharesSignificance() error {
	if alpha := significance.Of(c); direction.Of(c) != either && alpha >= 0.5 {
		return refuse("significance-too-high", "significance", "A one-sided test at %s rejects more often than not; give less than 50%%.", percent(alpha))
	}
	return nil
}

// shareTest reads the test of one proportion.
func (c *Call) shareTest() (shareTest, error) {
	t := shareTest{trueShare.Of(c), referenceShare.Of(c), significance.Of(c), direction.Of(c)}
	c.method = "exact binomial test, exact binomial power"
	if err := c.sharesSignificance(); err != nil {
		return t, err
	}
	return t, c.findable("proportion", t.share-t.reference)
}

func (t shareTest) says() string {
	return fmt.Sprintf("a true proportion of %s against %s", shortest(t.share), shortest(t.reference))
}

var shareTestFindings = []FindingKind{noDifferenceKind, wrongSideKind, bigAlphaKind}

var proportionTestSize = &Function{
	Name:        "proportion-test-size",
	Version:     1,
	Summary:     "how many trials an exact test of a proportion against a reference needs",
	Inputs:      inputs(trueShare, referenceShare, power, significance, direction, designEffect, nonResponse),
	Results:     []Result{resultPlanN, resultFirstN, resultPlanned, resultPower},
	Findings:    append(slices.Clip(shareTestFindings), lowPowerKind, tooManyKind, planIsBoundKind),
	Assumptions: shareAssumptions,
	Citations:   []string{"Clopper & Pearson 1934 (test)"},
	compute: func(c *Call) error {
		t, err := c.shareTest()
		if err != nil {
			return err
		}
		if err := c.powerAbove(); err != nil {
			return err
		}
		n, err := c.sharesSize(t, (t.share-t.reference)/math.Sqrt(t.reference*(1-t.reference)))
		if err != nil {
			return err
		}
		if err := c.setPlan(n); err != nil {
			return err
		}
		c.sayPower(nText(n), t.says(), t.power(n, 0))
		return nil
	},
}

var proportionTestPower = &Function{
	Name:        "proportion-test-power",
	Version:     1,
	Summary:     "the power that n trials give an exact test of a proportion against a reference",
	Inputs:      inputs(trueShare, referenceShare, plannedN, significance, direction, designEffect, nonResponse),
	Results:     []Result{resultPower},
	Findings:    append(slices.Clip(shareTestFindings), fewValuesKind, tooManyKind),
	Assumptions: shareAssumptions,
	Citations:   proportionTestSize.Citations,
	compute: func(c *Call) error {
		t, err := c.shareTest()
		if err != nil {
			return err
		}
		n, err := c.counting("n", plannedN.Of(c))
		if err != nil {
			return err
		}
		attained := t.power(n, 0)
		c.set("attained-power", attained)
		c.sayPowerOf(c.nCounting(n), t.says(), attained)
		return nil
	},
}

// sharesPairTest reads the test of two proportions.
func (c *Call) sharesPairTest() (sharesPairTest, error) {
	t := sharesPairTest{first: firstShare.Of(c), second: secondShare.Of(c), significance: significance.Of(c), direction: direction.Of(c), ratio: allocation.Of(c)}
	c.method = "score test with the pooled share, no continuity correction, exact binomial power"
	if err := c.sharesSignificance(); err != nil {
		return t, err
	}
	return t, c.findable("first-proportion", t.first-t.second)
}

func (t sharesPairTest) says() string {
	return fmt.Sprintf("true proportions of %s and %s", shortest(t.first), shortest(t.second))
}

var pairAssumptions = []string{"independent trials with one chance of success in each group", "groups independent of one another"}

var proportionDifferenceSize = &Function{
	Name:        "proportion-difference-size",
	Version:     1,
	Summary:     "how many trials in each of two groups a test of the difference of two proportions needs",
	Inputs:      inputs(firstShare, secondShare, power, allocation, significance, direction, designEffect, nonResponse),
	Results:     []Result{resultPlanN, resultPlanSecond, resultFirstN, resultPlanned, resultPlanned2, resultPower},
	Findings:    append(slices.Clip(shareTestFindings), lowPowerKind, tooManyKind, planIsBoundKind),
	Assumptions: pairAssumptions,
	Citations:   []string{"Newcombe 1998 (interval beside the test)", "Pearson 1900 (score test)"},
	compute: func(c *Call) error {
		t, err := c.sharesPairTest()
		if err != nil {
			return err
		}
		if err := c.powerAbove(); err != nil {
			return err
		}
		if t.largest() < smallestGroup || t.size(t.largest()) < smallestGroup {
			return c.groupsTooMany("first-proportion", t.ratio, nil)
		}
		spread := math.Sqrt(float64(t.first*(1-t.first)) + float64(t.second*(1-t.second))/t.ratio)
		if spread == 0 { // 0 against 1: a handful is enough
			spread = 1
		}
		n, err := c.sharesSize(t, (t.first-t.second)/spread)
		if err != nil {
			return err
		}
		if err := c.setGroups(n, t.size(n)); err != nil {
			return err
		}
		c.sayPower(bothN(n, t.size(n)), t.says(), t.power(n, 0))
		return nil
	},
}

var proportionDifferencePower = &Function{
	Name:        "proportion-difference-power",
	Version:     1,
	Summary:     "the power that n trials in each of two groups give a test of the difference of two proportions",
	Inputs:      inputs(firstShare, secondShare, plannedN, plannedSecondN, significance, direction, designEffect, nonResponse),
	Results:     []Result{resultPower},
	Findings:    append(slices.Clip(shareTestFindings), fewValuesKind, tooManyKind),
	Assumptions: pairAssumptions,
	Citations:   proportionDifferenceSize.Citations,
	compute: func(c *Call) error {
		t, err := c.sharesPairTest()
		if err != nil {
			return err
		}
		n, m, err := c.countingGroups()
		if err != nil {
			return err
		}
		t.secondN = m
		attained := t.power(n, 0)
		c.set("attained-power", attained)
		c.sayPowerOf(c.bothCounting(n, m), t.says(), attained)
		return nil
	},
}
