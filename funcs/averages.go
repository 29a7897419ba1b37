package funcs

import (
	"fmt"
	"math"

	"halfwidth/funcs/internal/dist"
)

var averages = []*Function{meanInterval, pairedInterval, predictionInterval, toleranceInterval, geometricMeanInterval, lognormalMeanInterval,
	medianInterval, trimmedMeanInterval, bootstrapInterval, stratifiedInterval, ratioOfSumsInterval}

var knownSD = number("known-sd", "the standard deviation, where it is known beforehand and not estimated", positive, SameUnit).optional()

// sampleWays are the ways of giving one sample.
var sampleWays = OneOf{{Needs: []string{"sample"}}, {Needs: []string{"mean", "sd", "n"}}}

// intervalResults are the results of an interval for a quantity in the
// sample's unit.
func intervalResults(name, summary string) []Result {
	return []Result{
		{name, Number, SameUnit, summary},
		resultLower, resultUpper,
		{"half-width", Number, SameUnit, "half the distance of the limits, or the distance of the one limit from the estimate"},
	}
}

// setInterval gives the results of intervalResults.
func (c *Call) setInterval(name string, estimate float64, l limits) {
	c.set(name, estimate)
	c.setLimits(l)
	c.set("half-width", l.halfWidth(estimate))
}

// Results that several functions give.
var (
	resultLower = Result{"lower", Number, SameUnit, "lower limit; absent for direction below"}
	resultUpper = Result{"upper", Number, SameUnit, "upper limit; absent for direction above"}
	ratioLower  = Result{"lower", Number, NoUnit, "lower limit; absent for direction below"} // of a ratio, share or rate
	ratioUpper  = Result{"upper", Number, NoUnit, "upper limit; absent for direction above"}

	resultTotalLower = Result{"total-lower", Number, SameUnit, "lower limit of the total"}
	resultTotalUpper = Result{"total-upper", Number, SameUnit, "upper limit of the total"}

	resultSE = Result{"standard-error", Number, SameUnit, "standard error of the estimate"}
	resultN  = Result{"n", Whole, NoUnit, "how many values"}
	resultSD = Result{"sd", Number, SameUnit, "standard deviation (divisor n - 1)"}
	resultDF = Result{"df", Number, NoUnit, "degrees of freedom"}
	resultT  = Result{"t", Number, NoUnit, "t statistic against the reference"}
	resultP  = Result{"p-value", Number, NoUnit, "p-value against the reference, in the direction claimed"}
)

var meanInterval = &Function{
	Name:    "mean-interval",
	Version: 1,
	Summary: "mean of a sample with its confidence interval, and a test against a reference",
	Inputs:  inputs(sample, meanGiven, sdGiven, nGiven, knownSD, populationSize, reference, confidence, direction, checks),
	OneOf: []OneOf{{
		{Needs: []string{"sample"}},
		{Needs: []string{"mean", "sd", "n"}, Unless: map[string]string{"sd": "known-sd"}},
	}},
	Results: append(intervalResults("mean", "arithmetic mean"),
		resultSE, resultN, resultSD, resultDF, resultT,
		Result{"z", Number, NoUnit, "z statistic against the reference, with known-sd"},
		resultP,
		Result{"total", Number, SameUnit, "population-size times the mean"}, resultTotalLower, resultTotalUpper),
	Findings:    intervalFindings,
	Assumptions: []string{"independent values of one population", "normal values, or n large enough for their skewness"},
	Citations:   []string{"ISO 2602", "Cochran 1977 (finite population)"},
	Example: Example{
		Label:     "heat flow meter, 195 calibration values",
		Arguments: []Argument{{"mean", 9.261460}, {"sd", 0.02278881}, {"n", 195}},
		Want:      []Argument{{"lower", 9.258242}, {"upper", 9.264679}},
		Tolerance: 1e-6,
		Source:    "NIST/SEMATECH e-Handbook of Statistical Methods, 1.3.5.2",
	},
	compute: func(c *Call) error {
		s, err := c.meanSummary()
		if err != nil {
			return err
		}
		sd, law, statistic := s.sd, dist.Distribution(dist.Student{DF: float64(s.n - 1)}), "t"
		known, isKnown := knownSD.Given(c)
		if isKnown {
			sd, law, statistic = known, dist.Normal{}, "z"
		}
		size, finite, err := c.sampledPopulation(s.n, "give the number in the whole population")
		if err != nil {
			return err
		}
		se := sd / math.Sqrt(float64(s.n))
		whole := finite && s.n == size
		if finite {
			se *= finiteFactor(s.n, size)
		}
		if se == 0 && !whole {
			return c.noSpread(c.firstGiven("sample", "sd"))
		}
		conf, dir := confidence.Of(c), direction.Of(c)
		l := symmetric(conf, dir, s.mean, se, law)
		c.setInterval("mean", s.mean, l)
		c.set("standard-error", se)
		c.set("n", s.n)
		if s.n > 1 && (c.has("sample") || c.has("sd")) {
			c.set("sd", s.sd)
		}
		if isKnown {
			c.method = "z interval with the known sd " + brief(known)
		} else {
			c.set("df", float64(s.n-1))
			c.method = fmt.Sprintf("t interval with %s, sd with divisor n - 1", degrees(float64(s.n-1)))
		}
		if finite {
			c.setTotals(float64(size), s.mean, l)
			c.method += ofPopulation(float64(size))
		}
		c.say(statement{"mean", s.mean, l, SameUnit, nText(s.n)})
		if whole { // nothing is left to be unsure about
			return nil
		}
		if ref, ok := reference.Given(c); ok {
			value := (s.mean - ref) / se
			c.setTest(ref, SameUnit, statistic, value, pValue(dir, value, law))
		}
		return c.checkSample()
	},
}

