package funcs

import (
	"fmt"
	"math"

	"halfwidth/funcs/internal/dist"
	"halfwidth/funcs/internal/num"
)

var trimmedEachEnd = number("trimmed-each-end", "the share of the values left out at each end",
	Domain{Low: 0, High: 0.5, HighOpen: true}, NoUnit).withDefault(0.2)

// trim is a sample trimmed by g values at each end.
type trim struct {
	g, h       int     // left out at each end, and kept
	mean       float64 // of the h kept
	winsorised float64 // sum of squares of the winsorised sample about its mean
}

// trimmed trims sorted values by floor(share·n) at each end.
func trimmed(sorted []float64, share float64) trim {
	n := len(sorted)
	g := trimmedOf(n, share)
	kept := sorted[g : n-g]
	w := make([]float64, n)
	copy(w, sorted)
	for i := range g {
		w[i], w[n-1-i] = sorted[g], sorted[n-1-g]
	}
	return trim{g, n - 2*g, num.Mean(kept), num.Moments(w).SumSquares}
}

// trimmedOf is how many of n values a share leaves out at each end; 0.2 of 15
// is 3, whatever the last bit of the product.
func trimmedOf(n int, share float64) int { return int(floorWhole(float64(share * float64(n)))) }

var trimmedMeanInterval = &Function{
	Name:    "trimmed-mean-interval",
	Version: 1,
	Summary: "mean without the lowest and highest values, with its confidence interval",
	Inputs:  inputs(sample, trimmedEachEnd, confidence, direction, checks),
	Results: []Result{
		{"trimmed-mean", Number, SameUnit, "mean of the values kept"},
		resultLower, resultUpper,
		{"n", Whole, NoUnit, "how many values before trimming"},
		resultDF,
	},
	Findings:    []FindingKind{fewValuesKind, noSpreadKind, neighboursKind},
	Assumptions: []string{"independent values of one population", "the centre of the trimmed population is what is asked for"},
	Citations:   []string{"Tukey & McLaughlin 1963"},
	Example: Example{
		Label:     "ten values, two left out at each end",
		Arguments: []Argument{{"sample", []float64{2, 4, 6, 7, 8, 9, 10, 11, 13, 40}}},
		Want:      []Argument{{"trimmed-mean", 8.5}, {"df", 5.0}, {"lower", 5.440395632}, {"upper", 11.559604368}},
		Tolerance: 1e-7,
		Source:    "the defining formula by hand: winsorised sum of squares 42.5, over 6·5, t = 2.570581836 (JCGM 100 Table G.2)",
	},
	compute: func(c *Call) error {
		values := c.gapless(sample.Of(c))
		t := trimmed(num.Sorted(values), trimmedEachEnd.Of(c))
		c.count(len(values))
		if t.h < 2 {
			return refuse("few-values", "sample", "Only %s left after trimming %d at each end, but at least 2 are needed; measure more or trim less.",
				plural(t.h, "value"), t.g)
		}
		if t.winsorised == 0 {
			return refuse("no-spread", "sample", "The values kept are all equal, so there is neither a spread nor an interval; trim less.")
		}
		h := float64(t.h)
		law := dist.Student{DF: h - 1}
		l := symmetric(confidence.Of(c), direction.Of(c), t.mean, math.Sqrt(t.winsorised/float64(h*(h-1))), law)
		c.set("trimmed-mean", t.mean)
		c.setLimits(l)
		c.set("n", len(values))
		c.set("df", law.DF)
		c.method = fmt.Sprintf("trimmed t interval, %d values left out at each end, winsorised sum of squares, %s", t.g, degrees(law.DF))
		c.say(statement{"trimmed mean", t.mean, l, SameUnit, nText(len(values))})
		c.checkOfAnyShape(len(values))
		return nil
	},
}
