package workbook

import (
	"bytes"
	"context"
	"errors"
	"fmt"
	"math"
	"os"
	"path/filepath"
	"slices"
	"strings"
	"testing"

	"github.com/thedatashed/xlsxreader"
	"github.com/xuri/excelize/v2"

	"halfwidth/funcs"
	"halfwidth/workbook/calculation"
	"halfwidth/workbook/ooxml"
)

// writeStarter writes a starter for some functions into a folder of the test's
// own.
func writeStarter(t *testing.T, list ...*funcs.Function) string {
	t.Helper()
	path := filepath.Join(t.TempDir(), "starter.xlsx")
	if err := WriteStarter(context.Background(), path, list, false); err != nil {
		t.Fatal(err)
	}
	return path
}

// The wanted values are those of the descriptors' examples, which name their
// sources.
func TestEveryStarterFillsWithTheValuesOfItsExampleAndIsInDateThen(t *testing.T) {
	ctx := context.Background()
	for _, f := range funcs.All() {
		t.Run(f.Name, func(t *testing.T) {
			path := writeStarter(t, f)
			report, err := Fill(ctx, path, Options{})
			if err != nil {
				t.Fatal(err)
			}
			if loose := report.Results.Diagnostics; len(loose) > 0 {
				t.Errorf("something has no column to stand in: %s", loose[0].Message)
			}
			for _, row := range report.Results.Rows {
				if row.Status == funcs.StatusRefused {
					t.Errorf("row %d is refused: %s", row.Row.Number, row.Note())
				}
			}
			checkExample(t, f, report)
			again, err := Verify(ctx, report.Saved.Path, Options{})
			if err != nil {
				t.Fatal(err)
			}
			if d := again.Verification.Differences; len(d) > 0 || again.Verification.Compared == 0 {
				t.Errorf("%d of %d results are out of date", len(d), again.Verification.Compared)
			}
		})
	}
}

// checkExample compares what stands in the filled file, as another reader reads
// it, with the wanted values.
func checkExample(t *testing.T, f *funcs.Function, report *Report) {
	t.Helper()
	book, err := excelize.OpenFile(report.Saved.Path, excelize.Options{RawCellValue: true})
	if err != nil {
		t.Fatal(err)
	}
	defer book.Close()
	row := report.Results.Rows[0].Row
	check := func(sheet string, at calculation.CellRef, want funcs.Argument) {
		got, err := book.GetCellValue(sheet, at.String())
		if err != nil {
			t.Fatal(err)
		}
		wanted := funcs.FormatArgument(want.Value)
		if w, ok := want.Value.(float64); ok {
			var x float64
			if _, err := fmt.Sscan(got, &x); err == nil && math.Abs(x-w) <= f.Example.Tolerance*math.Abs(w) {
				return
			}
		}
		if w, ok := want.Value.(bool); ok && got == map[bool]string{true: "1", false: "0"}[w] {
			return
		}
		if got != wanted {
			t.Errorf("%s!%s, %s: %q, want %s (%s)", sheet, at, want.Name, got, wanted, f.Example.Source)
		}
	}
	for _, want := range f.Example.Want {
		i := slices.IndexFunc(row.Block.Columns, func(c calculation.BlockColumn) bool {
			return c.Role == calculation.ResultColumn && c.Name == want.Name
		})
		if i < 0 {
			t.Errorf("no column for %s", want.Name)
			continue
		}
		check(row.Sheet(), calculation.CellRef{Row: row.Number, Col: row.Block.Columns[i].Col}, want)
	}
	for i, wants := range f.Example.WantRows {
		for _, want := range wants {
			col := slices.IndexFunc(f.Table, func(r funcs.Result) bool { return r.Name == want.Name })
			header, err := book.SearchSheet(f.Name, want.Name)
			if err != nil || col < 0 || len(header) == 0 {
				t.Fatalf("the table has no column %s: %v", want.Name, err)
			}
			c, r, err := excelize.CellNameToCoordinates(header[0])
			if err != nil {
				t.Fatal(err)
			}
			check(f.Name, calculation.CellRef{Row: r + 1 + i, Col: c}, want)
		}
	}
}

func TestTheValuesOfTheTripsAreThoseOfTheirExpressions(t *testing.T) {
	ctx := context.Background()
	path := writeStarter(t, funcs.All()...)
	report, err := Fill(ctx, path, Options{})
	if err != nil {
		t.Fatal(err)
	}
	seenRows := 0
	for _, row := range report.Results.Rows {
		if row.Row.Label != "the trips of Larkmoor Parcels" {
			continue
		}
		seenRows++
		_, out, err := overTrips(ctx, row.Row.Function)
		if err != nil {
			t.Fatal(err)
		}
		want, _ := out.Get("fingerprint")
		if got, _ := row.Outcome.Get("fingerprint"); got != want {
			t.Errorf("%s: the sheet gives %v, the values that the starter counts on %v", row.Row.Function.Name, got, want)
		}
	}
	if seenRows < 40 {
		t.Errorf("only %d rows read the trips", seenRows)
	}
}

func TestAStarterHasTheSameBytesEachTime(t *testing.T) {
	list := funcs.Families()[2].Functions
	one, err := Starter(context.Background(), list)
	if err != nil {
		t.Fatal(err)
	}
	for range 3 {
		two, err := Starter(context.Background(), list)
		if err != nil || !bytes.Equal(one, two) {
			t.Fatalf("other bytes (%v)", err)
		}
	}
}

