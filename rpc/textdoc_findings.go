package rpc

import (
	"cmp"
	"fmt"
	"slices"
	"strings"

	"halfwidth/funcs"
	"halfwidth/workbook/calculation"
)

// textFinding is something found in a document, as it is shown, with what would
// mend it.
type textFinding struct {
	diagnostic
	cell   calculation.CellRef
	within calculation.Span // of the cell's text; empty for the whole
	fixes  []textFix
}

// textFix is an edit that mends a finding.
type textFix struct {
	title string
	edits []textEdit
}

// The codes of findings that only a document has.
const (
	codeDamaged   = "damaged-file"
	codeNothing   = "nothing-to-work-out"
	codeOutOfDate = "results-out-of-date"
	codeNotFilled = "results-not-filled"
	codeResults   = "results"
)

const diagnosticSource = "halfwidth"

// diagnostics gives what was found as the client can show it.
func (w *workedText) diagnostics(client *Client, show resultsAs) []diagnostic {
	related := client.Can("textDocument", "publishDiagnostics", "relatedInformation")
	data := client.Can("textDocument", "publishDiagnostics", "dataSupport")
	list := []diagnostic{}
	for _, f := range w.findings(show) {
		d := f.diagnostic
		if !related {
			d.Related = nil
		}
		if !data {
			d.Data = nil
		}
		list = append(list, d)
	}
	return list
}

// findings gives all that was found, in the order of the document.
func (w *workedText) findings(show resultsAs) []textFinding {
	if w.sheet == nil {
		return []textFinding{{diagnostic: w.damaged()}}
	}
	c := &findingList{workedText: w, seen: map[string]bool{}, places: relatedPlaces{w, map[string]*textState{}}}
	layout := w.plan.Diagnostics()
	for _, d := range layout {
		c.add(d, d.Instead)
	}
	for _, r := range w.results.Rows {
		for _, d := range r.Findings {
			c.add(d, r.Instead(d, w.sheet.CellText(d.Cell)))
		}
		c.addStale(r)
		if show == asDiagnostics && r.Status != funcs.StatusRefused { // why it is refused is shown already
			c.addPlain(calculation.CellRef{Row: r.Row.Number, Col: workColumn(r.Row.Block)}, severityHint, codeResults, w.summary(r))
		}
	}
	c.addUnfilled()
	if len(w.plan.Rows) == 0 && len(layout) == 0 {
		c.addPlain(calculation.CellRef{Row: 1, Col: 1}, severityInformation, codeNothing, `There is nothing to work out yet. A block starts at a row with a cell that reads "work out", `+
			`with an input such as "sample" and a result such as "> mean" beside it; the rows below are worked out.`)
	}
	slices.SortStableFunc(c.list, func(a, b textFinding) int {
		return cmp.Or(cmp.Compare(a.Range.Start.Line, b.Range.Start.Line), cmp.Compare(a.Range.Start.Character, b.Range.Start.Character), cmp.Compare(a.Severity, b.Severity))
	})
	return c.list
}

// damaged tells of a document whose cells cannot be told apart.
func (t *textState) damaged() diagnostic {
	d := diagnostic{Severity: severityError, Code: codeDamaged, Source: diagnosticSource, Message: "The file cannot be read."}
	if t.damage == nil {
		return d
	}
	line := max(0, min(t.damage.Line, t.lines.lineCount())-1)
	d.Range = textRange{position{line, 0}, t.lines.position(t.lines.offset(position{line, 1 << 30}))}
	d.Message = "The file " + t.damage.Error() + "."
	return d
}

type findingList struct {
	*workedText
	list     []textFinding
	seen     map[string]bool
	places   relatedPlaces
	unfilled []*calculation.Block // one for each row of it that is not filled
}

var severities = map[funcs.Severity]int{funcs.Refused: severityError, funcs.Caution: severityWarning, funcs.Information: severityInformation}

// add adds a finding of the calculation sheet. The reason why a whole block is
// refused comes with each of its rows, and is shown once.
func (c *findingList) add(d calculation.Diagnostic, instead []string) {
	f := textFinding{cell: d.Cell, within: d.Span, diagnostic: diagnostic{Range: c.span(d.Cell, d.Span), Severity: severities[d.Severity], Code: d.Code,
		Source: diagnosticSource, Message: d.Message, Related: c.places.of(d)}}
	key := fmt.Sprint(d.Cell, d.Span, d.Code, d.Message)
	if c.seen[key] {
		return
	}
	c.seen[key] = true
	if len(d.Cells) > 0 {
		f.Data = &diagnosticData{d.Cells}
	}
	for _, text := range instead {
		f.fixes = append(f.fixes, textFix{c.fixTitle(d, text), []textEdit{c.replace(d.Cell, d.Span, text)}})
	}
	c.list = append(c.list, f)
}

func (c *findingList) addPlain(cell calculation.CellRef, severity int, code, message string) {
	c.list = append(c.list, textFinding{cell: cell, diagnostic: diagnostic{Range: c.span(cell, calculation.Span{}), Severity: severity, Code: code,
		Source: diagnosticSource, Message: message}})
}

func (c *findingList) fixTitle(d calculation.Diagnostic, text string) string {
	if d.Code == "bad-value" && strings.HasSuffix(text, "%") {
		return fmt.Sprintf("Write %s for %s", text, strings.TrimSpace(c.sheet.CellText(d.Cell)))
	}
	return fmt.Sprintf("Use %s", quotedName(text))
}

