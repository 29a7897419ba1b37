package workbook

import (
	"archive/zip"
	"bytes"
	"context"
	"encoding/binary"
	"errors"
	"io"
	"os"
	"path/filepath"
	"slices"
	"strings"
	"testing"

	"github.com/xuri/excelize/v2"

	"halfwidth/funcs"
	"halfwidth/workbook/ooxml"
)

const demo = "../testdata/workbooks/larkmoor.xlsx"

// rowsOf are the rows of a sheet, from A1.
type rowsOf [][]any

// makeBook writes a workbook; change may do more to it before it is saved.
func makeBook(t *testing.T, path string, sheets map[string]rowsOf, change func(*excelize.File)) {
	t.Helper()
	f := excelize.NewFile()
	defer f.Close()
	names := make([]string, 0, len(sheets))
	for name := range sheets {
		names = append(names, name)
	}
	slices.Sort(names)
	for _, name := range names {
		if _, err := f.NewSheet(name); err != nil {
			t.Fatal(err)
		}
		for i, row := range sheets[name] {
			if err := f.SetSheetRow(name, ooxml.CellName(i+1, 1), &row); err != nil {
				t.Fatal(err)
			}
		}
	}
	if err := f.DeleteSheet("Sheet1"); err != nil {
		t.Fatal(err)
	}
	if change != nil {
		change(f)
	}
	if err := f.SaveAs(path); err != nil {
		t.Fatal(err)
	}
}

var trips = rowsOf{{"depot", "minutes"}, {"North", 31.5}, {"North", 28.0}, {"Quay", 35.5}, {"Quay", 30.0}, {"North", 33.0}, {"Quay", 36.0}}

// twoSheets is a book with one calculation.
func twoSheets(header, row []any) map[string]rowsOf {
	return map[string]rowsOf{"Trips": trips, "Calculations": {header, row}}
}

var (
	meanHeader = []any{"work out", "sample", "> mean", "> status"}
	meanRow    = []any{"mean-interval", "minutes in Trips"}
)

// rewrite writes a book with one part changed, or kept as it is.
func rewrite(t *testing.T, from, to, part string, change func([]byte) []byte) {
	t.Helper()
	in, err := zip.OpenReader(from)
	if err != nil {
		t.Fatal(err)
	}
	defer in.Close()
	var buffer bytes.Buffer
	out := zip.NewWriter(&buffer)
	for _, f := range in.File {
		r, err := f.Open()
		if err != nil {
			t.Fatal(err)
		}
		data, err := io.ReadAll(r)
		if err != nil {
			t.Fatal(err)
		}
		if f.Name == part {
			data = change(data)
		}
		w, err := out.Create(f.Name)
		if err != nil {
			t.Fatal(err)
		}
		if _, err := w.Write(data); err != nil {
			t.Fatal(err)
		}
	}
	if err := out.Close(); err != nil {
		t.Fatal(err)
	}
	if err := os.WriteFile(to, buffer.Bytes(), 0o600); err != nil {
		t.Fatal(err)
	}
}

func TestADamagedBookIsRefusedByNameAndNothingIsWritten(t *testing.T) {
	const sheet = "xl/worksheets/sheet2.xml" // Trips
	inSheet := func(change func(string) string) func(t *testing.T, path string) {
		return func(t *testing.T, path string) {
			rewrite(t, demo, path, sheet, func(b []byte) []byte { return []byte(change(string(b))) })
		}
	}
	for _, c := range []struct {
		name   string
		damage func(t *testing.T, path string)
		kind   error
		want   []string
	}{
		{"the sheet is cut short", inSheet(func(s string) string { return s[:len(s)/2] }), ooxml.ErrDamaged, []string{sheet, "Trips"}},
		{"a string index out of range", inSheet(func(s string) string { return strings.Replace(s, `t="s"><v>9<`, `t="s"><v>99999<`, 1) }),
			ooxml.ErrDamaged, []string{"Trips", "99999"}},
		{"two cells of one address", inSheet(func(s string) string { return strings.Replace(s, `r="F9"`, `r="E9"`, 1) }), ooxml.ErrDamaged, []string{"Trips", "E9"}},
		{"a byte flipped in the packed part", func(t *testing.T, path string) {
			data, err := os.ReadFile(demo)
			if err != nil {
				t.Fatal(err)
			}
			at := bytes.Index(data, []byte(sheet)) + len(sheet) + 30000
			data[at] ^= 0x10
			if err := os.WriteFile(path, data, 0o600); err != nil {
				t.Fatal(err)
			}
		}, ooxml.ErrDamaged, []string{sheet}},
		{"a wrong checksum", func(t *testing.T, path string) {
			data, err := os.ReadFile(demo)
			if err != nil {
				t.Fatal(err)
			}
			// The checksum stands in the part's entry of the directory, 16 bytes after
			// its signature (APPNOTE.TXT 4.3.12); its name stands 46 bytes after.
			at := bytes.LastIndex(data, []byte(sheet)) - 46
			binary.LittleEndian.PutUint32(data[at+16:], 0xDEADBEEF)
			if err := os.WriteFile(path, data, 0o600); err != nil {
				t.Fatal(err)
			}
		}, ooxml.ErrDamaged, []string{sheet}},
	} {
		t.Run(c.name, func(t *testing.T) {
			dir := t.TempDir()
			path := filepath.Join(dir, "book.xlsx")
			c.damage(t, path)
			_, err := Fill(context.Background(), path, Options{})
			if !errors.Is(err, c.kind) {
				t.Fatalf("got %v, want %v", err, c.kind)
			}
			for _, w := range c.want {
				if !strings.Contains(err.Error(), w) {
					t.Errorf("%q does not name %s", err, w)
				}
			}
			if left, _ := os.ReadDir(dir); len(left) != 1 {
				t.Errorf("something was written: %v", left)
			}
		})
	}
}