func TestIndependentReadersReadAStarterWhole(t *testing.T) {
	path := writeStarter(t, funcs.All()...)
	book, err := ooxml.Open(path, ooxml.Limits{})
	if err != nil {
		t.Fatal(err)
	}
	defer book.Close()
	var names []string
	for _, s := range book.Sheets() {
		names = append(names, s.Name)
	}
	if want := []string{starterSheet, tripsSheet, namesSheet}; !slices.Equal(names, want) {
		t.Errorf("sheets %q, want %q", names, want)
	}
	other, err := xlsxreader.OpenFile(path)
	if err != nil {
		t.Fatal(err)
	}
	defer other.Close()
	for sheet, least := range map[string]int{starterSheet: 300, tripsSheet: 41, namesSheet: 1000} {
		rows := 0
		for row := range other.ReadRows(sheet) {
			if row.Error != nil {
				t.Fatal(row.Error)
			}
			rows++
		}
		if rows < least {
			t.Errorf("%s: %d rows, want %d or more", sheet, rows, least)
		}
	}
}

// The lengths are the format's (ECMA-376 part 1, 18.3.1.32, and what programs
// take without complaint).
func TestNotesAndListsAreShortEnoughAndNoneIsCut(t *testing.T) {
	path := writeStarter(t, funcs.All()...)
	book, err := excelize.OpenFile(path)
	if err != nil {
		t.Fatal(err)
	}
	defer book.Close()
	list, err := book.GetDataValidations(starterSheet)
	if err != nil {
		t.Fatal(err)
	}
	lists := 0
	for _, v := range list {
		switch {
		case v.Prompt == nil || *v.Prompt == "" || v.PromptTitle == nil:
			t.Errorf("%s has no note", v.Sqref)
		case units(*v.Prompt) > mostNote || units(*v.PromptTitle) > mostTitle:
			t.Errorf("%s: the note %q is too long", v.Sqref, *v.Prompt)
		case strings.HasSuffix(*v.Prompt, "…"):
			t.Errorf("%s: the note is cut: %q", v.Sqref, *v.Prompt)
		}
		if v.Type == "list" {
			lists++
		}
	}
	if lists < 84 {
		t.Errorf("%d lists for 84 functions", lists)
	}
}

func TestAFunctionIsOfferedWithItsChoices(t *testing.T) {
	f, err := funcs.Lookup("mean-interval")
	if err != nil {
		t.Fatal(err)
	}
	book, err := excelize.OpenFile(writeStarter(t, f))
	if err != nil {
		t.Fatal(err)
	}
	defer book.Close()
	list, err := book.GetDataValidations(starterSheet)
	if err != nil {
		t.Fatal(err)
	}
	for _, want := range []string{`"mean-interval"`, `"either,above,below"`, `"yes,no"`, `"80%,90%,95%,99%"`} {
		if !slices.ContainsFunc(list, func(v *excelize.DataValidation) bool { return v.Formula1 == want }) {
			t.Errorf("no list offers %s", want)
		}
	}
}

func TestWordsNameFunctionsFamiliesAndAll(t *testing.T) {
	for words, want := range map[string]int{"mean-interval": 1, "Mean Interval,mean-interval": 1, "spread": 4, "all": len(funcs.All())} {
		list, err := StarterFunctions(strings.Split(words, ","))
		if err != nil || len(list) != want {
			t.Errorf("%s: %d functions, want %d (%v)", words, len(list), want, err)
		}
	}
	_, err := StarterFunctions([]string{"mean-intervall"})
	var unknown *funcs.UnknownError
	if !errors.As(err, &unknown) || unknown.Closest[0] != "mean-interval" {
		t.Errorf("got %v", err)
	}
	if _, err := StarterFunctions([]string{"averges"}); err == nil || !strings.Contains(err.Error(), `"averages"`) {
		t.Errorf("got %v", err)
	}
}

func TestAFileThatIsThereIsKept(t *testing.T) {
	ctx := context.Background()
	path := filepath.Join(t.TempDir(), "mine.xlsx")
	if err := os.WriteFile(path, []byte("mine"), 0o600); err != nil {
		t.Fatal(err)
	}
	list := funcs.All()[:1]
	if err := WriteStarter(ctx, path, list, false); !errors.Is(err, ErrTaken) {
		t.Errorf("got %v", err)
	}
	if data, _ := os.ReadFile(path); string(data) != "mine" {
		t.Error("the file was changed")
	}
	if err := WriteStarter(ctx, path, list, true); err != nil {
		t.Error(err)
	}
	if err := WriteStarter(ctx, "starter.xlsm", list, true); err == nil || !strings.Contains(err.Error(), "starter.xlsx") {
		t.Errorf("got %v", err)
	}
}

func TestLevelsAreShownAsPeopleWriteThem(t *testing.T) {
	for x, want := range map[float64]string{0.95: "95%", 0.999: "99.9%", 0.9975: "99.75%", 0.05: "5%", 0.07: "7%", 0.8213105387241096: "0.8213105387241096"} {
		if got := percent(x); got != want {
			t.Errorf("percent(%v) = %s, want %s", x, got, want)
		}
	}
}
