package dist

import (
	"fmt"
	"math/rand/v2"
	"testing"
)

// The source is the law by integration, which is held against high-precision points.
func TestTailTablesAreTheTailsThemselves(t *testing.T) {
	rng := rand.New(rand.NewPCG(5, 1))
	compare := func(what string, table *tailTable, from float64) {
		t.Helper()
		for w := from; w < 35; w += 0.67 {
			for _, upper := range []bool{false, true} {
				want := table.tail(w, upper)
				if want > 1e-300 {
					wantDigits(t, fmt.Sprintf("%s, w %v, upper %v", what, w, upper), table.at(w, upper), want, 1e-12)
				}
			}
		}
	}
	for _, k := range []int{3, 12, 200, 50000} {
		compare(fmt.Sprintf("range of %d", k), &NewStudentizedRanges(k).table, 0.01)
	}
	for _, k := range []int{1, 3, 30} {
		for _, control := range []int{1, 10, 1000} {
			var sizes []int
			for range k {
				sizes = append(sizes, 1+rng.IntN(100))
			}
			for _, twoSided := range []bool{false, true} {
				from := -9.0
				if twoSided {
					from = 0.01
				}
				law := ComparisonsWithControl(control, sizes, 10, twoSided).Shared()
				compare(fmt.Sprintf("%d groups with a control of %d, two-sided %v", k, control, twoSided), law.table, from)
			}
		}
	}
}

func TestSharedComparisonsAreTheComparisonsThemselves(t *testing.T) {
	for _, twoSided := range []bool{false, true} {
		for _, df := range []float64{1, 9, 400} {
			direct := ComparisonsWithControl(6, []int{5, 9, 9, 31}, df, twoSided)
			shared := direct.Shared()
			for _, q := range []float64{-3, -0.4, 0, 0.3, 1.7, 6} {
				what := fmt.Sprintf("df %v, q %v, two-sided %v", df, q, twoSided)
				wantDigits(t, what, shared.SF(q), direct.SF(q), 1e-12)
				wantDigits(t, what, shared.CDF(q), direct.CDF(q), 1e-12)
			}
			for _, p := range []float64{0.9, 0.05, 1e-8} {
				wantDigits(t, fmt.Sprintf("df %v, quantile of %v, two-sided %v", df, p, twoSided), shared.UpperQuantile(p), direct.UpperQuantile(p), 1e-12)
			}
		}
	}
}
