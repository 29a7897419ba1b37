package workbook

import (
	"bytes"
	"context"
	"errors"
	"io/fs"
	"os"
	"path/filepath"
	"runtime"
	"slices"
	"strings"
	"testing"

	"halfwidth/funcs"
	"halfwidth/workbook/ooxml"
)

const textDemo = "../testdata/workbooks/handling.calculations.csv"

func write(t *testing.T, path, text string) string {
	t.Helper()
	if err := os.WriteFile(path, []byte(text), 0o600); err != nil {
		t.Fatal(err)
	}
	return path
}

func read(t *testing.T, path string) string {
	t.Helper()
	data, err := os.ReadFile(path)
	if err != nil {
		t.Fatal(err)
	}
	return string(data)
}

func fill(t *testing.T, path string, o Options) *Report {
	t.Helper()
	report, err := Fill(context.Background(), path, o)
	if err != nil {
		t.Fatal(err)
	}
	return report
}

func TestTheTextDemoIsFilledFromFilesBesideIt(t *testing.T) {
	out := filepath.Join(t.TempDir(), "handling-filled.calculations.csv")
	report := fill(t, textDemo, Options{Output: out})
	if counts := report.Counts(); counts[funcs.StatusRefused] != 0 || len(report.Results.Rows) != 5 || report.Saved.Path != out {
		t.Fatalf("%v, %v", counts, report.Saved)
	}
	// The ten minutes of North in night.csv sum to 324.
	if mean, _ := report.Results.Rows[0].Outcome.Get("mean"); mean != 32.4 {
		t.Errorf("the mean of North is %v", mean)
	}
	before, after := strings.Split(read(t, textDemo), "\n"), strings.Split(read(t, out), "\n")
	if len(before) != len(after) {
		t.Fatalf("%d lines became %d", len(before), len(after))
	}
	for i, line := range before {
		if !slices.Contains([]int{5, 6, 7, 10, 13}, i+1) && after[i] != line {
			t.Errorf("line %d became %q", i+1, after[i])
		}
	}
	if want := `,"kept as it is, quotes and all"`; !strings.HasPrefix(after[4], "mean-interval,North at night,minutes in night.csv where depot = North,,32.4,") || !strings.HasSuffix(after[4], want) {
		t.Errorf("line 5 became %s", after[4])
	}
}

func TestFillingATextSheetTwiceGivesTheSameBytes(t *testing.T) {
	dir := t.TempDir()
	for _, name := range []string{"night.csv", "larkmoor.xlsx", "handling.calculations.csv"} {
		write(t, filepath.Join(dir, name), read(t, filepath.Join(filepath.Dir(textDemo), name)))
	}
	book := filepath.Join(dir, "handling.calculations.csv")
	once := fill(t, book, Options{}).Saved.Path
	if once != filepath.Join(dir, "handling-filled.calculations.csv") {
		t.Fatalf("it wrote %s", once)
	}
	first := read(t, once)
	fill(t, book, Options{}) // over an untouched output
	if read(t, once) != first {
		t.Error("the second fill gave other bytes")
	}
	if saved := fill(t, once, Options{InPlace: true}).Saved; saved.Path != "" {
		t.Errorf("filling the output in place changed %d cells", saved.Cells)
	}
	if list, report := verify(t, once); len(list) > 0 || report.Verification.Compared != 3*7+5+5 {
		t.Errorf("%d cells compared, of which differ %q", report.Verification.Compared, list)
	}
}

