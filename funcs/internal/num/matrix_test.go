package num

import (
	"math"
	"testing"
)

// Equal correlation r among n: eigenvalues 1 - r (n - 1 times) and 1 + (n-1) r.
func TestSmallestEigenvalueOfEqualCorrelations(t *testing.T) {
	for _, c := range []struct {
		n    int
		r    float64
		want float64
	}{{1, 0, 1}, {2, 0.4, 0.6}, {3, -0.5, 0}, {3, -0.7, -0.4}, {50, 0.25, 0.75}, {200, -1.0 / 199, 0}} {
		a := make([]float64, c.n*c.n)
		for i := range a {
			a[i] = c.r
			if i%(c.n+1) == 0 {
				a[i] = 1
			}
		}
		got, ok := SmallestEigenvalue(a, c.n)
		if !ok || math.Abs(got-c.want) > 1e-13 {
			t.Errorf("n = %d, r = %v: got %v, want %v", c.n, c.r, got, c.want)
		}
	}
}

func TestSmallestEigenvalueNeedsASquare(t *testing.T) {
	if _, ok := SmallestEigenvalue([]float64{1, 0, 1}, 2); ok {
		t.Error("three numbers passed as a matrix of two rows")
	}
}
