package main

import (
	"errors"
	"fmt"
	"os"
	"path/filepath"
	"strings"

	"github.com/spf13/cobra"

	"halfwidth/funcs"
	"halfwidth/workbook"
	"halfwidth/workbook/page"
)

func pageCommand() *cobra.Command {
	var o workbook.Options
	var output string
	var replace bool
	c := &cobra.Command{
		Use:   "page BOOK.xlsx…",
		Short: "Show every calculation of a workbook with its findings and its picture, on one page",
		Long: "page works out the calculation sheets of a workbook and writes one self-contained HTML page: what should be known first,\n" +
			"then every calculation with its sentence, its findings, a picture, its inputs and results. The page needs no network and no\n" +
			"script, and prints well. The workbook is only read. Without --output the page is BOOK.html beside the workbook.",
		Example: "  halfwidth page testdata/workbooks/larkmoor.xlsx -o larkmoor.html",
		Args:    someBooks,
	}
	c.Flags().StringVarP(&output, "output", "o", "", "the page to write, or the folder to write pages to")
	c.Flags().BoolVar(&replace, "replace", false, "write over a file that is no page of halfwidth")
	c.Flags().StringSliceVar(&o.Sheets, "sheet", nil, "a calculation sheet besides those named Calculations or marked in A1")
	c.Flags().StringSliceVar(&o.Data, "data", nil, "a folder, besides the workbook's own, in which files named in expressions may lie")
	c.Flags().IntVar(&o.Workers, "jobs", 0, "how many rows to work out at once (default: as many as there are cores)")
	c.RunE = func(c *cobra.Command, books []string) error {
		o.KeepValues = true
		targets, err := pageTargets(books, output)
		if err != nil {
			return err
		}
		var failed []error
		refused := false
		for i, book := range books {
			report, err := workbook.Work(c.Context(), book, o)
			if err == nil {
				err = page.WriteFile(c.Context(), targets[i], report, replace)
			}
			if errors.Is(err, page.ErrTaken) {
				err = fmt.Errorf("%w; name another, or add --replace", err)
			}
			if err != nil {
				failed = append(failed, named(book, err))
				continue
			}
			counts := report.Counts()
			refused = refused || counts[funcs.StatusRefused] > 0
			if _, err := fmt.Fprintf(c.OutOrStdout(), "Wrote %s: %d rows ok, %d caution, %d refused.\n", targets[i],
				counts[funcs.StatusOK], counts[funcs.StatusCaution], counts[funcs.StatusRefused]); err != nil {
				return err
			}
		}
		switch {
		case len(failed) > 0:
			return errors.Join(failed...)
		case refused:
			return errRefused
		}
		return nil
	}
	return c
}

// pageTargets gives each book its page: the file named, or one of the book's
// name in the folder named or beside the book.
func pageTargets(books []string, output string) ([]string, error) {
	folder := output != "" && (isFolder(output) || os.IsPathSeparator(output[len(output)-1]))
	if len(books) > 1 && output != "" && !folder {
		return nil, usageError{fmt.Errorf("--output %s is one file, but there are %d workbooks; name a folder that is there", output, len(books))}
	}
	if folder && !isFolder(output) {
		return nil, usageError{fmt.Errorf("there is no folder %s; make it first", output)}
	}
	targets := make([]string, len(books))
	seen := map[string]string{}
	for i, book := range books {
		target := strings.TrimSuffix(book, filepath.Ext(book)) + ".html"
		switch {
		case folder:
			target = filepath.Join(output, filepath.Base(target))
		case output != "":
			target = output
		}
		if ext := strings.ToLower(filepath.Ext(target)); ext != ".html" && ext != ".htm" {
			return nil, usageError{fmt.Errorf("--output is %s, but must end in .html, or be a folder that is there", target)}
		}
		if other, ok := seen[target]; ok {
			return nil, usageError{fmt.Errorf("%s and %s would both be written to %s; write them one by one", other, book, target)}
		}
		seen[target], targets[i] = book, target
	}
	return targets, nil
}
