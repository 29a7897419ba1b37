package funcs

import (
	"context"
	"fmt"
	"math"

	"halfwidth/funcs/internal/num"
)

// Means are the means of simulated samples of N values, each less the mean of
// the population, in the order drawn.
type Means struct {
	Values        []float64
	N             int
	StandardError float64 // of the normal law that they near; 0 where there is none
}

// SampleMeans gives the means of the first samples, at most so many, that an
// outcome of coverage-check or population-coverage counted: the same samples,
// from the same streams, so that a picture of the means belongs to the coverage.
func SampleMeans(ctx context.Context, o *Outcome, most int) (*Means, error) {
	if _, ok := o.Function.Result("coverage"); !ok || o.Status == StatusRefused {
		return nil, fmt.Errorf("%w: %s (%s) simulates no means", ErrInternal, o.Function.Name, o.Status)
	}
	c := &Call{Function: o.Function, ctx: ctx, args: o.Arguments, known: map[listKey]*listFacts{}}
	n, draw, sd, err := c.simulated()
	if err != nil {
		return nil, err
	}
	m := &Means{Values: make([]float64, min(most, coverageResamples.Of(c))), N: n}
	if !math.IsInf(sd, 1) {
		m.StandardError = sd / math.Sqrt(float64(n))
	}
	err = resample(ctx, seedInput.Of(c), len(m.Values), func() func(int, *num.Stream) {
		x := make([]float64, n)
		return func(i int, s *num.Stream) {
			draw(s, x)
			m.Values[i] = num.Sum(x) / float64(n)
		}
	})
	return m, err
}

// simulated gives n, how samples are drawn, and the population's standard
// deviation (divisor the number of values where it is a sample).
func (c *Call) simulated() (n int, draw func(*num.Stream, []float64), sd float64, err error) {
	if _, ok := c.Function.Input(shape.Name); ok {
		p, err := c.population()
		return populationN.Of(c), p.draw, p.sd, err
	}
	values := c.gapless(sample.Of(c))
	values = lessMean(values, c.moments(values))
	var squares float64
	for _, x := range values {
		squares += float64(x * x)
	}
	return c.coverageSize(len(values)), func(s *num.Stream, x []float64) { s.Resample(x, values) }, math.Sqrt(squares / float64(len(values))), nil
}
