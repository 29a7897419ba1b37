package main

import (
	"fmt"
	"io"
	"os"
	"strings"

	"github.com/spf13/cobra"

	"halfwidth/cmd/internal/texttab"
	"halfwidth/funcs"
	"halfwidth/workbook"
	"halfwidth/workbook/calculation"
)

func previewCommand() *cobra.Command {
	c := &cobra.Command{
		Use:   "preview BOOK.xlsx|FOLDER…",
		Short: "Show what would be worked out and from which cells; compute nothing, write nothing",
		Long: "preview reads the workbook and shows for each row what every input would be: the value, or the cells that an expression leads\n" +
			"to, with how many values they hold and how many are skipped. What would be refused is told. Nothing is computed or written.\n" +
			"The exit status is 0 where all rows can be worked out, 1 where a row would be refused.",
		Example: "  halfwidth preview testdata/workbooks/larkmoor.xlsx",
		Args:    someBooks,
	}
	f := addBookFlags(c)
	verb := bookVerb{done: "Looked through", work: workbook.Preview, print: printPreview, columns: longColumns, tabulate: previewTable, sum: sumPreview}
	c.RunE = func(c *cobra.Command, words []string) error { return eachBook(c, f, words, verb) }
	return c
}

// sumPreview says of a book in a batch what would keep rows from being worked
// out.
func sumPreview(r *workbook.Report) (outcome string, wrong bool, notes []string) {
	for _, row := range r.Plan.Rows {
		notes = append(notes, refusals(row, row.Findings())...)
	}
	return "nothing was computed or written", r.Counts()[funcs.StatusRefused] > 0, append(notes, looseFindings(r.Plan.Diagnostics(), plannedFindings(r)...)...)
}

// plannedFindings are the findings of each row.
func plannedFindings(r *workbook.Report) (list [][]calculation.Diagnostic) {
	for _, row := range r.Plan.Rows {
		list = append(list, row.Findings())
	}
	return list
}

func isFile(path string) bool {
	info, err := os.Stat(path)
	return err == nil && info.Mode().IsRegular()
}

func isFolder(path string) bool {
	info, err := os.Stat(path)
	return err == nil && info.IsDir()
}

func printPreview(w io.Writer, r *workbook.Report) error {
	for _, b := range r.Plan.Blocks {
		if len(b.Rows) == 0 {
			continue
		}
		fmt.Fprintln(w, blockTitle(b, b.Rows)+"\n")
		if err := previewBlock(b).Write(w, texttab.Text); err != nil {
			return err
		}
		fmt.Fprintln(w)
	}
	printDiagnostics(w, r.Plan.Diagnostics(), plannedFindings(r)...)
	for _, note := range r.Notes {
		fmt.Fprintln(w, texttab.Wrap(note, texttab.ScreenOf(w).Width, "  "))
	}
	counts := r.Counts()
	_, err := fmt.Fprintln(w, texttab.Fit(w, fmt.Sprintf("%s: %d rows can be worked out, %d of them with a caution so far; %d refused. Nothing was computed or written.",
		r.Book, counts[funcs.StatusOK]+counts[funcs.StatusCaution], counts[funcs.StatusCaution], counts[funcs.StatusRefused])))
	return err
}

// previewBlock shows what the rows of a block are given and from which cells.
func previewBlock(b *calculation.Block) *texttab.Table {
	t := &texttab.Table{Columns: []texttab.Column{{Name: "cell", Key: true}, {Name: "label", Noted: true}, {Name: "input"}, {Name: "value, or cells read"},
		{Name: "values", Right: true}, {Name: "skipped", Right: true}}}
	mixed := oneFunctionOf(b.Rows) == ""
	if mixed {
		t.Columns[1].Name = "work out: label"
	}
	for _, row := range b.Rows {
		notes := notesOf(row.Findings())
		first := true
		add := func(cell any, rest ...any) {
			label := row.Label
			switch {
			case !first:
				label = ""
			case mixed:
				label = functionName(row) + ": " + label
			}
			t.Rows = append(t.Rows, texttab.Row{Cells: append([]any{cell, label}, rest...), Notes: notes})
			first, notes = false, nil
		}
		for _, in := range row.Inputs {
			switch {
			case in.Default:
			case in.Range == "":
				add(in.Cell.String(), in.Name, in.Written, nil, nil)
			case len(in.Groups) > 0:
				add(in.Cell.String(), in.Name, in.Range+" ("+strings.Join(in.Groups, ", ")+")", in.Used, in.Skipped)
			default:
				add(in.Cell.String(), in.Name, in.Range, in.Used, in.Skipped)
			}
		}
		if first {
			add(fmt.Sprintf("row %d", row.Number), nil, nil, nil, nil)
		}
	}
	return t
}

// previewTable adds the inputs of a book to a long table.
func previewTable(t *texttab.Table, r *workbook.Report) {
	for _, row := range r.Plan.Rows {
		notes := notesOf(row.Findings())
		for _, in := range row.Inputs {
			written := any(in.Written)
			if in.Range != "" {
				written = in.Range
			}
			t.Rows = append(t.Rows, texttab.Row{Cells: []any{r.Book, row.Sheet(), row.Number, functionName(row), row.Label,
				string(workbook.StatusOf(row.Findings())), in.Cell.String(), in.Name, written}, Notes: notes})
			notes = nil
		}
	}
}
