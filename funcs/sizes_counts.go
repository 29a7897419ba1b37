package funcs

import (
	"fmt"
	"math"

	"halfwidth/funcs/internal/dist"
	"halfwidth/funcs/internal/num"
)

var (
	expectedShare  = number("proportion", "the share expected, from 0 to 1; 0.5 needs the most", fromZeroToOne, NoUnit).withDefault(0.5)
	shareHalfWidth = number("half-width", "the half-width wanted", positive, NoUnit)
	resultShareHW  = Result{"attained-half-width", Number, NoUnit, "the half-width that n attains"}

	exactFiniteKind = FindingKind{"kind-without-population", "clopper-pearson is planned without population-size"}
)

// sharePrecision is the half-width of an interval of a proportion that is still
// to be counted, with limits at n·share unrounded.
type sharePrecision struct {
	share, outside, population float64
	kind, direction            string
}

func (c *Call) sharePrecision() (sharePrecision, error) {
	p := sharePrecision{expectedShare.Of(c), tail(confidence.Of(c), direction.Of(c)), c.plannedPopulation(), shareKind.Of(c), direction.Of(c)}
	c.method = p.kind + " interval at a share of " + brief(p.share)
	if !math.IsInf(p.population, 1) {
		if p.kind == exactShare {
			return p, refuse("kind-without-population", "kind", "The exact interval of a finite population has no half-width at a fraction of a count; use kind wilson.")
		}
		c.method += ofPopulation(p.population)
	}
	return p, c.oneSidedLevel()
}

// halfWidth takes n(N-1)/(N-n) for n in a population of N, at which the variance
// of a share is that of drawing without replacement.
func (p sharePrecision) halfWidth(n int) float64 {
	m := float64(n)
	var down, up float64
	if p.kind == exactShare {
		x := m * p.share
		lower, upper := clopperPearson(x, m, p.outside)
		down, up = p.share-lower, upper-p.share
	} else {
		if !math.IsInf(p.population, 1) {
			m *= (p.population - 1) / (p.population - m) // infinite for the whole population
		}
		down, up = wilsonDistances(p.share, m, dist.Normal{}.UpperQuantile(p.outside))
	}
	switch p.direction {
	case above:
		return down
	case below:
		return up
	}
	return (down + up) / 2
}

var shareAssumptions = []string{"independent trials with one chance of success"}

var proportionPrecisionSize = &Function{
	Name:    "proportion-precision-size",
	Version: 1,
	Summary: "how many trials give a proportion to within a half-width",
	Inputs: inputs(expectedShare, shareHalfWidth, planPopulation, shareKind, confidence, direction,
		designEffect, nonResponse),
	Results:     []Result{resultPlanN, resultPlanned, resultShareHW},
	Findings:    append([]FindingKind{exactFiniteKind, populationKind}, precisionFindings...),
	Assumptions: shareAssumptions,
	Citations:   []string{"Wilson 1927", "Clopper & Pearson 1934", "Cochran 1977 (finite population)"},
	Example: Example{
		Label:     "a share near 10% to within 3 points",
		Arguments: []Argument{{"proportion", 0.1}, {"half-width", 0.03}},
		Want:      []Argument{{"n", 388}, {"attained-half-width", 0.02996167789189669168960748}},
		Tolerance: 1e-12,
		Source:    "arithmetic at 34 digits, testdata/references/plans/plans.csv",
	},
	compute: func(c *Call) error {
		p, err := c.sharePrecision()
		if err != nil {
			return err
		}
		wanted := shareHalfWidth.Of(c)
		z := dist.Normal{}.UpperQuantile(p.outside) / wanted
		n, err := c.planN("half-width", c.largestN(), float64(z*z)*p.share*(1-p.share),
			func(n int) bool { return staysIn(p.halfWidth(n), wanted) }, func(n int) string { return brief(p.halfWidth(n)) })
		if err != nil {
			return err
		}
		c.setPrecision(nText(n), "the proportion", FormatNumber(wanted), p.halfWidth(n))
		return nil
	},
}

var proportionPrecisionOf = &Function{
	Name:        "proportion-precision",
	Version:     1,
	Summary:     "how precisely n trials will give a proportion",
	Inputs:      inputs(expectedShare, plannedN, planPopulation, shareKind, confidence, direction, designEffect, nonResponse),
	Results:     []Result{resultShareHW},
	Findings:    append([]FindingKind{exactFiniteKind, fewValuesKind}, precisionFindings...),
	Assumptions: shareAssumptions,
	Citations:   proportionPrecisionSize.Citations,
	Example: Example{
		Label:     "381 trials of a share near one half",
		Arguments: []Argument{{"proportion", 0.5}, {"n", 381}},
		Want:      []Argument{{"attained-half-width", 0.04995479363498200299099005}},
		Tolerance: 1e-12,
		Source:    "arithmetic at 34 digits, testdata/references/plans/plans.csv",
	},
	compute: func(c *Call) error {
		p, err := c.sharePrecision()
		if err != nil {
			return err
		}
		n, err := c.countingOfPopulation()
		if err != nil {
			return err
		}
		c.setPrecisionOf(c.nCounting(n), "the proportion", p.halfWidth(n))
		return nil
	},
}

