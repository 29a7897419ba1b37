package funcs

import (
	"fmt"
	"math"
	"slices"

	"halfwidth/funcs/internal/dist"
)

// The designs of an equivalence test.
const (
	twoSamples = "two-samples"
	oneSample  = "one-sample"
	paired     = "paired"
)

var (
	equivalenceDesign = choice("design", "two-samples: two groups with one variance; one-sample: a mean against a reference; paired: differences within pairs, of which sd is the sd",
		twoSamples, oneSample, paired)
	equivalenceGap = trueDifference.as("difference", "the true difference expected: first - second, or from the reference").withDefault(0)

	outsideMarginsKind = FindingKind{"outside-margins", "the difference expected does not lie between the margins"}
)

// equivalencePlan is a pair of one-sided t tests, each at the significance.
type equivalencePlan struct {
	sd, difference, lower, upper, significance float64
	design                                     string
}

func (c *Call) equivalencePlan() (equivalencePlan, error) {
	lower, upper, err := c.margins(0)
	if err != nil {
		return equivalencePlan{}, err
	}
	p := equivalencePlan{expectedSD.Of(c), equivalenceGap.Of(c), lower, upper, significance.Of(c), equivalenceDesign.Of(c)}
	c.method = fmt.Sprintf("two one-sided t tests (%s), exact power, sd %s", p.design, c.briefly(p.sd))
	if !(lower < p.difference && p.difference < upper) {
		return p, refuse("outside-margins", "difference", "A true difference of %s does not lie between the margins %s and %s, so it must not be found equivalent; give one between them.",
			FormatNumber(p.difference), FormatNumber(lower), FormatNumber(upper))
	}
	return p, nil
}

// power is the chance that both tests reject (Owen 1965; Phillips 1990): n values,
// and m in a second group where there is one.
func (p equivalencePlan) power(n, m int) float64 {
	df, se := float64(n-1), p.sd/math.Sqrt(float64(n))
	if p.design == twoSamples {
		df, se = float64(n-1)+float64(m-1), p.sd*math.Sqrt(1/float64(n)+1/float64(m))
	}
	return dist.EquivalencePower(df, (p.difference-p.lower)/se, (p.upper-p.difference)/se, p.significance)
}

func (p equivalencePlan) says(c *Call) string {
	return fmt.Sprintf("equivalence within %s and %s at a true difference of %s", FormatNumber(p.lower), c.withUnit(FormatNumber(p.upper), SameUnit), FormatNumber(p.difference))
}

var equivalenceInputs = inputs(expectedSD.as("sd", "the standard deviation expected within each group; of the differences for design paired"),
	equivalenceGap, margin, lowerMargin, upperMargin)

var equivalenceSize = &Function{
	Name:    "equivalence-size",
	Version: 1,
	Summary: "how many values two one-sided t tests need to show that means differ by less than a margin",
	Inputs: append(slices.Clip(equivalenceInputs), inputs(power, allocation, equivalenceDesign, halfSignificance,
		designEffect, nonResponse)...),
	OneOf:       []OneOf{marginWays},
	Results:     []Result{resultPlanN, resultPlanSecond, resultPlanned, resultPlanned2, resultPower},
	Findings:    []FindingKind{outsideMarginsKind, lowPowerKind, tooManyKind},
	Assumptions: []string{"independent normal values with one variance", "margins chosen before the data were seen"},
	Citations:   []string{"Schuirmann 1987", "Owen 1965", "Phillips 1990"},
	Example: Example{
		Label:     "no difference expected, margins of 0.6 sd, power 80%",
		Arguments: []Argument{{"sd", 1.0}, {"margin", 0.6}, {"power", 0.8}},
		Want:      []Argument{{"n", 49}, {"second-n", 49}},
		Tolerance: 1e-12,
		Source:    "arithmetic at 60 digits, testdata/references/numerics/equivalence.csv",
	},
	compute: func(c *Call) error {
		p, err := c.equivalencePlan()
		if err != nil {
			return err
		}
		if err := c.powerAbove(); err != nil {
			return err
		}
		wanted, ratio := power.Of(c), allocation.Of(c)
		holds := func(n, m int) bool { return reaches(p.power(n, m), wanted) }
		attains := func(n, m int) string { return "power " + brief(p.power(n, m)) }
		input := c.firstGiven("margin", "upper-margin")
		// The nearer margin decides; where both are as near, each may miss half.
		beta := 1 - wanted
		if p.difference-p.lower == p.upper-p.difference {
			beta /= 2
		}
		effect := math.Min(p.difference-p.lower, p.upper-p.difference) / p.sd
		start := normalN(p.significance, 1-beta, above)/float64(effect*effect) + 1
		if p.design != twoSamples {
			if ratio != 1 {
				return c.wrong("allocation-ratio", FormatNumber(ratio), "belongs to design two-samples", "leave it out for design "+p.design)
			}
			n, err := c.planN(input, largestPlan, start, func(n int) bool { return holds(n, 0) }, func(n int) string { return attains(n, 0) })
			if err != nil {
				return err
			}
			c.setPower(nText(n), p.says(c), p.power(n, 0))
			return nil
		}
		n, m, err := c.planGroups(input, ratio, start*(1+1/ratio), holds, attains)
		if err != nil {
			return err
		}
		c.setPower(bothN(n, m), p.says(c), p.power(n, m))
		return nil
	},
}

var equivalencePowerOf = &Function{
	Name:        "equivalence-power",
	Version:     1,
	Summary:     "the power that n values give two one-sided t tests to show that means differ by less than a margin",
	Inputs:      append(slices.Clip(equivalenceInputs), inputs(plannedN, plannedSecondN, equivalenceDesign, halfSignificance, designEffect, nonResponse)...),
	OneOf:       []OneOf{marginWays},
	Results:     []Result{resultPower},
	Findings:    []FindingKind{outsideMarginsKind, fewValuesKind, tooManyKind},
	Assumptions: equivalenceSize.Assumptions,
	Citations:   equivalenceSize.Citations,
	Example: Example{
		Label:     "26 values in each group, sd 0.8, margins of 0.65, a true difference of 0.1",
		Arguments: []Argument{{"sd", 0.8}, {"difference", 0.1}, {"margin", 0.65}, {"n", 26}},
		Want:      []Argument{{"attained-power", 0.7425983688030077262121626}},
		Tolerance: 1e-12,
		Source:    "arithmetic at 60 digits, testdata/references/numerics/equivalence.csv",
	},
	compute: func(c *Call) error {
		p, err := c.equivalencePlan()
		if err != nil {
			return err
		}
		if p.design != twoSamples {
			if m, ok := plannedSecondN.Given(c); ok {
				return c.wrong("second-n", fmt.Sprint(m), "belongs to design two-samples", "leave it out for design "+p.design)
			}
			n, err := c.counting("n", plannedN.Of(c))
			if err != nil {
				return err
			}
			c.setPowerOf(c.nCounting(n), p.says(c), p.power(n, 0))
			return nil
		}
		n, m, err := c.countingGroups()
		if err != nil {
			return err
		}
		c.setPowerOf(c.bothCounting(n, m), p.says(c), p.power(n, m))
		return nil
	},
}
