package rpc

import (
	"context"
	"slices"
	"strings"

	"halfwidth/funcs"
	"halfwidth/workbook/calculation"
)

func announceSignature(_ *Client, capabilities map[string]any) {
	capabilities["signatureHelpProvider"] = map[string]any{"triggerCharacters": []string{",", ";", "\t"}}
}

type signatureHelp struct {
	Signatures      []signatureInformation `json:"signatures"`
	ActiveSignature int                    `json:"activeSignature"`
	ActiveParameter int                    `json:"activeParameter"`
}

type signatureInformation struct {
	Label         string                 `json:"label"`
	Documentation string                 `json:"documentation,omitempty"`
	Parameters    []parameterInformation `json:"parameters"`
}

type parameterInformation struct {
	Label         any    `json:"label"` // text, or its start and end in the signature's
	Documentation string `json:"documentation,omitempty"`
}

// signature shows the inputs of a row's function, in an input's column.
func signature(_ context.Context, q *textQuestion, p positionParams) (any, error) {
	at, ok := q.place(p.Position)
	if !ok || at.column == nil || at.column.Role != calculation.InputColumn {
		return nil, nil
	}
	f := at.function()
	if f == nil {
		return nil, nil
	}
	active := slices.IndexFunc(f.Inputs, func(in funcs.Input) bool { return in.Name == at.column.Name })
	if active < 0 {
		return nil, nil
	}
	offsets := q.client.Can("textDocument", "signatureHelp", "signatureInformation", "parameterInformation", "labelOffsetSupport")
	s := signatureInformation{Documentation: f.Summary}
	var label strings.Builder
	label.WriteString(f.Name + "(")
	for i, in := range f.Inputs {
		if i > 0 {
			label.WriteString(", ")
		}
		parameter := parameterInformation{Label: in.Name, Documentation: inputText(in)}
		if offsets { // names are ASCII, so that bytes are UTF-16 units
			parameter.Label = [2]int{label.Len(), label.Len() + len(in.Name)}
		}
		label.WriteString(in.Name)
		s.Parameters = append(s.Parameters, parameter)
	}
	label.WriteString(")")
	s.Label = label.String()
	return signatureHelp{[]signatureInformation{s}, 0, active}, nil
}

// inputText words what an input is and takes.
func inputText(in funcs.Input) string {
	text := in.Summary + " (" + in.Kind.String()
	if in.Kind != funcs.Sample && in.Kind != funcs.Samples && in.Kind != funcs.Text {
		text += ": " + in.Expects()
	}
	if in.Default != nil {
		text += "; left out: " + funcs.FormatArgument(in.Default)
	}
	return text + ")"
}
