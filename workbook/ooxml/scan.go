package ooxml

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
	Merged     []Range // merged ranges
	Arrays     []Range // ranges that one array formula or data table fills
	AutoFilter *Range  // the filtered range, nil without one
	Protected  bool    // the sheet is protected
}

// Scan passes once over a worksheet and calls visit for each row that it
// holds, in the order of the file: rows and cells that the file gives out of
// order come out of order. A row or a cell given twice is refused.
//
// The whole part is read and checked, unless visit returns an error, which Scan
// returns as it is. The values of a scan that ends in an error must not be used.
func (b *Book) Scan(sheet int, options ScanOptions, visit func(*Row) error) (SheetFacts, error) {
	return SheetFacts{}, damaged("not read yet")
}
