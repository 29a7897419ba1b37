package main

import (
	"slices"
	"strings"

	"github.com/spf13/cobra"

	"halfwidth/cmd/internal/texttab"
	"halfwidth/funcs"
)

// What the shell completes: verbs and flags by cobra, the rest here.

// completeBooks offers workbooks and text sheets, and the folders on the way.
func completeBooks(*cobra.Command, []string, string) ([]string, cobra.ShellCompDirective) {
	return []string{"xlsx", "xlsm", "csv", "tsv"}, cobra.ShellCompDirectiveFilterFileExt
}

// functionNames offers the functions, with what each gives.
func functionNames() []string {
	var list []string
	for _, f := range funcs.All() {
		list = append(list, cobra.CompletionWithDesc(f.Name, f.Summary))
	}
	return list
}

// completeFunction offers a function as the only word.
func completeFunction(_ *cobra.Command, args []string, _ string) ([]string, cobra.ShellCompDirective) {
	if len(args) > 0 {
		return nil, cobra.ShellCompDirectiveNoFileComp
	}
	return functionNames(), cobra.ShellCompDirectiveNoFileComp
}

// completeAnswer offers a function, then the inputs that are not given yet, then
// what may be written for one.
func completeAnswer(_ *cobra.Command, args []string, word string) ([]string, cobra.ShellCompDirective) {
	if len(args) == 0 {
		return functionNames(), cobra.ShellCompDirectiveNoFileComp
	}
	f, err := funcs.Lookup(args[0])
	if err != nil {
		return nil, cobra.ShellCompDirectiveNoFileComp
	}
	if name, _, ok := strings.Cut(word, "="); ok {
		in, _ := f.Input(name)
		return valuesOf(in), cobra.ShellCompDirectiveNoFileComp
	}
	var list []string
	for _, in := range f.Inputs {
		if !slices.ContainsFunc(args[1:], func(a string) bool { return strings.HasPrefix(a, in.Name+"=") }) {
			list = append(list, cobra.CompletionWithDesc(in.Name+"=", in.Summary))
		}
	}
	return list, cobra.ShellCompDirectiveNoFileComp | cobra.ShellCompDirectiveNoSpace | cobra.ShellCompDirectiveKeepOrder
}

// valuesOf lists the words NAME=VALUE of an input that takes one of a few
// values.
func valuesOf(in funcs.Input) []string {
	values := in.Choices
	switch in.Kind {
	case funcs.YesNo:
		values = []string{"yes", "no"}
	case funcs.Level:
		if in.Default != nil {
			values = []string{funcs.FormatArgument(in.Default)}
		}
	}
	var list []string
	for _, v := range values {
		list = append(list, in.Name+"="+v)
	}
	return list
}

// completeFor offers functions, families and all, after those that a list names
// already.
func completeFor(_ *cobra.Command, _ []string, word string) ([]string, cobra.ShellCompDirective) {
	names := []string{cobra.CompletionWithDesc("all", "every function")}
	for _, family := range funcs.Families() {
		names = append(names, cobra.CompletionWithDesc(family.Name, family.Summary))
	}
	names = append(names, functionNames()...)
	if before := word[:strings.LastIndexByte(word, ',')+1]; before != "" {
		for i := range names {
			// The library's bash script does not find a word with a comma and a summary.
			name, _, _ := strings.Cut(names[i], "\t")
			names[i] = before + name
		}
	}
	return names, cobra.ShellCompDirectiveNoFileComp | cobra.ShellCompDirectiveNoSpace
}

// complete tells how the words of a command and the values of its flags are
// completed, by the names of the command and the flags.
func complete(c *cobra.Command) {
	c.ValidArgsFunction = map[string]cobra.CompletionFunc{
		"fill": completeBooks, "preview": completeBooks, "verify": completeBooks, "page": completeBooks, "starter": completeBooks,
		"functions": completeFunction, "answer": completeAnswer,
	}[c.Name()]
	var formats []string
	for _, f := range texttab.Formats {
		formats = append(formats, string(f))
	}
	ways := map[string]cobra.CompletionFunc{
		"format": cobra.FixedCompletions(formats, cobra.ShellCompDirectiveNoFileComp),
		"book":   completeBooks,
		"data":   cobra.FixedCompletions(nil, cobra.ShellCompDirectiveFilterDirs),
		"jobs":   cobra.NoFileCompletions,
		"shard":  cobra.NoFileCompletions,
		"sheet":  cobra.NoFileCompletions,
		"for":    completeFor,
	}
	for name, way := range ways {
		if c.Flags().Lookup(name) == nil {
			continue
		}
		if err := c.RegisterFlagCompletionFunc(name, way); err != nil {
			panic(err) // a flag registered twice is our own mistake
		}
	}
}
