package funcs

import (
	"fmt"
	"math"
	"slices"

	"halfwidth/funcs/internal/dist"
)

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
		c.method = p.method(c)
		c.setPrecision(bothN(n, m), "the difference (first - second)", c.withUnit(FormatNumber(wanted), SameUnit), p.halfWidth(n, m))
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
		c.method = p.method(c)
		c.setPrecisionOf(c.bothCounting(n, m), "the difference (first - second)", p.halfWidth(n, m))
		return nil
	},
}
