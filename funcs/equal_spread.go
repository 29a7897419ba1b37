package funcs

import (
	"fmt"
	"math"
	"slices"

	"halfwidth/funcs/internal/dist"
	"halfwidth/funcs/internal/num"
)

// The kinds of equal-spread-test.
const (
	brownForsythe = "brown-forsythe"
	levene        = "levene"
	bartlett      = "bartlett"
)

var spreadKind = choice("kind", "brown-forsythe: distances from the medians; levene: distances from the means; bartlett: variances of normal values",
	brownForsythe, levene, bartlett)

var equalSpreadTest = &Function{
	Name:    "equal-spread-test",
	Version: 1,
	Summary: "whether several groups vary equally much",
	Inputs:  inputs(samples, sds, ns, spreadKind, checks),
	OneOf:   []OneOf{sdsWays},
	Results: []Result{
		{"statistic", Number, NoUnit, "f of the distances from the centres; for bartlett a chi-square"},
		{"df-between", Number, NoUnit, "number of groups less 1"},
		{"df-within", Number, NoUnit, "number of values less number of groups; absent for bartlett"},
		{"p-value", Number, NoUnit, "chance of a statistic this large if all groups varied equally"},
	},
	Findings: slices.Concat(intervalFindings, []FindingKind{fewGroupsKind}),
	Assumptions: []string{"independent groups of independent values",
		"for bartlett: normal values; heavier tails make it find differences that are not there"},
	Citations: []string{"Brown & Forsythe 1974, Robust tests for the equality of variances", "Levene 1960", "Bartlett 1937"},
	Example: Example{
		Label:     "three treatments, five values each",
		Arguments: exampleTreatments,
		Want:      []Argument{{"statistic", 114.0 / 1717}, {"p-value", 0.93610258800884144}},
		Tolerance: 1e-12,
		Source:    "data of NIST/SEMATECH e-Handbook of Statistical Methods, 7.4.3.3; exact rational and high-precision arithmetic",
	},
	compute: func(c *Call) error {
		kind := spreadKind.Of(c)
		if kind != bartlett && !c.has("samples") {
			return c.wrong("kind", kind, "needs the values themselves", "write kind bartlett with sds and ns, or give samples")
		}
		all, err := c.readGroups()
		if err != nil {
			return err
		}
		groups := c.ownSpread(all)
		if err := c.atLeastTwo(groups); err != nil {
			return err
		}
		test := c.centredDistances
		if kind == bartlett {
			test = c.bartlettTest
		}
		if err := test(groups, kind); err != nil {
			return err
		}
		return c.checkGroups(groups)
	},
}

// centredDistances is the analysis of variance of the distances of the values
// from their group's centre.
func (c *Call) centredDistances(groups []groupSummary, kind string) error {
	distances := make([]groupSummary, len(groups))
	var squares float64
	for i, g := range groups {
		values := withoutGaps(g.values)
		z := fromMean(values)
		if kind == brownForsythe {
			z = fromMedian(values)
		}
		squares += num.SumProducts(z, z)
		m := num.Moments(z)
		distances[i] = groupSummary{g.name, z, m, summaryFrom(m)}
	}
	sums := valueSquares(distances)
	if squares == 0 {
		return c.noGroupSpread(groups)
	}
	// Distances that agree but for rounding, as in groups of two, give no yardstick.
	if !(sums.within > 1e-28*squares) {
		return refuse("few-values", "samples", "Within each group all values lie equally far from its centre, so nothing tells how much spreads vary by chance; "+
			"measure at least 3 in each.")
	}
	df1, df2 := float64(len(groups)-1), dfWithin(groups)
	f := (sums.between / df1) / (sums.within / df2)
	p := dist.F{DF1: df1, DF2: df2}.SF(f)
	c.set("statistic", f)
	c.set("df-between", df1)
	c.set("df-within", df2)
	c.set("p-value", p)
	c.method = "Levene's test: analysis of variance of the distances from the groups' means"
	if kind == brownForsythe {
		c.method = "Brown-Forsythe test: analysis of variance of the distances from the groups' medians"
	}
	c.saySpreads(groups, fmt.Sprintf("f = %s with %s and %s", brief(f), brief(df1), degrees(df2)), p)
	return nil
}

func (c *Call) saySpreads(groups []groupSummary, statistic string, p float64) {
	c.sentence = fmt.Sprintf("The spreads of %s (n = %d in all) are compared: %s, %s (%s).",
		plural(len(groups), "group"), total(groups), statistic, pText(p), c.method)
}

// fromMean gives the distances from the mean.
func fromMean(values []float64) []float64 {
	m := num.Moments(values)
	mean := num.Wide{Hi: m.Mean, Lo: m.MeanLow}
	z := make([]float64, len(values))
	for i, x := range values {
		z[i] = math.Abs(num.Widen(x).Sub(mean).Float())
	}
	return z
}

// fromMedian gives twice the distances from the median, each rounded once only,
// so that two values about the median are equally far from it.
func fromMedian(values []float64) []float64 {
	sorted := num.Sorted(values)
	n := len(sorted)
	twice := num.TwoSum(sorted[(n-1)/2], sorted[n/2])
	z := make([]float64, n)
	for i, x := range values {
		z[i] = math.Abs(num.TwoSum(x, x).Sub(twice).Float())
	}
	return z
}

// bartlettTest compares variances of normal values by the ratio of their
// weighted means (Bartlett 1937). With xᵢ = sᵢ²/s² - 1, s² pooled, the sum
// Σ(nᵢ-1)·log(s²/sᵢ²) is formed as Σ(nᵢ-1)·(xᵢ - log(1+xᵢ)), all terms positive.
func (c *Call) bartlettTest(groups []groupSummary, _ string) error {
	if err := c.eachVaries(groups); err != nil {
		return err
	}
	_, sd := pooledSpread(summariesOf(groups)...)
	df1, df2 := float64(len(groups)-1), dfWithin(groups)
	var sum, inverse float64
	for _, g := range groups {
		r := g.sd / sd
		x := float64((r - 1) * (r + 1))
		sum -= float64(float64(g.n-1) * num.Log1pmx(x))
		inverse += 1 / float64(g.n-1)
	}
	chi := sum / (1 + (inverse-1/df2)/(3*df1))
	p := dist.ChiSquare{DF: df1}.SF(chi)
	c.set("statistic", chi)
	c.set("df-between", df1)
	c.set("p-value", p)
	c.method = "Bartlett's test of equal variances, variances with divisor n - 1"
	c.saySpreads(groups, fmt.Sprintf("chi-square = %s with %s", brief(chi), degrees(df1)), p)
	return nil
}
