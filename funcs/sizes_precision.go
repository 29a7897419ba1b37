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
	p := meanPrecision{pilotDF: math.Inf(1), population: math.Inf(1), outside: tail(confidence.Of(c), direction.Of(c))}
	if err := c.oneSidedLevel(); err != nil {
		return p, err
	}
	if size, ok := populationSize.Given(c); ok {
		p.population = float64(size)
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
		text += fmt.Sprintf(", finite population of %.0f", p.population)
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
		n, err := c.planN("half-width", int(math.Min(largestPlan, p.population)), p.guess(wanted), holds, func(n int) string { return c.sized(p.halfWidth(n)) })
		if err != nil {
			return err
		}
		c.set("attained-half-width", p.halfWidth(n))
		c.set("chance-met", p.chance(n, wanted))
		c.method = p.method(c)
		c.sayPrecision(nText(n), "the mean", c.withUnit(shortest(wanted), SameUnit)+purpose, c.sized(p.halfWidth(n)))
		return nil
	},
}

// sayPrecision composes the sentence of a plan for a half-width.
func (c *Call) sayPrecision(counts, of, wanted, attained string) {
	c.sentence = fmt.Sprintf("Measure %s, planned for a half-width of %s: the half-width of %s will be about %s at %s confidence, %s (%s).%s",
		counts, wanted, of, attained, percent(confidence.Of(c)), c.inDirection(), c.method, c.toPlan())
}

// sayAttained composes the sentence of the half-width that a given n attains.
func (c *Call) sayAttained(counts, of, attained string) {
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
		n, err := c.countingOf(p.population)
		if err != nil {
			return err
		}
		c.set("attained-half-width", p.halfWidth(n))
		if wanted, ok := halfWidth.Given(c); ok {
			c.set("chance-met", p.chance(n, wanted))
		}
		c.method = p.method(c)
		c.sayAttained(c.nCounting(n), "the mean", c.sized(p.halfWidth(n)))
		return nil
	},
}

// differencePrecision is the half-width of an interval of a difference of two
// means that are still to be measured.
type differencePrecision struct {
	first, second float64 // the sds
	outside       float64
	pooled        bool
}

func (c *Call) differencePrecision() (differencePrecision, error) {
	first, second := c.groupSDs()
	return differencePrecision{first, second, tail(confidence.Of(c), direction.Of(c)), variances.Of(c) == pooled}, c.oneSidedLevel()
}

// groupSDs gives the sds of two groups, and a caution where they are too unlike
// to be pooled.
func (c *Call) groupSDs() (first, second float64) {
	first, second = firstPlannedSD.Of(c), firstPlannedSD.Of(c)
	if sd, ok := secondPlannedSD.Given(c); ok {
		second = sd
	}
	if variances.Of(c) == pooled {
		c.checkSpreads("second-sd", spreadOf{sd: first}, spreadOf{sd: second})
	}
	return first, second
}

// halfWidth is t times the standard error at the sds expected, with
// Satterthwaite's degrees of freedom or the pooled variance.
func (p differencePrecision) halfWidth(n, m int) float64 {
	se, df := differenceError(p.first, p.second, n, m, p.pooled)
	return dist.Student{DF: df}.UpperQuantile(p.outside) * se
}

// differenceError is the standard error of a difference of means and its
// degrees of freedom (Welch 1947; Satterthwaite 1946; ISO 2854, pooled).
func differenceError(firstSD, secondSD float64, n, m int, pooled bool) (se, df float64) {
	// In units of the larger sd, so that no square passes the range of a double.
	unit := math.Max(firstSD, secondSD)
	a, b := firstSD/unit, secondSD/unit
	n1, n2 := float64(n), float64(m)
	v1, v2 := float64(a*a), float64(b*b)
	if pooled {
		df = n1 + n2 - 2
		v := (float64((n1-1)*v1) + float64((n2-1)*v2)) / df
		return unit * math.Sqrt(float64(v*(1/n1+1/n2))), df
	}
	v1, v2 = v1/n1, v2/n2
	df = float64((v1+v2)*(v1+v2)) / (float64(v1*v1)/(n1-1) + float64(v2*v2)/(n2-1))
	return unit * math.Sqrt(v1+v2), df
}

