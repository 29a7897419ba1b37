package funcs

import "math"

// In is an input together with the Go type of its value, so that a compute
// function reads it as a typed value: confidence.Of(call) is a float64.
type In[T any] struct{ Input }

// Of gives the value of the input; the zero value where it was not given.
func (in In[T]) Of(c *Call) T {
	v, _ := in.Given(c)
	return v
}

// Given gives the value of the input and whether there is one, by the call or
// by default.
func (in In[T]) Given(c *Call) (T, bool) {
	v, ok := c.args[in.Name].Value.(T)
	return v, ok
}

func (in In[T]) describe() Input { return in.Input }

// as is the same input under another name and summary.
func (in In[T]) as(name, summary string) In[T] {
	in.Name, in.Summary = name, summary
	return in
}

// optional is the same input, which may be absent.
func (in In[T]) optional() In[T] {
	in.Optional = true
	return in
}

// withDefault is the same input with a default.
func (in In[T]) withDefault(v T) In[T] {
	in.Default = v
	return in
}

// within is the same input with another domain.
func (in In[T]) within(d Domain) In[T] {
	in.Domain = d
	return in
}

// atMost is the same input with no more than so many numbers, or groups, and what
// to do where there are more.
func (in In[T]) atMost(most int, instead string) In[T] {
	in.Most, in.Instead = most, instead
	return in
}

// described is a typed input of whatever type.
type described interface{ describe() Input }

// inputs lists descriptors of typed inputs in catalogue order.
func inputs(list ...described) []Input {
	out := make([]Input, len(list))
	for i, in := range list {
		out[i] = in.describe()
	}
	return out
}

func number(name, summary string, d Domain, u Unit) In[float64] {
	return In[float64]{Input{Name: name, Kind: Number, Domain: d, Unit: u, Summary: summary}}
}

func level(name, summary string) In[float64] {
	return In[float64]{Input{Name: name, Kind: Level, Domain: betweenZeroAndOne, Summary: summary}}
}

func count(name, summary string, lowest int) In[int] {
	return In[int]{Input{Name: name, Kind: Count, Domain: wholeFrom(lowest), Summary: summary}}
}

func choice(name, summary string, choices ...string) In[string] {
	return In[string]{Input{Name: name, Kind: Choice, Choices: choices, Default: choices[0], Summary: summary}}
}

func numbers(name, summary string, d Domain, u Unit) In[List] {
	return In[List]{Input{Name: name, Kind: Numbers, Domain: d, Unit: u, Summary: summary}}
}

func values(name, summary string) In[[]float64] {
	return In[[]float64]{Input{Name: name, Kind: Sample, Domain: anyNumber, Unit: SameUnit, Summary: summary, MayBeGaps: true}}
}

// wholeFrom is the domain of whole numbers from lowest upward.
func wholeFrom(lowest int) Domain {
	return Domain{Low: float64(lowest), High: largestCount, Whole: true}
}

// largestCount is 2^53, past which a double no longer tells whole numbers apart,
// or all that an int holds.
const largestCount = min(1<<53, math.MaxInt)

// So many groups, items and tests are worked out within a second.
const (
	mostGroups = 10_000
	mostItems  = 100_000

	fewerGroups = "join groups that belong together, or ask about some of them"
	fewerItems  = "join small items into larger ones"
)

// Inputs that several functions share: one name, default and wording for each.
var (
	sample       = values("sample", "the measured values, in the order measured")
	secondSample = values("second-sample", "the second group of measured values")
	samples      = In[[]Group]{Input{Name: "samples", Kind: Samples, Domain: anyNumber, Unit: SameUnit, MayBeGaps: true,
		Summary: "the measured values of each group, by name"}}.atMost(mostGroups, fewerGroups)

	meanGiven = number("mean", "the mean, where it stands for the sample", anyNumber, SameUnit)
	sdGiven   = number("sd", "the standard deviation (divisor n - 1), where it stands for the sample", nonNegative, SameUnit)
	nGiven    = count("n", "how many values, where it stands for the sample", 2)

	firstMean  = number("first-mean", "mean of the first group", anyNumber, SameUnit)
	firstSD    = number("first-sd", "standard deviation (divisor n - 1) of the first group", nonNegative, SameUnit)
	firstN     = count("first-n", "how many values in the first group", 2)
	secondMean = number("second-mean", "mean of the second group", anyNumber, SameUnit)
	secondSD   = number("second-sd", "standard deviation (divisor n - 1) of the second group", nonNegative, SameUnit)
	secondN    = count("second-n", "how many values in the second group", 2)

	means = numbers("means", "the mean of each group", anyNumber, SameUnit).atMost(mostGroups, fewerGroups)
	sds   = numbers("sds", "the standard deviation (divisor n - 1) of each group", nonNegative, SameUnit).atMost(mostGroups, fewerGroups)
	ns    = In[List]{Input{Name: "ns", Kind: Numbers, Domain: wholeFrom(1), Summary: "how many values in each group"}}.atMost(mostGroups, fewerGroups)

	confidence   = level("confidence", "the confidence of the interval").withDefault(0.95)
	significance = level("significance", "the significance of the test").withDefault(0.05)
	power        = level("power", "the chance wanted of finding the difference").withDefault(0.9)
	probability  = In[float64]{Input{Name: "probability", Kind: Number, Domain: betweenZeroAndOne, Summary: "the probability, strictly between 0 and 1"}}

	direction = choice("direction",
		"either: both limits; above: claims more than the reference, lower limit only; below: claims less, upper limit only",
		either, above, below)
	checks = In[bool]{Input{Name: "checks", Kind: YesNo, Default: true,
		Summary: "whether to look for what could make the answer untrustworthy"}}

	populationSize = count("population-size", "how many there are in all, where the sample is a sizeable part of them", 1).optional()
	reference      = number("reference", "the value to compare with", anyNumber, SameUnit).optional()
	variances      = choice("variances", "separate: each group has its own variance; pooled: one variance for all", separate, pooled)

	designEffect = number("design-effect", "variance under the sampling design over that of simple random sampling", positive, NoUnit).withDefault(1)
	nonResponse  = number("non-response", "the share of planned measurements that will be lost", Domain{Low: 0, High: 1, HighOpen: true}, NoUnit).withDefault(0)
	allocation   = number("allocation-ratio", "size of the second group over that of the first", positive, NoUnit).withDefault(1)
	halfWidth    = number("half-width", "the half-width wanted", positive, SameUnit)
)

// degreesOfFreedom is an input for df, which may be infinite where the
// function says so.
func degreesOfFreedom(name, summary string, infinite bool) In[float64] {
	in := number(name, summary, positive, NoUnit)
	in.Infinite = infinite
	return in
}

// The words of the shared choices.
const (
	either = "either"
	above  = "above"
	below  = "below"

	separate = "separate"
	pooled   = "pooled"
)

// Infinite is how the degrees of freedom of a known variance are written.
const Infinite = "infinite"

func isInfinite(df float64) bool { return math.IsInf(df, 1) }
