package rpc

import (
	"maps"
	"reflect"
	"slices"

	"halfwidth/workbook/calculation"
)

// told is what a client was told of the results of a book.
type told struct {
	cells    map[sheetCell]any
	rows     map[sheetRow]publishedRow
	tables   map[string]publishedTable
	findings []rowFinding
}

type sheetCell struct {
	sheet string
	cell  calculation.CellRef
}

// sheetRow is a row of a calculation sheet, in one of the blocks side by side.
type sheetRow struct {
	sheet      string
	row, block int
}

func newTold() told {
	return told{map[sheetCell]any{}, map[sheetRow]publishedRow{}, map[string]publishedTable{}, []rowFinding{}}
}

// ownTable reports that a sheet is one that the client made of results.
func (t *told) ownTable(sheet string) bool {
	_, ours := t.tables[sheet]
	return ours
}

// fill puts into a publication what results altered, and keeps them. What no
// longer is a result cell is forgotten, not emptied: it is the client's again.
func (t *told) fill(p *publication, results *calculation.Results, plan *calculation.Plan) {
	now := newTold()
	p.Cells, p.Rows = []publishedCell{}, []publishedRow{}
	for _, r := range results.Rows {
		sheet := r.Row.Sheet()
		for _, e := range r.Edits {
			at := sheetCell{sheet, e.Cell}
			now.cells[at] = e.Value
			if was, known := t.cells[at]; !known || was != e.Value {
				p.Cells = append(p.Cells, publishedCell{sheet, e.Cell.String(), wireCell(e.Value)})
			}
		}
		at := sheetRow{sheet, r.Row.Number, r.Row.Block.FirstCol}
		was, known := t.rows[at]
		row := was
		if !known || !r.Kept || r.Row.Label != was.Label {
			row = rowOf(r)
		}
		if now.rows[at] = row; !known || !reflect.DeepEqual(row, was) {
			p.Rows = append(p.Rows, row)
		}
	}
	for _, at := range slices.SortedFunc(maps.Keys(t.rows), byPlace) {
		if _, still := now.rows[at]; !still {
			p.Rows = append(p.Rows, publishedRow{Sheet: at.sheet, Row: at.row, Column: calculation.ColumnLetters(at.block), Findings: []rowFinding{}})
		}
	}
	for _, table := range results.Tables {
		whole := tableOf(table)
		now.tables[table.Name] = whole
		if was, known := t.tables[table.Name]; !known || !reflect.DeepEqual(was, whole) {
			p.Tables = append(p.Tables, whole)
		}
	}
	for _, d := range plan.Diagnostics() {
		f := findingOf(d)
		f.Sheet = d.Sheet
		now.findings = append(now.findings, f)
	}
	if !reflect.DeepEqual(now.findings, t.findings) {
		p.Findings = &now.findings
	}
	for name := range t.tables { // one that a client made stays its own to replace
		if _, still := now.tables[name]; !still {
			now.tables[name] = publishedTable{}
		}
	}
	*t = now
}

func byPlace(a, b sheetRow) int {
	switch {
	case a.sheet != b.sheet:
		if a.sheet < b.sheet {
			return -1
		}
		return 1
	case a.row != b.row:
		return a.row - b.row
	}
	return a.block - b.block
}

func rowOf(r *calculation.RowResult) publishedRow {
	row := publishedRow{Sheet: r.Row.Sheet(), Row: r.Row.Number, Column: calculation.ColumnLetters(r.Row.Block.FirstCol), Label: r.Row.Label, Status: string(r.Status), Findings: []rowFinding{}}
	if r.Row.Function != nil {
		row.Function = r.Row.Function.Name
	}
	for _, d := range r.Findings {
		row.Findings = append(row.Findings, findingOf(d))
	}
	return row
}

func tableOf(t calculation.TableSheet) publishedTable {
	whole := publishedTable{Sheet: t.Name, Header: t.Header, Rows: [][]any{}, Refused: t.Refused}
	if whole.Header == nil {
		whole.Header = []string{}
	}
	for _, line := range t.Rows {
		cells := make([]any, len(line))
		for i, v := range line {
			cells[i] = wireCell(v)
		}
		whole.Rows = append(whole.Rows, cells)
	}
	return whole
}
