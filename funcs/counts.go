package funcs

import (
	"fmt"
	"math"

	"halfwidth/funcs/internal/dist"
	"halfwidth/funcs/internal/num"
)

var counts = []*Function{proportionInterval, proportionDifferenceInterval, proportionsComparison, rateInterval, rateRatioInterval}

var (
	successes      = count("successes", "how many of the n have the property", 0)
	trials         = count("n", "how many were looked at", 1)
	shareReference = number("reference", "the share to compare with", betweenZeroAndOne, NoUnit).optional()

	firstSuccesses  = successes.as("first-successes", "how many of the first group have the property")
	firstTrials     = trials.as("first-n", "how many in the first group")
	secondSuccesses = successes.as("second-successes", "how many of the second group have the property")
	secondTrials    = trials.as("second-n", "how many in the second group")
)

// successesOf reads how many of how many.
func (c *Call) successesOf(successes, trials In[int]) (x, n float64, err error) {
	x, n = float64(successes.Of(c)), float64(trials.Of(c))
	if x > n {
		return x, n, c.wrong(successes.Name, FormatNumber(x), fmt.Sprintf("must be at most %s (%s)", trials.Name, FormatNumber(n)),
			"give how many of the "+FormatNumber(n)+" have the property")
	}
	return x, n, nil
}

// shareResults are the results of an interval for a share or a rate.
func shareResults(name, summary string) []Result {
	return []Result{
		{name, Number, NoUnit, summary},
		ratioLower, ratioUpper,
		resultP,
	}
}

var proportionInterval = &Function{
	Name:    "proportion-interval",
	Version: 1,
	Summary: "share of a population with its confidence interval, and a test against a reference",
	Inputs:  inputs(successes, trials, shareKind, populationSize, shareReference, confidence, direction),
	Results: append(shareResults("proportion", "successes over n"),
		Result{"total", Number, NoUnit, "population-size times the proportion"},
		Result{"total-lower", Number, NoUnit, "lower limit of the total"},
		Result{"total-upper", Number, NoUnit, "upper limit of the total"}),
	Findings:    []FindingKind{{"reference-between-counts", "the reference is no whole number of the population, so there is no exact p-value"}},
	Assumptions: []string{"independent cases with one chance, or a simple random sample of the population"},
	Citations:   []string{"Wilson 1927", "Clopper & Pearson 1934"},
	Example: Example{
		Label:     "4 defective of 20, exact limits at 90%",
		Arguments: []Argument{{"successes", 4}, {"n", 20}, {"kind", exactShare}, {"confidence", 0.90}},
		Want:      []Argument{{"proportion", 0.2}, {"lower", 0.071354}, {"upper", 0.401029}},
		Tolerance: 1e-5,
		Source:    "NIST/SEMATECH e-Handbook of Statistical Methods, 7.2.4.1",
	},
	compute: func(c *Call) error {
		x, n, err := c.successesOf(successes, trials)
		if err != nil {
			return err
		}
		size, finite, err := c.sampledPopulation(int(n), "give the number in the whole population")
		if err != nil {
			return err
		}
		c.count(int(n))
		conf, dir := confidence.Of(c), direction.Of(c)
		var l limits
		if shareKind.Of(c) == wilson {
			l = c.wilsonInterval(x, n, float64(size), finite)
		} else if finite {
			l = hypergeometricLimits(int(x), int(n), size, conf, dir)
			c.method = "exact hypergeometric interval" + ofPopulation(float64(size))
		} else {
			l = limitsOf(conf, dir,
				func(q float64) float64 { lower, _ := clopperPearson(x, n, q); return lower },
				func(q float64) float64 { _, upper := clopperPearson(x, n, q); return upper })
			c.method = "exact binomial interval (Clopper-Pearson)"
		}
		c.set("proportion", x/n)
		c.setLimits(l)
		if finite {
			c.setTotals(float64(size), x/n, l)
			if shareKind.Of(c) == exactShare { // limits of a number of cases
				for _, name := range []string{"total-lower", "total-upper"} {
					if v, ok := c.results[name].(float64); ok {
						c.set(name, math.Round(v))
					}
				}
			}
		}
		c.say(statement{"share", x / n, l, NoUnit, fmt.Sprintf("%s of n = %s", FormatNumber(x), FormatNumber(n))})
		if ref, ok := shareReference.Given(c); ok && !(finite && n == float64(size)) {
			c.testShare(x, n, ref, size, finite)
		}
		return nil
	},
}

