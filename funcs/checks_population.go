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
	// skewness and excess kurtosis, where there are four finite moments
	g1, g2 float64
	four   bool
}

// withMoments is p with its skewness and excess kurtosis, unless they pass what a
// double can hold.
func (p population) withMoments(g1, g2 float64) population {
	p.g1, p.g2, p.four = g1, g2, finite(g1) && finite(g2)
	return p
}

var populationCoverage = &Function{
	Name:    "population-coverage",
	Version: 2,
	Summary: "how often the t interval holds the true mean for a population of a known shape, and how far the mean is from normal",
	Inputs:  inputs(shape, shapeParameter, populationN, coverageResamples, seedInput, confidence, direction),
	Results: slices.Concat(coverageResults, []Result{resultPredicted, resultNeeded,
		{"distance-from-normal", Number, NoUnit, "largest difference of the distribution function of the standardised mean from the normal one; absent without a finite variance"}}),
	Findings:    []FindingKind{tooManyDrawsKind, fewerResamplesKind, noVarianceKind, coverageShortKind, {"no-mean", "a pareto index of 1 or less has no mean to hold"}},
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
		hasVariance := !math.IsInf(p.sd, 1)
		sim, err := c.coverage(coverageDraws{n: n, cost: p.cost, draw: p.draw, means: hasVariance && p.distance == nil})
		if err != nil {
			return err
		}
		c.setCoverage(sim, n)
		how := ""
		if hasVariance {
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
			c.caution("heavy-tail", "shape", "This population has no finite %s: no n is enough for a t interval, and the coverage does not settle at the confidence as n grows. Use median-interval.", what)
		}
		c.method = fmt.Sprintf("%d samples of %d simulated, seed %d%s", sim.resamples, n, seedInput.Of(c), how)
		var seen *outlook
		enough, target := "", "the true mean"
		switch {
		case p.noMean:
			enough, target = " There is no mean, and no n is enough for one.", "the centre"
		case !hasVariance:
			enough = " Without a finite variance no n is enough."
		case p.four:
			o, err := c.predict(n, p.g1, p.g2)
			if err != nil {
				return err
			}
			seen = &o
		default:
			enough = " How many values would be enough cannot be predicted: the fourth moment is infinite."
		}
		c.sayCoverage("shape", c.shapeText(), target, n, seen, enough)
		return nil
	},
}

// shapeNeeds says what the parameter of a shape is.
var shapeNeeds = map[string]string{"lognormal": "sd of the logarithm", "bernoulli": "probability", "poisson": "mean", "pareto": "index", "t": "degrees of freedom"}

func (c *Call) shapeText() string {
	article := "a"
	if shape.Of(c) == "exponential" {
		article = "an"
	}
	text := article + " " + shape.Of(c) + " population"
	if v, ok := shapeParameter.Given(c); ok {
		text += fmt.Sprintf(" (%s %s)", shapeNeeds[shape.Of(c)], brief(v))
	}
	return text
}

