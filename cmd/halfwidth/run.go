package main

import (
	"context"
	"errors"
	"fmt"
	"io"
	"slices"
	"strings"

	"github.com/spf13/cobra"

	"halfwidth/cmd/internal/buildinfo"
	"halfwidth/cmd/internal/texttab"
	"halfwidth/funcs"
)

// The exit codes.
const (
	exitOK      = 0 // every row is ok or caution
	exitRefused = 1 // some row is refused
	exitFailed  = 2 // the command could not be carried out

	exitInterrupted = 130 // an interrupt ended it
	exitBrokenPipe  = 141 // nobody reads what it prints any more
	exitTerminated  = 143 // a request to terminate ended it
)

// errRefused ends a command whose output already says which rows are refused.
var errRefused = errors.New("some rows are refused")

// partlyError ends a command whose output says what is wrong with some of it.
type partlyError struct{ text string }

func (e partlyError) Error() string { return e.text }

// interruption is the cause of a context that a signal ended.
type interruption struct{ code int }

func (interruption) Error() string { return "interrupted" }

// usageError is a command line that cannot be carried out as written.
type usageError struct{ error }

// verbs lists the commands in the order of the help.
var verbs = []func() *cobra.Command{fillCommand, previewCommand, verifyCommand, pageCommand, starterCommand, functionsCommand, answerCommand}

// Run carries out one command line and gives its exit code. Results go to
// stdout, everything else to stderr.
func Run(ctx context.Context, args []string, stdout, stderr io.Writer) int {
	root := &cobra.Command{
		Use:   "halfwidth",
		Short: "Statistics of the numbers in a workbook, written beside them as plain values",
		Long: "halfwidth works out a calculation sheet: how sure an average is, whether a difference is real, how many must be measured.\n" +
			"The answers are written into the sheet's result columns as plain values, with a note on whether they may be trusted.\n\n" +
			"The exit status is 0 where every row is ok or caution, 1 where some row is refused, 2 where the command could not be carried out.",
		Version:       buildinfo.Version(),
		Args:          noVerb,
		SilenceErrors: true,
		SilenceUsage:  true,
		RunE:          func(c *cobra.Command, _ []string) error { return c.Help() },
	}
	root.Example = "  halfwidth fill testdata/workbooks/larkmoor.xlsx"
	root.PersistentFlags().BoolP("help", "h", false, "print this help")
	root.SetFlagErrorFunc(wrongFlag)
	root.SetHelpFunc(printHelp)
	for _, verb := range verbs {
		c := verb()
		complete(c)
		root.AddCommand(c)
	}
	printed := &printer{Writer: stdout}
	root.SetOut(printed)
	root.SetErr(stderr)
	nameOwnVerbs(root) // the library's scripts for shells go where the output goes by now
	root.SetArgs(args)
	err := root.ExecuteContext(ctx)
	if printed.err != nil {
		err = printed.failure(ctx, err)
	}
	switch {
	case errors.Is(err, errUnread):
		return exitBrokenPipe
	case err == nil:
		return exitOK
	case errors.Is(err, errRefused):
		return exitRefused
	}
	code := exitFailed
	var partly partlyError
	var stopped interruption
	switch {
	case errors.As(context.Cause(ctx), &stopped):
		code = stopped.code
		if errors.Is(err, context.Canceled) {
			err = stopped
		}
	case errors.As(err, &partly):
		code = exitRefused
	}
	for line := range strings.SplitSeq(err.Error(), "\n") {
		fmt.Fprintln(stderr, texttab.Fit(stderr, "halfwidth: "+line))
	}
	return code
}

// noVerb reports a first word that is no verb, with the closest ones.
func noVerb(c *cobra.Command, args []string) error {
	if len(args) == 0 {
		return nil
	}
	var names []string
	for _, sub := range c.Commands() {
		if sub.IsAvailableCommand() {
			names = append(names, sub.Name())
		}
	}
	if slices.Contains(funcs.Names(), args[0]) {
		return usageError{fmt.Errorf("%s is a function; write: halfwidth answer %s NAME=VALUE…", args[0], args[0])}
	}
	if near := funcs.Closest(args[0], names); len(near) > 0 {
		return usageError{fmt.Errorf("there is no command %q; did you mean %s?", args[0], near[0])}
	}
	return usageError{fmt.Errorf("there is no command %q; the commands are %s", args[0], strings.Join(names, ", "))}
}

// formatFlag adds --format to a command.
func formatFlag(c *cobra.Command) *string {
	return c.Flags().String("format", string(texttab.Text), "print as `FORMAT`: text (which is the default), json or csv")
}

// formatOf reads the value of --format.
func formatOf(text string) (texttab.Format, error) {
	if f := texttab.Format(text); slices.Contains(texttab.Formats, f) {
		return f, nil
	}
	return "", usageError{fmt.Errorf("--format is %q; write text, json or csv", text)}
}
