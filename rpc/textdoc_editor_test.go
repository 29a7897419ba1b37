package rpc

import (
	"encoding/json"
	"fmt"
	"os"
	"path/filepath"
	"slices"
	"strings"
	"testing"
	"time"
)

// textEditor is an editor at the other end of a session: it holds buffers with
// their versions, answers what the server asks, and makes the edits it is sent.
type textEditor struct {
	*testClient
	folder   string // its one workspace folder
	buffers  map[string]*lines
	versions map[string]int
	shown    map[string]publishedDiagnostics // the last of each document
	sent     []publishedDiagnostics          // all of them, in order
	asked    []string                        // methods that the server called
	silent   bool                            // calls of the server are not answered
	ids      int
}

// everything is what an editor announces that can do all that the server offers.
const everything = `{"workspace":{"applyEdit":true,"workspaceFolders":true,"workspaceEdit":{"documentChanges":true},"inlayHint":{"refreshSupport":true},` +
	`"codeLens":{"refreshSupport":true},"didChangeWatchedFiles":{"dynamicRegistration":true}},` +
	`"textDocument":{"hover":{"contentFormat":["markdown","plaintext"]},"publishDiagnostics":{"relatedInformation":true,"dataSupport":true,"versionSupport":true},` +
	`"codeAction":{"codeActionLiteralSupport":{"codeActionKind":{"valueSet":["quickfix","source"]}},"isPreferredSupport":true},` +
	`"documentSymbol":{"hierarchicalDocumentSymbolSupport":true},"inlayHint":{},"codeLens":{},` +
	`"signatureHelp":{"signatureInformation":{"parameterInformation":{"labelOffsetSupport":true}}}}}`

// newTextEditor starts a session with a folder of data files.
func newTextEditor(t testing.TB, capabilities, options string, files map[string]string) *textEditor {
	t.Helper()
	e := &textEditor{testClient: begin(t, Options{settle: time.Millisecond, Limits: Limits{Drain: 2 * patience}}), folder: t.TempDir(), buffers: map[string]*lines{},
		versions: map[string]int{}, shown: map[string]publishedDiagnostics{}}
	for name, text := range files {
		e.write(name, text)
	}
	if options == "" {
		options = "null"
	}
	e.testClient.send(`{"jsonrpc":"2.0","id":"start","method":"initialize","params":{"processId":null,"capabilities":%s,"initializationOptions":%s,"workspaceFolders":[{"uri":%q,"name":"x"}]}}`,
		capabilities, options, uriOf(e.folder))
	e.wantPart(`"id":"start"`, `"textDocumentSync":{"change":2,"openClose":true,"save":{"includeText":false}}`)
	e.notify("initialized", map[string]any{})
	return e
}

func (e *textEditor) write(name, text string) {
	e.t.Helper()
	if err := os.WriteFile(filepath.Join(e.folder, filepath.FromSlash(name)), []byte(text), 0o644); err != nil {
		e.t.Fatal(err)
	}
}

func (e *textEditor) uri(name string) string {
	return uriOf(filepath.Join(e.folder, filepath.FromSlash(name)))
}

func (e *textEditor) notify(method string, params any) {
	e.t.Helper()
	body, err := json.Marshal(map[string]any{"jsonrpc": "2.0", "method": method, "params": params})
	if err != nil {
		e.t.Fatal(err)
	}
	e.raw(frame(string(body)))
}

// open opens a document.
func (e *textEditor) open(name, text string) {
	e.t.Helper()
	e.buffers[name], e.versions[name] = newLines(text, false), 1
	e.notify("textDocument/didOpen", map[string]any{"textDocument": map[string]any{"uri": e.uri(name), "languageId": "csv", "version": 1, "text": text}})
}

// replace makes one change: the first place that reads old reads new.
func (e *textEditor) replace(name, old, new string) {
	e.t.Helper()
	at := strings.Index(e.buffers[name].text, old)
	if at < 0 {
		e.t.Fatalf("%q stands nowhere in %q", old, e.buffers[name].text)
	}
	r := textRange{e.buffers[name].position(at), e.buffers[name].position(at + len(old))}
	e.change(name, textChange{&r, new})
}

func (e *textEditor) change(name string, changes ...textChange) {
	e.t.Helper()
	e.versions[name]++
	e.buffers[name] = e.buffers[name].changed(changes)
	list := []any{}
	for _, c := range changes {
		if c.Range == nil {
			list = append(list, map[string]any{"text": c.Text})
		} else {
			list = append(list, c)
		}
	}
	e.notify("textDocument/didChange", map[string]any{"textDocument": map[string]any{"uri": e.uri(name), "version": e.versions[name]}, "contentChanges": list})
}

