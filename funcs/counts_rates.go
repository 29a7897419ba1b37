package funcs

import (
	"fmt"
	"math"

	"halfwidth/funcs/internal/dist"
)

var (
	events   = count("count", "how many events were counted", 0)
	exposure = number("exposure", "how much time, distance or pieces they were counted over", positive, NoUnit).withDefault(1)

	rateReference  = number("reference", "the rate to compare with", positive, NoUnit).optional()
	ratioReference = number("reference", "the ratio to compare with", positive, NoUnit).withDefault(1)

	firstCount     = events.as("first-count", "events of the first group")
	firstExposure  = exposure.as("first-exposure", "exposure of the first group")
	secondCount    = events.as("second-count", "events of the second group")
	secondExposure = exposure.as("second-exposure", "exposure of the second group")
)

var rateInterval = &Function{
	Name:        "rate-interval",
	Version:     1,
	Summary:     "rate of events per unit of exposure with its exact confidence interval, and a test against a reference",
	Inputs:      inputs(events, exposure, rateReference, confidence, direction),
	Results:     shareResults("rate", "count over exposure"),
	Findings:    []FindingKind{},
	Assumptions: []string{"events independent of one another, at one rate (Poisson)"},
	Citations:   []string{"Garwood 1936"},
	Example: Example{
		Label:     "10 events at 95%",
		Arguments: []Argument{{"count", 10}},
		Want:      []Argument{{"lower", 4.795389}, {"upper", 18.390356}},
		Tolerance: 1e-6,
		Source:    "Garwood 1936, Fiducial limits for the Poisson distribution, table (count 10: 4.795 to 18.39); further digits by chi-square quantiles",
	},
	compute: func(c *Call) error {
		x, t := float64(events.Of(c)), exposure.Of(c)
		dir := direction.Of(c)
		l := limitsOf(confidence.Of(c), dir,
			func(q float64) float64 { lower, _ := garwood(x, q); return lower / t },
			func(q float64) float64 { _, upper := garwood(x, q); return upper / t })
		c.set("rate", x/t)
		c.setLimits(l)
		c.method = "exact Poisson interval (Garwood)"
		c.say(statement{"rate", x / t, l, NoUnit, fmt.Sprintf("%s in %s", plural(int(x), "event"), brief(t))})
		if ref, ok := rateReference.Given(c); ok {
			atMost, atLeast := poissonTails(x, float64(ref*t))
			c.setExactTest(ref, tailP(dir, atMost, atLeast))
		}
		return nil
	},
}

// poissonTails are P(X <= x) and P(X >= x) for a Poisson law.
func poissonTails(x, mean float64) (atMost, atLeast float64) {
	_, atMost = dist.GammaTails(x+1, mean)
	atLeast = 1
	if x > 0 {
		atLeast, _ = dist.GammaTails(x, mean)
	}
	return atMost, atLeast
}

var rateRatioInterval = &Function{
	Name:    "rate-ratio-interval",
	Version: 2,
	Summary: "ratio of two rates (first / second) with its exact conditional interval, and a test",
	Inputs:  inputs(firstCount, firstExposure, secondCount, secondExposure, ratioReference, confidence, direction),
	Results: []Result{
		{"ratio", Number, NoUnit, "first rate over second rate; absent where the second count is 0"},
		{"lower", Number, NoUnit, "lower limit; absent for direction below"},
		{"upper", Number, NoUnit, "upper limit; absent for direction above, and where the second count is 0"},
		resultP,
	},
	Findings: []FindingKind{{"no-events", "neither group has an event"},
		{"unbounded-above", "the second count is 0, so the ratio has no upper limit"}},
	Assumptions: []string{"events independent of one another, at one rate within each group (Poisson)"},
	Citations:   []string{"Przyborowski & Wilenski 1940 (test)", "Clopper & Pearson 1934"},
	Example: Example{
		Label:     "15 events in 1000 hours, 5 in 1000",
		Arguments: []Argument{{"first-count", 15}, {"first-exposure", 1000.0}, {"second-count", 5}, {"second-exposure", 1000.0}},
		Want:      []Argument{{"ratio", 3.0}, {"p-value", 0.04138946533203125}},
		Tolerance: 1e-13,
		Source:    "exact count: twice P(X >= 15), X binomial with n = 20 and chance ½, is 2·21700/2^20",
	},
	compute: func(c *Call) error {
		x1, t1 := float64(firstCount.Of(c)), firstExposure.Of(c)
		x2, t2 := float64(secondCount.Of(c)), secondExposure.Of(c)
		if x1+x2 == 0 {
			return refuse("no-events", "first-count", "Neither group has an event, so the rates cannot be compared; observe longer.")
		}
		// Given m = x1 + x2, x1 is binomial with chance θ; the ratio of rates is
		// θ/(1-θ)·t2/t1. The beta quantile gives θ and 1-θ apart.
		odds := func(lower, upper, a, b float64) float64 {
			theta, rest := dist.BetaQuantile(lower, upper, a, b)
			return theta / rest * (t2 / t1)
		}
		dir := direction.Of(c)
		l := limitsOf(confidence.Of(c), dir,
			func(q float64) float64 {
				if x1 == 0 {
					return 0
				}
				return odds(q, 1-q, x1, x2+1)
			},
			func(q float64) float64 {
				if x2 == 0 {
					return math.Inf(1)
				}
				return odds(1-q, q, x1+1, x2)
			})
		ref := ratioReference.Of(c)
		first := float64(ref * t1)
		chance, rest := 1/(1+t2/first), 1/(1+first/t2)
		c.method = "exact conditional interval of a ratio of Poisson rates"
		counts := fmt.Sprintf("%s and %s", plural(int(x1), "event"), plural(int(x2), "event"))
		if x2 > 0 {
			c.set("ratio", x1/t1/(x2/t2))
			c.setLimits(l)
			c.say(statement{"ratio of rates (first / second)", x1 / t1 / (x2 / t2), l, NoUnit, counts})
		} else {
			c.caution("unbounded-above", "second-count", "The second group has no event, so the ratio has no estimate and no upper limit; observe it longer.")
			if l.hasLower {
				c.set("lower", l.lower)
				c.sentence = fmt.Sprintf("The ratio of rates (first / second) is at least %s with %s confidence (%s direction, %s; %s).",
					brief(l.lower), percent(1-tail(confidence.Of(c), dir)), dir, counts, c.method)
			} else {
				c.sentence = fmt.Sprintf("The ratio of rates (first / second) has no upper limit (%s direction, %s; %s).", dir, counts, c.method)
			}
		}
		c.setExactTest(ref, binomialPValue(x1, x1+x2, chance, rest, dir))
		return nil
	},
}
