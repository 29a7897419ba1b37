package main

import (
	"errors"
	"fmt"
	"io"
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
	o      workbook.Options
}

func addBookFlags(c *cobra.Command) *bookFlags {
	f := &bookFlags{format: formatFlag(c)}
	c.Flags().StringSliceVar(&f.o.Sheets, "sheet", nil, "a calculation sheet besides those named Calculations or marked in A1")
	c.Flags().StringSliceVar(&f.o.Data, "data", nil, "a folder, besides the workbook's own, in which files named in expressions may lie")
	c.Flags().IntVar(&f.o.Workers, "jobs", 0, "how many rows to work out at once (default: as many as there are cores)")
	return f
}

func fillCommand() *cobra.Command {
	c := &cobra.Command{
		Use:   "fill BOOK.xlsx…",
		Short: "Work out the calculation sheets and write the results beside the questions",
		Long: "fill works out every calculation sheet of a workbook and writes the results into its result columns, as plain values.\n" +
			"It writes BOOK-filled.xlsx beside the workbook, which itself stays as it is.",
		Example: "  halfwidth fill testdata/workbooks/larkmoor.xlsx",
		Args:    someBooks,
	}
	f := addBookFlags(c)
	c.Flags().StringVarP(&f.o.Output, "output", "o", "", "the file, or the folder, to write to")
	c.Flags().BoolVar(&f.o.InPlace, "in-place", false, "write into the workbook itself")
	c.Flags().BoolVar(&f.o.Replace, "replace", false, "write over an output that was changed since it was filled")
	c.RunE = func(c *cobra.Command, books []string) error {
		if len(books) > 1 && f.o.Output != "" && !isFolder(f.o.Output) {
			return usageError{fmt.Errorf("--output %s is one file, but there are %d workbooks; name a folder that is there", f.o.Output, len(books))}
		}
		return eachBook(c, f, books, func(path string) (*workbook.Report, error) { return workbook.Fill(c.Context(), path, f.o) }, printFilled, filledTable)
	}
	return c
}

// someBooks asks for at least one workbook.
func someBooks(c *cobra.Command, args []string) error {
	if len(args) == 0 {
		return usageError{fmt.Errorf("no workbook named; write: %s", strings.TrimSpace(c.Example))}
	}
	return nil
}

// eachBook works on one workbook after the other. A book that fails does not
// stop the rest.
func eachBook(c *cobra.Command, f *bookFlags, books []string, work func(string) (*workbook.Report, error),
	print func(io.Writer, *workbook.Report) error, tabulate func(*texttab.Table, *workbook.Report)) error {
	format, err := formatOf(*f.format)
	if err != nil {
		return err
	}
	var failed []error
	refused := false
	all := newLongTable()
	for _, path := range books {
		report, err := work(path)
		if err != nil {
			failed = append(failed, named(path, err))
			continue
		}
		refused = refused || report.Counts()[funcs.StatusRefused] > 0
		if format == texttab.Text {
			err = print(c.OutOrStdout(), report)
		} else {
			tabulate(all, report)
		}
		if err != nil {
			return err
		}
	}
	if format != texttab.Text {
		if err := all.Write(c.OutOrStdout(), format); err != nil {
			return err
		}
	}
	switch {
	case len(failed) > 0:
		return errors.Join(failed...)
	case refused:
		return errRefused
	}
	return nil
}

// named puts the workbook's path before an error that does not name it.
func named(path string, err error) error {
	if strings.Contains(err.Error(), path) || errors.Is(err, workbook.ErrNoWork) {
		return err
	}
	return fmt.Errorf("%s: %w", path, err)
}

// newLongTable is the table of CSV and JSON: a row for each result cell.
func newLongTable() *texttab.Table {
	return &texttab.Table{Columns: []texttab.Column{{Name: "book"}, {Name: "sheet"}, {Name: "row"}, {Name: "function"}, {Name: "label"},
		{Name: "status"}, {Name: "cell"}, {Name: "result"}, {Name: "value"}}}
}

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
			cells := append(append([]any{}, head...), e.Cell.String(), columnName(row.Row.Block, e.Cell.Col), e.Value)
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

