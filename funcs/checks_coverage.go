package funcs

import (
	"fmt"
	"math"

	"halfwidth/funcs/internal/dist"
	"halfwidth/funcs/internal/num"
)

var (
	coverageResamples = resamplesInput.withDefault(20000)
	coverageN         = count("n", "the n to look at; the sample's own where it is left out", 2).optional()
	noEnoughKind      = FindingKind{"heavy-tail", "the variance or the mean does not exist, so that no n is enough"}
)

// coverageResults are the results that both functions of coverage give.
var coverageResults = []Result{
	{"coverage", Number, NoUnit, "the share of intervals that hold the true mean"},
	{"interval-below", Number, NoUnit, "the share that lies wholly below it"},
	{"interval-above", Number, NoUnit, "the share that lies wholly above it"},
	{"simulation-error", Number, NoUnit, "standard error of the coverage, from the number of resamples"},
}

// coverageDraws is what coverage simulates: samples of n values less a target, a
// value of which counts as cost draws.
type coverageDraws struct {
	n, cost int
	draw    func(*num.Stream, []float64)
	means   bool // whether the means are wanted too
}

// coverageTally counts where their t intervals about a target of 0 lie, and has
// the means, in the order drawn, where they are wanted.
type coverageTally struct {
	below, above, hits int // where the intervals lie
	resamples          int
	lowered            bool
	means              []float64
}

// coverage draws the samples.
func (c *Call) coverage(s coverageDraws) (coverageTally, error) {
	resamples, lowered, err := c.resamplesFor(coverageResamples, s.n, s.cost)
	if err != nil {
		return coverageTally{}, err
	}
	dir := direction.Of(c)
	q := dist.Student{DF: float64(s.n - 1)}.UpperQuantile(tail(confidence.Of(c), dir))
	places := make([]int8, resamples)
	out := coverageTally{resamples: resamples, lowered: lowered}
	if s.means {
		out.means = make([]float64, resamples)
	}
	err = resample(c.ctx, seedInput.Of(c), resamples, func() func(int, *num.Stream) {
		x := make([]float64, s.n)
		return func(i int, stream *num.Stream) {
			s.draw(stream, x)
			var mean float64
			places[i], mean = place(x, q, dir)
			if out.means != nil {
				out.means[i] = mean
			}
		}
	})
	for _, p := range places {
		switch {
		case p < 0:
			out.below++
		case p > 0:
			out.above++
		default:
			out.hits++
		}
	}
	return out, err
}

// place tells whether the t interval of x lies below 0 (-1), above it (1) or
// holds it (0), and gives its mean.
func place(x []float64, q float64, dir string) (at int8, mean float64) {
	n := float64(len(x))
	var sum float64
	for _, v := range x {
		sum += v
	}
	mean = sum / n
	var ss float64
	for _, v := range x {
		d := v - mean
		ss += float64(d * d)
	}
	reach := float64(q * math.Sqrt(ss/float64(n*(n-1))))
	switch {
	case dir != below && mean-reach > 0:
		return 1, mean
	case dir != above && mean+reach < 0:
		return -1, mean
	}
	return 0, mean
}

// setCoverage gives the shares of a simulation.
func (c *Call) setCoverage(s coverageTally, n int) {
	b := float64(s.resamples)
	share := (float64(s.hits) + 1) / (b + 2)
	c.set("coverage", float64(s.hits)/b)
	c.set("interval-below", float64(s.below)/b)
	c.set("interval-above", float64(s.above)/b)
	c.set("simulation-error", math.Sqrt(share*(1-share)/b))
	if s.lowered {
		c.sayLowered(coverageResamples, s.resamples, n, "the coverage has a simulation error of "+brief(c.results["simulation-error"].(float64)))
	}
}

// allowedByDefault is how far coverage may fall short in n-needed.
const allowedByDefault = 0.01

var coverageCheck = &Function{
	Name:    "coverage-check",
	Version: 1,
	Summary: "how often the t interval holds the true mean, at this n, for a population shaped like these data",
	Inputs:  inputs(sample, coverageN, coverageResamples, seedInput, confidence, direction, checks),
	Results: append(append([]Result{}, coverageResults...),
		Result{"predicted-coverage", Number, NoUnit, "the same from skewness and excess kurtosis (second order)"},
		Result{"n-needed", Whole, NoUnit, "the smallest n whose predicted coverage is at most 0.01 short; absent where there is none"}),
	Findings: []FindingKind{fewValuesKind, noSpreadKind, tooManyDrawsKind, fewerResamplesKind, heavyTailKind,
		{"coverage-short", "the coverage falls short of the confidence by more than 0.01 and three simulation errors"}},
	Assumptions: []string{"the sample shows the shape of its population: rare values that it lacks are not seen"},
	Citations:   []string{"Hall 1992", "Efron & Tibshirani 1993"},
	Example: Example{
		Label:     "two values, intervals from n = 2: half of the draws have no spread and miss",
		Arguments: []Argument{{"sample", []float64{1, 2, 1, 2}}, {"n", 2}, {"resamples", 20000}},
		Want:      []Argument{{"coverage", 0.5}},
		Tolerance: 0.03,
		Source:    "exact count: of the four pairs, the two unequal ones hold the mean (20,000 draws, error 0.0035)",
	},
	compute: func(c *Call) error {
		values := withoutGaps(sample.Of(c))
		s := summarise(values)
		c.count(s.n)
		switch {
		case s.n < 2:
			return tooFew("sample", s.n, 2)
		case s.sd == 0:
			return c.noSpread("sample")
		}
		n := s.n
		if given, ok := coverageN.Given(c); ok {
			n = given
		}
		m := num.Moments(values)
		centred := lessMean(values, m)
		sim, err := c.coverage(coverageDraws{n: n, cost: 1, draw: func(stream *num.Stream, x []float64) { stream.Resample(x, centred) }})
		if err != nil {
			return err
		}
		conf, dir := confidence.Of(c), direction.Of(c)
		c.setCoverage(sim, n)
		g1, g2 := skewness(m), excessKurtosis(m)
		predicted := func(n int) float64 { return predictedCoverage(float64(n), conf, dir, g1, g2) }
		c.set("predicted-coverage", predicted(n))
		needed, found, err := c.smallestPlan(smallestGroup, largestPlan, smallestGroup, func(n int) bool { return reaches(predicted(n), conf-allowedByDefault) })
		if err != nil {
			return err
		}
		if found {
			c.set("n-needed", needed)
		}
		share, errorOf := c.results["coverage"].(float64), c.results["simulation-error"].(float64)
		c.method = fmt.Sprintf("%d samples of %d drawn from the data with replacement, seed %d", sim.resamples, n, seedInput.Of(c))
		c.sentence = fmt.Sprintf("For data shaped like these, the %s t interval (direction %s) from n = %d holds the true mean in %s of cases (simulation error %s; predicted %s; %s).",
			percent(conf), dir, n, percent(share), brief(errorOf), percent(toDigits(predicted(n))), c.method)
		if short := conf - share; short > allowedByDefault && short > 3*errorOf {
			more := "measure more"
			if found && needed > n {
				more += fmt.Sprintf(" (about %d for this skewness)", needed)
			}
			c.caution("coverage-short", "sample", "The interval holds the true mean in only %s of cases instead of %s; %s, or use median-interval or bootstrap-interval.",
				percent(share), percent(conf), more)
		}
		if checks.Of(c) {
			c.checkTail("sample", "The sample", values)
		}
		return c.cancelled()
	},
}
