package main

import (
	"encoding/csv"
	"encoding/json"
	"os"
	"path/filepath"
	"strings"
	"testing"

	"github.com/xuri/excelize/v2"
)

// fillCopy fills a copy of a workbook and gives the path of the output.
func fillCopy(t *testing.T, book string) string {
	t.Helper()
	dir := t.TempDir()
	name := filepath.Base(book)
	if _, stderr, code := run(t, "fill", copyTo(t, book, dir, name)); code == exitFailed {
		t.Fatal(stderr)
	}
	return filepath.Join(dir, strings.TrimSuffix(name, ".xlsx")+"-filled.xlsx")
}

// change sets one cell of a workbook.
func change(t *testing.T, path, sheet, at string, v any) {
	t.Helper()
	f, err := excelize.OpenFile(path)
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	if err := f.SetCellValue(sheet, at, v); err != nil {
		t.Fatal(err)
	}
	if err := f.Save(); err != nil {
		t.Fatal(err)
	}
}

func TestVerifyAfterFillFindsAllInDate(t *testing.T) {
	filled := fillCopy(t, demo)
	before := readFile(t, filled)
	stdout, stderr, code := run(t, "verify", filled)
	if code != exitOK || stderr != "" || !strings.HasPrefix(stdout, filled+": ") || !strings.Contains(stdout, " 0 out of date, 0 refused. Nothing was written.") {
		t.Errorf("code %d, stderr %q, stdout\n%s", code, stderr, stdout)
	}
	if string(readFile(t, filled)) != string(before) {
		t.Error("verify changed the file")
	}
}

// verified is a row of the list as JSON.
type verified struct {
	Cell, Result, Reason, Status string
	Stored, Now                  any
	Notes                        []string
}

func TestVerifyListsWhatIsOutOfDate(t *testing.T) {
	book := filepath.Join(t.TempDir(), "book.xlsx")
	makeBook(t, book, map[string][][]any{"Trips": someTrips, "Calculations": {
		{"work out", "label", "sample", "> mean", "> used", "> fingerprint", "> note"},
		{"mean-interval", "all", "minutes in Trips"},
		{"mean-interval", "Quay", "minutes in Trips where depot = Quay"},
	}})
	filled := fillCopy(t, book)
	change(t, filled, "Calculations", "D2", 40.5)
	change(t, filled, "Trips", "B4", 36.5) // a trip of Quay: both samples change

	stdout, _, code := run(t, "verify", filled, "--format", "json")
	var list []verified
	if err := json.Unmarshal([]byte(stdout), &list); err != nil || code != exitRefused || len(list) != 4 {
		t.Fatalf("code %d, %v in\n%s", code, err, stdout)
	}
	// Stored is what was typed; the minutes now sum to 31.5 + 28 + 36.5 + 30 + 33 = 159.
	if d := list[0]; d.Cell != "D2" || d.Result != "mean" || d.Stored != 40.5 || d.Now != 31.8 || d.Reason != "inputs changed since" {
		t.Errorf("got %+v", d)
	}
	records, err := csv.NewReader(strings.NewReader(first(run(t, "verify", filled, "--format", "csv")))).ReadAll()
	if err != nil || len(records) != 5 || records[0][8] != "stored" || records[1][8] != "40.5" || records[1][9] != "31.8" {
		t.Errorf("%v in %q", err, records)
	}
	stdout, _, _ = run(t, "verify", filled)
	for _, w := range []string{"Calculations!D2", "40.5", "31.8", "inputs changed since", "0 rows in date, 2 out of date, 0 refused"} {
		if !strings.Contains(stdout, w) {
			t.Errorf("it does not print %q:\n%s", w, stdout)
		}
	}
}

func first(stdout, _ string, _ int) string { return stdout }

func TestVerifyNeverCallsARefusedRowInDateWithoutSayingSo(t *testing.T) {
	book := filepath.Join(t.TempDir(), "book.xlsx")
	makeBook(t, book, ask([]any{"work out", "sample", "> mean", "> status", "> note"}, []any{"mean-interval", "minutes in Tripps"}))
	filled := fillCopy(t, book)
	stdout, _, code := run(t, "verify", filled)
	if code != exitRefused || !strings.Contains(stdout, `There is no sheet, table or defined name "Tripps"`) && !strings.Contains(stdout, "Tripps") ||
		!strings.Contains(stdout, "1 rows in date, 0 out of date, 1 refused") {
		t.Errorf("code %d\n%s", code, stdout)
	}
}

