package funcs

import (
	"fmt"

	"halfwidth/funcs/internal/dist"
)

var (
	rangeGroups = count("groups", "of how many independent normal means the range is taken", 2).
			within(Domain{Low: 2, High: 100000, Whole: true}) // the integrals were checked so far
	rangeDF = degreesOfFreedom("df", "degrees of freedom of the standard deviation that the range is divided by; infinite where it is known", true).
		within(atLeast(0.5)) // the integrals were checked so far down
)

func studentizedRangeLaw(c *Call) (dist.Distribution, string) {
	groups, df := rangeGroups.Of(c), rangeDF.Of(c)
	return dist.StudentizedRange{Groups: groups, DF: df},
		fmt.Sprintf("the studentized range of %d groups with %s", groups, degrees(df))
}

var studentizedRangeProbability = &Function{
	Name:      "studentized-range-probability",
	Version:   3,
	Summary:   "probability that the range of several normal means over their estimated sd lies between two values, or beyond one",
	Inputs:    withEnds(NoUnit, rangeGroups, rangeDF),
	OneOf:     ends,
	Results:   probabilityResults,
	Citations: []string{"Copenhaver & Holland 1988"},
	Example: Example{
		Label:     "3 groups, 12 degrees of freedom, beyond 3.8",
		Arguments: []Argument{{"groups", 3}, {"df", 12.0}, {"from", 3.8}},
		Want:      []Argument{{"probability", 0.04834425860099025}, {"probability-outside", 0.9516557413990097}},
		Tolerance: 1e-12,
		Source:    "two ways of integrating in 60-digit arithmetic",
	},
	compute: probabilityOf(studentizedRangeLaw),
}

var studentizedRangeQuantile = &Function{
	Name:      "studentized-range-quantile",
	Version:   3,
	Summary:   "value of the studentized range with a given probability below or above it",
	Inputs:    inputs(rangeGroups, rangeDF, probability, countedFrom),
	Results:   quantileResults(NoUnit),
	Citations: []string{"Copenhaver & Holland 1988"},
	Example: Example{
		Label:     "upper 5% point, 4 groups and 20 degrees of freedom",
		Arguments: []Argument{{"groups", 4}, {"df", 20.0}, {"probability", 0.05}, {"counted-from", above}},
		Want:      []Argument{{"value", 3.96}},
		Tolerance: 1.3e-3,
		Source:    "Harter 1960, Tables of range and studentized range",
	},
	compute: quantileOf(studentizedRangeLaw),
}
