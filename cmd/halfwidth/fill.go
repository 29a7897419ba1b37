package main

import (
	"fmt"
	"io"
	"path/filepath"
	"slices"
	"strings"

	"github.com/spf13/cobra"

	"halfwidth/cmd/internal/texttab"
	"halfwidth/funcs"
	"halfwidth/workbook"
	"halfwidth/workbook/calculation"
)

// bookFlags are the flags of the verbs that read workbooks.
type bookFlags struct {
	format *string
	shard  string
	quiet  bool
	o      workbook.Options
}

func addBookFlags(c *cobra.Command) *bookFlags {
	f := &bookFlags{format: formatFlag(c)}
	c.Flags().StringSliceVar(&f.o.Sheets, "sheet", nil, "work out the sheet `NAME` besides those named Calculations or marked in A1")
	c.Flags().StringSliceVar(&f.o.Data, "data", nil, "allow the files that expressions name to lie in `FOLDER`, besides the workbook's own")
	c.Flags().IntVar(&f.o.Workers, "jobs", 0, "work out `N` books, and rows of one book, at once (default: as many as there are cores)")
	c.Flags().StringVar(&f.shard, "shard", "", "work on part `K/N` of the books only, such as 1/3; each is in one part, by its path")
	c.Flags().BoolVar(&f.quiet, "quiet", false, "show no progress bar on a terminal")
	return f
}

func fillCommand() *cobra.Command {
	c := &cobra.Command{
		Use:   "fill BOOK.xlsx|FOLDER…",
		Short: "Work out the calculation sheets and write the results beside the questions",
		Long: "fill works out every calculation sheet of a workbook and writes the results into its result columns, as plain values.\n" +
			"It writes BOOK-filled.xlsx beside the workbook, which itself stays as it is. The questions may also stand in a text file,\n" +
			"NAME.calculations.csv or .tsv, by the same rules.\n" + aboutBatches,
		Example: "  halfwidth fill testdata/workbooks/larkmoor.xlsx",
		Args:    someBooks,
	}
	f := addBookFlags(c)
	c.Flags().StringVarP(&f.o.Output, "output", "o", "", "write to `FILE`, or into this folder")
	c.Flags().BoolVar(&f.o.InPlace, "in-place", false, "write into the workbook itself")
	c.Flags().BoolVar(&f.o.Replace, "replace", false, "write over an output that was changed since it was filled")
	verb := bookVerb{done: "Filled", writes: true, work: workbook.Fill, print: printFilled, columns: longColumns, tabulate: filledTable, sum: sumFilled}
	c.RunE = func(c *cobra.Command, words []string) error { return eachBook(c, f, words, verb) }
	return c
}

// aboutBatches is the part of the help on several books.
const aboutBatches = "\nFolders are searched to their depth for .xlsx, .xlsm and *.calculations.csv or .tsv. Of several books, one that fails does not\n" +
	"stop the rest, and one table sums up. The exit status is 0 where all rows are ok or caution, 1 where a row is refused or some\n" +
	"book failed, 2 where all failed or none was found, 130 or 143 where an interrupt ended it."

// someBooks asks for at least one workbook.
func someBooks(c *cobra.Command, args []string) error {
	if len(args) == 0 {
		return usageError{fmt.Errorf("no workbook named; write: %s", strings.TrimSpace(c.Example))}
	}
	return nil
}

// longColumns are the columns of CSV and JSON: a row for each result cell.
var longColumns = []texttab.Column{{Name: "book"}, {Name: "sheet"}, {Name: "row"}, {Name: "function"}, {Name: "label"},
	{Name: "status"}, {Name: "cell"}, {Name: "result"}, {Name: "value"}}

// filledTable adds the result cells of a book to a long table; the notes of a
// row stand at its first cell.
func filledTable(t *texttab.Table, r *workbook.Report) {
	for _, row := range r.Results.Rows {
		notes := notesOf(row.Findings)
		head := []any{r.Book, row.Row.Sheet(), row.Row.Number, functionName(row.Row), row.Row.Label, string(row.Status)}
		if len(row.Edits) == 0 {
			t.Rows = append(t.Rows, texttab.Row{Cells: append(head, nil, nil, nil), Notes: notes})
		}
		for _, e := range row.Edits {
			cells := append(append([]any{}, head...), e.Cell.String(), row.Row.Block.ResultName(e.Cell.Col), e.Value)
			t.Rows = append(t.Rows, texttab.Row{Cells: cells, Notes: notes})
			notes = nil
		}
	}
}

