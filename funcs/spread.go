package funcs

import (
	"fmt"
	"math"
	"slices"

	"halfwidth/funcs/internal/dist"
	"halfwidth/funcs/internal/num"
)

var spread = []*Function{pooledVariance, varianceInterval, varianceRatioInterval, equalSpreadTest}

var fewGroupsKind = FindingKind{"few-groups", "fewer than 2 groups"}

// varianceResults are the results of an interval for a variance and its root.
func varianceResults(variance, sd string) []Result {
	return []Result{
		{variance, Number, SquaredUnit, "the variance (divisor n - 1 in each sample)"},
		{"variance-lower", Number, SquaredUnit, "lower limit of the variance"},
		{"variance-upper", Number, SquaredUnit, "upper limit of the variance"},
		{sd, Number, SameUnit, "its square root, the standard deviation"},
		{"sd-lower", Number, SameUnit, "lower limit of the standard deviation"},
		{"sd-upper", Number, SameUnit, "upper limit of the standard deviation"},
	}
}

// varianceLimits are the equal-tailed limits of the variance of normal values:
// df·s²/σ² is a chi-square with df degrees of freedom (ISO 2854).
func varianceLimits(confidence float64, direction string, variance, df float64) limits {
	law := dist.ChiSquare{DF: df}
	return limitsOf(confidence, direction,
		func(q float64) float64 { return variance * (df / law.UpperQuantile(q)) },
		func(q float64) float64 { return variance * (df / law.Quantile(q)) })
}

// setVariance gives the variance, its root and the limits of both.
func (c *Call) setVariance(name, rootName string, variance, sd float64, l limits) {
	c.set(name, variance)
	c.set(rootName, sd)
	if l.hasLower {
		c.set("variance-lower", l.lower)
		c.set("sd-lower", math.Sqrt(l.lower))
	}
	if l.hasUpper {
		c.set("variance-upper", l.upper)
		c.set("sd-upper", math.Sqrt(l.upper))
	}
}

// sayRoot adds the standard deviation to the sentence, with the roots of the
// variance's limits.
func (c *Call) sayRoot(what string, sd float64, l limits) {
	root := limits{math.Sqrt(l.lower), math.Sqrt(l.upper), l.hasLower, l.hasUpper}
	place := lastPlace(root.halfWidth(sd), sd)
	text := " The " + what + " is " + c.withUnit(toPlace(sd, place), SameUnit)
	switch {
	case l.hasLower && l.hasUpper:
		text += ", interval " + toPlace(root.lower, place) + " to " + toPlace(root.upper, place)
	case l.hasLower:
		text += ", at least " + toPlace(root.lower, place)
	default:
		text += ", at most " + toPlace(root.upper, place)
	}
	c.sentence += text + "."
}

// pooledSpread is the pooled variance Σ(nᵢ-1)sᵢ²/Σ(nᵢ-1) and its root. A power
// of two taken out beforehand keeps squares within range, and double-length
// sums keep one group's variance, and equal variances, as they are.
func pooledSpread(groups ...summary) (variance, sd float64) {
	var largest float64
	for _, g := range groups {
		if g.n > 1 {
			largest = math.Max(largest, g.sd)
		}
	}
	_, e := math.Frexp(largest)
	var sum num.Wide
	var df float64
	for _, g := range groups {
		if g.n > 1 {
			s := math.Ldexp(g.sd, -e)
			sum = sum.Add(num.TwoProduct(s, s).Times(float64(g.n - 1)))
			df += float64(g.n - 1)
		}
	}
	if df == 0 {
		return 0, 0
	}
	v := sum.Over(df).Float()
	return math.Ldexp(v, 2*e), math.Ldexp(math.Sqrt(v), e)
}

// summariesOf gives the summaries of groups without their names.
func summariesOf(groups []groupSummary) []summary {
	out := make([]summary, len(groups))
	for i, g := range groups {
		out[i] = g.summary
	}
	return out
}

