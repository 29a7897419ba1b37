package funcs

import (
	"fmt"
	"slices"

	"halfwidth/funcs/internal/dist"
)

var differences = []*Function{differenceInterval, ratioInterval, shiftInterval, equivalenceTest, analysisOfVariance, pairwiseDifferences,
	differencesFromControl, adjustedPValues}

// twoMeansWays are the ways of giving two groups of which the means are compared.
var twoMeansWays = OneOf{
	{Needs: []string{"sample", "second-sample"}},
	{Needs: []string{"first-mean", "first-sd", "first-n", "second-mean", "second-sd", "second-n"}},
}

var twoMeansAssumptions = []string{
	"two independent samples of independent values",
	"normal values, or n large enough for their skewness",
	"with variances pooled: the same variance in both",
}

var twoMeansFindings = slices.Concat(intervalFindings, []FindingKind{spreadsKind})

// assemblyMinutes are the data of NIST/SEMATECH e-Handbook of Statistical Methods,
// 7.3.1, which several examples use.
var assemblyMinutes = []Argument{
	{"sample", []float64{32, 37, 35, 28, 41, 44, 35, 31, 34, 38, 42}},
	{"second-sample", []float64{36, 31, 30, 31, 34, 36, 29, 32, 31}},
}

// methodText names the interval, its degrees of freedom and the divisor.
func (m twoMeans) methodText(interval, variances string) string {
	if variances == pooled {
		return fmt.Sprintf("%s with one pooled variance and %s, sds with divisor n - 1", interval, degrees(m.df))
	}
	return fmt.Sprintf("%s with separate variances and %s by Satterthwaite, sds with divisor n - 1", interval, degrees(m.df))
}

// checkMeans raises the cautions of two samples whose means are compared.
func (c *Call) checkMeans(first, second summary) error {
	if variances.Of(c) == pooled {
		c.checkSpreads(c.firstGiven("sample", "first-sd"), spreadOf{first.sd, first.n}, spreadOf{second.sd, second.n})
	}
	return c.checkTwo(first, second)
}

var differenceInterval = &Function{
	Name:    "difference-interval",
	Version: 1,
	Summary: "difference of two means (first - second) with its confidence interval, and a test",
	Inputs: inputs(sample, secondSample, firstMean, firstSD, firstN, secondMean, secondSD, secondN, variances,
		reference.withDefault(0), confidence, direction, checks),
	OneOf: []OneOf{twoMeansWays},
	Results: append(intervalResults("difference", "mean of the first sample less that of the second"),
		resultSE, resultDF, resultT, resultP,
		Result{"pooled-sd", Number, SameUnit, "root of the variance within both samples"},
		Result{"standardized-difference", Number, NoUnit, "difference less reference, over pooled-sd, without bias (Hedges)"}),
	Findings:    twoMeansFindings,
	Assumptions: twoMeansAssumptions,
	Citations:   []string{"Welch 1947", "Satterthwaite 1946", "ISO 2854 (pooled)", "Hedges 1981"},
	Example: Example{
		Label:     "minutes of assembly, old process against new",
		Arguments: assemblyMinutes,
		Want:      []Argument{{"t", 2.2694}},
		Tolerance: 2e-5,
		Source:    "NIST/SEMATECH e-Handbook of Statistical Methods, 7.3.1",
	},
	compute: func(c *Call) error {
		first, second, err := c.twoSummaries()
		if err != nil {
			return err
		}
		kind := variances.Of(c)
		m := compareMeans(first, second, kind)
		if m.se == 0 {
			return c.noSpreadInTwo()
		}
		law := dist.Student{DF: m.df}
		dir, ref := direction.Of(c), reference.Of(c)
		l := symmetric(confidence.Of(c), dir, m.difference, m.se, law)
		t := (m.difference - ref) / m.se
		c.setInterval("difference", m.difference, l)
		c.set("standard-error", m.se)
		c.set("df", m.df)
		c.set("pooled-sd", m.pooledSD)
		c.set("standardized-difference", (m.difference-ref)/m.pooledSD*hedgesFactor(float64(first.n-1)+float64(second.n-1)))
		c.method = m.methodText("t interval", kind)
		c.say(statement{what: "difference of means (first - second)", estimate: m.difference, limits: l, unit: SameUnit, counts: nTexts(first, second)})
		c.setTest(ref, SameUnit, "t", t, pValue(dir, t, law))
		return c.checkMeans(first, second)
	},
}
