package main

import (
	"context"
	"errors"
	"fmt"
	"io"
	"os"
	"path/filepath"
	"runtime"
	"runtime/debug"
	"strings"
	"sync/atomic"

	"github.com/spf13/cobra"

	"halfwidth/cmd/internal/texttab"
	"halfwidth/workbook"
)

// bookVerb is what a verb does with each book.
type bookVerb struct {
	done     string // what it has done with a book, for the last line of a batch
	writes   bool   // it writes outputs
	filled   bool   // it looks at outputs instead of the books that they were made of
	work     func(ctx context.Context, path string, o workbook.Options) (*workbook.Report, error)
	print    func(io.Writer, *workbook.Report) error                             // one book, as text
	columns  []texttab.Column                                                    // of CSV and JSON; the first six as those of longColumns
	tabulate func(*texttab.Table, *workbook.Report)                              // one book, as rows of CSV and JSON
	sum      func(*workbook.Report) (outcome string, wrong bool, notes []string) // one book in the table of a batch
}

// eachBook works on the books that the words of the command line lead to.
func eachBook(c *cobra.Command, f *bookFlags, words []string, v bookVerb) error {
	format, err := formatOf(*f.format)
	if err != nil {
		return err
	}
	if f.o.Workers < 0 {
		return usageError{fmt.Errorf("--jobs is %d; write 1 or more, or leave it out for as many as there are cores", f.o.Workers)}
	}
	s, err := shardOf(f.shard)
	if err != nil {
		return err
	}
	files := workbook.Find(words, v.filled)
	collectLater(files.Found)
	if !files.Batch && s.of == 0 {
		return oneBook(c, f, words[0], v, format)
	}
	if f.o.Output != "" && f.o.InPlace {
		return usageError{errors.New("--in-place writes over the workbooks themselves; leave out --output")}
	}
	if f.o.Output != "" {
		if err := checkOutputs(f.o.Output, files.Found); err != nil {
			return err
		}
	}
	b := &batch{verb: v, o: f.o, format: format, sharded: s.of > 0}
	if v.writes {
		b.o.Writes = writesOf(f.o, files.Found)
	}
	for _, found := range files.Found {
		switch {
		case !s.holds(found.Key):
		case found.LeftOut != "":
			b.leftOut = append(b.leftOut, found)
		default:
			b.books = append(b.books, found)
		}
	}
	return b.run(c.Context(), c.OutOrStdout(), newProgress(c.ErrOrStderr(), len(b.books), f.quiet))
}

// collectLater lets garbage grow twice as far as usual before it is collected,
// unless some book is large: with one of usual size there is hardly anything worth
// collecting before the end.
func collectLater(found []workbook.Found) {
	const large = 4 << 20
	if os.Getenv("GOGC") != "" {
		return
	}
	for _, f := range found {
		if info, err := os.Stat(f.Path); err == nil && info.Size() >= large {
			return
		}
	}
	debug.SetGCPercent(200)
}

// oneBook works on one book that was named itself.
func oneBook(c *cobra.Command, f *bookFlags, path string, v bookVerb, format texttab.Format) error {
	report, err := v.work(c.Context(), path, f.o)
	if err != nil {
		return named(path, err)
	}
	if format == texttab.Text {
		err = v.print(c.OutOrStdout(), report)
	} else {
		t := &texttab.Table{Columns: v.columns}
		v.tabulate(t, report)
		err = t.Write(c.OutOrStdout(), format)
	}
	if _, wrong, _ := v.sum(report); wrong && err == nil {
		err = errRefused
	}
	return err
}

// named puts the workbook's path before an error that does not name it.
func named(path string, err error) error {
	if strings.Contains(err.Error(), path) || errors.Is(err, workbook.ErrNoWork) {
		return err
	}
	return fmt.Errorf("%s: %w", path, err)
}

// outputIn is where a batch writes the output of a book: below the folder for
// outputs as the book lies below the folder that was named.
func outputIn(dir string, f workbook.Found) string {
	return filepath.Join(dir, f.Below, filepath.Base(workbook.OutputName(f.Path)))
}

