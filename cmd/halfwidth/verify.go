package main

import (
	"fmt"
	"io"
	"path/filepath"
	"strconv"
	"strings"

	"github.com/spf13/cobra"

	"halfwidth/cmd/internal/texttab"
	"halfwidth/funcs"
	"halfwidth/workbook"
	"halfwidth/workbook/calculation"
)

func verifyCommand() *cobra.Command {
	c := &cobra.Command{
		Use:   "verify BOOK.xlsx|FOLDER…",
		Short: "Work everything out again and list the stored results that are out of date",
		Long: "verify works out the calculation sheets of a filled workbook again and compares: the same double, the same text, the same\n" +
			"table. It lists each result cell that differs, with what is stored, what it would be now, and why as far as that can be\n" +
			"told: a stored > fingerprint tells whether the inputs changed or the result was typed over. Nothing is written.\n" +
			"The exit status is 0 where all is in date, 1 where a result is out of date or a row is refused.",
		Example: "  halfwidth verify testdata/workbooks/larkmoor-filled.xlsx",
		Args:    someBooks,
	}
	f := addBookFlags(c)
	verb := bookVerb{done: "Verified", filled: true, work: workbook.Verify, print: printVerified, columns: verifiedColumns, tabulate: verifiedTable, sum: sumVerified}
	c.RunE = func(c *cobra.Command, words []string) error { return eachBook(c, f, words, verb) }
	return c
}

// standing counts the rows of a verified book.
type standing struct {
	inDate, outOfDate, refused, noResults int
}

func standingOf(r *workbook.Report) standing {
	var s standing
	out := r.Verification.OutOfDate()
	tables := map[*calculation.Row]bool{}
	for _, t := range r.Results.Tables {
		tables[t.Row] = true
	}
	for _, row := range r.Results.Rows {
		if row.Status == funcs.StatusRefused {
			s.refused++
		}
		switch {
		case out[row]:
			s.outOfDate++
		case len(row.Edits) == 0 && !tables[row.Row]:
			s.noResults++
		default:
			s.inDate++
		}
	}
	return s
}

func (s standing) String() string {
	text := fmt.Sprintf("%d rows in date, %d out of date, %d refused", s.inDate, s.outOfDate, s.refused)
	if s.noResults > 0 {
		text += fmt.Sprintf(", %d without a result cell to compare", s.noResults)
	}
	return text
}

// wrong reports whether the exit status says so.
func (s standing) wrong() bool { return s.outOfDate > 0 || s.refused > 0 }

// sumVerified says how a book stands in a batch.
func sumVerified(r *workbook.Report) (outcome string, wrong bool, notes []string) {
	s := standingOf(r)
	for _, d := range r.Verification.Differences {
		if len(notes) == 3 {
			notes = append(notes, "More is out of date there; verify this workbook alone for the list.")
			break
		}
		notes = append(notes, fmt.Sprintf("%s (%s): %s.", address(d), d.Result, d.Reason))
	}
	for _, row := range r.Results.Rows {
		notes = append(notes, refusals(row.Row, row.Findings)...)
	}
	return s.String(), s.wrong(), append(notes, looseFindings(r.Results.Diagnostics, filledFindings(r)...)...)
}

// printVerified lists what is out of date and says at the end how the rows
// stand.
func printVerified(w io.Writer, r *workbook.Report) error {
	t := &texttab.Table{Columns: []texttab.Column{{Name: "cell", Key: true}, {Name: "work out"}, {Name: "label"}, {Name: "result"},
		{Name: "stored", Right: true}, {Name: "now", Right: true}, {Name: "reason"}}}
	unknown := false
	eachDifference(r, func(row *calculation.RowResult, d *workbook.Difference, notes []string) {
		cells := []any{fmt.Sprintf("row %d", row.Row.Number), functionName(row.Row), row.Row.Label, nil, nil, nil, "refused"}
		if d != nil {
			unknown = unknown || d.Reason == workbook.Unknown
			stored, now := excerpts(d.Stored, d.Now)
			cells = []any{address(*d), functionName(row.Row), row.Row.Label, d.Result, stored, now, string(d.Reason)}
		}
		t.Rows = append(t.Rows, texttab.Row{Cells: cells, Notes: notes})
	})
	if len(t.Rows) > 0 {
		if err := t.Write(w, texttab.Text); err != nil {
			return err
		}
		fmt.Fprintln(w)
	}
	printDiagnostics(w, r.Results.Diagnostics)
	if unknown {
		fmt.Fprintln(w, texttab.Fit(w, "With a column > fingerprint, verify could tell whether the inputs changed or a result was typed over."))
	}
	if output := unfilled(r); output != "" {
		fmt.Fprintf(w, "No result is stored in this file; its output %s is there: verify that.\n", output)
	}
	_, err := fmt.Fprintln(w, texttab.Fit(w, fmt.Sprintf("%s: %d result cells compared: %s. Nothing was written.", r.Book, r.Verification.Compared, standingOf(r))))
	return err
}

