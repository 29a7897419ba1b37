package page

import (
	"bytes"
	"context"
	"errors"
	"fmt"
	"os"
	"path/filepath"
	"regexp"
	"strings"
	"testing"
	"time"

	"github.com/xuri/excelize/v2"

	"halfwidth/funcs"
	"halfwidth/workbook"
)

const demo = "../../testdata/workbooks/larkmoor.xlsx"

func work(t *testing.T, path string) *workbook.Report {
	t.Helper()
	r, err := workbook.Work(context.Background(), path, workbook.Options{KeepValues: true})
	if err != nil {
		t.Fatal(err)
	}
	return r
}

func pageOf(t *testing.T, r *workbook.Report) string {
	t.Helper()
	var b bytes.Buffer
	if err := Write(context.Background(), &b, r); err != nil {
		t.Fatal(err)
	}
	return b.String()
}

// book writes a workbook: sheets of rows of cells.
func book(t *testing.T, sheets map[string][][]any) string {
	t.Helper()
	f := excelize.NewFile()
	defer f.Close()
	if err := f.SetSheetName("Sheet1", "Calculations"); err != nil {
		t.Fatal(err)
	}
	for name, rows := range sheets {
		if name != "Calculations" {
			if _, err := f.NewSheet(name); err != nil {
				t.Fatal(err)
			}
		}
		for i, row := range rows {
			if err := f.SetSheetRow(name, fmt.Sprintf("A%d", i+1), &row); err != nil {
				t.Fatal(err)
			}
		}
	}
	path := filepath.Join(t.TempDir(), "Larkmoor trips.xlsx")
	if err := f.SaveAs(path); err != nil {
		t.Fatal(err)
	}
	return path
}

// trips is a data sheet of so many rows: minutes and depot.
func trips(n int) [][]any {
	rows := [][]any{{"minutes", "depot"}}
	for i, x := range normal(n, 30, 5) {
		rows = append(rows, []any{x, []string{"North", "Quay", "Mill"}[i%3]})
	}
	return rows
}

var (
	outside = regexp.MustCompile(`(?i)https?:|//|@import|\bsrc\s*=|url\((?:[^d]|d[^a])|<script|<link|<iframe|<object|\bon[a-z]+\s*=`)
	ids     = regexp.MustCompile(`\bid="([^"]*)"`)
	points  = regexp.MustCompile(`(?:href="#|aria-labelledby=")([^"]*)"`)
	article = regexp.MustCompile(`(?s)<article .*?</article>`)
	svg     = regexp.MustCompile(`(?s)<svg .*?</svg>`)
	heading = regexp.MustCompile(`<h([1-6])`)
)

// checkPage holds what every page must satisfy.
func checkPage(t *testing.T, page string, r *workbook.Report) {
	t.Helper()
	if found := outside.FindString(page); found != "" {
		t.Errorf("the page is not self-contained: it holds %q", found)
	}
	seen := map[string]bool{}
	for _, m := range ids.FindAllStringSubmatch(page, -1) {
		if seen[m[1]] {
			t.Errorf("the id %q is there twice", m[1])
		}
		seen[m[1]] = true
	}
	for _, m := range points.FindAllStringSubmatch(page, -1) {
		if !seen[m[1]] {
			t.Errorf("something points to %q, which is nowhere", m[1])
		}
	}
	level := 0
	for _, m := range heading.FindAllStringSubmatch(page, -1) {
		next := int(m[1][0] - '0')
		if next > level+1 {
			t.Errorf("a heading of level %d follows one of level %d", next, level)
		}
		level = next
	}
	articles := article.FindAllString(page, -1)
	if len(articles) != len(r.Results.Rows) {
		t.Fatalf("%d calculations are shown, %d were worked out", len(articles), len(r.Results.Rows))
	}
	for i, row := range r.Results.Rows {
		want := 1
		if row.Status == funcs.StatusRefused {
			want = 0
		}
		pictures := svg.FindAllString(articles[i], -1)
		if len(pictures) != want {
			t.Errorf("row %d (%s): %d pictures, want %d", row.Row.Number, row.Status, len(pictures), want)
		}
		for _, p := range pictures {
			if err := wellFormed(p); err != nil {
				t.Errorf("row %d: %v", row.Row.Number, err)
			}
		}
	}
}

