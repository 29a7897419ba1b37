package funcs

import (
	"fmt"
	"math"

	"halfwidth/funcs/internal/dist"
	"halfwidth/funcs/internal/num"
)

// The plans that ask for no half-width and no power: values that are to hold a
// share of a population between them, or to make an interval keep its promise.

var (
	content          = level("content", "the share of the population that must lie between the limits").withDefault(0.95)
	resultConfidence = Result{"attained-confidence", Number, NoUnit, "the confidence that n attains"}
)

// orderConfidence is the chance that the smallest and the largest of n values
// hold the content between them, 1 - n·cⁿ⁻¹ + (n-1)cⁿ, or that one of the two
// leaves it on its side, 1 - cⁿ (Wilks 1941).
func orderConfidence(n int, content float64, dir string) float64 {
	if dir == either {
		return dist.Beta{A: 2, B: float64(n - 1)}.CDF(1 - content)
	}
	return -num.Expm1(float64(n) * num.Log(content))
}

var distributionFreeToleranceSize = &Function{
	Name:    "distribution-free-tolerance-size",
	Version: 1,
	Summary: "how many values hold a share of the population between the smallest and the largest of them",
	Inputs: inputs(content, confidence.as("confidence", "the confidence that they do"), direction.as("direction",
		"either: smallest and largest; above: the smallest is a lower limit; below: the largest is an upper limit"), designEffect, nonResponse),
	Results:     []Result{resultPlanN, resultPlanned, resultConfidence},
	Findings:    []FindingKind{tooManyKind},
	Assumptions: []string{"independent values of one continuous population"},
	Citations:   []string{"Wilks 1941"},
	Example: Example{
		Label:     "99% of the population, confidence 95%",
		Arguments: []Argument{{"content", 0.99}},
		Want:      []Argument{{"n", 473}},
		Tolerance: 1e-12,
		Source:    "NIST/SEMATECH e-Handbook of Statistical Methods, 7.2.6.4",
	},
	compute: func(c *Call) error {
		share, wanted, dir := content.Of(c), confidence.Of(c), direction.Of(c)
		attained := func(n int) float64 { return orderConfidence(n, share, dir) }
		n, err := c.planN("content", largestPlan, num.Log(1-wanted)/num.Log(share),
			func(n int) bool { return reaches(attained(n), wanted) }, func(n int) string { return "confidence " + percent(attained(n)) })
		if err != nil {
			return err
		}
		c.set("attained-confidence", attained(n))
		limits := map[string]string{either: "smallest and largest value", above: "smallest value as lower limit", below: "largest value as upper limit"}
		c.method = "distribution-free, " + limits[dir]
		c.sentence = fmt.Sprintf("Measure %s, planned for a confidence of %s: with confidence %s they hold %s of the population (%s; %s).%s",
			nText(n), percent(wanted), brief(attained(n)), percent(share), c.inDirection(), c.method, c.toPlan())
		return nil
	},
}

var (
	skewnessGiven    = number("skewness", "the skewness (G1), where it stands for the sample", anyNumber, NoUnit)
	kurtosisGiven    = number("excess-kurtosis", "the excess kurtosis (G2), where it stands for the sample", atLeast(-2), NoUnit)
	allowedShortfall = level("allowed-shortfall", "how far the coverage may fall short of the confidence").withDefault(0.01)
)

// predictedCoverage is the chance that the t interval of a mean of n values holds
// the true mean, by the Edgeworth expansion of Student's t (Hall 1992): with
// skewness γ, excess kurtosis κ and the normal quantile z,
// confidence + (2/n)φ(z)z[κ(z²-3)/12 - γ²(z⁴+2z²-3)/18] for both limits, and
// confidence ± γ(2z²+1)φ(z)/(6√n) for the lower, the upper limit alone. It is
// held within 0 and 1, which the expansion leaves for small n.
func predictedCoverage(n, confidence float64, dir string, skewness, kurtosis float64) float64 {
	z := dist.Normal{}.UpperQuantile(tail(confidence, dir))
	density := dist.Normal{}.Density(z)
	z2 := float64(z * z)
	var change float64
	if dir == either {
		bend := kurtosis*(z2-3)/12 - float64(skewness*skewness)*(float64(z2*z2)+float64(2*z2)-3)/18
		change = 2 / n * density * z * bend
	} else {
		change = skewness * (float64(2*z2) + 1) * density / (6 * math.Sqrt(n))
		if dir == below {
			change = -change
		}
	}
	return math.Max(0, math.Min(1, confidence+change))
}

// ruleOfThumb is the n that is often called enough, whatever the population.
const ruleOfThumb = 30

// cochranN is the smallest n above 25 times the squared skewness (Cochran 1977,
// Sampling Techniques, section 2.15).
func cochranN(skewness float64) float64 {
	return floorWhole(cochranFactor*float64(skewness*skewness)) + 1
}

