package rpc

import (
	"fmt"
	"math"
	"strconv"
	"time"

	"halfwidth/workbook/calculation"
)

// Cells come as a list of blocks, so that a million of them are read in one
// pass without a value of its own for each:
//
//	{"at": "A1", "rows": [["depot", "minutes"], ["North", 12.1]]}   row by row, from the cell down and to the right
//	{"at": "B2", "column": [12.1, null, 11.8]}                      down a column
//	{"at": "B2", "column": {"float64le": "BASE64"}}                 the same, quicker; NaN is a blank
//	{"clear": "A5:C9"}                                              nothing stands there any more
//
// A cell is a number, a text, true or false, null where it is blank, or an
// object that names its kind: {"date": "2026-03-02"}, {"date": "2026-03-02T08:15:00"}
// or {"date": 46083.34} in days since 1899-12-30; {"duration": 0.01} in days;
// {"error": "#N/A"}; {"formula": CELL} for what a formula gives.

// cellBlocks stands for the cells in the params of a method.
type cellBlocks struct{}

// cellSink takes the cells of blocks.
type cellSink interface {
	set(row, col int, cell calculation.Cell) *Error
	// setText is set for a text that stands in the message as it is.
	setText(row, col int, text []byte) *Error
	clear(area calculation.Area) *Error
}

// cellReader reads blocks. Its errors are -32602 and name the place.
type cellReader struct {
	valueParser
	sink cellSink
}

// readCells reads the text of the member "cells" into a sink.
func readCells(text []byte, sink cellSink) error {
	r := cellReader{valueParser{scanner{data: text}}, sink}
	return r.list("/cells", func(i int) error {
		pointer := "/cells/" + strconv.Itoa(i)
		if r.peek() != '{' {
			return r.wrongAt(pointer, "a block of cells", "give an object with at and rows, at and column, or clear")
		}
		return r.block(pointer)
	})
}

// list passes a list, calling each at the start of every element.
func (r *cellReader) list(pointer string, each func(i int) error) error {
	r.space()
	if r.peek() != '[' {
		return r.wrongAt(pointer, "a list", "give a list")
	}
	r.pos++
	r.space()
	if r.peek() == ']' {
		r.pos++
		return nil
	}
	for i := 0; ; i++ {
		r.space()
		if err := each(i); err != nil {
			return err
		}
		r.space()
		switch r.peek() {
		case ',':
			r.pos++
		case ']':
			r.pos++
			return nil
		default:
			return r.unexpected("a comma or ] in a list")
		}
	}
}

// wrongAt says that the next value is not what is wanted.
func (r *cellReader) wrongAt(pointer, wanted, advice string) error {
	v, err := r.value(pointer)
	if err != nil {
		return err
	}
	if v.Fault != nil {
		return v.Fault
	}
	argument, element := partAt(pointer)
	return badElement(pointer, argument, element, "is "+shown(v)+", not "+wanted, advice)
}

// blockMembers are the members of a block.
var blockMembers = []string{"at", "rows", "column", "clear"}

func (r *cellReader) block(pointer string) error {
	starts := map[string]int{}
	for {
		r.pos++
		r.space()
		if r.peek() == '}' && len(starts) == 0 {
			break
		}
		raw, escaped, err := r.key()
		if err != nil {
			return err
		}
		name := plain(raw, escaped)
		start, err := r.scanner.value()
		if err != nil {
			return err
		}
		_, twice := starts[name]
		switch {
		case twice:
			return badParams(pointerTo(pointer, name), name, "is given twice", "give each member once")
		case name != "at" && name != "rows" && name != "column" && name != "clear":
			return unknownMember(Member{name, Value{Pointer: pointerTo(pointer, name)}}, blockMembers)
		}
		starts[name] = start
		r.space()
		if r.peek() != ',' {
			break
		}
	}
	if r.peek() != '}' {
		return r.unexpected("a comma or } in an object")
	}
	r.pos++
	after := r.pos
	defer func() { r.pos = after }()
	at, hasAt := starts["at"]
	rows, hasRows := starts["rows"]
	column, hasColumn := starts["column"]
	cleared, hasClear := starts["clear"]
	switch {
	case hasClear && len(starts) == 1:
		r.pos = cleared
		return r.clearBlock(pointerTo(pointer, "clear"))
	case !hasAt || hasRows == hasColumn || hasClear:
		return badParams(pointer, "cells", "has a block that is none of the three", "give at and rows, at and column, or clear alone")
	}
	r.pos = at
	first, err := r.address(pointerTo(pointer, "at"))
	if err != nil {
		return err
	}
	if hasRows {
		r.pos = rows
		return r.rows(pointerTo(pointer, "rows"), first)
	}
	r.pos = column
	return r.column(pointerTo(pointer, "column"), first)
}

