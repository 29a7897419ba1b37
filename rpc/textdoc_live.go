package rpc

import (
	"context"
	"fmt"
	"runtime/debug"
	"sync/atomic"
)

// liveText works out an open document and publishes its diagnostics.
type liveText struct {
	session *Session
	desk    *textDesk
	held    *textState // the newest; of the goroutine that reads messages
	newest  newest[*textState]
	last    atomic.Pointer[workedText]
}

func newLiveText(s *Session, d *textDesk) *liveText {
	l := &liveText{session: s, desk: d}
	l.newest.settle, l.newest.work = s.options.settle, l.work
	l.newest.begin = func(run func(context.Context)) { s.Go(diagnosticsMethod, run) }
	return l
}

// changed makes a state the newest, and has it worked out.
func (l *liveText) changed(state *textState) {
	if state.busy == nil {
		state.busy, state.last = make(chan struct{}, 1), &l.last
	}
	l.held = state
	l.newest.changed(state)
}

// close ends the work, and clears what was published.
func (l *liveText) close(clear bool) {
	l.newest.drop()
	if clear {
		l.session.notifyOpen(diagnosticsMethod, publishedDiagnostics{URI: l.held.uri, Diagnostics: []diagnostic{}})
	}
}

const diagnosticsMethod = "textDocument/publishDiagnostics"

// work works a state out and gives what publishes its diagnostics.
func (l *liveText) work(ctx context.Context, state *textState) (send func()) {
	list, err := l.diagnose(ctx, state)
	return func() {
		if err == nil {
			l.session.notifyOpen(diagnosticsMethod, publishedDiagnostics{URI: state.uri, Version: &state.version, Diagnostics: list})
			l.refresh()
		}
	}
}

// diagnose works a state out.
func (l *liveText) diagnose(ctx context.Context, state *textState) (list []diagnostic, err error) {
	defer func() {
		if fault := recover(); fault != nil {
			l.session.remarks.trace(fmt.Sprintf("fault in working out %.100s: %v", state.uri, fault), debug.Stack())
			err = fmt.Errorf("%s", internalFault)
		}
	}()
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
