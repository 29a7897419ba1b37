package funcs

import (
	"fmt"
	"math"

	"halfwidth/funcs/internal/num"
)

var samplesFamily = []*Function{sampleSummary}

var quartileType = count("quartile-type", "how quartiles are read between two values: type 6, 7 or 8 of Hyndman and Fan", 6).
	within(Domain{Low: 6, High: 8, Whole: true}).withDefault(8)

var sampleSummary = &Function{
	Name:    "sample-summary",
	Version: 1,
	Summary: "what a sample looks like: centre, spread, quartiles, shape and the likeness of neighbours",
	Inputs:  inputs(sample, quartileType, checks),
	Results: []Result{
		resultN,
		{"mean", Number, SameUnit, "arithmetic mean"},
		resultSD,
		{"variance", Number, SquaredUnit, "variance (divisor n - 1)"},
		{"standard-error", Number, SameUnit, "standard error of the mean, sd/√n"},
		{"coefficient-of-variation", Number, NoUnit, "sd over the size of the mean; absent where the mean is 0"},
		{"minimum", Number, SameUnit, "smallest value"},
		{"lower-quartile", Number, SameUnit, "a quarter of the values lie below"},
		{"median", Number, SameUnit, "half of the values lie below"},
		{"upper-quartile", Number, SameUnit, "three quarters of the values lie below"},
		{"maximum", Number, SameUnit, "largest value"},
		{"skewness", Number, NoUnit, "skewness G1; from 3 values"},
		{"excess-kurtosis", Number, NoUnit, "excess kurtosis G2, 0 for the normal law; from 4 values"},
		{"lag-1-autocorrelation", Number, NoUnit, "correlation of neighbours; no pair is formed across a gap"},
	},
	Findings:    []FindingKind{fewValuesKind, neighboursKind, farValueKind, heavyTailKind, noSpreadKind},
	Assumptions: []string{"independent values of one population, for standard-error; none for the others"},
	Citations:   []string{"NIST StRD univariate", "Hyndman & Fan 1996", "Joanes & Gill 1998"},
	Example: Example{
		Label:     "particles counted on ten wafers",
		Arguments: []Argument{{"sample", []float64{50, 48, 44, 56, 61, 52, 53, 55, 67, 51}}},
		Want:      []Argument{{"n", 10}, {"mean", 53.7}, {"sd", 6.567}},
		Tolerance: 1e-4,
		Source:    "NIST/SEMATECH e-Handbook of Statistical Methods, 7.2.2",
	},
	compute: func(c *Call) error {
		s := describe(sample.Of(c), num.QuantileType(quartileType.Of(c)))
		c.count(s.n)
		c.setSummary(s)
		c.method = fmt.Sprintf("sd with divisor n - 1, quartiles of type %d", quartileType.Of(c))
		c.saySummary(s)
		return c.checkSummary(s)
	},
}

// description is all that sample-summary tells. A value that does not exist is
// NaN.
type description struct {
	summary
	variance, standardError          float64
	minimum, q1, median, q3, maximum float64
	skewness, excessKurtosis, lag    float64
}

// describe takes the moments in units of a power of two, which rounds nothing,
// so that fourth powers neither overflow nor vanish at any size of the values.
func describe(ordered []float64, t num.QuantileType) description {
	exponent := sizeExponent(ordered)
	scaled := make([]float64, len(ordered))
	for i, x := range ordered {
		scaled[i] = math.Ldexp(x, -exponent)
	}
	back := func(x float64) float64 { return math.Ldexp(x, exponent) }
	absent := math.NaN()
	sorted, values := num.Sorted(withoutGaps(ordered)), withoutGaps(scaled)
	s := summarise(values)
	d := description{
		summary: summary{n: s.n, mean: back(s.mean), sd: absent}, variance: absent, standardError: absent,
		minimum: sorted[0], maximum: sorted[s.n-1], median: num.Median(sorted),
		q1: num.Quantile(sorted, 0.25, t), q3: num.Quantile(sorted, 0.75, t),
		skewness: absent, excessKurtosis: absent, lag: absent,
	}
	if s.n < 2 {
		return d
	}
	m := num.Moments(values)
	d.sd, d.standardError = back(s.sd), back(s.sd/math.Sqrt(float64(s.n)))
	d.variance = math.Ldexp(m.SumSquares/float64(s.n-1), 2*exponent)
	if s.sd == 0 {
		return d
	}
	if d.variance == 0 { // below the smallest double, though sd is not
		d.variance = absent
	}
	if s.n >= 3 {
		d.skewness = skewness(m)
	}
	if s.n >= 4 {
		d.excessKurtosis = excessKurtosis(m)
	}
	d.lag = num.Lag1(scaled)
	return d
}