func TestEveryByteOutsideTheResultsIsKept(t *testing.T) {
	for _, c := range []struct{ name, file, text, want string }{
		{"commas and Unix lines", "a.calculations.csv",
			"work out,sample,> mean,> used,own\nmean-interval,12; 13; 14; 15; 16,,,x\n",
			"work out,sample,> mean,> used,own\nmean-interval,12; 13; 14; 15; 16,14,5,x\n"},
		{"byte-order mark, Windows lines, quotes, no last line end", "a.calculations.csv",
			"\ufeff\"a, \"\"remark\"\"\" ,\r\nwork out,\"sample\",> mean,> used\r\n\"mean-interval\" ,\"12; 13; 14; 15; 16\",\"9\"",
			"\ufeff\"a, \"\"remark\"\"\" ,\r\nwork out,\"sample\",> mean,> used\r\n\"mean-interval\" ,\"12; 13; 14; 15; 16\",14,5"},
		{"semicolons and a decimal comma", "a.calculations.csv",
			"default decimal-mark;,\n\nwork out;mean;sd;n;> mean;> used\nmean-interval;12,25;1,5;9;;\n",
			"default decimal-mark;,\n\nwork out;mean;sd;n;> mean;> used\nmean-interval;12,25;1,5;9;12,25;9\n"},
		{"tabs", "a.calculations.tsv",
			"work out\tsample\t> mean\nmean-interval\t12; 13; 14; 15; 16\t\n",
			"work out\tsample\t> mean\nmean-interval\t12; 13; 14; 15; 16\t14\n"},
		{"the same double spelt otherwise", "a.calculations.csv",
			"work out,sample,> mean,> used\nmean-interval,12; 13; 14; 15; 16,14.00,\"5\"\n",
			"work out,sample,> mean,> used\nmean-interval,12; 13; 14; 15; 16,14.00,\"5\"\n"},
		{"marked in its first cell", "a.csv",
			"calculation sheet\n\nwork out,sample,> mean\nmean-interval,12; 13; 14; 15; 16\n",
			"calculation sheet\n\nwork out,sample,> mean\nmean-interval,12; 13; 14; 15; 16,14\n"},
	} {
		t.Run(c.name, func(t *testing.T) {
			book := write(t, filepath.Join(t.TempDir(), c.file), c.text)
			out := fill(t, book, Options{}).Saved.Path
			if got := read(t, out); got != c.want {
				t.Errorf("got\n%q\nwant\n%q", got, c.want)
			}
			if read(t, book) != c.text || !IsOutput(out) {
				t.Errorf("the sheet changed, or %s is not known as an output", out)
			}
		})
	}
}

func TestNamesOfOutputs(t *testing.T) {
	for _, c := range []struct {
		path, output string
		text         bool
	}{
		{"a/larkmoor.xlsx", "a/larkmoor-filled.xlsx", false},
		{"handling.calculations.csv", "handling-filled.calculations.csv", true},
		{"Handling.Calculations.TSV", "Handling-filled.Calculations.TSV", true},
		{"trips.csv", "trips-filled.csv", false},
	} {
		if got := OutputName(c.path); got != c.output || !IsOutput(got) || IsOutput(c.path) {
			t.Errorf("the output of %s is %s", c.path, got)
		}
		if IsTextSheet(c.path) != c.text || IsTextSheet(c.output) != c.text {
			t.Errorf("%s: a text calculation sheet or not", c.path)
		}
	}
}

