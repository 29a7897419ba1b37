package calculation

import (
	"context"
	"flag"
	"fmt"
	"os"
	"path/filepath"
	"slices"
	"strconv"
	"strings"
	"testing"
)

var update = flag.Bool("update", false, "rewrite the expected parts of testdata/sheets")

const scenarios = "../../testdata/sheets"

// A scenario is one text file: a line that says why, then parts that begin with
// a line `-- NAME --`; testdata/sheets/README.md describes them.
func TestScenarios(t *testing.T) {
	files, err := filepath.Glob(filepath.Join(scenarios, "*.txt"))
	if err != nil || len(files) == 0 {
		t.Fatalf("no scenarios in %s: %v", scenarios, err)
	}
	for _, file := range files {
		t.Run(strings.TrimSuffix(filepath.Base(file), ".txt"), func(t *testing.T) { runScenario(t, file) })
	}
}

func runScenario(t *testing.T, file string) {
	data, err := os.ReadFile(file)
	if err != nil {
		t.Fatal(err)
	}
	given, want, ok := strings.Cut(strings.ReplaceAll(string(data), "\r\n", "\n"), "\n-- want --\n")
	if !ok && !*update {
		t.Fatalf("no part -- want --")
	}
	s := readScenario(t, given)
	got := s.run(t, 1)
	if again := s.run(t, 4); again != got {
		t.Errorf("four workers give another answer:\n%s\nthan one:\n%s", again, got)
	}
	if *update {
		if err := os.WriteFile(file, []byte(given+"\n-- want --\n"+got), 0o666); err != nil {
			t.Fatal(err)
		}
		return
	}
	if got != want {
		t.Errorf("got\n%s\nwant\n%s", got, want)
	}
}

// scenario is a book and what to ask of it.
type scenario struct {
	source  *Rows
	options Options
}

func readScenario(t *testing.T, text string) *scenario {
	s := &scenario{source: NewRows()}
	files := map[string]*Rows{}
	var replace []string
	for i, part := range strings.Split(text, "\n-- ") {
		head, body, ok := strings.Cut(part+"\n", " --\n")
		if i == 0 {
			continue // the line that says why
		}
		if !ok {
			t.Fatalf("part %q does not end its first line with --", head)
		}
		kind, name, _ := strings.Cut(head, " ")
		switch kind {
		case "sheet":
			s.source.AddFrame(name, frameOf(t, body))
		case "file": // FILE or FILE/SHEET
			end := fileEnd(name)
			file := name[:end]
			if files[file] == nil {
				files[file] = NewRows()
				s.source.AddFile(file, files[file])
			}
			sheet := strings.TrimPrefix(name[end:], "/")
			if sheet == "" {
				sheet = file
			}
			files[file].AddFrame(sheet, frameOf(t, body))
		case "table", "name": // NAME SHEET!AREA [no-header] [totals] [of SHEET], or NAME =FORMULA
			if name, formula, ok := strings.Cut(name, " ="); ok {
				s.source.AddPlace(Place{Kind: DefinedName, Name: name, NoRange: formula})
				break
			}
			name, only, _ := strings.Cut(name, " of ")
			fields := strings.Fields(name)
			sheet, area, _ := strings.Cut(fields[1], "!")
			a, ok := ParseArea(area)
			if !ok {
				t.Fatalf("part %q: no area", head)
			}
			p := Place{Kind: DefinedName, Name: fields[0], Only: only, Sheet: sheet, FirstRow: a.FirstRow, LastRow: a.LastRow, FirstCol: a.FirstCol, LastCol: a.LastCol}
			if kind == "table" {
				p.Kind, p.HeaderRows = Table, 1
				if slices.Contains(fields, "no-header") {
					p.HeaderRows = 0
				}
				if slices.Contains(fields, "totals") {
					p.TotalsRows = 1
				}
			}
			s.source.AddPlace(p)
		case "late":
			s.source.SetRecalculatesLate(true)
		case "sheets":
			s.options.Sheets = strings.Split(name, ", ")
		case "replace":
			replace = append(replace, name)
		default:
			t.Fatalf("unknown part %q", head)
		}
	}
	s.options.MayReplace = func(sheet string) bool { return slices.Contains(replace, sheet) }
	return s
}

