package funcs

import (
	"fmt"
	"math"
	"slices"

	"halfwidth/funcs/internal/dist"
)

var (
	pilotSample = sample.as("sample", "a pilot sample, in the order measured")
	pilotN      = count("pilot-n", "how many values of a pilot the sd comes from; without it the sd is taken as known", smallestGroup).optional()
	chanceMet   = level("chance-met", "the chance wanted that the half-width found will be no more than the half-width wanted").optional()

	resultChance = Result{"chance-met", Number, NoUnit, "the chance that the half-width found will be no more than the half-width wanted"}

	pilotWays = []OneOf{{{Needs: []string{"sample"}}, {Needs: []string{"sd"}, May: []string{"pilot-n"}}}}
)

// meanPrecision is the half-width of a t interval of a mean that is still to be
// measured.
type meanPrecision struct {
	sd         float64 // expected, or from a pilot
	pilotDF    float64 // the pilot's degrees of freedom; infinite without one
	outside    float64 // the probability outside each limit
	population float64 // infinite where none was given
}

func (c *Call) meanPrecision() (meanPrecision, error) {
	p := meanPrecision{pilotDF: math.Inf(1), population: c.plannedPopulation(), outside: tail(confidence.Of(c), direction.Of(c))}
	if err := c.oneSidedLevel(); err != nil {
		return p, err
	}
	if values, ok := sample.Given(c); ok {
		s := c.summarise(c.gapless(values))
		if err := c.enough("sample", s, 2); err != nil {
			return p, err
		}
		p.sd, p.pilotDF = s.sd, float64(s.n-1)
		return p, c.checkSample()
	}
	p.sd = expectedSD.Of(c)
	if n, ok := pilotN.Given(c); ok {
		p.pilotDF = float64(n - 1)
		if checks.Of(c) {
			c.checkFew("pilot-n", "The pilot", n)
		}
	}
	return p, nil
}

// perSD is the half-width over the sd of the sample: t(n-1)/√n·√(1-n/N).
func (p meanPrecision) perSD(n int) float64 {
	m := float64(n)
	t := dist.Student{DF: m - 1}.UpperQuantile(p.outside)
	return t / math.Sqrt(m) * math.Sqrt(1-m/p.population)
}

func (p meanPrecision) halfWidth(n int) float64 { return p.sd * p.perSD(n) }

// chance is P(s ≤ wanted/perSD) for the sd s of a sample of n normal values
// (Kupper & Hafner 1989, The American Statistician 43, 101-105): s²/sd² is
// chi-square over its df, or F where the sd comes from a pilot.
func (p meanPrecision) chance(n int, wanted float64) float64 {
	ratio := wanted / p.halfWidth(n)
	if math.IsInf(ratio, 1) { // the whole population: no half-width at all
		return 1
	}
	df := float64(n - 1)
	if math.IsInf(p.pilotDF, 1) {
		return dist.ChiSquare{DF: df}.CDF(float64(df*ratio) * ratio)
	}
	return dist.F{DF1: df, DF2: p.pilotDF}.CDF(float64(ratio * ratio))
}

// guess is the n of a normal law, where the search starts.
func (p meanPrecision) guess(wanted float64) float64 {
	z := dist.Normal{}.UpperQuantile(p.outside) * p.sd / wanted
	return z * z / (1 + z*z/p.population)
}

// method words what the plan rests on.
func (p meanPrecision) method(c *Call) string {
	text := "t interval with n - 1 degrees of freedom, sd " + c.briefly(p.sd)
	if !math.IsInf(p.pilotDF, 1) {
		text += fmt.Sprintf(" from a pilot of %.0f", p.pilotDF+1)
	}
	if !math.IsInf(p.population, 1) {
		text += ofPopulation(p.population)
	}
	return text
}

// briefly words an sd that a plan rests on.
func (c *Call) briefly(sd float64) string { return c.withUnit(brief(sd), SameUnit) }