func TestAFormulaInAResultCellIsVerifiedAsRefused(t *testing.T) {
	book := filepath.Join(t.TempDir(), "book.xlsx")
	makeBook(t, book, ask([]any{"work out", "sample", "> mean", "> status", "> note"}, []any{"mean-interval", "minutes in Trips"}))
	filled := fillCopy(t, book)
	f, err := excelize.OpenFile(filled)
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	if err := f.SetCellFormula("Calculations", "C2", "AVERAGE(Trips!B2:B6)"); err != nil {
		t.Fatal(err)
	}
	if err := f.Save(); err != nil {
		t.Fatal(err)
	}
	stdout, _, code := run(t, "verify", filled, "--format", "json")
	var list []verified
	if err := json.Unmarshal([]byte(stdout), &list); err != nil || code != exitRefused || len(list) == 0 {
		t.Fatalf("code %d, %v\n%s", code, err, stdout)
	}
	if d := list[0]; d.Status != "refused" || len(d.Notes) != 1 || !strings.Contains(d.Notes[0], "C2 holds a formula") {
		t.Errorf("got %+v", d)
	}
}

func TestVerifyOfAnUnfilledBookPointsToItsOutput(t *testing.T) {
	filled := fillCopy(t, demo)
	book := filepath.Join(filepath.Dir(filled), "larkmoor.xlsx")
	stdout, _, code := run(t, "verify", book)
	if code != exitRefused || !strings.Contains(stdout, "never worked out") || !strings.Contains(stdout, "its output larkmoor-filled.xlsx is there: verify that") {
		t.Errorf("code %d\n%s", code, lastLine(stdout))
	}
	stdout, _, code = run(t, "verify", filepath.Dir(filled))
	if code != exitOK || !strings.Contains(stdout, "43 rows in date, 0 out of date, 0 refused") {
		t.Errorf("of the folder: code %d\n%s", code, stdout)
	}
}

func TestVerifyOfWhatCannotBeRead(t *testing.T) {
	if _, stderr, code := run(t, "verify", filepath.Join(t.TempDir(), "none.xlsx")); code != exitFailed || !strings.Contains(stderr, "none.xlsx") {
		t.Errorf("code %d, %q", code, stderr)
	}
	if _, stderr, code := run(t, "verify"); code != exitFailed || !strings.Contains(stderr, "halfwidth verify") {
		t.Errorf("code %d, %q", code, stderr)
	}
}

func TestATextSheetGoesThroughTheVerbs(t *testing.T) {
	dir := t.TempDir()
	from := "../../testdata/workbooks/"
	copyTo(t, from+"night.csv", dir, "night.csv")
	copyTo(t, from+"larkmoor.xlsx", dir, "larkmoor.xlsx")
	sheet := copyTo(t, from+"handling.calculations.csv", dir, "handling.calculations.csv")
	stdout, stderr, code := run(t, "preview", sheet)
	if code != exitOK || !strings.Contains(stdout, "night.csv!C2:C21 where depot (B2:B21) = North") {
		t.Errorf("preview: code %d, %s\n%s", code, stderr, stdout)
	}
	stdout, stderr, code = run(t, "fill", sheet)
	filled := filepath.Join(dir, "handling-filled.calculations.csv")
	if code != exitOK || !strings.HasPrefix(lastLine(stdout), "Wrote "+filled+": ") {
		t.Fatalf("fill: code %d, %s\n%s", code, stderr, stdout)
	}
	if stdout, _, code := run(t, "verify", filled); code != exitOK || !strings.Contains(stdout, "5 rows in date, 0 out of date, 0 refused") {
		t.Errorf("verify: code %d\n%s", code, stdout)
	}
	whole := string(readFile(t, filled))
	if err := os.WriteFile(filled, []byte(strings.Replace(whole, ",32.4,", ",\"32.4 \",", 1)), 0o600); err != nil {
		t.Fatal(err)
	}
	if stdout, _, code := run(t, "verify", filled); code != exitOK {
		t.Errorf("the same double spelt otherwise: code %d\n%s", code, stdout)
	}
	if err := os.WriteFile(filled, []byte(strings.Replace(whole, ",32.4,", ",32.40000000000001,", 1)), 0o600); err != nil {
		t.Fatal(err)
	}
	if stdout, _, code := run(t, "verify", filled); code != exitRefused || !strings.Contains(stdout, "result typed over") {
		t.Errorf("the last digit: code %d\n%s", code, stdout)
	}
}

func TestFillSaysWhatItDoesWithAProtectedSheet(t *testing.T) {
	book := filepath.Join(t.TempDir(), "book.xlsx")
	makeBook(t, book, ask([]any{"work out", "sample", "> mean"}, []any{"mean-interval", "minutes in Trips"}))
	f, err := excelize.OpenFile(book)
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	if err := f.ProtectSheet("Calculations", &excelize.SheetProtectionOptions{}); err != nil {
		t.Fatal(err)
	}
	if err := f.Save(); err != nil {
		t.Fatal(err)
	}
	for _, verb := range []string{"preview", "fill"} {
		if stdout, _, code := run(t, verb, book); code != exitOK || !strings.Contains(strings.Join(strings.Fields(stdout), " "), "the protection is left as it is.") {
			t.Errorf("%s: code %d\n%s", verb, code, stdout)
		}
	}
}
