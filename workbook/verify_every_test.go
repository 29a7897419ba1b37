package workbook

import (
	"bytes"
	"context"
	"os"
	"path/filepath"
	"testing"

	"halfwidth/workbook/calculation"
	"halfwidth/workbook/ooxml"
)

// compared opens a filled file and gives the cells that verify looks at.
func compared(t *testing.T, path string) (document, changes) {
	t.Helper()
	d, plan, err := open(context.Background(), path, Options{})
	if err != nil {
		t.Fatal(err)
	}
	t.Cleanup(func() { d.Close() })
	results, err := plan.Run(context.Background(), 1)
	if err != nil {
		t.Fatal(err)
	}
	c, err := d.changes(results)
	if err != nil {
		t.Fatal(err)
	}
	return d, c
}

// onlyDifference checks that verify lists one cell and no other.
func onlyDifference(t *testing.T, path string, w wanted, stored any) {
	t.Helper()
	list, report := verify(t, path)
	if len(list) != 1 {
		t.Fatalf("%v (%s) holds %v: %d differences, %q", w.cell, w.name, stored, len(list), list)
	}
	d := report.Verification.Differences[0]
	if d.Sheet != w.cell.sheet || d.Cell != w.cell.ref || d.Stored != stored {
		t.Errorf("%v holds %v, but %s!%s is said to hold %v", w.cell, stored, d.Sheet, d.Cell, d.Stored)
	}
}

func TestEveryResultOfABookThatIsTypedOverIsFound(t *testing.T) {
	dir := t.TempDir()
	book, changed := filepath.Join(dir, "book.xlsx"), filepath.Join(dir, "changed.xlsx")
	makeBook(t, book, map[string]rowsOf{"Trips": trips, "Calculations": verifyRows}, nil)
	filled := fill(t, book, Options{}).Saved.Path
	d, c := compared(t, filled)
	cells := c.(*bookChanges).all
	if len(cells) < 60 {
		t.Fatalf("%d cells are compared", len(cells))
	}
	for i, w := range cells {
		stored := any("typed")
		if i%2 == 0 {
			stored = 0.125
		}
		edit := ooxml.Edit{Row: w.cell.ref.Row, Col: w.cell.ref.Col, Value: value(stored)}
		b := d.(*Book)
		if _, err := b.SaveAs(changed, ooxml.Changes{Edits: map[int][]ooxml.Edit{b.SheetIndex(w.cell.sheet): {edit}}}); err != nil {
			t.Fatal(err)
		}
		onlyDifference(t, changed, w, stored)
	}
}

func TestEveryResultOfATextSheetThatIsTypedOverIsFound(t *testing.T) {
	dir := t.TempDir()
	write(t, filepath.Join(dir, "night.csv"), read(t, filepath.Join(filepath.Dir(textDemo), "night.csv")))
	book := write(t, filepath.Join(dir, "a.calculations.csv"), "work out,sample,> mean,> lower,> used,> fingerprint,> status,> note,own\n"+
		"mean-interval,minutes in night.csv where depot = Quay\nmean-interval,minutes in night.csv where depot = Fell,,,,,,,x\n")
	filled := fill(t, book, Options{}).Saved.Path
	d, c := compared(t, filled)
	whole, err := os.ReadFile(filled)
	if err != nil {
		t.Fatal(err)
	}
	for i, w := range c.(*textChanges).all {
		stored := any("typed, over")
		if _, isText := w.value.(string); i%2 == 0 && !isText {
			stored = 0.125
		}
		changed := d.(*textSheet).Apply([]calculation.Edit{{Cell: w.cell.ref, Value: stored}})
		if bytes.Equal(changed, whole) {
			t.Fatalf("%v did not change", w.cell)
		}
		onlyDifference(t, write(t, filepath.Join(dir, "b.calculations.csv"), string(changed)), w, stored)
	}
}