func (p differencePrecision) method(c *Call) string {
	kind := "t interval with Satterthwaite's degrees of freedom"
	if p.pooled {
		kind = "t interval with the pooled variance"
	}
	return fmt.Sprintf("%s, sds %s and %s", kind, c.briefly(p.first), c.briefly(p.second))
}

var differencePrecisionSize = &Function{
	Name:    "difference-precision-size",
	Version: 1,
	Summary: "how many values in each of two groups give the difference of their means to within a half-width",
	Inputs: inputs(firstPlannedSD, secondPlannedSD, halfWidth, allocation, variances, confidence, direction,
		designEffect, nonResponse, checks),
	Results:     []Result{resultPlanN, resultPlanSecond, resultPlanned, resultPlanned2, resultHalfWidth},
	Findings:    append(slices.Clip(precisionFindings), spreadsKind),
	Assumptions: []string{"independent values, and groups independent of one another", "normal values, or n large enough for their skewness"},
	Citations:   []string{"Welch 1947; Satterthwaite 1946", "ISO 2854 (pooled)"},
	Example: Example{
		Label:     "the difference of two depots' handling minutes to within 1.25, sds 3 and 2",
		Arguments: []Argument{{"first-sd", 3.0}, {"second-sd", 2.0}, {"half-width", 1.25}},
		Want:      []Argument{{"n", 34}, {"second-n", 34}, {"attained-half-width", 1.237987471286422225335484}},
		Tolerance: 1e-12,
		Source:    "arithmetic at 34 digits, testdata/references/plans/plans.csv",
	},
	compute: func(c *Call) error {
		p, err := c.differencePrecision()
		if err != nil {
			return err
		}
		wanted, ratio := halfWidth.Of(c), allocation.Of(c)
		z := dist.Normal{}.UpperQuantile(p.outside)
		start := float64(z*z) * (float64(p.first/wanted*p.first/wanted) + float64(p.second/wanted*p.second/wanted)/ratio)
		n, m, err := c.planGroups("half-width", ratio, start, func(n, m int) bool { return staysIn(p.halfWidth(n, m), wanted) },
			func(n, m int) string { return c.sized(p.halfWidth(n, m)) })
		if err != nil {
			return err
		}
		c.set("attained-half-width", p.halfWidth(n, m))
		c.method = p.method(c)
		c.sayPrecision(bothN(n, m), "the difference (first - second)", c.withUnit(shortest(wanted), SameUnit), c.sized(p.halfWidth(n, m)))
		return nil
	},
}

var differencePrecisionOf = &Function{
	Name:        "difference-precision",
	Version:     1,
	Summary:     "how precisely n values in each of two groups will give the difference of their means",
	Inputs:      inputs(firstPlannedSD, secondPlannedSD, plannedN, plannedSecondN, variances, confidence, direction, designEffect, nonResponse, checks),
	Results:     []Result{resultHalfWidth},
	Findings:    append(slices.Clip(precisionFindings), fewValuesKind, spreadsKind),
	Assumptions: differencePrecisionSize.Assumptions,
	Citations:   differencePrecisionSize.Citations,
	Example: Example{
		Label:     "the difference of two depots' handling minutes from 33 trips each, sds 3 and 2",
		Arguments: []Argument{{"first-sd", 3.0}, {"second-sd", 2.0}, {"n", 33}},
		Want:      []Argument{{"attained-half-width", 1.257448997429322884938332}},
		Tolerance: 1e-12,
		Source:    "arithmetic at 34 digits, testdata/references/plans/plans.csv",
	},
	compute: func(c *Call) error {
		p, err := c.differencePrecision()
		if err != nil {
			return err
		}
		n, m, err := c.countingGroups()
		if err != nil {
			return err
		}
		c.set("attained-half-width", p.halfWidth(n, m))
		c.method = p.method(c)
		c.sayAttained(c.bothCounting(n, m), "the difference (first - second)", c.sized(p.halfWidth(n, m)))
		return nil
	},
}
