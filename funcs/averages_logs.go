package funcs

import (
	"fmt"
	"math"

	"halfwidth/funcs/internal/dist"
	"halfwidth/funcs/internal/num"
)

var positiveOnlyKind = FindingKind{"not-positive", "a value is zero or negative, so that it has no logarithm"}

// logarithms gives the natural logarithms of the sample's values, which must be
// positive, in order and with their gaps, and their summary.
func (c *Call) logarithms() ([]float64, summary, error) {
	values := sample.Of(c)
	logs := make([]float64, len(values))
	for i, x := range values {
		if x <= 0 {
			return nil, summary{}, &refusal{Finding{Code: "not-positive", Severity: Refused, Input: "sample", Cells: c.address("sample", 0, i),
				Message: fmt.Sprintf("Value %d of sample is %s, and only positive values have a logarithm; use mean-interval or median-interval, "+
					"or leave such rows out by a condition.", i+1, FormatNumber(x))}}
		}
		logs[i] = num.Log(x)
	}
	s := summarise(withoutGaps(logs))
	c.count(s.n)
	return logs, s, c.enough("sample", s, 2)
}

// exponential gives limits on the scale of the values from limits of their
// logarithms.
func (l limits) exponential() limits {
	l.lower, l.upper = num.Exp(l.lower), num.Exp(l.upper)
	return l
}

// powersOfE have the logarithms 1, 2, 3, 4 and 5.
var powersOfE = []Argument{{"sample", []float64{math.E, math.E * math.E, math.E * math.E * math.E, 54.598150033144236, 148.4131591025766}}}

var geometricMeanInterval = &Function{
	Name:    "geometric-mean-interval",
	Version: 1,
	Summary: "geometric mean of positive values with its confidence interval, by a t interval of their logarithms",
	Inputs:  inputs(sample, confidence, direction, checks),
	Results: []Result{
		{"geometric-mean", Number, SameUnit, "the exponential of the mean logarithm"},
		resultLower, resultUpper,
		{"geometric-sd", Number, NoUnit, "the exponential of the standard deviation (divisor n - 1) of the logarithms"},
		resultN, resultDF,
	},
	Findings:    append([]FindingKind{positiveOnlyKind, noSpreadKind}, oneSampleFindings...),
	Assumptions: []string{"independent positive values of one population", "logarithms normal, or n large enough for their skewness"},
	Citations:   []string{"ISO 2602 on logarithms"},
	Example: Example{
		Label:     "powers of e, so that the logarithms are 1, 2, 3, 4 and 5",
		Arguments: powersOfE,
		Want:      []Argument{{"geometric-mean", 20.085536923187668}, {"lower", 2.82005627}, {"upper", 143.057001}},
		Tolerance: 1e-7,
		Source:    "the t interval of 1…5, 3 ± 2.776445105·√(2.5/5) (t quantile of JCGM 100 Table G.2), raised to the base e",
	},
	compute: func(c *Call) error {
		logs, s, err := c.logarithms()
		if err != nil {
			return err
		}
		law := dist.Student{DF: float64(s.n - 1)}
		estimate := num.Exp(s.mean)
		l := symmetric(confidence.Of(c), direction.Of(c), s.mean, math.Sqrt(s.variance()), law).exponential()
		c.set("geometric-mean", estimate)
		c.setLimits(l)
		c.set("geometric-sd", num.Exp(s.sd))
		c.set("n", s.n)
		c.set("df", law.DF)
		c.method = fmt.Sprintf("t interval of the logarithms with %s, sd with divisor n - 1", degrees(law.DF))
		c.say(statement{"geometric mean", estimate, l, SameUnit, nText(s.n)})
		return c.checkDerived("sample", "The list of logarithms", logs, s)
	},
}

var lognormalMeanInterval = &Function{
	Name:    "lognormal-mean-interval",
	Version: 1,
	Summary: "mean of a lognormal population with its confidence interval",
	Inputs:  inputs(sample, confidence, direction, checks),
	Results: []Result{
		{"mean", Number, SameUnit, "estimate of the population's mean, exp(ȳ + s²/2) of the logarithms"},
		resultLower, resultUpper,
		resultN,
	},
	Findings:    append([]FindingKind{positiveOnlyKind, noSpreadKind}, oneSampleFindings...),
	Assumptions: []string{"independent positive values of one population", "normal logarithms: unlike a t interval this one rests on it at every n"},
	Citations:   []string{"Zhou & Gao 1997", "Olsson 2005 (modified Cox)"},
	Example: Example{
		Label:     "powers of e, so that the logarithms are 1, 2, 3, 4 and 5",
		Arguments: powersOfE,
		Want:      []Argument{{"mean", 70.10541234668786}, {"lower", 3.02610869}, {"upper", 1624.12172}},
		Tolerance: 1e-7,
		Source:    "the defining formula at ȳ = 3, s² = 2.5, n = 5, t = 2.776445105 (JCGM 100 Table G.2)",
	},
	compute: func(c *Call) error {
		logs, s, err := c.logarithms()
		if err != nil {
			return err
		}
		law := dist.Student{DF: float64(s.n - 1)}
		variance := float64(s.sd * s.sd)
		centre := s.mean + variance/2
		se := math.Sqrt(s.variance() + float64(variance*variance)/float64(2*(s.n-1)))
		estimate := num.Exp(centre)
		l := symmetric(confidence.Of(c), direction.Of(c), centre, se, law).exponential()
		c.set("mean", estimate)
		c.setLimits(l)
		c.set("n", s.n)
		c.method = fmt.Sprintf("modified Cox interval with the t quantile of %s, sd of the logarithms with divisor n - 1", degrees(law.DF))
		c.say(statement{"mean of a lognormal population", estimate, l, SameUnit, nText(s.n)})
		return c.checkDerived("sample", "The list of logarithms", logs, s)
	},
}
