package rpc

import (
	"context"
	"fmt"
	"runtime/debug"
	"sync"
	"sync/atomic"
	"time"
)

// liveText works out an open document and publishes its diagnostics. It works
// on the newest version alone: a change stops what is under way for an older
// one, and nothing of an older one is sent any more.
type liveText struct {
	session *Session
	desk    *textDesk
	held    *textState // the newest; of the goroutine that reads messages
	last    atomic.Pointer[workedText]

	mu      sync.Mutex
	uri     string
	state   *textState // the newest to be worked out; nil: none
	running bool
	closed  bool
	stop    context.CancelFunc // of what is under way
}

func newLiveText(s *Session, d *textDesk) *liveText { return &liveText{session: s, desk: d} }

// changed makes a state the newest, and has it worked out.
func (l *liveText) changed(state *textState) {
	if state.busy == nil {
		state.busy, state.last = make(chan struct{}, 1), &l.last
	}
	l.held = state
	l.mu.Lock()
	defer l.mu.Unlock()
	l.state, l.uri = state, state.uri
	if l.stop != nil {
		l.stop()
	}
	if !l.running {
		l.running = true
		l.session.Go("textDocument/publishDiagnostics", l.run)
	}
}

// close ends the work, and clears what was published.
func (l *liveText) close(clear bool) {
	l.mu.Lock()
	defer l.mu.Unlock()
	l.state, l.closed = nil, true
	if l.stop != nil {
		l.stop()
	}
	if clear {
		l.session.notifyOpen(diagnosticsMethod, publishedDiagnostics{URI: l.uri, Diagnostics: []diagnostic{}})
	}
}

const diagnosticsMethod = "textDocument/publishDiagnostics"

// run works out states until the newest has been published.
func (l *liveText) run(ctx context.Context) {
	for {
		l.mu.Lock()
		state := l.state
		if state == nil || ctx.Err() != nil {
			l.running, l.stop = false, nil
			l.mu.Unlock()
			return
		}
		newest, stop := context.WithCancel(ctx)
		l.stop = stop
		l.mu.Unlock()

		list, err := l.diagnose(newest, state)
		l.mu.Lock()
		if l.state == state && newest.Err() == nil { // else a newer one has come
			l.state = nil
			if err == nil {
				version := state.version
				l.session.notifyOpen(diagnosticsMethod, publishedDiagnostics{URI: state.uri, Version: &version, Diagnostics: list})
				l.refresh()
			}
		}
		l.mu.Unlock()
		stop()
	}
}

// diagnose works a state out once it has settled.
func (l *liveText) diagnose(ctx context.Context, state *textState) (list []diagnostic, err error) {
	defer func() {
		if fault := recover(); fault != nil {
			l.session.remarks.trace(fmt.Sprintf("fault in working out %.100s: %v", state.uri, fault), debug.Stack())
			err = fmt.Errorf("%s", internalFault)
		}
	}()
	timer := time.NewTimer(l.session.options.settle)
	defer timer.Stop()
	select {
	case <-ctx.Done():
		return nil, ctx.Err()
	case <-timer.C:
	}
	worked, err := state.workOut(ctx, l.session.sheetWorkers())
	if err != nil {
		return nil, err
	}
	client := l.session.Client()
	return worked.diagnostics(&client, l.desk.show), nil
}

// sheetWorkers is how many workers work out one document, so that questions and
// another document find room.
func (s *Session) sheetWorkers() int { return max(1, s.limits.Workers/2) }

// refresh lets the client ask again for what stands beside the rows. A client
// that did not announce that it can is not asked to.
func (l *liveText) refresh() {
	client := l.session.Client()
	switch {
	case l.desk.show == asInlayHints && client.Can("workspace", "inlayHint", "refreshSupport"):
		l.session.tell("workspace/inlayHint/refresh", nil)
	case l.desk.show == asCodeLenses && client.Can("workspace", "codeLens", "refreshSupport"):
		l.session.tell("workspace/codeLens/refresh", nil)
	}
}