// population gives the law asked for.
func (c *Call) population() (population, error) {
	a, given := shapeParameter.Given(c)
	name := shape.Of(c)
	if what, ok := shapeNeeds[name]; ok && !given {
		return population{}, c.wrong("parameter", "", "is missing", fmt.Sprintf("the shape %s needs the %s", name, what))
	} else if !ok && given {
		return population{}, c.wrong("parameter", FormatNumber(a), "is not taken by the shape "+name, "leave it out")
	}
	inf := math.Inf(1)
	switch name {
	case "uniform":
		return population{cost: 1, draw: each(func(s *num.Stream) float64 { return s.Uniform() - 0.5 }), sd: math.Sqrt(1.0 / 12)}.withMoments(0, -1.2), nil
	case "exponential":
		return population{cost: 1, draw: each(func(s *num.Stream) float64 { return s.Exponential() - 1 }), sd: 1, distance: gammaDistance}.withMoments(2, 6), nil
	case "lognormal":
		if a > 20 { // so that neither mean nor variance passes what a double holds
			return population{}, c.wrong("parameter", FormatNumber(a), "must be at most 20 as the sd of a logarithm", "give a smaller one")
		}
		centre := num.Exp(float64(a*a) / 2)
		return population{cost: 2, draw: each(func(s *num.Stream) float64 { return num.Exp(float64(a*s.Normal())) - centre }),
			sd: centre * math.Sqrt(num.Expm1(float64(a*a)))}.withMoments(lognormalMoments(a)), nil
	case "bernoulli":
		if a >= 1 {
			return population{}, c.wrong("parameter", FormatNumber(a), "must be a probability, strictly between 0 and 1", "give a smaller one")
		}
		return population{cost: 1, draw: each(func(s *num.Stream) float64 {
			if s.Uniform() < a {
				return 1 - a
			}
			return -a
		}), sd: math.Sqrt(a * (1 - a)), distance: func(n int) float64 {
			return latticeDistance(float64(n)*a, math.Sqrt(float64(n)*a*(1-a)), func(k float64) float64 { return binomialAtMost(k, float64(n), a) })
		}}.withMoments((1-2*a)/math.Sqrt(a*(1-a)), 1/(a*(1-a))-6), nil
	case "poisson":
		if a > 1e6 {
			return population{}, c.wrong("parameter", FormatNumber(a), "must be at most 1000000", "give a smaller mean")
		}
		return population{cost: 4, draw: poissonDraws(a), sd: math.Sqrt(a), distance: func(n int) float64 {
			mean := float64(n) * a
			return latticeDistance(mean, math.Sqrt(mean), func(k float64) float64 { atMost, _ := poissonTails(k, mean); return atMost })
		}}.withMoments(1/math.Sqrt(a), 1/a), nil
	case "pareto":
		if a <= 1 {
			return population{}, refuse("no-mean", "parameter", "A pareto population of index %s has no mean, so no interval can hold it; use an index above 1.", FormatNumber(a))
		}
		p := population{cost: 2, draw: each(func(s *num.Stream) float64 { return num.Exp(s.Exponential()/a) - a/(a-1) }), sd: inf}
		if a > 2 {
			p.sd = math.Sqrt(a/(a-2)) / (a - 1)
		}
		if a > 4 {
			p = p.withMoments(2*(1+a)/(a-3)*math.Sqrt((a-2)/a), paretoKurtosis(a))
		}
		return p, nil
	case "cauchy":
		return population{cost: 2, draw: each(func(s *num.Stream) float64 { return s.Normal() / s.Normal() }), sd: inf, noMean: true}, nil
	case "t":
		if a < 0.25 { // its values would pass what a double holds
			return population{}, c.wrong("parameter", FormatNumber(a), "must be at least 0.25 degrees of freedom", "give more")
		}
		p := population{cost: 4, draw: studentDraws(a), sd: inf, noMean: a <= 1}
		if a > 2 {
			p.sd = math.Sqrt(a / (a - 2))
		}
		if a > 4 {
			p = p.withMoments(0, 6/(a-4))
		}
		return p, nil
	}
	return population{cost: 1, draw: each((*num.Stream).Normal), sd: 1, distance: func(int) float64 { return 0 }}.withMoments(0, 0), nil
}

// lognormalMoments are skewness and excess kurtosis for an sd of the logarithm
// (Johnson, Kotz & Balakrishnan 1994, Continuous Univariate Distributions 1, ch. 14).
func lognormalMoments(a float64) (g1, g2 float64) {
	w := num.Exp(float64(a * a))
	square := float64(w * w)
	return (w + 2) * math.Sqrt(num.Expm1(float64(a*a))), float64(square*square) + float64(2*w*square) + float64(3*square) - 6
}

// paretoKurtosis is the excess kurtosis for an index above 4 (the same, ch. 20).
func paretoKurtosis(a float64) float64 {
	r := 1 / a // in powers of it nothing passes a double
	return 6 * (1 + r - float64(6*r*r) - float64(2*r*r*r)) / ((1 - float64(3*r)) * (1 - 4*r))
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
