package dist

import (
	"math"
	"testing"
)

// Values of the t, F and chi-square tables that any textbook prints.
func TestLawsReproduceFamiliarTables(t *testing.T) {
	for _, c := range []struct{ got, want float64 }{
		{Student{10}.Quantile(0.975), 2.228},
		{ChiSquare{5}.UpperQuantile(0.05), 11.070},
		{F{3, 12}.UpperQuantile(0.05), 3.490},
		{Normal{}.UpperQuantile(0.025), 1.960},
	} {
		if math.Abs(c.got-c.want) > 0.001 {
			t.Errorf("got %v, want %v", c.got, c.want)
		}
	}
}
