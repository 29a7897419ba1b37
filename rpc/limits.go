package rpc

import (
	"runtime"
	"time"
)

// Limits bound what a client can make the server hold or do. A field left 0
// takes the default.
type Limits struct {
	MessageBytes int           // length of one message's body
	HeaderBytes  int           // length of one message's header
	Depth        int           // nesting of a message, its own braces counted
	SampleValues int           // numbers in one list
	OpenSheets   int           // sheets open at once
	OpenCells    int           // cells that they hold together, the blanks between them counted
	Queue        int           // long calls waiting for a worker
	QueueBytes   int           // params of the long calls waiting, together
	Workers      int           // long calls running at once
	UnsentBytes  int           // replies unread, beyond which no more is read
	Drain        time.Duration // at end of input: time for what is under way
	Patience     time.Duration // at the end: time without headway until unread replies are given up
}

// DefaultLimits are safe for a client that is slow or wrong.
func DefaultLimits() Limits {
	return Limits{
		MessageBytes: 64 << 20,
		HeaderBytes:  16 << 10,
		Depth:        128,
		SampleValues: 10_000_000,
		OpenSheets:   256,
		OpenCells:    50_000_000,
		Queue:        1024,
		QueueBytes:   256 << 20,
		Workers:      runtime.NumCPU(),
		UnsentBytes:  64 << 20,
		Drain:        500 * time.Millisecond,
		Patience:     5 * time.Second,
	}
}

func (l Limits) withDefaults() Limits {
	d := DefaultLimits()
	for _, f := range []struct{ field, standard *int }{
		{&l.MessageBytes, &d.MessageBytes}, {&l.HeaderBytes, &d.HeaderBytes}, {&l.Depth, &d.Depth}, {&l.SampleValues, &d.SampleValues}, {&l.OpenSheets, &d.OpenSheets}, {&l.OpenCells, &d.OpenCells}, {&l.Queue, &d.Queue},
		{&l.QueueBytes, &d.QueueBytes}, {&l.Workers, &d.Workers}, {&l.UnsentBytes, &d.UnsentBytes},
	} {
		if *f.field <= 0 {
			*f.field = *f.standard
		}
	}
	if l.Drain <= 0 {
		l.Drain = d.Drain
	}
	if l.Patience <= 0 {
		l.Patience = d.Patience
	}
	return l
}
