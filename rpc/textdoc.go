package rpc

import (
	"context"
	"encoding/json"
	"fmt"
	"reflect"
)

// textDesk is the text calculation sheets that an editor has open: what the rows
// of textMethods share in one session. Its fields belong to the goroutine that
// reads messages, but for what liveText guards.
type textDesk struct {
	open     map[string]*liveText // by URI
	folders  []string             // URIs of the folders open in the client
	files    *fileShelf
	show     resultsAs
	markdown bool // hovers may be Markdown
	begun    bool // a sheet was opened
}

// textMethods are LSP's methods for documents, for text calculation sheets.
// Other documents are accepted without a word and have no answers.
func textMethods() []Method {
	d := &textDesk{open: map[string]*liveText{}, files: newFileShelf()}
	return []Method{
		Lenient(Method{Name: "textDocument/didOpen", Standard: true, Notification: true, Announce: d.announce,
			Doc: "Hands over a text calculation sheet."}, d.didOpen),
		Lenient(Method{Name: "textDocument/didChange", Standard: true, Notification: true,
			Doc: "Changes its text, whole or in places."}, d.didChange),
		Lenient(Method{Name: "textDocument/didSave", Standard: true, Notification: true,
			Doc: "Says that it was saved; data files are looked at again."}, d.didSave),
		Lenient(Method{Name: "textDocument/didClose", Standard: true, Notification: true,
			Doc: "Takes it back; its diagnostics are cleared."}, d.didClose),
		Lenient(Method{Name: "workspace/didChangeWatchedFiles", Standard: true, Notification: true,
			Doc: "Says that data files have changed."}, d.filesChanged),
		Lenient(Method{Name: "workspace/didChangeWorkspaceFolders", Standard: true, Notification: true, Announce: announceFolders,
			Doc: "Opens and closes folders in which data files may lie."}, d.foldersChanged),
		{Name: "workspace/didChangeConfiguration", Standard: true, Notification: true, Handler: nothing,
			Doc: "Is taken and passed over: the options are given at initialize."},
		asked(d, "textDocument/completion", "Offers what may be written at a place.", announceCompletion, complete),
		asked(d, "textDocument/hover", "Explains a function, an input or a calculation.", announceAs("hoverProvider", true), hover),
		asked(d, "textDocument/signatureHelp", "Shows the inputs of the row's function.", announceSignature, signature),
		asked(d, "textDocument/codeAction", "Offers to fill results and to mend names.", announceActions, actions),
		asked(d, "textDocument/documentSymbol", "Lists the calculations.", announceAs("documentSymbolProvider", true), symbols),
		asked(d, "textDocument/inlayHint", "Shows results beside the cells that do not hold them.", d.announceHints, inlayHints),
		asked(d, "textDocument/codeLens", "Shows results above their rows.", d.announceLenses, codeLenses),
		Lenient(Method{Name: "workspace/executeCommand", Standard: true, Announce: announceCommands,
			Doc: "Fills results, or mends a name, for clients that take no edits in a code action."}, d.execute),
	}
}

// textQuestion is a question about a document, as it was when the question came.
type textQuestion struct {
	*textState
	session  *Session
	client   Client
	show     resultsAs
	markdown bool
}

// asked makes the row of a method that asks about an open document. The answer
// is worked out by a worker, from the text as it is now.
func asked[P documentNamer](d *textDesk, name, doc string, announce func(*Client, map[string]any), answer func(context.Context, *textQuestion, P) (any, error)) Method {
	return Lenient(Method{Name: name, Standard: true, Doc: doc, Announce: announce}, func(_ context.Context, call *Call, p P) (any, error) {
		if err := lacking(call.Params, reflect.TypeFor[P]()); err != nil {
			return nil, err
		}
		live := d.open[p.documentURI()]
		if live == nil {
			return nil, nil
		}
		q := &textQuestion{textState: live.held, session: call.Session, client: call.Session.Client(), show: d.show, markdown: d.markdown}
		return Later(func(ctx context.Context) (any, error) { return answer(ctx, q, p) })
	})
}

// lacking finds the first member of a question that is left out or null, though
// LSP does not let it be: which document, place or range is asked about must not
// be guessed.
func lacking(params []byte, t reflect.Type) error {
	for i := range t.NumField() {
		name, required := fieldOf(t.Field(i))
		switch value := memberOf(params, name); {
		case !required || value != nil && value[0] != 'n':
		case value == nil:
			return badParams(pointerTo("", name), name, "is missing", "give "+wanted(t.Field(i).Type))
		default:
			return badParams(pointerTo("", name), name, "is null", "give "+wanted(t.Field(i).Type))
		}
	}
	return nil
}

// documentNamer is the params of a question about a document.
type documentNamer interface{ documentURI() string }

func (p documentParams) documentURI() string { return p.TextDocument.URI }
func (p positionParams) documentURI() string { return p.TextDocument.URI }
func (p rangeParams) documentURI() string    { return p.TextDocument.URI }
func (p actionParams) documentURI() string   { return p.TextDocument.URI }

func announceAs(capability string, value any) func(*Client, map[string]any) {
	return func(_ *Client, capabilities map[string]any) { capabilities[capability] = value }
}

// announce learns what the client can do, and says how documents are taken.
func (d *textDesk) announce(client *Client, capabilities map[string]any) {
	d.folders = client.Folders
	d.show = chooseResultsAs(client)
	var formats []string
	_ = json.Unmarshal(client.Capability("textDocument", "hover", "contentFormat"), &formats) // none, where it is no list of texts
	for _, f := range formats {
		d.markdown = d.markdown || f == "markdown"
	}
	capabilities["textDocumentSync"] = map[string]any{"openClose": true, "change": 2, "save": map[string]bool{"includeText": false}}
}

