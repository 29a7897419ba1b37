package funcs

import (
	"cmp"
	"fmt"
	"math"
	"slices"

	"halfwidth/funcs/internal/dist"
	"halfwidth/funcs/internal/num"
)

// The findings that functions of one sample raise by themselves.
var (
	fewValuesKind  = FindingKind{"few-values", "fewer than 5 values, or fewer than the computation needs"}
	skewedKind     = FindingKind{"skewed-for-n", "n is at most 25 times the squared skewness G1, and G1 differs from 0 at significance 0.01 over all samples of the call (from n = 8)"}
	neighboursKind = FindingKind{"neighbours-alike", "the lag-1 autocorrelation differs from that of independent values at significance 0.01 over all samples of the call (from n = 10)"}
	farValueKind   = FindingKind{"far-value", "the value farthest from the mean is an outlier at significance 0.01 over all samples of the call"}
	heavyTailKind  = FindingKind{"heavy-tail", "the upper limit of the tail index, 95% over all samples of the call, is below 2, so that the variance may not exist (from n = 150)"}
	noSpreadKind   = FindingKind{"no-spread", "all values are equal, or the sd given is 0"}
	spreadsKind    = FindingKind{"spreads-unlike", "with pooled variances, one sd is more than twice another and differs from it at significance 0.01 (of sds that are planned: twice)"}
)

// What functions of a sample raise, and those that need some spread in it.
var (
	oneSampleFindings = []FindingKind{fewValuesKind, skewedKind, neighboursKind, farValueKind, heavyTailKind}
	intervalFindings  = slices.Concat(oneSampleFindings, []FindingKind{noSpreadKind})
)

const (
	fewValues      = 5
	tailConfidence = 0.95
)

// checkSample raises the cautions of a sample, where it was given and checks
// are on, and the few-values caution of a summary.
func (c *Call) checkSample() error {
	v, ok := sample.Given(c)
	if !ok {
		if n, ok := nGiven.Given(c); ok && checks.Of(c) {
			c.checkFew("n", "The sample", n)
		}
		return nil
	}
	return c.checkValues("sample", v, c.summarise(c.gapless(v)))
}

// checkValues raises the cautions of an ordered list of values whose summary
// is s; input is the argument they came from.
func (c *Call) checkValues(input string, ordered []float64, s summary) error {
	return c.checkDerived(input, "The "+input, ordered, s)
}

// checkDerived is checkValues for numbers worked out from the input, one from
// each of its values, such as logarithms; what says what they are.
func (c *Call) checkDerived(input, what string, ordered []float64, s summary) error {
	if !checks.Of(c) {
		return nil
	}
	c.checkFew(input, what, s.n)
	if s.sd == 0 {
		return nil
	}
	values := c.gapless(ordered)
	c.checkSkewness(input, what, values)
	c.checkNeighbours(input, what, ordered, s.n)
	c.checkFar(input, what, 0, ordered, s)
	c.checkTail(input, what, values)
	return c.cancelled()
}

func (c *Call) checkFew(input, what string, n int) {
	if n < fewValues {
		c.caution("few-values", input, "%s has only %s: the interval rests wholly on the values being normal. Measure at least %d.",
			what, plural(n, "value"), fewValues)
	}
}

// checkOfAnyShape raises the cautions of a sample of n values for a method that
// asks for no shape.
func (c *Call) checkOfAnyShape(n int) {
	if !checks.Of(c) {
		return
	}
	if n < fewValues {
		c.caution("few-values", "sample", "The sample has only %s: so few show little of their population. Measure at least %d.", plural(n, "value"), fewValues)
	}
	c.checkNeighbours("sample", "The sample", sample.Of(c), n)
}

func (c *Call) checkSkewness(input, what string, values []float64) {
	g1, n := skewness(c.moments(values)), len(values)
	if skewedForN(g1, n, c.rare()) {
		need := cochranFactor * float64(g1*g1)
		c.caution("skewed-for-n", input, "%s is skewed (skewness %s): with n = %d the interval may miss more often than it says; "+
			"more than %.0f values are the rule for this skewness. Try coverage-check, or enough-n-for-mean.",
			what, brief(g1), n, math.Floor(need))
	}
}

// checkNeighbours looks at values in order, n of them without the gaps.
func (c *Call) checkNeighbours(input, what string, ordered []float64, n int) {
	if n < neighboursFrom || c.origin(input).Unordered {
		return
	}
	if r := c.facts(ordered).lag1(); neighboursAlike(r, n, c.rare()) {
		c.caution("neighbours-alike", input, "Neighbouring values of %s are not independent (lag-1 autocorrelation %s), so the interval is too %s. "+
			"Average over longer stretches, or see independence-check.", lowerFirst(what), brief(r), narrowOrWide(r))
	}
}

func narrowOrWide(r float64) string {
	if r > 0 {
		return "narrow"
	}
	return "wide"
}