func columnName(b *calculation.Block, col int) string {
	for _, c := range b.Columns {
		if c.Col == col && c.Role == calculation.ResultColumn {
			return c.Name
		}
	}
	return ""
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
		fmt.Fprintf(w, "%s %s\n\n", b.Sheet, blockArea(b))
		if err := blockTable(b, byBlock[b]).Write(w, texttab.Text); err != nil {
			return err
		}
		fmt.Fprintln(w)
	}
	printDiagnostics(w, r.Results.Diagnostics)
	for _, t := range r.Results.Tables {
		if t.Refused == "" {
			fmt.Fprintf(w, "Sheet %s: a table of %d rows.\n", t.Name, len(t.Rows))
		}
	}
	if r.Saved.Recalculate {
		fmt.Fprintln(w, "Formulas of the workbook rest on filled cells; they are worked out again when it is opened next.")
	}
	_, err := fmt.Fprintln(w, writtenLine(r))
	return err
}

// blockArea names the cells of a block, such as A6:K10.
func blockArea(b *calculation.Block) string {
	return calculation.CellRef{Row: b.Header, Col: b.FirstCol}.String() + ":" + calculation.CellRef{Row: b.LastRow, Col: b.LastCol}.String()
}

// blockTable shows the rows of a block with their numbers; texts longer than a
// word or two, such as sentences, are left to the workbook.
func blockTable(b *calculation.Block, rows []*calculation.RowResult) *texttab.Table {
	t := &texttab.Table{Columns: []texttab.Column{{Name: "row", Right: true}, {Name: "work out"}, {Name: "label"}}}
	var shown []calculation.BlockColumn
	for _, c := range b.Columns {
		if c.Role != calculation.ResultColumn || c.Name == "status" || c.Name == "note" || longTexts[c.Name] {
			continue
		}
		shown = append(shown, c)
		t.Columns = append(t.Columns, texttab.Column{Name: c.Name, Right: true})
	}
	t.Columns = append(t.Columns, texttab.Column{Name: "status"})
	for _, row := range rows {
		values := map[int]any{}
		for _, e := range row.Edits {
			values[e.Cell.Col] = e.Value
		}
		cells := []any{row.Row.Number, functionName(row.Row), row.Row.Label}
		for _, c := range shown {
			cells = append(cells, values[c.Col])
		}
		t.Rows = append(t.Rows, texttab.Row{Cells: append(cells, string(row.Status)), Notes: notesOf(row.Findings)})
	}
	return t
}

// longTexts are the results that are sentences.
var longTexts = map[string]bool{"sentence": true, "method": true, "citation": true, "range": true}

// printDiagnostics prints what has no column to stand in. Those of rows are
// footnotes already.
func printDiagnostics(w io.Writer, list []calculation.Diagnostic) {
	printed := false
	for _, d := range list {
		if d.Input != "" {
			continue
		}
		line := fmt.Sprintf("%s, %s: %s", d.Severity, strings.Join(d.Cells, ", "), d.Message)
		fmt.Fprintln(w, texttab.Wrap(line, texttab.Width, "  "))
		printed = true
	}
	if printed {
		fmt.Fprintln(w)
	}
}

// writtenLine says what was written and how the rows stand.
func writtenLine(r *workbook.Report) string {
	counts := r.Counts()
	rows := fmt.Sprintf("%d rows ok, %d caution, %d refused", counts[funcs.StatusOK], counts[funcs.StatusCaution], counts[funcs.StatusRefused])
	if r.Saved.Path == "" {
		return "Nothing to write: the results stand there already: " + rows + "."
	}
	return fmt.Sprintf("Wrote %s: %s.", r.Saved.Path, rows)
}
