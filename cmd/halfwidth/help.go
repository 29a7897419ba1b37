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
	below, more := "verb", " …"
	if c.HasParent() {
		below, more = "shell", "" // those of completion
	}
	if !c.HasAvailableSubCommands() {
		fmt.Fprintf(&b, "  %s\n", c.UseLine())
	} else {
		fmt.Fprintf(&b, "  %[1]s %[2]s%[3]s\n  %[1]s %[2]s --help\n", c.CommandPath(), strings.ToUpper(below), more)
	}
	if c.Example != "" {
		fmt.Fprintf(&b, "\nExample:\n%s\n", c.Example)
	}
	if c.HasAvailableSubCommands() {
		fmt.Fprintf(&b, "\n%s%ss:\n", strings.ToUpper(below[:1]), below[1:])
		for _, sub := range c.Commands() {
			if sub.IsAvailableCommand() {
				b.WriteString(listed(sub.Name(), sub.Short, 14, width))
			}
		}
	}
	if c.HasAvailableLocalFlags() {
		b.WriteString("\nFlags:\n" + listOfFlags(c.LocalFlags(), width))
	}
	fmt.Fprint(w, b.String())
}

// listOfFlags lists flags, each with the word that its text gives its value.
func listOfFlags(flags *pflag.FlagSet, width int) string {
	var names, texts []string
	column := 0
	flags.VisitAll(func(f *pflag.Flag) {
		value, text := pflag.UnquoteUsage(f)
		name := "    --" + f.Name
		if f.Shorthand != "" {
			name = "-" + f.Shorthand + ", --" + f.Name
		}
		if value != "" {
			name += " " + value
		}
		names, texts = append(names, name), append(texts, text)
		column = max(column, len(name)+4)
	})
	var b strings.Builder
	for i, name := range names {
		b.WriteString(listed(name, texts[i], column, width))
	}
	return b.String()
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

// intoShell says how each shell takes its script.
var intoShell = map[string]string{
	"bash":       "To have it in every shell, put this line into ~/.bashrc (it needs the package bash-completion): source <(halfwidth completion bash)",
	"zsh":        "To have it in every shell, put this line into ~/.zshrc, after compinit: source <(halfwidth completion zsh)",
	"fish":       "To have it in every shell, put this line into ~/.config/fish/config.fish: halfwidth completion fish | source",
	"powershell": "To have it in every shell, put this line into the file that $PROFILE names: halfwidth completion powershell | Out-String | Invoke-Expression",
}

// nameOwnVerbs describes the verbs that the library adds in our words. The help
// verb is left out of lists: --help does the same.
func nameOwnVerbs(root *cobra.Command) {
	root.Flags().BoolP("version", "v", false, "print the version and the Go release it was built with")
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
			for _, shell := range c.Commands() {
				shell.Short = "Print the script for " + shell.Name()
				shell.Long = shell.Short + ". " + intoShell[shell.Name()]
				shell.Example = "  halfwidth completion " + shell.Name()
				if f := shell.Flags().Lookup("no-descriptions"); f != nil {
					f.Usage = "complete names without what they mean"
				}
			}
		}
	}
}