// writesOf notes what a batch writes, in all shards.
func writesOf(o workbook.Options, found []workbook.Found) *workbook.Writes {
	var paths []string
	for _, f := range found {
		switch {
		case f.LeftOut != "" || f.Err != nil:
		case o.InPlace:
			paths = append(paths, f.Path)
		case o.Output != "":
			paths = append(paths, outputIn(o.Output, f))
		default:
			paths = append(paths, workbook.OutputName(f.Path))
		}
	}
	return workbook.NewWrites(paths, o.InPlace)
}

// checkOutputs refuses a folder for outputs that cannot be one, and two books
// with one output, whichever shards they are in.
func checkOutputs(dir string, found []workbook.Found) error {
	if ext := strings.ToLower(filepath.Ext(dir)); !isFolder(dir) && (ext == ".xlsx" || ext == ".xlsm" || ext == ".csv" || ext == ".tsv") {
		return usageError{fmt.Errorf("--output %s is one file, but there may be several workbooks; name a folder", dir)}
	}
	from := map[string]string{}
	for _, f := range found {
		if f.LeftOut != "" || f.Err != nil {
			continue
		}
		to := outputIn(dir, f)
		key := to
		if runtime.GOOS == "windows" || runtime.GOOS == "darwin" {
			key = strings.ToLower(to)
		}
		if other, taken := from[key]; taken {
			return usageError{fmt.Errorf("%s and %s would both be written to %s; name the folder that both lie in, which is kept below --output, or fill them in two runs", other, f.Path, to)}
		}
		from[key] = f.Path
	}
	return nil
}

// batch is work on many books.
type batch struct {
	verb    bookVerb
	o       workbook.Options
	format  texttab.Format
	books   []workbook.Found
	leftOut []workbook.Found
	sharded bool
}

// What became of a book of a batch.
type fate uint8

const (
	worked     fate = iota
	failed          // it could not be worked on, for a reason that is said
	noSheet         // it lies in a folder and has nothing to work out
	notStarted      // the batch was interrupted before or while it was worked on
)

// bookResult is what is kept of a book when it has been worked on.
type bookResult struct {
	book    workbook.Found
	fate    fate
	counts  statusCounts
	wrong   bool
	outcome string
	notes   []string
	rows    []texttab.Row // for CSV and JSON
}

// run works on as many books at once as there are jobs, each with its share of
// what jobs are left; what it prints stands in the order of the books, whichever
// is ready first. Of a book that is done, only what will be printed is kept.
func (b *batch) run(ctx context.Context, stdout io.Writer, bar *progress) error {
	jobs := b.o.Workers
	if jobs == 0 {
		jobs = runtime.GOMAXPROCS(0)
	}
	atOnce := max(1, min(jobs, len(b.books)))
	b.o.Workers = max(1, jobs/atOnce)
	ready := make([]chan bookResult, len(b.books))
	for i := range ready {
		ready[i] = make(chan bookResult, 1)
	}
	var next atomic.Int64
	for range atOnce {
		go func() {
			for {
				i := int(next.Add(1)) - 1
				if i >= len(b.books) {
					return
				}
				ready[i] <- b.book(ctx, b.books[i])
				bar.step()
			}
		}()
	}
	out := newBatchTable(stdout, b.format, b.verb.columns, b.leftOut)
	for i := range ready {
		out.add(<-ready[i])
	}
	bar.end()
	if err := out.close(b.verb.done); err != nil {
		return err
	}
	return out.verdict(b.sharded)
}

// book works on one book.
func (b *batch) book(ctx context.Context, f workbook.Found) bookResult {
	r := bookResult{book: f}
	err := f.Err
	var report *workbook.Report
	if err == nil && ctx.Err() == nil {
		o := b.o
		if o.Output != "" {
			o.Output, o.MakeFolders = outputIn(o.Output, f), true
		}
		report, err = b.verb.work(ctx, f.Path, o)
	}
	switch {
	case report == nil && ctx.Err() != nil:
		r.fate = notStarted
	case f.InFolder && errors.Is(err, workbook.ErrNoWork):
		r.fate, r.notes = noSheet, []string{err.Error()}
	case err != nil:
		r.fate, r.notes = failed, []string{named(f.Path, err).Error()}
	default:
		r.counts = report.Counts()
		r.outcome, r.wrong, r.notes = b.verb.sum(report)
		if b.format != texttab.Text {
			t := &texttab.Table{}
			b.verb.tabulate(t, report)
			r.rows = t.Rows
		}
	}
	return r
}
