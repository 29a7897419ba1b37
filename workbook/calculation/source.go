package calculation

import "context"

// CellKind is the kind of value that a cell holds.
type CellKind uint8

// The kinds of cells.
const (
	Blank    CellKind = iota
	Number            // a number, percentages as their fraction
	Text              // a text
	Bool              // TRUE or FALSE; Number is 1 or 0
	Error             // an error value; Text is its code
	Date              // a date or a date with a time; Number is days since 1899-12-30
	Duration          // an elapsed time or a time of day; Number is in days
)

// Cell is one cell's value.
type Cell struct {
	Kind    CellKind
	Formula bool // the value is what a formula last gave
	Unsaved bool // a formula of which no value is saved; Kind is Blank
	Covered bool // inside a merged range, but not its first cell; Kind is Blank
	Number  float64
	Text    string
}

// PlaceKind is what a name after `in` stands for.
type PlaceKind uint8

// The kinds of places, in the order in which a name is looked up.
const (
	Sheet PlaceKind = iota
	Table
	DefinedName
)

// Place is a sheet, a table or a defined range of a Source. Rows and columns
// count from 1; for a sheet they are 0.
type Place struct {
	Kind                                  PlaceKind
	Name                                  string // as it stands in the book
	Sheet                                 string
	FirstRow, LastRow, FirstCol, LastCol int
	HeaderRows, TotalsRows                int // of a table
}

// Source gives samples their rows: a workbook file, a CSV file beside it, or
// the open sheets of a server.
type Source interface {
	// Places lists sheets, tables and defined names, sheets first, in the order
	// of the book.
	Places() []Place
	// Read reads one sheet in one pass. It calls choose once, with the first
	// HeadRows rows (or all, where there are fewer) with all their columns; choose
	// answers which columns (from 1) to keep from there on. The Frame holds those.
	Read(ctx context.Context, sheet string, choose func(head *Frame) (columns []int)) (*Frame, error)
	// Beside opens a file named in an expression, beside the book or below its
	// folder.
	Beside(file string) (Source, error)
	// RecalculatesLate reports that the book recalculates by hand or on load, so
	// that saved formula values may be old.
	RecalculatesLate() bool
}

// HeadRows is how many rows are searched for a header.
const HeadRows = 100