// wilsonInterval gives the score limits. A finite population enters by
// n(N-1)/(N-n) in the place of n, which makes the variance of the share that of
// sampling without replacement.
func (c *Call) wilsonInterval(x, n, size float64, finite bool) limits {
	share := x / n
	c.method = "score interval (Wilson), without continuity correction"
	if finite {
		c.method += ofPopulation(size)
		if n == size {
			return limitsAt(direction.Of(c), share, share)
		}
		n *= (size - 1) / (size - n)
	}
	return limitsOf(confidence.Of(c), direction.Of(c),
		func(q float64) float64 {
			lower, _ := wilsonLimits(share, n, dist.Normal{}.UpperQuantile(q))
			return lower
		},
		func(q float64) float64 {
			_, upper := wilsonLimits(share, n, dist.Normal{}.UpperQuantile(q))
			return upper
		})
}

// wilsonLimits are the roots of (p - share)² = z²p(1-p)/n: the greater one by
// the formula, the lesser from their product, so that nothing cancels
// (Wilson 1927).
func wilsonLimits(share, n, z float64) (lower, upper float64) {
	r := float64(z*z) / n
	upper = (share + r/2 + math.Sqrt(float64(r*share*(1-share))+float64(r*r)/4)) / (1 + r)
	switch share {
	case 0:
		lower = 0
	case 1:
		lower, upper = 1/(1+r), 1
	default:
		lower = float64(share*share) / float64((1+r)*upper)
	}
	if z < 0 { // a limit that less than half of the confidence keeps on its side
		lower, upper = upper, lower
	}
	return lower, upper
}

// testShare gives the p-value against a reference share: by the score z, or
// by the exact tail that belongs to the exact interval.
func (c *Call) testShare(x, n, ref float64, size int, finite bool) {
	dir := direction.Of(c)
	if shareKind.Of(c) == wilson {
		effective := n
		if finite {
			effective *= float64(size-1) / (float64(size) - n)
		}
		z := (x/n - ref) / math.Sqrt(ref*(1-ref)/effective)
		p := pValue(dir, z, dist.Normal{})
		c.set("p-value", p)
		c.sayTest(ref, NoUnit, "score z", z, p)
		return
	}
	p := binomialPValue(x, n, ref, 1-ref, dir)
	if finite {
		marked := math.Round(ref * float64(size))
		if !withinWhole(float64(ref*float64(size)), marked) {
			c.inform("reference-between-counts", "reference", "A share of %s is no whole number of %d, so there is no exact p-value; give a share that is, or leave population-size out.",
				FormatNumber(ref), size)
			return
		}
		law := dist.Hypergeometric{Population: size, Marked: int(marked), Draws: int(n)}
		p = tailP(dir, law.CDF(int(x)), law.SF(int(x)-1))
	}
	c.setExactTest(ref, p)
}

// hypergeometricLimits are the fewest and the most marked of the population
// that are not rejected with the probability outside each limit, over its size.
func hypergeometricLimits(x, n, size int, conf float64, dir string) limits {
	law := func(marked int) dist.Hypergeometric {
		return dist.Hypergeometric{Population: size, Marked: marked, Draws: n}
	}
	fewest, most := x, size-(n-x) // that are possible
	middle := fewest + int(float64(most-fewest)*float64(x)/float64(n))
	return limitsOf(conf, dir,
		func(q float64) float64 { // the fewest with P(X >= x) > q
			marked, _ := num.Smallest(fewest, most, middle, func(marked int) bool { return marked == most || !staysIn(law(marked).SF(x-1), q) })
			return float64(marked) / float64(size)
		},
		func(q float64) float64 { // the most with P(X <= x) > q
			beyond, _ := num.Smallest(fewest+1, most+1, middle, func(marked int) bool { return marked > most || staysIn(law(marked).CDF(x), q) })
			return float64(beyond-1) / float64(size)
		})
}

