package dist

import (
	"fmt"
	"testing"
)

// Far out no two of the events |difference of a pair| > q s happen together, and so
// the tail is the number of pairs times that of one pair, which is Student's: down to
// where doubles end.
func TestFarTailsAddUpOverPairs(t *testing.T) {
	for _, df := range []float64{2000, 29700, 1e6} {
		for _, k := range []int{3, 300} {
			ranges := NewStudentizedRanges(k)
			control := ComparisonsWithControl(10, make10(k), df, true).Shared()
			for _, q := range []float64{52, 53, 53.5, 54, 55, 57} {
				pairs := float64(k * (k - 1))
				if want := pairs * (Student{df}).SF(q/1.4142135623730951); want > 1e-306 {
					wantDigits(t, fmt.Sprint("range of ", k, df, q), ranges.Law(df).SF(q), want, 1e-10)
				}
				at := q / 1.4142135623730951
				if want := 2 * float64(k) * (Student{df}).SF(at); want > 1e-306 {
					wantDigits(t, fmt.Sprint("control of ", k, df, at), control.SF(at), want, 1e-10)
				}
			}
		}
	}
}

// make10 is so many groups of ten.
func make10(groups int) []int {
	sizes := make([]int, groups)
	for i := range sizes {
		sizes[i] = 10
	}
	return sizes
}
