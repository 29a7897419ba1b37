package funcs

import (
	"fmt"
	"math"
	"slices"

	"halfwidth/funcs/internal/dist"
	"halfwidth/funcs/internal/num"
)

// The ways of giving several groups, of which the means count or only the sds.
var (
	meansWays = OneOf{{Needs: []string{"samples"}}, {Needs: []string{"means", "sds", "ns"}}}
	sdsWays   = OneOf{{Needs: []string{"samples"}}, {Needs: []string{"sds", "ns"}}}
)

var severalMeansFindings = slices.Concat(twoMeansFindings, []FindingKind{fewGroupsKind})

// pooledFirst is variances with pooled as the default, as is usual for several means.
var pooledFirst = variances.withDefault(pooled)

// exampleTreatments are the data of NIST/SEMATECH e-Handbook of Statistical Methods,
// 7.4.3.3, which two examples use.
var exampleTreatments = []Argument{{"samples", []Group{
	{"level 1", []float64{6.9, 5.4, 5.8, 4.6, 4.0}},
	{"level 2", []float64{8.3, 6.8, 7.8, 9.2, 6.5}},
	{"level 3", []float64{8.0, 10.5, 8.1, 6.9, 9.3}},
}}}

// groupSquares are the sums of squares between and within groups.
type groupSquares struct{ between, within float64 }

// squaresOf adds up the squares of groups that have these means and these sums of
// squares about them.
func squaresOf(groups []groupSummary, means, about []num.Wide) groupSquares {
	distances := make([]num.Wide, len(groups))
	var weighted, within num.Wide
	for i, g := range groups {
		distances[i] = means[i].Sub(means[0])
		weighted = weighted.Add(distances[i].Times(float64(g.n)))
		within = within.Add(about[i])
	}
	centre := weighted.Over(float64(total(groups)))
	var between num.Wide
	for i, g := range groups {
		d := distances[i].Sub(centre)
		between = between.Add(d.Mul(d).Times(float64(g.n)))
	}
	return groupSquares{between.Float(), within.Float()}
}

// summarySquares come from means and sds as doubles.
func summarySquares(groups []groupSummary) groupSquares {
	means, about := make([]num.Wide, len(groups)), make([]num.Wide, len(groups))
	for i, g := range groups {
		means[i] = num.Widen(g.mean)
		about[i] = num.TwoProduct(g.sd, g.sd).Times(float64(g.n - 1))
	}
	return squaresOf(groups, means, about)
}

// valueSquares come from the values, with means of double length, so that no digit
// is lost to the rounding of means and sds.
func valueSquares(groups []groupSummary) groupSquares {
	means, about := make([]num.Wide, len(groups)), make([]num.Wide, len(groups))
	for i, g := range groups {
		m := g.moments
		means[i], about[i] = num.Wide{Hi: m.Mean, Lo: m.MeanLow}, num.Widen(m.SumSquares)
	}
	return squaresOf(groups, means, about)
}

// sameSquares is how near the two ways of adding up must come to count as one:
// relative in both sums, that between counted as no less than its mean square
// within, since an f below 1 tells nothing by its last digits.
const sameSquares = 2e-14

// near says whether s and v agree to within sameSquares.
func (s groupSquares) near(v groupSquares, df1, df2 float64) bool {
	least := v.within * (df1 / df2)
	return math.Abs(s.between-v.between) <= sameSquares*math.Max(v.between, least) && math.Abs(s.within-v.within) <= sameSquares*v.within
}

// sumsOfSquares works from the means and sds, so that samples and their summaries
// give the same digits. Where the values are there and show that rounding the
// means to doubles has cost more than sameSquares, as it does for small
// differences of large values, the sums come from the values.
func sumsOfSquares(groups []groupSummary, df1, df2 float64) (s groupSquares, from string) {
	s, from = summarySquares(groups), "means and sds"
	if groups[0].values != nil {
		if v := valueSquares(groups); !s.near(v, df1, df2) {
			return v, "values (rounded means would cost digits)"
		}
	}
	return s, from
}

// welchMeans is the test of several means with separate variances (Welch 1951,
// On the comparison of several mean values): f and its degrees of freedom.
func welchMeans(groups []groupSummary) (f, dfBetween, dfWithin float64) {
	k := float64(len(groups))
	least := math.Inf(1)
	for _, g := range groups {
		least = math.Min(least, g.sd/math.Sqrt(float64(g.n)))
	}
	weights := make([]float64, len(groups)) // n/sd², the largest as 1
	distances := make([]float64, len(groups))
	var sum float64
	for i, g := range groups {
		r := least / (g.sd / math.Sqrt(float64(g.n)))
		weights[i] = float64(r * r)
		distances[i] = (g.mean - groups[0].mean) / least
		sum += weights[i]
	}
	centre := num.SumProducts(weights, distances) / sum
	var between, lambda float64
	for i, g := range groups {
		d, w := distances[i]-centre, 1-weights[i]/sum
		between += float64(weights[i] * float64(d*d))
		lambda += float64(w*w) / float64(g.n-1)
	}
	squares := float64(k*k) - 1
	return between / (k - 1) / (1 + float64(2*(k-2)*lambda)/squares), k - 1, squares / (3 * lambda)
}

