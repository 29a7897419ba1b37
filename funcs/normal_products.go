package funcs

import (
	"fmt"
	"math"

	"halfwidth/funcs/internal/dist"
	"halfwidth/funcs/internal/num"
)

var (
	medians      = numbers("medians", "the median of each factor", positive, SameUnit).atMost(mostItems, fewerItems)
	geometricSDs = numbers("geometric-sds", "the geometric standard deviation of each factor: exp of the standard deviation of its logarithm", atLeast(1), NoUnit).atMost(mostItems, fewerItems)
	powers       = numbers("powers", "the power to which each factor is raised, -1 to divide by it; one number stands for all",
		anyNumber, NoUnit).atMost(mostItems, fewerItems).withDefault(List{Values: []float64{1}})
)

var lognormalProduct = &Function{
	Name:    "lognormal-product",
	Version: 1,
	Summary: "distribution of a product of independent lognormal factors, each raised to a power",
	Inputs:  inputs(medians, geometricSDs, powers, coverage, threshold.within(positive)),
	Results: []Result{
		{"median", Number, SameUnit, "median of the product"},
		{"mean", Number, SameUnit, "mean of the product, above the median"},
		{"geometric-sd", Number, NoUnit, "geometric standard deviation of the product"},
		{"lower", Number, SameUnit, "the product lies below it with probability (1 - probability)/2"},
		{"upper", Number, SameUnit, "the product lies above it with probability (1 - probability)/2"},
		{"probability-above", Number, NoUnit, "probability that the product passes the threshold"},
	},
	Findings:    []FindingKind{{"no-spread", "every factor's geometric standard deviation is 1, or its power 0"}},
	Assumptions: []string{"lognormal factors, independent of one another", "medians and geometric standard deviations are known"},
	Citations:   []string{"Aitchison & Brown 1957"},
	Example: Example{
		Label:     "one factor whose logarithm has mean 0 and standard deviation 1",
		Arguments: []Argument{{"medians", []float64{1}}, {"geometric-sds", []float64{math.E}}, {"threshold", 1.0}},
		Want:      []Argument{{"mean", 1.6487212707001282}, {"upper", 7.0990726}, {"probability-above", 0.5}},
		Tolerance: 1e-4,
		Source:    "mean exp(1/2); upper exp(1.960), 1.960 from JCGM 100:2008, Table G.1",
	},
	compute: func(c *Call) error {
		names, columns, err := c.itemLists([]In[List]{medians, geometricSDs, powers})
		if err != nil {
			return err
		}
		c.count(len(names))
		law := lognormalOf(columns[0], columns[1], columns[2])
		if law.sd == 0 {
			return refuse("no-spread", "geometric-sds", "The product has no spread: every factor has geometric standard deviation 1 or power 0; "+
				"it is %s, and nothing more can be said of it.", FormatNumber(num.ExpWide(law.mean)))
		}
		outside := (1 - coverage.Of(c)) / 2
		lower, upper := law.Quantile(outside), law.UpperQuantile(outside)
		c.set("median", num.ExpWide(law.mean))
		c.set("mean", num.ExpWide(law.mean.Add(num.TwoProduct(law.sd/2, law.sd))))
		c.set("geometric-sd", num.Exp(law.sd))
		c.set("lower", lower)
		c.set("upper", upper)
		c.method = "normal law of the sum of logarithms, factors independent"
		c.sentence = fmt.Sprintf("The product of %s has median %s and geometric standard deviation %s and lies from %s to %s with probability %s (%s).",
			plural(len(names), "factor"), c.withUnit(brief(num.ExpWide(law.mean)), SameUnit), brief(num.Exp(law.sd)),
			brief(lower), brief(upper), percent(coverage.Of(c)), c.method)
		c.sayThreshold(law)
		return nil
	},
}

// twoTails is what a law needs for the probability beyond a threshold.
type twoTails interface {
	CDF(x float64) float64
	SF(x float64) float64
}

// lognormalLaw is the law of X with log X normal; the mean of the logarithm is
// kept to twice a double's length, because exp makes its error a relative one.
type lognormalLaw struct {
	mean num.Wide
	sd   float64
}

// lognormalOf is the law of the product of independent factors: log mean
// Σpᵢ·log(medianᵢ), log variance Σ(pᵢ·log(gᵢ))².
func lognormalOf(medians, geometricSDs, powers []float64) lognormalLaw {
	var law lognormalLaw
	var variance float64
	for i, p := range powers {
		law.mean = law.mean.Add(num.LogWide(num.Widen(medians[i])).Times(p))
		s := float64(p * num.Log(geometricSDs[i]))
		variance += float64(s * s)
	}
	law.sd = math.Sqrt(variance)
	return law
}

// standardised is (log x - mean)/sd.
func (l lognormalLaw) standardised(x float64) num.Wide {
	if !(x > 0) {
		return num.Widen(math.Inf(-1))
	}
	return num.LogWide(num.Widen(x)).Sub(l.mean).Over(l.sd)
}

// SF is P(X > x).
func (l lognormalLaw) SF(x float64) float64 { return upperTail(l.standardised(x)) }

// CDF is P(X <= x).
func (l lognormalLaw) CDF(x float64) float64 { return upperTail(l.standardised(x).Neg()) }

// Quantile is x with P(X <= x) = p.
func (l lognormalLaw) Quantile(p float64) float64 { return l.at(dist.Normal{}.Quantile(p)) }

// UpperQuantile is x with P(X > x) = q.
func (l lognormalLaw) UpperQuantile(q float64) float64 { return l.at(dist.Normal{}.UpperQuantile(q)) }

// at is the value whose logarithm lies z standard deviations from the mean.
func (l lognormalLaw) at(z float64) float64 { return num.ExpWide(l.mean.Add(num.TwoProduct(l.sd, z))) }
