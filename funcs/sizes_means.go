package funcs

import (
	"fmt"
	"math"

	"halfwidth/funcs/internal/dist"
)

// oneSampleTest is the plan of a t test of a mean or of paired differences.
type oneSampleTest struct {
	sd, significance float64
	direction        string
}

func (p oneSampleTest) power(n int, difference float64) float64 {
	return tPower(float64(n-1), difference/p.sd*math.Sqrt(float64(n)), p.significance, p.direction)
}

// normalN is (z of the significance + z of the power)², the n that a normal law
// with sd and difference 1 would need, where the searches start.
func normalN(significance, power float64, dir string) float64 {
	z := dist.Normal{}.UpperQuantile(oneTail(significance, dir)) + dist.Normal{}.Quantile(power)
	return z * z
}

// size finds n for a power and gives its results.
func (p oneSampleTest) size(c *Call, phrase string) error {
	difference, wanted := trueDifference.Of(c), power.Of(c)
	if err := c.findable("difference", difference); err != nil {
		return err
	}
	if err := c.powerAbove(); err != nil {
		return err
	}
	effect := difference / p.sd
	n, err := c.planN("difference", largestPlan, normalN(p.significance, wanted, p.direction)/float64(effect*effect)+2,
		func(n int) bool { return reaches(p.power(n, difference), wanted) }, func(n int) string { return "power " + brief(p.power(n, difference)) })
	if err != nil {
		return err
	}
	c.setPower(nText(n), c.away(phrase, difference), p.power(n, difference))
	return nil
}

// away words a difference to be found, where the phrase leaves its place.
func (c *Call) away(phrase string, difference float64) string {
	return fmt.Sprintf(phrase, c.withUnit(FormatNumber(difference), SameUnit))
}

// setPower gives the power that a plan attains, and its sentence.
func (c *Call) setPower(counts, what string, attained float64) {
	c.set("attained-power", attained)
	c.sayPower(counts, what, attained)
}

// setPowerOf is setPower for a given n.
func (c *Call) setPowerOf(counts, what string, attained float64) {
	c.set("attained-power", attained)
	c.sayPowerOf(counts, what, attained)
}

// sayPower composes the sentence of a plan for power.
func (c *Call) sayPower(counts, what string, attained float64) {
	c.sentence = fmt.Sprintf("Measure %s, planned for power %s: %s will be found with probability %s at significance %s (%s).%s",
		counts, percent(power.Of(c)), what, brief(attained), c.testLevel(), c.method, c.toPlan())
}

// sayPowerOf composes the sentence of the power of a given n.
func (c *Call) sayPowerOf(counts, what string, attained float64) {
	c.sentence = fmt.Sprintf("With %s the power is %s: %s will be found with that probability at significance %s (%s).",
		counts, brief(attained), what, c.testLevel(), c.method)
}

// testLevel words the significance, and the direction where there is one.
func (c *Call) testLevel() string {
	text := percent(significance.Of(c))
	if c.has("direction") {
		text += ", " + c.inDirection()
	}
	return text
}

// powerOf gives the power of a given n.
func (p oneSampleTest) powerOf(c *Call, phrase string) error {
	difference := trueDifference.Of(c)
	if err := c.findable("difference", difference); err != nil {
		return err
	}
	n, err := c.counting("n", plannedN.Of(c))
	if err != nil {
		return err
	}
	c.setPowerOf(c.nCounting(n), c.away(phrase, difference), p.power(n, difference))
	return nil
}

// detectable gives the smallest difference that a given n finds with the power
// wanted.
func (p oneSampleTest) detectable(c *Call, phrase string) error {
	if err := c.powerAbove(); err != nil {
		return err
	}
	n, err := c.counting("n", plannedN.Of(c))
	if err != nil {
		return err
	}
	return c.setDetectable(c.nCounting(n), phrase, p.sd/math.Sqrt(float64(n)), func(d float64) float64 { return p.power(n, d) })
}