var (
	expectedRate  = number("rate", "the rate expected: counts for one unit of exposure", positive, NoUnit)
	exposureGiven = number("exposure", "the exposure that is to be observed", positive, NoUnit)

	anyExposureKind = FindingKind{"any-exposure-does", "direction above: the half-width wanted is no less than the rate, which no lower limit exceeds"}
)

// ratePrecision is the half-width of a Garwood interval of a rate over the rate,
// as a function of the count expected, unrounded.
type ratePrecision struct {
	outside   float64
	direction string
}

func (c *Call) ratePrecision() (ratePrecision, error) {
	c.method = "Garwood interval at the count expected, rate " + brief(expectedRate.Of(c))
	return ratePrecision{tail(confidence.Of(c), direction.Of(c)), direction.Of(c)}, c.oneSidedLevel()
}

func (p ratePrecision) relative(count float64) float64 {
	lower, upper := garwood(count, p.outside)
	switch p.direction {
	case above:
		return (count - lower) / count
	case below:
		return (upper - count) / count
	}
	return (upper - lower) / 2 / count
}

var ratePrecisionSize = &Function{
	Name:    "rate-precision-size",
	Version: 1,
	Summary: "how much exposure gives a rate to within a half-width",
	Inputs:  inputs(expectedRate, shareHalfWidth, confidence, direction, designEffect, nonResponse),
	Results: []Result{
		{"exposure", Number, NoUnit, "how much exposure is needed"},
		{"exposure-planned", Number, NoUnit, "how much exposure to plan for, with the design effect and what will be lost"},
		{"attained-half-width", Number, NoUnit, "the half-width that the exposure attains"},
	},
	Findings:    append([]FindingKind{anyExposureKind}, precisionFindings...),
	Assumptions: []string{"counts that follow a Poisson law: independent events at one rate"},
	Citations:   []string{"Garwood 1936"},
	Example: Example{
		Label:     "2 damaged parcels a day, to within 0.5 a day",
		Arguments: []Argument{{"rate", 2.0}, {"half-width", 0.5}},
		Want:      []Argument{{"exposure", 32.85290940443479422583933}},
		Tolerance: 1e-12,
		Source:    "arithmetic at 34 digits, testdata/references/plans/plans.csv",
	},
	compute: func(c *Call) error {
		p, err := c.ratePrecision()
		if err != nil {
			return err
		}
		rate, wanted := expectedRate.Of(c), shareHalfWidth.Of(c)
		if p.direction == above && wanted >= rate {
			return refuse("any-exposure-does", "half-width", "A lower limit is never farther than the whole rate below it, so any exposure meets this half-width; give one below %s.", brief(rate))
		}
		if p.relative(largestPlan) > wanted/rate {
			return refuse("too-many", "half-width", "Not even the exposure for %d counts would do (it attains %s); ask for less.", largestPlan, brief(rate*p.relative(largestPlan)))
		}
		logCount, ok, err := c.watchedRoot(func(y float64) float64 { return p.relative(num.Exp(y)) - wanted/rate }, -650, num.Log(largestPlan))
		if err != nil {
			return err
		}
		if !ok {
			return refuse("any-exposure-does", "half-width", "Any exposure worth observing meets this half-width; give a smaller one.")
		}
		count := num.Exp(logCount)
		exposure := count / rate
		planned := exposure * designEffect.Of(c) / (1 - nonResponse.Of(c))
		c.set("exposure", exposure)
		c.set("exposure-planned", planned)
		c.setPrecision("an exposure of "+brief(exposure), "the rate", FormatNumber(wanted), rate*p.relative(count))
		if lost := c.losses(); lost != "" {
			c.sentence += fmt.Sprintf(" Plan %s, for %s.", brief(planned), lost)
		}
		return nil
	},
}

var ratePrecisionOf = &Function{
	Name:        "rate-precision",
	Version:     1,
	Summary:     "how precisely an exposure will give a rate",
	Inputs:      inputs(expectedRate, exposureGiven, confidence, direction, designEffect, nonResponse),
	Results:     []Result{{"attained-half-width", Number, NoUnit, "the half-width that the exposure attains"}},
	Findings:    []FindingKind{lowLevelKind},
	Assumptions: ratePrecisionSize.Assumptions,
	Citations:   ratePrecisionSize.Citations,
	Example: Example{
		Label:     "2 damaged parcels a day, over 10 days",
		Arguments: []Argument{{"rate", 2.0}, {"exposure", 10.0}},
		Want:      []Argument{{"attained-half-width", 0.9335929158635325645693500}},
		Tolerance: 1e-12,
		Source:    "arithmetic at 34 digits, testdata/references/plans/plans.csv",
	},
	compute: func(c *Call) error {
		p, err := c.ratePrecision()
		if err != nil {
			return err
		}
		if err := c.cancelled(); err != nil {
			return err
		}
		exposure := exposureGiven.Of(c) * (1 - nonResponse.Of(c)) / designEffect.Of(c)
		attained := expectedRate.Of(c) * p.relative(expectedRate.Of(c)*exposure)
		counts := "an exposure of " + brief(exposure)
		if lost := c.losses(); lost != "" {
			counts += fmt.Sprintf(" (of %s planned, %s)", brief(exposureGiven.Of(c)), lost)
		}
		c.setPrecisionOf(counts, "the rate", attained)
		return nil
	},
}
