package rpc

import (
	"context"
	"fmt"
	"strings"

	"halfwidth/funcs"
	"halfwidth/workbook/calculation"
)

type hoverAnswer struct {
	Contents markup    `json:"contents"`
	Range    textRange `json:"range"`
}

// hover explains what stands at a place: a function by its reference page, a
// header by what it is for, a row by what was worked out.
func hover(ctx context.Context, q *textQuestion, p positionParams) (any, error) {
	at, ok := q.place(p.Position)
	if !ok || at.block == nil {
		return nil, nil
	}
	t := &hoverText{markdown: q.markdown}
	switch {
	case at.column.Role == calculation.WorkColumn && at.function() != nil && (at.isHeader() || at.block.Function == nil):
		t.page(at.function())
	case at.isHeader():
		t.header(&at)
	case at.row != nil:
		w, err := q.workOut(ctx, q.session.sheetWorkers())
		if err != nil {
			return nil, err
		}
		if r := w.rowAt(at.cell); r != nil {
			t.row(w, r, &at)
		}
	}
	text := strings.TrimSpace(t.String())
	if text == "" {
		return nil, nil
	}
	kind := "plaintext"
	if q.markdown {
		kind = "markdown"
	}
	return hoverAnswer{markup{kind, text}, q.span(at.cell, calculation.Span{})}, nil
}

// hoverText builds a text that reads well with and without Markdown.
type hoverText struct {
	strings.Builder
	markdown bool
}

// name marks a name.
func (t *hoverText) name(name string) string {
	if t.markdown {
		return "**" + name + "**"
	}
	return name
}

// plain keeps a text from being read as Markdown.
func (t *hoverText) plain(text string) string {
	if t.markdown {
		return markdownSigns.Replace(text)
	}
	return text
}

var markdownSigns = strings.NewReplacer(`\`, `\\`, "*", `\*`, "_", `\_`, "`", "\\`", "<", `\<`, ">", `\>`, "[", `\[`, "]", `\]`, "#", `\#`, "|", `\|`, "~", `\~`)

// page is the reference page of a function. Its Markdown reads well as plain
// text but for the marks of headings and code.
func (t *hoverText) page(f *funcs.Function) {
	var b strings.Builder
	_ = funcs.WriteReference(&b, f) // into memory
	text := b.String()
	if !t.markdown {
		text = strings.ReplaceAll(strings.TrimPrefix(text, "## "), "`", "")
	}
	t.WriteString(text)
}

// header explains a header cell.
func (t *hoverText) header(at *textPlace) {
	functions := rowFunctions(at.block)
	switch c := at.column; c.Role {
	case calculation.InputColumn:
		seen := map[string]bool{}
		for _, f := range functions {
			if in, ok := f.Input(c.Name); ok && !seen[inputText(in)] {
				seen[inputText(in)] = true
				fmt.Fprintf(t, "%s: %s\n\n", t.name(c.Name), t.plain(inputText(in)))
			}
		}
	case calculation.ResultColumn:
		for _, f := range functions {
			if r, ok := f.Result(c.Name); ok {
				fmt.Fprintf(t, "%s: %s", t.name(c.Name), t.plain(r.Summary+" ("+r.Kind.String()+")"))
				return
			}
		}
	case calculation.LabelColumn:
		fmt.Fprintf(t, "%s: what you call the calculation of each row", t.name("label"))
	case calculation.WorkColumn:
		fmt.Fprintf(t, "%s: each row names its function here", t.name("work out"))
	}
}

// rowFunctions lists the functions of a block's rows, each once, then all others.
func rowFunctions(b *calculation.Block) []*funcs.Function {
	var list []*funcs.Function
	seen := map[*funcs.Function]bool{}
	add := func(f *funcs.Function) {
		if f != nil && !seen[f] {
			seen[f] = true
			list = append(list, f)
		}
	}
	add(b.Function)
	for _, r := range b.Rows {
		add(r.Function)
	}
	if len(list) > 0 {
		return list
	}
	return funcs.All()
}

// row gives what was worked out for a row, and what the cell under the pointer
// is.
func (t *hoverText) row(w *workedText, r *calculation.RowResult, at *textPlace) {
	f := r.Row.Function
	switch c := at.column; {
	case f == nil:
	case c.Role == calculation.InputColumn:
		if in, ok := f.Input(c.Name); ok {
			fmt.Fprintf(t, "%s: %s\n\n", t.name(c.Name), t.plain(inputText(in)))
		}
	case c.Role == calculation.ResultColumn:
		if result, ok := f.Result(c.Name); ok {
			fmt.Fprintf(t, "%s: %s\n\n", t.name(c.Name), t.plain(result.Summary))
		}
	}
	title := r.Row.Label
	if f != nil {
		if title != "" {
			title += ", "
		}
		title += f.Name
	}
	if title != "" {
		title += ": "
	}
	fmt.Fprintf(t, "%s%s\n\n", t.plain(title), t.name(string(r.Status)))
	if r.Outcome != nil {
		for _, result := range r.Outcome.Results() {
			if _, own := ownResult(f, result.Name); own {
				fmt.Fprintf(t, "- %s: %s\n", result.Name, t.plain(strings.TrimSpace(w.sheet.ValueText(result.Value))))
			}
		}
		for _, name := range []string{"used", "skipped", "range"} {
			if v, ok := r.Outcome.Get(name); ok && r.Status != funcs.StatusRefused && v != "" {
				fmt.Fprintf(t, "- %s: %s\n", name, t.plain(w.sheet.ValueText(v)))
			}
		}
		if sentence, ok := r.Outcome.Get("sentence"); ok && r.Status != funcs.StatusRefused {
			fmt.Fprintf(t, "\n%s\n", t.plain(fmt.Sprint(sentence)))
		}
	}
	if len(r.Findings) > 0 && r.Outcome != nil && r.Status != funcs.StatusRefused {
		t.WriteString("\n")
	}
	for _, d := range r.Findings {
		fmt.Fprintf(t, "- %s: %s\n", d.Severity, t.plain(d.Message))
	}
}

// ownResult finds a result among those that a function gives besides the common
// ones.
func ownResult(f *funcs.Function, name string) (funcs.Result, bool) {
	for _, r := range f.Results {
		if r.Name == name {
			return r, true
		}
	}
	return funcs.Result{}, false
}