// pooledOf is the pooled variance of groups, its root and its degrees of
// freedom; refused where there are none, or no spread.
func (c *Call) pooledOf(groups []groupSummary) (variance, sd, df float64, err error) {
	if df = dfWithin(groups); df == 0 {
		return 0, 0, 0, c.onlySingles(groups)
	}
	if variance, sd = pooledSpread(summariesOf(groups)...); sd == 0 {
		return 0, 0, 0, c.noGroupSpread(groups)
	}
	return variance, sd, df, nil
}

var pooledVariance = &Function{
	Name:    "pooled-variance",
	Version: 1,
	Summary: "one variance for several groups, from the spread within each, with its confidence interval",
	Inputs:  inputs(samples, sds, ns, confidence, checks),
	OneOf:   []OneOf{sdsWays},
	Results: append(varianceResults("pooled-variance", "pooled-sd"), resultDF,
		Result{"groups", Whole, NoUnit, "how many groups"}, resultN),
	Findings:    slices.Concat(intervalFindings, []FindingKind{spreadsKind}),
	Assumptions: []string{"independent normal values in each group", "the same variance in all groups"},
	Citations:   []string{"ISO 3534-1", "ISO 2854"},
	Example: Example{
		Label:     "miles per gallon of 249 and 79 cars",
		Arguments: []Argument{{"sds", List{Values: []float64{6.4147, 6.10771}}}, {"ns", List{Values: []float64{249, 79}}}},
		Want:      []Argument{{"pooled-sd", 6.34260}, {"df", 326.0}},
		Tolerance: 1e-6,
		Source:    "NIST/SEMATECH e-Handbook of Statistical Methods, 1.3.5.3",
	},
	compute: func(c *Call) error {
		groups, err := c.readGroups()
		if err != nil {
			return err
		}
		variance, sd, df, err := c.pooledOf(groups)
		if err != nil {
			return err
		}
		l := varianceLimits(confidence.Of(c), either, variance, df)
		c.setVariance("pooled-variance", "pooled-sd", variance, sd, l)
		c.set("df", df)
		c.set("groups", len(groups))
		c.set("n", total(groups))
		c.method = fmt.Sprintf("equal-tailed chi-square interval with %s, sum of squares within groups over their n - 1", degrees(df))
		c.say(statement{what: "pooled variance", estimate: variance, limits: l, unit: SquaredUnit,
			counts: fmt.Sprintf("n = %d in %s", total(groups), plural(len(groups), "group"))})
		c.sayRoot("pooled standard deviation", sd, l)
		c.checkGroupSpreads(groups)
		return c.checkGroups(groups)
	},
}

var varianceInterval = &Function{
	Name:    "variance-interval",
	Version: 1,
	Summary: "variance and standard deviation of a sample with their confidence intervals, and a test against a reference variance",
	Inputs: inputs(sample, sdGiven, nGiven,
		number("reference", "the variance to compare with", positive, SquaredUnit).optional(), confidence, direction, checks),
	OneOf: []OneOf{{{Needs: []string{"sample"}}, {Needs: []string{"sd", "n"}}}},
	Results: append(varianceResults("variance", "sd"), resultN, resultDF,
		Result{"chi-square", Number, NoUnit, "df times the variance over the reference"}, resultP),
	Findings:    intervalFindings,
	Assumptions: []string{"independent values of one population", "normal values: no n makes up for tails that are heavier"},
	Citations:   []string{"ISO 2854"},
	Example: Example{
		Label: "breaking load of ten lengths of yarn",
		Arguments: []Argument{
			{"sample", []float64{2.297, 2.582, 1.949, 2.362, 2.040, 2.133, 1.855, 1.986, 1.642, 2.915}},
			{"reference", 0.09},
		},
		Want:      []Argument{{"sd-lower", 0.257}, {"sd-upper", 0.682}, {"chi-square", 13.96}},
		Tolerance: 2e-4,
		Source:    "ISO 2854, annex",
	},
	compute: func(c *Call) error {
		s, err := c.summaryOf(sample, meanGiven, sdGiven, nGiven)
		if err != nil {
			return err
		}
		if s.sd == 0 {
			return c.noSpread(c.firstGiven("sample", "sd"))
		}
		dir, df, variance := direction.Of(c), float64(s.n-1), float64(s.sd*s.sd)
		l := varianceLimits(confidence.Of(c), dir, variance, df)
		c.setVariance("variance", "sd", variance, s.sd, l)
		c.set("n", s.n)
		c.set("df", df)
		c.method = fmt.Sprintf("equal-tailed chi-square interval with %s, variance with divisor n - 1", degrees(df))
		if dir != either {
			c.method = fmt.Sprintf("chi-square limit with %s, variance with divisor n - 1", degrees(df))
		}
		c.say(statement{what: "variance", estimate: variance, limits: l, unit: SquaredUnit, counts: nText(s.n)})
		if ref, ok := reference.Given(c); ok {
			chi := df * (variance / ref)
			c.setTest(ref, SquaredUnit, "chi-square", chi, pValue(dir, chi, dist.ChiSquare{DF: df}))
		}
		c.sayRoot("standard deviation", s.sd, l)
		return c.checkSample()
	},
}

