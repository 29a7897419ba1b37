package dist

import (
	"fmt"
	"math"
	"math/rand/v2"
	"strings"
	"testing"
)

// testdata/references/numerics/equivalence.csv: both orders of integration at high
// precision; the smallest n of a group whose power reaches what is asked.
func TestEquivalencePowerMatchesHighPrecision(t *testing.T) {
	power := func(r row, n1, n2 float64) float64 {
		sd, diff := r.number(t, "sd"), r.number(t, "diff")
		df, se := n1-1, sd/math.Sqrt(n1)
		if n2 > 0 {
			df, se = n1+n2-2, sd*math.Sqrt(1/n1+1/n2)
		}
		return EquivalencePower(df, (diff-r.number(t, "lower"))/se, (r.number(t, "upper")-diff)/se, r.number(t, "alpha"))
	}
	for _, r := range highPrecisionRows(t, "equivalence.csv") {
		want := r.number(t, "value")
		switch strings.TrimPrefix(r.function(), "equivalence_") {
		case "power_one_sample":
			wantDigits(t, r, power(r, r.number(t, "n"), 0), want, 1e-12)
		case "power_two_sample":
			wantDigits(t, r, power(r, r.number(t, "n1"), r.number(t, "n2")), want, 1e-12)
		case "sample_size_per_group":
			reach := r.number(t, "power")
			if !(power(r, want, want) >= reach && power(r, want-1, want-1) < reach) {
				t.Errorf("%v: power %v at n, %v before", r, power(r, want, want), power(r, want-1, want-1))
			}
		default:
			t.Fatalf("unknown function %q", r.function())
		}
	}
}

// Identity: with the one margin far away only the other test matters, and its
// power is noncentral t. Far from the margins' meeting the two misses add up.
func TestEquivalencePowerWithOneMarginIsNoncentralT(t *testing.T) {
	rng := rand.New(rand.NewPCG(8, 1))
	for range 100 {
		df := 1 + math.Floor(math.Exp(7*rng.Float64()))
		to := 8*rng.Float64() - 2
		alpha := 0.3 * rng.Float64()
		critical := Student{df}.UpperQuantile(alpha)
		what := fmt.Sprint("df ", df, ", to the margin ", to, ", significance ", alpha)
		want := NoncentralT{df, to}.SF(critical)
		wantDigits(t, what, EquivalencePower(df, to, 1e9, alpha), want, 3e-12)
		wantDigits(t, what, EquivalencePower(df, 1e9, to, alpha), want, 3e-12)
	}
}

func TestEquivalencePowerGrowsWithRoom(t *testing.T) {
	rng := rand.New(rand.NewPCG(8, 2))
	for range 200 {
		df := 1 + math.Exp(6*rng.Float64())
		lower, upper := 6*rng.Float64(), 6*rng.Float64()
		what := fmt.Sprint(df, lower, upper)
		p := EquivalencePower(df, lower, upper, 0.05)
		if q := EquivalencePower(df, upper, lower, 0.05); math.Abs(q-p) > 1e-13*p {
			t.Errorf("%s: %v, mirrored %v", what, p, q)
		}
		if q := EquivalencePower(df, lower, upper+0.01, 0.05); !(q > p || p == 0) {
			t.Errorf("%s: power %v, with more room %v", what, p, q)
		}
		if q := EquivalencePower(df, lower, upper, 0.051); !(q > p || p == 0) {
			t.Errorf("%s: power %v, at a larger significance %v", what, p, q)
		}
	}
}

func TestEquivalencePowerStandsAnyArgument(t *testing.T) {
	odd := []float64{math.NaN(), math.Inf(-1), -40, 0, 1e-300, 0.5, 1, 30, math.Inf(1)}
	for _, df := range odd {
		for _, a := range odd {
			for _, b := range odd {
				for _, alpha := range []float64{math.NaN(), 0, 1e-300, 0.05, 0.5, 0.9, 1} {
					got := EquivalencePower(df, a, b, alpha)
					valid := df >= 1 && !math.IsNaN(a+b) && alpha > 0 && alpha < 1
					if valid != (got >= 0 && got <= 1) || !valid && !math.IsNaN(got) {
						t.Errorf("EquivalencePower(%v, %v, %v, %v) = %v", df, a, b, alpha, got)
					}
				}
			}
		}
	}
}

func BenchmarkEquivalencePower(b *testing.B) {
	for b.Loop() {
		EquivalencePower(26, 3, 3, 0.05)
	}
}
