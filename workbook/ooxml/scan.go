package ooxml

import "errors"

// CellType is the type of the value that a cell holds.
type CellType uint8

const (
	TypeNumber CellType = iota // Number
	TypeShared                 // text, by its index in the shared strings
	TypeInline                 // text, written in the cell
	TypeString                 // text that a formula gave
	TypeBool                   // Number is 1 or 0
	TypeError                  // Text is the error's code, such as #N/A
	TypeDate                   // a date written out in ISO 8601; Number is its serial number
	TypeTime                   // a time of day written out in ISO 8601; Number is its fraction of a day
)

// Cell is one cell of a row that is not blank.
type Cell struct {
	Number  float64
	Text    []byte // of TypeInline, TypeString and TypeError; kept until the callback returns
	Col     int32
	Style   int32 // for Book.Format
	Index   int32 // of TypeShared, for Book.SharedString
	Type    CellType
	Formula bool // the cell holds a formula
	Saved   bool // a value is stored; always true without a formula
}

// Row is one row of a sheet as Scan hands it out.
type Row struct {
	Number int
	Hidden bool
	Filled bool   // some cell of the row, wanted or not, holds a value or a formula without a saved value
	Class  uint8  // all classes of the texts in the row, wanted or not, joined by OR
	Cells  []Cell // the wanted cells that are not blank, in file order; kept until the callback returns
}

// Columns is a set of columns that a scan is to hand out. The zero Columns is
// the empty set.
type Columns struct {
	all  bool
	bits [maxColumns/64 + 1]uint64
}

// AllColumns is the set of all columns.
func AllColumns() *Columns { return &Columns{all: true} }

// SetAll makes it the set of all columns.
func (c *Columns) SetAll() { c.all = true }

// Clear makes it the empty set.
func (c *Columns) Clear() { *c = Columns{} }

// Add adds one column. Columns outside the format are passed over.
func (c *Columns) Add(col int) {
	if col >= 1 && col <= maxColumns {
		c.bits[col>>6] |= 1 << (col & 63)
	}
}

// Has tells whether the column is in the set.
func (c *Columns) Has(col int) bool {
	return c.all || col >= 1 && col <= maxColumns && c.bits[col>>6]&(1<<(col&63)) != 0
}

// ScanOptions say what a scan is to hand out.
type ScanOptions struct {
	// Columns are the columns whose cells are handed out; nil stands for all.
	// The callback may change the set, from the next row on. In the other
	// columns numbers are not decoded, so that they cost little.
	Columns *Columns
	// Classify sorts texts into up to 8 classes, one bit each. It is called
	// once for each shared string in use and once for each other text; Row.Class
	// is the OR over the row. It must not keep the text.
	Classify func(text []byte) uint8
	// Formula is called for each cell with a formula, before its row is handed
	// out. The text is empty for the followers of a shared formula. It must not
	// keep the text.
	Formula func(row, col int, text []byte)
}

// SheetFacts is what a scan learns of a sheet as a whole.
type SheetFacts struct {
	Rows       int     // rows that are filled
	LastRow    int     // the last filled row, 0 if there is none
	LastCol    int     // the last column with a value or a formula, 0 if there is none
	HiddenRows int     // filled rows that are hidden
	Formulas   int     // cells with a formula
	Merged     Ranges  // merged ranges
	Arrays     []Range // ranges that one array formula or data table fills
	AutoFilter *Range  // the filtered range, nil without one
	Protected  bool    // the sheet is protected
}

// Scan passes once over a worksheet and calls visit for each row that it
// holds, in the order of the file: rows and cells that the file gives out of
// order come out of order. A row or a cell given twice is refused. visit may be
// nil where only the facts are wanted.
//
// The whole part is read and checked, unless visit returns an error, which Scan
// returns as it is. The values of a scan that ends in an error must not be used.
func (b *Book) Scan(sheet int, options ScanOptions, visit func(*Row) error) (SheetFacts, error) {
	entry, err := b.sheetEntry(sheet)
	if err != nil {
		return SheetFacts{}, err
	}
	return b.scanEntry(sheet, entry, options, visit, nil)
}

func (b *Book) scanEntry(sheet, entry int, options ScanOptions, visit func(*Row) error, plan *planner) (SheetFacts, error) {
	name, part := b.sheets[sheet].Name, b.name(entry)
	r, err := b.open(entry)
	if err == nil {
		r, _, err = xmlReader(r)
	}
	if err != nil {
		return SheetFacts{}, place(err, b.file, part, name)
	}
	size := min(blockSize, b.zip.File[entry].UncompressedSize64+1)
	x := newLexer(r, int(size), b.limits)
	defer x.release()
	s := newScanner(x, options, visit)
	s.styles, s.date1904, s.table, s.plan = b.styleLimit(), b.date1904, b.sharedStrings, plan
	if err := s.run(); err != nil {
		var stopped visitError
		if errors.As(err, &stopped) {
			return s.facts, stopped.error
		}
		if errors.Is(err, errPlanned) {
			return plan.known.facts, nil
		}
		return s.facts, place(err, b.file, part, name)
	}
	b.learn(sheet, knownSheet{s.facts, !s.disordered})
	return s.facts, nil
}