func TestThePageOfTheDemoIsWholeAndSelfContained(t *testing.T) {
	start := time.Now()
	r := work(t, demo)
	page := pageOf(t, r)
	if d := time.Since(start); d > 20*time.Second {
		t.Errorf("it took %v", d)
	}
	checkPage(t, page, r)
	if len(page) > 400_000 {
		t.Errorf("%d bytes", len(page))
	}
	if other := pageOf(t, work(t, demo)); other != page {
		t.Error("a second page has other bytes")
	}
	for _, want := range []string{"<title>larkmoor.xlsx: calculations</title>", `<html lang="en">`, "43 calculations: 31 ok and 12 with a caution.",
		`<data value="31.01413319776309">31.0141</data>`, "minutes in Trips where depot = North"} {
		if !strings.Contains(page, want) {
			t.Errorf("%q is not in the page", want)
		}
	}
	for _, row := range r.Results.Rows {
		fingerprint, _ := row.Outcome.Get("fingerprint")
		if !strings.Contains(page, fingerprint.(string)) {
			t.Errorf("row %d: its fingerprint is not in the page", row.Row.Number)
		}
	}
}

// The browser check of testdata/page opens this page: it has to show all kinds.
func TestTheSheetOfPicturesShowsEveryKind(t *testing.T) {
	r, err := workbook.Work(context.Background(), "../../testdata/page/pictures.calculations.csv",
		workbook.Options{KeepValues: true, Data: []string{"../../testdata/workbooks"}})
	if err != nil {
		t.Fatal(err)
	}
	checkPage(t, pageOf(t, r), r)
	drawn := map[*rule]bool{}
	refused := 0
	for _, row := range r.Results.Rows {
		if row.Status == funcs.StatusRefused {
			refused++
			continue
		}
		drawn[ruleFor(row.Row.Function)] = true
	}
	for i := range rules {
		if !drawn[&rules[i]] {
			t.Errorf("no row is drawn by rule %d", i)
		}
	}
	if refused != 1 {
		t.Errorf("%d rows are refused, want the one that is there for it", refused)
	}
}

func TestTheMostSeriousFindingsStandFirst(t *testing.T) {
	path := book(t, map[string][][]any{"Trips": append(trips(60), []any{"n/a", "North"}), "Calculations": {
		{"work out", "label", "sample", "> mean", "> note"},
		{"mean-interval", "all trips", "minutes in Trips"},
		{"mean-interval", "few", "1; 2; 4"},
		{"mean-interval", "misspelt", "minuts in Trips"},
	}})
	r := work(t, path)
	page := pageOf(t, r)
	checkPage(t, page, r)
	first := page[strings.Index(page, `id="first"`):strings.Index(page, `id="list"`)]
	refused, few, skipped := strings.Index(first, ">misspelt</a>"), strings.Index(first, ">few</a>"), strings.Index(first, ">all trips</a>")
	if refused < 0 || few < refused || skipped < few {
		t.Errorf("refused at %d, few values at %d, skipped cells at %d:\n%s", refused, few, skipped, first)
	}
	if !strings.Contains(page, "3 calculations: 2 with a caution and 1 refused.") {
		t.Error("the calculations are not counted")
	}
}

func TestTextsOfTheWorkbookStayTexts(t *testing.T) {
	hostile := []string{`<script>alert(1)</script>`, `"><img src=x onerror=alert(1)>`, `=cmd|' /C calc'!A0`, "a]]>b &amp; </title>", "tab\tand\u202eturned", `'; --`}
	rows := [][]any{{"work out", "label", "samples", "> f", "> note", "table sheet"}}
	data := [][]any{{"minutes", "depot"}}
	for i, x := range normal(90, 30, 5) {
		data = append(data, []any{x, hostile[i%len(hostile)]})
	}
	for _, label := range hostile {
		rows = append(rows, []any{"analysis-of-variance", label, "minutes in 'a <b>' for each depot"})
	}
	rows = append(rows, []any{}, []any{"work out", "label", "sample", "table sheet"}, []any{"mean-interval", "each <i>", "minutes in 'a <b>' for each depot", "Groups"})
	r := work(t, book(t, map[string][][]any{"a <b>": data, "Calculations": rows}))
	for _, row := range r.Results.Rows {
		if row.Status == funcs.StatusRefused {
			t.Fatalf("row %d: %s", row.Row.Number, row.Note())
		}
	}
	page := pageOf(t, r)
	for _, tag := range []string{"<script", "<img", "</title>b", "onerror=alert(1)>"} {
		if strings.Contains(strings.Replace(page, "</title>\n", "", 1), tag) {
			t.Errorf("the page holds %q", tag)
		}
	}
	for _, row := range article.FindAllString(page, -1) {
		pictures := svg.FindAllString(row, -1)
		if len(pictures) != 1 {
			t.Fatalf("%d pictures", len(pictures))
		}
		if err := wellFormed(pictures[0]); err != nil {
			t.Error(err)
		}
	}
	if strings.Count(page, "&lt;script&gt;alert(1)&lt;/script&gt;") < 3 {
		t.Error("the label is not shown as it stands")
	}
}

