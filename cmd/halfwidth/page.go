package main

import (
	"context"
	"errors"
	"fmt"
	"os"
	"path/filepath"
	"strings"

	"github.com/spf13/cobra"

	"halfwidth/cmd/internal/texttab"
	"halfwidth/funcs"
	"halfwidth/workbook"
	"halfwidth/workbook/page"
)

// pages is one run of the verb.
type pages struct {
	o       workbook.Options
	output  string
	replace bool
}

func pageCommand() *cobra.Command {
	p := &pages{o: workbook.Options{KeepValues: true}}
	c := &cobra.Command{
		Use:   "page BOOK.xlsx|FOLDER…",
		Short: "Show every calculation of a workbook with its findings and its picture, on one page",
		Long: "page works out the calculation sheets of a workbook and writes one self-contained HTML page: what should be known first,\n" +
			"then every calculation with its sentence, its findings, a picture, its inputs and results. The page needs no network and no\n" +
			"script, and prints well. The workbook is only read. Without --output the page is BOOK.html beside the workbook. Of folders\n" +
			"and several workbooks each has its own page; with --output FOLDER they lie there as the workbooks do.",
		Example: "  halfwidth page testdata/workbooks/larkmoor.xlsx -o larkmoor.html",
		Args:    someBooks,
		RunE:    p.run,
	}
	c.Flags().StringVarP(&p.output, "output", "o", "", "write the page to `FILE`, or pages into this folder")
	c.Flags().BoolVar(&p.replace, "replace", false, "write over a file that is no page of halfwidth")
	c.Flags().StringSliceVar(&p.o.Sheets, "sheet", nil, "work out the sheet `NAME` besides those named Calculations or marked in A1")
	c.Flags().StringSliceVar(&p.o.Data, "data", nil, "allow the files that expressions name to lie in `FOLDER`, besides the workbook's own")
	c.Flags().IntVar(&p.o.Workers, "jobs", 0, "work out `N` rows at once (default: as many as there are cores)")
	return c
}

// run writes a page for each workbook that the words lead to. One that fails
// does not stop the rest.
func (p *pages) run(c *cobra.Command, words []string) error {
	files := workbook.Find(words, false)
	targets, err := p.targets(files)
	if err != nil {
		return err
	}
	var failed []error
	refused, written := false, 0
	for i, book := range files.Found {
		if book.LeftOut != "" {
			fmt.Fprintf(c.ErrOrStderr(), "Left out %s: %s\n", book.Path, book.LeftOut)
			continue
		}
		report, err := p.write(c.Context(), book, targets[i])
		switch {
		case c.Context().Err() != nil:
			return c.Context().Err()
		case book.InFolder && errors.Is(err, workbook.ErrNoWork):
			fmt.Fprintf(c.ErrOrStderr(), "Left out %s: no calculation sheet with anything to work out\n", book.Path)
			continue
		case err != nil:
			failed = append(failed, named(book.Path, err))
			continue
		}
		written++
		counts := report.Counts()
		refused = refused || counts[funcs.StatusRefused] > 0
		if _, err := fmt.Fprintf(c.OutOrStdout(), "Wrote %s: %s.\n", texttab.Clean(targets[i]), rowCounts(counts)); err != nil {
			return err
		}
	}
	switch {
	case len(failed) > 0 && written > 0:
		return partlyError{errors.Join(failed...).Error()}
	case len(failed) > 0:
		return errors.Join(failed...)
	case written == 0:
		return errors.New("there was no workbook to make a page of; name a workbook, or a folder with one")
	case refused:
		return errRefused
	}
	return nil
}

func (p *pages) write(ctx context.Context, book workbook.Found, target string) (*workbook.Report, error) {
	if book.Err != nil {
		return nil, book.Err
	}
	report, err := workbook.Work(ctx, book.Path, p.o)
	if err != nil {
		return nil, err
	}
	if book.Below != "" && p.output != "" {
		if err := os.MkdirAll(filepath.Dir(target), 0o777); err != nil {
			return nil, err
		}
	}
	err = page.WriteFile(ctx, target, report, p.replace)
	if errors.Is(err, page.ErrTaken) {
		err = fmt.Errorf("%w; name another, or add --replace", err)
	}
	return report, err
}

// targets gives each workbook its page: the file named, or one of the book's
// name beside the book or below the folder named.
func (p *pages) targets(files workbook.Files) ([]string, error) {
	folder := p.output != "" && (isFolder(p.output) || os.IsPathSeparator(p.output[len(p.output)-1]))
	switch {
	case folder && !isFolder(p.output):
		return nil, usageError{fmt.Errorf("there is no folder %s; make it first", p.output)}
	case files.Batch && p.output != "" && !folder:
		return nil, usageError{fmt.Errorf("--output %s is one file, but there may be several workbooks; name a folder that is there", p.output)}
	}
	targets := make([]string, len(files.Found))
	from := map[string]string{}
	for i, book := range files.Found {
		if book.LeftOut != "" {
			continue
		}
		target := strings.TrimSuffix(book.Path, filepath.Ext(book.Path)) + ".html"
		switch {
		case folder:
			target = filepath.Join(p.output, book.Below, filepath.Base(target))
		case p.output != "":
			target = p.output
		}
		if ext := strings.ToLower(filepath.Ext(target)); ext != ".html" && ext != ".htm" {
			return nil, usageError{fmt.Errorf("--output is %s, but must end in .html, or be a folder that is there", target)}
		}
		if other, taken := from[strings.ToLower(target)]; taken {
			return nil, usageError{fmt.Errorf("%s and %s would both be written to %s; write them one by one", other, book.Path, target)}
		}
		from[strings.ToLower(target)], targets[i] = book.Path, target
	}
	return targets, nil
}
