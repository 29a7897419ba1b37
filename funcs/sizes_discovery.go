package funcs

import (
	"fmt"

	"halfwidth/funcs/internal/dist"
	"halfwidth/funcs/internal/num"
)

var (
	tolerableRate     = level("tolerable-deviation-rate", "the share of deviating items that must not go unnoticed")
	allowedDeviations = count("allowed-deviations", "how many deviations may be found without objection", 0).withDefault(0)
	discoveryLevel    = confidence.as("confidence", "the confidence of finding more than the allowed deviations, where the share is the tolerable one")

	neverKind = FindingKind{"never-discovered", "the tolerable number of deviations is no more than the allowed one"}
)

// discovery is a sample that is to show more than the allowed deviations where
// the share of them is the tolerable one: D = ceil(rate·N) in a population of N.
type discovery struct {
	rate                float64
	allowed             int
	population, deviant int // 0 without a population
}

func (c *Call) discovery() (discovery, error) {
	d := discovery{rate: tolerableRate.Of(c), allowed: allowedDeviations.Of(c)}
	c.method = fmt.Sprintf("binomial, at most %s", plural(d.allowed, "deviation"))
	size, ok := populationSize.Given(c)
	if !ok {
		return d, nil
	}
	d.population, d.deviant = size, int(ceilWhole(d.rate*float64(size)))
	c.method = fmt.Sprintf("hypergeometric, %d deviating of %d, at most %s", d.deviant, size, plural(d.allowed, "deviation"))
	if d.deviant <= d.allowed {
		return d, refuse("never-discovered", "allowed-deviations", "%s of %d are %d, no more than the %d allowed: not even all of them would show it. Allow fewer, or give a larger rate.",
			percent(d.rate), size, d.deviant, d.allowed)
	}
	return d, nil
}

// confidence is the chance of more than the allowed deviations among n.
func (d discovery) confidence(n int) float64 {
	if d.population == 0 {
		return binomialAtLeast(float64(d.allowed)+1, float64(n), d.rate)
	}
	return dist.Hypergeometric{Population: d.population, Marked: d.deviant, Draws: n}.SF(d.allowed)
}

var discoverySize = &Function{
	Name:        "discovery-size",
	Version:     1,
	Summary:     "how many items to look at, to notice a share of deviations",
	Inputs:      inputs(planPopulation, tolerableRate, allowedDeviations, discoveryLevel, designEffect, nonResponse),
	Results:     []Result{resultPlanN, resultPlanned, resultConfidence},
	Findings:    []FindingKind{tooManyKind, neverKind, populationKind},
	Assumptions: []string{"a simple random sample of the items"},
	Citations:   []string{"hypergeometric and binomial law (ISO 3534-1)"},
	Example: Example{
		Label:     "5% of invoices, one deviation allowed, confidence 95%",
		Arguments: []Argument{{"tolerable-deviation-rate", 0.05}, {"allowed-deviations", 1}},
		Want:      []Argument{{"n", 93}},
		Tolerance: 1e-12,
		Source:    "AICPA, Audit Sampling guide, Table A-1; testdata/references/published/examples.csv",
	},
	compute: func(c *Call) error {
		d, err := c.discovery()
		if err != nil {
			return err
		}
		wanted := confidence.Of(c)
		n, err := c.planN("tolerable-deviation-rate", c.largestN(), (float64(d.allowed)-num.Log(1-wanted))/d.rate,
			func(n int) bool { return reaches(d.confidence(n), wanted) }, func(n int) string { return "confidence " + percent(d.confidence(n)) })
		if err != nil {
			return err
		}
		c.set("attained-confidence", d.confidence(n))
		c.sentence = fmt.Sprintf("Look at %s, planned for a confidence of %s: where %s deviate, more than the allowed %d will be found with confidence %s (%s).%s",
			nText(n), percent(wanted), percent(d.rate), d.allowed, brief(d.confidence(n)), c.method, c.toPlan())
		return nil
	},
}

var discoveryConfidence = &Function{
	Name:        "discovery-confidence",
	Version:     1,
	Summary:     "the confidence with which n items show a share of deviations",
	Inputs:      inputs(plannedN, planPopulation, tolerableRate, allowedDeviations, designEffect, nonResponse),
	Results:     []Result{resultConfidence},
	Findings:    []FindingKind{fewValuesKind, tooManyKind, neverKind},
	Assumptions: discoverySize.Assumptions,
	Citations:   discoverySize.Citations,
	Example: Example{
		Label:     "102 invoices of 1000, 5% deviating, two allowed",
		Arguments: []Argument{{"n", 102}, {"population-size", 1000}, {"tolerable-deviation-rate", 0.05}, {"allowed-deviations", 2}},
		Want:      []Argument{{"attained-confidence", 0.9022163307382261152331804}},
		Tolerance: 1e-12,
		Source:    "arithmetic at 34 digits, testdata/references/plans/plans.csv",
	},
	compute: func(c *Call) error {
		d, err := c.discovery()
		if err != nil {
			return err
		}
		n, err := c.countingOfPopulation()
		if err != nil {
			return err
		}
		attained := d.confidence(n)
		c.set("attained-confidence", attained)
		c.sentence = fmt.Sprintf("With %s, where %s deviate, more than the allowed %d will be found with confidence %s (%s).",
			c.nCounting(n), percent(d.rate), d.allowed, brief(attained), c.method)
		return nil
	},
}