// checkFar looks for one outlier (generalised ESD of one; Grubbs 1969) in a
// sample, which is group 0, or in one of the groups of an input.
func (c *Call) checkFar(input, what string, group int, ordered []float64, s summary) {
	if s.n < 3 {
		return
	}
	at := c.facts(ordered).far()
	far := math.Abs(ordered[at] - s.mean)
	if far/s.sd <= c.farCritical(s.n) {
		return
	}
	c.add(Finding{Code: "far-value", Severity: Caution, Input: input, Cells: c.address(input, group, at), Message: fmt.Sprintf(
		"Value %d of %s, %s, lies %s standard deviations from the mean. Check that it is right; keep it if it is, and see outlier-check.",
		at+1, lowerFirst(what), FormatNumber(ordered[at]), brief(far/s.sd))})
}

// farRule is what the critical value of checkFar rests on.
type farRule struct {
	n            int
	significance float64
}

// farCritical is the critical value of checkFar among n values; groups often are of
// one size, and it is worked out once for them.
func (c *Call) farCritical(n int) float64 {
	rule := farRule{n, c.rare()}
	critical, ok := c.critical[rule]
	if !ok {
		if c.critical == nil {
			c.critical = map[farRule]float64{}
		}
		critical = esdCritical(rule.n, rule.significance)
		c.critical[rule] = critical
	}
	return critical
}

// esdCritical is the critical value of max|x - mean|/sd among n normal values
// (Grubbs 1969; Rosner 1983).
func esdCritical(n int, significance float64) float64 {
	m := float64(n)
	t := dist.Student{DF: m - 2}.UpperQuantile(significance / (2 * m))
	return (m - 1) / math.Sqrt(m) * math.Sqrt(1/((m-2)/float64(t*t)+1))
}

// checkTail raises heavy-tail, and says whether it did.
func (c *Call) checkTail(input, what string, values []float64) bool {
	if len(values) < heavyTailFrom {
		return false
	}
	tail, ok := c.facts(values).hill()
	if c.among > 1 {
		tail = tail.within(1 - (1-tailConfidence)/float64(c.among))
	}
	heavy := ok && tail.upper < 2
	if heavy {
		c.caution("heavy-tail", input, "%s has tails so heavy (tail index %s, at most %s) that its variance may not exist: no n is enough for a t interval. "+
			"Use median-interval, and see tail-check.", what, brief(tail.index), brief(tail.upper))
	}
	return heavy
}

// tailIndex is Hill's estimate with its limits.
type tailIndex struct {
	k                   int
	index, lower, upper float64
}

// hillTail estimates the tail index of |x - median| from its k largest values,
// k = max(10, floor(√n)) (Hill 1975); not where the values are too alike.
func hillTail(values []float64, confidence float64) (tailIndex, bool) {
	n := len(values)
	k := max(10, int(math.Sqrt(float64(n))))
	far := num.Farthest(values, num.MedianIn(values), k+1)
	base := far[0]
	if base == 0 {
		return tailIndex{}, false
	}
	var sum float64
	for _, x := range far[1:] {
		sum += num.Log(x / base)
	}
	if sum <= 0 {
		return tailIndex{}, false
	}
	return tailIndex{k: k, index: float64(k) / sum}.within(confidence), true
}

// within gives the index its limits of that confidence.
func (h tailIndex) within(confidence float64) tailIndex {
	law, outside := dist.ChiSquare{DF: float64(2 * h.k)}, (1-confidence)/2
	h.lower = h.index * law.Quantile(outside) / float64(2*h.k)
	h.upper = h.index * law.UpperQuantile(outside) / float64(2*h.k)
	return h
}

// checkSpreads raises spreads-unlike for pooled variances.
func (c *Call) checkSpreads(input string, groups ...spreadOf) {
	if !checks.Of(c) || !spreadsUnlike(groups) {
		return
	}
	bySD := func(a, b spreadOf) int { return cmp.Compare(a.sd, b.sd) }
	smallest, largest := slices.MinFunc(groups, bySD), slices.MaxFunc(groups, bySD)
	c.caution("spreads-unlike", input, "The groups' standard deviations differ (%s to %s), so one pooled variance misleads. "+
		"Use separate variances, or see equal-spread-test.", brief(smallest.sd), brief(largest.sd))
}

// skewness is G1 (Joanes & Gill 1998); 0 where it does not exist.
func skewness(m num.Summary) float64 {
	n := float64(m.N)
	if m.N < 3 || m.SumSquares == 0 {
		return 0
	}
	variance := m.SumSquares / n
	g1 := m.Sum3 / n / variance / math.Sqrt(variance)
	return g1 * math.Sqrt(n*(n-1)) / (n - 2)
}

// excessKurtosis is G2 (Joanes & Gill 1998); 0 where it does not exist.
func excessKurtosis(m num.Summary) float64 {
	n := float64(m.N)
	if m.N < 4 || m.SumSquares == 0 {
		return 0
	}
	g2 := n*(m.Sum4/m.SumSquares)/m.SumSquares - 3
	return (n - 1) / ((n - 2) * (n - 3)) * (float64((n+1)*g2) + 6)
}