// What may become of an output: something of the user's in it is never lost
// without --replace.
func TestATextOutputThatWasChangedSinceIsNotWrittenOver(t *testing.T) {
	const (
		header  = "work out,label,sample,> mean,> used,> fingerprint\n"
		row     = "mean-interval,all,minutes in trips.csv,,,\n"
		noPrint = "work out,label,sample,> mean,> used\n"
	)
	edit := func(old, new string) func(string) string {
		return func(s string) string { return strings.Replace(s, old, new, 1) }
	}
	same := func(s string) string { return s }
	for _, c := range []struct {
		name                string
		sheet               string
		output, input, data func(string) string // what is changed in the files
		refused             string              // "" where it is written
	}{
		{"nothing changed", header + row, same, same, same, ""},
		{"the data changed", header + row, same, same, edit("31.5", "32.5"), ""},
		{"a result is empty", header + row, edit(",31,", ",,"), same, same, ""},
		{"a remark in the output", header + row, edit(",all,", ",all of them,"), same, same, "otherwise in B2,"},
		{"a row in the output", header + row, func(s string) string { return s + "\nmine\n" }, same, same, "otherwise in A4,"},
		{"a result typed over", header + row, edit(",31,", ",33,"), same, same, "D2: result typed over"},
		{"a question added", header + row, same, func(s string) string { return s + row }, same, "otherwise in A3,"},
		{"the data changed, and no fingerprint tells", noPrint + row, same, same, edit("31.5", "32.5"), "D2: differs (no fingerprint)"},
		{"no sheet any more", header + row, func(string) string { return "\"" }, same, same, "--replace"},
	} {
		t.Run(c.name, func(t *testing.T) {
			dir := t.TempDir()
			data, book := filepath.Join(dir, "trips.csv"), filepath.Join(dir, "a.calculations.csv")
			const trips = "depot,minutes\nNorth,31.5\nNorth,28\nQuay,35\nQuay,29.5\n"
			write(t, data, trips)
			write(t, book, c.sheet)
			out := fill(t, book, Options{}).Saved.Path
			write(t, out, c.output(read(t, out)))
			write(t, book, c.input(c.sheet))
			write(t, data, c.data(trips))
			before := read(t, out)
			_, err := Fill(context.Background(), book, Options{})
			if c.refused == "" {
				if err != nil {
					t.Error(err)
				}
				return
			}
			if err == nil || !strings.Contains(err.Error(), c.refused) || !strings.Contains(err.Error(), "--replace") {
				t.Errorf("got %v, want %s", err, c.refused)
			}
			if read(t, out) != before {
				t.Error("the output was written over")
			}
			fill(t, book, Options{Replace: true})
		})
	}
}

func TestATextSheetIsFilledInPlace(t *testing.T) {
	const text = "work out,sample,> mean\nmean-interval,12; 13; 14; 15; 16,\n"
	dir := t.TempDir()
	book := write(t, filepath.Join(dir, "a.calculations.csv"), text)
	if err := os.Chmod(book, 0o640); err != nil {
		t.Fatal(err)
	}
	lock := write(t, filepath.Join(dir, ".~lock.a.calculations.csv#"), "")
	if _, err := Fill(context.Background(), book, Options{InPlace: true}); err == nil || !strings.Contains(err.Error(), "close it there first") {
		t.Errorf("beside a lock file: %v", err)
	}
	if err := os.Remove(lock); err != nil {
		t.Fatal(err)
	}
	if saved := fill(t, book, Options{InPlace: true}).Saved; saved.Path == "" || saved.Cells != 1 {
		t.Errorf("saved %v", saved)
	}
	if got := read(t, book); got != strings.Replace(text, "16,", "16,14", 1) {
		t.Errorf("it reads %q", got)
	}
	if info, err := os.Stat(book); err != nil || runtime.GOOS != "windows" && info.Mode().Perm() != fs.FileMode(0o640) {
		t.Errorf("its permissions are %v (%v)", info.Mode(), err)
	}
	if list, err := os.ReadDir(dir); err != nil || len(list) != 1 {
		t.Errorf("left behind: %v (%v)", list, err)
	}
}

func TestATextSheetThatChangedMeanwhileIsNotWrittenOver(t *testing.T) {
	book := write(t, filepath.Join(t.TempDir(), "a.calculations.csv"), "work out,sample,> mean\nmean-interval,12; 13; 14,\n")
	d, plan, err := open(context.Background(), book, Options{})
	if err != nil {
		t.Fatal(err)
	}
	defer d.Close()
	results, err := plan.Run(context.Background(), 1)
	if err != nil {
		t.Fatal(err)
	}
	c, err := d.changes(results)
	if err != nil {
		t.Fatal(err)
	}
	write(t, book, "another text\n")
	if _, err := c.saveInPlace(); !errors.Is(err, ooxml.ErrChanged) {
		t.Errorf("got %v", err)
	}
	if got := read(t, book); got != "another text\n" {
		t.Errorf("it reads %q", got)
	}
}

