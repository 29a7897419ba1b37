package funcs

import (
	"fmt"
	"math"
	"slices"
	"sort"

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
	sd       float64                     // +Inf where there is no finite variance
	distance func(n int) (float64, bool) // exact sup|F - Φ| of the standardised mean, where there is a formula
	noMean   bool
}

var populationCoverage = &Function{
	Name:    "population-coverage",
	Version: 1,
	Summary: "how often the t interval holds the true mean for a population of a known shape, and how far the mean is from normal",
	Inputs:  inputs(shape, shapeParameter, populationN, coverageResamples, seedInput, confidence, direction),
	Results: append(append([]Result{}, coverageResults...),
		Result{"distance-from-normal", Number, NoUnit, "largest difference of the distribution function of the standardised mean from the normal one; absent without a finite variance"}),
	Findings:    []FindingKind{tooManyDrawsKind, noEnoughKind, {"no-mean", "a pareto index of 1 or less has no mean to hold"}},
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
		t, resamples, err := c.coverage(n, p.draw)
		if err != nil {
			return err
		}
		c.setCoverage(t, resamples)
		how := ""
		if !math.IsInf(p.sd, 1) {
			d, exact := 0.0, false
			if p.distance != nil {
				d, exact = p.distance(n)
			}
			if !exact {
				if d, err = c.simulatedDistance(p, n, resamples); err != nil {
					return err
				}
				how = ", its distance from normal simulated too"
			}
			c.set("distance-from-normal", d)
		} else {
			what := "variance"
			if p.noMean {
				what = "mean"
			}
			c.caution("heavy-tail", "shape", "This population has no finite %s: no n is enough for a t interval, and the coverage does not settle at the confidence as n grows.", what)
		}
		share := c.results["coverage"].(float64)
		c.method = fmt.Sprintf("%d samples of %d simulated, seed %d%s", resamples, n, seedInput.Of(c), how)
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
	normal := dist.Normal{}
	switch name {
	case "uniform":
		return population{draw: each(func(u float64) float64 { return u - 0.5 }), sd: math.Sqrt(1.0 / 12)}, nil
	case "exponential":
		return population{draw: each(func(u float64) float64 { return -num.Log(u) - 1 }), sd: 1, distance: gammaDistance}, nil
	case "lognormal":
		if a > 20 { // so that neither mean nor variance passes what a double holds
			return population{}, c.wrong("parameter", shortest(a), "must be at most 20 as the sd of a logarithm", "give a smaller one")
		}
		centre := num.Exp(float64(a*a) / 2)
		return population{draw: each(func(u float64) float64 { return num.Exp(float64(a*normal.Quantile(u))) - centre }),
			sd: centre * math.Sqrt(num.Expm1(float64(a*a)))}, nil
	case "bernoulli":
		if a >= 1 {
			return population{}, c.wrong("parameter", shortest(a), "must be a probability, strictly between 0 and 1", "give a smaller one")
		}
		return population{draw: each(func(u float64) float64 {
			if u < a {
				return 1 - a
			}
			return -a
		}), sd: math.Sqrt(a * (1 - a)), distance: func(n int) (float64, bool) {
			return latticeDistance(float64(n)*a, math.Sqrt(float64(n)*a*(1-a)), func(k float64) float64 { return binomialAtMost(k, float64(n), a) }), true
		}}, nil
	case "poisson":
		if a > 1e6 {
			return population{}, c.wrong("parameter", shortest(a), "must be at most 1000000", "give a smaller mean")
		}
		table := poissonTable(a)
		return population{draw: each(func(u float64) float64 { return float64(table.first+sort.SearchFloat64s(table.atMost, u)) - a }),
			sd: math.Sqrt(a), distance: func(n int) (float64, bool) {
				mean := float64(n) * a
				return latticeDistance(mean, math.Sqrt(mean), func(k float64) float64 { atMost, _ := poissonTails(k, mean); return atMost }), true
			}}, nil
	case "pareto":
		if a <= 1 {
			return population{}, refuse("no-mean", "parameter", "A pareto population of index %s has no mean, so no interval can hold it; use an index above 1.", shortest(a))
		}
		p := population{draw: each(func(u float64) float64 { return num.Exp(-num.Log(u)/a) - a/(a-1) }), sd: inf}
		if a > 2 {
			p.sd = math.Sqrt(a/(a-2)) / (a - 1)
		}
		return p, nil
	case "cauchy":
		return population{draw: polarT(1), sd: inf, noMean: true}, nil
	case "t":
		if a < 0.25 { // its values would pass what a double holds
			return population{}, c.wrong("parameter", shortest(a), "must be at least 0.25 degrees of freedom", "give more")
		}
		p := population{draw: polarT(a), sd: inf, noMean: a <= 1}
		if a > 2 {
			p.sd = math.Sqrt(a / (a - 2))
		}
		return p, nil
	}
	return population{draw: each(normal.Quantile), sd: 1, distance: func(int) (float64, bool) { return 0, true }}, nil
}

