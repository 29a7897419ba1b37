package workbook

import (
	"context"
	"errors"
	"fmt"
	"slices"
	"strings"

	"halfwidth/workbook/calculation"
	"halfwidth/workbook/ooxml"
)

// Book is an open workbook file as a source of samples.
type Book struct {
	*ooxml.Book
	places  []calculation.Place
	folders folders

	noFormulas map[int]bool // sheets that were read whole and hold no formula
	protected  map[int]bool // sheets that were read whole and are protected
}

var _ calculation.Source = (*Book)(nil)

// openBook opens a workbook; other files that its expressions name are looked
// for in the folders.
func openBook(path string, limits ooxml.Limits, in folders) (*Book, error) {
	file, err := ooxml.Open(path, limits)
	if err != nil {
		return nil, err
	}
	b := &Book{Book: file, folders: in, noFormulas: map[int]bool{}, protected: map[int]bool{}}
	b.findPlaces()
	return b, nil
}

// Close closes the workbook and those beside it that expressions named.
func (b *Book) Close() error {
	b.folders.close()
	return b.Book.Close()
}

// findPlaces lists sheets, tables and defined names, but for those that programs
// keep for themselves.
func (b *Book) findPlaces() {
	sheets := b.Sheets()
	for _, s := range sheets {
		kind := calculation.Sheet
		if s.Kind != ooxml.Worksheet {
			kind = calculation.OtherSheet
		}
		b.places = append(b.places, calculation.Place{Kind: kind, Name: s.Name, Sheet: s.Name})
	}
	for _, t := range b.Tables() {
		b.places = append(b.places, calculation.Place{Kind: calculation.Table, Name: t.Name, Sheet: sheets[t.Sheet].Name,
			FirstRow: t.Range.FirstRow, LastRow: t.Range.LastRow, FirstCol: t.Range.FirstCol, LastCol: t.Range.LastCol,
			HeaderRows: t.HeaderRows, TotalsRows: t.TotalsRows})
	}
	for _, n := range b.DefinedNames() {
		if n.Hidden || strings.HasPrefix(strings.ToLower(n.Name), builtInName) {
			continue
		}
		p := calculation.Place{Kind: calculation.DefinedName, Name: n.Name}
		if n.Sheet >= 0 {
			p.Only = sheets[n.Sheet].Name
		}
		sheet, r, ok := reference(n.Ref)
		if at := b.SheetIndex(sheet); ok && at >= 0 && sheets[at].Kind == ooxml.Worksheet {
			p.Sheet, p.FirstRow, p.LastRow, p.FirstCol, p.LastCol = sheets[at].Name, r.FirstRow, r.LastRow, r.FirstCol, r.LastCol
		} else {
			p.NoRange = n.Ref
		}
		b.places = append(b.places, p)
	}
}

// builtInName starts the names that programs give to print areas and the like
// (ECMA-376 part 1, 18.2.5).
const builtInName = "_xlnm."

// reference reads Trips!$C$2:$C$61, 'Night shift'!C:D or Trips!2:61.
func reference(text string) (sheet string, r ooxml.Range, ok bool) {
	mark := strings.LastIndexByte(text, '!')
	if mark < 0 {
		return "", r, false
	}
	sheet = text[:mark]
	if strings.HasPrefix(sheet, "'") && strings.HasSuffix(sheet, "'") && len(sheet) > 1 {
		sheet = strings.ReplaceAll(sheet[1:len(sheet)-1], "''", "'")
	}
	r, ok = anyRange(text[mark+1:])
	return sheet, r, ok
}

// Places lists sheets, tables and defined names.
func (b *Book) Places() []calculation.Place { return b.places }

// RecalculatesLate reports that saved formula values may be old.
func (b *Book) RecalculatesLate() bool {
	c := b.Calculation()
	return c.Manual || c.OnLoad
}

// Beside opens a file named in an expression.
func (b *Book) Beside(file string, options calculation.FileOptions) (calculation.Source, error) {
	return b.folders.open(file, options)
}

// The ends of a scan before the end of its sheet.
var (
	errEnough     = errors.New("nothing more is wanted")
	errOutOfOrder = errors.New("a row of the head comes late")
)