// eachDifference visits the differences of a report with their rows, in the
// order of the sheet, and refused rows without one. The findings of a refused
// row come with the first of its differences.
func eachDifference(r *workbook.Report, visit func(row *calculation.RowResult, d *workbook.Difference, notes []string)) {
	byRow := map[*calculation.RowResult][]workbook.Difference{}
	for _, d := range r.Verification.Differences {
		byRow[d.Row] = append(byRow[d.Row], d)
	}
	for _, row := range r.Results.Rows {
		var notes []string
		if row.Status == funcs.StatusRefused {
			notes = notesOf(row.Findings)
		}
		for _, d := range byRow[row] {
			visit(row, &d, notes)
			notes = nil
		}
		if len(byRow[row]) == 0 && row.Status == funcs.StatusRefused {
			visit(row, nil, notes)
		}
	}
}

// unfilled gives the output beside a book that no results are stored in; empty
// where some are, or no output is there.
func unfilled(r *workbook.Report) string {
	for _, d := range r.Verification.Differences {
		if d.Reason != workbook.NeverWorkedOut {
			return ""
		}
	}
	output := workbook.OutputName(r.Book)
	if standingOf(r).inDate > 0 || !isFile(output) {
		return ""
	}
	return filepath.Base(output)
}

// address writes the cell of a difference with its sheet; a table sheet that is
// not there is named as a whole.
func address(d workbook.Difference) string {
	sheet := (&calculation.PlaceRef{Name: d.Sheet}).String()
	if d.Cell == (calculation.CellRef{}) {
		return sheet
	}
	return sheet + "!" + d.Cell.String()
}

// excerpts shows two values with all the digits and words in which they differ.
func excerpts(stored, now any) (string, string) {
	a, isText := stored.(string)
	b, isText2 := now.(string)
	if !isText || !isText2 {
		return cellWords(stored), cellWords(now)
	}
	from := 0
	for from < len(a) && from < len(b) && a[from] == b[from] {
		from++
	}
	return cellWords(around(a, from)), cellWords(around(b, from))
}

// excerptLength is how many characters of a text are shown.
const excerptLength = 32

// around gives the words of a text from just before a place on.
func around(text string, at int) string {
	runes := []rune(text)
	if len(runes) <= excerptLength {
		return text
	}
	first := max(0, min(len([]rune(strings.ToValidUTF8(text[:at], "")))-excerptLength/4, len(runes)-excerptLength))
	part := string(runes[first:min(len(runes), first+excerptLength)])
	if first > 0 {
		part = "…" + part
	}
	if first+excerptLength < len(runes) {
		part += "…"
	}
	return part
}

// cellWords writes what stands in a cell: numbers with every digit, and a text
// that reads as a number in quotes.
func cellWords(v any) string {
	switch v := v.(type) {
	case nil:
		return "(empty)"
	case float64:
		return strconv.FormatFloat(v, 'g', -1, 64)
	case string:
		if _, err := strconv.ParseFloat(strings.TrimSpace(v), 64); err == nil {
			return strconv.Quote(v)
		}
		if runes := []rune(v); len(runes) > excerptLength+2 {
			return string(runes[:excerptLength]) + "…"
		}
		return v
	}
	return fmt.Sprint(v)
}

// verifiedColumns are the columns of CSV and JSON: a row for each result cell
// that is out of date, and for each refused row without one.
var verifiedColumns = []texttab.Column{{Name: "book"}, {Name: "sheet"}, {Name: "row"}, {Name: "function"}, {Name: "label"},
	{Name: "status"}, {Name: "cell"}, {Name: "result"}, {Name: "stored"}, {Name: "now"}, {Name: "reason"}}

func verifiedTable(t *texttab.Table, r *workbook.Report) {
	eachDifference(r, func(row *calculation.RowResult, d *workbook.Difference, notes []string) {
		cells := []any{r.Book, row.Row.Sheet(), row.Row.Number, functionName(row.Row), row.Row.Label, string(row.Status), nil, nil, nil, nil, nil}
		if d != nil {
			cells[1] = d.Sheet
			if d.Cell != (calculation.CellRef{}) {
				cells[6] = d.Cell.String()
			}
			cells[7], cells[8], cells[9], cells[10] = d.Result, d.Stored, d.Now, string(d.Reason)
		}
		t.Rows = append(t.Rows, texttab.Row{Cells: cells, Notes: notes})
	})
}
