package rpc

import (
	"context"
	"sync"
	"sync/atomic"

	"halfwidth/workbook/calculation"
)

// textState is one version of a document. Everything that is worked out from it
// is worked out once, by whoever asks first; otherwise it does not change, so
// that a question is answered from the text as it was when it came.
type textState struct {
	uri, name string
	version   int
	lines     *lines
	path      string   // of the file; "" where it is in none
	folders   []string // in which data files may lie
	files     *fileShelf
	last      *atomic.Pointer[workedText] // of the document: what was worked out last, of any version

	parse  sync.Once
	sheet  *calculation.TextSheet // nil where it is damaged
	damage *calculation.CSVError

	plan   sync.Once
	layout *calculation.Plan // blocks and rows, without what inputs mean

	busy   chan struct{} // holds one while somebody works
	worked *workedText
}

// workedText is what a version of a document gives.
type workedText struct {
	*textState
	plan    *calculation.Plan
	results *calculation.Results
	read    map[string]lookedUp // data files that were looked for, by name
}

// next begins the state that follows this one.
func (t *textState) next() *textState {
	return &textState{uri: t.uri, name: t.name, version: t.version, lines: t.lines, path: t.path, folders: t.folders, files: t.files}
}

// parsed reads the document's cells; nil where it is damaged.
func (t *textState) parsed() *calculation.TextSheet {
	t.parse.Do(func() {
		sheet, err := calculation.ParseTextSheet(t.name, []byte(t.lines.text))
		if err == nil {
			t.sheet = sheet
			return
		}
		if t.damage, _ = err.(*calculation.CSVError); t.damage == nil {
			t.damage = &calculation.CSVError{Line: 1, Reason: err.Error()}
		}
	})
	return t.sheet
}

// laidOut finds blocks and rows; nil where the document is damaged.
func (t *textState) laidOut() *calculation.Plan {
	t.plan.Do(func() {
		if sheet := t.parsed(); sheet != nil {
			t.layout = sheet.Layout()
		}
	})
	return t.layout
}

// workOut works the document out, or gives what is worked out already while the
// data files that it rests on are the same. plan and results are nil where the
// document is damaged. The error is the context's.
func (t *textState) workOut(ctx context.Context, workers int) (*workedText, error) {
	select {
	case t.busy <- struct{}{}:
		defer func() { <-t.busy }()
	case <-ctx.Done():
		return nil, ctx.Err()
	}
	folder := openBeside(t.path, t.folders)
	defer folder.Close()
	if t.worked != nil && !changedSince(folder, t.worked.read) {
		return t.worked, nil
	}
	w := &workedText{textState: t}
	if sheet := t.parsed(); sheet != nil {
		reader := &besideReader{folder: folder, shelf: t.files, read: map[string]lookedUp{}}
		plan, err := calculation.NewPlan(ctx, sheet.Source(reader.open), calculation.Options{NoTables: calculation.NoTablesInText})
		if err != nil {
			return nil, err
		}
		var before *calculation.Results
		if last := t.last.Load(); last != nil {
			before = last.results
		}
		results, err := plan.RunAfter(ctx, workers, before)
		if err != nil {
			return nil, err
		}
		w.plan, w.results, w.read = plan, results, reader.read
		t.last.Store(w)
	}
	t.worked = w
	return w, nil
}

// span gives the place in the document of a stretch of a cell's text; the whole
// cell where the stretch is empty.
func (t *textState) span(cell calculation.CellRef, within calculation.Span) textRange {
	span, ok := t.sheet.TextSpan(cell, within)
	if !ok {
		return textRange{}
	}
	return t.lines.span(span)
}

// rowAt gives the calculation at a cell, nil where there is none.
func (w *workedText) rowAt(cell calculation.CellRef) *calculation.RowResult {
	if w.results == nil {
		return nil
	}
	_, _, row, _ := w.plan.BlockAt(calculation.TextSheetName, cell)
	if row == nil {
		return nil
	}
	for _, r := range w.results.Rows {
		if r.Row == row {
			return r
		}
	}
	return nil
}