func (r *cellReader) address(pointer string) (calculation.CellRef, error) {
	v, err := r.value(pointer)
	if err != nil {
		return calculation.CellRef{}, err
	}
	ref, ok := calculation.ParseCell(v.Text)
	if v.Kind != Text || !ok {
		return ref, badParams(pointer, "at", "is "+shown(v), `give the address of a cell, such as "B2"`)
	}
	return ref, nil
}

func (r *cellReader) clearBlock(pointer string) error {
	v, err := r.value(pointer)
	if err != nil {
		return err
	}
	area, ok := calculation.ParseArea(v.Text)
	if v.Kind != Text || !ok {
		return badParams(pointer, "clear", "is "+shown(v), `give a range, such as "A5:C9" or "C:C"`)
	}
	return asError(r.sink.clear(area))
}

// asError keeps a nil *Error from becoming an error.
func asError(e *Error) error {
	if e == nil {
		return nil
	}
	return e
}

func (r *cellReader) rows(pointer string, first calculation.CellRef) error {
	return r.list(pointer, func(i int) error {
		row := first.Row + i
		if r.peek() != '[' {
			return r.wrongAt(pointerTo(pointer, strconv.Itoa(i)), "a row of cells", "give a list for each row")
		}
		return r.list("", func(j int) error {
			return r.cell(row, first.Col+j, func() string { return pointer + "/" + strconv.Itoa(i) + "/" + strconv.Itoa(j) })
		})
	})
}

func (r *cellReader) column(pointer string, first calculation.CellRef) error {
	r.space()
	if r.peek() != '{' {
		return r.list(pointer, func(i int) error {
			return r.cell(first.Row+i, first.Col, func() string { return pointer + "/" + strconv.Itoa(i) })
		})
	}
	v, err := r.value(pointer)
	switch {
	case err != nil:
		return err
	case v.Fault != nil:
		return v.Fault
	case !v.Packed:
		return badParams(pointer, "column", "is "+shown(v), `give a list, or {"float64le": "BASE64"}`)
	}
	for i, x := range v.Numbers {
		cell := calculation.Cell{Kind: calculation.Number, Number: x}
		if math.IsNaN(x) {
			cell = calculation.Cell{}
		}
		if err := r.put(first.Row+i, first.Col, cell); err != nil {
			return err
		}
	}
	return nil
}

// put hands a cell on, if it lies in the greatest sheet that there is.
func (r *cellReader) put(row, col int, cell calculation.Cell) error {
	if row > calculation.MaxRow || col > calculation.MaxCol {
		return beyond()
	}
	return asError(r.sink.set(row, col, cell))
}

func beyond() *Error {
	return badParams("/cells", "cells", fmt.Sprintf("go beyond row %d or column %d", calculation.MaxRow, calculation.MaxCol), "a sheet is no larger")
}

