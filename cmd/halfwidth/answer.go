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
)

func answerCommand() *cobra.Command {
	c := &cobra.Command{
		Use:   "answer FUNCTION NAME=VALUE…",
		Short: "Work out one function from the shell",
		Long: "answer works out one function. A value is written as in a sheet: 95%, above, 12.1; 11.8; 12.6, or, with --book,\n" +
			"a sample expression such as minutes in Trips where depot = North.",
		Example: "  halfwidth answer mean-interval sample='12.1; 11.8; 12.6; 12.0; 12.4' confidence=99%\n" +
			"  halfwidth answer mean-interval --book testdata/workbooks/larkmoor.xlsx sample='minutes in Trips where depot = North'",
	}
	format := formatFlag(c)
	book := c.Flags().String("book", "", "take the sheets that expressions name from the workbook `FILE`")
	var data []string
	c.Flags().StringSliceVar(&data, "data", nil, "allow the files that expressions name to lie in `FOLDER`, besides the workbook's own")
	c.RunE = func(c *cobra.Command, args []string) error {
		f, err := formatOf(*format)
		if err != nil {
			return err
		}
		if len(args) == 0 {
			return usageError{fmt.Errorf("no function named; write: halfwidth answer FUNCTION NAME=VALUE… (halfwidth functions lists them)")}
		}
		function, err := funcs.Lookup(args[0])
		if err != nil {
			return usageError{fmt.Errorf("%w (halfwidth functions lists all)", err)}
		}
		texts, err := assignments(args[1:])
		if err != nil {
			return err
		}
		out, err := workbook.Answer(c.Context(), *book, data, function, texts)
		var wrong funcs.ArgumentErrors
		if errors.As(err, &wrong) {
			return usageError{fmt.Errorf("%w\nhalfwidth functions %s shows what it takes", err, function.Name)}
		}
		if err != nil {
			return err
		}
		if err := printOutcome(c.OutOrStdout(), out, f); err != nil {
			return err
		}
		if out.Status == funcs.StatusRefused {
			return errRefused
		}
		return nil
	}
	return c
}

// assignments reads NAME=VALUE words.
func assignments(words []string) (map[string]string, error) {
	texts := map[string]string{}
	for _, word := range words {
		name, value, ok := strings.Cut(word, "=")
		name = strings.TrimSpace(name)
		switch _, twice := texts[name]; {
		case !ok || name == "":
			return nil, usageError{fmt.Errorf("%q is no NAME=VALUE; write, for instance, confidence=95%%", word)}
		case twice:
			return nil, usageError{fmt.Errorf("%s is given twice; give it once", name)}
		}
		texts[name] = value
	}
	return texts, nil
}

// printOutcome prints an outcome: as text the sentence first, or why there is
// none, then what should be known of it, then its table, then name and value
// with every digit.
func printOutcome(w io.Writer, out *funcs.Outcome, f texttab.Format) error {
	t := &texttab.Table{Columns: []texttab.Column{{Name: "result"}, {Name: "value"}}}
	refused := out.Status == funcs.StatusRefused
	var findings []string
	for _, finding := range out.Findings {
		findings = append(findings, finding.Message)
	}
	if f == texttab.Text {
		if err := printWords(w, out); err != nil || refused {
			return err
		}
		findings = nil // they are said
	}
	if refused {
		t.Rows = append(t.Rows, texttab.Row{Cells: []any{"status", string(out.Status)}, Notes: findings})
		return t.Write(w, f)
	}
	for _, r := range out.Results() {
		row := texttab.Row{Cells: []any{r.Name, r.Value}}
		switch {
		case r.Name == "note" || r.Name == "sentence" && f == texttab.Text:
			continue
		case r.Name == "status":
			row.Notes = findings
		}
		if v, ok := r.Value.(float64); ok && f == texttab.Text {
			row.Cells[1] = funcs.FormatArgument(v)
		}
		t.Rows = append(t.Rows, row)
	}
	if f == texttab.Text && len(out.Rows) > 0 {
		if err := outcomeTable(out).Write(w, f); err != nil {
			return err
		}
		fmt.Fprintln(w)
	}
	return t.Write(w, f)
}

// printWords prints the sentence of an outcome and its findings, each with its
// severity.
func printWords(w io.Writer, out *funcs.Outcome) error {
	width := texttab.ScreenOf(w).Width
	var lines []string
	if sentence, ok := out.Get("sentence"); ok && out.Status != funcs.StatusRefused {
		lines = append(lines, texttab.Wrap(fmt.Sprint(sentence), width, ""))
	}
	for _, f := range out.Findings {
		lines = append(lines, texttab.Wrap(fmt.Sprintf("%s: %s", f.Severity, f.Message), width, "  "))
	}
	if out.Status != funcs.StatusRefused {
		lines = append(lines, "")
	}
	_, err := fmt.Fprintln(w, strings.Join(lines, "\n"))
	return err
}

// outcomeTable is the table that a function gives.
func outcomeTable(out *funcs.Outcome) *texttab.Table {
	t := &texttab.Table{}
	for _, c := range out.Function.Table {
		t.Columns = append(t.Columns, texttab.Column{Name: c.Name, Right: c.Kind != funcs.Text})
	}
	for _, row := range out.Rows {
		var cells []any
		for _, c := range out.Function.Table {
			cells = append(cells, row.Values[c.Name])
		}
		var notes []string
		for _, f := range row.Findings {
			notes = append(notes, f.Message)
		}
		t.Rows = append(t.Rows, texttab.Row{Cells: cells, Notes: notes})
	}
	return t
}
