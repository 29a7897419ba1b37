package funcs

import (
	"math"
	"slices"

	"halfwidth/funcs/internal/dist"
)

var ratioInterval = &Function{
	Name:    "ratio-interval",
	Version: 1,
	Summary: "ratio of two means (first over second) with its confidence interval, and a test",
	Inputs: inputs(sample, secondSample, firstMean, firstSD, firstN, secondMean, secondSD, secondN, variances,
		number("reference", "the ratio to compare with", anyNumber, NoUnit).withDefault(1), confidence, direction, checks),
	OneOf: []OneOf{twoMeansWays},
	Results: []Result{
		{"ratio", Number, NoUnit, "mean of the first sample over that of the second"},
		ratioLower, ratioUpper,
		resultDF, resultT, resultP,
	},
	Findings: slices.Concat(twoMeansFindings, []FindingKind{
		{"denominator-not-separated-from-zero", "the second mean is too near 0, for its standard error, to divide by"},
	}),
	Assumptions: twoMeansAssumptions,
	Citations:   []string{"Fieller 1954"},
	Example: Example{
		Label:     "minutes of assembly, old process over new",
		Arguments: assemblyMinutes,
		Want:      []Argument{{"ratio", 1.1200626959247649}, {"lower", 1.0079268161670494}, {"upper", 1.2391333396006875}, {"p-value", 0.037036655989955212}},
		Tolerance: 1e-11,
		Source:    "data of NIST/SEMATECH e-Handbook of Statistical Methods, 7.3.1; high-precision arithmetic",
	},
	compute: func(c *Call) error {
		first, second, err := c.twoSummaries()
		if err != nil {
			return err
		}
		kind := variances.Of(c)
		m := compareMeans(first, second, kind)
		if m.se == 0 {
			return c.noSpreadInTwo()
		}
		f := newFieller(first, second, m, kind)
		if !(f.df > 0) {
			return c.noSpread(c.firstGiven("sample", "first-sd"))
		}
		law := dist.Student{DF: f.df}
		dir, ref := direction.Of(c), reference.Of(c)
		l, ok := f.limits(confidence.Of(c), dir, law)
		if !ok {
			return refuse("denominator-not-separated-from-zero", c.firstGiven("second-sample", "second-mean"),
				"The second mean, %s, is not told apart from 0 (standard error %s) at this confidence, so the ratio has no bounded interval; "+
					"measure more in the second group, or use difference-interval.", brief(second.mean), brief(f.secondSE*math.Abs(second.mean)))
		}
		c.set("ratio", f.ratio)
		c.setLimits(l)
		c.set("df", f.df)
		m.df = f.df
		c.method = m.methodText("Fieller interval", kind)
		c.say(statement{what: "ratio of means (first over second)", estimate: f.ratio, limits: l, counts: nTexts(first, second)})
		if t := f.statistic(ref); !math.IsNaN(t) {
			c.setTest(ref, NoUnit, "t", t, pValue(dir, t, law))
		}
		return c.checkMeans(first, second)
	},
}

// fieller is the ratio of two means with the standard errors of both, all over
// the size of the second mean (Fieller 1954).
type fieller struct {
	ratio, firstSE, secondSE, df float64
}

func newFieller(first, second summary, m twoMeans, variances string) fieller {
	size := math.Abs(second.mean)
	f := fieller{
		ratio:    first.mean / second.mean,
		firstSE:  math.Ldexp(math.Sqrt(m.firstVariance), m.scale) / size,
		secondSE: math.Ldexp(math.Sqrt(m.secondVariance), m.scale) / size,
		df:       m.df,
	}
	if second.mean == 0 {
		// No ratio; limits refuses it whatever the df.
		return fieller{secondSE: math.Inf(1), df: 1}
	}
	if variances == separate {
		r := math.Abs(f.ratio) * f.secondSE
		largest := math.Max(f.firstSE, r)
		a, b := f.firstSE/largest, r/largest
		f.df = satterthwaite(float64(a*a), float64(first.n-1), float64(b*b), float64(second.n-1))
	}
	return f
}

// limits are the roots R of (ratio - R)² = t²(firstSE² + R²·secondSE²); not
// where t·secondSE reaches 1, where the interval is not bounded.
func (f fieller) limits(confidence float64, direction string, law dist.Student) (limits, bool) {
	t := law.UpperQuantile(tail(confidence, direction))
	t1, t2 := float64(math.Abs(t)*f.firstSE), float64(math.Abs(t)*f.secondSE)
	if !(t2 < 1) {
		return limits{}, false
	}
	// a·R² - 2·ratio·R + c = 0; the discriminant is formed without cancellation.
	a, c := float64((1-t2)*(1+t2)), float64((f.ratio-t1)*(f.ratio+t1))
	root := math.Sqrt(float64(float64(t2*t2)*float64(f.ratio*f.ratio)) + float64(float64(t1*t1)*a))
	lower, upper := -root/a, root/a
	switch {
	case f.ratio > 0:
		lower, upper = c/(f.ratio+root), (f.ratio+root)/a
	case f.ratio < 0:
		lower, upper = (f.ratio-root)/a, c/(f.ratio-root)
	}
	if t < 0 { // a one-sided confidence below one half
		lower, upper = upper, lower
	}
	return limitsAt(direction, lower, upper), true
}

// statistic is t against a reference ratio; NaN where both parts of its standard
// error vanish.
func (f fieller) statistic(reference float64) float64 {
	b := reference * f.secondSE
	largest := math.Max(f.firstSE, math.Abs(b))
	if largest == 0 {
		return math.NaN()
	}
	x, y := f.firstSE/largest, b/largest
	return (f.ratio - reference) / largest / math.Sqrt(float64(x*x)+float64(y*y))
}
