package rpc

import (
	"context"
	"sync/atomic"
	"time"
)

// waitInTurn is how long messages wait for an answer that should be quick.
const waitInTurn = 50 * time.Millisecond

// ongoing is the rest of a call whose work has begun in turn and goes on by
// itself: it waits for no worker.
type ongoing later

// soon does quick work in turn. Work that turns out long, as for an argument at
// the end of its domain, or on a machine with too much to do, goes on by itself
// and answers when it has come to its end: no argument keeps the server from
// reading on. It costs some 20 microseconds more than to do the work outright.
// While as many are going on as there are workers, work of a kind that was long
// once is left to a worker.
func (c *Call) soon(kind string, work func(ctx context.Context) (any, error)) (any, error) {
	s := c.Session
	if s.slow[kind] && int(s.runaways.Load()) >= s.limits.Workers {
		return Later(work)
	}
	ctx, cancel := context.WithCancel(s.ctx)
	type answer struct {
		result any
		err    error
	}
	done := make(chan answer, 1)
	var settled atomic.Bool // whether it is known which came first, the end of the work or that of the wait
	go func() {
		result, err := c.guard(func() (any, error) { return work(ctx) })
		if !settled.CompareAndSwap(false, true) {
			s.runaways.Add(-1)
		}
		done <- answer{result, err}
	}()
	timer := time.NewTimer(s.options.waitInTurn)
	defer timer.Stop()
	select {
	case a := <-done:
		cancel()
		delete(s.slow, kind)
		return a.result, a.err
	case <-timer.C:
	}
	s.runaways.Add(1)
	if !settled.CompareAndSwap(false, true) {
		s.runaways.Add(-1)
	}
	s.slow[kind] = true
	c.abandon = cancel
	return ongoing(func(ctx context.Context) (any, error) {
		select {
		case a := <-done:
			return a.result, a.err
		case <-ctx.Done():
			return nil, ctx.Err()
		}
	}), nil
}
