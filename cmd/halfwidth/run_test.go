package main

import (
	"archive/zip"
	"bytes"
	"context"
	"encoding/json"
	"io"
	"math"
	"os"
	"path/filepath"
	"strings"
	"testing"

	"github.com/xuri/excelize/v2"

	"halfwidth/funcs"
)

const demo = "../../testdata/workbooks/larkmoor.xlsx"

// run carries out one command line.
func run(t *testing.T, args ...string) (stdout, stderr string, code int) {
	t.Helper()
	var out, errs bytes.Buffer
	code = Run(context.Background(), args, &out, &errs)
	return out.String(), errs.String(), code
}

// copyTo copies a file into a folder of the test's own.
func copyTo(t *testing.T, from, dir, name string) string {
	t.Helper()
	data, err := os.ReadFile(from)
	if err != nil {
		t.Fatal(err)
	}
	path := filepath.Join(dir, name)
	if err := os.WriteFile(path, data, 0o600); err != nil {
		t.Fatal(err)
	}
	return path
}

// parts gives the uncompressed parts of a package by name.
func parts(t *testing.T, path string) map[string]string {
	t.Helper()
	in, err := zip.OpenReader(path)
	if err != nil {
		t.Fatal(err)
	}
	defer in.Close()
	out := map[string]string{}
	for _, f := range in.File {
		r, err := f.Open()
		if err != nil {
			t.Fatal(err)
		}
		data, err := io.ReadAll(r)
		if err != nil {
			t.Fatal(err)
		}
		out[f.Name] = string(data)
	}
	return out
}

func TestTheDemoIsFilledAndAllElseIsKept(t *testing.T) {
	dir := t.TempDir()
	book := copyTo(t, demo, dir, "larkmoor.xlsx")
	stdout, stderr, code := run(t, "fill", book)
	if code != exitOK || stderr != "" {
		t.Fatalf("code %d, stderr %q", code, stderr)
	}
	filled := filepath.Join(dir, "larkmoor-filled.xlsx")
	if !strings.Contains(stdout, "mean-interval") || !strings.HasPrefix(lastLine(stdout), "Wrote "+filled+": ") {
		t.Errorf("it printed:\n%s", stdout)
	}
	before, after := parts(t, book), parts(t, filled)
	const sheet = "xl/worksheets/sheet1.xml"
	for name, content := range before {
		if name != sheet && after[name] != content {
			t.Errorf("part %s changed", name)
		}
	}
	if len(after) != len(before) || after[sheet] == before[sheet] {
		t.Error("the calculation sheet alone should change")
	}
	checkResultCells(t, filled)

	t.Run("filling the output again changes nothing", func(t *testing.T) {
		again := filepath.Join(dir, "again.xlsx")
		if _, stderr, code := run(t, "fill", filled, "--output", again); code != exitOK {
			t.Fatal(stderr)
		}
		if first, second := readFile(t, filled), readFile(t, again); !bytes.Equal(first, second) {
			t.Error("the bytes differ")
		}
		stdout, _, code := run(t, "fill", "--in-place", filled)
		if code != exitOK || !strings.HasPrefix(lastLine(stdout), "Nothing to write") {
			t.Errorf("code %d, %s", code, lastLine(stdout))
		}
	})
}

func readFile(t *testing.T, path string) []byte {
	t.Helper()
	data, err := os.ReadFile(path)
	if err != nil {
		t.Fatal(err)
	}
	return data
}

func lastLine(s string) string {
	lines := strings.Split(strings.TrimSpace(s), "\n")
	return lines[len(lines)-1]
}

