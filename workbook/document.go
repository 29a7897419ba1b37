package workbook

import (
	"context"
	"errors"
	"fmt"
	"path/filepath"
	"strings"

	"halfwidth/workbook/calculation"
	"halfwidth/workbook/ooxml"
)

// document is a file with calculation sheets: a workbook or a text sheet.
type document interface {
	source() calculation.Source
	planOptions() calculation.Options
	// changes finds the cells that do not hold what was worked out.
	changes(*calculation.Results) (changes, error)
	// notes say what should be known of the file as a whole.
	notes(*calculation.Plan) []string
	// mayFillInPlace refuses to write over a file that must stay as it is.
	mayFillInPlace() error
	// noSheet says what to do about a document without a calculation sheet.
	noSheet() string
	Close() error
}

// changes are the cells of a document that do not hold what was worked out, and
// the ways to write them.
type changes interface {
	differences() ([]Difference, error)
	// compared is how many cells were looked at.
	compared() int
	// mayReplace refuses to write over a file that was changed since it was filled.
	mayReplace(target string) error
	saveAs(target string, last ...func() error) (ooxml.Saved, error)
	saveInPlace() (ooxml.Saved, error)
}

// open opens a file and plans its calculation sheets.
func open(ctx context.Context, path string, o Options) (document, *calculation.Plan, error) {
	d, err := openDocument(path, o)
	if err != nil {
		return nil, nil, err
	}
	options := d.planOptions()
	options.Progress = o.Progress
	options.Sheets, options.KeepValues = o.Sheets, o.KeepValues
	plan, err := calculation.NewPlan(ctx, d.source(), options)
	if err == nil {
		err = plan.Unreadable()
	}
	if err == nil {
		err = hasWork(path, d, plan)
	}
	if err != nil {
		d.Close()
		return nil, nil, err
	}
	return d, plan, nil
}

func openDocument(path string, o Options) (document, error) {
	in := newFolders(path, o.Data, o.Limits)
	in.writes, in.sheets = o.Writes, o.Sheets
	if isText(path) {
		t, err := openTextSheet(path, o.Limits, in)
		if err != nil {
			return nil, err
		}
		return t, nil
	}
	b, err := openBook(path, o.Limits, in)
	if err != nil {
		return nil, err
	}
	return b, nil
}

// ErrNoWork is a file in which there is nothing to work out.
var ErrNoWork = errors.New("nothing to work out")

// nothingError says what is missing from a file.
type nothingError struct{ text string }

func (e nothingError) Error() string { return e.text }
func (e nothingError) Unwrap() error { return ErrNoWork }

func hasWork(path string, d document, plan *calculation.Plan) error {
	name := filepath.Base(path)
	switch {
	case len(plan.Sheets) == 0:
		return nothingError{fmt.Sprintf("%s: no calculation sheet. %s", name, d.noSheet())}
	case len(plan.Rows) == 0 && len(plan.Diagnostics()) == 0:
		return nothingError{fmt.Sprintf("%s: nothing to work out on %s. A block starts at a header row with a cell that reads \"work out\", "+
			"an input such as \"sample\" and a result such as \"> mean\" beside it; the rows below are worked out.", name, strings.Join(plan.Sheets, ", "))}
	}
	return nil
}

// textSheetEnds are the ends of the names of text calculation sheets.
var textSheetEnds = []string{".calculations.csv", ".calculations.tsv"}

// IsTextSheet reports whether a file's name is that of a text calculation sheet.
func IsTextSheet(path string) bool {
	_, end := splitName(path)
	return strings.HasPrefix(strings.ToLower(end), ".calculations.")
}

// isText reports whether a file is a text file by its name.
func isText(path string) bool {
	ext := strings.ToLower(filepath.Ext(path))
	return ext == ".csv" || ext == ".tsv"
}

// splitName splits a file's name before its ending; that of a text calculation
// sheet has two parts.
func splitName(path string) (name, end string) {
	at := len(path) - len(filepath.Ext(path))
	for _, end := range textSheetEnds {
		if n := len(path) - len(end); n > 0 && strings.EqualFold(path[n:], end) {
			at = n
		}
	}
	return path[:at], path[at:]
}

// filled stands at the end of the names of outputs, before their ending.
const filled = "-filled"

// outputName is the name of the output beside a file.
func outputName(path string) string {
	name, end := splitName(path)
	return name + filled + end
}

// IsOutput reports whether a file's name is that of an output of a fill.
func IsOutput(path string) bool {
	name, _ := splitName(path)
	return strings.HasSuffix(strings.ToLower(filepath.Base(name)), filled)
}
