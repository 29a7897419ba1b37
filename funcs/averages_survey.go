package funcs

import (
	"fmt"
	"math"
	"slices"

	"halfwidth/funcs/internal/dist"
	"halfwidth/funcs/internal/num"
)

var sizes = In[List]{Input{Name: "sizes", Kind: Numbers, Domain: wholeFrom(1), Summary: "how many there are in all in each stratum"}}.atMost(mostGroups, fewerGroups)

var stratifiedInterval = &Function{
	Name:    "stratified-interval",
	Version: 1,
	Summary: "mean and total of a population sampled by strata, with confidence intervals",
	Inputs:  inputs(sizes, samples, means, sds, ns, confidence, direction, checks),
	OneOf:   []OneOf{meansWays},
	Results: []Result{
		{"mean", Number, SameUnit, "mean of the population: the strata's means weighted by their sizes"},
		resultLower, resultUpper,
		{"total", Number, SameUnit, "the total over the population"}, resultTotalLower, resultTotalUpper, resultSE, resultDF,
	},
	Findings:    append([]FindingKind{noSpreadKind}, oneSampleFindings...),
	Assumptions: []string{"a simple random sample within each stratum", "normal stratum means"},
	Citations:   []string{"Cochran 1977 ch. 5", "Satterthwaite 1946"},
	Example: Example{
		Label: "two strata of 100 and 50",
		Arguments: []Argument{
			{"sizes", List{Names: []string{"North", "Quay"}, Values: []float64{100, 50}}},
			{"means", List{Values: []float64{10, 20}}}, {"sds", List{Values: []float64{2, 3}}}, {"ns", List{Values: []float64{10, 5}}},
		},
		Want:      []Argument{{"mean", 40.0 / 3}, {"standard-error", 0.5830951894845301}, {"df", 10.562436548223351}},
		Tolerance: 1e-12,
		Source:    "Cochran 1977, equations 5.1, 5.7 and 5.16 worked by hand: variance (100·90·4/10 + 50·45·9/5)/150²",
	},
	compute: func(c *Call) error {
		groups, columns, err := c.readGroupsWith(sizes)
		if err != nil {
			return err
		}
		var population, total, variance, spread float64
		for i, g := range groups {
			size, n := columns[0][i], float64(g.n)
			switch {
			case n > size:
				return c.wrong("sizes", FormatNumber(size), fmt.Sprintf("is smaller than the sample of the stratum %q (%s)", g.name, nText(g.n)),
					"give the number in the whole stratum")
			case g.n < 2 && n < size:
				return refuse("few-values", c.groupsInput(), "The stratum %s has only one value of %s, so its spread is unknown; measure at least 2, "+
					"or join it with a stratum like it.", g.name, FormatNumber(size))
			}
			population += size
			total += float64(size * g.mean)
			if n < size {
				weight := float64(size*(size-n)) / n // Satterthwaite's g
				part := float64(weight * float64(g.sd*g.sd))
				variance += part
				spread += float64(part*part) / (n - 1)
			}
		}
		mean := total / population
		se := math.Sqrt(variance) / population
		var l limits
		if variance > 0 {
			law := dist.Student{DF: float64(variance*variance) / spread}
			l = symmetric(confidence.Of(c), direction.Of(c), mean, se, law)
			c.set("df", law.DF)
			c.method = fmt.Sprintf("stratified t interval with %s (Satterthwaite), finite factor in each stratum", degrees(law.DF))
		} else if !wholePopulation(groups, columns[0]) {
			return c.noGroupSpread(groups)
		} else {
			l = symmetric(confidence.Of(c), direction.Of(c), mean, 0, dist.Normal{})
			c.method = "every stratum was measured whole"
		}
		c.set("mean", mean)
		c.setLimits(l)
		c.setTotals(population, mean, l)
		c.set("standard-error", se)
		c.say(statement{"mean of the population", mean, l, SameUnit, fmt.Sprintf("%s of %s in %d strata", nText(c.used), FormatNumber(population), len(groups))})
		return c.checkGroups(sampledStrata(groups, columns[0]))
	},
}

// sampledStrata empties the strata measured whole, about which nothing is
// unsure, and keeps the others' places.
func sampledStrata(groups []groupSummary, sizes []float64) []groupSummary {
	out := slices.Clone(groups)
	for i, g := range groups {
		if float64(g.n) == sizes[i] {
			out[i] = groupSummary{name: g.name}
		}
	}
	return out
}

// wholePopulation reports that every group was measured whole.
func wholePopulation(groups []groupSummary, sizes []float64) bool {
	for i, g := range groups {
		if float64(g.n) != sizes[i] {
			return false
		}
	}
	return true
}

