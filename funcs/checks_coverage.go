package funcs

import (
	"fmt"
	"math"
	"slices"

	"halfwidth/funcs/internal/dist"
	"halfwidth/funcs/internal/num"
)

var (
	coverageResamples = resamplesInput.withDefault(20000)
	coverageN         = count("n", "the n to look at; the sample's own where it is left out", 2).optional()
	noVarianceKind    = FindingKind{"heavy-tail", "the variance or the mean does not exist, so that no n is enough"}
)

// coverageSize is the n to look at: the sample's own, or the one asked for.
func (c *Call) coverageSize(own int) int {
	if n, ok := coverageN.Given(c); ok {
		return n
	}
	return own
}

// coverageResults are the results that both functions of coverage give.
var coverageResults = []Result{
	{"coverage", Number, NoUnit, "the share of intervals that hold the true mean"},
	{"interval-below", Number, NoUnit, "the share that lies wholly below it"},
	{"interval-above", Number, NoUnit, "the share that lies wholly above it"},
	{"simulation-error", Number, NoUnit, "standard error of the coverage, from the number of resamples"},
}

var (
	resultPredicted = Result{"predicted-coverage", Number, NoUnit, "the same from skewness and excess kurtosis (second order): rough where it is far from the confidence; absent where they do not exist"}
	resultNeeded    = Result{"n-needed", Whole, NoUnit, "the smallest n whose predicted coverage is at most 0.01 short; absent where there is none, or where the simulation shows more to be needed"}

	coverageShortKind = FindingKind{"coverage-short", "the coverage falls short of the confidence by more than 0.01 and three simulation errors"}
)

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

// roughFrom is how far from the confidence a second-order prediction is only rough.
const roughFrom = 0.05

// predictedShare words a predicted coverage: to 4 decimals of a share, or where it is
// rough to the nearest percent.
func predictedShare(coverage, confidence float64) string {
	if math.Abs(confidence-coverage) > roughFrom {
		return "roughly " + percent(math.Round(coverage*100)/100)
	}
	return percent(math.Round(coverage*1e4) / 1e4)
}

// allowedByDefault is how far coverage may fall short in n-needed.
const allowedByDefault = 0.01

// outlook is what skewness and excess kurtosis predict.
type outlook struct {
	coverage float64
	needed   int // 0 where not even largestPlan would do
}

// predict gives the outlook for n.
func (c *Call) predict(n int, g1, g2 float64) (outlook, error) {
	conf, dir := confidence.Of(c), direction.Of(c)
	predicted := func(n int) float64 { return predictedCoverage(float64(n), conf, dir, g1, g2) }
	needed, found, err := c.smallestPlan(largestPlan, 0, func(n int) bool { return reaches(predicted(n), conf-allowedByDefault) })
	if !found {
		needed = 0
	}
	return outlook{predicted(n), needed}, err
}

// simulatedShare words a share, in percent, to the second digit of its simulation
// error.
func (c *Call) simulatedShare() (share, simulationError string) {
	s, e := 100*c.results["coverage"].(float64), 100*c.results["simulation-error"].(float64)
	return toPlace(s, lastPlace(e, s)) + "%", toPlace(e, lastPlace(e, e))
}

// sayCoverage composes the sentence, and the caution where the coverage is short.
// o is nil where nothing can be predicted; enough then says why, or is empty.
func (c *Call) sayCoverage(input, of, target string, n int, o *outlook, enough string) {
	conf := confidence.Of(c)
	share, simulationError := c.simulatedShare()
	missing := conf - c.results["coverage"].(float64)
	short := missing > allowedByDefault && missing > 3*c.results["simulation-error"].(float64)
	predicted, advice := "", "no n is enough: use median-interval"
	if o != nil {
		c.set("predicted-coverage", o.coverage)
		predicted = "; predicted " + predictedShare(o.coverage, conf)
		advice = "do not rely on it, and use median-interval or bootstrap-interval"
		switch {
		case o.needed == 0:
			enough = fmt.Sprintf(" Not even %d values are predicted to bring it within 1 percentage point of %s.", largestPlan, percent(conf))
		case short && o.needed <= n:
			enough = " Skewness and excess kurtosis alone do not show how many would be enough."
			advice = "measure more, or use median-interval or bootstrap-interval"
		default:
			c.set("n-needed", o.needed)
			enough = fmt.Sprintf(" It is predicted to come within 1 percentage point of %s from n = %d on.", percent(conf), o.needed)
			advice = fmt.Sprintf("measure about %d, or use median-interval or bootstrap-interval", o.needed)
		}
	}
	c.sentence = fmt.Sprintf("For %s the %s t interval (direction %s) from n = %d holds %s in %s of cases (simulation error %s percentage points%s; %s).%s",
		of, percent(conf), direction.Of(c), n, target, share, simulationError, predicted, c.method, enough)
	if short {
		c.caution("coverage-short", input, "The interval holds %s in only %s of cases instead of %s; %s.",
			target, share, percent(conf), advice)
	}
}

var coverageCheck = &Function{
	Name:        "coverage-check",
	Version:     1,
	Summary:     "how often the t interval holds the true mean, at this n, for a population shaped like these data",
	Inputs:      inputs(sample, coverageN, coverageResamples, seedInput, confidence, direction, checks),
	Results:     slices.Concat(coverageResults, []Result{resultPredicted, resultNeeded}),
	Findings:    []FindingKind{fewValuesKind, noSpreadKind, tooManyDrawsKind, fewerResamplesKind, heavyTailKind, coverageShortKind},
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
		values := c.gapless(sample.Of(c))
		s := c.summarise(values)
		c.count(s.n)
		if err := c.enough("sample", s, 2); err != nil {
			return err
		}
		n := c.coverageSize(s.n)
		m := c.moments(values)
		centred := lessMean(values, m)
		sim, err := c.coverage(coverageDraws{n: n, cost: 1, draw: func(stream *num.Stream, x []float64) { stream.Resample(x, centred) }})
		if err != nil {
			return err
		}
		c.setCoverage(sim, n)
		o, err := c.predict(n, skewness(m), excessKurtosis(m))
		if err != nil {
			return err
		}
		c.method = fmt.Sprintf("%d samples of %d drawn from the data with replacement, seed %d", sim.resamples, n, seedInput.Of(c))
		seen, enough := &o, ""
		if checks.Of(c) && c.checkTail("sample", "The sample", values) {
			seen, enough = nil, " No n is enough if the tails are as heavy as they look."
		}
		c.sayCoverage("sample", "data shaped like these,", "the true mean", n, seen, enough)
		return c.cancelled()
	},
}
