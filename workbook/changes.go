package workbook

import (
	"bytes"
	"crypto/sha256"
	"errors"
	"fmt"
	"io"
	"io/fs"
	"maps"
	"os"
	"slices"
	"strings"
	"syscall"
	"unicode/utf8"

	"halfwidth/workbook/calculation"
	"halfwidth/workbook/ooxml"
)

// bookChanges are the cells of a workbook that do not hold what was worked out,
// and the table sheets that it lacks.
type bookChanges struct {
	book   *Book
	all    []wanted // the cells that were looked at
	absent []wanted // the table sheets that are not there
	ooxml.Changes
	rest bool // Recalculate is known
}

func (b *Book) changes(results *calculation.Results) (changes, error) {
	c := &bookChanges{book: b, all: wantedByRows(results), Changes: ooxml.Changes{Edits: map[int][]ooxml.Edit{}}}
	rows := map[*calculation.Row]*calculation.RowResult{}
	for _, row := range results.Rows {
		rows[row.Row] = row
	}
	for _, t := range results.Tables {
		if err := c.addTable(t, rows[t.Row]); err != nil {
			return nil, err
		}
	}
	for _, w := range c.all {
		sheet := b.SheetIndex(w.cell.sheet)
		c.Edits[sheet] = append(c.Edits[sheet], ooxml.Edit{Row: w.cell.ref.Row, Col: w.cell.ref.Col, Value: value(w.value)})
	}
	for sheet, edits := range c.Edits {
		changed, err := b.Changes(sheet, edits)
		if err != nil {
			return nil, err
		}
		c.Edits[sheet] = changed
	}
	return c, nil
}

// addTable adds a table sheet, or replaces the cells of one that a fill made.
func (c *bookChanges) addTable(t calculation.TableSheet, row *calculation.RowResult) error {
	at := c.book.SheetIndex(t.Name)
	if at < 0 {
		if t.Refused == "" {
			c.absent = append(c.absent, wanted{cell: cell{sheet: t.Name}, row: row, name: "table", value: fmt.Sprintf("%d rows", len(t.Rows))})
			c.Sheets = append(c.Sheets, newTable(t))
		}
		return nil
	}
	written := map[calculation.CellRef]bool{}
	add := func(ref calculation.CellRef, name string, v any) {
		written[ref] = true
		c.all = append(c.all, wanted{cell: cell{t.Name, ref}, row: row, name: name, line: ref.Row, value: v})
	}
	if t.Refused == "" {
		for j, name := range t.Header {
			add(calculation.CellRef{Row: 1, Col: j + 1}, "header", name)
		}
	}
	for i, line := range t.Rows {
		for j, v := range line {
			add(calculation.CellRef{Row: i + 2, Col: j + 1}, t.Header[j], v)
		}
	}
	_, err := c.book.Scan(at, ooxml.ScanOptions{}, func(row *ooxml.Row) error {
		for _, cell := range row.Cells {
			if ref := (calculation.CellRef{Row: row.Number, Col: int(cell.Col)}); !written[ref] {
				add(ref, "", nil)
			}
		}
		return nil
	})
	return err
}

// newTable is the sheet of a table, marked as one that a fill made.
func newTable(t calculation.TableSheet) ooxml.NewSheet {
	rows := [][]ooxml.Value{make([]ooxml.Value, len(t.Header))}
	for i, name := range t.Header {
		rows[0][i] = ooxml.TextValue(name)
	}
	for _, row := range t.Rows {
		line := make([]ooxml.Value, len(row))
		for i, v := range row {
			line[i] = value(v)
		}
		rows = append(rows, line)
	}
	mark := ooxml.DefinedName{Name: tableMark, Ref: "'" + strings.ReplaceAll(t.Name, "'", "''") + "'!$A$1", Hidden: true}
	return ooxml.NewSheet{Name: t.Name, Rows: rows, Names: []ooxml.DefinedName{mark}}
}

func (c *bookChanges) compared() int { return len(c.all) + len(c.absent) }

// differences reads what stands in the cells that change.
func (c *bookChanges) differences() ([]Difference, error) {
	at := map[cell]wanted{}
	for _, w := range c.all {
		at[w.cell] = w
	}
	var list []Difference
	for _, sheet := range slices.Sorted(maps.Keys(c.Edits)) {
		name := c.book.Sheets()[sheet].Name
		stored, err := c.book.stored(sheet, c.Edits[sheet])
		if err != nil {
			return nil, err
		}
		for _, e := range c.Edits[sheet] {
			ref := calculation.CellRef{Row: e.Row, Col: e.Col}
			w := at[cell{name, ref}]
			list = append(list, w.difference(stored[ref]))
		}
	}
	for _, w := range c.absent {
		list = append(list, w.difference(nil))
	}
	explain(slices.Concat(c.all, c.absent), list)
	return list, nil
}

