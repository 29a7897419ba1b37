// Package texttab lays out one table as aligned text with numbered footnotes,
// as CSV or as JSON.
//
// Contract: off a terminal a row is one line and nothing is decorated; on one,
// tables fit its width. Numbers are shortened in text alone; CSV and JSON keep
// every digit. Texts cannot steer a terminal or start a formula in a sheet
// program. It knows nothing of what the cells mean.
package texttab

import (
	"fmt"
	"io"
	"math"
	"strconv"
)

// Format is a way to write a table.
type Format string

// The formats.
const (
	Text Format = "text"
	JSON Format = "json"
	CSV  Format = "csv"
)

// Formats lists the formats, for help and errors.
var Formats = []Format{Text, JSON, CSV}

// Column is one column of a table.
type Column struct {
	Name   string   // its member in JSON and its header in CSV and text
	Right  bool     // numbers, which stand under one another by their decimal marks in text
	Key    bool     // tells rows apart; repeated where a table that is too wide goes on below
	Strong []string // cells that a terminal shows in bold
	Noted  bool     // the numbers of footnotes stand in its cells, instead of after the last
}

// Table is rows of cells under columns. A cell is a string, a number, a bool or
// nil. Notes belong to rows: they are footnotes in text and a member or a
// last column `notes` elsewhere.
type Table struct {
	Columns []Column
	Rows    []Row
}

// Row is one row of a table.
type Row struct {
	Cells []any
	Notes []string
}

// Write writes the table in the format.
func (t *Table) Write(w io.Writer, f Format) error {
	if f == Text {
		_, err := io.WriteString(w, t.layout(ScreenOf(w)))
		return err
	}
	s := NewStream(w, t.Columns, f)
	for _, row := range t.Rows {
		s.Add(row)
	}
	return s.Close()
}

// show writes a cell as text. In a table to be read, numbers are shortened to
// 6 significant digits, large ones to whole numbers; CSV and JSON keep every
// digit.
func show(cell any, full bool) string {
	switch v := cell.(type) {
	case nil:
		return ""
	case string:
		return v
	case float64:
		if full {
			return strconv.FormatFloat(v, 'g', -1, 64)
		}
		if a := math.Abs(v); a >= 1e6 && a < 1e15 {
			return strconv.FormatFloat(v, 'f', 0, 64)
		}
		return strconv.FormatFloat(v, 'g', 6, 64)
	}
	return fmt.Sprint(cell)
}