func TestAnOutputThatWasChangedSinceIsNotWrittenOver(t *testing.T) {
	dir := t.TempDir()
	book, filled := filepath.Join(dir, "book.xlsx"), filepath.Join(dir, "book-filled.xlsx")
	makeBook(t, book, twoSheets(meanHeader, meanRow), nil)
	fill := func(o Options) error {
		_, err := Fill(context.Background(), book, o)
		return err
	}
	if err := fill(Options{}); err != nil {
		t.Fatal(err)
	}
	// The question changed: the older output is still as it was filled.
	makeBook(t, book, twoSheets(meanHeader, []any{"mean-interval", "minutes in Trips where depot = North"}), nil)
	if err := fill(Options{}); err != nil {
		t.Errorf("an untouched output: %v", err)
	}
	f, err := excelize.OpenFile(filled)
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	if err := f.SetCellValue("Trips", "D1", "a remark"); err != nil {
		t.Fatal(err)
	}
	if err := f.Save(); err != nil {
		t.Fatal(err)
	}
	before, err := os.ReadFile(filled)
	if err != nil {
		t.Fatal(err)
	}
	if err := fill(Options{}); err == nil || !strings.Contains(err.Error(), "--replace") {
		t.Errorf("got %v, want advice about --replace", err)
	}
	if after, _ := os.ReadFile(filled); !bytes.Equal(before, after) {
		t.Error("the changed output was written over")
	}
	if err := fill(Options{Replace: true}); err != nil {
		t.Error(err)
	}
}

func TestInPlaceIsRefusedBesideALockFile(t *testing.T) {
	dir := t.TempDir()
	book := filepath.Join(dir, "book.xlsx")
	makeBook(t, book, twoSheets(meanHeader, meanRow), nil)
	if err := os.WriteFile(filepath.Join(dir, "~$book.xlsx"), nil, 0o600); err != nil {
		t.Fatal(err)
	}
	if _, err := Fill(context.Background(), book, Options{InPlace: true}); err == nil || !strings.Contains(err.Error(), "close it there first") {
		t.Errorf("got %v", err)
	}
}

func TestAFormulaIsNeverWrittenOver(t *testing.T) {
	book := filepath.Join(t.TempDir(), "book.xlsx")
	makeBook(t, book, twoSheets([]any{"work out", "sample", "> mean", "> status", "> note"}, meanRow), func(f *excelize.File) {
		if err := f.SetCellFormula("Calculations", "C2", "SUM(1,2)"); err != nil {
			t.Fatal(err)
		}
	})
	report, err := Fill(context.Background(), book, Options{})
	if err != nil {
		t.Fatal(err)
	}
	if report.Counts()[funcs.StatusRefused] != 1 || !strings.Contains(report.Results.Rows[0].Note(), "C2") {
		t.Errorf("got %v: %s", report.Counts(), report.Results.Rows[0].Note())
	}
}

func TestFormulasThatRestOnResultsAreWorkedOutAgain(t *testing.T) {
	for _, c := range []struct {
		formula, sheet string
		want           bool
	}{
		{"Calculations!C2*2", "Trips", true},
		{"'Calculations'!$C$2+1", "Trips", true},
		{"C2*60", "Calculations", true},
		{"SUM(C1:C9)", "Calculations", true},
		{"SUM(C:C)", "Calculations", true},
		{"B2&A2", "Calculations", false},
		{"LOG10(B7)+AC2", "Calculations", false},
		{"SUM(B2:B7)", "Trips", false},
	} {
		book := filepath.Join(t.TempDir(), "book.xlsx")
		makeBook(t, book, twoSheets(meanHeader, meanRow), func(f *excelize.File) {
			if err := f.SetCellFormula(c.sheet, "H20", c.formula); err != nil {
				t.Fatal(err)
			}
		})
		report, err := Fill(context.Background(), book, Options{})
		if err != nil {
			t.Fatal(err)
		}
		if report.Saved.Recalculate != c.want {
			t.Errorf("%s on %s: recalculation asked for: %v", c.formula, c.sheet, report.Saved.Recalculate)
		}
	}
}

