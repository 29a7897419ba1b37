package rpc

import (
	"strings"

	"halfwidth/funcs"
	"halfwidth/workbook/calculation"
)

// textPlace is a place of a document: the cell, and what it is for.
type textPlace struct {
	state  *textState
	cell   calculation.CellRef
	within int // the offset in the cell's text
	block  *calculation.Block
	column *calculation.BlockColumn // of the block
	row    *calculation.Row         // nil in the header, and where there is no calculation
}

// place finds the cell at a position. A row right below a block belongs to it,
// since it does once something stands there. It is false where there is no cell,
// or the document is damaged.
func (t *textState) place(p position) (textPlace, bool) {
	plan := t.laidOut()
	if plan == nil {
		return textPlace{}, false
	}
	cell, within, ok := t.sheet.CellAt(t.lines.offset(p))
	if !ok {
		return textPlace{}, false
	}
	at := textPlace{state: t, cell: cell, within: within}
	if at.block, at.column, at.row, ok = plan.BlockAt(calculation.TextSheetName, cell); !ok {
		for _, b := range plan.Blocks {
			if b.LastRow+1 == cell.Row && b.FirstCol <= cell.Col && cell.Col <= b.LastCol {
				at.block, at.column = b, &b.Columns[cell.Col-b.FirstCol]
			}
		}
	}
	return at, true
}

func (p *textPlace) text() string { return p.state.sheet.CellText(p.cell) }

// isHeader reports whether the place lies in the header of its block.
func (p *textPlace) isHeader() bool { return p.block != nil && p.block.Header == p.cell.Row }

// function is that of the place's row, or of its block.
func (p *textPlace) function() *funcs.Function {
	switch {
	case p.block == nil:
		return nil
	case p.block.Function != nil:
		return p.block.Function
	case p.row != nil:
		return p.row.Function
	}
	return nil
}

// mended gives the state in which something can be written at a position: with a
// row at the end of the text, and as though the line ended at the position where a
// quote that is not closed yet makes the cells behind it one.
func (t *textState) mended(p position) *textState {
	offset := t.lines.offset(p)
	if t.parsed() != nil {
		if offset < len(t.lines.text) || offset > 0 && t.lines.text[offset-1] != '\n' && t.lines.text[offset-1] != '\r' {
			return t
		}
		m := t.next()
		m.lines = newLines(t.lines.text+"\n", t.lines.utf8)
		return m
	}
	start := t.lines.starts[t.lines.position(offset).Line]
	text := t.lines.text[:offset]
	if strings.Count(text[start:], `"`)%2 == 1 {
		text += `"`
	}
	m := t.next()
	m.lines = newLines(text, t.lines.utf8)
	return m
}
