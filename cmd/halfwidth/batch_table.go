package main

import (
	"errors"
	"fmt"
	"io"
	"strings"

	"halfwidth/cmd/internal/texttab"
	"halfwidth/funcs"
	"halfwidth/workbook"
)

type statusCounts = map[funcs.Status]int

// batchTable is what a batch prints: as text one line for each book, with what
// is wrong as footnotes; as CSV and JSON all rows of all books, as they come.
type batchTable struct {
	w       io.Writer
	text    *texttab.Table
	stream  *texttab.Stream
	leftOut []workbook.Found

	books  int
	fates  [notStarted + 1]int
	counts statusCounts
	wrong  bool
}

func newBatchTable(w io.Writer, f texttab.Format, columns []texttab.Column, leftOut []workbook.Found) *batchTable {
	t := &batchTable{w: w, leftOut: leftOut, counts: statusCounts{}}
	if f != texttab.Text {
		t.stream = texttab.NewStream(w, columns, f)
		return t
	}
	t.text = &texttab.Table{Columns: []texttab.Column{{Name: "book"}, {Name: "ok", Right: true}, {Name: "caution", Right: true},
		{Name: "refused", Right: true}, {Name: "outcome"}}}
	return t
}

// The words for what became of a book that was not worked out.
var fateWords = [...]string{failed: "failed", noSheet: "no calculation sheet", notStarted: "interrupted"}

func (t *batchTable) add(r bookResult) {
	t.books++
	t.fates[r.fate]++
	t.wrong = t.wrong || r.wrong
	for status, n := range r.counts {
		t.counts[status] += n
	}
	if r.fate != worked {
		r.outcome = fateWords[r.fate]
		r.rows = []texttab.Row{{Cells: []any{r.book.Path, nil, nil, nil, nil, r.outcome}, Notes: r.notes}}
	}
	switch {
	case t.stream != nil:
		for _, row := range r.rows {
			t.stream.Add(row)
		}
	case r.fate == worked:
		t.text.Rows = append(t.text.Rows, texttab.Row{Notes: r.notes, Cells: []any{r.book.Path,
			r.counts[funcs.StatusOK], r.counts[funcs.StatusCaution], r.counts[funcs.StatusRefused], r.outcome}})
	case r.fate == notStarted: // counted in the last line
	case r.fate == noSheet:
		r.notes = nil // the outcome says it
		fallthrough
	default:
		t.text.Rows = append(t.text.Rows, texttab.Row{Notes: r.notes, Cells: []any{r.book.Path, nil, nil, nil, r.outcome}})
	}
}

// close prints the table, what was left out, and a last line that sums up.
func (t *batchTable) close(done string) error {
	if t.stream != nil {
		for _, f := range t.leftOut {
			t.stream.Add(texttab.Row{Cells: []any{f.Path, nil, nil, nil, nil, "left out"}, Notes: []string{f.LeftOut}})
		}
		return t.stream.Close()
	}
	if len(t.text.Rows) > 0 {
		if err := t.text.Write(t.w, texttab.Text); err != nil {
			return err
		}
		fmt.Fprintln(t.w)
	}
	if len(t.leftOut) > 0 {
		fmt.Fprintln(t.w, "Left out:")
		for _, f := range t.leftOut {
			fmt.Fprintf(t.w, "  %s: %s\n", texttab.Clean(f.Path), f.LeftOut)
		}
		fmt.Fprintln(t.w)
	}
	_, err := fmt.Fprintln(t.w, texttab.Fit(t.w, t.lastLine(done)))
	return err
}

func (t *batchTable) lastLine(done string) string {
	line := fmt.Sprintf("%s %d of %s: %s", done, t.fates[worked], workbooks(t.books), rowCounts(t.counts))
	var rest []string
	for _, n := range []struct {
		count int
		text  string
	}{{t.fates[failed], "failed"}, {t.fates[noSheet], "without a calculation sheet"}, {t.fates[notStarted], "not done when interrupted"}, {len(t.leftOut), "left out"}} {
		if n.count > 0 {
			rest = append(rest, fmt.Sprintf("%d %s", n.count, n.text))
		}
	}
	if len(rest) > 0 {
		line += "; " + strings.Join(rest, ", ")
	}
	return line + "."
}

// verdict is how a batch ends: well; with something refused, out of date or
// failed; or with nothing done. A shard may be empty.
func (t *batchTable) verdict(sharded bool) error {
	switch {
	case t.fates[notStarted] > 0:
		return fmt.Errorf("interrupted when %d of %s were done", t.books-t.fates[notStarted], workbooks(t.books))
	case t.fates[worked] == 0 && t.fates[failed] > 0:
		return fmt.Errorf("%d of %s failed, and none could be worked out; the table says why", t.fates[failed], workbooks(t.books))
	case t.fates[failed] > 0:
		return partlyError{fmt.Sprintf("%d of %s failed; the table says why", t.fates[failed], workbooks(t.books))}
	case t.wrong:
		return errRefused
	case t.fates[worked] == 0 && !sharded:
		return errors.New("nothing was worked out: no workbook (.xlsx, .xlsm, .calculations.csv or .calculations.tsv) with a calculation sheet was found")
	}
	return nil
}

func workbooks(n int) string {
	if n == 1 {
		return "1 workbook"
	}
	return fmt.Sprintf("%d workbooks", n)
}
