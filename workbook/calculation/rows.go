package calculation

import (
	"context"
	"errors"
	"fmt"
	"maps"
	"slices"
	"strings"
)

// Rows is a Source held in memory: the open sheets of a server, a text file
// that was read whole, or a test's book.
type Rows struct {
	sheets []rowsSheet
	places []Place
	files  map[string]Source
	late   bool
}

type rowsSheet struct {
	name  string
	frame *Frame
}

// NewRows gives an empty source.
func NewRows() *Rows { return &Rows{files: map[string]Source{}} }

// AddSheet adds a sheet of rows of cells, from A1.
func (r *Rows) AddSheet(name string, rows [][]Cell) {
	f := NewFrame()
	for i, row := range rows {
		f.SetRow(i+1, 0)
		for j, cell := range row {
			if cell != (Cell{}) {
				f.Set(i+1, j+1, cell)
			}
		}
	}
	r.AddFrame(name, f)
}

// AddFrame adds a sheet whose frame keeps all columns. The frame must not
// change while the source is in use.
func (r *Rows) AddFrame(name string, f *Frame) { r.sheets = append(r.sheets, rowsSheet{name, f}) }

// AddPlace adds a table or a defined name.
func (r *Rows) AddPlace(p Place) { r.places = append(r.places, p) }

// AddFile makes a source known as a file beside the book.
func (r *Rows) AddFile(name string, s Source) { r.files[name] = s }

// SetRecalculatesLate says that saved formula values may be old.
func (r *Rows) SetRecalculatesLate(late bool) { r.late = late }

// Places lists the sheets, then the tables and defined names.
func (r *Rows) Places() []Place {
	var out []Place
	for _, s := range r.sheets {
		out = append(out, Place{Kind: Sheet, Name: s.name, Sheet: s.name})
	}
	return append(out, r.places...)
}

// Read gives the frame of a sheet, with all its columns.
func (r *Rows) Read(ctx context.Context, sheet string, choose func(*Frame) Columns) (*Frame, error) {
	if err := ctx.Err(); err != nil {
		return nil, err
	}
	for _, s := range r.sheets {
		if s.name == sheet {
			choose(s.frame)
			return s.frame, nil
		}
	}
	return nil, fmt.Errorf("there is no sheet %q", sheet)
}

// Beside gives a file that AddFile made known.
func (r *Rows) Beside(file string, _ FileOptions) (Source, error) {
	if s, ok := r.files[file]; ok {
		return s, nil
	}
	for _, name := range slices.Sorted(maps.Keys(r.files)) {
		if strings.EqualFold(name, file) {
			return r.files[name], nil
		}
	}
	return nil, errors.New("is not beside the book")
}

// RecalculatesLate reports what SetRecalculatesLate was told.
func (r *Rows) RecalculatesLate() bool { return r.late }
