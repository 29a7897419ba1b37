package ooxml

import (
	"bytes"
	"fmt"
	"io"
	"io/fs"
	"strings"
	"sync"
	"unicode"
)

// Book is an open workbook. Its methods may be called from several goroutines
// at once, except Close and SaveInPlace.
type Book struct {
	file string // the name it was opened by
	disk *File  // nil for a book that is not a file
	src  io.ReaderAt
	*container

	workbook   int // the entry of the workbook part
	sheets     []Sheet
	byName     map[string]int // sheets by foldName
	entries    []int          // of the sheets
	names      []DefinedName
	tables     []Table
	date1904   bool
	mode       Calculation
	locked     bool
	signed     bool
	chain      bool
	formats    []Format
	hasStyles  bool
	stringPart int // the entry of the shared strings, or -1

	stringsOnce sync.Once
	strings     *stringTable
	stringsErr  error

	knowing sync.Mutex
	known   map[int]*knownSheet // by sheet
	plans   map[int]*planner    // the last of each sheet
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
	f, err := OpenFile(path)
	if err != nil {
		return nil, err
	}
	b, err := OpenReaderAt(path, atOnce(f), f.Size(), limits)
	if err != nil {
		f.Close()
		return nil, err
	}
	b.disk = f
	return b, nil
}

// smallFile is the size up to which a file is read at once: many small reads
// cost more than they save.
const smallFile = 64 << 10

// atOnce reads a small file. Where that fails, the reads that follow say why.
func atOnce(f *File) io.ReaderAt {
	if f.Size() > smallFile {
		return f
	}
	data := make([]byte, f.Size())
	if n, _ := f.ReadAt(data, 0); n < len(data) {
		return f
	}
	return bytes.NewReader(data)
}

// OpenReaderAt opens a workbook held elsewhere than in a file; name stands for
// it in errors. Such a book cannot be saved in place.
func OpenReaderAt(name string, r io.ReaderAt, size int64, limits Limits) (*Book, error) {
	c, err := openContainer(r, size, limits.WithDefaults())
	if err != nil {
		return nil, place(err, name, "", "")
	}
	b := &Book{file: name, src: r, container: c, stringPart: -1, byName: make(map[string]int)}
	if err := b.readParts(); err != nil {
		return nil, place(err, name, "", "")
	}
	return b, nil
}

// readParts follows the relationships from the package to the workbook part and
// from there to the others.
func (b *Book) readParts() error {
	roots, err := b.relations("")
	if err != nil {
		return err
	}
	b.workbook = -1
	for _, r := range roots {
		switch {
		case r.kind == "origin" && r.target != "" || strings.HasPrefix(r.target, "_xmlsignatures/"):
			b.signed = true
		case r.isOffice && r.kind == "officeDocument":
			if err := b.only("the workbook", r.target, &b.workbook); err != nil {
				return err
			}
		}
	}
	if b.workbook < 0 {
		return b.noWorkbook()
	}
	part := b.name(b.workbook)
	if strings.HasSuffix(strings.ToLower(part), ".bin") {
		return &Error{Kind: ErrNotWorkbook, Part: part, Reason: "the workbook is in the binary form of the format", Advice: "open it in a spreadsheet program and save it as .xlsx or .xlsm"}
	}
	list, err := b.relations(part)
	if err != nil {
		return err
	}
	byID := make(map[string]relation, len(list))
	for _, r := range list {
		byID[r.id] = r
	}
	if err := b.readWorkbook(byID); err != nil {
		return err
	}
	styles := -1
	for _, r := range list {
		if !r.isOffice || r.target == "" {
			continue
		}
		switch r.kind {
		case "sharedStrings":
			err = b.only("the shared strings", r.target, &b.stringPart)
		case "styles":
			err = b.only("the styles", r.target, &styles)
		case "calcChain":
			b.chain = b.find(r.target) >= 0
		}
		if err != nil {
			return err
		}
	}
	if styles >= 0 {
		if err := b.readStyles(styles); err != nil {
			return err
		}
	}
	return b.readTables()
}

