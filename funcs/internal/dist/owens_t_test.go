package dist

import (
	"fmt"
	"math"
	"math/rand/v2"
	"testing"
)

// testdata/references/numerics/owens_t.csv: two integrals at 60 digits.
func TestOwensTMatchesHighPrecision(t *testing.T) {
	for _, r := range highPrecisionRows(t, "owens_t.csv") {
		wantDigits(t, r, OwensT(r.number(t, "h"), r.number(t, "a")), r.number(t, "value"), 1e-13)
	}
}

// Owen 1956: T(h, 1) = Phi(h) Phi(-h)/2, T(h, infinity) = Phi(-|h|)/2,
// T(0, a) = atan(a)/(2 pi), T(-h, a) = T(h, a) = -T(h, -a).
func TestOwensTHasItsSpecialValues(t *testing.T) {
	rng := rand.New(rand.NewPCG(6, 1))
	for range 300 {
		h, a := 12*rng.NormFloat64(), math.Exp(4*rng.NormFloat64())
		n := Normal{}
		wantDigits(t, h, OwensT(h, 1), n.CDF(h)*n.SF(h)/2, 2e-13)
		wantDigits(t, h, OwensT(h, math.Inf(1)), n.SF(math.Abs(h))/2, 1e-15)
		wantDigits(t, a, OwensT(0, a), math.Atan(a)/(2*math.Pi), 1e-15)
		if OwensT(-h, a) != OwensT(h, a) || OwensT(h, -a) != -OwensT(h, a) {
			t.Errorf("T(%v, %v) is not even in h and odd in a", h, a)
		}
	}
}

// Identity: dT/dh = -phi(h) (Phi(ah) - 1/2), and T vanishes far out.
func TestOwensTIsTheIntegralOfItsSlope(t *testing.T) {
	rng := rand.New(rand.NewPCG(6, 2))
	for range 100 {
		h, a := 6*rng.Float64(), math.Exp(2*rng.NormFloat64())
		n := Normal{}
		sum := 0.0
		slope := func(x float64) float64 { return n.Density(x) * n.Between(0, a*x) }
		width := min(0.5, 1/a)
		for x := h; x < h+9; x += width {
			sum += gauss16(slope, x, x+width)
		}
		wantDigits(t, fmt.Sprint("h=", h, " a=", a), OwensT(h, a), sum, 1e-12)
	}
}

// The ways of working it out meet at |a| = 1 and at h = 1.
func TestOwensTHasNoSeam(t *testing.T) {
	for _, h := range []float64{0, 0.3, 1, 4, 20} {
		wantDigits(t, h, OwensT(h, math.Nextafter(1, 2)), OwensT(h, 1), 1e-13)
	}
	for _, a := range []float64{1e-9, 0.1, 0.7, 1, 3} {
		wantDigits(t, a, OwensT(math.Nextafter(1, 2), a), OwensT(1, a), 1e-14)
	}
}

func TestOwensTStandsAnyArgument(t *testing.T) {
	odd := []float64{0, 5e-324, 1e-300, 1, 38, 1e9, 1e300, math.Inf(1)}
	for _, h := range odd {
		for _, a := range odd {
			if got := OwensT(h, a); !(got >= 0 && got <= 0.25) {
				t.Errorf("T(%v, %v) = %v", h, a, got)
			}
		}
	}
	if !math.IsNaN(OwensT(math.NaN(), 1)) || !math.IsNaN(OwensT(1, math.NaN())) {
		t.Error("NaN arguments give a number")
	}
}

func BenchmarkOwensT(b *testing.B) {
	for b.Loop() {
		OwensT(2.5, 0.8)
	}
}