// take handles one message: a reply is given back, a notification kept, a call
// answered.
func (e *textEditor) take() (id string, result json.RawMessage) {
	e.t.Helper()
	var m struct {
		ID     json.RawMessage
		Method string
		Params json.RawMessage
		Result json.RawMessage
		Error  json.RawMessage
	}
	text := e.next()
	if err := json.Unmarshal([]byte(text), &m); err != nil {
		e.t.Fatal(err)
	}
	switch {
	case m.Method == "textDocument/publishDiagnostics":
		var p publishedDiagnostics
		if err := json.Unmarshal(m.Params, &p); err != nil {
			e.t.Fatal(err)
		}
		e.shown[p.URI] = p
		e.sent = append(e.sent, p)
	case m.Method != "" && m.ID != nil:
		e.asked = append(e.asked, m.Method)
		if e.silent {
			return "", nil
		}
		reply := `null`
		if m.Method == "workspace/applyEdit" {
			var p struct{ Edit workspaceEdit }
			if err := json.Unmarshal(m.Params, &p); err != nil {
				e.t.Fatal(err)
			}
			e.apply(p.Edit)
			reply = `{"applied":true}`
		}
		e.testClient.send(`{"jsonrpc":"2.0","id":%s,"result":%s}`, m.ID, reply)
	case m.ID != nil:
		if m.Error != nil {
			return string(m.ID), m.Error
		}
		return string(m.ID), m.Result
	}
	return "", nil
}

// apply makes the edits of a workspace edit in the buffers, as one change from
// the end of the text to its start, and sends them.
func (e *textEditor) apply(edit workspaceEdit) {
	e.t.Helper()
	all := map[string][]textEdit{}
	for _, d := range edit.DocumentChanges {
		for name := range e.buffers {
			if e.uri(name) == d.TextDocument.URI && (d.TextDocument.Version == nil || *d.TextDocument.Version != e.versions[name]) {
				e.t.Errorf("an edit for version %v of %s, which is at %d", d.TextDocument.Version, name, e.versions[name])
			}
		}
		all[d.TextDocument.URI] = d.Edits
	}
	for uri, edits := range edit.Changes {
		all[uri] = edits
	}
	for name := range e.buffers {
		edits := all[e.uri(name)]
		if len(edits) == 0 {
			continue
		}
		slices.Reverse(edits) // of insertions at one place the first stands first
		slices.SortStableFunc(edits, func(a, b textEdit) int {
			return e.buffers[name].offset(b.Range.Start) - e.buffers[name].offset(a.Range.Start)
		})
		var changes []textChange
		for _, one := range edits {
			changes = append(changes, textChange{&one.Range, one.NewText})
		}
		e.change(name, changes...)
	}
}

// ask sends a request and gives its result, or its error.
func (e *textEditor) ask(method string, params any) json.RawMessage {
	e.t.Helper()
	e.ids++
	want := fmt.Sprint(e.ids)
	body, err := json.Marshal(map[string]any{"jsonrpc": "2.0", "id": e.ids, "method": method, "params": params})
	if err != nil {
		e.t.Fatal(err)
	}
	e.raw(frame(string(body)))
	for {
		if id, result := e.take(); id == want {
			return result
		}
	}
}

// askAt asks about the place of the mark |, in a text that the buffer holds
// without it.
func (e *textEditor) askAt(method, name, marked string, more ...map[string]any) json.RawMessage {
	e.t.Helper()
	before, after, _ := strings.Cut(marked, "|")
	at := strings.Index(e.buffers[name].text, before+after)
	if at < 0 {
		e.t.Fatalf("%q stands nowhere in %q", before+after, e.buffers[name].text)
	}
	p := e.buffers[name].position(at + len(before))
	params := map[string]any{"textDocument": map[string]any{"uri": e.uri(name)}, "position": p, "range": textRange{p, p}}
	for _, m := range more {
		for k, v := range m {
			params[k] = v
		}
	}
	return e.ask(method, params)
}

// found waits for the diagnostics of the newest version.
func (e *textEditor) found(name string) []diagnostic {
	e.t.Helper()
	for {
		p, ok := e.shown[e.uri(name)]
		if ok && p.Version != nil && *p.Version == e.versions[name] {
			return p.Diagnostics
		}
		e.take()
	}
}

// codes gives the codes and places of diagnostics, for comparison.
func (e *textEditor) codes(name string) string {
	e.t.Helper()
	var list []string
	for _, d := range e.found(name) {
		l := e.buffers[name]
		list = append(list, fmt.Sprintf("%d %s %q", d.Severity, d.Code, l.text[l.offset(d.Range.Start):l.offset(d.Range.End)]))
	}
	return strings.Join(list, "\n")
}

// leave shuts the session down and ends it. What was under way may still have
// been sent before the end.
func (e *textEditor) leave() {
	e.t.Helper()
	if got := e.ask("shutdown", nil); string(got) != "null" {
		e.t.Errorf("shutdown: %s", got)
	}
	e.notify("exit", nil)
	if code := <-e.code; code != 0 {
		e.t.Errorf("exit code %d; the server remarked:\n%s", code, e.remarks)
	}
	for range e.messages {
	}
	if e.broken != nil {
		e.t.Errorf("the output held something else than frames: %v", e.broken)
	}
}

// into decodes a result.
func into[T any](t testing.TB, result json.RawMessage) T {
	t.Helper()
	var v T
	if err := json.Unmarshal(result, &v); err != nil {
		t.Fatalf("%s: %v", result, err)
	}
	return v
}
