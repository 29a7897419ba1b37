package dist

import (
	"fmt"
	"math"
	"math/bits"
	"testing"
)

// Slow exact count: every order of two kinds of things.
func TestRunsMatchEveryOrder(t *testing.T) {
	for a := range 9 {
		for b := range 9 {
			if a+b == 0 {
				continue
			}
			counts, total := make([]float64, a+b+2), 0.0
			for order := range 1 << (a + b) {
				if bits.OnesCount(uint(order)) != a {
					continue
				}
				runs := 1
				for i := 1; i < a+b; i++ {
					if order>>i&1 != order>>(i-1)&1 {
						runs++
					}
				}
				counts[runs]++
				total++
			}
			d, below := Runs{a, b}, 0.0
			for r, c := range counts {
				below += c
				what := fmt.Sprint(d, " r=", r)
				wantDigits(t, what, d.CDF(r), below/total, 1e-13)
				wantDigits(t, what, d.SF(r), (total-below)/total, 1e-13)
			}
		}
	}
}

// Swed & Eisenhart 1943, table II: the largest r with P(R <= r) <= 0.025 and the
// smallest with P(R >= r) <= 0.025, as textbooks carry them.
func TestRunsReproducePrintedLimits(t *testing.T) {
	for _, c := range []struct{ n, low, high int }{{5, 2, 10}, {10, 6, 16}, {15, 10, 22}, {20, 14, 28}} {
		d := Runs{c.n, c.n}
		if !(d.CDF(c.low) <= 0.025 && d.CDF(c.low+1) > 0.025) {
			t.Errorf("%v: P(R <= %d) is %v", d, c.low, d.CDF(c.low))
		}
		if !(d.SF(c.high-1) <= 0.025 && d.SF(c.high-2) > 0.025) {
			t.Errorf("%v: P(R >= %d) is %v", d, c.high, d.SF(c.high-1))
		}
	}
}

func TestRunsStandAnyArgument(t *testing.T) {
	counts := []int{-1, 0, 1, 50, 100000, math.MaxInt >> 23}
	for _, a := range counts {
		for _, b := range counts {
			for _, r := range counts {
				d := Runs{a, b}
				low, high := d.CDF(r), d.SF(r)
				if d.valid() != (low >= 0 && high >= 0 && math.Abs(low+high-1) < 1e-6) || !d.valid() && !math.IsNaN(low) {
					t.Errorf("%v at %d: tails %v and %v", d, r, low, high)
				}
			}
		}
	}
}
