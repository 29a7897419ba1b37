package main

import (
	"errors"
	"fmt"
	"strings"

	"github.com/spf13/cobra"
	"github.com/spf13/pflag"

	"halfwidth/funcs"
)

// usageTemplate is the help of a command below its description: how it is
// written, an example that can be run, then verbs and flags.
const usageTemplate = `Usage:
  {{if .HasAvailableSubCommands}}{{.CommandPath}} VERB …
  {{.CommandPath}} VERB --help{{else}}{{.UseLine}}{{end}}{{if .HasExample}}

Example:
{{.Example}}{{end}}{{if .HasAvailableSubCommands}}

Verbs:{{range .Commands}}{{if .IsAvailableCommand}}
  {{rpad .Name .NamePadding}} {{.Short}}{{end}}{{end}}{{end}}{{if .HasAvailableLocalFlags}}

Flags:
{{.LocalFlags.FlagUsages | trimTrailingWhitespaces}}{{end}}
`

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
