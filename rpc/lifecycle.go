package rpc

import (
	"context"
	"encoding/json"
	"fmt"
	"slices"
	"time"
)

// ProtocolVersion counts the changes to our own methods that an older client
// would not bear.
const ProtocolVersion = 1

// ServerName is the name given at initialize.
const ServerName = "halfwidth-server"

func lifecycleMethods() []Method {
	return []Method{
		Lenient(Method{Name: "initialize", Standard: true, When: Starting,
			Doc: "Begins the session and says what both sides can do."}, initialize),
		{Name: "initialized", Standard: true, Notification: true, Handler: nothing,
			Doc: "Says that the client has taken in the reply to initialize."},
		{Name: "shutdown", Standard: true, Handler: shutdown,
			Doc: "Asks the server to take no more requests; exit follows."},
		{Name: "exit", Standard: true, Notification: true, When: Always, Handler: exit,
			Doc: "Ends the server: with 0 after shutdown, else with 1."},
		Lenient(Method{Name: "$/cancelRequest", Standard: true, Notification: true, When: Always,
			Doc: "Gives up a request that has not been answered yet."}, cancelRequest),
		Lenient(Method{Name: "$/setTrace", Standard: true, Notification: true,
			Doc: "Turns $/logTrace notifications on or off."}, setTrace),
	}
}

type initializeParams struct {
	ProcessID  *int `json:"processId"`
	ClientInfo struct {
		Name    string `json:"name"`
		Version string `json:"version"`
	} `json:"clientInfo"`
	Locale                string          `json:"locale"`
	InitializationOptions json.RawMessage `json:"initializationOptions"`
	Capabilities          json.RawMessage `json:"capabilities"`
	Trace                 string          `json:"trace"`
	RootURI               string          `json:"rootUri"`
	WorkspaceFolders      []struct {
		URI string `json:"uri"`
	} `json:"workspaceFolders"`
}

type initializeResult struct {
	Capabilities map[string]any    `json:"capabilities"`
	ServerInfo   map[string]string `json:"serverInfo"`
}

func initialize(_ context.Context, call *Call, params initializeParams) (any, error) {
	s := call.Session
	client := Client{
		Name: params.ClientInfo.Name, Version: params.ClientInfo.Version, Locale: params.Locale,
		Capabilities: params.Capabilities, Options: params.InitializationOptions,
	}
	for _, folder := range params.WorkspaceFolders {
		client.Folders = append(client.Folders, folder.URI)
	}
	if len(client.Folders) == 0 && params.RootURI != "" {
		client.Folders = []string{params.RootURI}
	}
	if params.ProcessID != nil && *params.ProcessID > 0 {
		client.ProcessID = *params.ProcessID
	}
	var offered []string
	_ = json.Unmarshal(client.Capability("general", "positionEncodings"), &offered) // none, where it is no list of texts
	encoding := "utf-16"
	if slices.Contains(offered, "utf-8") {
		encoding = "utf-8"
	}
	capabilities := map[string]any{
		"positionEncoding": encoding,
		"experimental":     map[string]any{"halfwidth": s.offer()},
	}
	for _, name := range s.names {
		if m := s.methods[name]; m.Announce != nil {
			m.Announce(&client, capabilities)
		}
	}
	s.mu.Lock()
	s.client, s.encoding = client, encoding
	if knownTrace(params.Trace) {
		s.trace = params.Trace
	}
	s.mu.Unlock()
	s.enter(open)
	if client.ProcessID != 0 {
		go s.watch(client.ProcessID)
	}
	return initializeResult{capabilities, map[string]string{"name": ServerName, "version": s.options.Version}}, nil
}

// offer is what a client of ours needs to know beyond LSP.
func (s *Session) offer() map[string]any {
	var own []string
	for _, name := range s.names {
		if !s.methods[name].Standard {
			own = append(own, name)
		}
	}
	slices.Sort(own)
	return map[string]any{
		"protocolVersion": ProtocolVersion,
		"methods":         append([]string{}, own...),
		"limits": map[string]int{
			"messageBytes": s.limits.MessageBytes, "headerBytes": s.limits.HeaderBytes, "depth": s.limits.Depth, "sampleValues": s.limits.SampleValues,
			"openSheets": s.limits.OpenSheets, "openCells": s.limits.OpenCells,
			"queue": s.limits.Queue, "queueBytes": s.limits.QueueBytes, "workers": s.limits.Workers,
		},
	}
}

func nothing(context.Context, *Call) (any, error) { return nil, nil }

func shutdown(_ context.Context, call *Call) (any, error) {
	call.Session.enter(shutDown)
	return nil, nil
}

// enter begins a phase, unless the session has been ended meanwhile.
func (s *Session) enter(next phase) {
	s.mu.Lock()
	defer s.mu.Unlock()
	if s.phase != over {
		s.phase = next
	}
}

func exit(_ context.Context, call *Call) (any, error) {
	call.Session.end("")
	return nil, nil
}

func cancelRequest(_ context.Context, call *Call, params struct {
	ID json.RawMessage `json:"id"`
}) (any, error) {
	key := idKey(params.ID)
	if key == "" {
		return nil, fmt.Errorf("it names no id")
	}
	call.Session.cancelCall(key)
	return nil, nil
}

func knownTrace(value string) bool {
	return value == "off" || value == "messages" || value == "verbose"
}

func setTrace(_ context.Context, call *Call, params struct {
	Value string `json:"value"`
}) (any, error) {
	if !knownTrace(params.Value) {
		return nil, fmt.Errorf(`value is %.40q; write "off", "messages" or "verbose"`, params.Value)
	}
	call.Session.mu.Lock()
	call.Session.trace = params.Value
	call.Session.mu.Unlock()
	return nil, nil
}

// watch ends the session when the client's process has gone, whose end of the
// pipes another process may still hold.
func (s *Session) watch(process int) {
	tick := time.NewTicker(s.options.lookEvery)
	defer tick.Stop()
	for {
		select {
		case <-s.ended:
			return
		case <-tick.C:
			if !alive(process) {
				s.end(fmt.Sprintf("the client's process %d has ended", process))
				return
			}
		}
	}
}
