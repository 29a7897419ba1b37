package rpc

// The shapes of LSP 3.17 that the methods for documents read and give. Members
// that nothing here uses are left out.

type documentID struct {
	URI     string `json:"uri"`
	Version *int   `json:"version,omitempty"`
}

type documentParams struct {
	TextDocument documentID `json:"textDocument"`
}

type positionParams struct {
	TextDocument documentID `json:"textDocument"`
	Position     position   `json:"position"`
}

type rangeParams struct {
	TextDocument documentID `json:"textDocument"`
	Range        textRange  `json:"range"`
}

type location struct {
	URI   string    `json:"uri"`
	Range textRange `json:"range"`
}

type textEdit struct {
	Range   textRange `json:"range"`
	NewText string    `json:"newText"`
}

// markup is MarkupContent.
type markup struct {
	Kind  string `json:"kind"`
	Value string `json:"value"`
}

// Severities of diagnostics (DiagnosticSeverity of LSP).
const (
	severityError = 1 + iota
	severityWarning
	severityInformation
	severityHint
)

type diagnostic struct {
	Range    textRange       `json:"range"`
	Severity int             `json:"severity"`
	Code     string          `json:"code,omitempty"`
	Source   string          `json:"source"`
	Message  string          `json:"message"`
	Related  []relatedPlace  `json:"relatedInformation,omitempty"`
	Data     *diagnosticData `json:"data,omitempty"`
}

type relatedPlace struct {
	Location location `json:"location"`
	Message  string   `json:"message"`
}

// diagnosticData names the cells that a finding is about, for clients that keep
// data.
type diagnosticData struct {
	Cells []string `json:"cells"`
}

type publishedDiagnostics struct {
	URI         string       `json:"uri"`
	Version     *int         `json:"version,omitempty"`
	Diagnostics []diagnostic `json:"diagnostics"`
}

type workspaceEdit struct {
	Changes         map[string][]textEdit `json:"changes,omitempty"`
	DocumentChanges []documentEdit        `json:"documentChanges,omitempty"`
}

type documentEdit struct {
	TextDocument documentID `json:"textDocument"`
	Edits        []textEdit `json:"edits"`
}

type command struct {
	Title     string        `json:"title"`
	Command   string        `json:"command"`
	Arguments []commandArgs `json:"arguments"`
}
