package workbook

import (
	"slices"
	"strconv"
	"strings"

	"halfwidth/funcs"
	"halfwidth/workbook/calculation"
)

// Difference is a result cell that does not hold what is worked out now.
type Difference struct {
	Row    *calculation.RowResult // whose result it is
	Sheet  string
	Cell   calculation.CellRef // zero for a table sheet that is not there
	Result string              // the result's name; in a table sheet its column's
	Stored any                 // float64, bool or string; nil where the cell is empty
	Now    any                 // float64, int, bool or string; nil where it is to be empty
	Reason Reason
}

// Reason says why a stored result differs, as far as that can be told. The
// fingerprint stands for the function, its version and all inputs: where it is
// stored, it tells whether they changed or the result did.
type Reason string

// The reasons.
const (
	NeverWorkedOut Reason = "never worked out"         // no result of the row is stored
	Missing        Reason = "missing"                  // others of the row are
	InputsChanged  Reason = "inputs changed since"     // another fingerprint
	OtherVersion   Reason = "another version since"    // of the function
	TypedOver      Reason = "result typed over"        // the same fingerprint, but not its result
	FewerDigits    Reason = "saved with fewer digits"  // the same number, as a program keeps it that saves 15 or 16 digits
	SameInputs     Reason = "inputs are the same"      // the same fingerprint; a note or a range may differ all the same
	RefusedNow     Reason = "refused now"              // the row is
	NotWanted      Reason = "nothing belongs here"     // right of or below a table
	Unknown        Reason = "differs (no fingerprint)" // inputs changed, or the result was typed over
)

// older reports that nothing of the user's can stand in the cell: it is empty
// or holds the answer to other inputs.
func (r Reason) older() bool {
	return r == NeverWorkedOut || r == Missing || r == InputsChanged || r == OtherVersion
}

// cell is a cell of a document.
type cell struct {
	sheet string
	ref   calculation.CellRef
}

// wanted is what should stand in a cell.
type wanted struct {
	cell  cell
	row   *calculation.RowResult
	name  string // of the result
	line  int    // the line of a table sheet; 0 for a cell of the row itself
	value any
}

func (w wanted) edit() calculation.Edit { return calculation.Edit{Cell: w.cell.ref, Value: w.value} }

func (w wanted) difference(stored any) Difference {
	return Difference{Row: w.row, Sheet: w.cell.sheet, Cell: w.cell.ref, Result: w.name, Stored: stored, Now: w.value}
}

// wantedByRows lists what should stand in the result cells of the rows.
func wantedByRows(results *calculation.Results) []wanted {
	var list []wanted
	for _, row := range results.Rows {
		for _, e := range row.Edits {
			list = append(list, wanted{cell: cell{row.Row.Sheet(), e.Cell}, row: row, name: row.Row.Block.ResultName(e.Cell.Col), value: e.Value})
		}
	}
	return list
}

// record is what is filled together and has a fingerprint of its own: the
// result cells of a row, or a line of its table sheet.
type record struct {
	row  *calculation.RowResult
	line int
}

// explain finds the reasons of differences, all of which are among the cells
// that were looked at.
func explain(all []wanted, list []Difference) {
	at := map[cell]*Difference{}
	for i := range list {
		d := &list[i]
		at[cell{d.Sheet, d.Cell}] = d
	}
	records := map[record][]wanted{}
	for _, w := range all {
		r := record{w.row, w.line}
		records[r] = append(records[r], w)
	}
	for r, cells := range records {
		seen := newEvidence(cells, at)
		if r.line > 0 && !seen.marked {
			// The lines of a function's own table rest on the fingerprint of the row.
			row := newEvidence(records[record{r.row, 0}], at)
			seen.marked, seen.then, seen.now, seen.version = row.marked, row.then, row.now, row.version
		}
		for _, w := range cells {
			if d := at[w.cell]; d != nil {
				d.Reason = seen.reason(w, d.Stored)
			}
		}
	}
}

// evidence is what a record's cells tell of when they were filled.
type evidence struct {
	stored    bool // something is
	marked    bool // it has a fingerprint column
	then, now any  // the fingerprints stored and worked out
	version   bool // another version of the function is stored
	refused   bool // the stored status is refused
}

func newEvidence(cells []wanted, differences map[cell]*Difference) evidence {
	var e evidence
	for _, w := range cells {
		stored, d := w.value, differences[w.cell]
		if d != nil {
			stored = d.Stored
		}
		e.stored = e.stored || stored != nil
		switch w.name {
		case "fingerprint":
			if !e.marked {
				e.marked, e.then, e.now = true, stored, w.value
			}
		case "version":
			e.version = e.version || d != nil && stored != nil && w.value != nil
		case "status":
			e.refused = e.refused || stored == string(funcs.StatusRefused)
		}
	}
	return e
}

// reason says why a cell of the record differs.
func (e evidence) reason(w wanted, stored any) Reason {
	switch {
	case !e.stored:
		return NeverWorkedOut
	case stored == nil:
		return Missing
	case w.row.Status == funcs.StatusRefused:
		return RefusedNow
	case w.name == "":
		return NotWanted
	case e.version:
		return OtherVersion
	case e.marked && e.then == nil && e.refused: // a refusal bears no fingerprint
		return InputsChanged
	case w.name == "fingerprint" && !isFingerprint(stored):
		return TypedOver
	case isFingerprint(e.then) && e.now != nil && e.then != e.now:
		return InputsChanged
	case fewerDigits(stored, w.value):
		return FewerDigits
	case !e.marked || !isFingerprint(e.then) || e.now == nil:
		return Unknown
	case pinned(w.row.Row.Function, w.name):
		return TypedOver
	}
	return SameInputs
}

// fewerDigits reports whether a stored number is that worked out, rounded or cut
// to 15 or 16 digits.
func fewerDigits(stored, now any) bool {
	x, ok := stored.(float64)
	y, is := now.(float64)
	if !ok || !is {
		return false
	}
	mantissa, exponent, _ := strings.Cut(strconv.FormatFloat(y, 'e', 16, 64), "e") // 17 digits
	for _, digits := range []int{15, 16} {
		cut := mantissa[:len(mantissa)-(17-digits)] + "e" + exponent
		for _, text := range []string{strconv.FormatFloat(y, 'e', digits-1, 64), cut} {
			if near, err := strconv.ParseFloat(text, 64); err == nil && near == x {
				return true
			}
		}
	}
	return false
}

// pinned reports whether the fingerprint settles a result to the last digit.
// The others also tell where the values stand and what lies between them.
func pinned(f *funcs.Function, name string) bool {
	switch name {
	case "used", "level", "direction", "version":
		return true
	}
	is := func(r funcs.Result) bool { return r.Name == name }
	return slices.ContainsFunc(f.Results, is) || slices.ContainsFunc(f.Table, is)
}

func isFingerprint(v any) bool {
	text, ok := v.(string)
	return ok && len(text) == 16 && strings.Trim(text, "0123456789abcdef") == ""
}
