package calculation

import (
	"cmp"
	"math/bits"
	"slices"
	"strings"
	"unicode"
	"unicode/utf8"
)

// RowFlags is what is known of a row as a whole.
type RowFlags uint8

// The flags of a row.
const (
	RowFilled RowFlags = 1 << iota // some cell of the row, kept or not, has a value
	RowHidden                      // hidden or filtered away
	RowTotal                       // some cell of the row, kept or not, StartsLikeTotal
)

// CellFlags is what is known of a cell besides its value.
type CellFlags uint8

// The flags of a cell.
const (
	IsFormula CellFlags = 1 << iota // the value is what a formula last gave
	IsUnsaved                       // a formula of which no value is saved
	isCovered                       // set by Column.Cover
	isTrue                          // the value of a Bool
)

// Frame holds chosen columns of one sheet, column by column, so that a sheet
// of a million rows takes 9 bytes a number and 5 a text, and rows may arrive in
// any order. It is filled by one goroutine and may then be read by many.
type Frame struct {
	flags   []RowFlags // by row - 1
	columns []*Column  // by column - 1; nil where not kept or empty
	keep    []bool     // by column - 1; nil keeps all
	texts   []string
	ids     map[string]uint32
	compact int // how many texts there were when none was out of use
	lastRow int
	lastCol int
	widths  lineWidths  // of a text file
	lines   []lineWidth // of a text calculation sheet, by row - 1
}

// NewFrame gives an empty frame that keeps all columns.
func NewFrame() *Frame { return &Frame{ids: map[string]uint32{}} }

// SetRow joins flags to those of a row.
func (f *Frame) SetRow(row int, flags RowFlags) {
	if row > len(f.flags) {
		f.flags = growTo(f.flags, row)
	}
	f.flags[row-1] |= flags
	if flags&RowFilled != 0 && row > f.lastRow {
		f.lastRow = row
	}
}

// growTo lengthens s to n elements, with room for more.
func growTo[T any](s []T, n int) []T {
	if n <= cap(s) {
		return s[:n]
	}
	grown := make([]T, n, max(n, cap(s)+cap(s)/4, 64))
	copy(grown, s)
	return grown
}

// Row gives the flags of a row.
func (f *Frame) Row(row int) RowFlags {
	if row < 1 || row > len(f.flags) {
		return 0
	}
	return f.flags[row-1]
}

// LastRow is the last row that is filled, 0 if there is none.
func (f *Frame) LastRow() int { return f.lastRow }

// LastCol is the last column in which a value was set, 0 if there is none.
func (f *Frame) LastCol() int { return f.lastCol }

// chunkCost is what an empty chunk takes, in cells.
const chunkCost = 8

// Held is how many cells the frame keeps room for, the blanks between them
// included: one far from the others costs more than one beside them.
func (f *Frame) Held() int {
	held := 0
	for _, c := range f.columns {
		if c == nil {
			continue
		}
		held += chunkCost * len(c.chunks)
		for i := range c.chunks {
			held += len(c.chunks[i].kinds)
		}
	}
	return held
}

// HeldWith is at least what Held would be after changes.
func (f *Frame) HeldWith(changes []Change) int {
	held := f.Held()
	type place struct{ col, chunk int }
	seen := map[place]bool{}
	chunks := map[int]int{}
	var last place
	for _, c := range changes {
		at := place{c.At.Col, (c.At.Row - 1) >> chunkBits}
		if at == last || seen[at] {
			continue
		}
		seen[at], last = true, at
		column := f.column(at.col)
		have := 0
		if column != nil && at.chunk < len(column.chunks) {
			have = len(column.chunks[at.chunk].kinds)
		}
		held += chunkRows - have
		if most, known := chunks[at.col]; !known || at.chunk >= most {
			if !known && column != nil {
				most = len(column.chunks)
			}
			held += chunkCost * max(0, at.chunk+1-most)
			chunks[at.col] = max(most, at.chunk+1)
		}
	}
	return held
}

// Keep drops the columns that are not chosen; Column gives nil for them from
// then on.
func (f *Frame) Keep(c Columns) {
	if c.All {
		f.keep = nil
		return
	}
	f.keep = []bool{}
	for _, col := range c.List {
		if col > len(f.keep) {
			f.keep = growTo(f.keep, col)
		}
		f.keep[col-1] = true
	}
	for i := range f.columns {
		if !f.keeps(i + 1) {
			f.columns[i] = nil
		}
	}
}

func (f *Frame) keeps(col int) bool {
	return f.keep == nil || col >= 1 && col <= len(f.keep) && f.keep[col-1]
}

