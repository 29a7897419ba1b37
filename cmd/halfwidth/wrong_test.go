package main

import (
	"os"
	"path/filepath"
	"strings"
	"testing"

	"github.com/xuri/excelize/v2"
)

// makeBook writes a workbook of sheets of rows; a cell is a text or a number.
func makeBook(t *testing.T, path string, sheets map[string][][]any) {
	t.Helper()
	f := excelize.NewFile()
	defer f.Close()
	for name, rows := range sheets {
		if _, err := f.NewSheet(name); err != nil {
			t.Fatal(err)
		}
		for i, row := range rows {
			at, err := excelize.CoordinatesToCellName(1, i+1)
			if err != nil {
				t.Fatal(err)
			}
			if err := f.SetSheetRow(name, at, &row); err != nil {
				t.Fatal(err)
			}
		}
	}
	if _, taken := sheets["Sheet1"]; !taken {
		if err := f.DeleteSheet("Sheet1"); err != nil {
			t.Fatal(err)
		}
	}
	if err := f.SaveAs(path); err != nil {
		t.Fatal(err)
	}
}

var someTrips = [][]any{
	{"depot", "minutes", "after"}, {"North", 31.5, 30.0}, {"North", 28.0, 27.5}, {"Quay", 35.5, 33.0}, {"Quay", 30.0, 31.0}, {"North", 33.0, 31.5},
}

// ask gives a book with one calculation, its header and its row.
func ask(header, row []any) map[string][][]any {
	return map[string][][]any{"Trips": someTrips, "Calculations": {header, row}}
}

func TestAWrongRowIsRefusedWithWhatToWriteInstead(t *testing.T) {
	one := []any{"work out", "sample", "> mean", "> lower", "> status", "> note"}
	with := func(input string) []any { return []any{"work out", "sample", input, "> mean", "> status", "> note"} }
	for _, c := range []struct {
		name        string
		header, row []any
		want        []string // in the note
	}{
		{"unknown function", one, []any{"mean-intervall", "minutes in Trips"}, []string{"mean-intervall", `"mean-interval"`}},
		{"unknown sheet", one, []any{"mean-interval", "minutes in Tripps"}, []string{"Tripps", "Trips"}},
		{"unknown column", one, []any{"mean-interval", "minuts in Trips"}, []string{"minuts", "minutes"}},
		{"confidence 95", with("confidence"), []any{"mean-interval", "minutes in Trips", 95}, []string{"95", "write 95% or 0.95"}},
		{"text for a number", with("reference"), []any{"mean-interval", "minutes in Trips", "thirty"}, []string{"thirty"}},
		{"nothing in the sample", one, []any{"mean-interval", "minutes in Trips where depot = Fell"}, []string{"No row meets", "Fell", "North"}},
		{"sd negative", []any{"work out", "mean", "sd", "n", "> lower", "> status", "> note"}, []any{"mean-interval", 3, -1, 9}, []string{"-1", "0 or more"}},
		{"sd 0", []any{"work out", "mean", "sd", "n", "> lower", "> status", "> note"}, []any{"mean-interval", 3, 0, 9}, []string{"sd is 0"}},
		{"n 1", []any{"work out", "mean", "sd", "n", "> lower", "> status", "> note"}, []any{"mean-interval", 3, 1, 1}, []string{"n", "2 or more"}},
		{"both alternatives", []any{"work out", "sample", "mean", "> lower", "> status", "> note"}, []any{"mean-interval", "minutes in Trips", 3},
			[]string{"together with sample", "either sample, or mean with sd and n"}},
		{"pairs from different rows", []any{"work out", "sample", "second-sample", "> difference", "> status", "> note"},
			[]any{"paired-interval", "minutes in Trips where depot = North", "minutes in Trips where depot = Quay"}, []string{"difference-interval"}},
	} {
		t.Run(c.name, func(t *testing.T) {
			dir := t.TempDir()
			book := filepath.Join(dir, "book.xlsx")
			makeBook(t, book, ask(c.header, c.row))
			stdout, stderr, code := run(t, "fill", book)
			if code != exitRefused {
				t.Fatalf("code %d\n%s%s", code, stdout, stderr)
			}
			f, err := excelize.OpenFile(filepath.Join(dir, "book-filled.xlsx"))
			if err != nil {
				t.Fatal(err)
			}
			defer f.Close()
			for i, title := range c.header {
				at, _ := excelize.CoordinatesToCellName(i+1, 2)
				text, err := f.GetCellValue("Calculations", at)
				switch {
				case err != nil:
					t.Fatal(err)
				case title == "> status" && text != "refused":
					t.Errorf("status %q", text)
				case title == "> note":
					for _, w := range c.want {
						if !strings.Contains(text, w) {
							t.Errorf("the note %q does not say %q", text, w)
						}
					}
				case title != "> status" && strings.HasPrefix(title.(string), ">") && text != "":
					t.Errorf("%s holds %q beside a refusal", title, text)
				}
			}
		})
	}
}

