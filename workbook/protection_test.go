package workbook

import (
	"context"
	"errors"
	"path/filepath"
	"strings"
	"testing"

	"github.com/xuri/excelize/v2"

	"halfwidth/funcs"
	"halfwidth/workbook/ooxml"
)

// tableQuestion writes a table sheet.
var tableQuestion = rowsOf{
	{"work out", "sample", "table sheet", "> status", "> note"},
	{"mean-interval", "minutes in Trips for each depot", "By depot"},
}

func TestASignedBookIsFilledIntoACopyOnly(t *testing.T) {
	dir := t.TempDir()
	plain, book := filepath.Join(dir, "plain.xlsx"), filepath.Join(dir, "book.xlsx")
	makeBook(t, plain, twoSheets(meanHeader, meanRow), nil)
	// The relationship to the origin of signatures (ECMA-376 part 2, 13.2).
	rewrite(t, plain, book, "_rels/.rels", func(b []byte) []byte {
		return []byte(strings.Replace(string(b), "</Relationships>", `<Relationship Id="rSig" Target="_xmlsignatures/origin.sigs" `+
			`Type="http://schemas.openxmlformats.org/package/2006/relationships/digital-signature/origin"/></Relationships>`, 1))
	})
	before := read(t, book)
	_, err := Fill(context.Background(), book, Options{InPlace: true})
	if !errors.Is(err, ooxml.ErrSigned) || !strings.Contains(err.Error(), "book.xlsx: the workbook is signed") || !strings.Contains(err.Error(), "leave out --in-place") {
		t.Errorf("in place: %v", err)
	}
	if read(t, book) != before {
		t.Error("the signed book was changed")
	}
	report := fill(t, book, Options{})
	if len(report.Notes) != 1 || !strings.Contains(report.Notes[0], "does not keep the signature") {
		t.Errorf("a copy: the notes are %q", report.Notes)
	}
	preview, err := Preview(context.Background(), book, Options{})
	if err != nil || len(preview.Notes) != 1 {
		t.Errorf("a preview: %v, the notes are %q", err, preview.Notes)
	}
}

func TestAProtectedSheetIsFilledAndStaysProtected(t *testing.T) {
	book := filepath.Join(t.TempDir(), "book.xlsx")
	makeBook(t, book, twoSheets(meanHeader, meanRow), func(f *excelize.File) {
		for _, sheet := range []string{"Calculations", "Trips"} {
			if err := f.ProtectSheet(sheet, &excelize.SheetProtectionOptions{Password: "parcel", AlgorithmName: "SHA-512"}); err != nil {
				t.Fatal(err)
			}
		}
	})
	report := fill(t, book, Options{})
	if len(report.Notes) != 1 || !strings.Contains(report.Notes[0], "The sheet Calculations is protected") {
		t.Errorf("the notes are %q", report.Notes)
	}
	element := func(path string) string {
		part := partOf(t, path, "Calculations")
		from := strings.Index(part, "<sheetProtection")
		return part[from : from+strings.Index(part[from:], ">")+1]
	}
	if was, is := element(book), element(report.Saved.Path); was != is || report.Counts()[funcs.StatusRefused] > 0 {
		t.Errorf("the protection was\n%s\nand is\n%s", was, is)
	}
	if list, _ := verify(t, report.Saved.Path); len(list) > 0 {
		t.Errorf("not filled: %q", list)
	}
}

// partOf gives the part of a sheet.
func partOf(t *testing.T, path, sheet string) (content string) {
	t.Helper()
	b, err := ooxml.Open(path, ooxml.Limits{})
	if err != nil {
		t.Fatal(err)
	}
	part := b.Sheets()[b.SheetIndex(sheet)].Part
	if err := b.Close(); err != nil {
		t.Fatal(err)
	}
	rewrite(t, path, filepath.Join(t.TempDir(), "copy.xlsx"), part, func(b []byte) []byte {
		content = string(b)
		return b
	})
	return content
}

func TestALockedStructureRefusesANewTableSheetOnly(t *testing.T) {
	lock := func(f *excelize.File) {
		if err := f.ProtectWorkbook(&excelize.WorkbookProtectionOptions{LockStructure: true}); err != nil {
			t.Fatal(err)
		}
	}
	dir := t.TempDir()
	book := filepath.Join(dir, "book.xlsx")
	makeBook(t, book, map[string]rowsOf{"Trips": trips, "Calculations": tableQuestion}, lock)
	row := fill(t, book, Options{}).Results.Rows[0]
	for _, w := range []string{"C2: the structure of the workbook is protected", "Take off that protection", "or empty the cell"} {
		if row.Status != funcs.StatusRefused || !strings.Contains(row.Note(), w) {
			t.Errorf("%s: the note %q does not say %q", row.Status, row.Note(), w)
		}
	}
	// A table sheet that is there is written anew.
	makeBook(t, book, map[string]rowsOf{"Trips": trips, "Calculations": tableQuestion}, nil)
	filled := fill(t, book, Options{Replace: true}).Saved.Path
	f, err := excelize.OpenFile(filled)
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	lock(f)
	if err := errors.Join(f.SetCellValue("Trips", "B2", 32.5), f.Save()); err != nil {
		t.Fatal(err)
	}
	report := fill(t, filled, Options{InPlace: true})
	if report.Counts()[funcs.StatusRefused] > 0 || report.Saved.Cells == 0 {
		t.Errorf("%v, %s", report.Saved, report.Results.Rows[0].Note())
	}
}

func TestWhatWasPutIntoATableSheetIsNotWrittenOver(t *testing.T) {
	for _, c := range []struct {
		name   string
		change func(*excelize.File) error
		want   string
	}{
		{"a formula", func(f *excelize.File) error { return f.SetCellFormula("By depot", "B9", "SUM(B2:B3)") },
			`C2: the sheet "By depot" holds a formula in B9, which is never written over. Delete the formula, or write another name.`},
		{"merged cells", func(f *excelize.File) error { return f.MergeCell("By depot", "A2", "B2") },
			`C2: the sheet "By depot" has merged cells in A2:B2. Unmerge them, or write another name.`},
	} {
		t.Run(c.name, func(t *testing.T) {
			book := filepath.Join(t.TempDir(), "book.xlsx")
			makeBook(t, book, map[string]rowsOf{"Trips": trips, "Calculations": tableQuestion}, nil)
			filled := fill(t, book, Options{}).Saved.Path
			f, err := excelize.OpenFile(filled)
			if err != nil {
				t.Fatal(err)
			}
			defer f.Close()
			if err := errors.Join(c.change(f), f.Save()); err != nil {
				t.Fatal(err)
			}
			table := partOf(t, filled, "By depot")
			row := fill(t, filled, Options{InPlace: true}).Results.Rows[0]
			if row.Status != funcs.StatusRefused || row.Note() != c.want {
				t.Errorf("%s: %s", row.Status, row.Note())
			}
			if partOf(t, filled, "By depot") != table {
				t.Error("the sheet was written over")
			}
		})
	}
}
