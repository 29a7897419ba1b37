package funcs

import (
	"fmt"
	"math"
	"slices"

	"halfwidth/funcs/internal/dist"
	"halfwidth/funcs/internal/num"
)

var bootstrapOf = choice("of", "the quantity", "mean", "median", "sd", "trimmed-mean")

var tooFewResamplesKind = FindingKind{"too-few-resamples", "a limit lies beyond the resamples, or its correction does not exist"}

var bootstrapInterval = &Function{
	Name:    "bootstrap-interval",
	Version: 1,
	Summary: "interval for a mean, median, sd or trimmed mean from resamples, corrected for bias and acceleration",
	Inputs:  inputs(sample, bootstrapOf, trimmedEachEnd, resamplesInput, seedInput, confidence, direction, checks),
	Results: []Result{
		{"estimate", Number, SameUnit, "the quantity of the sample"},
		resultLower, resultUpper,
		{"bias", Number, SameUnit, "mean of the resampled quantities less the estimate"},
	},
	Findings:    []FindingKind{fewValuesKind, noSpreadKind, neighboursKind, heavyTailKind, tooFewResamplesKind, tooManyDrawsKind, fewerResamplesKind},
	Assumptions: []string{"independent values of one population", "a sample large enough to show what the population is like"},
	Citations:   []string{"Efron 1987 (BCa)"},
	Example: Example{
		Label:     "ten values",
		Arguments: []Argument{{"sample", []float64{2, 4, 6, 7, 8, 9, 10, 11, 13, 20}}, {"resamples", 2000}},
		Want:      []Argument{{"estimate", 9.0}},
		Tolerance: 1e-15,
		Source:    "the mean of the ten values; the limits depend on the draws",
	},
	compute: func(c *Call) error {
		values := c.gapless(sample.Of(c))
		s := c.summarise(values)
		c.count(s.n)
		if err := c.enough("sample", s, 3); err != nil {
			return err
		}
		q, err := c.bootstrapQuantity(s.n)
		if err != nil {
			return err
		}
		estimate := q.of(slices.Clone(values))
		resamples, lowered, err := c.resamplesFor(resamplesInput, s.n, q.cost)
		if err != nil {
			return err
		}
		replicates := make([]float64, resamples)
		err = resample(c.ctx, seedInput.Of(c), len(replicates), func() func(int, *num.Stream) {
			drawn := make([]float64, s.n)
			return func(i int, stream *num.Stream) {
				stream.Resample(drawn, values)
				replicates[i] = q.of(drawn)
			}
		})
		if err != nil {
			return err
		}
		bias := num.Mean(replicates) - estimate
		b, err := newBCa(estimate, replicates, acceleration(q.leavingOneOut(num.Sorted(values))))
		if err != nil {
			return err
		}
		var limitErr error
		l := limitsOf(confidence.Of(c), direction.Of(c),
			func(q float64) float64 { return b.limit(dist.Normal{}.Quantile(q), &limitErr) },
			func(q float64) float64 { return b.limit(dist.Normal{}.UpperQuantile(q), &limitErr) })
		if limitErr != nil {
			return limitErr
		}
		c.set("estimate", estimate)
		c.setLimits(l)
		c.set("bias", bias)
		c.method = fmt.Sprintf("BCa bootstrap, %d resamples, seed %d", len(replicates), seedInput.Of(c))
		c.say(statement{q.name, estimate, l, SameUnit, nText(s.n)})
		if lowered {
			c.sayLowered(resamplesInput, resamples, s.n, fmt.Sprintf("chance alone moves a limit by about %s", c.withUnit(brief(b.limitError(tail(confidence.Of(c), direction.Of(c)))), SameUnit)))
		}
		c.checkOfAnyShape(s.n)
		if checks.Of(c) {
			c.checkTail("sample", "The sample", values)
		}
		return nil
	},
}

// bootstrapQuantity is what is resampled.
type bootstrapQuantity struct {
	name string
	cost int // of a value drawn and used, about; 1 for the mean
	// of computes it from values that it may put in another order.
	of func([]float64) float64
	// leavingOneOut gives it for sorted values with each of them left out in turn.
	leavingOneOut func(sorted []float64) []float64
}

// bootstrapQuantity gives the quantity asked for.
func (c *Call) bootstrapQuantity(n int) (bootstrapQuantity, error) {
	switch bootstrapOf.Of(c) {
	case "median":
		return bootstrapQuantity{"median", 2, func(v []float64) float64 { return num.MedianOf(v) }, mediansLeavingOneOut}, nil
	case "sd":
		return bootstrapQuantity{"standard deviation", 1, func(v []float64) float64 { return summarise(v).sd }, sdsLeavingOneOut}, nil
	case "trimmed-mean":
		share := trimmedEachEnd.Of(c)
		if n-1-2*trimmedOf(n-1, share) < 1 {
			return bootstrapQuantity{}, refuse("few-values", "sample", "No value is left after trimming; measure more or trim less.")
		}
		of := func(v []float64) float64 {
			g := trimmedOf(len(v), share)
			if g > 0 { // only what is cut off need come to the ends
				num.Select(v, g)
				num.Select(v[g:], len(v)-1-2*g)
			}
			return num.Mean(v[g : len(v)-g])
		}
		return bootstrapQuantity{"trimmed mean", 2, of, func(sorted []float64) []float64 { return trimmedLeavingOneOut(sorted, trimmedOf(len(sorted)-1, share)) }}, nil
	}
	return bootstrapQuantity{"mean", 1, num.Mean, func(sorted []float64) []float64 { return trimmedLeavingOneOut(sorted, 0) }}, nil
}

