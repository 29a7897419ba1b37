package funcs

import (
	"math"

	"halfwidth/funcs/internal/dist"
	"halfwidth/funcs/internal/num"
)

// The rules by which cautions come. Each comes for about 1 in 100 calls when all is
// well, at any n from its first and for any number of samples: a sample goes through
// four of them, and a caution that often speaks without cause is soon not read.
// FUNCTIONS.md has a table of how often they come, made by
// funcs/internal/calibration.

const (
	skewedFrom     = 8  // values from which the law of G1 is known well enough
	neighboursFrom = 10 // values from which an autocorrelation can show
	heavyTailFrom  = 150
	cochranFactor  = 25 // Cochran 1977, Sampling Techniques, section 2.15: n > 25·G1²
	rare           = 0.01
)

// rare is the significance at which one sample is looked at, so that all samples of
// the call together give a caution about as seldom as one (Bonferroni): without it
// every tenth comparison of ten groups in order would have a far value.
func (c *Call) rare() float64 { return rare / float64(max(1, c.among)) }

// rareNormal is the normal quantile that the size of such a share of values passes.
func rareNormal(share float64) float64 { return dist.Normal{}.UpperQuantile(share / 2) }

// skewedForN says whether n falls short of Cochran's rule by a skewness G1 that is
// no accident. The rule alone would take in every twelfth normal sample of 20, as
// its bound, √n/5, is then within 1.8 standard errors of 0; for a share of 0.01 the
// second condition follows from the first from n = 31 on.
func skewedForN(g1 float64, n int, share float64) bool {
	return n >= skewedFrom && float64(n) <= cochranFactor*float64(g1*g1) && math.Abs(skewnessScore(g1, float64(n))) > rareNormal(share)
}

// skewnessScore is the normal score of the skewness of n >= 8 normal values
// (D'Agostino 1970, Transformation to normality of the null distribution of g1).
func skewnessScore(g1, n float64) float64 {
	plain := g1 * (n - 2) / math.Sqrt(n*(n-1)) // with divisors n
	y := plain * math.Sqrt((n+1)*(n+3)/(6*(n-2)))
	kurtosis := 3 * (float64(n*n) + float64(27*n) - 70) * (n + 1) * (n + 3) / ((n - 2) * (n + 5) * (n + 7) * (n + 9))
	w2 := math.Sqrt(2*(kurtosis-1)) - 1
	x := math.Abs(y) / math.Sqrt(2/(w2-1))
	return math.Copysign(num.Log(x+num.Hypot(x, 1))/math.Sqrt(num.Log(w2)/2), g1)
}

// neighboursAlike says whether a lag-1 autocorrelation of n values in order is no
// accident: for independent normal values it has mean -1/n and standard deviation
// (n-2)/(n√(n-1)) (Moran 1948, Some theorems on time series II).
func neighboursAlike(r float64, n int, share float64) bool {
	m := float64(n)
	return n >= neighboursFrom && math.Abs(r+1/m) > rareNormal(share)*(m-2)/(m*math.Sqrt(m-1))
}

// spreadOf is a group's sd with its n, which is 0 for an sd that is planned.
type spreadOf struct {
	sd float64
	n  int
}

// spreadsUnlike says whether one of two sds is more than twice the other, for some
// pair of groups, by no accident: F of the pair at 1 in 100, shared among all pairs
// and both orders (Bonferroni). Twice alone would take in every fifth pair of
// groups of 5 normal values with one variance.
func spreadsUnlike(groups []spreadOf) bool {
	pairs := float64(len(groups)) * float64(len(groups)-1)
	// Among groups of one n only the largest and the smallest sd count.
	least, most := map[int]float64{}, map[int]float64{}
	for _, g := range groups {
		if sd, seen := least[g.n]; !seen || g.sd < sd {
			least[g.n] = g.sd
		}
		most[g.n] = math.Max(most[g.n], g.sd)
	}
	for n, large := range most {
		for m, small := range least {
			if !(large > 2*small) {
				continue
			}
			ratio := large / small
			if n < 2 || m < 2 || math.IsInf(ratio, 1) || (dist.F{DF1: float64(n - 1), DF2: float64(m - 1)}).SF(float64(ratio*ratio)) <= rare/pairs {
				return true
			}
		}
	}
	return false
}