// Column gives a column to fill, nil where the column is not kept.
func (f *Frame) Column(col int) *Column {
	if !f.keeps(col) {
		return nil
	}
	if col > len(f.columns) {
		f.columns = growTo(f.columns, col)
	}
	c := f.columns[col-1]
	if c == nil {
		c = &Column{frame: f, col: col}
		f.columns[col-1] = c
	}
	return c
}

// column gives a column to read, nil where it holds nothing.
func (f *Frame) column(col int) *Column {
	if col < 1 || col > len(f.columns) {
		return nil
	}
	return f.columns[col-1]
}

// Intern gives the number that stands for a text within the frame.
func (f *Frame) Intern(text string) uint32 {
	if id, ok := f.ids[text]; ok {
		return id
	}
	id := uint32(len(f.texts))
	f.texts = append(f.texts, text)
	f.ids[text] = id
	return id
}

// InternBytes is Intern for bytes, which are copied where the text is new.
func (f *Frame) InternBytes(text []byte) uint32 {
	if id, ok := f.ids[string(text)]; ok {
		return id
	}
	return f.Intern(string(text))
}

// At gives a cell; a blank one where there is none or its column is not kept.
func (f *Frame) At(row, col int) Cell {
	if c := f.column(col); c != nil {
		return c.At(row)
	}
	return Cell{}
}

// Set puts a cell into the frame, with its row's flags; for small sheets.
func (f *Frame) Set(row, col int, cell Cell) {
	var flags RowFlags
	if cell.Kind != Blank || cell.Unsaved {
		flags |= RowFilled
	}
	if cell.Kind == Text && StartsLikeTotal(cell.Text) {
		flags |= RowTotal
	}
	f.SetRow(row, flags)
	c := f.Column(col)
	if c == nil {
		return
	}
	switch cell.Kind {
	case Number, Date, Duration:
		c.SetNumber(row, cell.Kind, cell.Number)
	case Bool:
		c.SetBool(row, cell.Number != 0)
	case Text, Error:
		c.SetText(row, cell.Kind, f.Intern(cell.Text))
	}
	if cell.Covered {
		c.Cover(row)
	}
	if cell.Formula {
		c.Flag(row, IsFormula)
	}
	if cell.Unsaved {
		c.Flag(row, IsFormula|IsUnsaved)
	}
}

// Column is one column of a Frame. It is kept in chunks, each of which holds
// numbers and text numbers only from where it needs them.
type Column struct {
	frame  *Frame
	col    int
	chunks []chunk
}

const (
	chunkBits = 12
	chunkRows = 1 << chunkBits
)

// chunk is chunkRows rows of a column. A kind byte has the CellKind in its low
// four bits and the CellFlags above.
type chunk struct {
	kinds   []uint8
	numbers []float64
	texts   []uint32
}

const kindMask = 15

// kindByte gives the place of a row's kind byte, making room for it.
func (c *Column) kindByte(row int) (*chunk, int) {
	at, i := (row-1)>>chunkBits, (row-1)&(chunkRows-1)
	if at >= len(c.chunks) {
		c.chunks = growTo(c.chunks, at+1)
	}
	k := &c.chunks[at]
	if i >= len(k.kinds) {
		k.kinds = extend(k.kinds, i, at > 0 && len(c.chunks[at-1].kinds) == chunkRows)
	}
	return k, i
}

// extend lengthens s so that element i exists: to the next power of two, or to a
// whole chunk where the one before is whole.
func extend[T any](s []T, i int, whole bool) []T {
	n := max(16, 1<<bits.Len(uint(i)))
	if whole {
		n = chunkRows
	}
	grown := make([]T, n)
	copy(grown, s)
	return grown
}

func (c *Column) value(row int) (*chunk, int) {
	c.frame.lastCol = max(c.frame.lastCol, c.col)
	return c.kindByte(row)
}

// SetNumber gives a cell a number of kind Number, Date or Duration.
func (c *Column) SetNumber(row int, kind CellKind, x float64) {
	k, i := c.value(row)
	if i >= len(k.numbers) {
		k.numbers = extend(k.numbers, i, len(k.kinds) == chunkRows)
	}
	k.kinds[i], k.numbers[i] = uint8(kind), x
}

// SetText gives a cell a text, or the code of an error, by its number.
func (c *Column) SetText(row int, kind CellKind, id uint32) {
	k, i := c.value(row)
	if i >= len(k.texts) {
		k.texts = extend(k.texts, i, len(k.kinds) == chunkRows)
	}
	k.kinds[i], k.texts[i] = uint8(kind), id
}