var meanPrecisionSize = &Function{
	Name:    "mean-precision-size",
	Version: 1,
	Summary: "how many values give a mean to within a half-width",
	Inputs: inputs(pilotSample, expectedSD, pilotN, halfWidth, planPopulation, chanceMet, confidence, direction,
		designEffect, nonResponse, checks),
	OneOf:       pilotWays,
	Results:     []Result{resultPlanN, resultPlanned, resultHalfWidth, resultChance},
	Findings:    append(slices.Concat(precisionFindings, oneSampleFindings), noSpreadKind, populationKind),
	Assumptions: []string{"independent values of one population", "normal values, or n large enough for their skewness"},
	Citations:   []string{"Cochran 1977 (finite population)", "Kupper & Hafner 1989 (chance met)", "ASTM E122"},
	Example: Example{
		Label:     "a mean to within 1, of a population of 600 with sd 12",
		Arguments: []Argument{{"sd", 12.0}, {"half-width", 1.0}, {"population-size", 600}},
		Want:      []Argument{{"n", 290}, {"attained-half-width", 0.9969149671714882753661829}},
		Tolerance: 1e-12,
		Source:    "arithmetic at 60 digits, testdata/references/numerics/sample_size_half_width.csv",
	},
	compute: func(c *Call) error {
		p, err := c.meanPrecision()
		if err != nil {
			return err
		}
		wanted := halfWidth.Of(c)
		holds := func(n int) bool { return staysIn(p.halfWidth(n), wanted) }
		purpose := ""
		if chance, ok := chanceMet.Given(c); ok {
			holds = func(n int) bool { return reaches(p.chance(n, wanted), chance) }
			purpose = fmt.Sprintf(" that is met with a chance of %s", percent(chance))
		}
		n, err := c.planN("half-width", c.largestN(), p.guess(wanted), holds, func(n int) string { return c.sized(p.halfWidth(n)) })
		if err != nil {
			return err
		}
		c.set("chance-met", p.chance(n, wanted))
		c.method = p.method(c)
		c.setPrecision(nText(n), "the mean", c.withUnit(FormatNumber(wanted), SameUnit)+purpose, p.halfWidth(n))
		return nil
	},
}

// setPrecision gives the half-width that a plan attains, and its sentence.
func (c *Call) setPrecision(counts, of, wanted string, attained float64) {
	c.set("attained-half-width", attained)
	c.sayPrecision(counts, of, wanted, c.sized(attained))
}

// setPrecisionOf is setPrecision for a given n.
func (c *Call) setPrecisionOf(counts, of string, attained float64) {
	c.set("attained-half-width", attained)
	c.sayPrecisionOf(counts, of, c.sized(attained))
}

// sayPrecision composes the sentence of a plan for a half-width.
func (c *Call) sayPrecision(counts, of, wanted, attained string) {
	c.sentence = fmt.Sprintf("Measure %s, planned for a half-width of %s: the half-width of %s will be about %s at %s confidence, %s (%s).%s",
		counts, wanted, of, attained, percent(confidence.Of(c)), c.inDirection(), c.method, c.toPlan())
}

// sayPrecisionOf is sayPrecision for a given n.
func (c *Call) sayPrecisionOf(counts, of, attained string) {
	c.sentence = fmt.Sprintf("With %s the half-width of %s will be about %s at %s confidence, %s (%s).",
		counts, of, attained, percent(confidence.Of(c)), c.inDirection(), c.method)
}

var meanPrecisionOf = &Function{
	Name:    "mean-precision",
	Version: 1,
	Summary: "how precisely n values will give a mean",
	Inputs: inputs(pilotSample, expectedSD, pilotN, plannedN, halfWidth.as("half-width", "a half-width, for the chance that it is met").optional(),
		planPopulation, confidence, direction, designEffect, nonResponse, checks),
	OneOf:       pilotWays,
	Results:     []Result{resultHalfWidth, resultChance},
	Findings:    append(slices.Concat(precisionFindings, oneSampleFindings), noSpreadKind),
	Assumptions: meanPrecisionSize.Assumptions,
	Citations:   meanPrecisionSize.Citations,
	Example: Example{
		Label:     "7 values out of 15, sd 2",
		Arguments: []Argument{{"sd", 2.0}, {"n", 7}, {"population-size", 15}},
		Want:      []Argument{{"attained-half-width", 1.350823676177430907733162}},
		Tolerance: 1e-12,
		Source:    "arithmetic at 60 digits, testdata/references/numerics/sample_size_half_width.csv",
	},
	compute: func(c *Call) error {
		p, err := c.meanPrecision()
		if err != nil {
			return err
		}
		n, err := c.countingOfPopulation()
		if err != nil {
			return err
		}
		if wanted, ok := halfWidth.Given(c); ok {
			c.set("chance-met", p.chance(n, wanted))
		}
		c.method = p.method(c)
		c.setPrecisionOf(c.nCounting(n), "the mean", p.halfWidth(n))
		return nil
	},
}
