package workbook

import (
	"context"
	"errors"
	"fmt"
	"os"
	"path/filepath"
	"runtime"
	"strings"

	"halfwidth/funcs"
	"halfwidth/workbook/calculation"
	"halfwidth/workbook/ooxml"
)

// Options say how a workbook is to be worked out.
type Options struct {
	Sheets  []string     // calculation sheets besides those that are ones by name or by their A1
	Data    []string     // folders, besides the book's own, in which files named in expressions may lie
	Workers int          // rows worked out at once; 0 for as many as there are cores
	Limits  ooxml.Limits // of what a workbook may cost

	KeepValues bool // keep the samples that were read in the arguments of outcomes, as pictures need them

	Output  string // file or folder to write to; empty for BOOK-filled beside the book
	InPlace bool   // write over the book itself
	Replace bool   // write over an output that was changed since

	MakeFolders bool    // make the folder to write to where it is not there
	Writes      *Writes // what the run writes besides, in a batch

	// Progress is told how many rows are worked out, by several goroutines at
	// once. It may be nil.
	Progress func(done, total int)
}

// Report is what working out one workbook gave.
type Report struct {
	Book    string
	Notes   []string // what should be known of the file as a whole, such as a protected sheet
	Plan    *calculation.Plan
	Results *calculation.Results // nil for a preview
	Saved   ooxml.Saved          // Path is empty where nothing was written

	Verification *Verification // of Verify only
}

// Counts counts rows by their status.
func (r *Report) Counts() map[funcs.Status]int {
	counts := map[funcs.Status]int{}
	if r.Results == nil {
		for _, row := range r.Plan.Rows {
			counts[StatusOf(row.Findings())]++
		}
		return counts
	}
	for _, row := range r.Results.Rows {
		counts[row.Status]++
	}
	return counts
}

// StatusOf is the status that the findings of a row make.
func StatusOf(list []calculation.Diagnostic) funcs.Status {
	findings := make([]funcs.Finding, len(list))
	for i, d := range list {
		findings[i] = d.Finding
	}
	return funcs.StatusOf(findings)
}

// Preview reads and resolves everything in a workbook; it computes nothing and
// writes nothing.
func Preview(ctx context.Context, path string, o Options) (*Report, error) {
	d, plan, err := open(ctx, path, o)
	if err != nil {
		return nil, err
	}
	defer d.Close()
	if err := plan.Count(ctx, o.workers()); err != nil {
		return nil, err
	}
	return &Report{Book: path, Notes: d.notes(plan), Plan: plan}, nil
}

// Fill works out the calculation sheets of a workbook and writes the results
// into their result columns.
func Fill(ctx context.Context, path string, o Options) (*Report, error) {
	target, err := o.target(path)
	if err != nil {
		return nil, err
	}
	d, plan, err := open(ctx, path, o)
	if err != nil {
		return nil, err
	}
	defer d.Close()
	if o.InPlace {
		if err := d.mayFillInPlace(); err != nil {
			return nil, err
		}
	}
	results, err := plan.Run(ctx, o.workers())
	if err != nil {
		return nil, err
	}
	changes, err := d.changes(results)
	if err == nil {
		err = ctx.Err() // from here on a book is written to its end
	}
	if err != nil {
		return nil, err
	}
	report := &Report{Book: path, Notes: d.notes(plan), Plan: plan, Results: results}
	if o.InPlace {
		if err := notLocked(path); err != nil { // it may have been opened since
			return nil, err
		}
		report.Saved, err = changes.saveInPlace()
		return report, err
	}
	var last []func() error
	if !o.Replace {
		still, err := mayReplace(changes, target)
		if err != nil {
			return nil, err
		}
		last = append(last, still)
	}
	if o.MakeFolders {
		if err := os.MkdirAll(filepath.Dir(target), 0o777); err != nil {
			return nil, err
		}
	}
	report.Saved, err = changes.saveAs(target, last...)
	return report, err
}

// mayReplace refuses to write over an output that was changed since it was
// filled. It gives the same question anew for when all is written: the output may
// have been changed meanwhile.
func mayReplace(c changes, target string) (still func() error, err error) {
	asked := stateOf(target)
	return func() error {
		if asked.same(stateOf(target)) {
			return nil
		}
		return c.mayReplace(target)
	}, c.mayReplace(target)
}

// state is what the system says of a file; nil where it says nothing.
type state struct{ os.FileInfo }

func stateOf(path string) state {
	info, err := os.Stat(path)
	if err != nil {
		return state{}
	}
	return state{info}
}

// same reports that nothing was written to a file, or put in its place, since.
func (s state) same(now state) bool {
	if s.FileInfo == nil || now.FileInfo == nil {
		return s.FileInfo == now.FileInfo
	}
	return os.SameFile(s.FileInfo, now.FileInfo) && s.Size() == now.Size() && s.ModTime().Equal(now.ModTime())
}

func (o Options) workers() int {
	if o.Workers > 0 {
		return o.Workers
	}
	return runtime.GOMAXPROCS(0)
}

// target is the file that a fill writes.
func (o Options) target(path string) (string, error) {
	ext := filepath.Ext(path)
	beside := outputName(path)
	switch {
	case o.InPlace && o.Output != "":
		return "", errors.New("--in-place writes over the workbook itself; leave out --output")
	case o.InPlace:
		return path, nil
	case o.Output == "":
		return beside, nil
	}
	target := o.Output
	if info, err := os.Stat(target); err == nil && info.IsDir() {
		target = filepath.Join(target, filepath.Base(beside))
	}
	if !strings.EqualFold(filepath.Ext(target), ext) {
		return "", fmt.Errorf("--output is %s, but must end in %s as the workbook does, or be a folder that is there", target, ext)
	}
	from, err1 := os.Stat(path)
	to, err2 := os.Stat(target)
	if err1 == nil && err2 == nil && os.SameFile(from, to) {
		return "", fmt.Errorf("--output is %s, the workbook itself; write to another file, or use --in-place", target)
	}
	return target, nil
}
