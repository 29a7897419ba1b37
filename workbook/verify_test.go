package workbook

import (
	"context"
	"fmt"
	"os"
	"path/filepath"
	"slices"
	"strconv"
	"strings"
	"testing"

	"github.com/xuri/excelize/v2"
)

// verify lists the differences of a file as `cell result: reason`.
func verify(t *testing.T, path string) (list []string, report *Report) {
	t.Helper()
	before, err := os.ReadFile(path)
	if err != nil {
		t.Fatal(err)
	}
	report, err = Verify(context.Background(), path, Options{})
	if err != nil {
		t.Fatal(err)
	}
	if after, err := os.ReadFile(path); err != nil || string(after) != string(before) {
		t.Fatalf("verify changed the file (%v)", err)
	}
	for _, d := range report.Verification.Differences {
		list = append(list, fmt.Sprintf("%s!%s %s: %s", d.Sheet, d.Cell, d.Result, d.Reason))
	}
	return list, report
}

func TestTheFilledDemoIsInDate(t *testing.T) {
	filled := filepath.Join(t.TempDir(), "larkmoor-filled.xlsx")
	if _, err := Fill(context.Background(), demo, Options{Output: filled}); err != nil {
		t.Fatal(err)
	}
	list, report := verify(t, filled)
	if len(list) > 0 || report.Verification.Compared < 200 {
		t.Errorf("%d cells compared, %d differ: %v", report.Verification.Compared, len(list), list)
	}
	if list, report := verify(t, demo); len(list) < 200 || len(report.Verification.OutOfDate()) != len(report.Results.Rows) {
		t.Errorf("of the unfilled demo %d cells differ", len(list))
	}
}

// The questions of the scenarios below: one row with a fingerprint, one that
// writes a table sheet, one refused.
var (
	verifyHeader = []any{"work out", "label", "sample", "table sheet", "> mean", "> lower", "> used", "> fingerprint", "> version", "> status", "> note"}
	verifyRows   = rowsOf{
		verifyHeader,
		{"mean-interval", "all", "minutes in Trips"},
		{"mean-interval", "by depot", "minutes in Trips for each depot", "By depot"},
	}
)

func TestVerifyTellsWhatChanged(t *testing.T) {
	set := func(sheet, at string, v any) func(*excelize.File) error {
		return func(f *excelize.File) error { return f.SetCellValue(sheet, at, v) }
	}
	for _, c := range []struct {
		name   string
		change func(*excelize.File) error
		want   []string // exactly these
	}{
		{"nothing", func(*excelize.File) error { return nil }, nil},
		{"a number spelt otherwise is the same double", set("Calculations", "G2", 6.0), nil},
		{"a data cell", set("Trips", "B2", 32.5), []string{
			"Calculations!E2 mean: inputs changed since", "Calculations!F2 lower: inputs changed since", "Calculations!H2 fingerprint: inputs changed since",
			"By depot!B2 mean: inputs changed since", "By depot!C2 lower: inputs changed since", "By depot!D2 upper: inputs changed since"}},
		{"a result typed over", set("Calculations", "E2", 33), []string{"Calculations!E2 mean: result typed over"}},
		{"a number as text", set("Calculations", "G2", "6"), []string{"Calculations!G2 used: result typed over"}},
		{"a note reworded", set("Calculations", "K2", "fine"), []string{"Calculations!K2 note: inputs are the same"}},
		{"a result removed", set("Calculations", "F2", nil), []string{"Calculations!F2 lower: missing"}},
		{"a fingerprint typed over", set("Calculations", "H2", "same as before"), []string{"Calculations!H2 fingerprint: result typed over"}},
		{"a fingerprint removed", set("Calculations", "H2", nil), []string{"Calculations!H2 fingerprint: missing"}},
		{"another version of the function", set("Calculations", "I2", 99), []string{"Calculations!I2 version: another version since"}},
		{"a cell of the table sheet", set("By depot", "B3", 1), []string{"By depot!B3 mean: result typed over"}},
		{"a cell beside the table", set("By depot", "A9", "mine"), []string{"By depot!A9 : nothing belongs here"}},
		{"the table sheet removed", func(f *excelize.File) error { return f.DeleteSheet("By depot") }, []string{"By depot!0 table: missing"}},
		{"the inputs of a row", set("Calculations", "C2", "minutes in Trips where depot = North"), []string{
			"Calculations!E2 mean: inputs changed since", "Calculations!H2 fingerprint: inputs changed since"}},
	} {
		t.Run(c.name, func(t *testing.T) {
			dir := t.TempDir()
			book, filled := filepath.Join(dir, "book.xlsx"), filepath.Join(dir, "book-filled.xlsx")
			makeBook(t, book, map[string]rowsOf{"Trips": trips, "Calculations": verifyRows}, nil)
			if _, err := Fill(context.Background(), book, Options{}); err != nil {
				t.Fatal(err)
			}
			f, err := excelize.OpenFile(filled)
			if err != nil {
				t.Fatal(err)
			}
			defer f.Close()
			if err := c.change(f); err != nil {
				t.Fatal(err)
			}
			if err := f.SaveAs(filled); err != nil {
				t.Fatal(err)
			}
			list, _ := verify(t, filled)
			for _, w := range c.want {
				if !slices.Contains(list, w) {
					t.Errorf("%q is not listed", w)
				}
			}
			if len(c.want) < 2 && len(list) != len(c.want) {
				t.Errorf("it lists %q", list)
			}
		})
	}
}

