package funcs

import (
	"fmt"
	"math"

	"halfwidth/funcs/internal/dist"
	"halfwidth/funcs/internal/num"
)

// limits are the limits of an interval; with a one-sided claim one is absent.
type limits struct {
	lower, upper       float64
	hasLower, hasUpper bool
}

// halfWidth is half the distance of two limits, or the distance of one limit
// from the estimate.
func (l limits) halfWidth(estimate float64) float64 {
	switch {
	case l.hasLower && l.hasUpper:
		return (l.upper - l.lower) / 2
	case l.hasLower:
		return math.Abs(estimate - l.lower)
	default:
		return math.Abs(l.upper - estimate)
	}
}

// oneTail is the share of a probability that each tail has: the whole of it for a
// one-sided claim, half of it for either.
func oneTail(probability float64, direction string) float64 {
	if direction == either {
		return probability / 2
	}
	return probability
}

// tail is the probability outside each limit that exists.
func tail(confidence float64, direction string) float64 { return oneTail(1-confidence, direction) }

// limitsOf gives the limits that the direction asks for. The functions give the
// limit that leaves the probability q outside, below and above.
func limitsOf(confidence float64, direction string, lower, upper func(q float64) float64) limits {
	q := tail(confidence, direction)
	var l limits
	if direction != below {
		l.lower, l.hasLower = lower(q), true
	}
	if direction != above {
		l.upper, l.hasUpper = upper(q), true
	}
	return l
}

// limitsAt gives those of two limits that the direction asks for.
func limitsAt(direction string, lower, upper float64) limits {
	return limits{lower, upper, direction != below, direction != above}
}

// symmetric gives the limits estimate ± quantile·se of a law symmetric about 0.
func symmetric(confidence float64, direction string, estimate, se float64, law dist.Distribution) limits {
	return limitsOf(confidence, direction,
		func(q float64) float64 { return estimate - float64(law.UpperQuantile(q)*se) },
		func(q float64) float64 { return estimate + float64(law.UpperQuantile(q)*se) })
}

// pValue is the probability of a statistic at least as far in the direction
// claimed; for either, twice the smaller tail, at most 1.
func pValue(direction string, statistic float64, law dist.Distribution) float64 {
	return tailP(direction, law.CDF(statistic), law.SF(statistic))
}

// tailP is pValue from both tails: the probability of a statistic at most, and at
// least, as large as the one found.
func tailP(direction string, atMost, atLeast float64) float64 {
	switch direction {
	case above:
		return atLeast
	case below:
		return atMost
	}
	return math.Min(1, 2*math.Min(atMost, atLeast))
}

// setLimits gives the limits as results under the names lower and upper.
func (c *Call) setLimits(l limits) {
	if l.hasLower {
		c.set("lower", l.lower)
	}
	if l.hasUpper {
		c.set("upper", l.upper)
	}
}

// summary is a sample reduced to what normal theory needs. Every function of a
// sample goes on from these three doubles, so that a sample and its summary
// give the same digits.
type summary struct {
	n        int
	mean, sd float64
}

// variance of the mean.
func (s summary) variance() float64 { return float64(s.sd*s.sd) / float64(s.n) }

// summarise reduces values without gaps; sd is 0 where there is one.
func summarise(values []float64) summary { return summaryFrom(num.Moments(values)) }

func summaryFrom(m num.Summary) summary {
	s := summary{n: m.N, mean: m.Mean}
	if m.N > 1 {
		s.sd = math.Sqrt(m.SumSquares / float64(m.N-1))
	}
	return s
}

// lessMean gives the values less their mean.
func lessMean(values []float64, m num.Summary) []float64 {
	out := make([]float64, len(values))
	for i, x := range values {
		out[i] = (x - m.Mean) - m.MeanLow
	}
	return out
}

