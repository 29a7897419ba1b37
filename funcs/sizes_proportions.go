package funcs

import (
	"fmt"
	"math"
	"slices"

	"halfwidth/funcs/internal/dist"
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

// normalShares is the n of a normal law for a difference of proportions whose
// estimate has the standard deviation null/√n without a difference and
// other/√n with it; the search starts there.
func normalShares(difference, null, other, significance, power float64, dir string) float64 {
	z := float64(dist.Normal{}.UpperQuantile(oneTail(significance, dir))*null) + float64(dist.Normal{}.Quantile(power)*other)
	return z / difference * z / difference
}

// sharesSize finds n for a test of proportions and the power that it attains, and
// gives first-n.
func (c *Call) sharesSize(t sharesTest, difference, null, other float64) (n int, attained float64, err error) {
	wanted := power.Of(c)
	plan, err := c.planShares(t, wanted, normalShares(difference, null, other, significance.Of(c), wanted, direction.Of(c)))
	switch {
	case err != nil:
		return 0, 0, err
	case !plan.found:
		return 0, 0, tooMany(c.firstGiven("proportion", "first-proportion"), "power "+brief(t.power(t.largest(), 0)))
	}
	if plan.excess > 0 {
		c.inform("plan-is-a-bound", "", "So large an n is not looked for one by one: this n holds, and so does every larger one, but the smallest may be up to %d less.", plan.excess)
	} else {
		c.set("first-n", plan.first)
	}
	return plan.n, t.power(plan.n, 0), nil
}

// shareSD is the standard deviation of one trial.
func shareSD(p float64) float64 { return math.Sqrt(p * (1 - p)) }

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
	return fmt.Sprintf("a true proportion of %s against %s", FormatNumber(t.share), FormatNumber(t.reference))
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
	Example: Example{
		Label:     "a share of 20% told from 10%, one-sided, power 90%",
		Arguments: []Argument{{"proportion", 0.2}, {"reference", 0.1}, {"direction", above}},
		Want:      []Argument{{"n", 121}, {"first-n", 109}, {"attained-power", 0.9055608470449149236345159}},
		Tolerance: 1e-12,
		Source:    "arithmetic at 34 digits, testdata/references/plans/plans.csv",
	},
	compute: func(c *Call) error {
		t, err := c.shareTest()
		if err != nil {
			return err
		}
		if err := c.powerAbove(); err != nil {
			return err
		}
		n, attained, err := c.sharesSize(t, t.share-t.reference, shareSD(t.reference), shareSD(t.share))
		if err != nil {
			return err
		}
		if err := c.setPlan(n); err != nil {
			return err
		}
		c.setPower(nText(n), t.says(), attained)
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
	Example: Example{
		Label:     "102 trials to tell a share of 20% from 10%, one-sided",
		Arguments: []Argument{{"proportion", 0.2}, {"reference", 0.1}, {"n", 102}, {"direction", above}},
		Want:      []Argument{{"attained-power", 0.8901379902525623226767299}},
		Tolerance: 1e-12,
		Source:    "arithmetic at 34 digits, testdata/references/plans/plans.csv",
	},
	compute: func(c *Call) error {
		t, err := c.shareTest()
		if err != nil {
			return err
		}
		n, err := c.counting("n", plannedN.Of(c))
		if err != nil {
			return err
		}
		c.setPowerOf(c.nCounting(n), t.says(), t.power(n, 0))
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
	return fmt.Sprintf("a difference between true proportions of %s and %s", FormatNumber(t.first), FormatNumber(t.second))
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
	Example: Example{
		Label:     "shares of 20% and 60%, half as many in the second group, one-sided, power 80%",
		Arguments: []Argument{{"first-proportion", 0.2}, {"second-proportion", 0.6}, {"power", 0.8}, {"direction", below}, {"allocation-ratio", 0.5}},
		Want:      []Argument{{"n", 25}, {"second-n", 13}, {"first-n", 25}, {"attained-power", 0.8152638076041376191163120}},
		Tolerance: 1e-12,
		Source:    "arithmetic at 25 digits, testdata/references/plans/plans.csv",
	},
	compute: func(c *Call) error {
		t, err := c.sharesPairTest()
		if err != nil {
			return err
		}
		if err := c.powerAbove(); err != nil {
			return err
		}
		if _, _, err := largestGroups(t.ratio); err != nil {
			return err
		}
		pooled := (t.first + float64(t.second*t.ratio)) / (1 + t.ratio)
		other := math.Sqrt(float64(t.first*(1-t.first)) + float64(t.second*(1-t.second))/t.ratio)
		n, attained, err := c.sharesSize(t, t.first-t.second, shareSD(pooled)*math.Sqrt(1+1/t.ratio), other)
		if err != nil {
			return err
		}
		if err := c.setGroups(n, t.size(n)); err != nil {
			return err
		}
		c.setPower(bothN(n, t.size(n)), t.says(), attained)
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
	Example: Example{
		Label:     "shares of 40% and 60%, 50 and 40 trials",
		Arguments: []Argument{{"first-proportion", 0.4}, {"second-proportion", 0.6}, {"n", 50}, {"second-n", 40}},
		Want:      []Argument{{"attained-power", 0.4799363487754083262597452}},
		Tolerance: 1e-12,
		Source:    "arithmetic at 25 digits, testdata/references/plans/plans.csv",
	},
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
		c.setPowerOf(c.bothCounting(n, m), t.says(), t.power(n, 0))
		return nil
	},
}
