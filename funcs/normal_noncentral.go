package funcs

import (
	"fmt"

	"halfwidth/funcs/internal/dist"
)

var (
	shiftOfMean = number("noncentrality", "the mean of the normal variable above the line, in T = (Z + noncentrality)/√(χ²/df)", anyNumber, NoUnit)
	squaredMean = number("noncentrality", "sum of the squared means of the normal variables whose squares are added", nonNegative, NoUnit)
)

func noncentralTLaw(c *Call) (dist.Distribution, string) {
	df, delta := lawDF.Of(c), shiftOfMean.Of(c)
	return dist.NoncentralT{DF: df, Noncentrality: delta},
		fmt.Sprintf("the noncentral t distribution with %s and noncentrality %s", degrees(df), brief(delta))
}

func noncentralChiSquareLaw(c *Call) (dist.Distribution, string) {
	df, lambda := lawDF.Of(c), squaredMean.Of(c)
	return dist.NoncentralChiSquare{DF: df, Noncentrality: lambda},
		fmt.Sprintf("the noncentral chi-square distribution with %s and noncentrality %s", degrees(df), brief(lambda))
}

func noncentralFLaw(c *Call) (dist.Distribution, string) {
	d1, d2, lambda := firstDF.Of(c), secondDF.Of(c), squaredMean.Of(c)
	return dist.NoncentralF{DF1: d1, DF2: d2, Noncentrality: lambda},
		fmt.Sprintf("the noncentral F distribution with %s and %s and noncentrality %s", dfText(d1), degrees(d2), brief(lambda))
}

var noncentralTProbability = &Function{
	Name:      "noncentral-t-probability",
	Version:   2,
	Summary:   "probability that a value of the noncentral t distribution lies between two values, or beyond one",
	Inputs:    withEnds(NoUnit, tDF.within(atLeast(0.01)), shiftOfMean),
	OneOf:     ends,
	Results:   probabilityResults,
	Citations: []string{"Johnson & Welch 1940"},
	Example: Example{
		Label:     "one-sided tolerance factor for 90% of a normal population, n = 43, confidence 99%",
		Arguments: []Argument{{"df", 42.0}, {"noncentrality", 8.403696}, {"to", 12.28834}},
		Want:      []Argument{{"probability", 0.99}},
		Tolerance: 1e-6,
		Source:    "NIST/SEMATECH e-Handbook of Statistical Methods, 7.2.6.3; noncentrality 1.28155·√43",
	},
	compute: probabilityOf(noncentralTLaw),
}

var noncentralChiSquareProbability = &Function{
	Name:      "noncentral-chi-square-probability",
	Version:   2,
	Summary:   "probability that a value of the noncentral chi-square distribution lies between two values, or beyond one",
	Inputs:    withEnds(NoUnit, lawDF, squaredMean),
	OneOf:     ends,
	Results:   probabilityResults,
	Citations: []string{"Johnson, Kotz & Balakrishnan 1995"},
	Example: Example{
		Label:     "power of a chi-square test with 1 degree of freedom at about 5%",
		Arguments: []Argument{{"df", 1.0}, {"noncentrality", 10.5}, {"from", 3.84}},
		Want:      []Argument{{"probability", 0.8998643703937645}, {"probability-outside", 0.1001356296062355}},
		Tolerance: 1e-12,
		Source:    "Poisson mixture and quadrature of the density in 60-digit arithmetic",
	},
	compute: probabilityOf(noncentralChiSquareLaw),
}

var noncentralFProbability = &Function{
	Name:      "noncentral-f-probability",
	Version:   2,
	Summary:   "probability that a value of the noncentral F distribution lies between two values, or beyond one",
	Inputs:    withEnds(NoUnit, firstDF, secondDF, squaredMean),
	OneOf:     ends,
	Results:   probabilityResults,
	Citations: []string{"Johnson, Kotz & Balakrishnan 1995"},
	Example: Example{
		Label:     "power of a comparison of three means of nine values each at about 5%",
		Arguments: []Argument{{"first-df", 2.0}, {"second-df", 24.0}, {"noncentrality", 9.0}, {"from", 3.4}},
		Want:      []Argument{{"probability", 0.7136991963972260}, {"probability-outside", 0.2863008036027740}},
		Tolerance: 1e-12,
		Source:    "Poisson mixture and average over the denominator in 60-digit arithmetic",
	},
	compute: probabilityOf(noncentralFLaw),
}