// summaryOf reads a sample, or the summary given in its place. A sample of one
// value is refused.
func (c *Call) summaryOf(sample In[[]float64], mean, sd In[float64], n In[int]) (summary, error) {
	values, ok := sample.Given(c)
	if !ok {
		s := summary{n: n.Of(c), mean: mean.Of(c), sd: sd.Of(c)}
		c.count(s.n + c.used)
		return s, nil
	}
	s := c.summarise(c.gapless(values))
	c.count(s.n + c.used)
	if s.n < 2 {
		return s, tooFew(sample.Name, s.n, 2)
	}
	return s, nil
}

// enough refuses a sample of fewer values than the computation needs, or of values
// that are all equal.
func (c *Call) enough(input string, s summary, need int) error {
	switch {
	case s.n < need:
		return tooFew(input, s.n, need)
	case s.sd == 0:
		return c.noSpread(input)
	}
	return nil
}

// tooFew refuses a sample with fewer values than the computation needs.
func tooFew(input string, n, need int) error {
	return refuse("few-values", input, "The %s has %s, but at least %d are needed; measure more, or widen the condition.",
		input, plural(n, "value"), need)
}

// noSpread refuses an interval or test whose standard error is 0; input is the
// sample or the sd it comes from.
func (c *Call) noSpread(input string) error {
	cause := "All values of the " + input + " are equal"
	if in, _ := c.Function.Input(input); in.Kind != Sample && in.Kind != Samples {
		cause = "The " + input + " is 0"
	}
	return refuse("no-spread", input, "%s, so neither an interval nor a test exists; check whether the values were rounded or copied down.", cause)
}

// pairs reads the differences of two samples of equal length, or their summary.
// A pair of which one value is missing is left out and counted. The differences
// keep their order, with gaps; they are nil where a summary was given.
func (c *Call) pairs() (summary, []float64, error) {
	first, ok := sample.Given(c)
	if !ok {
		s, err := c.summaryOf(sample, meanGiven, sdGiven, nGiven)
		return s, nil, err
	}
	second := secondSample.Of(c)
	if err := c.sameLength(first, second); err != nil {
		return summary{}, nil, err
	}
	differences := make([]float64, len(first))
	for i := range first {
		differences[i] = first[i] - second[i] // NaN where one is missing
		if math.IsNaN(differences[i]) && (!math.IsNaN(first[i]) || !math.IsNaN(second[i])) {
			c.dropped++
		}
	}
	s := summarise(withoutGaps(differences))
	c.count(s.n)
	return s, differences, enoughPairs(s.n)
}

// sameLength refuses two samples that cannot pair value by value.
func (c *Call) sameLength(first, second []float64) error {
	if len(first) == len(second) {
		return nil
	}
	return c.wrong("second-sample", plural(len(second), "value"),
		fmt.Sprintf("must pair with sample (%s) value by value", plural(len(first), "value")),
		"give two columns of the same rows, or use difference-interval for separate groups")
}

// enoughPairs refuses fewer than two complete pairs.
func enoughPairs(n int) error {
	if n < 2 {
		return refuse("few-values", "sample", "%s, but at least 2 are needed; fill in the missing partners.", map[int]string{0: "No pair is complete", 1: "Only one pair is complete"}[n])
	}
	return nil
}

// correlation of the complete pairs of two lists; not where one has no spread.
func correlation(x, y []float64) (float64, bool) {
	var a, b []float64
	for i := range x {
		if !math.IsNaN(x[i]) && !math.IsNaN(y[i]) {
			a, b = append(a, x[i]), append(b, y[i])
		}
	}
	ma, mb := num.Moments(a), num.Moments(b)
	if ma.SumSquares == 0 || mb.SumSquares == 0 {
		return 0, false
	}
	r := num.SumProducts(lessMean(a, ma), lessMean(b, mb)) / (math.Sqrt(ma.SumSquares) * math.Sqrt(mb.SumSquares))
	return math.Max(-1, math.Min(1, r)), true
}
