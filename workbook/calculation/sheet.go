package calculation

import (
	"slices"
	"strings"

	"halfwidth/funcs"
)

// calcSheet is a calculation sheet: its blocks, its defaults and what was found
// wrong with their layout.
type calcSheet struct {
	sheet    *sheet
	blocks   []*Block
	settings []setting
	found    []Diagnostic
	tables   []Place // the tables that lie on it
	results  map[CellRef]resultCell
}

// setting is a `default NAME` with the value right of it.
type setting struct {
	name  string
	cell  CellRef // of the value
	title CellRef // of the name
}

// resultCell says which result of which row a cell is for.
type resultCell struct {
	row  *Row
	name string
}

// Block is a header row of a calculation sheet with the rows below it.
type Block struct {
	Sheet             string
	Header            int // its row
	FirstCol, LastCol int
	LastRow           int             // the last row before the blank one; Header where there is none
	Function          *funcs.Function // of `work out: NAME`; nil where each row names its own
	Rows              []*Row
	Columns           []BlockColumn

	named   bool // the header reads `work out: NAME`
	work    int  // the column of `work out`
	calc    *calcSheet
	refused *fault // why none of it is worked out
}

// ColumnRole is what a column of a block is for.
type ColumnRole uint8

// The roles of columns.
const (
	OwnColumn    ColumnRole = iota // the user's, left alone
	WorkColumn                     // names the function, or a label under `work out: NAME`
	InputColumn                    // an input
	ResultColumn                   // a result
	LabelColumn                    // `label`
	TableColumn                    // `table sheet`
)

// BlockColumn is one column of a block.
type BlockColumn struct {
	Col   int
	Role  ColumnRole
	Name  string // of the input or the result
	Unit  string // the words in parentheses after the name
	Title string // the header cell's text
}

// column finds the first column of that role and name.
func (b *Block) column(role ColumnRole, name string) *BlockColumn {
	for i := range b.Columns {
		if c := &b.Columns[i]; c.Role == role && (name == "" || c.Name == name) {
			return c
		}
	}
	return nil
}

// gives reports whether the block has somewhere to put an answer.
func (b *Block) gives() bool {
	return b.column(ResultColumn, "") != nil || b.column(TableColumn, "") != nil
}

// resultColumns lists the columns that the block writes.
func (b *Block) resultColumns() []BlockColumn {
	return slices.DeleteFunc(slices.Clone(b.Columns), func(c BlockColumn) bool { return c.Role != ResultColumn })
}

// Row is one row of a block: one calculation.
type Row struct {
	Block    *Block
	Number   int // the row of the sheet
	Function *funcs.Function
	Label    string
	Inputs   []*Input // in the sheet's order, then the defaults that apply

	table    string // the name under `table sheet`
	faults   []Diagnostic
	cautions []Diagnostic
	closed   map[int]bool // result columns whose cell is never written
	needs    []resultCell // result cells of other rows that its inputs read
	each     *Input       // the one sample given `for each`, or nil
	order    int          // its place among all rows
}

// Sheet is the name of the calculation sheet.
func (r *Row) Sheet() string { return r.Block.Sheet }

// Input is an input of a row as the sheet gives it.
type Input struct {
	Name    string
	Written string  // the cell's text, or what it holds
	Cell    CellRef // where it is written: in the row, or at a default
	Default bool    // it comes from a `default NAME`

	// Range, Used, Skipped and Groups are there after Plan.Count.
	Range   string
	Used    int
	Skipped int
	Groups  []string

	term *term
}

// Diagnostic is a finding with its place on a calculation sheet.
type Diagnostic struct {
	funcs.Finding
	Sheet string
	Cell  CellRef
	Span  Span // within the cell's text; empty for the whole

	Instead []string // what may have been meant by the Span, the likeliest first
}

// find adds a finding about the layout of the sheet.
func (c *calcSheet) find(cell CellRef, severity funcs.Severity, code, message string) {
	c.found = append(c.found, Diagnostic{Sheet: c.sheet.name, Cell: cell,
		Finding: funcs.Finding{Code: code, Severity: severity, Message: message, Cells: []string{c.sheet.address(cell.Row, cell.Col)}}})
}

// at gives a cell of the sheet.
func (c *calcSheet) at(row, col int) Cell { return c.sheet.frame.At(row, col) }

// isFilled reports whether a cell holds anything.
func isFilled(c Cell) bool { return c.Kind != Blank || c.Unsaved }

// title splits a header cell's text into a name and the words in parentheses
// at its end.
func title(text string) (name, words string) {
	text = trim(text)
	if !strings.HasSuffix(text, ")") {
		return nameForm(text), ""
	}
	open := strings.LastIndex(text, "(")
	if open <= 0 {
		return nameForm(text), ""
	}
	return nameForm(text[:open]), trim(text[open+1 : len(text)-1])
}

// IsCalculationSheet reports whether a sheet is one by its name or its cell A1.
func IsCalculationSheet(name string, head *Frame) bool {
	return isCalculationSheet(name) || marksSheet(head.At(1, 1))
}

// isCalculationSheet reports whether a sheet is one by its name.
func isCalculationSheet(name string) bool {
	name = fold(name)
	return name == "calculations" || strings.HasPrefix(name, "calculations ")
}

// marksSheet reports whether a cell A1 makes its sheet a calculation sheet.
func marksSheet(a1 Cell) bool { return a1.Kind == Text && headerForm(a1.Text) == "calculation sheet" }
