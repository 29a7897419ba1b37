package rpc

import (
	"context"
	"encoding/json"
	"fmt"
	"slices"
	"strings"

	"halfwidth/workbook/calculation"
)

// The commands that the client may have executed. They are for clients that take
// no edits in a code action, and for code lenses.
const (
	fillCommand = "halfwidth.fillResults"
	editCommand = "halfwidth.edit"
)

// commandArgs is the one argument of a command: a document and, for a fill, one
// of its rows (0: all); for an edit, the edits. Version is the one that edits
// were made for.
type commandArgs struct {
	URI     string     `json:"uri"`
	Version *int       `json:"version,omitempty"`
	Row     int        `json:"row,omitempty"`
	Title   string     `json:"title,omitempty"`
	Edits   []textEdit `json:"edits,omitempty"`
}

// The kinds of code actions.
const (
	kindFix  = "quickfix"
	kindFill = "source.fillResults"
)

func announceActions(client *Client, capabilities map[string]any) {
	if client.takesActions() {
		capabilities["codeActionProvider"] = map[string]any{"codeActionKinds": []string{kindFix, kindFill}}
		return
	}
	capabilities["codeActionProvider"] = true
}

func announceCommands(_ *Client, capabilities map[string]any) {
	capabilities["executeCommandProvider"] = map[string]any{"commands": []string{fillCommand, editCommand}}
}

// takesActions reports whether a code action may be more than a command.
func (c *Client) takesActions() bool {
	return c.Capability("textDocument", "codeAction", "codeActionLiteralSupport") != nil
}

type codeAction struct {
	Title       string        `json:"title"`
	Kind        string        `json:"kind"`
	Diagnostics []diagnostic  `json:"diagnostics,omitempty"`
	Preferred   bool          `json:"isPreferred,omitempty"`
	Edit        workspaceEdit `json:"edit"`
}

type actionParams struct {
	TextDocument documentID `json:"textDocument"`
	Range        textRange  `json:"range"`
	Context      struct {
		Only []string `json:"only"`
	} `json:"context,omitempty"`
}

// actions offers what mends the findings in the lines asked about, and to fill
// all results.
func actions(ctx context.Context, q *textQuestion, p actionParams) (any, error) {
	list := []any{}
	w, err := q.workOut(ctx, q.session.sheetWorkers())
	if err != nil || w.sheet == nil {
		return list, err
	}
	add := func(title, kind string, edits []textEdit, preferred bool, mends ...diagnostic) {
		if len(edits) > 0 && isWanted(kind, p.Context.Only) {
			list = append(list, q.action(title, kind, edits, preferred, mends))
		}
	}
	if isWanted(kindFix, p.Context.Only) {
		for _, f := range w.findings(q.show) {
			if f.Range.End.Line < p.Range.Start.Line || p.Range.End.Line < f.Range.Start.Line {
				continue
			}
			for i, fix := range slices.Concat(f.fixes, w.fileFixes(&f)) {
				add(fix.title, kindFix, fix.edits, i == 0 && len(f.fixes) == 1, f.diagnostic)
			}
		}
	}
	add("Fill all results", kindFill, w.fill(w.results.Rows), false)
	return list, nil
}

// isWanted reports whether a client that asks for kinds of actions wants one of
// this kind; a kind stands for those below it too.
func isWanted(kind string, only []string) bool {
	return len(only) == 0 || slices.ContainsFunc(only, func(want string) bool { return want == "" || kind == want || strings.HasPrefix(kind, want+".") })
}

// action words an action as the client takes it.
func (q *textQuestion) action(title, kind string, edits []textEdit, preferred bool, mends []diagnostic) any {
	version := q.version
	if !q.client.takesActions() {
		return command{title, editCommand, []commandArgs{{URI: q.uri, Version: &version, Title: title, Edits: edits}}}
	}
	a := codeAction{Title: title, Kind: kind, Edit: q.client.edit(q.textState, edits)}
	a.Preferred = preferred && q.client.Can("textDocument", "codeAction", "isPreferredSupport")
	for _, d := range mends {
		d.Related, d.Data = nil, nil
		a.Diagnostics = append(a.Diagnostics, d)
	}
	return a
}