var varianceRatioInterval = &Function{
	Name:    "variance-ratio-interval",
	Version: 1,
	Summary: "ratio of two variances (first over second) with its confidence interval, and a test against a reference",
	Inputs: inputs(sample, secondSample, firstSD, firstN, secondSD, secondN,
		number("reference", "the ratio to compare with", positive, NoUnit).withDefault(1), confidence, direction, checks),
	OneOf: []OneOf{{{Needs: []string{"sample", "second-sample"}}, {Needs: []string{"first-sd", "first-n", "second-sd", "second-n"}}}},
	Results: []Result{
		{"ratio", Number, NoUnit, "variance of the first sample over that of the second"},
		ratioLower, ratioUpper,
		{"f", Number, NoUnit, "the ratio over the reference"},
		{"first-df", Number, NoUnit, "degrees of freedom of the first variance"},
		{"second-df", Number, NoUnit, "degrees of freedom of the second variance"},
		resultP,
	},
	Findings:    intervalFindings,
	Assumptions: []string{"two independent samples of independent values", "normal values: no n makes up for tails that are heavier"},
	Citations:   []string{"ISO 2854"},
	Example: Example{
		Label:     "strength of 240 and 240 ceramic bars",
		Arguments: []Argument{{"first-sd", 65.54909}, {"first-n", 240}, {"second-sd", 61.85425}, {"second-n", 240}},
		Want:      []Argument{{"f", 1.123037}, {"first-df", 239.0}},
		Tolerance: 5e-7,
		Source:    "NIST/SEMATECH e-Handbook of Statistical Methods, 1.3.5.9",
	},
	compute: func(c *Call) error {
		first, second, err := c.twoSummaries()
		if err != nil {
			return err
		}
		if first.sd == 0 {
			return c.noSpread(c.firstGiven("sample", "first-sd"))
		}
		if second.sd == 0 {
			return c.noSpread(c.firstGiven("second-sample", "second-sd"))
		}
		law := dist.F{DF1: float64(first.n - 1), DF2: float64(second.n - 1)}
		root := first.sd / second.sd
		dir, ref, ratio := direction.Of(c), reference.Of(c), float64(root*root)
		l := limitsOf(confidence.Of(c), dir,
			func(q float64) float64 { return ratio / law.UpperQuantile(q) },
			func(q float64) float64 { return ratio / law.Quantile(q) })
		f := ratio / ref
		c.set("ratio", ratio)
		c.setLimits(l)
		c.set("first-df", law.DF1)
		c.set("second-df", law.DF2)
		c.method = fmt.Sprintf("F interval with %s and %s, variances with divisor n - 1", brief(law.DF1), degrees(law.DF2))
		c.say(statement{what: "ratio of variances (first over second)", estimate: ratio, limits: l, counts: nTexts(first, second)})
		c.setTest(ref, NoUnit, "f", f, pValue(dir, f, law))
		return c.checkTwo(first, second)
	},
}
