package funcs

import (
	"fmt"
	"math"
	"strconv"

	"halfwidth/funcs/internal/dist"
)

// Every function that ends in -probability or -quantile is one law handed to
// probabilityOf or quantileOf.

// lawOf gives the law that a call's inputs describe, and its name with them,
// "the chi-square distribution with 5 degrees of freedom".
type lawOf func(c *Call) (dist.Distribution, string)

var (
	lowEnd  = number("from", "lower end; without it everything up to the upper end counts", anyNumber, NoUnit)
	highEnd = number("to", "upper end; without it everything from the lower end on counts", anyNumber, NoUnit)
	ends    = []OneOf{{{Needs: []string{"from"}, May: []string{"to"}}, {Needs: []string{"to"}}}}

	countedFrom = choice("counted-from", "below: probability is that of smaller values; above: that of larger values, so that a small "+
		"upper probability is given as itself", below, above)
)

// withEnds lists a law's parameters and the two ends, which have the unit u.
func withEnds(u Unit, parameters ...described) []Input {
	low, high := lowEnd, highEnd
	low.Unit, high.Unit = u, u
	return append(inputs(parameters...), low.Input, high.Input)
}

var probabilityResults = []Result{
	{"probability", Number, NoUnit, "probability of a value from the lower end to the upper end"},
	{"probability-outside", Number, NoUnit, "probability of a value outside; right also where it is tiny"},
}

func quantileResults(u Unit) []Result {
	return []Result{{"value", Number, u, "the value that has the probability on the side counted from"}}
}

// probabilityOf computes P(from <= X <= to) and its complement, each from the
// nearer tail: no small probability is formed as 1 minus a large one.
func probabilityOf(law lawOf) func(*Call) error {
	return func(c *Call) error {
		x, words := law(c)
		a, hasLow := lowEnd.Given(c)
		b, hasHigh := highEnd.Given(c)
		from, _ := c.Function.Input("from")
		u := from.Unit
		var inside, outside float64
		var where string
		switch {
		case hasLow && hasHigh && a > b:
			return c.wrong("from", FormatNumber(a), "must not be greater than to ("+FormatNumber(b)+")", "exchange the two")
		case hasLow && hasHigh:
			inside, outside = x.Between(a, b), x.CDF(a)+x.SF(b)
			where = "from " + FormatNumber(a) + " to " + c.withUnit(FormatNumber(b), u)
		case hasLow:
			inside, outside = x.SF(a), x.CDF(a)
			where = "from " + c.withUnit(FormatNumber(a), u) + " upward"
		default:
			inside, outside = x.CDF(b), x.SF(b)
			where = "of at most " + c.withUnit(FormatNumber(b), u)
		}
		inside, outside = math.Min(inside, 1), math.Min(outside, 1)
		c.set("probability", inside)
		c.set("probability-outside", outside)
		c.method = "tails of " + words
		c.sentence = fmt.Sprintf("Under %s, a value %s has probability %s, any other value %s.",
			words, where, chanceText(inside, outside), chanceText(outside, inside))
		return nil
	}
}

// quantileOf computes the value with the given probability on the side that it
// is counted from.
func quantileOf(law lawOf) func(*Call) error {
	return func(c *Call) error {
		x, words := law(c)
		p := probability.Of(c)
		value, relation := 0.0, "at most"
		if countedFrom.Of(c) == above {
			value, relation = x.UpperQuantile(p), "more than"
		} else {
			value = x.Quantile(p)
		}
		c.set("value", value)
		c.method = "quantile of " + words
		scale := value
		if n, ok := x.(normalLaw); ok {
			scale = n.sd
		}
		result, _ := c.Function.Result("value")
		c.sentence = fmt.Sprintf("Under %s, a value is %s %s with probability %s.",
			words, relation, c.withUnit(toPlace(value, lastPlace(scale, value)-3), result.Unit), chanceText(p, 1-p))
		return nil
	}
}

// chanceText words a probability whose complement is known too: four digits, or
// "1 - 3.2e-07" where four digits would read as 1.
func chanceText(p, complement float64) string {
	if p < 0.9995 || complement == 0 {
		return brief(p)
	}
	return "1 - " + strconv.FormatFloat(complement, 'g', 2, 64)
}

var lawDF = degreesOfFreedom("df", "degrees of freedom", false)

func studentLaw(c *Call) (dist.Distribution, string) {
	df := lawDF.Of(c)
	return dist.Student{DF: df}, "Student's t distribution with " + degrees(df)
}

func chiSquareLaw(c *Call) (dist.Distribution, string) {
	df := lawDF.Of(c)
	return dist.ChiSquare{DF: df}, "the chi-square distribution with " + degrees(df)
}

var (
	firstDF  = degreesOfFreedom("first-df", "degrees of freedom of the numerator", false)
	secondDF = degreesOfFreedom("second-df", "degrees of freedom of the denominator", true)
)

