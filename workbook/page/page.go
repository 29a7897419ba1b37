// Package page shows a workbook that was worked out as one self-contained page:
// what was found, then every calculation with its sentence, its findings and a
// picture.
//
// Contract: the page needs no network, no script and no file beside it, and the
// same report gives the same bytes. Every function has a picture (pictures.go
// finds it from the descriptor), and the picture says in words what it shows.
// Nothing is estimated here: numbers come from the report, or are asked of
// package funcs. Reading and working out are package workbook's.
package page

import (
	"bytes"
	"context"
	_ "embed" // the page's template and style sheet
	"fmt"
	"html/template"
	"io"
	"path/filepath"
	"runtime"
	"strconv"
	"sync"
	"sync/atomic"

	"halfwidth/funcs"
	"halfwidth/workbook"
)

//go:embed page.html
var pageHTML string

//go:embed page.css
var pageCSS string

// pageTemplate is parsed on first use: most verbs write no page.
var pageTemplate = sync.OnceValue(func() *template.Template {
	return template.Must(template.New("page").Parse(pageHTML))
})

// Write writes the page of a workbook that was worked out with
// workbook.Options.KeepValues. The error is the context's or the writer's.
func Write(ctx context.Context, w io.Writer, r *workbook.Report) error {
	v, err := newView(ctx, r)
	if err != nil {
		return err
	}
	var b bytes.Buffer
	if err := pageTemplate().Execute(&b, v); err != nil {
		return fmt.Errorf("page of %s: %w", r.Book, err)
	}
	_, err = w.Write(b.Bytes())
	return err
}

// view is what the template shows.
type view struct {
	Title  string
	Style  template.CSS
	Lead   string
	First  []finding
	Quiet  string // where nothing asks for attention
	Layout []finding
	Sheets []sheet
}

// sheet is one calculation sheet.
type sheet struct {
	ID, Name string
	Cards    []card
}

// card is one calculation.
type card struct {
	ID       string
	Title    string
	Function string
	Place    string
	Status   string
	Answer   string // in a few words, for the list
	Sentence string
	Findings []finding
	Picture  template.HTML
	Caption  []string
	Inputs   []line
	Results  []line
	Table    *table
	Facts    []line
}

// line is a name with a value; Exact is a number with every digit.
type line struct {
	Name, Value, Unit, Exact, More string
}

// table is a result that is a table.
type table struct {
	Caption string
	Columns []column
	Rows    [][]cell
}

type column struct {
	Name   string
	Number bool
}

type cell struct {
	Text, Exact string
	Number      bool
}

// finding is one finding with the calculations that have it.
type finding struct {
	Severity string
	Word     string
	Message  string
	Cards    []link
	More     int
}

type link struct{ ID, Title string }

func newView(ctx context.Context, r *workbook.Report) (*view, error) {
	v := &view{Title: filepath.Base(r.Book), Style: template.CSS(pageCSS)}
	rows := r.Results.Rows
	cards := make([]card, len(rows))
	errs := make([]error, len(rows))
	var next atomic.Int64
	var all sync.WaitGroup
	for range runtime.GOMAXPROCS(0) {
		all.Go(func() {
			for i := int(next.Add(1) - 1); i < len(rows) && ctx.Err() == nil; i = int(next.Add(1) - 1) {
				cards[i], errs[i] = newCard(ctx, i, rows[i])
			}
		})
	}
	all.Wait()
	if err := ctx.Err(); err != nil {
		return nil, err
	}
	for i, err := range errs {
		if err != nil {
			return nil, fmt.Errorf("%s: %w", cards[i].Place, err)
		}
	}
	at := map[string]int{}
	for _, name := range r.Plan.Sheets {
		at[name] = len(v.Sheets)
		v.Sheets = append(v.Sheets, sheet{ID: "s" + strconv.Itoa(len(v.Sheets)+1), Name: name})
	}
	for i, row := range rows {
		s := &v.Sheets[at[row.Row.Sheet()]]
		s.Cards = append(s.Cards, cards[i])
	}
	v.Lead = lead(r)
	v.First = firstFindings(rows, cards)
	for _, d := range r.Plan.Diagnostics() {
		v.Layout = append(v.Layout, newFinding(d))
	}
	for _, note := range r.Notes {
		v.Layout = append(v.Layout, finding{Severity: funcs.Information.String(), Word: severityWords[funcs.Information], Message: note})
	}
	if len(v.First) == 0 && len(v.Layout) == 0 {
		v.Quiet = "Nothing was found that makes an answer doubtful."
	}
	return v, nil
}

// lead counts the calculations.
func lead(r *workbook.Report) string {
	counts := r.Counts()
	text := plural(len(r.Results.Rows), "calculation")
	parts := []string{}
	for _, s := range []struct {
		status funcs.Status
		words  string
	}{{funcs.StatusOK, "ok"}, {funcs.StatusCaution, "with a caution"}, {funcs.StatusRefused, "refused"}} {
		if n := counts[s.status]; n > 0 {
			parts = append(parts, strconv.Itoa(n)+" "+s.words)
		}
	}
	if len(parts) == 0 {
		return text + "."
	}
	return text + ": " + funcs.AndList(parts) + "."
}