// setDetectable finds the smallest difference whose power is the one wanted, in
// steps of the standard error, and composes the sentence. The power rises with
// the difference in the direction claimed.
func (c *Call) setDetectable(counts, phrase string, se float64, powerAt func(difference float64) float64) error {
	wanted, unit := power.Of(c), se
	if se < 1e-300 {
		return refuse("too-large-to-hold", "sd", "The standard error, %s, is too small to count in; give the sd in a smaller unit.", brief(se))
	}
	if direction.Of(c) == below {
		unit = -se
	}
	short := func(x float64) float64 { return powerAt(x*unit) - wanted }
	hi := 1.0
	for short(hi) < 0 {
		if hi *= 2; math.IsInf(float64(hi*unit), 0) {
			return refuse("too-large-to-hold", "sd", "No difference that a double can hold is found with power %s; give the sd in a larger unit.", percent(wanted))
		}
		if err := c.cancelled(); err != nil {
			return err
		}
	}
	x, ok, err := c.watchedRoot(short, 0, hi)
	if err != nil {
		return err
	}
	if !ok {
		return fmt.Errorf("%w: no difference between 0 and %v standard errors has power %v", ErrInternal, hi, wanted)
	}
	difference, attained := x*unit, powerAt(x*unit)
	c.set("difference", difference)
	c.set("attained-power", attained)
	c.sentence = fmt.Sprintf("With %s the smallest difference found with power %s is %s: %s, at significance %s (%s).", counts, percent(wanted),
		c.withUnit(brief(difference), SameUnit), fmt.Sprintf(phrase, c.withUnit(brief(difference), SameUnit)), c.testLevel(), c.method)
	return nil
}

var (
	meanDifference = trueDifference.as("difference", "the true mean less the reference: the smallest difference that matters")
	pairDifference = trueDifference.as("difference", "the true mean of the differences less its reference: the smallest that matters")
	resultFound    = Result{"attained-power", Number, NoUnit, "the power with which the difference is found"}

	noncentralCitations = []string{"Johnson & Welch 1940 (noncentral t)"}
	testPowerFindings   = []FindingKind{noDifferenceKind, wrongSideKind, fewValuesKind, tooManyKind}
	detectableFindings  = []FindingKind{lowPowerKind, fewValuesKind, tooManyKind}
)

// meanTest reads the test of a mean.
func (c *Call) meanTest() oneSampleTest {
	p := oneSampleTest{expectedSD.Of(c), significance.Of(c), direction.Of(c)}
	c.method = "t test, exact power from the noncentral t with n - 1 degrees of freedom, sd " + c.briefly(p.sd)
	return p
}

const meanAway = "a true mean %s from the reference"

var meanTestSize = &Function{
	Name:        "mean-test-size",
	Version:     1,
	Summary:     "how many values a t test of a mean against a reference needs",
	Inputs:      inputs(expectedSD, meanDifference, power, significance, direction, designEffect, nonResponse),
	Results:     []Result{resultPlanN, resultPlanned, resultPower},
	Findings:    testSizeFindings,
	Assumptions: meanPrecisionSize.Assumptions,
	Citations:   noncentralCitations,
	Example: Example{
		Label:     "a mean 0.4 sd from the reference, power 90%",
		Arguments: []Argument{{"sd", 1.0}, {"difference", 0.4}, {"power", 0.9}},
		Want:      []Argument{{"n", 68}, {"attained-power", 0.9016280347584137417750629}},
		Tolerance: 1e-12,
		Source:    "arithmetic at 60 digits, testdata/references/numerics/sample_size_t.csv",
	},
	compute: func(c *Call) error { return c.meanTest().size(c, meanAway) },
}

var meanTestPower = &Function{
	Name:        "mean-test-power",
	Version:     1,
	Summary:     "the power that n values give a t test of a mean against a reference",
	Inputs:      inputs(expectedSD, meanDifference, plannedN, significance, direction, designEffect, nonResponse),
	Results:     []Result{resultPower},
	Findings:    testPowerFindings,
	Assumptions: meanTestSize.Assumptions,
	Citations:   noncentralCitations,
	Example: Example{
		Label:     "25 values, 0.6 sd from the reference, significance 1%",
		Arguments: []Argument{{"sd", 1.0}, {"difference", 0.6}, {"n", 25}, {"significance", 0.01}},
		Want:      []Argument{{"attained-power", 0.5857173904919468268715014}},
		Tolerance: 1e-12,
		Source:    "arithmetic at 60 digits, testdata/references/numerics/t_power.csv",
	},
	compute: func(c *Call) error { return c.meanTest().powerOf(c, meanAway) },
}

var meanTestDetectable = &Function{
	Name:        "mean-test-detectable",
	Version:     1,
	Summary:     "the smallest difference from a reference that a t test of n values finds",
	Inputs:      inputs(expectedSD, plannedN, power, significance, direction, designEffect, nonResponse),
	Results:     []Result{resultDetectable, resultFound},
	Findings:    detectableFindings,
	Assumptions: meanTestSize.Assumptions,
	Citations:   noncentralCitations,
	Example: Example{
		Label:     "15 values of sd 1, at the power that 0.8 sd has there",
		Arguments: []Argument{{"sd", 1.0}, {"n", 15}, {"power", 0.8213105387241096}},
		Want:      []Argument{{"difference", 0.8}},
		Tolerance: 1e-12,
		Source:    "arithmetic at 60 digits, testdata/references/numerics/sample_size_t.csv",
	},
	compute: func(c *Call) error { return c.meanTest().detectable(c, meanAway) },
}

