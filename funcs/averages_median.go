package funcs

import (
	"fmt"

	"halfwidth/funcs/internal/dist"
	"halfwidth/funcs/internal/num"
)

var medianInterval = &Function{
	Name:    "median-interval",
	Version: 1,
	Summary: "median with a confidence interval from the ordered values, whatever the shape of the population",
	Inputs:  inputs(sample, confidence, direction, checks),
	Results: []Result{
		{"median", Number, SameUnit, "the middle value, or the mean of the two in the middle"},
		{"lower", Number, SameUnit, "lower limit, one of the values; absent for direction below"},
		{"upper", Number, SameUnit, "upper limit, one of the values; absent for direction above"},
		{"attained-confidence", Number, NoUnit, "the confidence that these limits have, at least the one asked for"},
		resultN,
	},
	Findings:    []FindingKind{fewValuesKind, neighboursKind, {"confidence-not-attainable", "even the smallest and largest values do not reach the confidence"}},
	Assumptions: []string{"independent values of one population"},
	Citations:   []string{"Hahn & Meeker 1991 (order statistics)"},
	Example: Example{
		Label:     "ten values",
		Arguments: []Argument{{"sample", []float64{2, 4, 6, 7, 8, 9, 10, 11, 13, 40}}},
		Want:      []Argument{{"median", 8.5}, {"lower", 4.0}, {"upper", 13.0}, {"attained-confidence", 1 - 22.0/1024}},
		Tolerance: 1e-14,
		Source:    "exact count: P(X <= 1) = 11/1024 for X binomial with n = 10 and chance ½, so the second smallest and second largest",
	},
	compute: func(c *Call) error {
		values := num.Sorted(c.gapless(sample.Of(c)))
		n := len(values)
		c.count(n)
		conf, dir := confidence.Of(c), direction.Of(c)
		outside := tail(conf, dir)
		law := dist.Binomial{N: n, P: 0.5}
		k := law.Quantile(outside) // the largest with P(X <= k-1) <= outside
		for k < n && staysIn(law.CDF(k), outside) {
			k++
		}
		sides := 2.0
		if dir != either {
			sides = 1
		}
		if k == 0 {
			return refuse("confidence-not-attainable", "confidence", "With %s no limits reach %s confidence; the most that is attainable is %s. "+
				"Measure more, or ask for less.", nText(n), percent(conf), percent(roundDown(1-sides*law.CDF(0))))
		}
		l := limitsAt(dir, values[k-1], values[n-k])
		median := num.Median(values)
		attained := 1 - sides*law.CDF(k-1)
		c.set("median", median)
		c.setLimits(l)
		c.set("attained-confidence", attained)
		c.set("n", n)
		switch dir {
		case either:
			c.method = fmt.Sprintf("order statistics %d and %d", k, n+1-k)
		case above:
			c.method = fmt.Sprintf("order statistic %d", k)
		case below:
			c.method = fmt.Sprintf("order statistic %d", n+1-k)
		}
		c.method += ", attained confidence " + percent(roundDown(attained))
		c.say(statement{"median", median, l, SameUnit, nText(n)})
		c.checkOfAnyShape(n)
		return nil
	},
}
