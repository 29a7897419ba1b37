package main

import (
	"errors"
	"fmt"
	"strings"

	"github.com/spf13/cobra"
	"github.com/spf13/pflag"

	"halfwidth/cmd/internal/texttab"
	"halfwidth/funcs"
)

// printHelp prints the help of a command: what it does, how it is written, an
// example that can be run, verbs and flags.
func printHelp(c *cobra.Command, _ []string) {
	w := c.OutOrStdout()
	width := texttab.ScreenOf(w).Width
	var b strings.Builder
	long := c.Long
	if long == "" {
		long = c.Short + "."
	}
	for paragraph := range strings.SplitSeq(long, "\n\n") {
		b.WriteString(texttab.Wrap(paragraph, width, "") + "\n\n")
	}
	b.WriteString("Usage:\n")
	if !c.HasAvailableSubCommands() {
		fmt.Fprintf(&b, "  %s\n", c.UseLine())
	} else {
		fmt.Fprintf(&b, "  %[1]s VERB …\n  %[1]s VERB --help\n", c.CommandPath())
	}
	if c.Example != "" {
		fmt.Fprintf(&b, "\nExample:\n%s\n", c.Example)
	}
	if c.HasAvailableSubCommands() {
		b.WriteString("\nVerbs:\n")
		for _, sub := range c.Commands() {
			if sub.IsAvailableCommand() {
				b.WriteString(listed(sub.Name(), sub.Short, 14, width))
			}
		}
	}
	if c.HasAvailableLocalFlags() {
		fmt.Fprintf(&b, "\nFlags:\n%s", c.LocalFlags().FlagUsagesWrapped(width))
	}
	fmt.Fprint(w, b.String())
}

// listed is an entry of a list: a name, and at a column what is said of it.
func listed(name, text string, column, width int) string {
	indent := strings.Repeat(" ", column)
	head := fmt.Sprintf("  %-*s", column-2, name)
	return head + strings.ReplaceAll(texttab.Wrap(text, width-column, ""), "\n", "\n"+indent) + "\n"
}

// wrongFlag words an error about a flag, with the closest one where it is
// misspelt.
func wrongFlag(c *cobra.Command, err error) error {
	verb := strings.TrimPrefix(c.CommandPath(), "halfwidth ")
	var unknown *pflag.NotExistError
	if !errors.As(err, &unknown) || unknown.GetSpecifiedShortnames() != "" {
		return usageError{fmt.Errorf("%w; see halfwidth %s --help", err, verb)}
	}
	var names []string
	c.Flags().VisitAll(func(f *pflag.Flag) { names = append(names, f.Name) })
	near := funcs.Closest(unknown.GetSpecifiedName(), names)
	if len(near) == 0 {
		return usageError{fmt.Errorf("%s has no flag --%s; halfwidth %s --help lists them", verb, unknown.GetSpecifiedName(), verb)}
	}
	return usageError{fmt.Errorf("%s has no flag --%s; did you mean --%s? halfwidth %s --help lists all", verb, unknown.GetSpecifiedName(), near[0], verb)}
}

// The verbs stand in the help as they are listed, by how often they are used.
func init() { cobra.EnableCommandSorting = false }

// nameOwnVerbs describes the verbs that the library adds in our words. The help
// verb is left out of lists: --help does the same.
func nameOwnVerbs(root *cobra.Command) {
	root.InitDefaultHelpCmd()
	root.InitDefaultCompletionCmd()
	for _, c := range root.Commands() {
		switch c.Name() {
		case "help":
			c.Hidden = true
		case "completion":
			c.Short = "Print the script that completes words in a shell: bash, zsh, fish or powershell"
			c.Long = "completion prints the script that completes verbs, flags, functions, inputs and files in a shell."
			c.Example = "  halfwidth completion bash"
			c.RunE = func(c *cobra.Command, _ []string) error { return c.Help() }
			c.Args = noVerb
		}
	}
}
