package funcs

import (
	"cmp"
	"fmt"
	"math"
	"slices"

	"halfwidth/funcs/internal/num"
)

var checksFamily = []*Function{normalityCheck, outlierCheck, independenceCheck, tailCheck, coverageCheck, populationCoverage}

var mostOutliers = count("most-outliers", "the most outliers looked for; at most a fifth of the values, and 1 below 15 values", 1).
	within(Domain{Low: 1, High: 1000, Whole: true}).withDefault(10)

var outlierCheck = &Function{
	Name:    "outlier-check",
	Version: 2,
	Summary: "which values lie too far out to belong to one normal population (generalised ESD)",
	Inputs:  inputs(sample, mostOutliers, significance),
	Results: []Result{{"outliers", Whole, NoUnit, "how many values are outliers"}},
	Table: []Result{
		{"position", Whole, NoUnit, "which value it is, counting from 1, gaps counted too"},
		{"value", Number, SameUnit, "the value"},
		{"statistic", Number, NoUnit, "its distance from the mean of those not yet taken out, in their standard deviations"},
		{"critical-value", Number, NoUnit, "what the statistic must pass"},
	},
	Findings:    []FindingKind{fewValuesKind, noSpreadKind},
	Assumptions: []string{"independent values, normal but for the outliers"},
	Citations:   []string{"Rosner 1983 (generalised ESD)", "Grubbs 1969"},
	Example: Example{
		Label: "54 values, three of them outliers",
		Arguments: []Argument{{"sample", []float64{-0.25, 0.68, 0.94, 1.15, 1.20, 1.26, 1.26, 1.34, 1.38, 1.43, 1.49, 1.49, 1.55, 1.56, 1.58, 1.65, 1.69, 1.70,
			1.76, 1.77, 1.81, 1.91, 1.94, 1.96, 1.99, 2.06, 2.09, 2.10, 2.14, 2.15, 2.23, 2.24, 2.26, 2.35, 2.37, 2.40, 2.47, 2.54, 2.62, 2.64, 2.90,
			2.92, 2.92, 2.93, 3.21, 3.26, 3.30, 3.59, 3.68, 4.30, 4.64, 5.34, 5.42, 6.01}}},
		Want:      []Argument{{"outliers", 3}},
		Source:    "Rosner 1983; NIST/SEMATECH e-Handbook of Statistical Methods, 1.3.5.17.3",
		Tolerance: 1e-12,
	},
	compute: func(c *Call) error {
		given := sample.Of(c)
		s := c.summarise(c.gapless(given))
		c.count(s.n)
		if err := c.enough("sample", s, 3); err != nil {
			return err
		}
		if math.IsInf(s.sd, 1) || math.IsNaN(s.sd) {
			return &refusal{beyondDouble("sd")}
		}
		alpha := significance.Of(c)
		most := 1
		if s.n >= 15 {
			most = max(1, min(mostOutliers.Of(c), s.n/5))
		}
		outliers := 0
		rest := newPeeling(given, most)
		for j := 1; j <= most && c.cancelled() == nil; j++ {
			m := rest.summary()
			if m.sd == 0 {
				break
			}
			at, far := rest.takeFarthest(m.mean)
			statistic, critical := far/m.sd, esdCritical(m.n, alpha)
			if statistic > critical {
				outliers = j
			}
			c.rows = append(c.rows, Row{Values: map[string]any{"position": at + 1, "value": given[at], "statistic": statistic, "critical-value": critical}})
		}
		if err := c.cancelled(); err != nil {
			return err
		}
		c.rows = c.rows[:max(outliers, 1)] // the farthest value stands there in any case
		c.set("outliers", outliers)
		c.method = "generalised ESD, up to " + plural(most, "outlier")
		c.sayOutliers(outliers, s.n)
		return nil
	},
}

// sayOutliers composes the sentence from the rows.
func (c *Call) sayOutliers(outliers, n int) {
	alpha := percent(significance.Of(c))
	list := make([]string, len(c.rows))
	for i, row := range c.rows {
		list[i] = FormatNumber(row.Values["value"].(float64))
	}
	switch outliers {
	case 0:
		c.sentence = fmt.Sprintf("No value is an outlier at significance %s (%s; %s).", alpha, nText(n), c.method)
	case 1:
		c.sentence = fmt.Sprintf("At significance %s one value is an outlier: %s (%s; %s). Check whether it is right before leaving it out.",
			alpha, c.withUnit(list[0], SameUnit), nText(n), c.method)
	default:
		c.sentence = fmt.Sprintf("At significance %s %d values are outliers: %s (%s; %s). Check whether they are right before leaving them out.",
			alpha, outliers, c.withUnit(AndList(list), SameUnit), nText(n), c.method)
	}
}

// peeling takes the values farthest from the mean out of a sample, one by one. In
// sorted order they lie at one end or the other, so those left are the middle, which
// always stays, and what is left of both ends. Mean and sum of squares of these
// are put together by sums of positive terms alone: however far the values taken
// out lay, no digits are lost.
type peeling struct {
	values       []float64 // sorted
	positions    []int
	lower, upper []part // what is left of an end when so many are taken from it
	middle       part
	low, high    int // how many are taken from each end
}

// part is the mean and the sum of squares about it of n values.
type part struct {
	n             float64
	mean, squares num.Wide
}