func mediansLeavingOneOut(sorted []float64) []float64 {
	out := make([]float64, len(sorted))
	for i := range sorted {
		at := func(k int) float64 { // of the values left
			if k >= i {
				k++
			}
			return sorted[k]
		}
		m := len(sorted) - 1
		out[i] = num.Median([]float64{at((m - 1) / 2), at(m / 2)})
	}
	return out
}

// sdsLeavingOneOut takes from the sum of squares n/(n-1) times the square of the
// deviation of the value left out.
func sdsLeavingOneOut(sorted []float64) []float64 {
	m, out := num.Moments(sorted), make([]float64, len(sorted))
	n := float64(m.N)
	for i, d := range lessMean(sorted, m) {
		out[i] = math.Sqrt(math.Max(0, m.SumSquares-float64(d*d)*n/(n-1)) / (n - 2))
	}
	return out
}

// trimmedLeavingOneOut are the means of the values left without g at each end.
// They come less the mean of all, which keeps the digits of small differences.
func trimmedLeavingOneOut(sorted []float64, g int) []float64 {
	n, out := len(sorted), make([]float64, len(sorted))
	d := lessMean(sorted, num.Moments(sorted))
	// Of the n-1 left, those kept are g to n-2-g, and so in sorted order g to n-1-g
	// without the one left out, or without the end on its side.
	kept := num.Sum(d[g : n-g])
	for i := range d {
		out[i] = (kept - d[min(max(i, g), n-1-g)]) / float64(n-1-2*g)
	}
	return out
}

// acceleration is Σd³/(6(Σd²)^1.5) over the jackknife, d the mean of the
// leave-one-out quantities less each; 0 where they all agree (Efron 1987,
// equation 7.3; Efron & Tibshirani 1993, equation 14.15).
func acceleration(leavingOneOut []float64) float64 {
	m := num.Moments(leavingOneOut)
	if m.SumSquares == 0 {
		return 0
	}
	return -m.Sum3 / m.SumSquares / math.Sqrt(m.SumSquares) / 6
}

// bca finds limits among sorted replicates.
type bca struct {
	sorted    []float64
	z0, accel float64
}

func newBCa(estimate float64, replicates []float64, accel float64) (bca, error) {
	slices.Sort(replicates)
	from, _ := slices.BinarySearch(replicates, estimate)
	to := from
	for to < len(replicates) && replicates[to] == estimate {
		to++
	}
	below, above := float64(from)+float64(to-from)/2, float64(len(replicates)-to)+float64(to-from)/2
	if below == 0 || above == 0 {
		return bca{}, refuse("too-few-resamples", "resamples", "All resampled quantities lie on one side of the estimate, so its bias cannot be corrected; "+
			"draw more resamples, or use the interval made for this quantity.")
	}
	total := float64(len(replicates))
	z0 := dist.Normal{}.Quantile(below / total)
	if below > above {
		z0 = dist.Normal{}.UpperQuantile(above / total)
	}
	return bca{replicates, z0, accel}, nil
}

// limit interpolates at α(B+1), α the corrected probability that belongs to
// the normal quantile z; the first failure is kept in err.
func (b bca) limit(z float64, err *error) float64 {
	w := b.z0 + z
	d := 1 - float64(b.accel*w)
	size := float64(len(b.sorted))
	at := dist.Normal{}.CDF(b.z0+w/d) * (size + 1)
	if d <= 0 || !(at >= 1 && at <= size) {
		if *err == nil {
			*err = refuse("too-few-resamples", "resamples", "A limit lies beyond the %d resamples; draw more, or ask for less confidence.", len(b.sorted))
		}
		return 0
	}
	k := int(at)
	if k == len(b.sorted) {
		return b.sorted[k-1]
	}
	return b.sorted[k-1] + float64((at-float64(k))*(b.sorted[k]-b.sorted[k-1]))
}

// limitError is the standard error that the number of resamples leaves a limit
// with the probability q outside: the count of replicates beyond it is binomial,
// and a standard deviation of that count either way spans twice the error.
func (b bca) limitError(q float64) float64 {
	size := float64(len(b.sorted))
	middle, reach := q*size, math.Sqrt(size*q*(1-q))
	at := func(x float64) float64 { return b.sorted[int(math.Max(0, math.Min(size-1, x)))] }
	low, high := at(middle+reach)-at(middle-reach), at(size-middle+reach)-at(size-middle-reach)
	return math.Max(low, high) / 2
}
