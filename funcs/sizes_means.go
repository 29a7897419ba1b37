package funcs

import (
	"fmt"

	"halfwidth/funcs/internal/dist"
)

// oneSampleTest is the plan of a t test of a mean or of paired differences.
type oneSampleTest struct {
	sd, significance float64
	direction        string
}

func (p oneSampleTest) power(n int, difference float64) float64 {
	return oneSamplePower(n, p.sd, difference, p.significance, p.direction)
}

// normalPower is (z of the significance + z of the power)², the n that a normal
// law with sd and difference 1 would need, where the searches start.
func normalPower(significance, power float64, dir string) float64 {
	if dir == either {
		significance /= 2
	}
	z := dist.Normal{}.UpperQuantile(significance) + dist.Normal{}.Quantile(power)
	return z * z
}

// size finds n for a power and gives its results.
func (p oneSampleTest) size(c *Call, of string) error {
	difference, wanted := trueDifference.Of(c), power.Of(c)
	if err := c.findable("difference", difference); err != nil {
		return err
	}
	if err := c.powerAbove(); err != nil {
		return err
	}
	effect := difference / p.sd
	start := clampPlan(normalPower(p.significance, wanted, p.direction)/float64(effect*effect)+2, smallestGroup, largestPlan)
	n, found, err := c.smallestPlan(smallestGroup, largestPlan, start, func(n int) bool { return reaches(p.power(n, difference), wanted) })
	switch {
	case err != nil:
		return err
	case !found:
		return tooMany("difference", "power "+brief(p.power(largestPlan, difference)))
	}
	if err := c.setPlan(n); err != nil {
		return err
	}
	c.set("attained-power", p.power(n, difference))
	c.sayPower(nText(n), of, difference, wanted, p.power(n, difference))
	return nil
}

// sayPower composes the sentence of a plan for power.
func (c *Call) sayPower(counts, of string, difference, wanted, attained float64) {
	c.sentence = fmt.Sprintf("Measure %s, planned for power %s: %s of %s will be found with probability %s at significance %s, direction %s (%s).%s",
		counts, percent(wanted), of, c.withUnit(shortest(difference), SameUnit), brief(attained), percent(significance.Of(c)), direction.Of(c), c.method, c.toPlan())
}

var meanTestSize = &Function{
	Name:        "mean-test-size",
	Version:     1,
	Summary:     "how many values a t test of a mean against a reference needs",
	Inputs:      inputs(expectedSD, trueDifference.as("difference", "the true mean less the reference: the smallest difference that matters"), power, significance, direction, designEffect, nonResponse),
	Results:     []Result{resultPlanN, resultPlanned, resultPower},
	Findings:    testSizeFindings,
	Assumptions: []string{"independent values of one population", "normal values, or n large enough for their skewness"},
	Citations:   []string{"Johnson & Welch 1940 (noncentral t)", "Guenther 1981 (start of the search)"},
	Example: Example{
		Label:     "a mean 0.4 sd from the reference, power 90%",
		Arguments: []Argument{{"sd", 1.0}, {"difference", 0.4}, {"power", 0.9}},
		Want:      []Argument{{"n", 68}, {"attained-power", 0.9016280347584137417750629}},
		Tolerance: 1e-12,
		Source:    "arithmetic at 60 digits, testdata/references/numerics/sample_size_t.csv",
	},
	compute: func(c *Call) error {
		p := oneSampleTest{expectedSD.Of(c), significance.Of(c), direction.Of(c)}
		c.method = "t test, exact power from the noncentral t with n - 1 degrees of freedom, sd " + c.briefly(p.sd)
		return p.size(c, "a true mean at a distance from the reference")
	},
}

// groupsTest reads what the tests of two means share.
func (c *Call) groupsTest() groupsTest {
	first, second := c.groupSDs()
	g := groupsTest{first, second, significance.Of(c), direction.Of(c), variances.Of(c) == pooled}
	kind := "Welch's t test, exact power by integration of the noncentral t"
	if g.pooled {
		kind = "t test with the pooled variance, exact power from the noncentral t with n + second-n - 2 degrees of freedom"
	}
	c.method = fmt.Sprintf("%s, sds %s and %s", kind, c.briefly(first), c.briefly(second))
	return g
}

var differenceTestSize = &Function{
	Name:        "difference-test-size",
	Version:     1,
	Summary:     "how many values in each of two groups a t test of the difference of their means needs",
	Inputs:      inputs(firstPlannedSD, secondPlannedSD, trueDifference.as("difference", "the true difference first - second: the smallest that matters"), power, allocation, variances, significance, direction, designEffect, nonResponse, checks),
	Results:     []Result{resultPlanN, resultPlanSecond, resultPlanned, resultPlanned2, resultPower},
	Findings:    append(testSizeFindings[:len(testSizeFindings):len(testSizeFindings)], spreadsKind),
	Assumptions: []string{"independent values, and groups independent of one another", "normal values, or n large enough for their skewness"},
	Citations:   []string{"Welch 1947; Satterthwaite 1946", "ISO 2854 (pooled)", "Johnson & Welch 1940 (noncentral t)"},
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
		start := normalPower(g.significance, wanted, g.direction)*(float64(a*a)+float64(b*b)/ratio) + 1
		n, m, found, err := c.smallestGroups(ratio, start, func(n, m int) bool { return reaches(g.power(n, m, difference), wanted) })
		switch {
		case err != nil:
			return err
		case !found:
			return c.groupsTooMany("difference", ratio, func(n, m int) string { return "power " + brief(g.power(n, m, difference)) })
		}
		if err := c.setGroups(n, m); err != nil {
			return err
		}
		attained := g.power(n, m, difference)
		c.set("attained-power", attained)
		c.sayPower(bothN(n, m), "a true difference (first - second)", difference, wanted, attained)
		return nil
	},
}
