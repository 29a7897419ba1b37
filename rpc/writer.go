package rpc

import (
	"errors"
	"io"
	"strconv"
	"sync"
	"time"
)

// frameWriter is the one place that writes to the output. Frames are appended
// to a buffer and never wait for the client, so that one who writes thousands
// of requests before it reads anything cannot be waited for by a server that
// waits for it. They leave
//   - by the caller's own hand, when there are few bytes and the output is known
//     to take them without waiting (saves a change of goroutine a reply);
//   - else by the writer's goroutine.
//
// Replies given while more requests are at hand gather, and leave together
// before the reader waits for input (flush).
type frameWriter struct {
	out   io.Writer
	ready func() bool // the output takes atOnce bytes without waiting; nil: not known

	mu      sync.Mutex
	changed *sync.Cond
	pending []byte
	due     bool   // what is pending is to leave
	spare   []byte // the buffer written last, used again
	writing bool
	closed  bool
	err     error
	failed  func(error) // told once of the first failed write
	written int64
	stopped chan struct{}
}

const (
	atOnce      = 4 << 10  // POSIX lets a pipe that polls writable take this much
	gatherBytes = 32 << 10 // more than this leaves without waiting for a flush
	writePiece  = 64 << 10 // written at once, so that progress can be seen
	keepBuffer  = 1 << 20  // larger buffers are given back
)

var errOutputClosed = errors.New("the output has been closed")

func newFrameWriter(out io.Writer, ready func() bool, failed func(error)) *frameWriter {
	w := &frameWriter{out: out, ready: ready, failed: failed, stopped: make(chan struct{})}
	w.changed = sync.NewCond(&w.mu)
	go w.run()
	return w
}

// gather queues a frame that leaves at the next flush.
func (w *frameWriter) gather(body []byte) error { return w.add(body, false) }

// send queues a frame that leaves now.
func (w *frameWriter) send(body []byte) error { return w.add(body, true) }

func (w *frameWriter) add(body []byte, now bool) error {
	w.mu.Lock()
	defer w.mu.Unlock()
	switch {
	case w.err != nil:
		return w.err
	case w.closed:
		return errOutputClosed
	}
	w.pending = append(w.pending, "Content-Length: "...)
	w.pending = strconv.AppendInt(w.pending, int64(len(body)), 10)
	w.pending = append(w.pending, "\r\n\r\n"...)
	w.pending = append(w.pending, body...)
	if now || len(w.pending) > gatherBytes {
		w.leave()
	}
	return nil
}

// flush lets what has gathered leave.
func (w *frameWriter) flush() {
	w.mu.Lock()
	w.leave()
	w.mu.Unlock()
}

// leave is called with the lock held, and may give it up for a while.
func (w *frameWriter) leave() {
	if len(w.pending) == 0 || w.writing || w.err != nil {
		return // whoever writes goes on until nothing is pending
	}
	if len(w.pending) <= atOnce && w.ready != nil && w.ready() {
		w.write()
	}
	if len(w.pending) > 0 {
		w.due = true
		w.changed.Broadcast()
	}
}

// write writes what is pending. It is called with the lock held and gives it
// up while it writes.
func (w *frameWriter) write() {
	piece := w.pending
	w.pending, w.spare = w.spare[:0], nil
	w.writing, w.due = true, false
	w.mu.Unlock()
	var err error
	for at := 0; at < len(piece) && err == nil; {
		var n int
		n, err = w.out.Write(piece[at:min(len(piece), at+writePiece)])
		if n <= 0 && err == nil {
			err = io.ErrShortWrite
		}
		at += n
		w.mu.Lock()
		w.written += int64(n)
		w.mu.Unlock()
	}
	w.mu.Lock()
	w.writing, w.due = false, len(w.pending) > 0
	if cap(piece) <= keepBuffer {
		w.spare = piece
	}
	if err != nil && w.err == nil {
		w.err = err
		w.pending = nil
		go w.failed(err)
	}
	w.changed.Broadcast()
}

func (w *frameWriter) run() {
	defer close(w.stopped)
	w.mu.Lock()
	defer w.mu.Unlock()
	for {
		for w.writing || len(w.pending) == 0 || !w.due && !w.closed {
			if w.err != nil || w.closed && !w.writing {
				return
			}
			w.changed.Wait()
		}
		w.write()
	}
}

// waitRoom waits until fewer than limit bytes are unsent, or none can be sent
// any more. It holds the reader back from a client that never reads.
func (w *frameWriter) waitRoom(limit int) {
	w.mu.Lock()
	defer w.mu.Unlock()
	for len(w.pending) > limit && w.err == nil && !w.closed {
		w.changed.Wait()
	}
}

// close takes no more frames and waits until all have left, or until none has
// made headway for as long as patience.
func (w *frameWriter) close(patience time.Duration) {
	w.mu.Lock()
	w.closed = true
	seen := w.written
	w.changed.Broadcast()
	w.mu.Unlock()
	timer := time.NewTicker(max(patience, time.Millisecond))
	defer timer.Stop()
	for {
		select {
		case <-w.stopped:
			return
		case <-timer.C:
			w.mu.Lock()
			stuck := w.written == seen
			seen = w.written
			w.mu.Unlock()
			if stuck {
				return
			}
		}
	}
}