// frameOf reads rows of cells with | between them.
func frameOf(t *testing.T, body string) *Frame {
	f := NewFrame()
	row := 0
	for line := range strings.SplitSeq(strings.TrimRight(body, "\n"), "\n") {
		row++
		line, hidden := strings.CutPrefix(line, "~")
		f.SetRow(row, 0)
		if hidden {
			f.SetRow(row, RowHidden)
		}
		for col, text := range strings.Split(line, "|") {
			cell := cellOf(t, strings.TrimSpace(text))
			if cell != (Cell{}) {
				f.Set(row, col+1, cell)
			}
		}
	}
	return f
}

// cellOf reads a cell: a number, 12%, a date, h:mm, TRUE, #N/A, 'text, =VALUE for
// a formula with its saved value, =? for one without, ^ for a covered cell.
func cellOf(t *testing.T, text string) Cell {
	if rest, ok := strings.CutPrefix(text, "="); ok && text != "=" {
		if rest == "?" {
			return Cell{Formula: true, Unsaved: true}
		}
		c := cellOf(t, rest)
		c.Formula = true
		return c
	}
	if x, ok := parseNumber(text); ok {
		return Cell{Kind: Number, Number: x}
	}
	if days, _, ok := parseDate(text); ok {
		return Cell{Kind: Date, Number: days}
	}
	if h, m, ok := strings.Cut(text, ":"); ok && len(m) == 2 {
		hours, err := strconv.Atoi(h)
		minutes, err2 := strconv.Atoi(m)
		if err == nil && err2 == nil {
			return Cell{Kind: Duration, Number: float64(hours*60+minutes) / 1440}
		}
	}
	switch {
	case text == "":
		return Cell{}
	case text == "^":
		return Cell{Covered: true}
	case text == "TRUE":
		return Cell{Kind: Bool, Number: 1}
	case text == "FALSE":
		return Cell{Kind: Bool}
	case strings.HasPrefix(text, "#"):
		return Cell{Kind: Error, Text: text}
	}
	return Cell{Kind: Text, Text: strings.ReplaceAll(strings.TrimPrefix(text, "'"), `\n`, "\n")}
}

// run plans and runs the book and writes down what came of it.
func (s *scenario) run(t *testing.T, workers int) string {
	ctx := context.Background()
	plan, err := NewPlan(ctx, s.source, s.options)
	if err != nil {
		return "error: " + err.Error() + "\n"
	}
	results, err := plan.Run(ctx, workers)
	if err != nil {
		t.Fatal(err)
	}
	var b strings.Builder
	for _, r := range results.Rows {
		fmt.Fprintf(&b, "%s row %d: %s\n", r.Row.Sheet(), r.Row.Number, r.Status)
		for _, e := range r.Edits {
			if e.Value != nil {
				fmt.Fprintf(&b, "    %s = %s\n", e.Cell, show(e.Value))
			}
		}
		for _, f := range r.Findings {
			writeFinding(&b, f)
		}
	}
	layout := plan.Diagnostics()
	for _, d := range layout {
		writeFinding(&b, d)
	}
	fmt.Fprintf(&b, "printed: %d\n", len(results.Diagnostics))
	for _, table := range results.Tables {
		fmt.Fprintf(&b, "sheet %s: %s\n", table.Name, strings.Join(table.Header, " | "))
		if table.Refused != "" {
			fmt.Fprintf(&b, "    refused: %s\n", table.Refused)
		}
		for _, row := range table.Rows {
			cells := make([]string, len(row))
			for i, v := range row {
				cells[i] = show(v)
			}
			fmt.Fprintf(&b, "    %s\n", strings.Join(cells, " | "))
		}
	}
	return b.String()
}

// show writes a value to 6 significant digits, so that only the layers of this
// package are pinned down.
func show(v any) string {
	switch v := v.(type) {
	case nil:
		return ""
	case float64:
		return strconv.FormatFloat(v, 'g', 6, 64)
	case string:
		return strconv.Quote(v)
	}
	return fmt.Sprint(v)
}

func writeFinding(b *strings.Builder, d Diagnostic) {
	at := d.Cell.String()
	if d.Span != (Span{}) {
		at += fmt.Sprintf("[%d:%d]", d.Span.Start, d.Span.End)
	}
	cells := ""
	if len(d.Cells) > 0 {
		cells = " {" + strings.Join(d.Cells, " ") + "}"
	}
	fmt.Fprintf(b, "  %s %s, %s: %s%s\n", at, d.Code, d.Severity, d.Message, cells)
}