// Read reads one sheet in one pass; see calculation.Source. Where a file has
// rows of the head after others, which no known program writes, a second pass
// keeps all columns.
func (b *Book) Read(ctx context.Context, sheet string, choose func(*calculation.Frame) calculation.Columns) (*calculation.Frame, error) {
	at := b.SheetIndex(sheet)
	if at < 0 {
		return nil, fmt.Errorf("there is no sheet %q", sheet)
	}
	frame, err := b.scan(ctx, at, choose, false)
	if errors.Is(err, errOutOfOrder) {
		frame, err = b.scan(ctx, at, choose, true)
	}
	return frame, err
}

// The class that a scan gives to texts that start like a total.
const totalClass = 1

func (b *Book) scan(ctx context.Context, sheet int, choose func(*calculation.Frame) calculation.Columns, whole bool) (*calculation.Frame, error) {
	r := &reader{book: b, frame: calculation.NewFrame(), columns: ooxml.AllColumns(), choose: choose, whole: whole}
	facts, err := b.Scan(sheet, ooxml.ScanOptions{
		Columns: r.columns,
		Classify: func(text []byte) uint8 {
			if calculation.StartsLikeTotal(string(text)) {
				return totalClass
			}
			return 0
		},
	}, func(row *ooxml.Row) error {
		if r.rows++; r.rows%4096 == 0 && ctx.Err() != nil {
			return ctx.Err()
		}
		return r.add(row)
	})
	if err != nil && !errors.Is(err, errEnough) {
		return nil, err
	}
	if !r.chosen {
		r.keep()
	}
	if err == nil {
		b.noFormulas[sheet] = facts.Formulas == 0
		b.protected[sheet] = facts.Protected
	}
	if e := r.cover(facts); e != nil {
		s := b.Sheets()[sheet]
		e.File, e.Part, e.Sheet = b.Name(), s.Part, s.Name
		return nil, e
	}
	return r.frame, nil
}

// reader fills a frame from the rows of a scan.
type reader struct {
	book    *Book
	frame   *calculation.Frame
	columns *ooxml.Columns
	choose  func(*calculation.Frame) calculation.Columns
	whole   bool // choose at the end of the sheet only
	chosen  bool
	rows    int
	texts   []uint32 // the frame's number + 1 of each shared string
	formats []calculation.CellKind
}

// keep asks which columns to keep and tells frame and scan.
func (r *reader) keep() (none bool) {
	r.chosen = true
	c := r.choose(r.frame)
	r.frame.Keep(c)
	if !c.All {
		r.columns.Clear()
		for _, col := range c.List {
			r.columns.Add(col)
		}
	}
	return c.None()
}

func (r *reader) add(row *ooxml.Row) error {
	if row.Number > calculation.HeadRows && !r.chosen && !r.whole {
		// The cells of this row were gathered for all columns; the frame drops
		// what it does not keep.
		if r.keep() {
			return errEnough
		}
	}
	if row.Number <= calculation.HeadRows && r.chosen {
		return errOutOfOrder
	}
	var flags calculation.RowFlags
	if row.Filled {
		flags |= calculation.RowFilled
	}
	if row.Hidden {
		flags |= calculation.RowHidden
	}
	if row.Class&totalClass != 0 {
		flags |= calculation.RowTotal
	}
	r.frame.SetRow(row.Number, flags)
	for i := range row.Cells {
		if err := r.cell(row.Number, &row.Cells[i]); err != nil {
			return err
		}
	}
	return nil
}

func (r *reader) cell(row int, cell *ooxml.Cell) error {
	column := r.frame.Column(int(cell.Col))
	if column == nil {
		return nil
	}
	switch cell.Type {
	case ooxml.TypeNumber, ooxml.TypeDate, ooxml.TypeTime:
		if cell.Saved {
			kind, x := r.kind(cell), cell.Number
			if kind == calculation.Date && r.book.Date1904() {
				x += days1904
			}
			column.SetNumber(row, kind, x)
		}
	case ooxml.TypeShared:
		id, err := r.shared(int(cell.Index))
		if err != nil {
			return err
		}
		column.SetText(row, calculation.Text, id)
	case ooxml.TypeInline, ooxml.TypeString:
		if cell.Saved {
			column.SetText(row, calculation.Text, r.frame.InternBytes(cell.Text))
		}
	case ooxml.TypeBool:
		column.SetBool(row, cell.Number != 0)
	case ooxml.TypeError:
		column.SetText(row, calculation.Error, r.frame.InternBytes(cell.Text))
	}
	if cell.Formula {
		flags := calculation.IsFormula
		if !cell.Saved {
			flags |= calculation.IsUnsaved
		}
		column.Flag(row, flags)
	}
	return nil
}

