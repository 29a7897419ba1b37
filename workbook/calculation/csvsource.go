package calculation

import (
	"bytes"
	"context"
	"errors"
	"fmt"
	"io"
)

// TextFile is a CSV or TSV file as a Source of one sheet. It is read in one
// pass; of its columns only the kept ones stay in memory.
type TextFile struct {
	name    string
	open    func() (io.ReadCloser, error)
	options FileOptions
}

// NewTextFile gives the source of a text file. The name decides by its ending
// whether it is a .tsv file; open opens the file from its start, each time it
// is called.
func NewTextFile(name string, open func() (io.ReadCloser, error), options FileOptions) *TextFile {
	return &TextFile{name, open, options}
}

// Places gives the one sheet, which bears the file's name.
func (t *TextFile) Places() []Place { return []Place{{Kind: Sheet, Name: t.name, Sheet: t.name}} }

// RecalculatesLate is false: a text file holds no formulas.
func (t *TextFile) RecalculatesLate() bool { return false }

// Beside is refused: expressions stand in no text file of data.
func (t *TextFile) Beside(string, FileOptions) (Source, error) {
	return nil, errors.New("cannot be named from a data file")
}

// dialectBytes is how much of a file is looked at for its separator.
const dialectBytes = 64 << 10

// Read reads the file.
func (t *TextFile) Read(ctx context.Context, sheet string, choose func(head *Frame) Columns) (*Frame, error) {
	if sheet != t.name {
		return nil, fmt.Errorf("there is no sheet %q", sheet)
	}
	file, err := t.open()
	if err != nil {
		return nil, err
	}
	defer file.Close()
	head := make([]byte, dialectBytes)
	n, err := io.ReadFull(file, head)
	if err != nil && err != io.EOF && err != io.ErrUnexpectedEOF {
		return nil, err
	}
	d := findDialect(t.name, head[:n], t.options.DecimalComma)
	s := newCSVScanner(io.MultiReader(bytes.NewReader(head[:n]), file), d)
	f := NewFrame()
	chosen := false
	row := 0
	for s.next() {
		row++
		if row > HeadRows && !chosen {
			columns := choose(f)
			if chosen = true; columns.None() {
				return f, nil
			}
			f.Keep(columns)
		}
		if row > MaxRow {
			return nil, fmt.Errorf("it has more than %d rows", MaxRow)
		}
		if row&0x3fff == 0 && ctx.Err() != nil {
			return nil, ctx.Err()
		}
		var flags RowFlags
		last := 0
		for i := range s.fields {
			of := d.setField(f, row, i+1, s.fields[i].text)
			if of&RowFilled != 0 {
				last = i + 1
			}
			flags |= of
		}
		f.SetRow(row, flags)
		f.SetWidth(row, len(s.fields), last)
	}
	if s.err != nil {
		return nil, s.err
	}
	if !chosen {
		f.Keep(choose(f))
	}
	return f, nil
}