// Some programs save 15 or 16 digits of a number, rounded or cut.
func TestVerifyTellsNumbersThatWereSavedWithFewerDigits(t *testing.T) {
	for _, test := range []struct {
		stored float64
		want   string
	}{
		{32.333333333333336, ""},
		{32.3333333333333, "saved with fewer digits"}, {32.33333333333333, "saved with fewer digits"}, {32.3333333333334, "differs (no fingerprint)"},
		{32.333333333333, "differs (no fingerprint)"}, {32.33333333333334, "saved with fewer digits"}, {32.333333333333364, "differs (no fingerprint)"},
	} {
		book := filepath.Join(t.TempDir(), "book.calculations.csv")
		write(t, book, "work out,sample,> mean\nsample-summary,31; 32; 34,"+strconv.FormatFloat(test.stored, 'g', -1, 64)+"\n")
		list, _ := verify(t, book)
		if got := strings.Join(list, "; "); got != strings.TrimSuffix("Calculations!C2 mean: "+test.want, "Calculations!C2 mean: ") {
			t.Errorf("%v: %q, want %q", test.stored, got, test.want)
		}
	}
	header := "work out,sample,> mean,> fingerprint\nsample-summary,31; 32; 34,"
	book := filepath.Join(t.TempDir(), "book.calculations.csv")
	write(t, book, header+",\n")
	if _, err := Fill(t.Context(), book, Options{InPlace: true}); err != nil {
		t.Fatal(err)
	}
	write(t, book, strings.Replace(read(t, book), "32.333333333333336", "32.3333333333333", 1))
	if list, _ := verify(t, book); !slices.Equal(list, []string{"Calculations!C2 mean: saved with fewer digits"}) {
		t.Errorf("beside a fingerprint: %q", list)
	}
}

func TestVerifySaysWhenItCannotTell(t *testing.T) {
	book := filepath.Join(t.TempDir(), "book.xlsx")
	makeBook(t, book, twoSheets(meanHeader, append(slices.Clone(meanRow), 31, "ok")), nil)
	if list, _ := verify(t, book); len(list) != 1 || list[0] != "Calculations!C2 mean: differs (no fingerprint)" {
		t.Errorf("got %q", list)
	}
}

func TestARowThatIsRefusedNowIsOutOfDate(t *testing.T) {
	book := filepath.Join(t.TempDir(), "book.xlsx")
	makeBook(t, book, twoSheets(meanHeader, []any{"mean-interval", "minutes in Tripps", 31, "ok"}), nil)
	list, report := verify(t, book)
	want := []string{"Calculations!C2 mean: refused now", "Calculations!D2 status: refused now"}
	if !slices.Equal(list, want) || !strings.Contains(report.Results.Rows[0].Note(), "Trips") {
		t.Errorf("got %q", list)
	}
}

func TestAFormulaInAResultCellIsReported(t *testing.T) {
	book := filepath.Join(t.TempDir(), "book.xlsx")
	makeBook(t, book, twoSheets(meanHeader, meanRow), func(f *excelize.File) {
		if err := f.SetCellFormula("Calculations", "C2", "32.333"); err != nil {
			t.Fatal(err)
		}
	})
	_, report := verify(t, book)
	if note := report.Results.Rows[0].Note(); !strings.Contains(note, "C2 holds a formula") {
		t.Errorf("the note is %q", note)
	}
}
