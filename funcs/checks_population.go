package funcs

import (
	"fmt"
	"math"
	"slices"

	"halfwidth/funcs/internal/dist"
	"halfwidth/funcs/internal/num"
)

var (
	shape = choice("shape", "the population's shape", "normal", "uniform", "exponential", "lognormal", "bernoulli", "poisson", "pareto", "cauchy", "t")

	populationN    = count("n", "how many values a sample has", 2).withDefault(30)
	shapeParameter = number("parameter", "lognormal: sd of the logarithm; bernoulli: probability; poisson: mean; pareto: index; t: degrees of freedom",
		positive, NoUnit).optional()
)

// population is a law to draw from. Its values come less the target.
type population struct {
	draw     func(*num.Stream, []float64)
	cost     int                 // of drawing a value, about; 1 for one drawn from data
	sd       float64             // +Inf where there is no finite variance
	distance func(n int) float64 // exact sup|F - Φ| of the standardised mean, where there is a formula
	noMean   bool
}

var populationCoverage = &Function{
	Name:    "population-coverage",
	Version: 2,
	Summary: "how often the t interval holds the true mean for a population of a known shape, and how far the mean is from normal",
	Inputs:  inputs(shape, shapeParameter, populationN, coverageResamples, seedInput, confidence, direction),
	Results: append(append([]Result{}, coverageResults...),
		Result{"distance-from-normal", Number, NoUnit, "largest difference of the distribution function of the standardised mean from the normal one; absent without a finite variance"}),
	Findings:    []FindingKind{tooManyDrawsKind, fewerResamplesKind, noEnoughKind, {"no-mean", "a pareto index of 1 or less has no mean to hold"}},
	Assumptions: []string{"independent draws"},
	Citations:   []string{"central limit theorem", "Berry 1941", "Esseen 1942"},
	Example: Example{
		Label:     "exponential values, n = 2",
		Arguments: []Argument{{"shape", "exponential"}, {"n", 2}},
		Want:      []Argument{{"coverage", 0.9109414}, {"distance-from-normal", 0.0944633095}},
		Tolerance: 0.01,
		Source:    "exact: the sum is gamma and independent of difference over sum, which is uniform; one integral (20,000 draws, error 0.002)",
	},
	compute: func(c *Call) error {
		p, err := c.population()
		if err != nil {
			return err
		}
		n := populationN.Of(c)
		finite := !math.IsInf(p.sd, 1)
		sim, err := c.coverage(coverageDraws{n: n, cost: p.cost, draw: p.draw, means: finite && p.distance == nil})
		if err != nil {
			return err
		}
		c.setCoverage(sim, n)
		how := ""
		if finite {
			if p.distance != nil {
				c.set("distance-from-normal", p.distance(n))
			} else {
				c.set("distance-from-normal", simulatedDistance(sim.means, p.sd/math.Sqrt(float64(n))))
				how = ", its distance from normal simulated too"
			}
		} else {
			what := "variance"
			if p.noMean {
				what = "mean"
			}
			c.caution("heavy-tail", "shape", "This population has no finite %s: no n is enough for a t interval, and the coverage does not settle at the confidence as n grows.", what)
		}
		share := c.results["coverage"].(float64)
		c.method = fmt.Sprintf("%d samples of %d simulated, seed %d%s", sim.resamples, n, seedInput.Of(c), how)
		c.sentence = fmt.Sprintf("For a population of shape %s the %s t interval (direction %s) from n = %d holds the true mean in %s of cases (simulation error %s; %s).",
			c.shapeText(), percent(confidence.Of(c)), direction.Of(c), n, percent(share), brief(c.results["simulation-error"].(float64)), c.method)
		return nil
	},
}

func (c *Call) shapeText() string {
	text := shape.Of(c)
	if v, ok := shapeParameter.Given(c); ok {
		text += " (" + brief(v) + ")"
	}
	return text
}

