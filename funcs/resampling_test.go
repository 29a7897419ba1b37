package funcs

import (
	"context"
	"errors"
	"fmt"
	"math/rand/v2"
	"runtime"
	"sync/atomic"
	"testing"
)

func TestSharedWorkIsDoneOnce(t *testing.T) {
	for _, n := range []int{0, 1, 3, 64, 1000} {
		done := make([]atomic.Int32, n)
		if err := share(t.Context(), n, 4, func() func(int) { return func(i int) { done[i].Add(1) } }); err != nil {
			t.Fatal(err)
		}
		for i := range done {
			if k := done[i].Load(); k != 1 {
				t.Errorf("n = %d: item %d was worked on %d times", n, i, k)
			}
		}
	}
}

// Once cancelled, no worker begins another item: at most those under way end.
func TestSharedWorkEndsWhenCancelled(t *testing.T) {
	ctx, cancel := context.WithCancel(t.Context())
	var begun atomic.Int32
	err := share(ctx, 1_000_000, 64, func() func(int) {
		return func(int) {
			switch k := begun.Add(1); {
			case k == 100:
				cancel()
			case k > 100:
				<-ctx.Done()
			}
		}
	})
	if most := int32(100 + runtime.NumCPU()); !errors.Is(err, context.Canceled) || begun.Load() > most {
		t.Errorf("%v after %d items, want at most %d", err, begun.Load(), most)
	}
}

// A call that comes while another uses every core works alone.
func TestSharedWorkOfAllCallsKeepsToTheCores(t *testing.T) {
	onCores(8, func() {
		cores := int32(min(8, runtime.NumCPU()))
		var first, second, at atomic.Int32
		full, release, done := make(chan bool), make(chan bool), make(chan error)
		call := func(begun *atomic.Int32, work func(int)) error {
			busy.Add(1)
			defer busy.Add(-1)
			return share(t.Context(), 1000, 1, func() func(int) { begun.Add(1); return work })
		}
		go func() {
			done <- call(&first, func(int) {
				if at.Add(1) == cores {
					close(full)
				}
				<-release
			})
		}()
		<-full
		if err := call(&second, func(int) {}); err != nil || first.Load() != cores || second.Load() != 1 {
			t.Errorf("%v, %d goroutines of %d cores, then %d", err, first.Load(), cores, second.Load())
		}
		close(release)
		if err := <-done; err != nil || busy.Load() != 0 {
			t.Errorf("%v, and %d are still counted", err, busy.Load())
		}
	})
}

// A fault of our own in another goroutine is an internal error, not the end of
// the program.
func TestAPanicInSharedWorkIsAnInternalError(t *testing.T) {
	f := &Function{Name: "faulty", compute: func(c *Call) error {
		return share(c.ctx, 100, 4, func() func(int) { return func(int) { panic("fault") } })
	}}
	if _, err := f.Answer(t.Context(), nil); !errors.Is(err, ErrInternal) {
		t.Errorf("got %v", err)
	}
}

// The rows of many pairs do not depend on the cores.
func TestPairsGiveTheSameDigitsOnAnyCores(t *testing.T) {
	rng := rand.New(rand.NewPCG(8, 8))
	var groups []Group
	for i := range 9 {
		groups = append(groups, Group{fmt.Sprint("depot ", i), noise(rng, 3+i, 10, 1+float64(i))})
	}
	arguments := map[string]any{"samples": groups, "variances": separate}
	var one, many *Outcome
	onCores(1, func() { one = answer(t, "pairwise-differences", arguments) })
	onCores(8, func() { many = answer(t, "pairwise-differences", arguments) })
	if len(one.Rows) != 36 || len(many.Rows) != 36 {
		t.Fatalf("%d and %d rows", len(one.Rows), len(many.Rows))
	}
	for i := range one.Rows {
		for name, v := range one.Rows[i].Values {
			if many.Rows[i].Values[name] != v {
				t.Errorf("row %d: %s is %v and %v", i, name, v, many.Rows[i].Values[name])
			}
		}
	}
}
