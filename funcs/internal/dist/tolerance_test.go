package dist

import (
	"fmt"
	"math"
	"math/rand/v2"
	"strconv"
	"strings"
	"testing"
)

// testdata/references/numerics/tolerance_k.csv: two orders of the same integral,
// and noncentral t quantiles, at high precision.
func TestToleranceFactorsMatchHighPrecision(t *testing.T) {
	for _, r := range highPrecisionRows(t, "tolerance_k.csv") {
		n, content, confidence := r.count(t, "n"), r.number(t, "coverage"), r.number(t, "confidence")
		got := ToleranceFactor(n, content, confidence)
		if r.function() == "tolerance_k_one_sided" {
			got = OneSidedToleranceFactor(n, content, confidence)
		}
		wantDigits(t, r, got, r.number(t, "value"), 1e-12)
	}
}

// Natrella 1963, Tables. The latter prints an approximation by Wald &
// Wolfowitz; the note of each entry carries the exact factor.
func TestToleranceFactorsReproducePrintedTables(t *testing.T) {
	type entry struct {
		N                    int
		Coverage, Confidence float64
	}
	for _, r := range publishedTable(t, "tolerance-one-sided-95") {
		var of entry
		parameters(t, r, &of)
		wantPrinted(t, r, OneSidedToleranceFactor(of.N, of.Coverage, of.Confidence))
	}
	for _, r := range publishedTable(t, "tolerance-two-sided-95") {
		var of entry
		parameters(t, r, &of)
		_, exact, found := strings.Cut(r["note"], "the exact factor is ")
		want, err := strconv.ParseFloat(exact, 64)
		if !found || err != nil {
			t.Fatalf("no exact factor in %q", r["note"])
		}
		if got := ToleranceFactor(of.N, of.Coverage, of.Confidence); math.Abs(got-want) > 0.00005001 {
			t.Errorf("%s: got %v, exact %v", r["params"], got, want)
		}
	}
}

func TestToleranceFactorsAndConfidencesAgree(t *testing.T) {
	rng := rand.New(rand.NewPCG(7, 1))
	for range 60 {
		n := 2 + int(math.Exp(9*rng.Float64()))
		content := rng.Float64()
		if rng.IntN(2) == 0 {
			content = 1 - math.Exp(-9*rng.Float64()-1)
		}
		confidence := 0.02 + 0.97*rng.Float64()
		what := fmt.Sprint(n, content, confidence)
		k, k1 := ToleranceFactor(n, content, confidence), OneSidedToleranceFactor(n, content, confidence)
		// The factor moves the confidence by at most about sqrt(n) a relative unit.
		slack := 1e-13 + 1e-15*math.Sqrt(float64(n))
		attained, _ := newTwoSidedTolerance(n, content).tails(k)
		wantDigits(t, what, attained, confidence, slack/0.02)
		wantDigits(t, what, oneSidedTolerance(n, content).CDF(k1*math.Sqrt(float64(n))), confidence, slack/0.02)
		if more := ToleranceFactor(n, content, confidence+0.005); !(more > k) {
			t.Errorf("%s: factor %v, %v for more confidence", what, k, more)
		}
		if more := ToleranceFactor(n, content*0.999+0.001, confidence); !(more > k) {
			t.Errorf("%s: factor %v, %v for more content", what, k, more)
		}
		if content > 0.5 {
			// mean + k*sd at both ends with half the rest outside each holds the
			// content whenever both hold; at least as wide as the exact factor
			// for the content between.
			both := OneSidedToleranceFactor(n, (1+content)/2, (1+confidence)/2)
			if !(both > k) {
				t.Errorf("%s: factor %v, at each end %v", what, k, both)
			}
		}
	}
}

// Limit: for many values the factor is the normal quantile, more by what the
// confidence takes of the sd's spread, 1/sqrt(2n).
func TestToleranceFactorsApproachTheNormalQuantile(t *testing.T) {
	for _, content := range []float64{0.1, 0.5, 0.9, 0.99} {
		z := Normal{}.UpperQuantile((1 - content) / 2)
		for _, n := range []int{1e4, 1e6, 1e8} {
			c := Normal{}.UpperQuantile(0.05)
			want := z * (1 + c/math.Sqrt(2*float64(n)))
			wantDigits(t, fmt.Sprint(n, content), ToleranceFactor(n, content, 0.95), want, 30/float64(n))
		}
	}
}

func TestToleranceStandsAnyArgument(t *testing.T) {
	levels := []float64{math.NaN(), -1, 0, 1e-300, 1e-9, 0.5, 1 - 1e-16, 1, 2, math.Inf(1)}
	for _, n := range []int{-1, 0, 1, 2, 50, 1000000} {
		for _, content := range levels {
			for _, level := range levels {
				inside := n >= 2 && content > 0 && content < 1
				k, k1 := ToleranceFactor(n, content, level), OneSidedToleranceFactor(n, content, level)
				if (inside && level > 0 && level < 1) != (k > 0 && !math.IsNaN(k1)) {
					t.Errorf("factors for %d, %v, %v: %v, %v", n, content, level, k, k1)
				}
			}
		}
	}
}

func BenchmarkToleranceFactor(b *testing.B) {
	for b.Loop() {
		ToleranceFactor(20, 0.95, 0.95)
	}
}