// SetBool gives a cell TRUE or FALSE.
func (c *Column) SetBool(row int, x bool) {
	k, i := c.value(row)
	k.kinds[i] = uint8(Bool)
	if x {
		k.kinds[i] |= uint8(isTrue) << 4
	}
}

// Flag joins flags to a cell, after its value.
func (c *Column) Flag(row int, flags CellFlags) {
	k, i := c.value(row)
	k.kinds[i] |= uint8(flags) << 4
}

// Cover marks a cell that lies inside a merged range but is not its first; a
// value that it may hold out of sight is dropped.
func (c *Column) Cover(row int) {
	k, i := c.kindByte(row)
	k.kinds[i] = k.kinds[i]&^kindMask | uint8(isCovered)<<4
}

// kind gives the kind byte of a row: kind and flags without the value.
func (c *Column) kind(row int) (CellKind, CellFlags) {
	at, i := (row-1)>>chunkBits, (row-1)&(chunkRows-1)
	if c == nil || row < 1 || at >= len(c.chunks) || i >= len(c.chunks[at].kinds) {
		return Blank, 0
	}
	b := c.chunks[at].kinds[i]
	return CellKind(b & kindMask), CellFlags(b >> 4)
}

// plainNumber gives the number of a row of kind Number without flags.
func (c *Column) plainNumber(row int) (float64, bool) {
	at, i := (row-1)>>chunkBits, (row-1)&(chunkRows-1)
	if c == nil || at >= len(c.chunks) {
		return 0, false
	}
	if k := &c.chunks[at]; i < len(k.kinds) && k.kinds[i] == uint8(Number) {
		return k.numbers[i], true
	}
	return 0, false
}

// number gives the number of a row whose kind has one.
func (c *Column) number(row int) float64 {
	return c.chunks[(row-1)>>chunkBits].numbers[(row-1)&(chunkRows-1)]
}

// text gives the text's number of a row whose kind is Text or Error.
func (c *Column) text(row int) uint32 {
	return c.chunks[(row-1)>>chunkBits].texts[(row-1)&(chunkRows-1)]
}

// findTexts gives the cells whose text is wanted, by rows, then columns. It
// goes through what is held, not through the whole rectangle of the sheet.
func (f *Frame) findTexts(wanted func(text string) bool) []CellRef {
	is := make([]bool, len(f.texts))
	for id, text := range f.texts {
		is[id] = wanted(text)
	}
	var out []CellRef
	for _, c := range f.columns {
		if c == nil {
			continue
		}
		for at := range c.chunks {
			k := &c.chunks[at]
			for i, b := range k.kinds {
				if CellKind(b&kindMask) == Text && is[k.texts[i]] {
					out = append(out, CellRef{at<<chunkBits + i + 1, c.col})
				}
			}
		}
	}
	slices.SortFunc(out, func(a, b CellRef) int { return cmp.Or(a.Row-b.Row, a.Col-b.Col) })
	return out
}

// lastHeld is a row that none of the columns holds anything below.
func (f *Frame) lastHeld(firstCol, lastCol int) int {
	last := 0
	for col := firstCol; col <= lastCol; col++ {
		if c := f.column(col); c != nil {
			last = max(last, len(c.chunks)<<chunkBits)
		}
	}
	return min(last, f.lastRow)
}

// At gives the cell of a row.
func (c *Column) At(row int) Cell {
	kind, flags := c.kind(row)
	cell := Cell{Kind: kind, Formula: flags&IsFormula != 0, Unsaved: flags&IsUnsaved != 0, Covered: flags&isCovered != 0}
	switch kind {
	case Number, Date, Duration:
		cell.Number = c.number(row)
	case Bool:
		if flags&isTrue != 0 {
			cell.Number = 1
		}
	case Text, Error:
		cell.Text = c.frame.texts[c.text(row)]
	}
	return cell
}

// StartsLikeTotal reports whether a text starts with total, subtotal, sum or
// average as a word, in any case and also in the plural.
func StartsLikeTotal(text string) bool {
	text = strings.TrimLeftFunc(text, unicode.IsSpace)
	for _, word := range [...]string{"total", "subtotal", "sub-total", "sum", "average"} {
		if len(text) < len(word) || !strings.EqualFold(text[:len(word)], word) {
			continue
		}
		rest := text[len(word):]
		if rest != "" && (rest[0] == 's' || rest[0] == 'S') {
			rest = rest[1:]
		}
		if r, _ := utf8.DecodeRuneInString(rest); rest == "" || !unicode.IsLetter(r) {
			return true
		}
	}
	return false
}