func TestWhatATextSheetRefuses(t *testing.T) {
	dir := t.TempDir()
	sub := filepath.Join(dir, "team")
	if err := os.Mkdir(sub, 0o700); err != nil {
		t.Fatal(err)
	}
	write(t, filepath.Join(dir, "outside.csv"), "depot,minutes\nNorth,31.5\nNorth,28\nQuay,35\n")
	write(t, filepath.Join(sub, "inside.csv"), "depot,minutes\nNorth,31.5\nNorth,28\nQuay,35\n")
	const header = "work out,sample,table sheet,> mean,> note\n"
	for _, c := range []struct {
		name, row string
		data      []string
		want      []string // in the note; none where the row is not refused
	}{
		{"beside it", "mean-interval,minutes in inside.csv,,,", nil, nil},
		{"outside its folder", "mean-interval,minutes in outside.csv,,,", nil, []string{"outside.csv", "is not there"}},
		{"in a folder that was named", "mean-interval,minutes in outside.csv,,,", []string{dir}, nil},
		{"above its folder", "mean-interval,minutes in ../outside.csv,,,", []string{dir}, []string{"--data"}},
		{"a table sheet", "mean-interval,minutes in inside.csv for each depot,Depots,,", nil, []string{"C2: a text file has no second sheet", "give every group a row", "or empty the cell"}},
		{"groups without a table sheet", "mean-interval,minutes in inside.csv for each depot,,,", nil, []string{"for each", "a text file has no second sheet", "or leave out"}},
		{"a formula", "mean-interval,minutes in inside.csv,,=SUM(A1:A2),", nil, []string{"D2 holds a formula, which is never overwritten"}},
		{"a sheet of its own", "mean-interval,minutes in Trips,,,", nil, []string{"Trips"}},
	} {
		t.Run(c.name, func(t *testing.T) {
			book := write(t, filepath.Join(sub, "a.calculations.csv"), header+c.row+"\n")
			row := fill(t, book, Options{Replace: true, Data: c.data}).Results.Rows[0]
			if (row.Status == funcs.StatusRefused) != (c.want != nil) {
				t.Errorf("%s: %s", row.Status, row.Note())
			}
			for _, w := range c.want {
				if !strings.Contains(strings.ToLower(row.Note()), strings.ToLower(w)) {
					t.Errorf("the note %q does not say %q", row.Note(), w)
				}
			}
			if c.name == "a formula" && !strings.Contains(read(t, OutputName(book)), ",=SUM(A1:A2),") {
				t.Error("the formula was written over")
			}
		})
	}
}

func TestATextFileThatIsNoCalculationSheet(t *testing.T) {
	dir := t.TempDir()
	for _, c := range []struct {
		file, text string
		want       []string
	}{
		{"trips.csv", "depot,minutes\nNorth,31.5\n", []string{"trips.csv: no calculation sheet", "trips.calculations.csv", "first cell"}},
		{"a.calculations.csv", "depot,minutes\nNorth,31.5\n", []string{"nothing to work out", "work out"}},
		{"a.calculations.csv", "work out,sample,> mean\nmean-interval,\"1; 2; 3,\n", []string{"a.calculations.csv", "line 2", "never closed"}},
		{"a.calculations.csv", "work out,sample,> mean\nmean-interval,\xff,\n", []string{"line 2", "UTF-8"}},
	} {
		_, err := Fill(context.Background(), write(t, filepath.Join(dir, c.file), c.text), Options{})
		for _, w := range c.want {
			if err == nil || !strings.Contains(err.Error(), w) {
				t.Errorf("%s: got %v, want %q", c.file, err, w)
			}
		}
	}
	if left, err := filepath.Glob(filepath.Join(dir, "*-filled*")); err != nil || len(left) > 0 {
		t.Errorf("something was written: %v", left)
	}
	long := write(t, filepath.Join(dir, "long.calculations.csv"), strings.Repeat("x,", 100))
	if _, err := Fill(context.Background(), long, Options{Limits: ooxml.Limits{HeldBytes: 50}}); err == nil || !strings.Contains(err.Error(), "50 bytes") {
		t.Errorf("past the limit: %v", err)
	}
}