// stored reads the cells of a sheet that edits change.
func (b *Book) stored(sheet int, edits []ooxml.Edit) (map[calculation.CellRef]any, error) {
	columns := &ooxml.Columns{}
	for _, e := range edits {
		columns.Add(e.Col)
	}
	list := map[calculation.CellRef]any{}
	_, err := b.Scan(sheet, ooxml.ScanOptions{Columns: columns}, func(row *ooxml.Row) error {
		for i := range row.Cells {
			c := &row.Cells[i]
			var v any
			switch c.Type {
			case ooxml.TypeNumber, ooxml.TypeDate, ooxml.TypeTime:
				v = c.Number
			case ooxml.TypeBool:
				v = c.Number != 0
			default:
				text, err := b.CellText(c)
				if err != nil {
					return err
				}
				v = text
			}
			list[calculation.CellRef{Row: row.Number, Col: int(c.Col)}] = v
		}
		return nil
	})
	return list, err
}

// ready finds out whether formulas rest on the changes, before they are written.
func (c *bookChanges) ready() (err error) {
	if !c.rest {
		c.Recalculate, err = c.book.restOn(c.Edits)
		c.rest = err == nil
	}
	return err
}

func (c *bookChanges) saveAs(target string, last ...func() error) (ooxml.Saved, error) {
	if err := c.ready(); err != nil {
		return ooxml.Saved{}, err
	}
	return c.book.SaveAs(target, c.Changes, last...)
}

func (c *bookChanges) saveInPlace() (ooxml.Saved, error) {
	if err := c.ready(); err != nil {
		return ooxml.Saved{}, err
	}
	return c.book.SaveInPlace(c.Changes)
}

// value is a result as a cell holds it.
func value(v any) ooxml.Value {
	switch v := v.(type) {
	case float64:
		return ooxml.NumberValue(v)
	case int:
		return ooxml.NumberValue(float64(v))
	case bool:
		return ooxml.BoolValue(v)
	case string:
		return ooxml.TextValue(cut(v))
	}
	return ooxml.EmptyValue()
}

// longestText is how many characters of text a cell may hold, counted here in
// bytes to stay on the safe side.
const longestText = 32_000

func cut(text string) string {
	if len(text) <= longestText {
		return text
	}
	end := longestText
	for !utf8.RuneStart(text[end]) {
		end--
	}
	return text[:end] + " …"
}

// mayReplace refuses to write over an output that was changed since it was
// filled. It is as it was where its seal holds, or where it holds what would be
// written now.
func (c *bookChanges) mayReplace(target string) error {
	there, err := openOutput(target)
	if there == nil {
		return err
	}
	defer there.Close()
	if sealed, err := ooxml.Sealed(target); sealed || err != nil {
		return err
	}
	if err := c.ready(); err != nil {
		return err
	}
	old, now := sha256.New(), sha256.New()
	if _, err := io.Copy(old, there); err != nil {
		return err
	}
	if _, err := c.book.Write(now, c.Changes); err != nil {
		return err
	}
	if !bytes.Equal(old.Sum(nil), now.Sum(nil)) {
		return errChangedOutput(target)
	}
	return nil
}

// openOutput opens an output to see whether it was changed. It gives nil where
// there is none yet.
func openOutput(target string) (*os.File, error) {
	file, err := ooxml.OpenToRead(target)
	var cause *fs.PathError
	switch {
	case err == nil:
		if info, err := file.Stat(); err != nil || !info.Mode().IsRegular() {
			file.Close()
			return nil, fmt.Errorf("%s is there and is no file; use --output to write elsewhere", target)
		}
		return file, nil
	case errors.Is(err, fs.ErrNotExist):
		return nil, nil
	case errors.Is(err, syscall.ENAMETOOLONG):
		return nil, fmt.Errorf("the output's name is too long: %s; use --output to give it a shorter one", target)
	case errors.As(err, &cause):
		err = cause.Err
	}
	return nil, fmt.Errorf("%s is there and cannot be read to see whether it was changed since it was filled: %w; use --output to write elsewhere", target, err)
}

func errChangedOutput(target string) error {
	return fmt.Errorf("%s is there and was changed since it was filled, or was not made by a fill; use --replace to write over it, or --output to write elsewhere", target)
}
