package texttab

import (
	"bufio"
	"encoding/csv"
	"encoding/json"
	"io"
	"strconv"
	"strings"
)

// Stream writes the rows of a table as CSV or JSON one after another, so that a
// long table need not be held.
type Stream struct {
	columns []Column
	csv     *csv.Writer
	json    *bufio.Writer
	started bool
	err     error // the first one; nothing is written after it
}

// NewStream starts a table in the format CSV or JSON.
func NewStream(w io.Writer, columns []Column, f Format) *Stream {
	s := &Stream{columns: columns}
	if f == JSON {
		s.json = bufio.NewWriter(w)
		s.json.WriteByte('[')
		return s
	}
	s.csv = csv.NewWriter(w)
	header := make([]string, 0, len(columns)+1)
	for _, c := range columns {
		header = append(header, c.Name)
	}
	s.err = s.csv.Write(append(header, "notes"))
	return s
}

// Add writes a row. An error is kept for Close.
func (s *Stream) Add(row Row) {
	switch {
	case s.err != nil:
	case s.csv != nil:
		record := make([]string, len(s.columns), len(s.columns)+1)
		for i, cell := range row.Cells {
			record[i] = guarded(cell)
		}
		s.err = s.csv.Write(append(record, guarded(strings.Join(row.Notes, " "))))
	default:
		s.err = s.object(row)
	}
}

func (s *Stream) object(row Row) error {
	var members []string
	member := func(name string, value any) error {
		text, err := json.Marshal(value)
		members = append(members, strconv.Quote(name)+": "+string(text))
		return err
	}
	for j, cell := range row.Cells {
		if cell == nil {
			continue
		}
		if err := member(s.columns[j].Name, cell); err != nil {
			return err
		}
	}
	if len(row.Notes) > 0 {
		if err := member("notes", row.Notes); err != nil {
			return err
		}
	}
	if s.started {
		s.json.WriteByte(',')
	}
	s.started = true
	_, err := s.json.WriteString("\n  {" + strings.Join(members, ", ") + "}")
	return err
}

// Close ends the table and gives the first error.
func (s *Stream) Close() error {
	if s.err != nil {
		return s.err
	}
	if s.csv != nil {
		s.csv.Flush()
		return s.csv.Error()
	}
	s.json.WriteString("\n]\n")
	return s.json.Flush()
}

// guarded keeps a text from being taken for a formula by the program that opens
// the CSV file: a leading space goes before =, +, - and @.
func guarded(cell any) string {
	text := show(cell, true)
	if s, ok := cell.(string); ok && s != "" && strings.ContainsRune("=+-@", rune(s[0])) {
		return " " + text
	}
	return text
}
