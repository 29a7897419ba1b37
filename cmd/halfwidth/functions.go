package main

import (
	"fmt"
	"io"
	"math"
	"strings"

	"github.com/spf13/cobra"

	"halfwidth/cmd/internal/texttab"
	"halfwidth/funcs"
)

func functionsCommand() *cobra.Command {
	c := &cobra.Command{
		Use:   "functions [NAME]",
		Short: "List the functions, or show one function's reference page",
		Long: "functions lists every function by its family, with what it gives. With a NAME it shows that function's page: what it takes, what it\n" +
			"gives, what it may find, its assumptions and citations, and an example for the shell.",
		Example: "  halfwidth functions\n  halfwidth functions mean-interval",
		Args:    oneFunction,
	}
	format := formatFlag(c)
	c.RunE = func(c *cobra.Command, args []string) error {
		f, err := formatOf(*format)
		if err != nil {
			return err
		}
		if len(args) == 0 {
			return listFunctions(c.OutOrStdout(), f)
		}
		function, err := funcs.Lookup(args[0])
		if err != nil {
			return usageError{fmt.Errorf("%w (halfwidth functions lists all)", err)}
		}
		if f != texttab.Text {
			return inputTable(function).Write(c.OutOrStdout(), f)
		}
		if err := funcs.WriteReference(c.OutOrStdout(), function); err != nil {
			return err
		}
		_, err = fmt.Fprintf(c.OutOrStdout(), "\nFrom the shell:\n\n    %s\n", exampleCommand(function))
		return err
	}
	return c
}

// oneFunction allows one name, or none.
func oneFunction(_ *cobra.Command, args []string) error {
	if len(args) > 1 {
		return usageError{fmt.Errorf("%d names are given; name one function, or none for the list", len(args))}
	}
	return nil
}

// listFunctions lists the functions, as text by family.
func listFunctions(w io.Writer, f texttab.Format) error {
	if f == texttab.Text {
		return printFamilies(w)
	}
	table := &texttab.Table{Columns: []texttab.Column{{Name: "family"}, {Name: "function"}, {Name: "summary"}}}
	for _, family := range funcs.Families() {
		for _, function := range family.Functions {
			table.Rows = append(table.Rows, texttab.Row{Cells: []any{family.Name, function.Name, function.Summary}})
		}
	}
	return table.Write(w, f)
}

func printFamilies(w io.Writer) error {
	column, screen := 0, texttab.ScreenOf(w)
	for _, name := range funcs.Names() {
		column = max(column, len(name)+4)
	}
	width := math.MaxInt
	if screen.Terminal {
		width = screen.Width
	}
	var b strings.Builder
	for _, family := range funcs.Families() {
		fmt.Fprintf(&b, "%s: %s\n", family.Name, family.Summary)
		for _, function := range family.Functions {
			b.WriteString(listed(function.Name, function.Summary, column, width))
		}
		b.WriteByte('\n')
	}
	b.WriteString("halfwidth functions NAME shows what one takes and gives, with an example.\n")
	_, err := io.WriteString(w, b.String())
	return err
}

// inputTable lists a function's inputs and results, for programs to read.
func inputTable(f *funcs.Function) *texttab.Table {
	table := &texttab.Table{Columns: []texttab.Column{{Name: "part"}, {Name: "name"}, {Name: "kind"}, {Name: "expects"}, {Name: "default"}, {Name: "summary"}}}
	add := func(cells ...any) { table.Rows = append(table.Rows, texttab.Row{Cells: cells}) }
	for _, in := range f.Inputs {
		var standard any
		if in.Default != nil {
			standard = funcs.FormatArgument(in.Default)
		}
		add("input", in.Name, in.Kind.String(), in.Expects(), standard, in.Summary)
	}
	for _, r := range f.Results {
		add("result", r.Name, r.Kind.String(), nil, nil, r.Summary)
	}
	for _, r := range f.Table {
		add("column", r.Name, r.Kind.String(), nil, nil, r.Summary)
	}
	for _, r := range funcs.CommonResults {
		add("result", r.Name, r.Kind.String(), nil, nil, r.Summary)
	}
	return table
}

// exampleCommand is the command line that works out a function's example.
func exampleCommand(f *funcs.Function) string {
	words := []string{"halfwidth", "answer", f.Name}
	for _, a := range f.Example.Arguments {
		words = append(words, shellWord(a.Name+"="+funcs.FormatArgument(a.Value)))
	}
	return strings.Join(words, " ")
}

// shellWord quotes a word that a shell would split or read otherwise.
func shellWord(word string) string {
	if strings.ContainsAny(word, " ;<>\"'*?&|()$`\\") {
		return "'" + strings.ReplaceAll(word, "'", `'\''`) + "'"
	}
	return word
}
