package dist

import (
	"fmt"
	"math"
	"math/bits"
	"math/rand/v2"
	"testing"

	"halfwidth/funcs/internal/num"
)

// Slow exact count: every way to choose the first sample.
func TestRankSumMatchesEveryChoice(t *testing.T) {
	rng := rand.New(rand.NewPCG(5, 1))
	for range 60 {
		n := 2 + rng.IntN(13)
		first := 1 + rng.IntN(n-1)
		values := make([]float64, n)
		for i := range values {
			values[i] = float64(rng.IntN(1 + rng.IntN(2*n)))
		}
		counts, total := make([]float64, 2*first*(n-first)+1), 0.0
		for set := range 1 << n {
			if bits.OnesCount(uint(set)) != first {
				continue
			}
			s := 0
			for i := range n {
				for j := range n {
					if set>>i&1 == 1 && set>>j&1 == 0 {
						if values[i] > values[j] {
							s += 2
						} else if values[i] == values[j] {
							s++
						}
					}
				}
			}
			counts[s]++
			total++
		}
		ranks, _ := num.Ranks(values)
		law, ok := NewRankSum(ranks, first)
		if !ok {
			t.Fatalf("%v, %d of them first: not worked out", values, first)
		}
		below := 0.0
		for s, c := range counts {
			what := fmt.Sprint(values, first, s)
			u := float64(s) / 2
			wantDigits(t, what, law.SF(u-0.5), (total-below)/total, 1e-14)
			below += c
			wantDigits(t, what, law.CDF(u), below/total, 1e-14)
			wantDigits(t, what, law.CDF(u+0.3), below/total, 1e-14)
		}
	}
}

// Identities at the largest size: symmetry, the extreme orders, the moments
// n1 n2/2 and n1 n2 (N+1)/12, and with ties the tie-corrected variance
// n1 n2/12 (N+1 - sum(t^3-t)/(N(N-1))).
func TestRankSumHasKnownMoments(t *testing.T) {
	for _, c := range []struct{ first, second, distinct int }{{100, 100, 200}, {3, 40, 43}, {40, 60, 100}, {60, 60, 7}, {100, 100, 150}} {
		n := c.first + c.second
		values := make([]float64, n)
		for i := range values {
			values[i] = float64(i * c.distinct / n)
		}
		ranks, ties := num.Ranks(values)
		law, ok := NewRankSum(ranks, c.first)
		if !ok {
			t.Fatalf("%v not worked out", c)
		}
		correction := 0.0
		for _, size := range ties {
			s := float64(size)
			correction += s*s*s - s
		}
		N, pairs := float64(n), float64(c.first*c.second)
		mean, square := 0.0, 0.0
		for s := 1; s <= 2*c.first*c.second; s++ {
			u := float64(s) / 2
			mean += law.SF(u-0.5) / 2
			square += (law.SF(u-0.5) * (2*u - 0.5)) / 2
		}
		wantDigits(t, c, mean, pairs/2, 1e-12)
		wantDigits(t, c, square-mean*mean, pairs/12*(N+1-correction/(N*(N-1))), 1e-10)
		if len(ties) == 0 {
			ways := new(float64)
			*ways = 1
			for i := range c.first {
				*ways *= float64(c.second+i+1) / float64(i+1)
			}
			wantDigits(t, c, law.CDF(0), 1 / *ways, 1e-12)
			for _, u := range []float64{0, 5, pairs / 3, pairs / 2} {
				wantDigits(t, c, law.CDF(u), law.SF(pairs-u-0.5), 1e-13)
			}
		}
	}
}

func TestRankSumRefusesOtherSizes(t *testing.T) {
	for _, c := range []struct{ n, first int }{{0, 0}, {3, 0}, {3, 3}, {3, -1}, {3, 4}, {202, 101}} {
		if law, ok := NewRankSum(make([]float64, c.n), c.first); ok || !math.IsNaN(law.CDF(1)) || !math.IsNaN(law.SF(1)) {
			t.Errorf("%+v: worked out", c)
		}
	}
}

func BenchmarkRankSum100(b *testing.B) {
	values := make([]float64, 200)
	for i := range values {
		values[i] = float64(i)
	}
	for b.Loop() {
		NewRankSum(values, 100)
	}
}