// edit puts edits of a document into the form that the client takes: with the
// version, where it can hold them against it.
func (c *Client) edit(t *textState, edits []textEdit) workspaceEdit {
	if c.Can("workspace", "workspaceEdit", "documentChanges") {
		version := t.version
		return workspaceEdit{DocumentChanges: []documentEdit{{documentID{t.uri, &version}, edits}}}
	}
	return workspaceEdit{Changes: map[string][]textEdit{t.uri: edits}}
}

// fileFixes offers the closest file where one is not there.
func (w *workedText) fileFixes(f *textFinding) []textFix {
	if f.Code != "unreadable-file" || f.within == (calculation.Span{}) { // the name may stand in another cell
		return nil
	}
	name := strings.Trim(w.sheet.CellText(f.cell)[f.within.Start:f.within.End], `"`)
	folder := openBeside(w.path, w.folders)
	defer folder.Close()
	if best := near(name, folder.Files()); best != "" && best != name {
		text := nameInText(best)
		return []textFix{{"Use " + quotedName(text), []textEdit{w.replace(f.cell, f.within, text)}}}
	}
	return nil
}

// execute runs one of the commands. Its edits are sent to the client, whose
// answer nothing waits for.
func (d *textDesk) execute(_ context.Context, call *Call, p struct {
	Command   string            `json:"command"`
	Arguments []json.RawMessage `json:"arguments"`
}) (any, error) {
	if p.Command != fillCommand && p.Command != editCommand {
		return nil, badParams("/command", "command", "is "+quoted(p.Command)+", which is no command", fmt.Sprintf("the commands are %s and %s", fillCommand, editCommand))
	}
	var args commandArgs
	if len(p.Arguments) != 1 || json.Unmarshal(p.Arguments[0], &args) != nil {
		return nil, badParams("/arguments", "arguments", "is not one object", "give the one that came with the command")
	}
	live := d.open[args.URI]
	s := call.Session
	client := s.Client()
	switch {
	case live == nil:
		return nil, badParams("/arguments/0/uri", "uri", "is "+quoted(args.URI)+", and no text calculation sheet of that name is open", "open it first")
	case args.Version != nil && *args.Version != live.held.version:
		return nil, &Error{Code: CodeContentModified, Message: fmt.Sprintf("The text is at version %d, the command was made for %d; ask for the action again.", live.held.version, *args.Version)}
	case !client.Can("workspace", "applyEdit"):
		return nil, &Error{Code: CodeRequestFailed, Message: "The client did not announce workspace.applyEdit, so nothing can be changed in its text."}
	}
	state := live.held
	if p.Command == editCommand {
		if len(args.Edits) == 0 {
			return nil, badParams("/arguments/0/edits", "edits", "is missing or empty", "give the object that came with the command")
		}
		s.applyEdit(args.Title, client.edit(state, args.Edits))
		return nil, nil
	}
	return Later(func(ctx context.Context) (any, error) {
		w, err := state.workOut(ctx, s.sheetWorkers())
		if err != nil {
			return nil, err
		}
		if w.sheet == nil {
			return nil, &Error{Code: CodeRequestFailed, Message: w.damaged().Message}
		}
		rows := w.results.Rows
		title := "Fill all results"
		if args.Row > 0 {
			rows = nil
			title = fmt.Sprintf("Fill the results of row %d", args.Row)
			for _, r := range w.results.Rows {
				if r.Row.Number == args.Row {
					rows = append(rows, r)
				}
			}
		}
		if edits := w.fill(rows); len(edits) > 0 {
			s.applyEdit(title, client.edit(state, edits))
		}
		return nil, nil
	})
}

// applyEdit sends edits to the client. That it did not make them is told to its
// log.
func (s *Session) applyEdit(title string, edit workspaceEdit) {
	go func() {
		var answer struct {
			Applied bool   `json:"applied"`
			Reason  string `json:"failureReason"`
		}
		err := s.Ask(s.ctx, "workspace/applyEdit", map[string]any{"label": title, "edit": edit}, &answer)
		switch {
		case s.ctx.Err() != nil:
		case err != nil:
			s.LogMessage(LogWarning, fmt.Sprintf("%s: the client refused the edit: %v", title, err))
		case !answer.Applied && answer.Reason != "":
			s.LogMessage(LogWarning, fmt.Sprintf("%s: the client did not make the edit: %s", title, answer.Reason))
		case !answer.Applied:
			s.LogMessage(LogWarning, fmt.Sprintf("%s: the client did not make the edit", title))
		}
	}()
}
