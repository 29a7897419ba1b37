package funcs

import (
	"fmt"
	"math"

	"halfwidth/funcs/internal/dist"
	"halfwidth/funcs/internal/num"
)

var normalFamily = []*Function{
	normalProbability, normalQuantile, standardScore, normalTransform, normalSum, lognormalProduct,
	tProbability, tQuantile, chiSquareProbability, chiSquareQuantile, fProbability, fQuantile,
	noncentralTProbability, noncentralChiSquareProbability, noncentralFProbability,
	studentizedRangeProbability, studentizedRangeQuantile,
}

var (
	lawMean = number("mean", "mean of the distribution", anyNumber, SameUnit)
	lawSD   = number("sd", "standard deviation of the distribution", positive, SameUnit)
)

// normalLaw is the normal law with any mean and sd (> 0). Arguments are
// standardised to twice a double's length, so that a mean far from 0 costs no
// digit that the arguments have.
type normalLaw struct{ mean, sd float64 }

// standardised is (x - mean)/sd.
func (l normalLaw) standardised(x float64) num.Wide {
	d := num.TwoSum(x, -l.mean)
	if math.IsInf(d.Hi, 0) && !math.IsInf(x, 0) { // the difference alone passes the largest double
		return num.Widen((x/2 - l.mean/2) / l.sd * 2)
	}
	return d.Over(l.sd)
}

// upperTail is P(Z > z): the tail at the nearer double, and the density for
// what is left of z.
func upperTail(z num.Wide) float64 {
	tail := dist.Normal{}.SF(z.Hi)
	if z.Lo == 0 {
		return tail
	}
	return tail - float64(z.Lo*dist.Normal{}.Density(z.Hi))
}

// SF is P(X > x).
func (l normalLaw) SF(x float64) float64 { return upperTail(l.standardised(x)) }

// CDF is P(X <= x).
func (l normalLaw) CDF(x float64) float64 { return upperTail(l.standardised(x).Neg()) }

// Between is P(a <= X <= b): over a narrow interval an integral of the density,
// over a wide one the difference of the nearer tails.
func (l normalLaw) Between(a, b float64) float64 {
	if !(a < b) {
		return 0
	}
	za, zb := l.standardised(a), l.standardised(b)
	width := num.TwoSum(b, -a).Over(l.sd).Float()
	if width*math.Max(1, math.Max(math.Abs(za.Hi), math.Abs(zb.Hi))) < 1 {
		return narrow(za, zb, width)
	}
	switch {
	case za.Hi > 0:
		return upperTail(za) - upperTail(zb)
	case zb.Hi < 0:
		return upperTail(zb.Neg()) - upperTail(za.Neg())
	default:
		return 1 - (upperTail(za.Neg()) + upperTail(zb))
	}
}

// narrow is P(za <= Z <= zb), width = zb - za: the density at the end nearer to 0
// times the integral of its course from there, exp(-s·(z + s/2)).
func narrow(za, zb num.Wide, width float64) float64 {
	z := za
	if math.Abs(za.Hi) > math.Abs(zb.Hi) {
		z = zb.Neg()
	}
	density := float64(dist.Normal{}.Density(z.Hi) * (1 - float64(z.Hi*z.Lo)))
	return float64(density * num.Legendre(func(s float64) float64 {
		return num.Exp(-float64(s * (z.Hi + s/2)))
	}, 0, width))
}

// Quantile is x with P(X <= x) = p.
func (l normalLaw) Quantile(p float64) float64 {
	return math.FMA(l.sd, dist.Normal{}.Quantile(p), l.mean)
}

// UpperQuantile is x with P(X > x) = q.
func (l normalLaw) UpperQuantile(q float64) float64 {
	return math.FMA(l.sd, dist.Normal{}.UpperQuantile(q), l.mean)
}

func (c *Call) normalLaw() (dist.Distribution, string) {
	law := normalLaw{lawMean.Of(c), lawSD.Of(c)}
	if law == (normalLaw{0, 1}) {
		return law, "the standard normal distribution"
	}
	return law, fmt.Sprintf("the normal distribution with mean %s and standard deviation %s",
		c.withUnit(FormatNumber(law.mean), SameUnit), c.withUnit(FormatNumber(law.sd), SameUnit))
}

var normalProbability = &Function{
	Name:        "normal-probability",
	Version:     1,
	Summary:     "probability that a normal quantity lies between two values, or beyond one",
	Inputs:      withEnds(SameUnit, lawMean.withDefault(0), lawSD.withDefault(1)),
	OneOf:       ends,
	Results:     probabilityResults,
	Assumptions: []string{"a normal quantity whose mean and standard deviation are known"},
	Citations:   []string{"ISO 3534-1"},
	Example: Example{
		Label:     "area from 0 to 1.96",
		Arguments: []Argument{{"from", 0.0}, {"to", 1.96}},
		Want:      []Argument{{"probability", 0.47500}},
		Tolerance: 1e-5,
		Source:    "NIST/SEMATECH e-Handbook of Statistical Methods, 1.3.6.7.1",
	},
	compute: probabilityOf((*Call).normalLaw),
}