// sizeExponent is the binary exponent of the largest value, where it is so far
// from 0 that fourth powers come near the ends of the range of a double; 0
// otherwise.
func sizeExponent(values []float64) int {
	const comfortable = 200
	largest := 0.0
	for _, x := range values {
		if a := math.Abs(x); a > largest {
			largest = a
		}
	}
	if largest == 0 {
		return 0
	}
	if e := math.Ilogb(largest); e > comfortable || e < -comfortable {
		return e
	}
	return 0
}

// setSummary gives the results that exist.
func (c *Call) setSummary(d description) {
	coefficient := math.NaN()
	if d.mean != 0 {
		coefficient = d.sd / math.Abs(d.mean)
	}
	c.set("n", d.n)
	for _, r := range []struct {
		name  string
		value float64
	}{
		{"mean", d.mean}, {"sd", d.sd}, {"variance", d.variance}, {"standard-error", d.standardError},
		{"coefficient-of-variation", coefficient},
		{"minimum", d.minimum}, {"lower-quartile", d.q1}, {"median", d.median}, {"upper-quartile", d.q3}, {"maximum", d.maximum},
		{"skewness", d.skewness}, {"excess-kurtosis", d.excessKurtosis}, {"lag-1-autocorrelation", d.lag},
	} {
		if !math.IsNaN(r.value) {
			c.set(r.name, r.value)
		}
	}
}

// saySummary words the location values to the last place of the standard
// error's second digit, the extremes as they were measured.
func (c *Call) saySummary(d description) {
	if d.n < 2 {
		c.sentence = fmt.Sprintf("The one value is %s (%s).", c.withUnit(FormatNumber(d.mean), SameUnit), nText(d.n))
		return
	}
	place := lastPlace(d.standardError, d.mean)
	to := func(x float64) string { return toPlace(x, place) }
	c.sentence = fmt.Sprintf("The mean is %s, standard deviation %s, standard error %s; median %s, quartiles %s and %s, values from %s to %s (%s; %s).",
		c.withUnit(to(d.mean), SameUnit), to(d.sd), to(d.standardError), to(d.median), to(d.q1), to(d.q3),
		FormatNumber(d.minimum), FormatNumber(d.maximum), nText(d.n), c.method)
}

// checkSummary raises the cautions that concern a description; it forms no
// interval, so skewness is no fault.
func (c *Call) checkSummary(d description) error {
	if !checks.Of(c) {
		return nil
	}
	if d.n < fewValues {
		c.caution("few-values", "sample", "The sample has only %s: its spread, quartiles and shape say little. Measure at least %d.",
			plural(d.n, "value"), fewValues)
	}
	if d.n < 2 {
		return nil
	}
	if d.sd == 0 {
		c.caution("no-spread", "sample", "All values of the sample are equal, so skewness, kurtosis and autocorrelation do not exist; "+
			"check whether the values were rounded or copied down.")
		return nil
	}
	if !c.origin("sample").Unordered && neighboursAlike(d.lag, d.n, c.rare()) {
		c.caution("neighbours-alike", "sample", "Neighbouring values of the sample are not independent (lag-1 autocorrelation %s), so the "+
			"standard error is too %s. Average over longer stretches, or see independence-check.", brief(d.lag), smallOrLarge(d.lag))
	}
	if math.IsInf(d.maximum-d.minimum, 0) {
		return nil // distances from the mean pass what a double can hold
	}
	ordered := sample.Of(c)
	c.checkFar("sample", "The sample", 0, ordered, d.summary)
	c.checkTail("sample", "The sample", c.gapless(ordered))
	return c.cancelled()
}

func smallOrLarge(r float64) string {
	if r > 0 {
		return "small"
	}
	return "large"
}