func TestATableSheetIsMadeMarkedAndReplaced(t *testing.T) {
	dir := t.TempDir()
	book, filled := filepath.Join(dir, "book.xlsx"), filepath.Join(dir, "book-filled.xlsx")
	question := func(condition string) map[string]rowsOf {
		return twoSheets([]any{"work out", "sample", "table sheet", "> status"}, []any{"mean-interval", "minutes in Trips" + condition + " for each depot", "By depot"})
	}
	makeBook(t, book, question(""), nil)
	if _, err := Fill(context.Background(), book, Options{}); err != nil {
		t.Fatal(err)
	}
	table := func() [][]string {
		f, err := excelize.OpenFile(filled)
		if err != nil {
			t.Fatal(err)
		}
		defer f.Close()
		rows, err := f.GetRows("By depot")
		if err != nil {
			t.Fatal(err)
		}
		return rows
	}
	if rows := table(); len(rows) != 3 || !slices.Contains(rows[1], "North") || !slices.Contains(rows[2], "Quay") {
		t.Errorf("the table holds %v", rows)
	}
	before, err := os.ReadFile(filled)
	if err != nil {
		t.Fatal(err)
	}
	if _, err := Fill(context.Background(), filled, Options{InPlace: true}); err != nil {
		t.Fatal(err)
	}
	if after, _ := os.ReadFile(filled); !bytes.Equal(before, after) {
		t.Error("filling again changed the bytes")
	}
	// A sheet of the user's own is never written over.
	makeBook(t, book, map[string]rowsOf{"Trips": trips, "By depot": {{"mine"}}, "Calculations": question("")["Calculations"]}, nil)
	report, err := Fill(context.Background(), book, Options{Replace: true})
	if err != nil {
		t.Fatal(err)
	}
	if report.Counts()[funcs.StatusRefused] != 1 {
		t.Errorf("got %v", report.Counts())
	}
}

func TestSamplesComeFromFilesBesideTheBookOnly(t *testing.T) {
	dir := t.TempDir()
	book := filepath.Join(dir, "team", "book.xlsx")
	if err := os.Mkdir(filepath.Join(dir, "team"), 0o700); err != nil {
		t.Fatal(err)
	}
	csv := []byte("depot;minutes\nNorth;31.5\nNorth;28\nNorth;33\n")
	for _, name := range []string{"team/trips.csv", "outside.csv"} {
		if err := os.WriteFile(filepath.Join(dir, name), csv, 0o600); err != nil {
			t.Fatal(err)
		}
	}
	makeBook(t, filepath.Join(dir, "team", "other.xlsx"), map[string]rowsOf{"Trips": trips}, nil)
	for _, c := range []struct {
		sample string
		data   []string
		status funcs.Status
		n      int
	}{
		{"minutes in trips.csv", nil, funcs.StatusCaution, 3}, // few values
		{"minutes in other.xlsx/Trips", nil, funcs.StatusOK, 6},
		{"minutes in ../outside.csv", nil, funcs.StatusRefused, 0},
		{"minutes in outside.csv", nil, funcs.StatusRefused, 0},
		{"minutes in outside.csv", []string{dir}, funcs.StatusCaution, 3},
	} {
		makeBook(t, book, twoSheets(meanHeader, []any{"mean-interval", c.sample}), nil)
		report, err := Fill(context.Background(), book, Options{Replace: true, Data: c.data})
		if err != nil {
			t.Fatal(err)
		}
		row := report.Results.Rows[0]
		if row.Status != c.status {
			t.Errorf("%s: %s: %s", c.sample, row.Status, row.Note())
			continue
		}
		if c.n > 0 {
			if n, _ := row.Outcome.Get("n"); n != c.n {
				t.Errorf("%s: n = %v, want %d", c.sample, n, c.n)
			}
		}
	}
}

func TestResultsDoNotDependOnTheNumberOfWorkers(t *testing.T) {
	var first []byte
	for _, workers := range []int{1, 2, 7} {
		out := filepath.Join(t.TempDir(), "out.xlsx")
		if _, err := Fill(context.Background(), demo, Options{Output: out, Workers: workers}); err != nil {
			t.Fatal(err)
		}
		data, err := os.ReadFile(out)
		if err != nil {
			t.Fatal(err)
		}
		if first == nil {
			first = data
		}
		if !bytes.Equal(first, data) {
			t.Errorf("with %d workers the bytes differ", workers)
		}
	}
}