func functionName(r *calculation.Row) string {
	if r.Function == nil {
		return ""
	}
	return r.Function.Name
}

func notesOf(findings []calculation.Diagnostic) []string {
	var notes []string
	for _, f := range findings {
		notes = append(notes, f.Message)
	}
	return notes
}

// printFilled shows what was filled, a table for each block, and says at the
// end what was written.
func printFilled(w io.Writer, r *workbook.Report) error {
	byBlock := map[*calculation.Block][]*calculation.RowResult{}
	for _, row := range r.Results.Rows {
		byBlock[row.Row.Block] = append(byBlock[row.Row.Block], row)
	}
	for _, b := range r.Plan.Blocks {
		if len(byBlock[b]) == 0 {
			continue
		}
		fmt.Fprintln(w, blockTitle(b, plannedRows(byBlock[b]))+"\n")
		if err := blockTable(b, byBlock[b]).Write(w, texttab.Text); err != nil {
			return err
		}
		fmt.Fprintln(w)
	}
	printDiagnostics(w, r.Results.Diagnostics, filledFindings(r)...)
	for _, t := range r.Results.Tables {
		if t.Refused == "" {
			fmt.Fprintf(w, "Sheet %s: a table of %s.\n", t.Name, rowCount(len(t.Rows)))
		}
	}
	if r.Saved.Recalculate {
		fmt.Fprintln(w, "Formulas of the workbook rest on filled cells; they are worked out again when it is opened next.")
	}
	for _, note := range r.Notes {
		fmt.Fprintln(w, texttab.Wrap(note, texttab.ScreenOf(w).Width, "  "))
	}
	_, err := fmt.Fprintln(w, texttab.Fit(w, writtenLine(r)))
	return err
}

func rowCount(n int) string {
	if n == 1 {
		return "1 row"
	}
	return fmt.Sprintf("%d rows", n)
}

// blockArea names the cells of a block, such as A6:K10.
func blockArea(b *calculation.Block) string {
	return calculation.CellRef{Row: b.Header, Col: b.FirstCol}.String() + ":" + calculation.CellRef{Row: b.LastRow, Col: b.LastCol}.String()
}

// blockTable shows the rows of a block with their numbers, how far each may be
// trusted first; texts longer than a word or two, such as sentences, are left to
// the workbook.
func blockTable(b *calculation.Block, rows []*calculation.RowResult) *texttab.Table {
	t := &texttab.Table{Columns: []texttab.Column{{Name: "row", Right: true, Key: true}, {Name: "label", Key: true},
		{Name: "status", Noted: true, Strong: []string{string(funcs.StatusRefused)}}}}
	one := oneFunctionOf(plannedRows(rows)) != ""
	if !one {
		t.Columns = append(t.Columns, texttab.Column{Name: "work out"})
	}
	var shown []calculation.BlockColumn
	for _, c := range b.Columns {
		if c.Role != calculation.ResultColumn || c.Name == "status" || c.Name == "note" || longTexts[c.Name] {
			continue
		}
		shown = append(shown, c)
		t.Columns = append(t.Columns, texttab.Column{Name: c.Name, Right: true})
	}
	for _, row := range rows {
		values := map[int]any{}
		for _, e := range row.Edits {
			values[e.Cell.Col] = e.Value
		}
		cells := []any{row.Row.Number, row.Row.Label, string(row.Status)}
		if !one {
			cells = append(cells, functionName(row.Row))
		}
		for _, c := range shown {
			cells = append(cells, values[c.Col])
		}
		t.Rows = append(t.Rows, texttab.Row{Cells: cells, Notes: notesOf(row.Findings)})
	}
	return t
}