// each draws every value by inversion from a uniform number strictly between 0
// and 1.
func each(value func(u float64) float64) func(*num.Stream, []float64) {
	return func(s *num.Stream, x []float64) {
		for i := range x {
			x[i] = value((float64(s.Uint64()>>11) + 0.5) * 0x1p-53)
		}
	}
}

// polarT draws Student t values (Bailey 1994, Polar generation of random
// variates with the t-distribution).
func polarT(df float64) func(*num.Stream, []float64) {
	uniform := func(s *num.Stream) float64 { return (float64(s.Uint64()>>11)+0.5)*0x1p-52 - 1 }
	return func(s *num.Stream, x []float64) {
		for i := range x {
			for {
				u, v := uniform(s), uniform(s)
				w := float64(u*u) + float64(v*v)
				if w <= 1 {
					x[i] = u * math.Sqrt(float64(df*num.Expm1(-2/df*num.Log(w)))/w)
					break
				}
			}
		}
	}
}

// cumulative is a table of P(X <= k), k from first.
type cumulative struct {
	first  int
	atMost []float64
}

// poissonTable holds the law within 40 standard deviations and 40.
func poissonTable(mean float64) cumulative {
	reach := float64(40*math.Sqrt(mean)) + 40
	t := cumulative{first: max(0, int(mean-reach))}
	for k := t.first; ; k++ {
		p, _ := poissonTails(float64(k), mean)
		t.atMost = append(t.atMost, p)
		if p == 1 || float64(k) > mean+reach {
			return t
		}
	}
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
func gammaDistance(n int) (float64, bool) {
	mean, sd := float64(n), math.Sqrt(float64(n))
	law := dist.Gamma{Shape: mean}
	at := func(z float64) float64 {
		return math.Abs(law.CDF(math.Max(0, mean+float64(z*sd))) - dist.Normal{}.CDF(z))
	}
	best, largest := highest(at, -4, 4, 1.0/64)
	for step := 1.0 / 128; step > 1e-9; step /= 2 {
		best, largest = climb(at, best, largest, step)
	}
	return largest, true
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

// simulatedDistance is sup|F - Φ| with F the empirical law of simulated
// standardised means; it cannot be told from 0 below about 1/√resamples.
func (c *Call) simulatedDistance(p population, n, resamples int) (float64, error) {
	z := make([]float64, resamples)
	scale := 1 / (p.sd * math.Sqrt(float64(n)))
	err := resample(c.ctx, seedInput.Of(c), resamples, func() func(int, *num.Stream) {
		x := make([]float64, n)
		return func(i int, s *num.Stream) {
			p.draw(s, x)
			z[i] = num.Sum(x) * scale
		}
	})
	if err != nil {
		return 0, err
	}
	slices.Sort(z)
	var largest float64
	for i, v := range z {
		normal := dist.Normal{}.CDF(v)
		b := float64(len(z))
		largest = math.Max(largest, math.Max(math.Abs(float64(i)/b-normal), math.Abs(float64(i+1)/b-normal)))
	}
	return largest, nil
}