// meanSummary is summaryOf with what a known sd allows: an sd left out and a
// sample of one value.
func (c *Call) meanSummary() (summary, error) {
	if !c.has("known-sd") || c.has("n") {
		return c.summaryOf(sample, meanGiven, sdGiven, nGiven)
	}
	s := c.summarise(c.gapless(sample.Of(c)))
	c.count(s.n)
	return s, nil
}

// sampledPopulation is the size of the population, where it is given, from which a
// sample of n comes; advice says what to give in place of fewer than n.
func (c *Call) sampledPopulation(n int, advice string) (size int, finite bool, err error) {
	size, finite = populationSize.Given(c)
	if finite && n > size {
		err = c.wrong("population-size", fmt.Sprint(size), fmt.Sprintf("is smaller than the sample (%s)", nText(n)), advice)
	}
	return size, finite, err
}

// ofPopulation words the size of a finite population for a method.
func ofPopulation(size float64) string { return fmt.Sprintf(", finite population of %.0f", size) }

// finiteFactor is √(1 - n/N), which sampling without replacement puts on a
// standard error (Cochran 1977, equation 2.20).
func finiteFactor(n, size int) float64 { return math.Sqrt(float64(size-n) / float64(size)) }

// setTotals gives a mean and its limits times the population's size.
func (c *Call) setTotals(size, mean float64, l limits) {
	c.set("total", size*mean)
	if l.hasLower {
		c.set("total-lower", size*l.lower)
	}
	if l.hasUpper {
		c.set("total-upper", size*l.upper)
	}
}

// firstGiven is the first of the inputs that the call gave.
func (c *Call) firstGiven(names ...string) string {
	for _, n := range names {
		if c.has(n) {
			return n
		}
	}
	return ""
}

var pairedInterval = &Function{
	Name:    "paired-interval",
	Version: 1,
	Summary: "mean of the differences within pairs (sample - second-sample) with its confidence interval, and a test",
	Inputs: inputs(sample, secondSample.as("second-sample", "the other value of each pair, from the same rows"),
		meanGiven.as("mean", "the mean of the differences, where it stands for the samples"),
		sdGiven.as("sd", "the standard deviation (divisor n - 1) of the differences"),
		nGiven.as("n", "how many pairs"),
		reference.withDefault(0), confidence, direction, checks),
	OneOf:  []OneOf{{{Needs: []string{"sample", "second-sample"}}, {Needs: []string{"mean", "sd", "n"}}}},
	Paired: true,
	Results: append(intervalResults("difference", "mean of the differences"),
		resultSE, resultN, resultSD, resultDF, resultT, resultP,
		Result{"correlation", Number, NoUnit, "correlation of the two values of a pair"}),
	Findings:    intervalFindings,
	Assumptions: []string{"pairs independent of one another", "normal differences, or enough pairs for their skewness"},
	Citations:   []string{"ISO 3301"},
	Example: Example{
		Label: "additional hours of sleep, ten patients",
		Arguments: []Argument{
			{"sample", []float64{1.9, 0.8, 1.1, 0.1, -0.1, 4.4, 5.5, 1.6, 4.6, 3.4}},
			{"second-sample", []float64{0.7, -1.6, -0.2, -1.2, -0.1, 3.4, 3.7, 0.8, 0, 2}},
		},
		Want:      []Argument{{"difference", 1.58}},
		Tolerance: 1e-12,
		Source:    "Student 1908, The probable error of a mean",
	},
	compute: func(c *Call) error {
		s, differences, err := c.pairs()
		if err != nil {
			return err
		}
		se := s.sd / math.Sqrt(float64(s.n))
		switch {
		case differences != nil && differOnlyByRounding(differences, sample.Of(c), secondSample.Of(c), s.mean):
			return refuse("no-spread", "sample", "All differences are equal, so neither an interval nor a test exists; check whether one column was computed from the other.")
		case se == 0:
			return c.noSpread("sd")
		}
		law := dist.Student{DF: float64(s.n - 1)}
		dir, ref := direction.Of(c), reference.Of(c)
		l := symmetric(confidence.Of(c), dir, s.mean, se, law)
		t := (s.mean - ref) / se
		c.setInterval("difference", s.mean, l)
		c.set("standard-error", se)
		c.set("n", s.n)
		c.set("sd", s.sd)
		c.set("df", law.DF)
		c.method = fmt.Sprintf("t interval of the differences with %s, sd with divisor n - 1", degrees(law.DF))
		c.say(statement{"mean difference (sample - second-sample)", s.mean, l, SameUnit, nText(s.n) + " pairs"})
		c.setTest(ref, SameUnit, "t", t, pValue(dir, t, law))
		if differences == nil {
			return c.checkSample()
		}
		if r, ok := correlation(sample.Of(c), secondSample.Of(c)); ok {
			c.set("correlation", r)
		}
		return c.checkDerived("sample", "The list of differences", differences, s)
	},
}

// differOnlyByRounding reports that all differences are equal but for the
// rounding of the values they were taken from: 3.3 - 3.2 is not 1.1 - 1.
func differOnlyByRounding(differences, first, second []float64, mean float64) bool {
	for i, d := range differences {
		if math.Abs(d-mean) > 4e-16*math.Max(math.Abs(first[i]), math.Abs(second[i])) {
			return false // never for a gap, which is NaN
		}
	}
	return true
}