// days1904 is the serial number, in the 1900 system, of the day from which the
// 1904 system counts (ECMA-376 part 1, 18.17.4.1).
const days1904 = 1462

// kind is the kind of a number by the format of its cell.
func (r *reader) kind(cell *ooxml.Cell) calculation.CellKind {
	if cell.Type == ooxml.TypeTime {
		return calculation.Duration
	}
	kind := r.formatKind(int(cell.Style))
	if cell.Type == ooxml.TypeDate && kind == calculation.Number {
		return calculation.Date
	}
	return kind
}

// formatKind is the kind of the numbers that a style shows.
func (r *reader) formatKind(style int) calculation.CellKind {
	if style < len(r.formats) && r.formats[style] != calculation.Blank {
		return r.formats[style]
	}
	kind := calculation.Number
	switch r.book.Format(style) {
	case ooxml.FormatDate:
		kind = calculation.Date
	case ooxml.FormatTime, ooxml.FormatElapsed:
		kind = calculation.Duration
	}
	if style >= 0 && style < 1<<16 {
		for len(r.formats) <= style {
			r.formats = append(r.formats, calculation.Blank)
		}
		r.formats[style] = kind
	}
	return kind
}

// shared gives the frame's number of a shared string.
func (r *reader) shared(index int) (uint32, error) {
	if index < len(r.texts) && r.texts[index] != 0 {
		return r.texts[index] - 1, nil
	}
	text, err := r.book.SharedString(index)
	if err != nil {
		return 0, err
	}
	for len(r.texts) <= index {
		r.texts = append(r.texts, 0)
	}
	id := r.frame.Intern(text)
	r.texts[index] = id + 1
	return id, nil
}

// cover marks the cells of merged ranges but their first, and the cells that an
// array formula or a data table fills.
func (r *reader) cover(facts ooxml.SheetFacts) *ooxml.Error {
	columns := r.kept()
	left := mostCovered
	// each visits the kept cells of a range, down to the last filled row.
	each := func(area ooxml.Range, visit func(row, col int, column *calculation.Column)) *ooxml.Error {
		last := min(area.LastRow, r.frame.LastRow())
		from, _ := slices.BinarySearch(columns, area.FirstCol)
		for _, col := range columns[from:] {
			if col > area.LastCol || last < area.FirstRow {
				break
			}
			if left -= last - area.FirstRow + 1; left < 0 {
				return &ooxml.Error{Kind: ooxml.ErrLimit, Cell: area.String(), Reason: fmt.Sprintf("merged ranges and array formulas overlap, or take up more than %d cells", mostCovered),
					Advice: "unmerge the ranges"}
			}
			column := r.frame.Column(col)
			for row := area.FirstRow; row <= last; row++ {
				visit(row, col, column)
			}
		}
		return nil
	}
	for m := range facts.Merged.All() {
		err := each(m, func(row, col int, column *calculation.Column) {
			if row != m.FirstRow || col != m.FirstCol {
				column.Cover(row)
			}
		})
		if err != nil {
			return err
		}
	}
	for _, a := range facts.Arrays {
		err := each(a, func(row, col int, column *calculation.Column) {
			switch cell := column.At(row); {
			case cell.Formula || cell.Covered:
			case cell.Kind == calculation.Blank:
				column.Flag(row, calculation.IsFormula|calculation.IsUnsaved)
			default:
				column.Flag(row, calculation.IsFormula)
			}
		})
		if err != nil {
			return err
		}
	}
	return nil
}

// mostCovered is how many cells merged ranges and array formulas may take up in
// the columns that are read: a whole column sixteen times. Ranges that do not
// overlap reach it in no sheet that people make.
const mostCovered = 16 << 20

// kept lists the columns that are kept, up to the last in which a value stands.
func (r *reader) kept() []int {
	var list []int
	for col := 1; col <= r.frame.LastCol(); col++ {
		if r.columns.Has(col) {
			list = append(list, col)
		}
	}
	return list
}

func (b *Book) source() calculation.Source { return b }

// noSheet says what to do about a workbook without a calculation sheet.
func (b *Book) noSheet() string {
	var sheets []string
	for _, p := range b.places {
		if p.Kind == calculation.Sheet {
			sheets = append(sheets, p.Name)
		}
	}
	return fmt.Sprintf("Sheets are %s. Name one \"Calculations\", or put \"calculation sheet\" in its A1.", strings.Join(sheets, ", "))
}
