package rpc

import (
	"encoding/json"
	"sync"
	"time"
)

// Progress tells a client how far a call has come, under the workDoneToken of
// its params: a begin, at most ten reports a second with a percentage that
// never falls, and an end that precedes the reply. Without a token it is silent.
type Progress struct {
	session *Session
	token   json.RawMessage

	mu      sync.Mutex
	ended   bool
	last    time.Time
	percent int
}

// progressMember is the member of any params that names the token.
const progressMember = "workDoneToken"

const reportEvery = 100 * time.Millisecond

// Progress begins to report; called again it gives the same Progress. Of a call
// that has been answered, as a cancelled one is at once, nothing is told any more.
func (c *Call) Progress(title string) *Progress {
	c.mu.Lock()
	defer c.mu.Unlock()
	switch {
	case c.progress != nil:
	case c.answered || c.id == nil:
		c.progress = &Progress{ended: true}
	default:
		c.progress = &Progress{session: c.Session, token: progressToken(c.Params), last: time.Now()}
		c.progress.notify(map[string]any{"kind": "begin", "title": title, "cancellable": true, "percentage": 0})
	}
	return c.progress
}

// progressToken gives the token where it is a text or a whole number.
func progressToken(params []byte) json.RawMessage {
	token := memberOf(params, progressMember)
	if len(token) == 0 || token[0] != '"' && token[0] != '-' && !isDigit(token[0]) {
		return nil
	}
	return json.RawMessage(token)
}

// Report says that done of total parts are done. message may be empty.
func (p *Progress) Report(done, total int, message string) {
	p.mu.Lock()
	defer p.mu.Unlock()
	now := time.Now()
	if p.token == nil || p.ended || total <= 0 || now.Sub(p.last) < reportEvery {
		return
	}
	p.last = now
	p.percent = max(p.percent, min(100, int(100*float64(done)/float64(total))))
	value := map[string]any{"kind": "report", "percentage": p.percent}
	if message != "" {
		value["message"] = message
	}
	p.notify(value)
}

func (p *Progress) end() {
	p.mu.Lock()
	defer p.mu.Unlock()
	if !p.ended {
		p.ended = true
		p.notify(map[string]any{"kind": "end"})
	}
}

func (p *Progress) notify(value map[string]any) {
	if p.token != nil {
		p.session.Notify("$/progress", map[string]any{"token": p.token, "value": value})
	}
}