var proportionDifferenceInterval = &Function{
	Name:        "proportion-difference-interval",
	Version:     1,
	Summary:     "difference of two shares (first - second) with its confidence interval, and a test of equality",
	Inputs:      inputs(firstSuccesses, firstTrials, secondSuccesses, secondTrials, confidence, direction),
	Results:     shareResults("difference", "first share less second share"),
	Findings:    []FindingKind{{"interval-and-test-disagree", "the interval holds 0 but the test rejects equality, or the other way round"}},
	Assumptions: []string{"independent cases, one chance within each group"},
	Citations:   []string{"Newcombe 1998, Interval estimation for the difference between independent proportions (method 10)"},
	Example: Example{
		Label:     "56 of 70 and 48 of 80",
		Arguments: []Argument{{"first-successes", 56}, {"first-n", 70}, {"second-successes", 48}, {"second-n", 80}},
		Want:      []Argument{{"difference", 0.2}, {"lower", 0.0524}, {"upper", 0.3339}},
		Tolerance: 1e-3,
		Source:    "Newcombe 1998, Interval estimation for the difference between independent proportions, table II, contrast a, method 10",
	},
	compute: func(c *Call) error {
		x1, n1, err := c.successesOf(firstSuccesses, firstTrials)
		if err != nil {
			return err
		}
		x2, n2, err := c.successesOf(secondSuccesses, secondTrials)
		if err != nil {
			return err
		}
		c.count(int(n1 + n2))
		conf, dir := confidence.Of(c), direction.Of(c)
		d, l := newcombe(x1, n1, x2, n2, conf, dir)
		z := pooledScoreZ(x1, n1, x2, n2)
		p := scoreP(x1+x2, n1+n2, z, dir)
		c.set("difference", d)
		c.setLimits(l)
		c.set("p-value", p)
		c.method = "score limits of each share joined (Newcombe, method 10); p from the pooled score z, both without continuity correction"
		c.say(statement{"difference of shares (first - second)", d, l, NoUnit, fmt.Sprintf("n = %s and %s", FormatNumber(n1), FormatNumber(n2))})
		c.sayTest(0, NoUnit, "score z", z, p)
		holdsZero := !(l.hasLower && l.lower > 0) && !(l.hasUpper && l.upper < 0)
		if rejects := p < 1-conf; rejects == holdsZero && p != 1-conf {
			c.caution("interval-and-test-disagree", "", "The interval and the test come from different methods and disagree here about equality; "+
				"treat the difference as undecided, or measure more.")
		}
		return nil
	},
}

// scoreP is the p-value of a pooled score z; 1 where the pooled share is 0 or 1.
func scoreP(x, n, z float64, dir string) float64 {
	if x == 0 || x == n {
		return 1
	}
	return pValue(dir, z, dist.Normal{})
}

// newcombe is the difference of two shares with the limits of method 10.
func newcombe(x1, n1, x2, n2, conf float64, dir string) (float64, limits) {
	p1, p2 := x1/n1, x2/n2
	d := p1 - p2
	lower := func(z float64) float64 {
		below, _ := wilsonDistances(p1, n1, z)
		_, above := wilsonDistances(p2, n2, z)
		return d - math.Sqrt(float64(below*below)+float64(above*above))
	}
	upper := func(z float64) float64 {
		_, above := wilsonDistances(p1, n1, z)
		below, _ := wilsonDistances(p2, n2, z)
		return d + math.Sqrt(float64(above*above)+float64(below*below))
	}
	// A z below 0 (one limit, less than half of the confidence) puts a limit on the
	// other side of the difference.
	if dir != either && conf < 0.5 {
		lower, upper = upper, lower
	}
	limit := func(at func(z float64) float64) func(q float64) float64 {
		return func(q float64) float64 { return at(dist.Normal{}.UpperQuantile(q)) }
	}
	return d, limitsOf(conf, dir, limit(lower), limit(upper))
}