// oneFunctionOf names the function of rows that all have the same; empty where
// they have not.
func oneFunctionOf(rows []*calculation.Row) string {
	name := functionName(rows[0])
	for _, row := range rows {
		if functionName(row) != name {
			return ""
		}
	}
	return name
}

func plannedRows(rows []*calculation.RowResult) []*calculation.Row {
	list := make([]*calculation.Row, len(rows))
	for i, row := range rows {
		list[i] = row.Row
	}
	return list
}

// blockTitle names the cells of a block, and the function where its rows share
// one.
func blockTitle(b *calculation.Block, rows []*calculation.Row) string {
	title := b.Sheet + " " + blockArea(b)
	if name := oneFunctionOf(rows); name != "" {
		title += ": " + name
	}
	return texttab.Clean(title)
}

// sumFilled says what became of a book in a batch: what was written, and the
// findings that refuse a row or have no column to stand in.
func sumFilled(r *workbook.Report) (outcome string, wrong bool, notes []string) {
	outcome = "the results stand there already"
	if r.Saved.Path != "" {
		written := r.Saved.Path
		if filepath.Dir(written) == filepath.Dir(r.Book) {
			written = filepath.Base(written)
		}
		outcome, notes = "wrote "+written, slices.Clone(r.Notes)
	}
	for _, row := range r.Results.Rows {
		notes = append(notes, refusals(row.Row, row.Findings)...)
	}
	return outcome, r.Counts()[funcs.StatusRefused] > 0, append(notes, looseFindings(r.Results.Diagnostics, filledFindings(r)...)...)
}

// filledFindings are the findings of each row.
func filledFindings(r *workbook.Report) (list [][]calculation.Diagnostic) {
	for _, row := range r.Results.Rows {
		list = append(list, row.Findings)
	}
	return list
}

// refusals are the findings that refuse a row, with its place.
func refusals(row *calculation.Row, findings []calculation.Diagnostic) (notes []string) {
	for _, f := range findings {
		if f.Severity == funcs.Refused {
			notes = append(notes, fmt.Sprintf("%s, row %d: %s", row.Sheet(), row.Number, f.Message))
		}
	}
	return notes
}

// looseFindings are those that have no column to stand in and are not among the
// findings of a row.
func looseFindings(list []calculation.Diagnostic, ofRows ...[]calculation.Diagnostic) (notes []string) {
	said := map[string]bool{}
	for _, row := range ofRows {
		for _, f := range row {
			said[f.Message] = true
		}
	}
	for _, d := range list {
		if d.Input == "" && !said[d.Message] {
			notes = append(notes, fmt.Sprintf("%s, %s: %s", d.Severity, strings.Join(d.Cells, ", "), d.Message))
		}
	}
	return notes
}

// longTexts are the results that are sentences, or that only programs read.
var longTexts = map[string]bool{"sentence": true, "method": true, "citation": true, "range": true, "fingerprint": true}

// printDiagnostics prints what has no column to stand in. Those of rows are
// footnotes already.
func printDiagnostics(w io.Writer, list []calculation.Diagnostic, ofRows ...[]calculation.Diagnostic) {
	notes := looseFindings(list, ofRows...)
	for _, note := range notes {
		fmt.Fprintln(w, texttab.Wrap(note, texttab.ScreenOf(w).Width, "  "))
	}
	if len(notes) > 0 {
		fmt.Fprintln(w)
	}
}

// rowCounts words how many rows have each status.
func rowCounts(rows statusCounts) string {
	ok := "rows ok"
	if rows[funcs.StatusOK] == 1 {
		ok = "row ok"
	}
	return fmt.Sprintf("%d %s, %d caution, %d refused", rows[funcs.StatusOK], ok, rows[funcs.StatusCaution], rows[funcs.StatusRefused])
}

// writtenLine says what was written and how the rows stand.
func writtenLine(r *workbook.Report) string {
	rows := rowCounts(r.Counts())
	if r.Saved.Path == "" {
		return "Nothing to write: the results stand there already: " + rows + "."
	}
	return fmt.Sprintf("Wrote %s: %s.", texttab.Clean(r.Saved.Path), rows)
}