var normalQuantile = &Function{
	Name:        "normal-quantile",
	Version:     1,
	Summary:     "value that a normal quantity stays below, or passes, with a given probability",
	Inputs:      inputs(lawMean.withDefault(0), lawSD.withDefault(1), probability, countedFrom),
	Results:     quantileResults(SameUnit),
	Assumptions: []string{"a normal quantity whose mean and standard deviation are known"},
	Citations:   []string{"ISO 3534-1"},
	Example: Example{
		Label:     "coverage factor for 95%",
		Arguments: []Argument{{"probability", 0.025}, {"counted-from", above}},
		Want:      []Argument{{"value", 1.960}},
		Tolerance: 2e-4,
		Source:    "JCGM 100:2008, Table G.1",
	},
	compute: quantileOf((*Call).normalLaw),
}

var scored = number("value", "the value whose place is asked for", anyNumber, SameUnit)

var standardScore = &Function{
	Name:    "standard-score",
	Version: 1,
	Summary: "how many standard deviations a value lies from the mean, and the probability on either side of it",
	Inputs:  inputs(scored, lawMean, lawSD),
	Results: []Result{
		{"score", Number, NoUnit, "(value - mean)/sd"},
		{"probability-below", Number, NoUnit, "probability of a smaller value"},
		{"probability-above", Number, NoUnit, "probability of a larger value"},
	},
	Assumptions: []string{"a normal quantity whose mean and standard deviation are known, for the probabilities; none for score"},
	Citations:   []string{"ISO 3534-1"},
	Example: Example{
		Label:     "3 standard deviations above the mean",
		Arguments: []Argument{{"value", 3.0}, {"mean", 0.0}, {"sd", 1.0}},
		Want:      []Argument{{"score", 3.0}, {"probability-below", 0.99865}},
		Tolerance: 1e-5,
		Source:    "NIST/SEMATECH e-Handbook of Statistical Methods, 1.3.6.7.1 (0.5 + 0.49865)",
	},
	compute: func(c *Call) error {
		law := normalLaw{lawMean.Of(c), lawSD.Of(c)}
		value := scored.Of(c)
		z := law.standardised(value)
		lower, upper := law.CDF(value), law.SF(value)
		c.set("score", z.Float())
		c.set("probability-below", lower)
		c.set("probability-above", upper)
		c.method = "(value - mean)/sd; tails of the normal distribution"
		c.sentence = fmt.Sprintf("%s lies %s the mean of %s (standard deviation %s); a smaller value has probability %s, a larger one %s (%s).",
			c.withUnit(FormatNumber(value), SameUnit), scoreText(z.Float()), c.withUnit(FormatNumber(law.mean), SameUnit),
			c.withUnit(FormatNumber(law.sd), SameUnit), chanceText(lower, upper), chanceText(upper, lower), c.method)
		return nil
	},
}

// scoreText words a standard score: "2 standard deviations below", "at".
func scoreText(z float64) string {
	side := "above"
	switch {
	case z == 0:
		return "at"
	case z < 0:
		z, side = -z, "below"
	}
	if z == 1 {
		return "1 standard deviation " + side
	}
	return brief(z) + " standard deviations " + side
}

var (
	multiply = number("multiply", "what each value is multiplied by", anyNumber, NoUnit).withDefault(1)
	addend   = number("add", "what is added to each value then", anyNumber, SameUnit).withDefault(0)
)

var normalTransform = &Function{
	Name:    "normal-transform",
	Version: 1,
	Summary: "mean and standard deviation of a quantity after multiplying by one number and adding another",
	Inputs:  inputs(lawMean, lawSD.within(nonNegative), multiply, addend),
	Results: []Result{
		{"mean", Number, SameUnit, "multiply times the mean, plus add"},
		{"sd", Number, SameUnit, "standard deviation, the size of multiply times sd"},
		{"variance", Number, SquaredUnit, "square of the standard deviation"},
	},
	Findings:    []FindingKind{{"no-spread", "sd or multiply is 0, so the result is one fixed number"}},
	Assumptions: []string{"none for mean and sd; a normal quantity stays normal"},
	Citations:   []string{"location-scale property of the normal distribution (ISO 3534-1)"},
	Example: Example{
		Label:     "temperatures in °C made °F",
		Arguments: []Argument{{"mean", 100.145}, {"sd", 1.489}, {"multiply", 1.8}, {"add", 32.0}},
		Want:      []Argument{{"mean", 212.261}, {"sd", 2.6802}, {"variance", 7.18347204}},
		Tolerance: 1e-14,
		Source:    "JCGM 100:2008, 4.4.3 (mean and sd in °C); 1.8 x + 32 by exact arithmetic",
	},
	compute: func(c *Call) error {
		m, sd, factor, add := lawMean.Of(c), lawSD.Of(c), multiply.Of(c), addend.Of(c)
		mean, newSD := num.TwoProduct(factor, m).Plus(add).Float(), float64(math.Abs(factor)*sd)
		c.set("mean", mean)
		c.set("sd", newSD)
		c.set("variance", float64(newSD*newSD))
		c.method = "multiply·mean + add and |multiply|·sd"
		if newSD == 0 {
			input := "sd"
			if factor == 0 {
				input = "multiply"
			}
			c.caution("no-spread", input, "The %s is 0, so the result is one fixed number; check whether that is meant.", input)
		}
		place := lastPlace(newSD, mean)
		c.sentence = fmt.Sprintf("%s times a quantity with mean %s and standard deviation %s, plus %s, has mean %s and standard deviation %s (%s); "+
			"it is normal if the quantity is.", FormatNumber(factor), c.withUnit(FormatNumber(m), SameUnit), FormatNumber(sd), FormatNumber(add),
			c.withUnit(toPlace(mean, place), SameUnit), toPlace(newSD, place), c.method)
		return nil
	},
}