var ratioOfSumsInterval = &Function{
	Name:    "ratio-of-sums-interval",
	Version: 1,
	Summary: "ratio of two sums over the same rows (minutes a parcel, damage a trip) with its confidence interval",
	Inputs: inputs(sample.as("sample", "the numerator of each row"),
		secondSample.as("second-sample", "the denominator of each row, from the same rows"),
		populationSize.as("population-size", "how many rows there are in all, where the sample is a sizeable part of them"),
		confidence, direction, checks),
	Paired: true,
	Results: []Result{
		{"ratio", Number, NoUnit, "sum of the numerators over sum of the denominators"},
		ratioLower, ratioUpper,
		{"standard-error", Number, NoUnit, "standard error of the ratio"},
		{"n", Whole, NoUnit, "how many rows"},
		resultDF,
	},
	Findings:    append([]FindingKind{noSpreadKind, {"zero-denominator", "the denominators sum to zero"}}, oneSampleFindings...),
	Assumptions: []string{"a simple random sample of rows", "n large enough for the linear approximation (Cochran asks for more than 30)"},
	Citations:   []string{"Cochran 1977 ch. 6"},
	Example: Example{
		Label:     "minutes and parcels of four trips",
		Arguments: []Argument{{"sample", []float64{30, 24, 42, 36}}, {"second-sample", []float64{10, 9, 15, 10}}},
		Want:      []Argument{{"ratio", 3.0}, {"standard-error", 0.1928473039599675}},
		Tolerance: 1e-12,
		Source:    "Cochran 1977, equation 6.13 worked by hand: residuals 0, -3, -3, 6, so √(54/3)/(√4·11)",
	},
	compute: func(c *Call) error {
		y, x, err := c.completePairs()
		if err != nil {
			return err
		}
		n := len(y)
		size, finite, err := c.sampledPopulation(n, "give the number of all rows")
		if err != nil {
			return err
		}
		sum := num.Sum(x)
		if sum == 0 {
			return refuse("zero-denominator", "second-sample", "The denominators sum to zero, so there is no ratio; check the column.")
		}
		ratio := num.Sum(y) / sum
		residuals := make([]float64, n)
		for i := range y {
			residuals[i] = y[i] - float64(ratio*x[i])
			if math.Abs(residuals[i]) <= 4e-16*math.Abs(y[i]) { // the rounding of ratio and product
				residuals[i] = 0
			}
		}
		se := math.Sqrt(num.SumProducts(residuals, residuals)/float64(n-1)) / math.Sqrt(float64(n)) / math.Abs(sum/float64(n))
		if finite {
			se *= finiteFactor(n, size)
		}
		whole := finite && n == size
		if se == 0 && !whole {
			return refuse("no-spread", "sample", "All rows have the same ratio, so there is neither a spread nor an interval; check whether one column was computed from the other.")
		}
		law := dist.Student{DF: float64(n - 1)}
		l := symmetric(confidence.Of(c), direction.Of(c), ratio, se, law)
		c.set("ratio", ratio)
		c.setLimits(l)
		c.set("standard-error", se)
		c.set("n", n)
		c.set("df", law.DF)
		c.method = fmt.Sprintf("ratio of sums, linearised, with the t quantile of %s", degrees(law.DF))
		if finite {
			c.method += ofPopulation(float64(size))
		}
		c.say(statement{"ratio of sums (sample / second-sample)", ratio, l, NoUnit, nText(n) + " rows"})
		if whole {
			return nil
		}
		return c.checkDerived("sample", "The list of residuals (sample - ratio·second-sample)", inPlaces(residuals, sample.Of(c), secondSample.Of(c)), summarise(residuals))
	},
}

// inPlaces puts values, one from each complete pair, where their pairs stand;
// the other places are gaps.
func inPlaces(values, first, second []float64) []float64 {
	out := make([]float64, len(first))
	next := 0
	for i := range first {
		if math.IsNaN(first[i]) || math.IsNaN(second[i]) {
			out[i] = math.NaN()
			continue
		}
		out[i] = values[next]
		next++
	}
	return out
}

// completePairs reads two samples of the same rows and leaves out, and counts,
// those of which one value is missing.
func (c *Call) completePairs() (first, second []float64, err error) {
	x, y := sample.Of(c), secondSample.Of(c)
	if err := c.sameLength(x, y); err != nil {
		return nil, nil, err
	}
	for i := range x {
		switch {
		case !math.IsNaN(x[i]) && !math.IsNaN(y[i]):
			first, second = append(first, x[i]), append(second, y[i])
		case !math.IsNaN(x[i]) || !math.IsNaN(y[i]):
			c.dropped++
		}
	}
	c.count(len(first))
	return first, second, enoughPairs(len(first))
}
