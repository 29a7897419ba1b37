package funcs

import (
	"fmt"
	"math"

	"halfwidth/funcs/internal/dist"
	"halfwidth/funcs/internal/num"
)

var (
	relativeHalfWidth = number("relative-half-width", "the half-width wanted of the sd's interval, over the sd", positive, NoUnit)
	varianceRatio     = number("variance-ratio", "the true variance over the reference: the nearest to 1 that must be found", positive, NoUnit)
	resultAttained    = Result{"attained", Number, NoUnit, "the relative half-width, or with variance-ratio the power, that n attains"}

	noRatioKind = FindingKind{"no-difference", "the variance-ratio is 1"}
)

// relativeSpread is the half-width of the interval of an sd over the sd, at an
// sd found as expected: the limits are sd·√(df/χ²) (ISO 2854).
func relativeSpread(n int, outside float64, dir string) float64 {
	df := float64(n - 1)
	law := dist.ChiSquare{DF: df}
	var down, up float64
	if dir != below {
		down = 1 - math.Sqrt(df/law.UpperQuantile(outside))
	}
	if dir != above {
		up = math.Sqrt(df/law.Quantile(outside)) - 1
	}
	if dir == either {
		return (down + up) / 2
	}
	return down + up
}

// variancePower is the power of the chi-square test of a variance that is ratio
// times the reference; for either, equal-tailed.
func variancePower(n int, ratio, significance float64, dir string) float64 {
	law := dist.ChiSquare{DF: float64(n - 1)}
	each := oneTail(significance, dir)
	var total float64
	if dir != below {
		total += law.SF(law.UpperQuantile(each) / ratio)
	}
	if dir != above {
		total += law.CDF(law.Quantile(each) / ratio)
	}
	return math.Min(1, total)
}

// variancePlan says which of the two a call plans for, and checks it.
func (c *Call) variancePlan() (ratio float64, test bool, err error) {
	ratio, test = varianceRatio.Given(c)
	if !test {
		c.set("level", confidence.Of(c))
		c.method = "interval of the sd from chi-square with n - 1 degrees of freedom"
		return 0, false, c.oneSidedLevel()
	}
	c.set("level", significance.Of(c))
	c.method = "chi-square test of a variance, exact power"
	if direction.Of(c) == either {
		c.method = "equal-tailed " + c.method
	}
	return ratio, true, c.findable("variance-ratio", ratio-1)
}

func ratioAway(ratio float64) string {
	return fmt.Sprintf("a true variance of %s times the reference", FormatNumber(ratio))
}

var varianceSize = &Function{
	Name:    "variance-size",
	Version: 1,
	Summary: "how many values give a standard deviation to within a relative half-width, or a test of a variance its power",
	Inputs: inputs(relativeHalfWidth, varianceRatio, power, confidence, significance, direction,
		designEffect, nonResponse),
	OneOf:       []OneOf{{{Needs: []string{"relative-half-width"}}, {Needs: []string{"variance-ratio"}}}},
	Results:     []Result{resultPlanN, resultPlanned, resultAttained},
	Findings:    []FindingKind{tooManyKind, lowLevelKind, noRatioKind, wrongSideKind, lowPowerKind},
	Assumptions: []string{"independent normal values of one population"},
	Citations:   []string{"ISO 2854"},
	Example: Example{
		Label:     "a variance 1.55 times the reference, one-sided, power 99%",
		Arguments: []Argument{{"variance-ratio", 1.55}, {"power", 0.99}, {"direction", above}},
		Want:      []Argument{{"n", 171}},
		Tolerance: 1e-12,
		Source: "design of NIST/SEMATECH e-Handbook of Statistical Methods, 7.2.3.2, which stops at 170 where the power is 0.9899; " +
			"recomputed in testdata/references/published/examples.csv",
	},
	compute: func(c *Call) error {
		ratio, test, err := c.variancePlan()
		if err != nil {
			return err
		}
		wanted := relativeHalfWidth.Of(c)
		attained := func(n int) float64 {
			return relativeSpread(n, tail(confidence.Of(c), direction.Of(c)), direction.Of(c))
		}
		holds := func(n int) bool { return staysIn(attained(n), wanted) }
		start := normalN(tail(confidence.Of(c), direction.Of(c)), 0.5, above) / float64(2*wanted*wanted)
		input := "relative-half-width"
		if test {
			if err := c.powerAbove(); err != nil {
				return err
			}
			attained = func(n int) float64 { return variancePower(n, ratio, significance.Of(c), direction.Of(c)) }
			holds = func(n int) bool { return reaches(attained(n), power.Of(c)) }
			effect := num.Log(ratio)
			start, input = 2*normalN(significance.Of(c), power.Of(c), direction.Of(c))/float64(effect*effect), "variance-ratio"
		}
		n, err := c.planN(input, largestPlan, start+2, holds, func(n int) string { return brief(attained(n)) })
		if err != nil {
			return err
		}
		c.set("attained", attained(n))
		if test {
			c.sayPower(nText(n), ratioAway(ratio), attained(n))
		} else {
			c.sayPrecision(nText(n), "the sd", FormatNumber(wanted)+" times the sd", c.sized(attained(n))+" times the sd")
		}
		return nil
	},
}

var variancePowerOf = &Function{
	Name:    "variance-power",
	Version: 1,
	Summary: "how precisely n values will give a standard deviation, or the power they give a test of a variance",
	Inputs: inputs(plannedN, varianceRatio.as("variance-ratio", "the true variance over the reference; without it the relative half-width of the sd is given").optional(),
		confidence, significance, direction, designEffect, nonResponse),
	Results:     []Result{resultAttained},
	Findings:    []FindingKind{fewValuesKind, tooManyKind, lowLevelKind, noRatioKind, wrongSideKind},
	Assumptions: varianceSize.Assumptions,
	Citations:   varianceSize.Citations,
	Example: Example{
		Label:     "15 values, a variance 0.4 of the reference, one-sided at 10%",
		Arguments: []Argument{{"n", 15}, {"variance-ratio", 0.4}, {"significance", 0.1}, {"direction", below}},
		Want:      []Argument{{"attained", 0.8523780593622461285244240}},
		Tolerance: 1e-12,
		Source:    "arithmetic at 34 digits, testdata/references/plans/plans.csv",
	},
	compute: func(c *Call) error {
		ratio, test, err := c.variancePlan()
		if err != nil {
			return err
		}
		n, err := c.counting("n", plannedN.Of(c))
		if err != nil {
			return err
		}
		if test {
			attained := variancePower(n, ratio, significance.Of(c), direction.Of(c))
			c.set("attained", attained)
			c.sayPowerOf(c.nCounting(n), ratioAway(ratio), attained)
			return nil
		}
		attained := relativeSpread(n, tail(confidence.Of(c), direction.Of(c)), direction.Of(c))
		c.set("attained", attained)
		c.sayPrecisionOf(c.nCounting(n), "the sd", c.sized(attained)+" times the sd")
		return nil
	},
}