func TestAResultHeaderWithoutItsMarkIsPointedOut(t *testing.T) {
	book := filepath.Join(t.TempDir(), "book.xlsx")
	makeBook(t, book, ask([]any{"work out", "sample", "lower", "> mean", "> status"}, []any{"mean-interval", "minutes in Trips"}))
	stdout, _, _ := run(t, "fill", book)
	if !strings.Contains(stdout, "> lower") {
		t.Errorf("it printed\n%s", stdout)
	}
}

func TestACommandThatCannotBeCarriedOutSaysWhatToWrite(t *testing.T) {
	dir := t.TempDir()
	write := func(name, content string) string {
		path := filepath.Join(dir, name)
		if err := os.WriteFile(path, []byte(content), 0o600); err != nil {
			t.Fatal(err)
		}
		return path
	}
	plain := filepath.Join(dir, "plain.xlsx")
	makeBook(t, plain, map[string][][]any{"Trips": someTrips, "Sheet2": {{"x"}}})
	whole := string(readFile(t, demo))
	truncated := write("truncated.xlsx", whole[:len(whole)/2])
	encrypted := filepath.Join(dir, "encrypted.xlsx")
	locked, err := excelize.OpenFile(plain)
	if err != nil {
		t.Fatal(err)
	}
	if err := locked.SaveAs(encrypted, excelize.Options{Password: "parcel"}); err != nil {
		t.Fatal(err)
	}
	text := write("text.xlsx", "not a workbook")
	for _, c := range []struct {
		name string
		args []string
		want []string
	}{
		{"no workbook", []string{"fill"}, []string{"halfwidth fill"}},
		{"unknown verb", []string{"fil", plain}, []string{`did you mean fill?`}},
		{"a function as a verb", []string{"mean-interval"}, []string{"halfwidth answer mean-interval"}},
		{"unknown flag", []string{"fill", "--inplace", plain}, []string{"--inplace", "halfwidth fill --help"}},
		{"missing file", []string{"fill", filepath.Join(dir, "none.xlsx")}, []string{"none.xlsx"}},
		{"no calculation sheet", []string{"fill", plain}, []string{"plain.xlsx: no calculation sheet", "Trips", "Sheet2", `"Calculations"`, "A1"}},
		{"truncated", []string{"fill", truncated}, []string{"truncated.xlsx"}},
		{"encrypted", []string{"fill", encrypted}, []string{"encrypted.xlsx", "password"}},
		{"no zip", []string{"fill", text}, []string{"text.xlsx"}},
		{"output is the input", []string{"fill", demo, "--output", demo}, []string{"the workbook itself", "--in-place"}},
		{"output and in place", []string{"fill", demo, "--in-place", "--output", plain}, []string{"leave out --output"}},
		{"unknown sheet", []string{"fill", demo, "--sheet", "Trip"}, []string{`"Trip"`, `"Trips"`}},
		{"unknown format", []string{"functions", "--format", "xml"}, []string{"text, json or csv"}},
		{"unknown function", []string{"answer", "mean-intervl"}, []string{`"mean-interval"`}},
		{"unknown reference page", []string{"functions", "mean"}, []string{`"mean-interval"`}},
		{"misspelt argument", []string{"answer", "mean-interval", "smple=1;2;3"}, []string{`did you mean "sample"?`}},
		{"no value", []string{"answer", "mean-interval", "sample"}, []string{"NAME=VALUE"}},
		{"comma between numbers", []string{"answer", "mean-interval", "sample=1, 2, 3"}, []string{";"}},
		{"confidence 95", []string{"answer", "mean-interval", "sample=1;2;3", "confidence=95"}, []string{"write 95% or 0.95"}},
	} {
		t.Run(c.name, func(t *testing.T) {
			stdout, stderr, code := run(t, c.args...)
			if code != exitFailed || stdout != "" {
				t.Errorf("code %d, stdout %q", code, stdout)
			}
			for _, w := range c.want {
				if !strings.Contains(stderr, w) {
					t.Errorf("stderr %q does not say %q", stderr, w)
				}
			}
		})
	}
	left, err := filepath.Glob(filepath.Join(dir, "*filled*"))
	if err != nil || len(left) != 0 {
		t.Errorf("something was written: %v %v", left, err)
	}
}

func TestARefusedAnswerExitsWithOne(t *testing.T) {
	stdout, _, code := run(t, "answer", "mean-interval", "sample=2; 2; 2")
	if code != exitRefused || !strings.Contains(stdout, "All values of the sample are equal") {
		t.Errorf("code %d, %s", code, stdout)
	}
}
