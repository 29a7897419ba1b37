package main

import (
	"errors"
	"fmt"

	"github.com/spf13/cobra"

	"halfwidth/cmd/internal/texttab"
	"halfwidth/funcs"
	"halfwidth/workbook"
)

func starterCommand() *cobra.Command {
	var words []string
	var replace bool
	c := &cobra.Command{
		Use:   "starter NEW.xlsx --for FUNCTION,…",
		Short: "Write a new workbook with a ready calculation sheet",
		Long: "starter writes a new workbook with a calculation sheet that is ready to be filled: a block for each function (or for several\n" +
			"of the same inputs) with worked rows and empty ones, drop-down lists, notes on what belongs into a cell, and a sheet that\n" +
			"lists every name. --for takes functions and families (halfwidth functions lists both), or all.",
		Example: "  halfwidth starter questions.xlsx --for mean-interval,difference-interval",
	}
	c.Flags().StringSliceVar(&words, "for", nil, "make blocks for these `FUNCTIONS` or families, with commas between them, or for all")
	c.Flags().BoolVar(&replace, "replace", false, "write over a file that is there")
	c.RunE = func(c *cobra.Command, args []string) error {
		switch {
		case len(args) != 1:
			return usageError{errors.New("name one new workbook; write, for instance: halfwidth starter questions.xlsx --for mean-interval")}
		case len(words) == 0:
			return usageError{fmt.Errorf("no function named; write, for instance: halfwidth starter %s --for mean-interval (halfwidth functions lists them)", args[0])}
		}
		list, err := workbook.StarterFunctions(words)
		if err != nil {
			return usageError{fmt.Errorf("%w (halfwidth functions lists all)", err)}
		}
		err = workbook.WriteStarter(c.Context(), args[0], list, replace)
		if errors.Is(err, workbook.ErrTaken) {
			err = fmt.Errorf("%w; name another file, or add --replace", err)
		}
		if err != nil {
			return err
		}
		_, err = fmt.Fprintln(c.OutOrStdout(), texttab.Fit(c.OutOrStdout(), fmt.Sprintf("Wrote %s: a calculation sheet with worked rows of %s. Change or add rows, then run: halfwidth fill %s",
			args[0], functionCount(list), shellWord(args[0]))))
		return err
	}
	return c
}

func functionCount(list []*funcs.Function) string {
	if len(list) == 1 {
		return list[0].Name
	}
	return fmt.Sprintf("%d functions", len(list))
}