func TestAHundredThousandValuesStayASmallPage(t *testing.T) {
	path := book(t, map[string][][]any{"Trips": trips(100_000), "Calculations": {
		{"work out", "sample", "second-sample", "samples", "> n"},
		{"mean-interval", "minutes in Trips"},
		{"independence-check", "minutes in Trips"},
		{"difference-interval", "minutes in Trips where depot = North", "minutes in Trips where depot = Quay"},
		{"analysis-of-variance", "", "", "minutes in Trips for each depot"},
	}})
	r := work(t, path)
	page := pageOf(t, r)
	checkPage(t, page, r)
	if len(page) > 120_000 {
		t.Errorf("%d bytes", len(page))
	}
}

func TestManyCalculationsMakeAPageInTime(t *testing.T) {
	if testing.Short() {
		t.Skip("works out 400 calculations")
	}
	rows := [][]any{{"work out", "label", "sample", "second-sample", "sd", "half-width", "difference", "first-sd", "> n", "> note"}}
	for i := range 400 {
		label := fmt.Sprintf("question %d", i+1)
		rows = append(rows, [][]any{
			{"mean-interval", label, "minutes in Trips where depot = North"},
			{"difference-interval", label, "minutes in Trips where depot = North", "minutes in Trips where depot = Quay"},
			{"mean-precision-size", label, "", "", 6.5, 1},
			{"difference-test-size", label, "", "", "", "", 2, 6},
		}[i%4])
	}
	path := book(t, map[string][][]any{"Trips": trips(2000), "Calculations": rows})
	start := time.Now()
	r := work(t, path)
	page := pageOf(t, r)
	if d := time.Since(start); d > 60*time.Second {
		t.Errorf("it took %v", d)
	}
	checkPage(t, page, r)
	if len(page) > 4_000_000 {
		t.Errorf("%d bytes", len(page))
	}
}

func TestAPageIsWrittenWholeAndOnlyOverPages(t *testing.T) {
	ctx, r, dir := context.Background(), work(t, demo), t.TempDir()
	target := filepath.Join(dir, "page.html")
	for range 2 {
		if err := WriteFile(ctx, target, r, false); err != nil {
			t.Fatal(err)
		}
	}
	if got, err := os.ReadFile(target); err != nil || string(got) != pageOf(t, r) {
		t.Errorf("the file holds something else (%v)", err)
	}
	if err := os.WriteFile(target, []byte("<p>my notes"), 0o600); err != nil {
		t.Fatal(err)
	}
	if err := WriteFile(ctx, target, r, false); !errors.Is(err, ErrTaken) {
		t.Errorf("over notes: %v", err)
	}
	if err := WriteFile(ctx, target, r, true); err != nil {
		t.Error(err)
	}
	if files, err := os.ReadDir(dir); err != nil || len(files) != 1 {
		t.Errorf("the folder holds %v (%v)", files, err)
	}
	if err := WriteFile(ctx, filepath.Join(dir, "none", "page.html"), r, false); err == nil {
		t.Error("a folder that is not there was written to")
	}
}

func TestAnInterruptEndsAPage(t *testing.T) {
	ctx, cancel := context.WithCancel(context.Background())
	r := work(t, demo)
	cancel()
	if err := Write(ctx, &bytes.Buffer{}, r); !errors.Is(err, context.Canceled) {
		t.Errorf("error %v", err)
	}
}