// quotedName puts quotes round a name that has none.
func quotedName(text string) string {
	if strings.HasPrefix(text, `"`) {
		return text
	}
	return `"` + text + `"`
}

// addStale tells of result cells of a row that hold something else than was
// worked out.
func (c *findingList) addStale(r *calculation.RowResult) {
	var first *calculation.Edit
	more, blank := 0, false
	for i, e := range r.Edits {
		switch {
		case c.sheet.Holds(e):
		case strings.TrimSpace(c.sheet.CellText(e.Cell)) == "":
			blank = true
		case first == nil:
			first = &r.Edits[i]
		default:
			more++
		}
	}
	if first == nil {
		if blank && r.Status != funcs.StatusRefused { // why it is refused is shown already
			c.unfilled = append(c.unfilled, r.Row.Block)
		}
		return
	}
	worked := "worked out is " + shortText(strings.TrimSpace(c.sheet.ValueText(first.Value)), 60)
	switch {
	case r.Status == funcs.StatusRefused:
		worked = "but the row is refused"
	case first.Value == nil:
		worked = "but there is no such result"
	}
	message := fmt.Sprintf("The results are out of date: %s (%s) holds %s, %s.", first.Cell, c.resultName(r, first.Cell), shortText(strings.TrimSpace(c.sheet.CellText(first.Cell)), 60), worked)
	if more > 0 {
		message += fmt.Sprintf(" %s of the row too.", countOf(more, "other cell"))
	}
	c.addPlain(first.Cell, severityWarning, codeOutOfDate, message+" Fill the results again.")
	c.list[len(c.list)-1].fixes = []textFix{{fmt.Sprintf("Fill the results of row %d", r.Row.Number), c.fill([]*calculation.RowResult{r})}}
}

// addUnfilled tells, once a block, how many rows have results that are not
// filled in.
func (c *findingList) addUnfilled() {
	for _, b := range c.plan.Blocks {
		n := 0
		for _, other := range c.unfilled {
			if other == b {
				n++
			}
		}
		if n == 0 {
			continue
		}
		at := calculation.CellRef{Row: b.Header, Col: workColumn(b)}
		c.addPlain(at, severityInformation, codeNotFilled, fmt.Sprintf("The results of %s are not filled in yet.", countOf(n, "row")))
		var rows []*calculation.RowResult
		for _, r := range c.results.Rows {
			if r.Row.Block == b {
				rows = append(rows, r)
			}
		}
		c.list[len(c.list)-1].fixes = []textFix{{"Fill the results of this block", c.fill(rows)}}
	}
}

func countOf(n int, what string) string {
	if n == 1 {
		return "1 " + what
	}
	return fmt.Sprintf("%d %ss", n, what)
}

// resultName is the name of the result that a cell is for.
func (w *workedText) resultName(r *calculation.RowResult, cell calculation.CellRef) string {
	return r.Row.Block.Columns[cell.Col-r.Row.Block.FirstCol].Name
}

// workColumn is the column of a block that reads `work out`.
func workColumn(b *calculation.Block) int {
	for _, c := range b.Columns {
		if c.Role == calculation.WorkColumn {
			return c.Col
		}
	}
	return b.FirstCol
}

// fill gives the edits that write what was worked out into the result cells of
// some rows.
func (w *workedText) fill(rows []*calculation.RowResult) []textEdit {
	var edits []calculation.Edit
	for _, r := range rows {
		edits = append(edits, r.Edits...)
	}
	// What touches is one edit: not all clients keep the order of insertions at one
	// place.
	var merged []calculation.TextEdit
	for _, change := range w.sheet.Changes(edits) {
		if n := len(merged); n > 0 && merged[n-1].Span.End == change.Span.Start {
			merged[n-1].Span.End = change.Span.End
			merged[n-1].New += change.New
			continue
		}
		merged = append(merged, change)
	}
	list := []textEdit{}
	for _, change := range merged {
		list = append(list, textEdit{w.lines.span(change.Span), change.New})
	}
	return list
}

// replace gives the edit that writes a text in the place of a stretch of a
// cell's text; of the whole where the stretch is empty. The cell is put in quotes
// where it needs them then.
func (t *textState) replace(cell calculation.CellRef, within calculation.Span, text string) textEdit {
	return t.insert(cell, within, within == calculation.Span{}, text)
}

// insert is replace in which an empty stretch is a place of the text.
func (t *textState) insert(cell calculation.CellRef, within calculation.Span, whole bool, text string) textEdit {
	old := t.sheet.CellText(cell)
	if whole {
		within = calculation.Span{Start: 0, End: len(old)}
	}
	next := old[:within.Start] + text + old[within.End:]
	span, _ := t.sheet.CellSpan(cell)
	switch {
	case t.sheet.Quoted(cell):
		if place, ok := t.sheet.TextSpan(cell, calculation.Span{Start: within.Start, End: within.End}); ok && (within != calculation.Span{}) {
			return textEdit{t.lines.span(place), strings.ReplaceAll(text, `"`, `""`)}
		}
		at := calculation.Span{Start: span.Start + 1, End: span.Start + 1} // within the opening quote
		return textEdit{t.lines.span(at), strings.ReplaceAll(text, `"`, `""`)}
	case t.sheet.Encode(next) != next:
		return textEdit{t.lines.span(span), t.sheet.Encode(next)}
	}
	return textEdit{t.lines.span(calculation.Span{Start: span.Start + within.Start, End: span.Start + within.End}), text}
}