// population gives the law asked for.
func (c *Call) population() (population, error) {
	a, given := shapeParameter.Given(c)
	name := shape.Of(c)
	needs := map[string]string{"lognormal": "the sd of the logarithm", "bernoulli": "the probability", "poisson": "the mean", "pareto": "the index", "t": "the degrees of freedom"}
	if what, ok := needs[name]; ok && !given {
		return population{}, c.wrong("parameter", "", "is missing", fmt.Sprintf("the shape %s needs %s", name, what))
	} else if !ok && given {
		return population{}, c.wrong("parameter", shortest(a), "is not taken by the shape "+name, "leave it out")
	}
	inf := math.Inf(1)
	switch name {
	case "uniform":
		return population{cost: 1, draw: each(func(s *num.Stream) float64 { return s.Uniform() - 0.5 }), sd: math.Sqrt(1.0 / 12)}, nil
	case "exponential":
		return population{cost: 1, draw: each(func(s *num.Stream) float64 { return s.Exponential() - 1 }), sd: 1, distance: gammaDistance}, nil
	case "lognormal":
		if a > 20 { // so that neither mean nor variance passes what a double holds
			return population{}, c.wrong("parameter", shortest(a), "must be at most 20 as the sd of a logarithm", "give a smaller one")
		}
		centre := num.Exp(float64(a*a) / 2)
		return population{cost: 2, draw: each(func(s *num.Stream) float64 { return num.Exp(float64(a*s.Normal())) - centre }),
			sd: centre * math.Sqrt(num.Expm1(float64(a*a)))}, nil
	case "bernoulli":
		if a >= 1 {
			return population{}, c.wrong("parameter", shortest(a), "must be a probability, strictly between 0 and 1", "give a smaller one")
		}
		return population{cost: 1, draw: each(func(s *num.Stream) float64 {
			if s.Uniform() < a {
				return 1 - a
			}
			return -a
		}), sd: math.Sqrt(a * (1 - a)), distance: func(n int) float64 {
			return latticeDistance(float64(n)*a, math.Sqrt(float64(n)*a*(1-a)), func(k float64) float64 { return binomialAtMost(k, float64(n), a) })
		}}, nil
	case "poisson":
		if a > 1e6 {
			return population{}, c.wrong("parameter", shortest(a), "must be at most 1000000", "give a smaller mean")
		}
		return population{cost: 4, draw: poissonDraws(a), sd: math.Sqrt(a), distance: func(n int) float64 {
			mean := float64(n) * a
			return latticeDistance(mean, math.Sqrt(mean), func(k float64) float64 { atMost, _ := poissonTails(k, mean); return atMost })
		}}, nil
	case "pareto":
		if a <= 1 {
			return population{}, refuse("no-mean", "parameter", "A pareto population of index %s has no mean, so no interval can hold it; use an index above 1.", shortest(a))
		}
		p := population{cost: 2, draw: each(func(s *num.Stream) float64 { return num.Exp(s.Exponential()/a) - a/(a-1) }), sd: inf}
		if a > 2 {
			p.sd = math.Sqrt(a/(a-2)) / (a - 1)
		}
		return p, nil
	case "cauchy":
		return population{cost: 2, draw: each(func(s *num.Stream) float64 { return s.Normal() / s.Normal() }), sd: inf, noMean: true}, nil
	case "t":
		if a < 0.25 { // its values would pass what a double holds
			return population{}, c.wrong("parameter", shortest(a), "must be at least 0.25 degrees of freedom", "give more")
		}
		p := population{cost: 4, draw: studentDraws(a), sd: inf, noMean: a <= 1}
		if a > 2 {
			p.sd = math.Sqrt(a / (a - 2))
		}
		return p, nil
	}
	return population{cost: 1, draw: each((*num.Stream).Normal), sd: 1, distance: func(int) float64 { return 0 }}, nil
}

// latticeDistance is sup|F - Φ| of a standardised law on the whole numbers from
// 0: at each of them, the distance just before and at the jump. As both change
// smoothly over an sd, many numbers are searched in steps of a 64th of it.
func latticeDistance(mean, sd float64, atMost func(k float64) float64) float64 {
	at := func(k float64) float64 {
		if k < 0 {
			return 0
		}
		before, normal := 0.0, dist.Normal{}.CDF((k-mean)/sd)
		if k > 0 {
			before = atMost(k - 1)
		}
		return math.Max(math.Abs(before-normal), math.Abs(atMost(k)-normal))
	}
	first, last := math.Max(0, math.Floor(mean-float64(9*sd))), math.Ceil(mean+float64(9*sd))+1
	step := math.Max(1, math.Floor(sd/64))
	best, largest := highest(at, first, last, step)
	for step > 1 {
		step = math.Ceil(step / 2)
		best, largest = climb(at, best, largest, step)
	}
	return largest
}

// gammaDistance is sup|F - Φ| of the standardised mean of n exponential
// values: the sum has a gamma law.
func gammaDistance(n int) float64 {
	mean, sd := float64(n), math.Sqrt(float64(n))
	law := dist.Gamma{Shape: mean}
	at := func(z float64) float64 {
		return math.Abs(law.CDF(math.Max(0, mean+float64(z*sd))) - dist.Normal{}.CDF(z))
	}
	best, largest := highest(at, -4, 4, 1.0/64)
	for step := 1.0 / 128; step > 1e-9; step /= 2 {
		best, largest = climb(at, best, largest, step)
	}
	return largest
}

// highest is the largest of f from first to last in steps, and where it is.
func highest(f func(float64) float64, first, last, step float64) (at, largest float64) {
	for x := first; x <= last; x += step {
		if y := f(x); y > largest {
			at, largest = x, y
		}
	}
	return at, largest
}

// climb looks one step to either side for more.
func climb(f func(float64) float64, at, largest, step float64) (float64, float64) {
	from := at
	for _, x := range []float64{from - step, from + step} {
		if y := f(x); y > largest {
			at, largest = x, y
		}
	}
	return at, largest
}

// simulatedDistance is sup|F - Φ| with F the empirical law of simulated means in
// units of their standard error, which it sorts; it cannot be told from 0 below
// about 1/√resamples.
func simulatedDistance(means []float64, standardError float64) float64 {
	slices.Sort(means)
	var largest float64
	b := float64(len(means))
	for i, v := range means {
		normal := dist.Normal{}.CDF(v / standardError)
		largest = math.Max(largest, math.Max(math.Abs(float64(i)/b-normal), math.Abs(float64(i+1)/b-normal)))
	}
	return largest
}