var correlationGiven = number("correlation", "the correlation within pairs; with it, sd is that of the single values", Domain{Low: -1, High: 1, HighOpen: true}, NoUnit).optional()

var pairSD = expectedSD.as("sd", "the standard deviation expected of the differences; of the single values where correlation is given")

// pairedTest reads the test of paired differences.
func (c *Call) pairedTest() oneSampleTest {
	p := oneSampleTest{expectedSD.Of(c), significance.Of(c), direction.Of(c)}
	from := ""
	if r, ok := correlationGiven.Given(c); ok {
		p.sd *= math.Sqrt(2 * (1 - r))
		from = fmt.Sprintf(" (correlation %s)", brief(r))
	}
	c.method = fmt.Sprintf("paired t test, exact power from the noncentral t with n - 1 degrees of freedom, sd of differences %s%s", c.briefly(p.sd), from)
	return p
}

const pairsAway = "a true mean difference of %s within pairs"

var pairedTestSize = &Function{
	Name:        "paired-test-size",
	Version:     1,
	Summary:     "how many pairs a t test of the differences within pairs needs",
	Inputs:      inputs(pairSD, correlationGiven, pairDifference, power, significance, direction, designEffect, nonResponse),
	Results:     []Result{resultPlanN, resultPlanned, resultPower},
	Findings:    testSizeFindings,
	Assumptions: []string{"pairs independent of one another", "normal differences, or enough pairs for their skewness"},
	Citations:   noncentralCitations,
	Example: Example{
		Label:     "differences of sd 1.2, a mean difference of 0.25, significance 1%, power 95%",
		Arguments: []Argument{{"sd", 1.2}, {"difference", 0.25}, {"power", 0.95}, {"significance", 0.01}},
		Want:      []Argument{{"n", 414}, {"attained-power", 0.9501257556786467231226221}},
		Tolerance: 1e-12,
		Source:    "arithmetic at 60 digits, testdata/references/numerics/sample_size_t.csv",
	},
	compute: func(c *Call) error { return c.pairedTest().size(c, pairsAway) },
}

var pairedTestPower = &Function{
	Name:        "paired-test-power",
	Version:     1,
	Summary:     "the power that n pairs give a t test of the differences within pairs",
	Inputs:      inputs(pairSD, correlationGiven, pairDifference, plannedN.as("n", "how many pairs are to be measured"), significance, direction, designEffect, nonResponse),
	Results:     []Result{resultPower},
	Findings:    testPowerFindings,
	Assumptions: pairedTestSize.Assumptions,
	Citations:   noncentralCitations,
	Example: Example{
		Label:     "120 pairs, differences of sd 1.2, significance 0.1%",
		Arguments: []Argument{{"sd", 1.2}, {"difference", 0.3}, {"n", 120}, {"significance", 0.001}},
		Want:      []Argument{{"attained-power", 0.2696330255756486144857030}},
		Tolerance: 1e-12,
		Source:    "arithmetic at 60 digits, testdata/references/numerics/t_power.csv",
	},
	compute: func(c *Call) error { return c.pairedTest().powerOf(c, pairsAway) },
}

var pairedTestDetectable = &Function{
	Name:        "paired-test-detectable",
	Version:     1,
	Summary:     "the smallest mean difference within pairs that a t test of n pairs finds",
	Inputs:      inputs(pairSD, correlationGiven, plannedN.as("n", "how many pairs are to be measured"), power, significance, direction, designEffect, nonResponse),
	Results:     []Result{resultDetectable, resultFound},
	Findings:    detectableFindings,
	Assumptions: pairedTestSize.Assumptions,
	Citations:   noncentralCitations,
	Example: Example{
		Label:     "18 pairs, sd of single values 1.8 and correlation 0.5, at the power that 1.2 has there",
		Arguments: []Argument{{"sd", 1.8}, {"correlation", 0.5}, {"n", 18}, {"power", 0.8573050782442606}, {"significance", 0.1}},
		Want:      []Argument{{"difference", 1.2}},
		Tolerance: 1e-12,
		Source:    "arithmetic at 60 digits, testdata/references/numerics/sample_size_t.csv",
	},
	compute: func(c *Call) error { return c.pairedTest().detectable(c, pairsAway) },
}