// and is both parts together (Chan, Golub & LeVeque 1983).
func (p part) and(q part) part {
	if p.n == 0 || q.n == 0 {
		if p.n == 0 {
			return q
		}
		return p
	}
	n, d := p.n+q.n, q.mean.Sub(p.mean)
	return part{n, p.mean.Add(d.Times(q.n).Over(n)), p.squares.Add(q.squares).Add(d.Mul(d).Times(p.n).Over(n).Times(q.n))}
}

// newPeeling makes ready to take out at most so many values, not half of them.
func newPeeling(given []float64, most int) *peeling {
	p := &peeling{}
	for i, x := range given {
		if !math.IsNaN(x) {
			p.positions = append(p.positions, i)
		}
	}
	middle := num.MedianIn(withoutGaps(given))
	// Of equal values the first in the sample is to be the outermost.
	slices.SortFunc(p.positions, func(i, j int) int {
		order := cmp.Compare(given[i], given[j])
		if order == 0 && given[i] > middle {
			return j - i
		}
		return cmp.Or(order, i-j)
	})
	for _, i := range p.positions {
		p.values = append(p.values, given[i])
	}
	n := len(p.values)
	m := num.Moments(p.values[most : n-most])
	p.middle = part{float64(m.N), num.Wide{Hi: m.Mean, Lo: m.MeanLow}, num.Widen(m.SumSquares)}
	p.lower, p.upper = make([]part, most+1), make([]part, most+1)
	for i := most - 1; i >= 0; i-- {
		p.lower[i] = p.lower[i+1].and(part{n: 1, mean: num.Widen(p.values[i])})
		p.upper[i] = p.upper[i+1].and(part{n: 1, mean: num.Widen(p.values[n-1-i])})
	}
	return p
}

// summary is that of the values left.
func (p *peeling) summary() summary {
	all := p.middle.and(p.lower[p.low]).and(p.upper[p.high])
	return summary{int(all.n), all.mean.Float(), math.Sqrt(all.squares.Float() / (all.n - 1))}
}

// takeFarthest takes out the value farthest from the centre, the first of equals,
// and gives its position in the sample and its distance.
func (p *peeling) takeFarthest(centre float64) (position int, distance float64) {
	first, last := p.low, len(p.values)-1-p.high
	below, above := centre-p.values[first], p.values[last]-centre
	if above > below || above == below && p.positions[last] < p.positions[first] {
		p.high++
		return p.positions[last], above
	}
	p.low++
	return p.positions[first], below
}

// tailValues is how many values tail-check asks for.
const tailValues = 100

var tailCheck = &Function{
	Name:    "tail-check",
	Version: 1,
	Summary: "whether the tails are light enough for a mean and a variance to exist",
	Inputs:  inputs(sample, confidence),
	Results: []Result{
		{"tail-index", Number, NoUnit, "the probability beyond x falls like x to the minus this"},
		{"lower", Number, NoUnit, "lower limit of the tail index"},
		{"upper", Number, NoUnit, "upper limit of the tail index"},
		{"finite-mean", Text, NoUnit, "yes, no or unclear"},
		{"finite-variance", Text, NoUnit, "yes, no or unclear"},
	},
	Findings:    []FindingKind{{"few-values", "fewer than 100 values"}, noSpreadKind},
	Assumptions: []string{"independent values", "both tails alike, and like a power far out"},
	Citations:   []string{"Hill 1975, A simple general approach to inference about the tail of a distribution"},
	Example: Example{
		Label:     "exact quantiles of a tail of index 1.5, both sides",
		Arguments: []Argument{{"sample", paretoQuantiles(200, 1.5)}},
		Want:      []Argument{{"finite-variance", "unclear"}},
		Tolerance: 1e-12,
		Source:    "the law the values were made from",
	},
	compute: func(c *Call) error {
		values := c.gapless(sample.Of(c))
		if len(values) < tailValues {
			return tooFew("sample", len(values), tailValues)
		}
		h, ok := hillTail(values, confidence.Of(c))
		if !ok {
			return refuse("no-spread", "sample", "Too many values are equal to the median to see a tail; measure more finely, or more.")
		}
		c.set("tail-index", h.index)
		c.set("lower", h.lower)
		c.set("upper", h.upper)
		exists := func(moment float64) string {
			switch {
			case h.upper < moment:
				return "no"
			case h.lower > moment:
				return "yes"
			}
			return "unclear"
		}
		c.set("finite-mean", exists(1))
		c.set("finite-variance", exists(2))
		c.method = fmt.Sprintf("Hill's estimate from the %d values farthest from the median", h.k)
		c.sentence = fmt.Sprintf("The tail index is %s, %s interval %s to %s (%s; %s): finite mean %s, finite variance %s.", brief(h.index),
			percent(confidence.Of(c)), brief(h.lower), brief(h.upper), nText(len(values)), c.method, exists(1), exists(2))
		return nil
	},
}

// paretoQuantiles are n values symmetric about 0 whose sizes are the quantiles
// of a Pareto law at (i - ½)/(n/2), rounded to 3 decimals.
func paretoQuantiles(n int, index float64) []float64 {
	out := make([]float64, n)
	for i := range n / 2 {
		u := (float64(i) + 0.5) / float64(n/2)
		x := math.Round(num.Exp(-num.Log(1-u)/index)*1000) / 1000
		out[2*i], out[2*i+1] = x, -x
	}
	return out
}