// checkResultCells reads the calculation sheet with an independent library:
// statuses are words, results are values, and there is no formula anywhere.
func checkResultCells(t *testing.T, path string) {
	t.Helper()
	f, err := excelize.OpenFile(path)
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	rows, err := f.GetRows("Calculations", excelize.Options{RawCellValue: true})
	if err != nil {
		t.Fatal(err)
	}
	var header []string
	numbers, statuses := 0, 0
	for i, row := range rows {
		if len(row) > 0 && strings.HasPrefix(row[0], "work out") {
			header = row
			continue
		}
		for j, text := range row {
			at, err := excelize.CoordinatesToCellName(j+1, i+1)
			if err != nil {
				t.Fatal(err)
			}
			if formula, err := f.GetCellFormula("Calculations", at); err != nil || formula != "" {
				t.Errorf("%s holds the formula %q (%v)", at, formula, err)
			}
			if j >= len(header) || text == "" || !strings.HasPrefix(header[j], ">") {
				continue
			}
			switch name := strings.TrimSpace(header[j][1:]); name {
			case "status":
				statuses++
				if text != "ok" && text != "caution" && text != "refused" {
					t.Errorf("%s: status %q", at, text)
				}
			case "note", "sentence":
			default:
				kind, err := f.GetCellType("Calculations", at)
				if err != nil || kind != excelize.CellTypeUnset && kind != excelize.CellTypeNumber {
					t.Errorf("%s (%s) holds %q, no number", at, name, text)
				}
				numbers++
			}
		}
	}
	if statuses < 25 || numbers < 100 {
		t.Errorf("%d statuses and %d numbers were filled", statuses, numbers)
	}
}

func TestPreviewWritesNothing(t *testing.T) {
	dir := t.TempDir()
	book := copyTo(t, demo, dir, "larkmoor.xlsx")
	before := readFile(t, book)
	stdout, stderr, code := run(t, "preview", book)
	if code != exitOK || stderr != "" || !strings.Contains(stdout, "Trips!E2:E2001 where depot (B2:B2001) = North") {
		t.Errorf("code %d, stderr %q, stdout\n%s", code, stderr, stdout)
	}
	entries, err := os.ReadDir(dir)
	if err != nil {
		t.Fatal(err)
	}
	if len(entries) != 1 || !bytes.Equal(before, readFile(t, book)) {
		t.Error("preview changed the folder")
	}
}

// jsonResults reads the table that answer --format json prints.
func jsonResults(t *testing.T, text string) map[string]any {
	t.Helper()
	var rows []struct {
		Result string
		Value  any
	}
	if err := json.Unmarshal([]byte(text), &rows); err != nil {
		t.Fatalf("%v in %s", err, text)
	}
	out := map[string]any{}
	for _, r := range rows {
		out[r.Result] = r.Value
	}
	return out
}

func TestEveryExampleGivesTheSameDigitsFromTheShell(t *testing.T) {
	for _, f := range funcs.All() {
		args := []string{"answer", f.Name, "--format", "json"}
		direct := map[string]any{}
		for _, a := range f.Example.Arguments {
			args = append(args, a.Name+"="+funcs.FormatArgument(a.Value))
			direct[a.Name] = a.Value
		}
		stdout, stderr, code := run(t, args...)
		if code != exitOK {
			t.Errorf("%s: code %d, %s", f.Name, code, stderr)
			continue
		}
		want, err := f.Answer(context.Background(), direct)
		if err != nil {
			t.Fatal(err)
		}
		got := jsonResults(t, stdout)
		for _, r := range want.Results() {
			wanted := r.Value
			switch v := wanted.(type) {
			case int:
				wanted = float64(v)
			case float64:
				if g, ok := got[r.Name].(float64); ok && math.Float64bits(g) == math.Float64bits(v) {
					continue
				}
			}
			if r.Name != "note" && got[r.Name] != wanted {
				t.Errorf("%s: %s is %v from the shell, %v from the package", f.Name, r.Name, got[r.Name], wanted)
			}
		}
	}
}

func TestAnswerReadsASheet(t *testing.T) {
	stdout, stderr, code := run(t, "answer", "mean-interval", "--book", demo, "--format", "json", "sample=minutes in Trips where depot = North")
	if code != exitOK {
		t.Fatal(stderr)
	}
	got := jsonResults(t, stdout)
	if got["n"] != got["used"] || got["used"].(float64) < 600 || got["range"] != "Trips!E2:E2001 where depot (B2:B2001) = North" {
		t.Errorf("got %v", got)
	}
}