// knownSheet is what a scan to the end found of a sheet, which the next need not
// look for again.
type knownSheet struct {
	facts   SheetFacts
	inOrder bool // every row has a greater number than the one before
}

func (b *Book) learn(sheet int, k knownSheet) {
	b.knowing.Lock()
	defer b.knowing.Unlock()
	if b.known == nil {
		b.known = map[int]*knownSheet{}
	}
	b.known[sheet] = &k
}

// whatIsKnown is nil where the sheet was not scanned to its end.
func (b *Book) whatIsKnown(sheet int) *knownSheet {
	b.knowing.Lock()
	defer b.knowing.Unlock()
	return b.known[sheet]
}

// visitError carries an error of the caller's own past the code that adds
// places to errors.
type visitError struct{ error }

// scanner reads one worksheet.
type scanner struct {
	*lexer
	options  ScanOptions
	visit    func(*Row) error
	facts    SheetFacts
	plan     *planner // learns where cells stand, for a splice; nil for a plain scan
	date1904 bool
	styles   int
	careful  bool // the fast paths are off

	disordered bool // a row has a smaller number than one before it

	// The shared strings, fetched when the first cell points to one.
	table   func() (*stringTable, error)
	strings *stringTable
	classes []uint16 // by index; see class

	row      Row
	known    bool     // the number of the row is known
	fast     bool     // its cells may be read by the fast path
	rowTag   tagAt    // where the row's start tag stands
	prefix   []byte   // of rows and cells, with its colon
	lastRow  int      // of the row before
	greatest int      // the greatest number of a row so far
	lastCol  int      // of the cell before
	rowsSeen []uint64 // one bit a row; grows as rows come
	colsSeen []uint32 // the stamp of the row that last held the column; grows likewise
	stamp    uint32
	texts    []byte // the texts of the row's cells
	scratch  []byte // the value of the current cell, decoded
	current  Cell   // the cell that the general path read last
}

func newScanner(x *lexer, options ScanOptions, visit func(*Row) error) *scanner {
	if options.Columns == nil {
		options.Columns = AllColumns()
	}
	return &scanner{lexer: x, options: options, visit: visit, styles: 1 << 30,
		rowsSeen: make([]uint64, 64), colsSeen: make([]uint32, 64)}
}

// run reads the part to its end.
func (s *scanner) run() error {
	for s.kind = tokenText; s.kind == tokenText; {
		if err := s.next(); err != nil {
			return err
		}
	}
	if !s.is("worksheet") {
		return s.wrong("the part holds a <%.40s>, not a worksheet", s.local)
	}
	seen := false
	err := s.children(func() error {
		switch {
		case s.space == spaceCompatibility:
			return s.alternative()
		case s.space != spaceMain:
			return nil
		}
		switch string(s.local) {
		case "row", "c":
			return s.stray()
		case "sheetData":
			if seen {
				return s.wrong("the sheet's cells are given in two places")
			}
			seen = true
			return s.sheetData()
		case "dimension":
			s.plan.dimension(s.lexer)
		case "cols":
			return s.columnStyles()
		case "mergeCells":
			return s.children(func() error { return s.mergedRange() })
		case "autoFilter":
			if r, ok := ParseRange(string(s.attr("ref"))); ok {
				s.facts.AutoFilter = &r
			}
		case "sheetProtection":
			s.facts.Protected = s.facts.Protected || s.flag("sheet")
		}
		return nil
	})
	if err != nil {
		return err
	}
	for s.kind != tokenEOF {
		if err := s.next(); err != nil {
			return err
		}
	}
	return nil
}

// alternative passes over contents to choose from, such as controls, and refuses
// those in which cells stand.
func (s *scanner) alternative() error {
	depth := s.depth()
	for s.kind != tokenEnd || s.depth() >= depth {
		if err := s.next(); err != nil {
			return err
		}
		if s.kind == tokenStart && (s.is("sheetData") || s.is("mergeCells")) {
			return s.wrong("the sheet's cells stand in contents to choose from (<AlternateContent>); open it in the program that wrote it, and save it as a plain workbook")
		}
	}
	return nil
}

func (s *scanner) mergedRange() error {
	if !s.is("mergeCell") {
		return nil
	}
	ref, err := s.attrText("ref")
	if err != nil {
		return err
	}
	r, ok := ParseRange(ref)
	if !ok {
		return s.wrong("a merged range is %.40q", ref)
	}
	s.facts.Merged.add(r)
	return nil
}

// columnStyle is the style that new cells take in some columns.
type columnStyle struct{ first, last, style int }

func (s *scanner) columnStyles() error {
	count := 0
	return s.children(func() error {
		if !s.is("col") {
			return nil
		}
		if count++; count > maxColumns {
			return s.wrong("the sheet describes more than %d columns", maxColumns)
		}
		if s.plan == nil {
			return nil
		}
		var c columnStyle
		for _, field := range [...]struct {
			name string
			to   *int
		}{{"min", &c.first}, {"max", &c.last}, {"style", &c.style}} {
			var err error
			if *field.to, err = s.number(field.name, 0); err != nil {
				return err
			}
		}
		s.plan.columns = append(s.plan.columns, c)
		return nil
	})
}
