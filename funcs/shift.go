package funcs

import (
	"fmt"
	"math"

	"halfwidth/funcs/internal/dist"
	"halfwidth/funcs/internal/num"
)

var shiftInterval = &Function{
	Name:    "shift-interval",
	Version: 1,
	Summary: "how far one group lies above another (first - second), by ranks, with its confidence interval, and a test",
	Inputs:  inputs(sample, secondSample, reference.withDefault(0), confidence, direction, checks),
	Results: []Result{
		{"shift", Number, SameUnit, "median of all differences between a value of the first sample and one of the second"},
		resultLower, resultUpper,
		{"attained-confidence", Number, NoUnit, "the confidence that the limits have, at least the one asked for"},
		{"u", Number, NoUnit, "how many pairs have first - reference above second, ties counting one half"},
		resultP,
	},
	Findings:    []FindingKind{fewValuesKind, neighboursKind, noSpreadKind},
	Assumptions: []string{"two independent samples of independent values", "for the limits: two populations of one shape, one shifted against the other"},
	Citations:   []string{"Hodges & Lehmann 1963", "Lehmann 1963", "Mann & Whitney 1947"},
	Example: Example{
		Label:     "minutes of assembly, old process against new",
		Arguments: assemblyMinutes,
		Want: []Argument{{"shift", 4.0}, {"lower", 0.0}, {"upper", 8.0}, {"attained-confidence", 80079.0 / 83980}, {"u", 74.5},
			{"p-value", 2399.0 / 41990}},
		Tolerance: 1e-12,
		Source:    "data of NIST/SEMATECH e-Handbook of Statistical Methods, 7.3.1; all 167960 rank orders counted",
	},
	compute: func(c *Call) error {
		x, y := num.Sorted(c.gapless(sample.Of(c))), num.Sorted(c.gapless(secondSample.Of(c)))
		n1, n2 := len(x), len(y)
		c.count(n1 + n2)
		if x[0] == x[n1-1] && y[0] == y[n2-1] {
			return c.noSpreadInTwo()
		}
		conf, dir, ref := confidence.Of(c), direction.Of(c), reference.Of(c)
		ranks, ties := shiftedRanks(x, y, ref)
		law := lawOfRanks(ranks, ties, n1)
		if err := c.cancelled(); err != nil {
			return err
		}
		k, beyond, err := c.shiftRank(n1, n2, law, len(ties) > 0)
		if err != nil {
			return err
		}
		pairs := n1 * n2
		shift := num.PairwiseDifference(x, y, (pairs+1)/2)
		if pairs%2 == 0 {
			shift = (shift + num.PairwiseDifference(x, y, pairs/2+1)) / 2
		}
		l := limitsOf(conf, dir,
			func(float64) float64 { return num.PairwiseDifference(x, y, k) },
			func(float64) float64 { return num.PairwiseDifference(x, y, pairs+1-k) })
		attained := 1 - beyond
		if dir == either {
			attained -= beyond
		}
		if err := c.cancelled(); err != nil {
			return err
		}
		u := num.Sum(ranks[:n1]) - float64(n1)*float64(n1+1)/2
		c.set("shift", shift)
		c.setLimits(l)
		c.set("attained-confidence", attained)
		name := "exact law of the rank sum"
		if pairs > dist.MaxRankPairs {
			name = "normal law of the rank sum, with correction for ties and continuity"
		}
		c.method = fmt.Sprintf("Hodges-Lehmann estimate with limits from the %s, attained confidence %s", name, percent(roundDown(attained)))
		c.say(statement{what: "shift (first - second)", estimate: shift, limits: l, unit: SameUnit,
			counts: fmt.Sprintf("n = %d and %d", n1, n2)})
		c.setTest(ref, SameUnit, "u", u, tailP(dir, law.atMost(u), law.atLeast(u)))
		if checks.Of(c) {
			c.among = 2
			c.checkNeighbours("sample", "The sample", sample.Of(c), n1)
			c.checkNeighbours("second-sample", "The second-sample", secondSample.Of(c), n2)
		}
		return nil
	},
}

// roundDown cuts a confidence to 4 decimals, so that it never says too much.
func roundDown(level float64) float64 { return math.Floor(float64(level*1e4)+1e-6) / 1e4 }

// rankLaw is a law of u where only chance separates the samples: P(U <= u) and
// P(U >= u) (Mann & Whitney 1947).
type rankLaw struct{ atMost, atLeast func(u float64) float64 }

// lawOfRanks is the exact law given the pooled ranks, of which the first n1
// belong to the first sample, for up to dist.MaxRankPairs pairs; beyond, the
// normal law with correction for ties and a continuity of one half.
func lawOfRanks(ranks []float64, ties []int, n1 int) rankLaw {
	if exact, ok := dist.NewRankSum(ranks, n1); ok {
		return rankLaw{exact.CDF, func(u float64) float64 { return exact.SF(u - 0.5) }}
	}
	n := float64(len(ranks))
	pairs := float64(n1) * float64(len(ranks)-n1)
	tied := 0.0
	for _, t := range ties {
		t := float64(t)
		tied += float64(t * (t - 1) * (t + 1))
	}
	centre, sd := pairs/2, math.Sqrt(pairs/12*(n+1-tied/(n*(n-1))))
	return rankLaw{
		func(u float64) float64 { return dist.Normal{}.CDF((u + 0.5 - centre) / sd) },
		func(u float64) float64 { return dist.Normal{}.SF((u - 0.5 - centre) / sd) },
	}
}

// shiftRank is the largest k with P(U <= k-1) at most the probability allowed
// beyond a limit, for untied values, and that probability: the k-th smallest and
// largest differences are the limits (Lehmann 1963). The law handed in serves
// where its values are not tied.
func (c *Call) shiftRank(n1, n2 int, law rankLaw, tied bool) (k int, beyond float64, err error) {
	if tied {
		ranks := make([]float64, n1+n2)
		for i := range ranks {
			ranks[i] = float64(i + 1)
		}
		law = lawOfRanks(ranks, nil, n1)
	}
	// 1 - 0.8 falls just short of 0.2: probabilities agree within 1e-12.
	allowed := tail(confidence.Of(c), direction.Of(c)) * (1 + 1e-12)
	if least := law.atMost(0); least > allowed {
		if direction.Of(c) == either {
			least *= 2
		}
		return 0, 0, refuse("few-values", "sample", "With %d and %d values no limits by ranks reach the confidence %s; at most %s is attainable. Measure more, or ask for less.",
			n1, n2, percent(confidence.Of(c)), percent(roundDown(1-least)))
	}
	low, high := 1, n1*n2
	for low < high {
		mid := low + (high-low+1)/2
		if law.atMost(float64(mid-1)) <= allowed {
			low = mid
		} else {
			high = mid - 1
		}
	}
	return low, law.atMost(float64(low - 1)), nil
}

// shiftedRanks are the pooled ranks of both samples, the first less the
// reference, and the sizes of the groups of ties.
func shiftedRanks(x, y []float64, reference float64) (ranks []float64, ties []int) {
	pooled := make([]float64, 0, len(x)+len(y))
	for _, v := range x {
		pooled = append(pooled, v-reference)
	}
	return num.Ranks(append(pooled, y...))
}
