package rpc

import (
	"context"
	"fmt"
	"slices"
	"strings"

	"halfwidth/funcs"
	"halfwidth/workbook/calculation"
)

func announceCompletion(_ *Client, capabilities map[string]any) {
	capabilities["completionProvider"] = map[string]any{"triggerCharacters": []string{",", ";", "\t", " ", ">", "/", `"`}, "resolveProvider": false}
}

// Kinds of completion items (CompletionItemKind of LSP).
const (
	itemFunction = 3
	itemField    = 5  // a column
	itemModule   = 9  // a sheet
	itemProperty = 10 // an input or a result
	itemValue    = 12
	itemKeyword  = 14
	itemFile     = 17
)

type completionItem struct {
	Label      string   `json:"label"`
	Kind       int      `json:"kind"`
	Detail     string   `json:"detail,omitempty"`
	SortText   string   `json:"sortText"`
	FilterText string   `json:"filterText"`
	TextEdit   textEdit `json:"textEdit"`
}

type completionList struct {
	IsIncomplete bool             `json:"isIncomplete"`
	Items        []completionItem `json:"items"`
}

// complete offers what may be written at a place: a function's name, a header,
// a value, or the next part of an expression. The items are plain text.
func complete(ctx context.Context, q *textQuestion, p positionParams) (any, error) {
	state := q.mended(p.Position)
	at, ok := state.place(p.Position)
	if !ok {
		return completionList{Items: []completionItem{}}, nil
	}
	c := &completer{textPlace: at, items: []completionItem{}}
	c.whole()
	switch {
	case at.block == nil:
		c.outside()
	case at.isHeader():
		c.header(at.block.Function)
	case at.column.Role == calculation.WorkColumn:
		if at.block.Function == nil {
			c.functions("")
		}
	case at.column.Role == calculation.InputColumn:
		if err := c.input(ctx); err != nil {
			return nil, err
		}
	}
	return completionList{Items: c.items}, nil
}

// completer gathers the items for a place. begun is the stretch of the cell's
// text that an item replaces.
type completer struct {
	textPlace
	begun calculation.Span
	items []completionItem
}

// whole makes the items replace what the cell reads, without the spaces round it.
func (c *completer) whole() {
	text := c.text()
	c.begun.Start = min(c.within, len(text)-len(strings.TrimLeft(text, " ")))
	c.begun.End = max(c.within, len(strings.TrimRight(text, " ")))
}

// mostItems is how many items are offered at most.
const mostItems = 500

// add offers a text. An editor filters items by what stands before the cursor in
// the stretch of the document that an item replaces, so that is what its filter
// text begins with.
func (c *completer) add(text string, kind int, detail string) {
	if len(c.items) >= mostItems {
		return
	}
	edit := c.state.insert(c.cell, c.begun, false, text)
	filter := edit.NewText
	if !c.state.sheet.Quoted(c.cell) && filter != text { // the cell is put in quotes as a whole
		filter = c.text()[:c.begun.Start] + text
	}
	c.items = append(c.items, completionItem{Label: text, Kind: kind, Detail: detail, SortText: fmt.Sprintf("%04d", len(c.items)), FilterText: filter, TextEdit: edit})
}

// outside offers what may stand outside blocks: the parts of a header, where the
// row has its `work out`, else that and defaults; the value of a default.
func (c *completer) outside() {
	if c.cell.Col > 1 {
		left := c.state.sheet.CellText(calculation.CellRef{Row: c.cell.Row, Col: c.cell.Col - 1})
		if name, ok := calculation.DefaultName(left); ok {
			c.defaultValue(name)
			return
		}
	}
	for col := 1; col <= c.state.sheet.Columns(c.cell.Row); col++ {
		name, ok := calculation.WorkOut(c.state.sheet.CellText(calculation.CellRef{Row: c.cell.Row, Col: col}))
		if ok && col != c.cell.Col {
			f, _ := funcs.Lookup(name)
			c.header(f)
			return
		}
	}
	c.add("work out", itemKeyword, "begins a block; each row names its function")
	for _, name := range calculation.OptionNames() {
		c.add("default "+name, itemProperty, "the value right of it holds for the blocks below")
	}
	c.functions("work out: ")
}

func (c *completer) functions(before string) {
	for _, f := range funcs.All() {
		c.add(before+f.Name, itemFunction, f.Summary)
	}
}

// header offers the inputs and results that the block has no column for yet; of
// one function where it is named.
func (c *completer) header(f *funcs.Function) {
	if c.block != nil && c.column.Role == calculation.WorkColumn {
		c.add("work out", itemKeyword, "each row names its function")
		c.functions("work out: ")
		return
	}
	taken := map[string]bool{}
	for col := 1; col <= c.state.sheet.Columns(c.cell.Row); col++ {
		if col != c.cell.Col {
			name, isResult := calculation.HeaderName(c.state.sheet.CellText(calculation.CellRef{Row: c.cell.Row, Col: col}))
			taken[headerText(name, isResult)] = true
		}
	}
	list := []*funcs.Function{f}
	if f == nil {
		list = funcs.All()
		if c.block != nil {
			list = rowFunctions(c.block)
		}
	}
	offer := func(name string, isResult bool, detail string) {
		if text := headerText(name, isResult); !taken[text] {
			taken[text] = true
			c.add(text, itemProperty, detail)
		}
	}
	offer("label", false, "what you call the calculation of each row")
	for _, f := range list {
		for _, in := range f.Inputs {
			offer(in.Name, false, inputText(in))
		}
	}
	for _, f := range list {
		for _, r := range f.Results {
			offer(r.Name, true, r.Summary)
		}
	}
	for _, r := range funcs.CommonResults {
		offer(r.Name, true, r.Summary)
	}
}

func headerText(name string, isResult bool) string {
	if isResult {
		return "> " + name
	}
	return name
}

// defaultValue offers values for an option.
func (c *completer) defaultValue(name string) {
	if name == "decimal-mark" {
		c.add(".", itemValue, "12.5")
		c.add(",", itemValue, "12,5")
		return
	}
	for _, f := range funcs.All() {
		if in, ok := f.Input(name); ok {
			c.values(in)
		}
	}
}

// values offers the values of an input that has few.
func (c *completer) values(in funcs.Input) {
	list := in.Choices
	switch in.Kind {
	case funcs.YesNo:
		list = []string{"yes", "no"}
	case funcs.Level:
		list = []string{"90%", "95%", "99%", "5%", "1%"}
	}
	if in.Infinite {
		list = append(slices.Clone(list), funcs.Infinite)
	}
	for _, text := range list {
		if !slices.ContainsFunc(c.items, func(i completionItem) bool { return i.Label == text }) {
			c.add(text, itemValue, in.Summary)
		}
	}
}

// input offers what may stand in the cell of an input.
func (c *completer) input(ctx context.Context) error {
	list := rowFunctions(c.block)
	if f := c.function(); f != nil {
		list = []*funcs.Function{f}
	}
	at := slices.IndexFunc(list, func(f *funcs.Function) bool { _, ok := f.Input(c.column.Name); return ok })
	if at < 0 {
		return nil
	}
	in, _ := list[at].Input(c.column.Name)
	switch in.Kind {
	case funcs.Choice, funcs.YesNo, funcs.Level:
		c.values(in)
		return nil
	case funcs.Text:
		return nil
	}
	return c.expression(ctx, in)
}