func announceFolders(client *Client, capabilities map[string]any) {
	if client.Can("workspace", "workspaceFolders") {
		capabilities["workspace"] = map[string]any{"workspaceFolders": map[string]bool{"supported": true, "changeNotifications": true}}
	}
}

func (d *textDesk) didOpen(_ context.Context, call *Call, p struct {
	TextDocument struct {
		URI     string `json:"uri"`
		Version int    `json:"version"`
		Text    string `json:"text"`
	} `json:"textDocument"`
}) (any, error) {
	uri := p.TextDocument.URI
	name, ours := sheetName(uri)
	s := call.Session
	switch {
	case !ours:
		return nil, nil
	case d.open[uri] == nil && len(d.open) >= s.limits.OpenSheets:
		return nil, fmt.Errorf("%d documents are open already, the limit; %.100s gets no answers", len(d.open), uri)
	case d.open[uri] != nil:
		s.remarks.say("%.100s was opened again without being closed; the new text counts", uri)
		d.open[uri].close(false)
	}
	live := newLiveText(s, d)
	d.open[uri] = live
	lines := newLines(p.TextDocument.Text, s.PositionEncoding() == "utf-8")
	live.changed(&textState{uri: uri, name: name, version: p.TextDocument.Version, lines: lines, path: pathOf(uri, onWindows),
		folders: d.folderPaths(), files: d.files})
	if !d.begun {
		d.begun = true
		watchFiles(s)
	}
	return nil, nil
}

func (d *textDesk) didChange(_ context.Context, call *Call, p struct {
	TextDocument documentID   `json:"textDocument"`
	Changes      []textChange `json:"contentChanges"`
}) (any, error) {
	live := d.open[p.TextDocument.URI]
	if live == nil {
		return nil, nil
	}
	next := live.held.next()
	if v := p.TextDocument.Version; v != nil {
		if *v <= next.version {
			call.Session.remarks.say("%.100s is changed from version %d to %d; versions should rise", p.TextDocument.URI, next.version, *v)
		}
		next.version = *v
	} else {
		next.version++
	}
	next.lines = next.lines.changed(p.Changes)
	live.changed(next)
	return nil, nil
}

func (d *textDesk) didSave(_ context.Context, _ *Call, p documentParams) (any, error) {
	if live := d.open[p.TextDocument.URI]; live != nil {
		live.changed(live.held)
	}
	return nil, nil
}

func (d *textDesk) didClose(_ context.Context, _ *Call, p documentParams) (any, error) {
	if live := d.open[p.TextDocument.URI]; live != nil {
		delete(d.open, p.TextDocument.URI)
		live.close(true)
	}
	return nil, nil
}

// filesChanged works the open sheets out again; which of them read a file that
// changed is seen then.
func (d *textDesk) filesChanged(context.Context, *Call, struct{}) (any, error) {
	for _, live := range d.open {
		live.changed(live.held)
	}
	return nil, nil
}

func (d *textDesk) foldersChanged(_ context.Context, _ *Call, p struct {
	Event struct {
		Added   []documentID `json:"added"`
		Removed []documentID `json:"removed"`
	} `json:"event"`
}) (any, error) {
	var folders []string
	gone := map[string]bool{}
	for _, f := range p.Event.Removed {
		gone[f.URI] = true
	}
	for _, uri := range d.folders {
		if !gone[uri] {
			folders = append(folders, uri)
		}
	}
	for _, f := range p.Event.Added {
		folders = append(folders, f.URI)
	}
	d.folders = folders
	for _, live := range d.open {
		next := live.held.next()
		next.folders = d.folderPaths()
		live.changed(next)
	}
	return nil, nil
}

// folderPaths gives the folders that are folders of this machine.
func (d *textDesk) folderPaths() []string {
	var paths []string
	for _, uri := range d.folders {
		if path := pathOf(uri, onWindows); path != "" {
			paths = append(paths, path)
		}
	}
	return paths
}

// watchFiles asks the client to tell of changes to data files, where it takes
// such requests. A client that cannot is not asked; the files are then looked at
// whenever a sheet is worked out.
func watchFiles(s *Session) {
	client := s.Client()
	if !client.Can("workspace", "didChangeWatchedFiles", "dynamicRegistration") {
		return
	}
	s.tell("client/registerCapability", map[string]any{"registrations": []any{map[string]any{
		"id": "data-files", "method": "workspace/didChangeWatchedFiles",
		"registerOptions": map[string]any{"watchers": []any{map[string]string{"globPattern": "**/*.{csv,tsv,xlsx,xlsm}"}}},
	}}})
}

// mostUnheard is how many requests of tell may be without a reply, so that a client
// that never replies takes no more memory with every change.
const mostUnheard = 100

// tell sends a request whose reply nothing waits for, not even the end of the
// session. A refusal is told to the error stream. To a client that has left
// mostUnheard of them without a reply nothing more is sent.
func (s *Session) tell(method string, params any) {
	if s.unheard.Add(1) > mostUnheard {
		s.unheard.Add(-1)
		return
	}
	go func() {
		defer s.unheard.Add(-1)
		if err := s.Ask(s.ctx, method, params, new(json.RawMessage)); err != nil && s.ctx.Err() == nil {
			s.remarks.say("the client refused %s: %v", method, err)
		}
	}()
}
