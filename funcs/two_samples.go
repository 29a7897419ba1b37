package funcs

import (
	"fmt"
	"math"
)

// twoSummaries reads two samples, or the summaries given in their place.
func (c *Call) twoSummaries() (first, second summary, err error) {
	if first, err = c.summaryOf(sample, firstMean, firstSD, firstN); err != nil {
		return first, second, err
	}
	second, err = c.summaryOf(secondSample, secondMean, secondSD, secondN)
	return first, second, err
}

// nTexts words how many values two samples have.
func nTexts(first, second summary) string { return fmt.Sprintf("n = %d and %d", first.n, second.n) }

// checkTwo raises the cautions of two samples.
func (c *Call) checkTwo(first, second summary) error {
	if !checks.Of(c) {
		return nil
	}
	if !c.has("sample") {
		c.checkFew("first-n", "The first group", first.n)
		c.checkFew("second-n", "The second group", second.n)
		return nil
	}
	c.among = 2
	if err := c.checkValues("sample", sample.Of(c), first); err != nil {
		return err
	}
	return c.checkValues("second-sample", secondSample.Of(c), second)
}

// noSpreadInTwo refuses an interval or test where neither sample varies.
func (c *Call) noSpreadInTwo() error {
	input, cause := "sample", "All values of sample are equal, and so are those of second-sample"
	if !c.has("sample") {
		input, cause = "first-sd", "Both sds are 0"
	}
	return refuse("no-spread", input, "%s, so neither an interval nor a test exists; check whether the values were rounded or copied down.", cause)
}

// twoMeans compares the means of two samples. The variances of the two means
// carry the factor 4^scale, which keeps their squares within range.
type twoMeans struct {
	difference, se, df, pooledSD float64

	firstVariance, secondVariance float64
	scale                         int
}

// compareMeans works out the standard error of the difference and its degrees
// of freedom: with separate variances those of Satterthwaite 1946, with one
// pooled variance n₁ + n₂ - 2.
func compareMeans(first, second summary, variances string) twoMeans {
	m := twoMeans{difference: first.mean - second.mean}
	_, m.pooledSD = pooledSpread(first, second)
	s1, s2 := first.sd, second.sd
	if variances == pooled {
		s1, s2 = m.pooledSD, m.pooledSD
	}
	_, m.scale = math.Frexp(math.Max(s1, s2))
	s1, s2 = math.Ldexp(s1, -m.scale), math.Ldexp(s2, -m.scale)
	m.firstVariance, m.secondVariance = float64(s1*s1)/float64(first.n), float64(s2*s2)/float64(second.n)
	m.se = math.Ldexp(math.Sqrt(m.firstVariance+m.secondVariance), m.scale)
	m.df = satterthwaite(m.firstVariance, float64(first.n-1), m.secondVariance, float64(second.n-1))
	if variances == pooled {
		m.df = float64(first.n-1) + float64(second.n-1)
	}
	return m
}

// satterthwaite is the degrees of freedom of a sum of two independent estimated
// variances (Satterthwaite 1946; Welch 1947); not both may be 0.
func satterthwaite(v1, df1, v2, df2 float64) float64 {
	w1, w2 := v1/(v1+v2), v2/(v1+v2)
	return 1 / (float64(w1*w1)/df1 + float64(w2*w2)/df2)
}

// hedgesFactor is Γ(ν/2)/(√(ν/2)·Γ((ν-1)/2)), which takes the bias off a
// standardised difference (Hedges 1981), for whole ν from 2. To 1e-15.
func hedgesFactor(nu float64) float64 {
	root := math.Sqrt(nu / 2)
	if nu < 40 {
		// c(ν) = Γ(ν/2)/Γ((ν-1)/2) from c(2) = 1/√π or c(3) = √π/2 by
		// c(ν+2) = c(ν)·ν/(ν-1).
		ratio, from := 1/math.Sqrt(math.Pi), 2.0
		if math.Mod(nu, 2) == 1 {
			ratio, from = math.Sqrt(math.Pi)/2, 3
		}
		for ; from < nu; from += 2 {
			ratio *= from / (from - 1)
		}
		return ratio / root
	}
	// Γ(y+3/4)/Γ(y+1/4) = √y·(1 + z/64 - ...), here with y = (2ν-3)/4 and
	// z = 1/y²; coefficients from Stirling's series of both.
	z := 16 / float64((2*nu-3)*(2*nu-3))
	series := -174317.0/134217728 + float64(z*(20491783.0/8589934592))
	series = 631.0/524288 + float64(z*series)
	series = -19.0/8192 + float64(z*series)
	series = float64(z * (1.0/64 + float64(z*series)))
	return math.Sqrt(1-1.5/nu) * (1 + series)
}