// cell reads one cell; pointer is asked only where it is wrong.
func (r *cellReader) cell(row, col int, pointer func() string) error {
	r.space()
	cell := calculation.Cell{}
	switch c := r.peek(); {
	case c == '-' || isDigit(c):
		start := r.pos
		if err := r.number(); err != nil {
			return err
		}
		x, err := strconv.ParseFloat(string(r.data[start:r.pos]), 64)
		if err != nil {
			return badParams(pointer(), "cells", fmt.Sprintf("has at %s %.40s, which no double holds", calculation.CellRef{Row: row, Col: col}, r.data[start:r.pos]), "the largest is about 1.8e308")
		}
		cell = calculation.Cell{Kind: calculation.Number, Number: x}
	case c == '"':
		raw, escaped, err := r.text()
		if err != nil {
			return err
		}
		if row > calculation.MaxRow || col > calculation.MaxCol {
			return beyond()
		}
		if len(raw) == 0 {
			break // a text of no characters is a blank cell
		}
		if escaped {
			raw = []byte(plain(raw, true))
		}
		return asError(r.sink.setText(row, col, raw))
	default:
		v, err := r.value("")
		if err != nil {
			return err
		}
		var fault string
		if cell, fault = cellOf(v); fault != "" {
			return badParams(pointer(), "cells", fmt.Sprintf("has at %s %s", calculation.CellRef{Row: row, Col: col}, fault), cellForms)
		}
	}
	return r.put(row, col, cell)
}

const cellForms = `give a number, a text, true, false, null, {"date": "2026-03-02"}, {"duration": 0.01}, {"error": "#N/A"} or {"formula": CELL}`

// cellOf gives a cell of its JSON value, or what is wrong with it.
func cellOf(v Value) (calculation.Cell, string) {
	switch {
	case v.Fault != nil:
		return calculation.Cell{}, "a value that " + v.Fault.Data.Reason
	case v.Kind == Null:
		return calculation.Cell{}, ""
	case v.Kind == Number:
		return calculation.Cell{Kind: calculation.Number, Number: v.Number}, ""
	case v.Kind == Text && v.Text == "":
		return calculation.Cell{}, ""
	case v.Kind == Text:
		return calculation.Cell{Kind: calculation.Text, Text: v.Text}, ""
	case v.Kind == YesNo:
		cell := calculation.Cell{Kind: calculation.Bool}
		if v.YesNo {
			cell.Number = 1
		}
		return cell, ""
	case v.Kind != Object || len(v.Members) != 1:
		return calculation.Cell{}, shown(v) + ", and an object with one member is wanted"
	}
	name, inner := v.Members[0].Name, v.Members[0].Value
	switch {
	case name == "date" && inner.Kind == Number:
		return calculation.Cell{Kind: calculation.Date, Number: inner.Number}, ""
	case name == "date" && inner.Kind == Text:
		days, ok := dayNumber(inner.Text)
		if !ok {
			return calculation.Cell{}, "the date " + quoted(inner.Text) + ", which is not written like 2026-03-02 or 2026-03-02T08:15:00"
		}
		return calculation.Cell{Kind: calculation.Date, Number: days}, ""
	case name == "duration" && inner.Kind == Number:
		return calculation.Cell{Kind: calculation.Duration, Number: inner.Number}, ""
	case name == "error" && inner.Kind == Text && inner.Text != "":
		return calculation.Cell{Kind: calculation.Error, Text: inner.Text}, ""
	case name == "formula" && inner.Kind != Object || name == "formula" && len(inner.Members) == 1 && inner.Members[0].Name != "formula":
		cell, fault := cellOf(inner)
		cell.Formula = true
		cell.Unsaved = cell.Kind == calculation.Blank
		return cell, fault
	}
	return calculation.Cell{}, "an object with the member " + quoted(name) + " as " + shown(inner)
}

// dayNumber gives a date as the days since 1899-12-30, as sheets count.
func dayNumber(text string) (float64, bool) {
	for _, form := range []string{"2006-01-02", "2006-01-02T15:04", "2006-01-02T15:04:05"} {
		if at, err := time.Parse(form, text); err == nil {
			since := at.Sub(time.Date(1899, 12, 30, 0, 0, 0, 0, time.UTC))
			day := since.Truncate(24 * time.Hour)
			return float64(day/(24*time.Hour)) + (since-day).Seconds()/86400, true
		}
	}
	return 0, false
}
