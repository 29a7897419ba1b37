package rpc

import (
	"context"
	"sync"
	"time"
)

// settle is how long something must stay as it is before it is worked out, so
// that a burst of changes is worked out once.
const settle = 15 * time.Millisecond

// restless is how long the first of many changes waits for a pause; after that
// the newest state is worked out without one.
const restless = 250 * time.Millisecond

// newest works out the newest of the states that something passes through, one
// at a time, in a goroutine that lives while there is something to do.
//
// A change stops the work on an older state. So that changes which never pause
// do not have it begun again for ever, work that was begun without a pause may
// last as long as restless, and work after some that was dropped twice as long
// as that did, before a change stops it. Work of any length then comes to its
// end, after no more than twice its time was spent on work that was dropped,
// and what it gives is sent though newer states have come.
type newest[S any] struct {
	settle time.Duration
	begin  func(run func(ctx context.Context)) // runs it in a goroutine
	// work works a state out, catching its own panics, and gives what sends the
	// results. That is called while no change can come, and not after drop.
	work func(ctx context.Context, state S) (send func())

	mu      sync.Mutex
	running bool
	state   *S        // to be worked out; nil: none
	first   time.Time // when the first change came that no work was begun for; zero: none has
	last    time.Time // when the last one came

	// Of the work under way:
	stop  context.CancelFunc // nil where there is none
	begun time.Time
	least time.Duration // that it may last whatever comes
}

// changed makes a state the newest.
func (n *newest[S]) changed(state S) {
	n.mu.Lock()
	defer n.mu.Unlock()
	n.state, n.last = &state, time.Now()
	if n.first.IsZero() {
		n.first = n.last
		if n.stop != nil {
			time.AfterFunc(n.begun.Add(n.least).Sub(n.last), n.stop) // where the work has ended by then it stops nothing
		}
	}
	if !n.running {
		n.running, n.least = true, 0
		n.begin(n.run)
	}
}

// drop leaves nothing to be worked out. Once it has returned, nothing is sent
// of any state that came before.
func (n *newest[S]) drop() {
	n.mu.Lock()
	defer n.mu.Unlock()
	n.state, n.first = nil, time.Time{}
	if n.stop != nil {
		n.stop()
	}
}

// run works out states until the newest has been sent.
func (n *newest[S]) run(ctx context.Context) {
	n.mu.Lock()
	defer n.mu.Unlock()
	for n.state != nil && ctx.Err() == nil {
		toPause, most := time.Until(n.last.Add(n.settle)), time.Until(n.first.Add(restless))
		if rest := min(toPause, most); rest > 0 {
			n.mu.Unlock()
			wait(ctx, rest)
			n.mu.Lock()
			continue
		}
		if toPause > 0 {
			n.least = max(n.least, restless)
		}
		state := *n.state
		working, stop := context.WithCancel(ctx)
		n.state, n.first, n.stop, n.begun = nil, time.Time{}, stop, time.Now()
		n.mu.Unlock()
		send := n.work(working, state)
		n.mu.Lock()
		if working.Err() == nil {
			send()
		} else {
			n.least = max(restless, 2*time.Since(n.begun))
		}
		stop()
		n.stop = nil
	}
	n.running = false
}

func wait(ctx context.Context, d time.Duration) {
	timer := time.NewTimer(d)
	defer timer.Stop()
	select {
	case <-ctx.Done():
	case <-timer.C:
	}
}
