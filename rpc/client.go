package rpc

import (
	"context"
	"encoding/json"
	"errors"

	"github.com/sourcegraph/jsonrpc2"
)

// Client is what a client said of itself at initialize.
type Client struct {
	Name         string
	Version      string
	Locale       string
	ProcessID    int             // 0: not named
	Capabilities json.RawMessage // ClientCapabilities of LSP
	Options      json.RawMessage // initializationOptions
	Folders      []string        // URIs of the folders open at initialize
}

// Capability gives one of the client's capabilities by its path, or nil.
func (c *Client) Capability(path ...string) json.RawMessage {
	value := c.Capabilities
	for _, name := range path {
		value = memberOf(value, name)
	}
	return value
}

// Can reports whether a capability was announced as true.
func (c *Client) Can(path ...string) bool { return string(c.Capability(path...)) == "true" }

// Client tells what the client said of itself at initialize.
func (s *Session) Client() Client {
	s.mu.Lock()
	defer s.mu.Unlock()
	return s.client
}

// PositionEncoding is how the client counts columns: "utf-16", or "utf-8"
// where it offered that.
func (s *Session) PositionEncoding() string {
	s.mu.Lock()
	defer s.mu.Unlock()
	return s.encoding
}

// Notify sends a notification. It does not wait for the client.
func (s *Session) Notify(method string, params any) {
	if err := s.conn.Notify(s.ctx, method, params); err != nil && !errors.Is(err, jsonrpc2.ErrClosed) && s.ctx.Err() == nil {
		s.remarks.say("the notification %s was not sent: %v", method, err)
	}
}

// notifyOpen is Notify of a session that has not been shut down: nothing is
// published after that.
func (s *Session) notifyOpen(method string, params any) {
	if s.now() == open {
		s.Notify(method, params)
	}
}

// Ask calls a method of the client's and waits for the reply or for ctx. Only
// workers and Go may ask: the reply is read by the goroutine that runs
// handlers in turn.
func (s *Session) Ask(ctx context.Context, method string, params, result any) error {
	err := s.conn.Call(ctx, method, params, result)
	var refusal *jsonrpc2.Error
	var kind *json.UnmarshalTypeError
	switch {
	case errors.As(err, &refusal):
		return errors.New(oneLine(refusal.Message))
	case errors.As(err, &kind):
		return errors.New("its answer is " + kindWord(kind.Value))
	}
	return err
}

// Levels of LogMessage (MessageType of LSP).
const (
	LogError = 1 + iota
	LogWarning
	LogInfo
	LogLog
)

// LogMessage sends a line to the client's log, between initialize and shutdown.
func (s *Session) LogMessage(level int, text string) {
	s.notifyOpen("window/logMessage", map[string]any{"type": level, "message": text})
}

// logTrace tells of the server's doings, where the client wants to know: the
// message at the trace levels messages and verbose, the rest at verbose alone.
func (s *Session) logTrace(message string, rest func() string) {
	s.mu.Lock()
	level := s.trace
	if s.phase != open {
		level = "off"
	}
	s.mu.Unlock()
	switch level {
	case "messages":
		s.Notify("$/logTrace", map[string]string{"message": message})
	case "verbose":
		s.Notify("$/logTrace", map[string]string{"message": message, "verbose": rest()})
	}
}