var enoughNForMean = &Function{
	Name:    "enough-n-for-mean",
	Version: 1,
	Summary: "how many values make the t interval of a mean keep its confidence although they are skewed or heavy-tailed",
	Inputs: inputs(pilotSample, skewnessGiven, kurtosisGiven, confidence, allowedShortfall, direction,
		designEffect, nonResponse, checks),
	OneOf: []OneOf{{{Needs: []string{"sample"}}, {Needs: []string{"skewness", "excess-kurtosis"}}}},
	Results: []Result{resultPlanN, resultPlanned,
		{"predicted-coverage", Number, NoUnit, "the chance, predicted for n, that the interval holds the true mean"},
		{"cochran-n", Whole, NoUnit, "the smallest n above 25 times the squared skewness"},
		{"coverage-at-30", Number, NoUnit, "the predicted chance for n = 30, the common rule of thumb"}},
	Findings:    append([]FindingKind{tooManyKind, noSpreadKind}, oneSampleFindings...),
	Assumptions: []string{"independent values of one population with a finite fourth moment"},
	Citations:   []string{"Hall 1992", "Cochran 1977"},
	Example: Example{
		Label:     "values as skewed as waiting times (exponential)",
		Arguments: []Argument{{"skewness", 2.0}, {"excess-kurtosis", 6.0}},
		Want:      []Argument{{"n", 90}, {"predicted-coverage", 0.9400743263978696543290558}, {"cochran-n", 101}},
		Tolerance: 1e-12,
		Source:    "arithmetic at 34 digits, testdata/references/plans/plans.csv",
	},
	compute: func(c *Call) error {
		g1, g2, err := c.skewnessAndKurtosis()
		if err != nil {
			return err
		}
		conf, dir := confidence.Of(c), direction.Of(c)
		wanted := conf - allowedShortfall.Of(c)
		predicted := func(n int) float64 { return predictedCoverage(float64(n), conf, dir, g1, g2) }
		attains := func(n int) string { return "a predicted coverage of " + percent(predicted(n)) }
		input, rule := c.firstGiven("sample", "skewness"), cochranN(g1)
		if rule > largestPlan {
			return tooMany(input, attains(largestPlan))
		}
		n, err := c.planN(input, largestPlan, rule, func(n int) bool { return reaches(predicted(n), wanted) }, attains)
		if err != nil {
			return err
		}
		c.set("predicted-coverage", predicted(n))
		c.set("cochran-n", int(rule))
		c.set("coverage-at-30", predicted(ruleOfThumb))
		c.method = fmt.Sprintf("predicted coverage of the t interval for skewness %s and excess kurtosis %s", brief(g1), brief(g2))
		thumb, few := "which is enough", ""
		if !reaches(predicted(ruleOfThumb), wanted) {
			thumb = "which is too little"
		}
		if n < fewValues {
			few = " So few values make a wide interval, and the prediction is rough for them: plan the half-width with mean-precision-size."
		}
		c.sentence = fmt.Sprintf("Measure %s, planned for a coverage of at least %s: the %s interval (%s) is predicted to hold the true mean in %s of cases (%s); "+
			"Cochran's rule asks for n = %.0f. The rule of thumb n = %d, which asks nothing of the values, is predicted to give %s, %s.%s%s", nText(n), percent(wanted),
			percent(conf), c.inDirection(), predictedShare(predicted(n), conf), c.method, rule, ruleOfThumb, predictedShare(predicted(ruleOfThumb), conf), thumb, few, c.toPlan())
		return nil
	},
}

// skewnessAndKurtosis reads skewness and excess kurtosis, or takes them from a
// sample.
func (c *Call) skewnessAndKurtosis() (g1, g2 float64, err error) {
	values, ok := sample.Given(c)
	if !ok {
		g1, g2 = skewnessGiven.Of(c), kurtosisGiven.Of(c)
		least := float64(g1*g1) - 2
		switch {
		case math.IsInf(least, 1):
			return 0, 0, c.wrong("skewness", FormatNumber(g1), "is beyond any n that could be measured", "give one whose square a double holds")
		case g2 < least-1e-9:
			return 0, 0, c.wrong("excess-kurtosis", FormatNumber(g2), "is less than any distribution of this skewness has", fmt.Sprintf("give at least %s", brief(least)))
		}
		return g1, g2, nil
	}
	m := c.moments(c.gapless(values))
	switch {
	case m.N < 4:
		return 0, 0, tooFew("sample", m.N, 4)
	case m.SumSquares == 0:
		return 0, 0, c.noSpread("sample")
	}
	return skewness(m), excessKurtosis(m), c.checkSample()
}
