package funcs

import (
	"fmt"
	"math"

	"halfwidth/funcs/internal/dist"
	"halfwidth/funcs/internal/num"
)

var independenceCheck = &Function{
	Name:    "independence-check",
	Version: 1,
	Summary: "whether neighbouring values are independent, by runs about the median, and how many independent values they are worth",
	Inputs:  inputs(sample.as("sample", "the measured values in time order")),
	Results: []Result{
		{"lag-1-autocorrelation", Number, NoUnit, "correlation of each value with the next, gaps left out"},
		{"effective-n", Number, NoUnit, "how many independent values would tell as much: n(1-r)/(1+r), at most n"},
		{"runs", Whole, NoUnit, "unbroken stretches on one side of the median; a gap ends one"},
		{"p-value", Number, NoUnit, "two-sided p-value of the runs, were the order random"},
	},
	Findings: []FindingKind{fewValuesKind, noSpreadKind, neighboursKind,
		{"one-sided-median", "no value lies on one side of the median, so that there is no run to count"}},
	Assumptions: []string{"values in the order in which they arose"},
	Citations:   []string{"Swed & Eisenhart 1943", "Bartlett 1935"},
	Example: Example{
		Label:     "ten values that alternate about their median",
		Arguments: []Argument{{"sample", []float64{1, 6, 2, 7, 3, 8, 4, 9, 5, 10}}},
		Want:      []Argument{{"runs", 10}, {"p-value", 4.0 / 252}},
		Tolerance: 1e-13,
		Source:    "exact count (Swed & Eisenhart 1943): of the 252 orders of five on each side, 2 have ten runs; doubled",
	},
	compute: func(c *Call) error {
		ordered := sample.Of(c)
		values := c.gapless(ordered)
		s := c.summarise(values)
		c.count(s.n)
		if err := c.enough("sample", s, 3); err != nil {
			return err
		}
		r := c.facts(ordered).lag1()
		n := float64(s.n)
		effective := n
		if r > 0 {
			effective = n * (1 - r) / (1 + r)
		}
		c.set("lag-1-autocorrelation", r)
		c.set("effective-n", effective)
		segments := sides(ordered, num.Median(num.Sorted(values)))
		runs := countRuns(segments)
		if runs.above == 0 || runs.below == 0 {
			c.caution("one-sided-median", "sample", "All values that differ from the median lie on one side of it, so runs cannot be counted; measure more finely.")
			c.method = "lag-1 autocorrelation"
			c.sentence = fmt.Sprintf("The lag-1 autocorrelation is %s, worth %s independent values of %d (%s).", brief(r), brief(effective), s.n, c.method)
			return nil
		}
		p, how := runs.pValue()
		c.set("runs", runs.runs)
		c.set("p-value", p)
		c.method = "runs about the median, " + how
		c.sentence = fmt.Sprintf("The lag-1 autocorrelation is %s, worth %s independent values of %d; %d runs about the median, two-sided %s (%s).",
			brief(r), brief(effective), s.n, runs.runs, pText(p), c.method)
		if neighboursAlike(r, s.n, c.rare()) { // always: the function has no input `checks`
			c.caution("neighbours-alike", "sample", "Neighbouring values are not independent, so an interval that takes them for independent is too %s; "+
				"average over longer stretches, or count only effective-n values.", narrowOrWide(r))
		}
		return nil
	},
}

// sides gives, for each stretch of values without a gap, on which side of the
// centre each lies: above (true) or below. Values equal to the centre are left
// out, and their neighbours become neighbours.
func sides(ordered []float64, centre float64) [][]bool {
	var out [][]bool
	var stretch []bool
	for _, x := range ordered {
		switch {
		case math.IsNaN(x):
			out = append(out, stretch)
			stretch = nil
		case x != centre:
			stretch = append(stretch, x > centre)
		}
	}
	return append(out, stretch)
}

// runCount is the runs of a two-valued sequence in stretches.
type runCount struct {
	above, below, runs int
	lengths            []int // of the stretches that are not empty
}

