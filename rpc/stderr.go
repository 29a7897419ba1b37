package rpc

import (
	"fmt"
	"io"
	"strings"
	"sync/atomic"
	"time"
)

// remarks writes lines for people. It never waits for its stream: a client
// that does not drain the server's error stream must not stop it. Lines that
// find the queue full are counted and dropped.
type remarks struct {
	lines   chan string
	stopped chan struct{}
	dropped atomic.Int64
	closed  atomic.Bool
}

const remarkQueue = 256

func newRemarks(out io.Writer) *remarks {
	r := &remarks{lines: make(chan string, remarkQueue), stopped: make(chan struct{})}
	go func() {
		defer close(r.stopped)
		for line := range r.lines {
			if line == "" {
				return
			}
			if n := r.dropped.Swap(0); n > 0 {
				line = fmt.Sprintf("halfwidth-server: %d lines were left out here\n%s", n, line)
			}
			if _, err := io.WriteString(out, line); err != nil {
				r.closed.Store(true)
			}
		}
	}()
	return r
}

// say writes one line.
func (r *remarks) say(format string, values ...any) {
	r.put("halfwidth-server: " + oneLine(fmt.Sprintf(format, values...)) + "\n")
}

// trace writes a line and, below it, indented lines for a developer.
func (r *remarks) trace(line string, detail []byte) {
	r.put("halfwidth-server: " + oneLine(line) + "\n    " + strings.ReplaceAll(strings.TrimSpace(string(detail)), "\n", "\n    ") + "\n")
}

func (r *remarks) put(line string) {
	if r.closed.Load() {
		return
	}
	select {
	case r.lines <- line:
	default:
		r.dropped.Add(1)
	}
}

// Printf lets the library write its remarks here too.
func (r *remarks) Printf(format string, values ...any) { r.say(format, values...) }

// close waits a little for the lines queued.
func (r *remarks) close() {
	deadline := time.After(100 * time.Millisecond)
	select {
	case r.lines <- "":
	case <-deadline:
		return
	}
	select {
	case <-r.stopped:
	case <-deadline:
	}
}