func TestATextSheetIsVerified(t *testing.T) {
	dir := t.TempDir()
	data := write(t, filepath.Join(dir, "trips.csv"), "depot,minutes\nNorth,31.5\nNorth,28\nQuay,35\nQuay,29.5\n")
	book := write(t, filepath.Join(dir, "a.calculations.csv"), "work out,sample,> mean,> used,> fingerprint\nmean-interval,minutes in trips.csv,,,\n")
	if list, _ := verify(t, book); len(list) != 3 || !strings.HasSuffix(list[0], string(NeverWorkedOut)) {
		t.Errorf("before it is filled: %q", list)
	}
	fill(t, book, Options{InPlace: true})
	if list, _ := verify(t, book); len(list) > 0 {
		t.Errorf("once it is filled: %q", list)
	}
	whole := read(t, book)
	write(t, book, strings.Replace(whole, ",31,", ",31.0000001,", 1))
	if list, _ := verify(t, book); !slices.Equal(list, []string{"Calculations!C2 mean: result typed over"}) {
		t.Errorf("typed over: %q", list)
	}
	write(t, book, whole)
	write(t, data, string(bytes.Replace([]byte(read(t, data)), []byte("28"), []byte("29"), 1)))
	if list, _ := verify(t, book); !slices.Equal(list, []string{"Calculations!C2 mean: inputs changed since", "Calculations!E2 fingerprint: inputs changed since"}) {
		t.Errorf("other data: %q", list)
	}
}

// What stands right of a separator that was meant for a cell's own is kept, and no
// number comes of it. The limit is 1 - 5/√2 tan(0.475 π), as t with one degree of
// freedom is a tangent.
func TestALineOfATextSheetThatIsLongerThanItsHeader(t *testing.T) {
	const numbers, decimals = "work out;sample;> mean;> status\n", "work out,mean,sd,n,> lower,> status\n"
	for _, test := range []struct{ header, line, filled, note string }{
		{numbers, "sample-summary;1; 2; 3;;", "", "The line of row 2 has 6 cells, and that of its header 4, so a cell of it may be cut in two. Put cells that hold the separator in quotes."},
		{numbers, "sample-summary;1; 2; 3;;;my remark", "", "has 7 cells"},
		{numbers, `sample-summary;"1; 2; 3";;`, `sample-summary;"1; 2; 3";2;caution`, ""},
		{numbers, `sample-summary;"1; 2; 3";;;my remark`, `sample-summary;"1; 2; 3";2;caution;my remark`, ""},
		{numbers, "sample-summary;7", "sample-summary;7;7;caution", ""},
		{decimals, "mean-interval,1,5,2,10,,", "mean-interval,1,5,2,-43.92321766046877,caution,", "The line of row 2 has 7 cells"},
		{decimals, "mean-interval,1,5,2,,", "mean-interval,1,5,2,-43.92321766046877,caution", ""},
		{"work out,sample,> mean,,work out,sample,> mean\n", "sample-summary,7,,,sample-summary,9,", "sample-summary,7,7,,sample-summary,9,9", ""},
	} {
		path := filepath.Join(t.TempDir(), "a.calculations.csv")
		write(t, path, test.header+test.line+"\n")
		report, err := Fill(t.Context(), path, Options{})
		if err != nil {
			t.Fatal(err)
		}
		if note := report.Results.Rows[0].Note(); !strings.Contains(note, test.note) || test.note == "" && strings.Contains(note, "The line of row") {
			t.Errorf("%q: the note is %q", test.line, note)
		}
		if test.filled == "" {
			test.filled = test.line
		}
		if got := read(t, outputName(path)); got != test.header+test.filled+"\n" {
			t.Errorf("%q is filled to %q, want %q", test.line, got, test.header+test.filled+"\n")
		}
	}
}
