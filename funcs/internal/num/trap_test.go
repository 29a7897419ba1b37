package num

import (
	"math"
	"testing"
)

// Integrals known in closed form: sqrt(pi), pi, Gamma(3.5) = 15 sqrt(pi)/8.
func TestTrapezoidReachesClosedForms(t *testing.T) {
	for _, c := range []struct {
		name         string
		f            func(float64) float64
		centre, step float64
		want         float64
	}{
		{"bell", func(x float64) float64 { return math.Exp(-x * x) }, 0.3, 1, math.Sqrt(math.Pi)},
		{"narrow bell", func(x float64) float64 { d := x - 1; return math.Exp(-d * d / 2e-4) }, 1.01, 0.02, math.Sqrt(2e-4 * math.Pi)},
		{"hyperbolic secant", func(x float64) float64 { return 1 / math.Cosh(x) }, 0, 1, math.Pi},
		{"gamma function", func(u float64) float64 { return math.Exp(3.5*u - math.Exp(u)) }, 1, 0.5, 15 * math.Sqrt(math.Pi) / 8},
	} {
		if got := Trapezoid(c.f, c.centre, c.step, 1e-8); math.Abs(got/c.want-1) > 1e-14 {
			t.Errorf("%s: got %v, want %v", c.name, got, c.want)
		}
	}
}

func TestTrapezoidStopsOnNonsense(t *testing.T) {
	calls := 0
	if got := Trapezoid(func(float64) float64 { calls++; return math.NaN() }, 0, 1, 1e-8); !math.IsNaN(got) {
		t.Errorf("got %v, want NaN", got)
	}
	if got := Trapezoid(func(float64) float64 { return 0 }, 0, 1, 1e-8); got != 0 {
		t.Errorf("got %v, want 0", got)
	}
	if calls > 100 {
		t.Errorf("%d calls", calls)
	}
}

// A rule with n nodes is exact for polynomials of degree 2n-1, here 63; the
// integral of x^k from 0 to 1 is 1/(k+1).
func TestLegendreIsExactForPolynomials(t *testing.T) {
	for k := 0; k <= 63; k++ {
		got := Legendre(func(x float64) float64 { return math.Pow(x, float64(k)) }, 0, 1)
		if math.Abs(got*float64(k+1)-1) > 1e-14 {
			t.Errorf("x^%d: %v, want 1/%d", k, got, k+1)
		}
	}
	if got := Legendre(func(x float64) float64 { return math.Exp(-39 * x) }, 0, 1); math.Abs(got*39-1) > 1e-14 {
		t.Errorf("exp(-39 x): %v, want 1/39", got)
	}
}
