package rpc

import (
	"context"
	"fmt"

	"halfwidth/workbook/calculation"
)

// Kinds of symbols (SymbolKind of LSP).
const (
	symbolBlock = 2  // Module
	symbolRow   = 12 // Function
)

type documentSymbol struct {
	Name           string           `json:"name"`
	Detail         string           `json:"detail,omitempty"`
	Kind           int              `json:"kind"`
	Range          textRange        `json:"range"`
	SelectionRange textRange        `json:"selectionRange"`
	Children       []documentSymbol `json:"children,omitempty"`
}

// symbolInformation is the flat form, for clients that know no other.
type symbolInformation struct {
	Name      string   `json:"name"`
	Kind      int      `json:"kind"`
	Location  location `json:"location"`
	Container string   `json:"containerName,omitempty"`
}

// symbols lists the blocks and their calculations. The label of a row is its
// name, else its function.
func symbols(_ context.Context, q *textQuestion, _ documentParams) (any, error) {
	plan := q.laidOut()
	list := []documentSymbol{}
	if plan == nil {
		return list, nil
	}
	for _, b := range plan.Blocks {
		block := documentSymbol{Name: q.sheet.CellText(calculation.CellRef{Row: b.Header, Col: workColumn(b)}), Kind: symbolBlock,
			Detail: fmt.Sprintf("rows %d to %d", b.Header, b.LastRow)}
		block.SelectionRange = q.span(calculation.CellRef{Row: b.Header, Col: workColumn(b)}, calculation.Span{})
		block.Range = q.cells(b, b.Header, b.LastRow)
		for _, r := range b.Rows {
			row := documentSymbol{Name: r.Label, Kind: symbolRow, Range: q.cells(b, r.Number, r.Number),
				SelectionRange: q.span(calculation.CellRef{Row: r.Number, Col: workColumn(b)}, calculation.Span{})}
			if r.Function != nil {
				row.Detail = r.Function.Name
			}
			if row.Name == "" {
				row.Name, row.Detail = row.Detail, ""
			}
			if row.Name == "" {
				row.Name = fmt.Sprintf("row %d", r.Number)
			}
			block.Children = append(block.Children, row)
		}
		list = append(list, block)
	}
	if q.client.Can("textDocument", "documentSymbol", "hierarchicalDocumentSymbolSupport") {
		return list, nil
	}
	flat := []symbolInformation{}
	for _, b := range list {
		flat = append(flat, symbolInformation{b.Name, b.Kind, location{q.uri, b.Range}, ""})
		for _, r := range b.Children {
			flat = append(flat, symbolInformation{r.Name, r.Kind, location{q.uri, r.Range}, b.Name})
		}
	}
	return flat, nil
}

// cells gives the place of rows of a block, from its first to its last column.
func (t *textState) cells(b *calculation.Block, first, last int) textRange {
	start := t.span(calculation.CellRef{Row: first, Col: b.FirstCol}, calculation.Span{}).Start
	return textRange{start, t.span(calculation.CellRef{Row: last, Col: b.LastCol}, calculation.Span{}).End}
}
