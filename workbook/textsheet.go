package workbook

import (
	"fmt"
	"io"
	"os"
	"path/filepath"

	"halfwidth/workbook/calculation"
	"halfwidth/workbook/ooxml"
)

// textSheet is an open text calculation sheet.
type textSheet struct {
	*calculation.TextSheet
	file    *ooxml.File
	folders folders
	marked  bool // it is a calculation sheet by its name or its first cell
}

// openTextSheet opens a text calculation sheet; files that its expressions name
// are looked for in the folders.
func openTextSheet(path string, limits ooxml.Limits, in folders) (*textSheet, error) {
	file, err := ooxml.OpenFile(path)
	if err != nil {
		return nil, err
	}
	t := &textSheet{file: file, folders: in}
	t.TextSheet, err = readTextSheet(file.File, limits)
	if err != nil {
		file.Close()
		return nil, err
	}
	t.marked = IsTextSheet(path) || t.Marked()
	return t, nil
}

func readTextSheet(file *os.File, limits ooxml.Limits) (*calculation.TextSheet, error) {
	most := limits.WithDefaults().HeldBytes
	data, err := io.ReadAll(io.LimitReader(file, most+1))
	if err != nil {
		return nil, fmt.Errorf("%s cannot be read: %w", file.Name(), err)
	}
	if int64(len(data)) > most {
		return nil, fmt.Errorf("%s has more than %d bytes, the limit of a text calculation sheet; keep the data in a file of its own", file.Name(), most)
	}
	sheet, err := calculation.ParseTextSheet(filepath.Base(file.Name()), data)
	if err != nil {
		return nil, fmt.Errorf("%s %w", file.Name(), err)
	}
	return sheet, nil
}

func (t *textSheet) Close() error {
	t.folders.close()
	return t.file.Close()
}

func (t *textSheet) source() calculation.Source {
	s := t.Source(t.folders.open)
	if !t.marked {
		return unmarked{s}
	}
	return s
}

// unmarked is the source of a text file that is no calculation sheet.
type unmarked struct{ calculation.Source }

func (unmarked) Places() []calculation.Place { return nil }

func (t *textSheet) planOptions() calculation.Options {
	return calculation.Options{NoTables: calculation.NoTablesInText}
}

func (t *textSheet) notes(*calculation.Plan) []string { return nil }

func (t *textSheet) mayFillInPlace() error { return notLocked(t.file.Name()) }

func (t *textSheet) noSheet() string {
	name, end := splitName(filepath.Base(t.file.Name()))
	return fmt.Sprintf("Name it %s.calculations%s, or put \"calculation sheet\" in its first cell.", name, end)
}

// textChanges are the cells of a text sheet that do not hold what was worked out.
type textChanges struct {
	sheet *textSheet
	all   []wanted // the cells that were looked at
	edits []calculation.Edit
}

func (t *textSheet) changes(results *calculation.Results) (changes, error) {
	c := &textChanges{sheet: t, all: wantedByRows(results)}
	for _, w := range c.all {
		if !t.Holds(w.edit()) {
			c.edits = append(c.edits, w.edit())
		}
	}
	return c, nil
}

func (c *textChanges) compared() int { return len(c.all) }

func (c *textChanges) differences() ([]Difference, error) {
	return c.differencesIn(c.sheet.TextSheet), nil
}

// differencesIn gives the cells of a sheet of the same layout that do not hold
// what was worked out.
func (c *textChanges) differencesIn(sheet *calculation.TextSheet) []Difference {
	var list []Difference
	for _, w := range c.all {
		if sheet.Holds(w.edit()) {
			continue
		}
		stored := sheet.Value(w.cell.ref)
		if _, isText := w.value.(string); isText && stored != nil {
			stored = sheet.CellText(w.cell.ref) // a fingerprint may read as a number
		}
		list = append(list, w.difference(stored))
	}
	explain(c.all, list)
	return list
}

func (c *textChanges) save(w io.Writer) error {
	_, err := w.Write(c.sheet.Apply(c.edits))
	return err
}

func (c *textChanges) saveAs(target string, last ...func() error) (ooxml.Saved, error) {
	if err := c.sheet.file.SaveAs(target, c.save, last...); err != nil {
		return ooxml.Saved{}, err
	}
	return ooxml.Saved{Path: target, Cells: len(c.edits)}, nil
}

func (c *textChanges) saveInPlace() (ooxml.Saved, error) {
	if len(c.edits) == 0 {
		return ooxml.Saved{}, nil
	}
	path, err := c.sheet.file.SaveInPlace(c.save)
	if err != nil {
		return ooxml.Saved{}, err
	}
	return ooxml.Saved{Path: path, Cells: len(c.edits)}, nil
}

// mayReplace refuses to write over an output in which something would be lost.
// A text file bears no seal, so the output itself must show it: outside the
// result cells it reads as the sheet does, and each result cell that would
// change is empty, or its row's fingerprint shows that the inputs changed since.
func (c *textChanges) mayReplace(target string) error {
	file, err := openOutput(target)
	if file == nil {
		return err
	}
	defer file.Close()
	there, err := readTextSheet(file, ooxml.Limits{})
	if err != nil {
		return errChangedOutput(target)
	}
	if at, differs := c.differsElsewhere(there); differs {
		return fmt.Errorf("%s is there and reads otherwise in %s, outside the result columns: the questions or the output were changed since it was filled; "+
			"use --replace to write over it, or --output to write elsewhere", target, at)
	}
	for _, d := range c.differencesIn(there) {
		if !d.Reason.older() {
			return fmt.Errorf("%w (%s: %s)", errChangedOutput(target), d.Cell, d.Reason)
		}
	}
	return nil
}

// differsElsewhere gives the first cell outside the result cells in which a
// sheet reads otherwise than this one.
func (c *textChanges) differsElsewhere(there *calculation.TextSheet) (calculation.CellRef, bool) {
	results := map[calculation.CellRef]bool{}
	for _, w := range c.all {
		results[w.cell.ref] = true
	}
	rows, columns := c.sheet.Dimensions()
	rowsThere, columnsThere := there.Dimensions()
	for row := 1; row <= max(rows, rowsThere); row++ {
		for col := 1; col <= max(columns, columnsThere); col++ {
			at := calculation.CellRef{Row: row, Col: col}
			if !results[at] && c.sheet.CellText(at) != there.CellText(at) {
				return at, true
			}
		}
	}
	return calculation.CellRef{}, false
}
