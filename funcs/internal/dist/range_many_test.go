package dist

import (
	"fmt"
	"math"
	"math/rand/v2"
	"sync"
	"testing"
)

// rangeCases are degrees of freedom and arguments of all sizes.
func rangeCases(rng *rand.Rand, n int) (df, q []float64) {
	for range n {
		df = append(df, math.Exp(rng.Float64()*10-0.5))
		q = append(q, 4*math.Exp(rng.NormFloat64()/2))
	}
	return df, q
}

// The source is StudentizedRange, which is held against high-precision points.
func TestSharedRangesAreTheRangesThemselves(t *testing.T) {
	rng := rand.New(rand.NewPCG(4, 1))
	for _, k := range []int{2, 3, 7, 40, 200, 3000} {
		ranges := NewStudentizedRanges(k)
		dfs, qs := rangeCases(rng, 25)
		for i, df := range append(dfs, 1e9, math.Inf(1)) {
			q := qs[i%len(qs)]
			direct, shared := StudentizedRange{Groups: k, DF: df}, ranges.Law(df)
			what := fmt.Sprintf("%d groups, df %v, q %v", k, df, q)
			wantDigits(t, what+", upper tail", shared.SF(q), direct.SF(q), 1e-12)
			wantDigits(t, what+", lower tail", shared.CDF(q), direct.CDF(q), 1e-12)
		}
		for _, p := range []float64{0.999, 0.6, 0.05, 1e-9} {
			quantile := ranges.UpperQuantiles(p)
			for _, df := range append(dfs[:8:8], 1, 1e9, 1e12, math.Inf(1)) {
				direct := StudentizedRange{Groups: k, DF: df}
				wantDigits(t, fmt.Sprintf("%d groups, df %v, quantile of %v", k, df, p), quantile(df), direct.UpperQuantile(p), 1e-12)
			}
		}
	}
}

func TestSharedRangesDoNotDependOnWhoAsksFirst(t *testing.T) {
	dfs, qs := rangeCases(rand.New(rand.NewPCG(4, 2)), 200)
	answers := func(workers int) []float64 {
		ranges := NewStudentizedRanges(12)
		quantile := ranges.UpperQuantiles(0.05)
		out := make([]float64, 2*len(dfs))
		var all sync.WaitGroup
		for w := range workers {
			all.Go(func() {
				for i := w; i < len(dfs); i += workers {
					at := (i + 77*workers) % len(dfs) // in another order for each number
					out[2*at], out[2*at+1] = ranges.Law(dfs[at]).SF(qs[at]), quantile(dfs[at])
				}
			})
		}
		all.Wait()
		return out
	}
	want := answers(1)
	for _, workers := range []int{2, 7} {
		for i, got := range answers(workers) {
			if got != want[i] {
				t.Fatalf("%d workers: answer %d is %v, by one worker %v", workers, i, got, want[i])
			}
		}
	}
}

func BenchmarkSharedRange(b *testing.B) {
	ranges := NewStudentizedRanges(100)
	quantile := ranges.UpperQuantiles(0.05)
	dfs, qs := rangeCases(rand.New(rand.NewPCG(4, 3)), 1000)
	for i := 0; b.Loop(); i++ {
		df := dfs[i%len(dfs)]
		ranges.Law(df).SF(qs[i%len(qs)] + quantile(df)/1e9)
	}
}
