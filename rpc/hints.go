package rpc

import (
	"context"
	"encoding/json"
	"math"
	"slices"
	"strconv"
	"strings"
	"unicode/utf8"

	"halfwidth/funcs"
	"halfwidth/workbook/calculation"
)

// resultsAs is how results are shown beside a document's text.
type resultsAs uint8

const (
	asDiagnostics resultsAs = iota // of hint severity, which every client shows
	asInlayHints
	asCodeLenses
	asNothing
)

var resultsAsNames = map[string]resultsAs{"inlayHints": asInlayHints, "codeLenses": asCodeLenses, "diagnostics": asDiagnostics, "none": asNothing}

// chooseResultsAs takes what initializationOptions.results says, else the best
// that the client can show.
func chooseResultsAs(client *Client) resultsAs {
	var options struct {
		Results string `json:"results"`
	}
	if len(client.Options) > 0 {
		_ = json.Unmarshal(client.Options, &options) // options of another form choose nothing
	}
	if chosen, ok := resultsAsNames[options.Results]; ok {
		return chosen
	}
	switch {
	case client.Capability("textDocument", "inlayHint") != nil:
		return asInlayHints
	case client.Capability("textDocument", "codeLens") != nil:
		return asCodeLenses
	}
	return asDiagnostics
}

func (d *textDesk) announceHints(_ *Client, capabilities map[string]any) {
	if d.show == asInlayHints {
		capabilities["inlayHintProvider"] = true
	}
}

func (d *textDesk) announceLenses(_ *Client, capabilities map[string]any) {
	if d.show == asCodeLenses {
		capabilities["codeLensProvider"] = map[string]bool{"resolveProvider": false}
	}
}

type inlayHint struct {
	Position    position `json:"position"`
	Label       string   `json:"label"`
	Tooltip     string   `json:"tooltip,omitempty"`
	PaddingLeft bool     `json:"paddingLeft"`
}

// inlayHints gives the results in the lines asked for that their cells do not
// hold, each in its cell's place.
func inlayHints(ctx context.Context, q *textQuestion, p rangeParams) (any, error) {
	hints := []inlayHint{}
	if q.show != asInlayHints {
		return hints, nil
	}
	w, err := q.workOut(ctx, q.session.sheetWorkers())
	if err != nil || w.sheet == nil {
		return hints, err
	}
	for _, r := range w.results.Rows {
		for _, e := range r.Edits {
			text := strings.TrimSpace(w.sheet.ValueText(shown6(e.Value)))
			if text == "" || w.sheet.Holds(e) {
				continue
			}
			at := w.span(e.Cell, calculation.Span{}).End
			if at.Line < p.Range.Start.Line || at.Line > p.Range.End.Line {
				continue
			}
			name := w.resultName(r, e.Cell)
			if r.Status == funcs.StatusRefused && name != "status" && name != "note" {
				continue // the reason is shown by the diagnostics
			}
			hints = append(hints, inlayHint{at, name + " " + shortText(text, 60), w.resultHint(r, name, e.Value), true})
		}
	}
	return hints, nil
}

// resultHint is a result with all its digits and what it is.
func (w *workedText) resultHint(r *calculation.RowResult, name string, value any) string {
	text := name + ": " + strings.TrimSpace(w.sheet.ValueText(value))
	if r.Row.Function != nil {
		if result, ok := r.Row.Function.Result(name); ok {
			text += " (" + result.Summary + ")"
		}
	}
	return text
}

type codeLens struct {
	Range   textRange `json:"range"`
	Command command   `json:"command"`
}

// codeLenses gives each calculation's results above its row. Run, a lens fills
// them into the row.
func codeLenses(ctx context.Context, q *textQuestion, p documentParams) (any, error) {
	lenses := []codeLens{}
	if q.show != asCodeLenses {
		return lenses, nil
	}
	w, err := q.workOut(ctx, q.session.sheetWorkers())
	if err != nil || w.sheet == nil {
		return lenses, err
	}
	for _, r := range w.results.Rows {
		at := calculation.CellRef{Row: r.Row.Number, Col: workColumn(r.Row.Block)}
		lenses = append(lenses, codeLens{w.span(at, calculation.Span{}), command{w.summary(r), fillCommand, []commandArgs{{URI: p.TextDocument.URI, Row: r.Row.Number}}}})
	}
	return lenses, nil
}

// sideResults are left out of the summary of a row that has others.
var sideResults = []string{"status", "note", "method", "citation", "sentence", "range", "version", "fingerprint", "level", "direction"}

// summary gives the results of a row in one line, to 6 digits.
func (w *workedText) summary(r *calculation.RowResult) string {
	if r.Status == funcs.StatusRefused {
		return "refused: " + shortText(r.Note(), 120)
	}
	var main, side []string
	for _, e := range r.Edits {
		name := w.resultName(r, e.Cell)
		text := strings.TrimSpace(w.sheet.ValueText(shown6(e.Value)))
		switch {
		case text == "":
		case slices.Contains(sideResults, name):
			side = append(side, name+" "+shortText(text, 80))
		default:
			main = append(main, name+" "+shortText(text, 40))
		}
	}
	if len(main) == 0 {
		main = side
	}
	text := strings.Join(main, ", ")
	if text == "" {
		text = string(r.Status)
	} else if r.Status == funcs.StatusCaution {
		text += " (caution)"
	}
	return text
}

// shown6 rounds a number to 6 significant digits, to be read.
func shown6(value any) any {
	x, ok := value.(float64)
	if !ok || x == 0 || math.Abs(x) >= 1e15 {
		return value
	}
	rounded, err := strconv.ParseFloat(strconv.FormatFloat(x, 'e', 5, 64), 64)
	if err != nil {
		return value
	}
	return rounded
}

// shortText cuts a text after so many characters.
func shortText(text string, most int) string {
	text = oneLine(text)
	if utf8.RuneCountInString(text) <= most {
		return text
	}
	return strings.TrimSpace(string([]rune(text)[:most-1])) + "…"
}
