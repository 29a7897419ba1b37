package workbook

import (
	"context"
	"errors"
	"path/filepath"
	"slices"

	"halfwidth/workbook/calculation"
)

// A run that fills several files works on some at once, in no order that could
// be relied on. What it writes must not be read by an expression of another file
// of the run, since the answer would rest on which is done first.

// Writes are the files that one run writes.
type Writes struct {
	files   map[string]bool // by their path behind all links
	inPlace bool
}

// NewWrites notes the files that a run is going to write: in place of the books
// themselves, which may also hold sheets that it only reads, or as outputs.
func NewWrites(paths []string, inPlace bool) *Writes {
	w := &Writes{files: make(map[string]bool, len(paths)), inPlace: inPlace}
	for _, path := range paths {
		w.files[w.key(path)] = true
	}
	return w
}

// key is the path of a file behind all links; an output need not be there yet.
func (w *Writes) key(path string) string {
	if w.inPlace {
		return realPath(path)
	}
	return filepath.Join(realPath(filepath.Dir(path)), filepath.Base(path))
}

var errSameRun = errors.New("is written in the same run, so that what it holds depends on which is worked on first; fill the two in runs of their own")

// output reports whether a file is an output of the run, which may not be there
// yet.
func (w *Writes) output(path string) bool { return w != nil && !w.inPlace && w.files[w.key(path)] }

// guard keeps the sheets of a source that the run may write from being read.
func (w *Writes) guard(path string, s calculation.Source, named []string) (calculation.Source, error) {
	if w == nil || !w.inPlace || !w.files[w.key(path)] {
		return s, nil
	}
	if IsTextSheet(path) {
		return nil, errSameRun
	}
	return sameRun{s, named}, nil
}

// sameRun is a book that the run fills in place: its calculation sheets and the
// tables that a fill makes change, its other sheets do not.
type sameRun struct {
	calculation.Source
	named []string // calculation sheets that the user named
}

func (s sameRun) Read(ctx context.Context, sheet string, choose func(*calculation.Frame) calculation.Columns) (*calculation.Frame, error) {
	b, isBook := s.Source.(*Book)
	changes := slices.Contains(s.named, sheet) || isBook && b.isOurTable(sheet)
	frame, err := s.Source.Read(ctx, sheet, func(head *calculation.Frame) calculation.Columns {
		if changes = changes || calculation.IsCalculationSheet(sheet, head); changes {
			return calculation.Columns{}
		}
		return choose(head)
	})
	if changes {
		return nil, errSameRun
	}
	return frame, err
}
