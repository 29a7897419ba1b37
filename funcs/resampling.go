package funcs

import (
	"context"
	"fmt"
	"runtime"
	"sync"

	"halfwidth/funcs/internal/num"
)

var (
	resamplesInput = count("resamples", "how many samples to draw at random; times n at most 60 million values", 100).within(Domain{Low: 100, High: mostResamples, Whole: true}).withDefault(10000)
	seedInput      = count("seed", "where the random draws start; the same seed gives the same digits everywhere", 0).withDefault(1)
)

const (
	// mostResamples keeps the sorting of what the draws give short.
	mostResamples = 1_000_000
	// mostDraws is how many values one call draws at the most: some half a second on
	// two cores. A value that is dearer to draw or to use counts as several.
	mostDraws = 60_000_000
	// leastByDefault is the smallest number of resamples that stands in for the
	// default: the simulation error of a coverage of 95% is then 0.7%.
	leastByDefault = 1000
)

var (
	tooManyDrawsKind   = FindingKind{"too-many-draws", "resamples times n passes what is drawn in one call; see resamples"}
	fewerResamplesKind = FindingKind{"fewer-resamples", "information: the default resamples times n passes what is drawn in one call, so fewer were drawn, but at least 1000"}
)

// resamplesFor is how many samples of n to draw, where a value counts as cost
// values. A number that the call asked for is refused where it does not fit; the
// default is lowered to the largest that does, which then stands as the argument.
func (c *Call) resamplesFor(in In[int], n, cost int) (resamples int, lowered bool, err error) {
	wanted, fit := in.Of(c), mostDraws/cost/n
	least := int(in.Domain.Low)
	switch {
	case wanted <= fit:
		return wanted, false, nil
	case !c.args[in.Name].byDefault:
		advice := fmt.Sprintf("ask for at most %d resamples", fit)
		if fit < least {
			advice = fmt.Sprintf("ask for an n of at most %d", mostDraws/cost/least)
		}
		return 0, false, refuse("too-many-draws", in.Name, "%d resamples of n = %d would draw %s values, but at most %d are drawn in one call here; %s.",
			wanted, n, brief(float64(wanted)*float64(n)), mostDraws/cost, advice)
	case fit < leastByDefault:
		advice := fmt.Sprintf("look at an n of at most %d", mostDraws/cost/leastByDefault)
		if fit >= least {
			advice += fmt.Sprintf(", or ask for from %d to %d resamples", least, fit)
		}
		return 0, false, refuse("too-many-draws", in.Name, "Only %d samples of n = %d can be drawn in one call, too few for a steady answer; %s.", fit, n, advice)
	}
	c.args[in.Name] = From{Value: fit}
	return fit, true, nil
}

// sayLowered tells that fewer samples were drawn than the default, and what error
// that leaves.
func (c *Call) sayLowered(in In[int], resamples, n int, left string) {
	c.inform("fewer-resamples", in.Name, "%d samples of n = %d were drawn instead of %d, as many as fit in one call; %s.", resamples, n, in.Default, left)
}

// resample calls work for each resample from 0 to n-1, shared among the cores.
// Each resample has its own stream, and work may write only to what belongs to
// its resample or its worker, so that the digits do not depend on the cores.
// newWorker gives the work of one goroutine, with scratch space of its own.
func resample(ctx context.Context, seed, n int, newWorker func() func(i int, s *num.Stream)) error {
	return share(ctx, n, 64, func() func(int) {
		work, stream := newWorker(), num.NewStream()
		return func(i int) {
			stream.Start(uint64(seed), uint64(i))
			work(i, stream)
		}
	})
}

// share calls work for each item from 0 to n-1; a goroutine, which newWorker gives
// its work, takes a chunk of them at a time. Others help the call's own while all
// calls together keep no more of them busy than there are cores: threads beyond
// that would only keep each other, and what should be answered at once, waiting.
func share(ctx context.Context, n, chunk int, newWorker func() func(i int)) error {
	var next struct {
		sync.Mutex
		at    int
		fault any // what a worker panicked with
	}
	take := func() (from, to int) {
		next.Lock()
		defer next.Unlock()
		from = next.at
		next.at = min(n, from+chunk)
		return from, next.at
	}
	cores := int32(min(runtime.GOMAXPROCS(0), runtime.NumCPU()))
	run := func(helps bool) {
		work := newWorker()
		for from, to := take(); from < to && ctx.Err() == nil; from, to = take() {
			for i := from; i < to && ctx.Err() == nil; i++ {
				work(i)
			}
			if helps && busy.Load() > cores {
				return
			}
		}
	}
	var helpers sync.WaitGroup
	for range (n+chunk-1)/chunk - 1 {
		if busy.Add(1) > cores {
			busy.Add(-1)
			break
		}
		helpers.Go(func() {
			defer busy.Add(-1)
			defer func() {
				if p := recover(); p != nil {
					next.Lock()
					defer next.Unlock()
					next.fault = p
				}
			}()
			run(true)
		})
	}
	func() {
		defer helpers.Wait()
		run(false)
	}()
	if next.fault != nil {
		panic(next.fault) // for the call's own guard, which does not see other goroutines
	}
	return ctx.Err()
}
