package rpc

import (
	"container/list"
	"context"
	"sync"
)

// pool runs long calls in their order, a few at a time. Workers exist only
// while there is work.
type pool struct {
	limits Limits

	mu      sync.Mutex
	waiting list.List // of *Call
	bytes   int       // params of those waiting
	workers int
}

// add queues a call, or reports that the queue is full.
func (p *pool) add(call *Call) bool {
	p.mu.Lock()
	defer p.mu.Unlock()
	idle := p.workers < p.limits.Workers
	if !idle && (p.waiting.Len() >= p.limits.Queue || p.waiting.Len() > 0 && p.bytes+call.size > p.limits.QueueBytes) {
		return false
	}
	if idle { // then nothing waits
		p.workers++
		go p.work(call)
		return true
	}
	call.place = p.waiting.PushBack(call)
	p.bytes += call.size
	return true
}

// drop takes a call out of the queue, if it still is in it, unrun.
func (p *pool) drop(call *Call) {
	p.mu.Lock()
	defer p.mu.Unlock()
	p.remove(call)
}

func (p *pool) remove(call *Call) {
	if call.place != nil {
		p.waiting.Remove(call.place)
		p.bytes -= call.size
		call.place = nil
	}
}

func (p *pool) take() *Call {
	p.mu.Lock()
	defer p.mu.Unlock()
	front := p.waiting.Front()
	if front == nil || p.workers > p.limits.Workers {
		p.workers--
		return nil
	}
	call := front.Value.(*Call)
	p.remove(call)
	return call
}

// work runs a call and then what waits.
func (p *pool) work(call *Call) {
	for ; call != nil; call = p.take() {
		call.finish()
	}
}

// begun counts a worker more, also where that makes one too many.
func (p *pool) begun() {
	p.mu.Lock()
	p.workers++
	p.mu.Unlock()
}

// finish runs what a call has left, and answers it.
func (c *Call) finish() {
	result, err := c.guard(func() (any, error) { return c.run(c.ctx) })
	if rest, ok := result.(later); ok && err == nil {
		result, err = c.guard(func() (any, error) { return rest(c.ctx) })
	}
	c.settle(result, err)
}

// settle answers a call whose work has come to its end. What was worked out
// after a cancel counts for nothing.
func (c *Call) settle(result any, err error) {
	if err == nil && context.Cause(c.ctx) != nil {
		err = errCancelled
	}
	c.answer(result, err, false)
}
