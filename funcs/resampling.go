package funcs

import (
	"context"
	"runtime"
	"sync"

	"halfwidth/funcs/internal/num"
)

var (
	resamplesInput = count("resamples", "how many samples to draw at random", 100).within(Domain{Low: 100, High: mostResamples, Whole: true}).withDefault(10000)
	seedInput      = count("seed", "where the random draws start; the same seed gives the same digits everywhere", 0).withDefault(1)
)

// mostResamples keeps what the draws give within 80 megabytes.
const mostResamples = 10_000_000

// resample calls work for each resample from 0 to n-1, shared among the cores.
// Each resample has its own stream, and work may write only to what belongs to
// its resample or its worker, so that the digits do not depend on the cores.
// newWorker gives the work of one goroutine, with scratch space of its own. No
// more of them run than there are cores: a program that allows more threads, to
// stay quick at other things meanwhile, keeps the others free.
func resample(ctx context.Context, seed, n int, newWorker func() func(i int, s *num.Stream)) error {
	const chunk = 64 // resamples that a worker takes at once
	var next struct {
		sync.Mutex
		at int
	}
	take := func() (from, to int) {
		next.Lock()
		defer next.Unlock()
		from = next.at
		next.at = min(n, from+chunk)
		return from, next.at
	}
	var all sync.WaitGroup
	for range min(runtime.GOMAXPROCS(0), runtime.NumCPU(), (n+chunk-1)/chunk) {
		all.Go(func() {
			work, stream := newWorker(), num.NewStream()
			for from, to := take(); from < to && ctx.Err() == nil; from, to = take() {
				for i := from; i < to && ctx.Err() == nil; i++ {
					stream.Start(uint64(seed), uint64(i))
					work(i, stream)
				}
			}
		})
	}
	all.Wait()
	return ctx.Err()
}
