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
	OtherSheet // a sheet without cells: nothing is found in it, but its name is taken
)

// String words the kind with its article.
func (k PlaceKind) String() string {
	return [...]string{"a sheet", "a table", "a defined name", "a chart, dialog or macro sheet"}[k]
}

// Place is a sheet, a table or a defined name of a Source. Rows and columns
// count from 1; for a sheet they are 0.
type Place struct {
	Kind                                 PlaceKind
	Name                                 string // as it stands in the book
	Sheet                                string // the sheet it lies on; for a sheet its own name
	FirstRow, LastRow, FirstCol, LastCol int    // the whole range, header and totals rows included
	HeaderRows, TotalsRows               int    // of a table
	Only                                 string // of a defined name: the one sheet that it holds for; empty for the whole book
	NoRange                              string // of a defined name: what it stands for where that is not one range of a sheet
}

// Source gives samples their rows: a workbook file, a CSV file beside it, or
// the open sheets of a server. Its methods are called from one goroutine.
type Source interface {
	// Places lists sheets, tables and defined names, sheets first, in the order
	// of the book. A CSV file is one sheet.
	Places() []Place
	// Read reads one sheet in one pass. It calls choose once, with the first
	// HeadRows rows (or all, where there are fewer) with all their columns; choose
	// answers which columns to keep from there on. The frame that choose was
	// shown is the one that Read gives back: the Source calls its Keep with the
	// answer and adds the other rows to it. Where nothing is to be kept
	// (Columns.None) the Source may stop there.
	//
	// Every row enters with its flags (Frame.SetRow), whether or not one of its
	// kept cells has a value. Cells inside a merged range, and blank cells inside
	// an array formula, enter by Column.Cover and Column.Flag.
	Read(ctx context.Context, sheet string, choose func(head *Frame) Columns) (*Frame, error)
	// Beside opens a file named in an expression, beside the book or below its
	// folder. The error says what is wrong with the name or the file, as the end
	// of a sentence that starts with the name.
	Beside(file string, options FileOptions) (Source, error)
	// RecalculatesLate reports that the book recalculates by hand or on load, so
	// that saved formula values may be old.
	RecalculatesLate() bool
}

// FileOptions say how a text file is to be read.
type FileOptions struct {
	DecimalComma bool // numbers are written 12,5
}

// HeadRows is how many rows are searched for a header.
const HeadRows = 100

// Columns says which columns of a sheet to keep.
type Columns struct {
	All  bool
	List []int // from 1, rising
}

// None reports that no column is kept.
func (c Columns) None() bool { return !c.All && len(c.List) == 0 }
