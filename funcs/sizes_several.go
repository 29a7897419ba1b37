package funcs

import (
	"fmt"
	"math"

	"halfwidth/funcs/internal/dist"
	"halfwidth/funcs/internal/num"
)

// severalMeans is the analysis of variance of groups with one sd.
type severalMeans struct {
	means            []float64
	sd, significance float64
}

func (c *Call) severalMeans() (severalMeans, error) {
	p := severalMeans{means.Of(c).Values, expectedSD.Of(c), significance.Of(c)}
	c.method = fmt.Sprintf("analysis of variance of %d groups, exact power from the noncentral F, sd %s", len(p.means), c.briefly(p.sd))
	if len(p.means) < 2 {
		return p, refuse("few-groups", "means", "There is only one mean, but at least 2 are needed; give one for each group.")
	}
	for _, m := range p.means {
		if m != p.means[0] {
			return p, nil
		}
	}
	return p, refuse("no-difference", "means", "All the means are equal: no n separates a value from itself. Give the means that must be told apart.")
}

// spread is Σ(μᵢ-μ̄)²/sd², the noncentrality for each value in a group.
func (p severalMeans) spread() float64 {
	mean := num.Mean(p.means)
	var sum float64
	for _, m := range p.means {
		d := (m - mean) / p.sd
		sum += float64(d * d)
	}
	return sum
}

// power is the chance that F passes its critical value with n in each group: F is
// noncentral with Σn(μᵢ-μ̄)²/sd².
func (p severalMeans) power(n float64) float64 {
	k := float64(len(p.means))
	df1, df2 := k-1, float64(k*(n-1))
	return dist.NoncentralF{DF1: df1, DF2: df2, Noncentrality: n * p.spread()}.SF(dist.F{DF1: df1, DF2: df2}.UpperQuantile(p.significance))
}

func (p severalMeans) says(c *Call) string {
	lowest, highest := p.means[0], p.means[0]
	for _, m := range p.means {
		lowest, highest = math.Min(lowest, m), math.Max(highest, m)
	}
	return fmt.Sprintf("a difference among %d true means from %s to %s", len(p.means), FormatNumber(lowest), c.withUnit(FormatNumber(highest), SameUnit))
}

var (
	trueMeans      = means.as("means", "the true mean of each group: the smallest differences that matter")
	severalFinding = []FindingKind{noDifferenceKind, {"few-groups", "fewer than two groups"}}
)

var severalMeansSize = &Function{
	Name:        "several-means-size",
	Version:     2,
	Summary:     "how many values in each group an analysis of variance needs",
	Inputs:      inputs(trueMeans, expectedSD.as("sd", "the standard deviation expected within each group"), power, significance, designEffect, nonResponse),
	Results:     []Result{{"n", Whole, NoUnit, "how many values are needed in each group"}, resultPlanned, resultPower},
	Findings:    append([]FindingKind{lowPowerKind, tooManyKind}, severalFinding...),
	Assumptions: []string{"independent values, and groups independent of one another", "normal values with one variance in all groups"},
	Citations:   []string{"Johnson, Kotz & Balakrishnan 1995 (noncentral F)"},
	Example: Example{
		Label:     "three depots, means 0.4 sd apart, power 80%",
		Arguments: []Argument{{"means", []float64{0, 0.4, 0.8}}, {"sd", 1.0}, {"power", 0.8}},
		Want:      []Argument{{"n", 32}, {"attained-power", 0.8118639630199168368347887}},
		Tolerance: 1e-12,
		Source:    "arithmetic at 34 digits, testdata/references/plans/plans.csv",
	},
	compute: func(c *Call) error {
		p, err := c.severalMeans()
		if err != nil {
			return err
		}
		if err := c.powerAbove(); err != nil {
			return err
		}
		wanted := power.Of(c)
		start := (normalN(p.significance, wanted, above)+math.Sqrt(float64(2*len(p.means))))/p.spread() + 2
		n, err := c.planN("means", largestPlan, start, func(n int) bool { return reaches(p.power(float64(n)), wanted) },
			func(n int) string { return "power " + brief(p.power(float64(n))) })
		if err != nil {
			return err
		}
		c.setPower(nText(n)+" in each group", p.says(c), p.power(float64(n)))
		return nil
	},
}

var severalMeansPower = &Function{
	Name:        "several-means-power",
	Version:     2,
	Summary:     "the power that n values in each group give an analysis of variance",
	Inputs:      inputs(trueMeans, expectedSD.as("sd", "the standard deviation expected within each group"), plannedN.as("n", "how many are to be measured in each group"), significance, designEffect, nonResponse),
	Results:     []Result{resultPower},
	Findings:    append([]FindingKind{fewValuesKind, tooManyKind}, severalFinding...),
	Assumptions: severalMeansSize.Assumptions,
	Citations:   severalMeansSize.Citations,
	Example: Example{
		Label:     "four groups of 12, sd 0.9, significance 1%",
		Arguments: []Argument{{"means", []float64{2, 2.3, 2.5, 3}}, {"sd", 0.9}, {"n", 12}, {"significance", 0.01}},
		Want:      []Argument{{"attained-power", 0.3449777189497681446667230}},
		Tolerance: 1e-12,
		Source:    "arithmetic at 60 digits, testdata/references/numerics/anova_power.csv",
	},
	compute: func(c *Call) error {
		p, err := c.severalMeans()
		if err != nil {
			return err
		}
		n, err := c.counting("n", plannedN.Of(c))
		if err != nil {
			return err
		}
		c.setPowerOf(c.nCounting(n)+" in each group", p.says(c), p.power(float64(n)))
		return nil
	},
}
