package funcs

import (
	"fmt"
	"slices"

	"halfwidth/funcs/internal/dist"
)

const (
	normalKind       = "normal"
	distributionFree = "distribution-free"
)

var toleranceKind = choice("kind", "normal: mean ± factor·sd, exact for normal values; distribution-free: the smallest and largest value",
	normalKind, distributionFree)

var toleranceInterval = &Function{
	Name:    "tolerance-interval",
	Version: 2,
	Summary: "limits that hold a given share of the population, with a given confidence",
	Inputs: inputs(sample, meanGiven, sdGiven, nGiven, content, toleranceKind,
		confidence.as("confidence", "the confidence that the limits hold the content"), direction, checks),
	OneOf: []OneOf{sampleWays},
	Results: []Result{
		resultLower, resultUpper,
		{"factor", Number, NoUnit, "how many sds each limit lies from the mean; kind normal only"},
		resultN,
		{"attained-confidence", Number, NoUnit, "the confidence that the limits have"},
	},
	Findings: append([]FindingKind{noSpreadKind, {"confidence-not-attainable", "the smallest and largest value do not reach the confidence"},
		{"kind-needs-sample", "kind distribution-free without the values"}}, oneSampleFindings...),
	Assumptions: []string{"independent values of one population", "kind normal: a normal population, at every n"},
	Citations:   []string{"ISO 16269-6 (exact factors)", "Wilks 1941"},
	Example: Example{
		Label:     "43 wafers, 90% of the population, confidence 99%, upper limit only",
		Arguments: []Argument{{"mean", 0.0}, {"sd", 1.0}, {"n", 43}, {"content", 0.9}, {"confidence", 0.99}, {"direction", below}},
		Want:      []Argument{{"factor", 1.8740}, {"upper", 1.8740}},
		Tolerance: 5e-4,
		Source:    "NIST/SEMATECH e-Handbook of Statistical Methods, 7.2.6.3, by the noncentral t distribution (1.8740)",
	},
	compute: func(c *Call) error {
		s, err := c.summaryOf(sample, meanGiven, sdGiven, nGiven)
		if err != nil {
			return err
		}
		share, conf, dir := content.Of(c), confidence.Of(c), direction.Of(c)
		c.set("n", s.n)
		what := fmt.Sprintf("hold %s of the population with %s confidence", percent(share), percent(conf))
		if toleranceKind.Of(c) == distributionFree {
			return c.orderTolerance(s.n, share, conf, dir, what)
		}
		if s.sd == 0 {
			return c.noSpread(c.firstGiven("sample", "sd"))
		}
		factor := dist.OneSidedToleranceFactor(s.n, share, conf)
		if dir == either {
			factor = dist.ToleranceFactor(s.n, share, conf)
		}
		reach := float64(factor * s.sd)
		l := limitsAt(dir, s.mean-reach, s.mean+reach)
		c.setLimits(l)
		c.set("factor", factor)
		c.set("attained-confidence", conf)
		c.method = fmt.Sprintf("normal tolerance limits, exact factor %s, sd with divisor n - 1", brief(factor))
		c.sayLimits(l, reach, what, nText(s.n))
		return c.checkSample()
	},
}

// orderTolerance gives the smallest and largest value as limits.
func (c *Call) orderTolerance(n int, share, conf float64, dir, what string) error {
	if !c.has("sample") {
		return refuse("kind-needs-sample", "kind", "Distribution-free limits are values of the sample itself; give the sample, or use kind normal.")
	}
	attained := orderConfidence(n, share, dir)
	if !reaches(attained, conf) {
		return refuse("confidence-not-attainable", "confidence", "With %s the smallest and largest value hold %s of the population with only %s confidence; "+
			"measure more (see distribution-free-tolerance-size), or ask for less.", nText(n), percent(share), percent(roundDown(attained)))
	}
	values := c.gapless(sample.Of(c))
	lowest, highest := slices.Min(values), slices.Max(values)
	l := limitsAt(dir, lowest, highest)
	c.setLimits(l)
	c.set("attained-confidence", attained)
	c.method = "distribution-free limits, attained confidence " + percent(roundDown(attained))
	c.sayLimits(l, highest-lowest, what, nText(n))
	if checks.Of(c) {
		c.checkNeighbours("sample", "The sample", sample.Of(c), n)
	}
	return nil
}

// sayLimits composes the sentence of limits that stand for themselves, without
// an estimate between them. Their last place is that of the reach.
func (c *Call) sayLimits(l limits, reach float64, what, counts string) {
	place := lastPlace(reach, reach)
	tail := fmt.Sprintf("%s (direction %s, %s; %s).", what, direction.Of(c), counts, c.method)
	switch {
	case l.hasLower && l.hasUpper:
		c.sentence = fmt.Sprintf("The limits %s to %s %s", toPlace(l.lower, place), c.withUnit(toPlace(l.upper, place), SameUnit), tail)
	case l.hasLower:
		c.sentence = fmt.Sprintf("Values from %s upward %s", c.withUnit(toPlace(l.lower, place), SameUnit), tail)
	default:
		c.sentence = fmt.Sprintf("Values up to %s %s", c.withUnit(toPlace(l.upper, place), SameUnit), tail)
	}
}