var analysisOfVariance = &Function{
	Name:    "analysis-of-variance",
	Version: 2,
	Summary: "whether the means of several groups differ: one-way analysis of variance, or Welch's test with separate variances",
	Inputs:  inputs(samples, means, sds, ns, pooledFirst, checks),
	OneOf:   []OneOf{meansWays},
	Results: []Result{
		{"f", Number, NoUnit, "mean square between over mean square within; Welch's f with separate variances"},
		{"df-between", Number, NoUnit, "number of groups less 1"},
		{"df-within", Number, NoUnit, "number of values less number of groups; a fraction with separate variances"},
		{"p-value", Number, NoUnit, "chance of an f this large if all means were equal"},
		{"sum-squares-between", Number, SquaredUnit, "sum of squares of the groups' means about the overall mean; only pooled"},
		{"sum-squares-within", Number, SquaredUnit, "sum of squares of the values about their group's mean; only pooled"},
		{"mean-square-between", Number, SquaredUnit, "sum-squares-between over df-between; only pooled"},
		{"mean-square-within", Number, SquaredUnit, "sum-squares-within over df-within; only pooled"},
		{"r-squared", Number, NoUnit, "share of sum-squares-between in the whole; only pooled"},
		{"residual-sd", Number, SameUnit, "root of mean-square-within; only pooled"},
	},
	Findings: severalMeansFindings,
	Assumptions: []string{"independent groups of independent values", "normal values, or n large enough for their skewness",
		"with variances pooled: the same variance in all groups"},
	Citations: []string{"NIST StRD anova", "Welch 1951"},
	Example: Example{
		Label:     "three treatments, five values each",
		Arguments: exampleTreatments,
		Want:      []Argument{{"sum-squares-between", 27.897}, {"sum-squares-within", 17.452}, {"df-within", 12.0}, {"p-value", 0.00325}},
		Tolerance: 1e-3,
		Source:    "NIST/SEMATECH e-Handbook of Statistical Methods, 7.4.3.3",
	},
	compute: func(c *Call) error {
		groups, err := c.readSeveral()
		if err != nil {
			return err
		}
		test := c.pooledMeans
		if pooledFirst.Of(c) == separate {
			test = c.separateMeans
		}
		if err := test(groups); err != nil {
			return err
		}
		return c.checkGroups(groups)
	},
}

// pooledMeans is the analysis of variance with one variance for all groups.
func (c *Call) pooledMeans(groups []groupSummary) error {
	df1, df2 := float64(len(groups)-1), dfWithin(groups)
	if df2 == 0 {
		return c.onlySingles(groups)
	}
	sums, from := sumsOfSquares(groups, df1, df2)
	between, within := sums.between, sums.within
	if within == 0 {
		return c.noGroupSpread(groups)
	}
	f := (between / df1) / (within / df2)
	c.set("sum-squares-between", between)
	c.set("sum-squares-within", within)
	c.set("mean-square-between", between/df1)
	c.set("mean-square-within", within/df2)
	c.set("r-squared", between/(between+within))
	c.set("residual-sd", math.Sqrt(within/df2))
	c.method = "one-way analysis of variance with one pooled variance of divisor " + brief(df2) + ", sums of squares from the " + from
	c.setMeansTest(groups, f, df1, df2)
	c.checkGroupSpreads(groups)
	return nil
}

// onlySingles refuses what needs spread within groups where no group has any.
func (c *Call) onlySingles(groups []groupSummary) error {
	return refuse("few-values", c.groupsInput(), "%s: only 1 value in each, so nothing tells how much values vary; measure at least 2 in one.", theGroups(groups))
}

// separateMeans is Welch's test; groups of one value are left out.
func (c *Call) separateMeans(groups []groupSummary) error {
	groups = c.ownSpread(groups)
	if err := c.atLeastTwo(groups); err != nil {
		return err
	}
	if err := c.eachVaries(groups); err != nil {
		return err
	}
	f, df1, df2 := welchMeans(groups)
	c.method = "Welch's test of several means with separate variances, sds with divisor n - 1"
	c.setMeansTest(groups, f, df1, df2)
	return nil
}

// setMeansTest gives f, its degrees of freedom, the p-value and the sentence.
func (c *Call) setMeansTest(groups []groupSummary, f, df1, df2 float64) {
	p := dist.F{DF1: df1, DF2: df2}.SF(f)
	c.set("f", f)
	c.set("df-between", df1)
	c.set("df-within", df2)
	c.set("p-value", p)
	c.sentence = fmt.Sprintf("The means of %s (n = %d in all) are compared: f = %s with %s and %s, %s (%s).",
		plural(len(groups), "group"), total(groups), brief(f), brief(df1), degrees(df2), pText(p), c.method)
}