func countRuns(stretches [][]bool) runCount {
	var r runCount
	for _, s := range stretches {
		if len(s) == 0 {
			continue
		}
		r.lengths = append(r.lengths, len(s))
		for i, up := range s {
			if i == 0 || up != s[i-1] {
				r.runs++
			}
			if up {
				r.above++
			} else {
				r.below++
			}
		}
	}
	return r
}

// exactRuns is how many values a side the exact law of runs over several
// stretches is worked out for.
const exactRuns = 50

// pValue is twice the smaller tail of the number of runs when every order is
// equally likely: exactly for one stretch, and for several up to 50 a side; else
// by the normal law with its exact mean and variance and a continuity correction
// of a half.
func (r runCount) pValue() (float64, string) {
	if len(r.lengths) == 1 {
		law := dist.Runs{First: r.above, Second: r.below}
		return tailP(either, law.CDF(r.runs), law.SF(r.runs-1)), "exact p-value"
	}
	if r.above <= exactRuns && r.below <= exactRuns {
		atMost, atLeast := r.exactTails()
		return tailP(either, atMost, atLeast), "exact p-value"
	}
	mean, sd := r.moments()
	atMost := dist.Normal{}.CDF((float64(r.runs) + 0.5 - mean) / sd)
	atLeast := dist.Normal{}.SF((float64(r.runs) - 0.5 - mean) / sd)
	return tailP(either, atMost, atLeast), "normal p-value with continuity correction"
}

// exactTails counts all orders by their number of runs, from left to right: at
// each place the state is how many lie above so far, the side of the last one,
// and the runs so far. A stretch begins a new run. The probabilities of the next
// side are those of drawing without replacement.
func (r runCount) exactTails() (atMost, atLeast float64) {
	n := r.above + r.below
	type state [2][][]float64 // by side of the last, 1 for above: [above so far][runs]
	newState := func() state {
		var s state
		for side := range s {
			s[side] = make([][]float64, r.above+1)
			for i := range s[side] {
				s[side][i] = make([]float64, n+1)
			}
		}
		return s
	}
	now, done := newState(), 0
	now[0][0][0] = 1
	take := func(begins bool) {
		next := newState()
		for last := range now {
			for up := range now[last] {
				for runs, p := range now[last][up] {
					if p == 0 {
						continue
					}
					for side, left := range []int{r.below - (done - up), r.above - up} {
						if left == 0 {
							continue
						}
						after := runs
						if begins || side != last {
							after++
						}
						next[side][up+side][after] += p * float64(left) / float64(n-done)
					}
				}
			}
		}
		now, done = next, done+1
	}
	for _, length := range r.lengths {
		for i := range length {
			take(i == 0)
		}
	}
	for last := range now {
		for runs, p := range now[last][r.above] {
			if runs <= r.runs {
				atMost += p
			}
			if runs >= r.runs {
				atLeast += p
			}
		}
	}
	return atMost, atLeast
}

// moments are the exact mean and standard deviation of the number of runs: one
// for each stretch and one for each of its changes of side.
func (r runCount) moments() (mean, sd float64) {
	a, b := float64(r.above), float64(r.below)
	n := a + b
	var pairs, triples float64 // neighbours, and neighbours of neighbours, within stretches
	for _, l := range r.lengths {
		pairs += float64(l - 1)
		triples += math.Max(0, float64(l-2))
	}
	change := 2 * a * b / (n * (n - 1))
	both := a * b / (n * (n - 1)) // two changes that share a value
	apart := 4 * a * b * (a - 1) * (b - 1) / (n * (n - 1) * (n - 2) * (n - 3))
	mean = float64(len(r.lengths)) + float64(pairs*change)
	expected := float64(pairs * change)
	variance := expected + float64(2*triples*both) + float64((pairs*(pairs-1)-2*triples)*apart) - float64(expected*expected)
	return mean, math.Sqrt(variance)
}
