package ooxml

import "io"

// Changes is what a save is to change.
type Changes struct {
	// Edits of cells, by the index of their sheet.
	Edits map[int][]Edit
	// Sheets to add, after the last.
	Sheets []NewSheet
	// Recalculate asks that the formulas be worked out again when the book is
	// opened next. It takes effect only where a cell changes or a sheet is added.
	Recalculate bool
}

// NewSheet is a worksheet to add to a book.
type NewSheet struct {
	Name   string
	Rows   [][]Value     // from A1; empty values leave their cell out
	Widths []float64     // of the columns from A on, in characters; 0 leaves the standard width
	Names  []DefinedName // names to add that hold for this sheet only; their Sheet is not read
}

// Saved is what a save did.
type Saved struct {
	Path        string   // the file written; empty if nothing was
	Cells       int      // cells changed
	Parts       []string // parts changed or added
	Recalculate bool     // recalculation on load was asked for
}

// SaveAs writes the book with its changes to another file, through a temporary
// file in the same folder. A file of that name is replaced; the book's own file
// is refused. Without changes it is an exact copy.
func (b *Book) SaveAs(path string, changes Changes) (Saved, error) {
	return Saved{}, damaged("not read yet")
}

// SaveInPlace writes the book over its own file, through a temporary file in
// the same folder, with the same permissions. Without changes nothing is
// written. A signed book is refused, and a file that changed since it was
// opened. The book is closed by it.
func (b *Book) SaveInPlace(changes Changes) (Saved, error) {
	return Saved{}, damaged("not read yet")
}

// Write writes the book with its changes.
func (b *Book) Write(w io.Writer, changes Changes) (Saved, error) {
	return Saved{}, damaged("not read yet")
}

// LockFile finds the owner or lock file that another program keeps beside a
// file that it has open.
func LockFile(path string) (lock string, found bool) { return "", false }
