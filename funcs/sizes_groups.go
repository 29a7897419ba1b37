package funcs

import (
	"fmt"
	"slices"
)

var (
	groupDifference = trueDifference.as("difference", "the true difference first - second: the smallest that matters")

	differenceTestCitations = []string{"Welch 1947; Satterthwaite 1946", "ISO 2854 (pooled)", "Johnson & Welch 1940 (noncentral t)"}
)

const groupsApart = "a true difference (first - second) of %s"

// groupsTest reads what the tests of two means share.
func (c *Call) groupsTest() groupsTest {
	first, second := c.groupSDs()
	g := groupsTest{first, second, significance.Of(c), direction.Of(c), variances.Of(c) == pooled}
	kind := "Welch's t test, exact power by integration of the noncentral t"
	switch {
	case g.pooled && first == second:
		kind = "t test with the pooled variance, exact power from the noncentral t with n + second-n - 2 degrees of freedom"
	case g.pooled:
		kind = "t test with the pooled variance, exact power by integration of the noncentral t"
	}
	c.method = fmt.Sprintf("%s, sds %s and %s", kind, c.briefly(first), c.briefly(second))
	return g
}

var differenceTestSize = &Function{
	Name:        "difference-test-size",
	Version:     1,
	Summary:     "how many values in each of two groups a t test of the difference of their means needs",
	Inputs:      inputs(firstPlannedSD, secondPlannedSD, groupDifference, power, allocation, variances, significance, direction, designEffect, nonResponse, checks),
	Results:     []Result{resultPlanN, resultPlanSecond, resultPlanned, resultPlanned2, resultPower},
	Findings:    append(slices.Clip(testSizeFindings), spreadsKind),
	Assumptions: differencePrecisionSize.Assumptions,
	Citations:   differenceTestCitations,
	Example: Example{
		Label:     "a difference of 0.6 sd, power 80%, pooled variance",
		Arguments: []Argument{{"first-sd", 1.0}, {"difference", 0.6}, {"power", 0.8}, {"variances", pooled}},
		Want:      []Argument{{"n", 45}, {"second-n", 45}, {"attained-power", 0.8036969228605813412733663}},
		Tolerance: 1e-12,
		Source:    "arithmetic at 60 digits, testdata/references/numerics/sample_size_t.csv",
	},
	compute: func(c *Call) error {
		g, difference, wanted, ratio := c.groupsTest(), trueDifference.Of(c), power.Of(c), allocation.Of(c)
		if err := c.findable("difference", difference); err != nil {
			return err
		}
		if err := c.powerAbove(); err != nil {
			return err
		}
		a, b := g.first/difference, g.second/difference
		start := normalN(g.significance, wanted, g.direction)*(float64(a*a)+float64(b*b)/ratio) + 1
		n, m, err := c.planGroups("difference", ratio, start, func(n, m int) bool { return reaches(g.power(n, m, difference), wanted) },
			func(n, m int) string { return "power " + brief(g.power(n, m, difference)) })
		if err != nil {
			return err
		}
		c.setPower(bothN(n, m), c.away(groupsApart, difference), g.power(n, m, difference))
		return nil
	},
}

var differenceTestPower = &Function{
	Name:        "difference-test-power",
	Version:     1,
	Summary:     "the power that n values in each of two groups give a t test of the difference of their means",
	Inputs:      inputs(firstPlannedSD, secondPlannedSD, groupDifference, plannedN, plannedSecondN, variances, significance, direction, designEffect, nonResponse, checks),
	Results:     []Result{resultPower},
	Findings:    append(slices.Clip(testPowerFindings), spreadsKind),
	Assumptions: differencePrecisionSize.Assumptions,
	Citations:   differenceTestCitations,
	Example: Example{
		Label:     "15 and 7 values, 1.2 sd apart, pooled variance, significance 1%",
		Arguments: []Argument{{"first-sd", 1.0}, {"difference", 1.2}, {"n", 15}, {"second-n", 7}, {"variances", pooled}, {"significance", 0.01}},
		Want:      []Argument{{"attained-power", 0.4324192886969372287660521}},
		Tolerance: 1e-12,
		Source:    "arithmetic at 60 digits, testdata/references/numerics/t_power.csv",
	},
	compute: func(c *Call) error {
		g, difference := c.groupsTest(), trueDifference.Of(c)
		if err := c.findable("difference", difference); err != nil {
			return err
		}
		n, m, err := c.countingGroups()
		if err != nil {
			return err
		}
		c.setPowerOf(c.bothCounting(n, m), c.away(groupsApart, difference), g.power(n, m, difference))
		return nil
	},
}

var differenceTestDetectable = &Function{
	Name:        "difference-test-detectable",
	Version:     1,
	Summary:     "the smallest difference of two means that a t test of n values in each group finds",
	Inputs:      inputs(firstPlannedSD, secondPlannedSD, plannedN, plannedSecondN, power, variances, significance, direction, designEffect, nonResponse, checks),
	Results:     []Result{resultDetectable, resultFound},
	Findings:    append(slices.Clip(detectableFindings), spreadsKind),
	Assumptions: differencePrecisionSize.Assumptions,
	Citations:   differenceTestCitations,
	Example: Example{
		Label:     "26 and 78 values, sd 1.5, pooled variance, at the power that 1.6 has there",
		Arguments: []Argument{{"first-sd", 1.5}, {"n", 26}, {"second-n", 78}, {"power", 0.9021939963855463}, {"variances", pooled}, {"significance", 0.001}},
		Want:      []Argument{{"difference", 1.6}},
		Tolerance: 1e-12,
		Source:    "arithmetic at 60 digits, testdata/references/numerics/sample_size_t.csv",
	},
	compute: func(c *Call) error {
		g := c.groupsTest()
		if err := c.powerAbove(); err != nil {
			return err
		}
		n, m, err := c.countingGroups()
		if err != nil {
			return err
		}
		se, _ := differenceError(g.first, g.second, n, m, false)
		return c.setDetectable(c.bothCounting(n, m), groupsApart, se, func(d float64) float64 { return g.power(n, m, d) })
	},
}
