package funcs

import (
	"math/big"
	"math/rand/v2"
	"testing"
)

// binomialHalf is P(X <= k) for X ~ Binomial(n, ½), in whole numbers.
func binomialHalf(n, k int64) *big.Rat {
	sum, term := new(big.Int), new(big.Int)
	for i := int64(0); i <= k; i++ {
		sum.Add(sum, term.Binomial(n, i))
	}
	return new(big.Rat).SetFrac(sum, new(big.Int).Lsh(big.NewInt(1), uint(n)))
}

// A limit of all but no confidence may be any of the values, and is one of them.
func TestMedianLimitOfNoConfidenceIsAValue(t *testing.T) {
	for _, n := range []int{5, 1000} {
		out := answer(t, "median-interval", map[string]any{"sample": counting(n), "confidence": 1e-12, "direction": below})
		within(t, "upper", resultOf(t, out, "upper"), 1, 0)
	}
}

// Of the values 1 to n the limits are the ranks themselves.
func TestMedianLimitsAreTheFarthestInThatHold(t *testing.T) {
	for _, confidence := range []float64{0.4, 0.5, 0.75, 0.95, 0.99} {
		for _, d := range everyDirection {
			for n := 1; n <= 60; n++ {
				sides := big.NewRat(1, 1)
				if d == either {
					sides = big.NewRat(2, 1)
				}
				outside := new(big.Rat).SetFloat64(1 - confidence)
				outside.Mul(outside, big.NewRat(1_000_000_000_001, 1_000_000_000_000)) // a level may stand a rounding off
				k := int64(0)
				for k < int64(n) && new(big.Rat).Mul(sides, binomialHalf(int64(n), k)).Cmp(outside) <= 0 {
					k++
				}
				out := answer(t, "median-interval", map[string]any{"sample": counting(n), "confidence": confidence, "direction": d})
				if k == 0 {
					refusedFor(t, out, "confidence-not-attainable")
					continue
				}
				limitsExist(t, out, d)
				if d != below {
					within(t, "lower", resultOf(t, out, "lower"), float64(k), 0)
				}
				if d != above {
					within(t, "upper", resultOf(t, out, "upper"), float64(int64(n)+1-k), 0)
				}
				want, _ := new(big.Rat).Sub(big.NewRat(1, 1), sides.Mul(sides, binomialHalf(int64(n), k-1))).Float64()
				within(t, "attained", resultOf(t, out, "attained-confidence"), want, 1e-13)
				if !(want >= confidence-1e-12) {
					t.Errorf("n = %d: attained %v", n, want)
				}
				within(t, "median", resultOf(t, out, "median"), float64(n+1)/2, 0)
			}
		}
	}
}

func TestMedianRefusalNamesWhatIsAttainable(t *testing.T) {
	out := answer(t, "median-interval", map[string]any{"sample": []float64{3, 1, 2, 5}})
	refusedFor(t, out, "confidence-not-attainable")
	want := "With n = 4 no limits reach 95% confidence; the most that is attainable is 87.5%. Measure more, or ask for less."
	if got := Note(out.Findings); got != want { // 1 - 2/16
		t.Errorf("got  %s\nwant %s", got, want)
	}
	equal := answer(t, "median-interval", map[string]any{"sample": []float64{4, 4, 4, 4, 4, 4}})
	within(t, "equal values", resultOf(t, equal, "upper"), 4, 0)
	few := answer(t, "median-interval", map[string]any{"sample": []float64{3, 1, 2, 5}, "confidence": 0.8})
	if got := Note(few.Findings); got != "The sample has only 4 values: so few show little of their population. Measure at least 5." {
		t.Error(got)
	}
}

// A million values take no longer than their sorting.
func TestMedianOfAMillionValues(t *testing.T) {
	values := noise(rand.New(rand.NewPCG(21, 1)), 1_000_000, 0, 1)
	out := answer(t, "median-interval", map[string]any{"sample": values, "checks": false})
	if a := resultOf(t, out, "attained-confidence"); !(a >= 0.95 && a < 0.951) {
		t.Errorf("attained %v", a)
	}
}
