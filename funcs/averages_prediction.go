package funcs

import (
	"fmt"
	"math"

	"halfwidth/funcs/internal/dist"
)

const (
	predictEach = "each"
	predictMean = "mean"
)

var (
	future       = count("future", "how many further values", 1).withDefault(1)
	predictionOf = choice("of", "each: limits that hold all the further values together; mean: limits for their mean", predictEach, predictMean)
)

var predictionInterval = &Function{
	Name:    "prediction-interval",
	Version: 1,
	Summary: "limits for further values of the same population, or for their mean",
	Inputs: inputs(sample, meanGiven, sdGiven, nGiven, future, predictionOf,
		confidence.as("confidence", "the confidence that the further values lie within the limits"), direction, checks),
	OneOf: []OneOf{sampleWays},
	Results: []Result{
		resultLower, resultUpper,
		{"factor", Number, NoUnit, "how many sds each limit lies from the mean"},
		resultN, resultDF,
	},
	Findings:    append([]FindingKind{noSpreadKind}, oneSampleFindings...),
	Assumptions: []string{"independent values of one normal population, at every n; the further values too"},
	Citations:   []string{"ISO 16269-8", "Hahn & Meeker 1991"},
	Example: Example{
		Label:     "one further value after 10",
		Arguments: []Argument{{"mean", 53.7}, {"sd", 6.567}, {"n", 10}},
		Want:      []Argument{{"factor", 2.372570448294}, {"lower", 38.11932986605}, {"upper", 69.28067013395}, {"df", 9.0}},
		Tolerance: 1e-9,
		Source:    "the defining formula at 20 digits: t·√(1 + 1/10) with the t quantile 2.2621571627982 of 9 degrees of freedom (JCGM 100 Table G.2 has 2.26)",
	},
	compute: func(c *Call) error {
		s, err := c.summaryOf(sample, meanGiven, sdGiven, nGiven)
		if err != nil {
			return err
		}
		if s.sd == 0 {
			return c.noSpread(c.firstGiven("sample", "sd"))
		}
		dir, m, n, df := direction.Of(c), future.Of(c), float64(s.n), float64(s.n-1)
		perSD := math.Sqrt(1 + 1/n) // sd of a further value about the mean, in sds
		critical := dist.Student{DF: df}.UpperQuantile
		what := "hold the further value"
		c.method = fmt.Sprintf("t prediction limits with %s, sd with divisor n - 1", degrees(df))
		switch {
		case predictionOf.Of(c) == predictMean:
			perSD = math.Sqrt(1/n + 1/float64(m))
			what = fmt.Sprintf("hold the mean of %s", plural(m, "further value"))
		case m > 1:
			// The largest of m values with both limits counts either side once.
			law := dist.JointPrediction(s.n, m, df, dir == either)
			critical = func(q float64) float64 {
				if dir == either {
					q = 1 - confidence.Of(c)
				}
				return law.UpperQuantile(q)
			}
			what = fmt.Sprintf("hold all %d further values together", m)
			c.method = fmt.Sprintf("joint prediction limits by the equicorrelated t law with %s, sd with divisor n - 1", degrees(df))
		}
		factor := critical(tail(confidence.Of(c), dir)) * perSD
		reach := float64(factor * s.sd)
		l := limitsAt(dir, s.mean-reach, s.mean+reach)
		c.setLimits(l)
		c.set("factor", factor)
		c.set("n", s.n)
		c.set("df", df)
		c.sayLimits(l, reach, what+" with "+percent(confidence.Of(c))+" confidence", nText(s.n))
		return c.checkSample()
	},
}