// only finds the part of a kind of which a book has one. Where two relationships
// lead to two, programs would differ in which they read.
func (b *Book) only(what, target string, entry *int) error {
	found := b.find(target)
	switch {
	case target == "" || found < 0:
		return missing(what, target)
	case *entry >= 0 && *entry != found:
		return damaged(fmt.Sprintf("the file has two parts for %s, %s and %s", what, b.name(*entry), b.name(found)))
	}
	*entry = found
	return nil
}

// noWorkbook says what a zip file is that leads to no workbook part.
func (b *Book) noWorkbook() error {
	e := &Error{Kind: ErrNotWorkbook, Reason: "the zip file holds no workbook", Advice: "name a workbook (.xlsx or .xlsm)"}
	switch {
	case b.find("mimetype") >= 0 && b.find("content.xml") >= 0:
		e.Reason, e.Advice = "the file is an OpenDocument file", "save it as .xlsx"
	case b.find("xl/workbook.xml") >= 0:
		e = missing("the workbook", "")
		e.Part = relationsPart("")
	}
	return e
}

// Close lets go of the file.
func (b *Book) Close() error {
	if b.disk == nil {
		return nil
	}
	err := b.disk.Close()
	b.disk = nil
	return err
}

// Name is the name or path that the book was opened by.
func (b *Book) Name() string { return b.file }

// Sheets lists the tabs in their order. The caller must not change the list.
func (b *Book) Sheets() []Sheet { return b.sheets }

// SheetIndex finds a sheet by its name, without regard to case; -1 if there is none.
func (b *Book) SheetIndex(name string) int {
	if i, ok := b.byName[foldName(name)]; ok {
		return i
	}
	return -1
}

// foldName gives names that strings.EqualFold holds equal the same form: of each
// set of characters that differ in case only the first.
func foldName(name string) string {
	return strings.Map(func(c rune) rune {
		least := c
		for other := unicode.SimpleFold(c); other != c; other = unicode.SimpleFold(other) {
			least = min(least, other)
		}
		return least
	}, name)
}

// Date1904 tells whether dates count from 1904-01-01 instead of 1899-12-31.
func (b *Book) Date1904() bool { return b.date1904 }

// Calculation says when the book's formulas are worked out.
func (b *Book) Calculation() Calculation { return b.mode }

// DefinedNames lists the names of the book and of its sheets, in file order.
// The caller must not change the list.
func (b *Book) DefinedNames() []DefinedName { return b.names }

// Tables lists the tables of all sheets, in the order of the sheets. The caller
// must not change the list.
func (b *Book) Tables() []Table { return b.tables }

// Signed tells whether the book carries a digital signature, which any change breaks.
func (b *Book) Signed() bool { return b.signed }

// StructureLocked tells whether the book is protected against added and removed sheets.
func (b *Book) StructureLocked() bool { return b.locked }

// HasCalculationChain tells whether the book lists cells with formulas. A book
// without the list may still have formulas; SheetFacts.Formulas counts them.
func (b *Book) HasCalculationChain() bool { return b.chain }

// sheetEntry gives the entry of a worksheet, or why there is none.
func (b *Book) sheetEntry(sheet int) (int, error) {
	if sheet < 0 || sheet >= len(b.sheets) {
		return 0, &Error{File: b.file, Kind: ErrEdit, Reason: fmt.Sprintf("there is no sheet number %d", sheet+1), Advice: fmt.Sprintf("the book has %d", len(b.sheets))}
	}
	if s := b.sheets[sheet]; s.Kind != Worksheet {
		return 0, &Error{File: b.file, Part: s.Part, Sheet: s.Name, Kind: ErrEdit, Reason: "the sheet is a chart, dialog or macro sheet, without a table of cells", Advice: "name a worksheet"}
	}
	return b.entries[sheet], nil
}

// plainCause is an error's text without the operation and path that this
// package names itself.
func plainCause(err error) string {
	if p, ok := err.(*fs.PathError); ok {
		return p.Err.Error()
	}
	return err.Error()
}
