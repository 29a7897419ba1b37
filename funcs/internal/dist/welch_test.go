package dist

import (
	"fmt"
	"math"
	"math/rand/v2"
	"testing"
)

// The mean, over both sample variances, of the normal probability that the test
// rejects given them: a double integral at 25 digits, another formula than the
// one here.
func TestWelchPowerMatchesHighPrecision(t *testing.T) {
	for _, c := range []struct {
		design                   WelchDesign
		difference, significance float64
		twoSided                 bool
		want                     float64
	}{
		{WelchDesign{5, 20, 3, 1}, 4, 0.05, true, 0.61867218162501826222},
		{WelchDesign{4, 9, 1, 2.5}, 3, 0.05, true, 0.79060232327695907630},
		{WelchDesign{6, 6, 1, 4}, 5, 0.01, false, 0.48171311273008916386},
	} {
		wantDigits(t, c.design, c.design.Power(c.difference, c.significance, c.twoSided), c.want, 1e-12)
	}
}

// Identity: a sample without spread leaves the one-sample t test of the other.
func TestWelchPowerWithOneSpreadIsOneSampleT(t *testing.T) {
	rng := rand.New(rand.NewPCG(9, 1))
	for i := range 30 {
		n, m := 2+rng.IntN(40), 2+rng.IntN(40)
		difference, twoSided := 3*rng.Float64(), i%2 == 0
		tail := 0.05
		if twoSided {
			tail /= 2
		}
		df := float64(n - 1)
		want := TPower(df, difference*math.Sqrt(float64(n)), Student{df}.UpperQuantile(tail), twoSided)
		what := fmt.Sprint(n, m, difference, twoSided)
		wantDigits(t, what, WelchDesign{n, m, 1, 0}.Power(difference, 0.05, twoSided), want, 1e-11)
		wantDigits(t, what, WelchDesign{m, n, 0, 1}.Power(difference, 0.05, twoSided), want, 1e-11)
	}
}

// Identities: the samples may change places; only ratios of difference and sds
// matter; power grows with the difference; without a difference the one-sided
// test and the mirrored one share what the two-sided rejects.
func TestWelchPowerBehaves(t *testing.T) {
	rng := rand.New(rand.NewPCG(9, 2))
	for range 20 {
		w := WelchDesign{2 + rng.IntN(30), 2 + rng.IntN(30), math.Exp(rng.NormFloat64()), math.Exp(rng.NormFloat64())}
		difference := 2 * rng.Float64()
		p := w.Power(difference, 0.05, true)
		wantDigits(t, w, WelchDesign{w.N2, w.N1, w.SD2, w.SD1}.Power(difference, 0.05, true), p, 1e-12)
		wantDigits(t, w, WelchDesign{w.N1, w.N2, 1000 * w.SD1, 1000 * w.SD2}.Power(-1000*difference, 0.05, true), p, 1e-12)
		if q := w.Power(difference+0.05, 0.05, true); !(q > p || p > 1-1e-12) {
			t.Errorf("%v: power %v at %v and %v beyond", w, p, difference, q)
		}
		wantDigits(t, w, w.Power(difference, 0.025, false)+w.Power(-difference, 0.025, false), p, 1e-12)
	}
}

func TestWelchPowerStandsAnyArgument(t *testing.T) {
	odd := []float64{math.NaN(), -1, 0, 1e-300, 1, 1e300, math.Inf(1)}
	for _, n := range []int{-1, 1, 2, 40} {
		for _, sd1 := range odd {
			for _, sd2 := range odd {
				for _, difference := range odd {
					w := WelchDesign{n, 3, sd1, sd2}
					got := w.Power(difference, 0.05, true)
					finite := sd1 >= 0 && sd2 >= 0 && max(sd1, sd2) > 0 && !math.IsInf(max(sd1, sd2), 1)
					valid := n >= 2 && finite && !math.IsNaN(difference)
					if valid != (got >= 0 && got <= 1) || !valid && !math.IsNaN(got) {
						t.Errorf("%v: power %v for a difference of %v", w, got, difference)
					}
				}
			}
		}
	}
	if got := (WelchDesign{5, 5, 1, 1}).Power(1, 1, true); !math.IsNaN(got) {
		t.Errorf("significance 1 gives power %v", got)
	}
}

func BenchmarkWelchPower(b *testing.B) {
	for b.Loop() {
		WelchDesign{5, 20, 3, 1}.Power(4, 0.05, true)
	}
}
