package ooxml

import (
	"cmp"
	"errors"
	"strings"
)

// The kinds of Error, for errors.Is.
var (
	// ErrNotWorkbook is a file that is something other than an Office Open
	// XML workbook.
	ErrNotWorkbook = errors.New("not a workbook")
	// ErrUnreadable is a file that the system does not let be opened or read.
	ErrUnreadable = errors.New("file cannot be read")
	// ErrEncrypted is a workbook that opens with a password only.
	ErrEncrypted = errors.New("workbook is encrypted")
	// ErrDamaged is a workbook whose bytes contradict themselves or the format.
	ErrDamaged = errors.New("workbook is damaged")
	// ErrLimit is a workbook beyond one of the Limits.
	ErrLimit = errors.New("workbook passes a limit")
	// ErrEdit is an edit that must not or cannot be made: the cell holds a
	// formula, lies inside a merged range, or the value has no place in a cell.
	ErrEdit = errors.New("cell cannot be written")
	// ErrSigned is an attempt to change a signed workbook in place.
	ErrSigned = errors.New("workbook is signed")
	// ErrChanged is a workbook that another program changed while it was open.
	ErrChanged = errors.New("workbook changed meanwhile")
	// ErrTarget is a place that cannot be written to.
	ErrTarget = errors.New("cannot write there")
)

// Error is a refusal: what was found, where, and what to do about it. Empty
// fields do not apply. errors.Is finds Kind and Err.
type Error struct {
	File   string // the file's name, as it was given to Open
	Part   string // the part's name inside the zip file
	Sheet  string // the sheet's name, as on its tab
	Cell   string // a cell or range, such as C7
	Reason string // what is wrong, a phrase without a full stop
	Advice string // what to do, a phrase without a full stop
	Kind   error  // one of the Err values of this package
	Err    error  // the cause, where another package reported it
}

// Error gives place, reason and advice on one line.
func (e *Error) Error() string {
	var s strings.Builder
	put := func(separator, text string) {
		if text == "" {
			return
		}
		if s.Len() > 0 {
			s.WriteString(separator)
		}
		s.WriteString(text)
	}
	put("", e.File)
	if e.Part != "" {
		put(": ", "part "+e.Part)
	}
	if e.Sheet != "" {
		put(": ", "sheet "+e.Sheet)
	}
	if e.Cell != "" {
		put(": ", "cell "+e.Cell)
	}
	put(": ", e.Reason)
	put("; ", e.Advice)
	return s.String()
}

// Unwrap gives the kind and the cause.
func (e *Error) Unwrap() []error {
	var list []error
	if e.Kind != nil {
		list = append(list, e.Kind)
	}
	if e.Err != nil {
		list = append(list, e.Err)
	}
	return list
}

// The advice that goes with every damaged part: what a user can do.
const adviceDamaged = "open it in a spreadsheet program, let it repair the file, look over what was repaired, and save"

func damaged(reason string) *Error {
	return &Error{Kind: ErrDamaged, Reason: reason, Advice: adviceDamaged}
}

func beyond(reason, option string) *Error {
	return &Error{Kind: ErrLimit, Reason: reason, Advice: "if the file can be trusted, raise the limit " + option}
}

// place fills in what an error does not say yet about where it happened, so that
// each layer adds only what it knows. An error that names another part keeps
// clear of this part's sheet.
func place(err error, file, part, sheet string) error {
	e, ok := err.(*Error)
	if !ok {
		return err
	}
	placed := *e
	placed.File = cmp.Or(e.File, file)
	if e.Part == "" || part == "" || e.Part == part {
		placed.Part = cmp.Or(e.Part, part)
		placed.Sheet = cmp.Or(e.Sheet, sheet)
	}
	return &placed
}

// placeCell adds the cell to an error that names no part and no cell yet.
func placeCell(err error, row, col int) error {
	e, ok := err.(*Error)
	if !ok || e.Part != "" || e.Cell != "" {
		return err
	}
	placed := *e
	placed.Cell = CellName(row, col)
	return &placed
}
