package ooxml

import (
	"io"
)

// Book is an open workbook. Its methods may be called from several goroutines
// at once, except Close and SaveInPlace.
type Book struct {
}

// SheetState says whether a sheet's tab can be seen.
type SheetState uint8

const (
	Visible    SheetState = iota
	Hidden                // the user can show it
	VeryHidden            // only a program can show it
)

// SheetKind says what a tab holds. Only a Worksheet has cells to scan.
type SheetKind uint8

const (
	Worksheet SheetKind = iota
	ChartSheet
	DialogSheet
	MacroSheet
)

// Sheet is one tab of a book.
type Sheet struct {
	Name  string
	State SheetState
	Kind  SheetKind
	Part  string // its part inside the zip file
}

// DefinedName is a name for a formula, most often a range.
type DefinedName struct {
	Name   string
	Sheet  int    // the index of the only sheet it holds for, or -1 for the whole book
	Ref    string // the formula, such as Trips!$C$2:$C$61, without an equals sign
	Hidden bool
}

// Table is a table of a sheet.
type Table struct {
	Name       string
	Sheet      int // the sheet's index
	Range      Range
	HeaderRows int // 0 or 1
	TotalsRows int // 0 or more, at the end of Range
	Columns    []string
}

// Calculation says how the program that opens the book treats its formulas.
type Calculation struct {
	Manual bool // saved values may be older than the cells that they rest on
	OnLoad bool // the saved values are to be worked out again when the book is opened
}

// Open opens the workbook file. The caller closes it.
func Open(path string, limits Limits) (*Book, error) {
	return nil, damaged("not read yet")
}

// OpenReaderAt opens a workbook held elsewhere than in a file; name stands for
// it in errors. Such a book cannot be saved in place.
func OpenReaderAt(name string, r io.ReaderAt, size int64, limits Limits) (*Book, error) {
	return nil, damaged("not read yet")
}

// Close lets go of the file.
func (b *Book) Close() error { return nil }

// Name is the name or path that the book was opened by.
func (b *Book) Name() string { return "" }

// Sheets lists the tabs in their order. The caller must not change the list.
func (b *Book) Sheets() []Sheet { return nil }

// SheetIndex finds a sheet by its name, without regard to case; -1 if there is none.
func (b *Book) SheetIndex(name string) int { return -1 }

// Date1904 tells whether dates count from 1904-01-01 instead of 1899-12-31.
func (b *Book) Date1904() bool { return false }

// Calculation says when the book's formulas are worked out.
func (b *Book) Calculation() Calculation { return Calculation{} }

// DefinedNames lists the names of the book and of its sheets, in file order.
func (b *Book) DefinedNames() []DefinedName { return nil }

// Tables lists the tables of all sheets, in the order of the sheets.
func (b *Book) Tables() []Table { return nil }

// Signed tells whether the book carries a digital signature, which any change breaks.
func (b *Book) Signed() bool { return false }

// StructureLocked tells whether the book is protected against added and removed sheets.
func (b *Book) StructureLocked() bool { return false }

// HasCalculationChain tells whether the book lists cells with formulas. A book
// without the list may still have formulas; SheetFacts.Formulas counts them.
func (b *Book) HasCalculationChain() bool { return false }