func fLaw(c *Call) (dist.Distribution, string) {
	d1, d2 := firstDF.Of(c), secondDF.Of(c)
	return dist.F{DF1: d1, DF2: d2}, fmt.Sprintf("the F distribution with %s and %s", dfText(d1), degrees(d2))
}

var tDF = degreesOfFreedom("df", "degrees of freedom; infinite is the normal distribution", true)

var tProbability = &Function{
	Name:      "t-probability",
	Version:   1,
	Summary:   "probability that a value of Student's t distribution lies between two values, or beyond one",
	Inputs:    withEnds(NoUnit, tDF),
	OneOf:     ends,
	Results:   probabilityResults,
	Citations: []string{"Student 1908", "JCGM 100 Table G.2"},
	Example: Example{
		Label:     "within 2.228 of 0, 10 degrees of freedom",
		Arguments: []Argument{{"df", 10.0}, {"from", -2.228}, {"to", 2.228}},
		Want:      []Argument{{"probability", 0.95}},
		Tolerance: 1e-4,
		Source:    "NIST/SEMATECH e-Handbook of Statistical Methods, 1.3.6.7.2",
	},
	compute: probabilityOf(studentLaw),
}

var tQuantile = &Function{
	Name:      "t-quantile",
	Version:   1,
	Summary:   "value of Student's t distribution with a given probability below or above it",
	Inputs:    inputs(tDF, probability, countedFrom),
	Results:   quantileResults(NoUnit),
	Citations: []string{"Student 1908", "JCGM 100 Table G.2"},
	Example: Example{
		Label:     "upper 2.5% point, 10 degrees of freedom",
		Arguments: []Argument{{"df", 10.0}, {"probability", 0.025}, {"counted-from", above}},
		Want:      []Argument{{"value", 2.228}},
		Tolerance: 2e-4,
		Source:    "NIST/SEMATECH e-Handbook of Statistical Methods, 1.3.6.7.2",
	},
	compute: quantileOf(studentLaw),
}

var chiSquareProbability = &Function{
	Name:      "chi-square-probability",
	Version:   1,
	Summary:   "probability that a value of the chi-square distribution lies between two values, or beyond one",
	Inputs:    withEnds(NoUnit, lawDF),
	OneOf:     ends,
	Results:   probabilityResults,
	Citations: []string{"ISO 3534-1"},
	Example: Example{
		Label:     "beyond 16.919, 9 degrees of freedom",
		Arguments: []Argument{{"df", 9.0}, {"from", 16.919}},
		Want:      []Argument{{"probability", 0.05}},
		Tolerance: 1e-4,
		Source:    "NIST/SEMATECH e-Handbook of Statistical Methods, 1.3.6.7.4",
	},
	compute: probabilityOf(chiSquareLaw),
}

var chiSquareQuantile = &Function{
	Name:      "chi-square-quantile",
	Version:   1,
	Summary:   "value of the chi-square distribution with a given probability below or above it",
	Inputs:    inputs(lawDF, probability, countedFrom),
	Results:   quantileResults(NoUnit),
	Citations: []string{"ISO 3534-1"},
	Example: Example{
		Label:     "upper 5% point, 9 degrees of freedom",
		Arguments: []Argument{{"df", 9.0}, {"probability", 0.05}, {"counted-from", above}},
		Want:      []Argument{{"value", 16.919}},
		Tolerance: 1e-4,
		Source:    "NIST/SEMATECH e-Handbook of Statistical Methods, 1.3.6.7.4",
	},
	compute: quantileOf(chiSquareLaw),
}

var fProbability = &Function{
	Name:      "f-probability",
	Version:   2,
	Summary:   "probability that a value of the F distribution lies between two values, or beyond one",
	Inputs:    withEnds(NoUnit, firstDF, secondDF),
	OneOf:     ends,
	Results:   probabilityResults,
	Citations: []string{"ISO 3534-1"},
	Example: Example{
		Label:     "beyond 1.9856, 9 and 90 degrees of freedom",
		Arguments: []Argument{{"first-df", 9.0}, {"second-df", 90.0}, {"from", 1.9856}},
		Want:      []Argument{{"probability", 0.05}},
		Tolerance: 2e-3,
		Source:    "NIST/SEMATECH e-Handbook of Statistical Methods, 1.3.5.4",
	},
	compute: probabilityOf(fLaw),
}

var fQuantile = &Function{
	Name:      "f-quantile",
	Version:   2,
	Summary:   "value of the F distribution with a given probability below or above it",
	Inputs:    inputs(firstDF, secondDF, probability, countedFrom),
	Results:   quantileResults(NoUnit),
	Citations: []string{"ISO 3534-1"},
	Example: Example{
		Label:     "upper 5% point, 9 and 90 degrees of freedom",
		Arguments: []Argument{{"first-df", 9.0}, {"second-df", 90.0}, {"probability", 0.05}, {"counted-from", above}},
		Want:      []Argument{{"value", 1.9856}},
		Tolerance: 3e-5,
		Source:    "NIST/SEMATECH e-Handbook of Statistical Methods, 1.3.5.4",
	},
	compute: quantileOf(fLaw),
}
