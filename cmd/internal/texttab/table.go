// Package texttab lays out one table as aligned text with numbered footnotes,
// as CSV or as JSON.
package texttab

import (
	"fmt"
	"io"
	"strconv"
	"strings"
	"unicode/utf8"
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
	Name  string // its member in JSON and its header in CSV and text
	Right bool   // numbers stand at the right in text
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
		return t.text(w)
	}
	s := NewStream(w, t.Columns, f)
	for _, row := range t.Rows {
		s.Add(row)
	}
	return s.Close()
}

// show writes a cell as text. In a table to be read, numbers are shortened to
// 6 significant digits; CSV and JSON keep every digit.
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
		return strconv.FormatFloat(v, 'g', 6, 64)
	}
	return fmt.Sprint(cell)
}

// text aligns the columns. The numbers of a row's footnotes stand in brackets
// after its last cell; equal notes share one number.
func (t *Table) text(w io.Writer) error {
	numbers := map[string]int{}
	var footnotes []string
	lines := [][]string{make([]string, len(t.Columns))}
	for i, c := range t.Columns {
		lines[0][i] = c.Name
	}
	for _, row := range t.Rows {
		line := make([]string, len(t.Columns))
		for i, cell := range row.Cells {
			line[i] = strings.Join(strings.Fields(show(cell, false)), " ")
		}
		marks := ""
		for _, note := range row.Notes {
			if numbers[note] == 0 {
				footnotes = append(footnotes, note)
				numbers[note] = len(footnotes)
			}
			marks += "[" + strconv.Itoa(numbers[note]) + "]"
		}
		lines = append(lines, append(line, marks))
	}
	widths := make([]int, len(t.Columns))
	for _, line := range lines {
		for i := range widths {
			widths[i] = max(widths[i], utf8.RuneCountInString(line[i]))
		}
	}
	var b strings.Builder
	for _, line := range lines {
		var text strings.Builder
		for i, cell := range line {
			if i == len(widths) {
				text.WriteString("  " + cell)
				break
			}
			if i > 0 {
				text.WriteString("  ")
			}
			pad := strings.Repeat(" ", widths[i]-utf8.RuneCountInString(cell))
			if t.Columns[i].Right {
				text.WriteString(pad + cell)
			} else {
				text.WriteString(cell + pad)
			}
		}
		b.WriteString(strings.TrimRight(text.String(), " ") + "\n")
	}
	if len(footnotes) > 0 {
		b.WriteString("\n")
	}
	for i, note := range footnotes {
		mark := fmt.Sprintf("[%d] ", i+1)
		b.WriteString(Wrap(mark+note, Width, strings.Repeat(" ", len(mark))) + "\n")
	}
	_, err := io.WriteString(w, b.String())
	return err
}

// Width is where long lines of prose are broken.
const Width = 100

// Wrap breaks prose at spaces so that no line passes width where that can be
// done; lines after the first begin with indent.
func Wrap(text string, width int, indent string) string {
	var b strings.Builder
	column := 0
	for i, word := range strings.Fields(text) {
		n := utf8.RuneCountInString(word)
		switch {
		case i == 0:
		case column+1+n > width:
			b.WriteString("\n" + indent)
			column = utf8.RuneCountInString(indent)
		default:
			b.WriteByte(' ')
			column++
		}
		b.WriteString(word)
		column += n
	}
	return b.String()
}
