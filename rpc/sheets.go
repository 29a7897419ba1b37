package rpc

import (
	"context"
	"fmt"
	"maps"
	"reflect"
	"slices"
	"strconv"

	"halfwidth/workbook/calculation"
)

// sheetMethods take over the values of a client's open sheets. All three are
// notifications, as the document methods of LSP are: what cannot be taken is
// answered by the notification sheets/refused.
func sheetMethods() []Method {
	return []Method{
		{Name: "sheets/didOpen", Notification: true, Params: reflect.TypeFor[openParams](), Handler: sheetHandler(openSheet),
			Doc: "Hands over all values of a sheet, which takes the place of what was held of it."},
		{Name: "sheets/didChange", Notification: true, Params: reflect.TypeFor[changeParams](), Handler: sheetHandler(changeSheet),
			Doc: "Hands over the cells of a sheet that have changed since the version named."},
		Strict(Method{Name: "sheets/didClose", Notification: true,
			Doc: "Lets a sheet go, or all sheets of a book."}, closeSheet),
	}
}

type openParams struct {
	Book    string      `json:"book" doc:"the book, by any name that the client gives it"`
	Sheet   string      `json:"sheet" doc:"the sheet's name, as expressions write it"`
	Version int         `json:"version" doc:"the state of the sheet, a number that rises with every change"`
	Cells   cellBlocks  `json:"cells" doc:"the cells, in blocks"`
	Hidden  [][]int     `json:"hiddenRows,omitempty" doc:"hidden or filtered rows, as pairs of first and last"`
	Merged  []string    `json:"merged,omitempty" doc:"merged ranges, such as B2:C2"`
	Tables  []tableHere `json:"tables,omitempty" doc:"the tables on the sheet"`
	Names   []nameHere  `json:"names,omitempty" doc:"the defined names that stand for a range of the sheet"`
}

type tableHere struct {
	Name       string `json:"name"`
	Range      string `json:"range"`
	HeaderRows *int   `json:"headerRows,omitempty"` // 1 where it is left out
	TotalsRows *int   `json:"totalsRows,omitempty"` // 0 where it is left out
}

type nameHere struct {
	Name  string `json:"name"`
	Range string `json:"range"`
}

type changeParams struct {
	Book        string     `json:"book" doc:"the book"`
	Sheet       string     `json:"sheet" doc:"the sheet"`
	BaseVersion int        `json:"baseVersion" doc:"the version that the changes start from"`
	Version     int        `json:"version" doc:"the version that they lead to"`
	Cells       cellBlocks `json:"cells" doc:"the cells that have changed, in blocks, the later over the earlier"`
}

type closeParams struct {
	Book  string  `json:"book" doc:"the book"`
	Sheet *string `json:"sheet,omitempty" doc:"the sheet; left out, the whole book is closed"`
}

// heldSheet is an open sheet at one version. It never changes.
type heldSheet struct {
	name    string
	version int
	frame   *calculation.Frame
	places  []calculation.Place
	held    int    // cells of room
	lost    *Error // why its values are not known
}

// bookState is the open sheets of a book at one moment, in the order in which
// they were opened. It never changes.
type bookState struct {
	name   string
	sheets []*heldSheet
}

func (b *bookState) sheet(name string) *heldSheet {
	if i := slices.IndexFunc(b.sheets, func(s *heldSheet) bool { return s.name == name }); i >= 0 {
		return b.sheets[i]
	}
	return nil
}

// with gives the book with a sheet in the place of that of its name.
func (b *bookState) with(sheet *heldSheet) *bookState {
	sheets := slices.Clone(b.sheets)
	if i := slices.IndexFunc(sheets, func(s *heldSheet) bool { return s.name == sheet.name }); i >= 0 {
		sheets[i] = sheet
	} else {
		sheets = append(sheets, sheet)
	}
	return &bookState{b.name, sheets}
}

// source gives what expressions read, or the fault of a sheet that was lost.
func (b *bookState) source() (calculation.Source, *Error) {
	rows := calculation.NewRows()
	for _, s := range b.sheets {
		if s.lost != nil {
			return nil, &Error{Code: CodeContentModified, Message: fmt.Sprintf("The sheet %s of %s is not held; send sheets/didOpen of it again.", quoted(s.name), quoted(b.name))}
		}
		rows.AddFrame(s.name, s.frame)
	}
	for _, s := range b.sheets {
		for _, p := range s.places {
			rows.AddPlace(p)
		}
	}
	return rows, nil
}

// aboutSheet is what every message about a sheet names.
type aboutSheet struct {
	book, sheet string
	version     int
}

// sheetHandler runs a handler whose errors go to the client as the notification
// sheets/refused, and leave the sheet lost.
func sheetHandler(handle func(s *Session, params []byte, at *aboutSheet) error) Handler {
	return func(_ context.Context, call *Call) (any, error) {
		var at aboutSheet
		err := handle(call.Session, call.Params, &at)
		if err == nil || err == errStillLost {
			return nil, nil
		}
		call.Session.refuseSheet(at, wireError(err))
		return nil, nil
	}
}

// longestName is how long the names of books and sheets may be, in bytes.
const longestName = 1000

// decodeSheet reads the params but for the cells, which it gives as they came.
// What can be read of a faulty message is put into at, as far as it is sound.
func decodeSheet(params []byte, target any, at *aboutSheet) (cells []byte, err error) {
	rest, cells := cutMember(params, "cells")
	at.book, at.sheet = nameIn(rest, "book"), nameIn(rest, "sheet")
	at.version, _ = strconv.Atoi(string(memberOf(rest, "version")))
	if err := decodeStrict(rest, target); err != nil {
		return nil, err
	}
	for member, name := range map[string]string{"book": at.book, "sheet": at.sheet} {
		if name == "" {
			return nil, badParams("/"+member, member, "is empty or too long", fmt.Sprintf("give a name of 1 to %d bytes", longestName))
		}
	}
	return cells, nil
}

// nameIn gives a member that is a name, "" where it is none.
func nameIn(params []byte, member string) string {
	raw := memberOf(params, member)
	if len(raw) < 2 || raw[0] != '"' || len(raw) > longestName+2 {
		return ""
	}
	return textOf(raw)
}

// refuseSheet tells the client that a message was not taken. Where the sheet is
// open, or may be, it counts as lost from then on.
func (s *Session) refuseSheet(at aboutSheet, fault *Error) {
	book := s.bookNamed(at.book)
	count, _ := s.openSheets()
	if at.book != "" && at.sheet != "" && (count < s.limits.OpenSheets || book.sheet(at.sheet) != nil) {
		s.hold(book.with(&heldSheet{name: at.sheet, version: at.version, lost: fault}))
	}
	s.Notify(refusedMethod, sheetRefusal{at.book, at.sheet, at.version, fault})
}

const refusedMethod = "sheets/refused"

// sheetRefusal is the params of sheets/refused.
type sheetRefusal struct {
	Book    string `json:"book" doc:"the book, empty where it could not be read"`
	Sheet   string `json:"sheet" doc:"the sheet"`
	Version int    `json:"version" doc:"the version that the message leads to"`
	Error   *Error `json:"error" doc:"why: -32801 where the version does not fit, -32602 where the values cannot be taken, -32803 where a limit is passed"`
}

func (s *Session) bookNamed(name string) *bookState {
	if live := s.live[name]; live != nil {
		return live.held
	}
	return &bookState{name: name}
}

// hold makes a state of a book the newest, for calls and for its results.
func (s *Session) hold(state *bookState) {
	open := maps.Clone(s.books)
	if open == nil {
		open = books{}
	}
	live := s.live[state.name]
	if live == nil {
		live = newLiveBook(s, state.name)
		s.live[state.name] = live
	}
	if len(state.sheets) == 0 {
		delete(open, state.name)
		delete(s.live, state.name)
	} else {
		open[state.name] = state.source
	}
	s.books = open
	live.changed(state)
}

func openSheet(s *Session, params []byte, at *aboutSheet) error {
	var p openParams
	cells, err := decodeSheet(params, &p, at)
	if err != nil {
		return err
	}
	book := s.bookNamed(p.Book)
	old := book.sheet(p.Sheet)
	count, held := s.openSheets()
	if old != nil {
		held -= old.held
	} else if count >= s.limits.OpenSheets {
		return &Error{Code: CodeRequestFailed, Message: fmt.Sprintf("No more than %d sheets may be open; close some, or start the server with a higher --max-open-sheets.", s.limits.OpenSheets)}
	}
	sink := newSheetCells(s.limits.OpenCells-held, s.limits.OpenCells)
	if err := readCells(cells, sink); err != nil {
		return asParams(err)
	}
	if err := sink.full(); err != nil {
		return err
	}
	sheet := &heldSheet{name: p.Sheet, version: p.Version, frame: sink.frame}
	if err := p.layOut(sheet, s.limits.OpenCells); err != nil {
		return err
	}
	sheet.held = sheet.frame.Held()
	s.hold(book.with(sheet))
	return nil
}

// errStillLost is a change of a sheet that the client has been asked to open again.
var errStillLost = &Error{Code: CodeContentModified, Message: "The sheet has been asked for again."}

func changeSheet(s *Session, params []byte, at *aboutSheet) error {
	var p changeParams
	cells, err := decodeSheet(params, &p, at)
	if err != nil {
		return err
	}
	book := s.bookNamed(p.Book)
	old := book.sheet(p.Sheet)
	gap := func(format string, a ...any) error {
		return &Error{Code: CodeContentModified, Message: fmt.Sprintf(format, a...) + "; send sheets/didOpen of it again."}
	}
	switch {
	case old == nil:
		return &Error{Code: CodeContentModified, Message: fmt.Sprintf("The sheet %s of %s is not open; send sheets/didOpen of it first.", quoted(p.Sheet), quoted(p.Book))}
	case old.lost != nil:
		return errStillLost
	case old.version != p.BaseVersion:
		return gap("The change starts from version %d, but version %d of the sheet %s is held", p.BaseVersion, old.version, quoted(p.Sheet))
	case p.Version <= p.BaseVersion:
		return gap("The change leads from version %d to version %d, which is not later", p.BaseVersion, p.Version)
	}
	sink := &changedCells{frame: old.frame, steps: s.limits.OpenCells}
	if err := readCells(cells, sink); err != nil {
		return asParams(err)
	}
	_, held := s.openSheets()
	if held-old.held+old.frame.HeldWith(sink.changes) > s.limits.OpenCells {
		return tooManyCells(s.limits.OpenCells)
	}
	sheet := &heldSheet{name: old.name, version: p.Version, frame: old.frame, places: old.places, held: old.held}
	if len(sink.changes) > 0 {
		sheet.frame = old.frame.With(sink.changes)
		sheet.held = sheet.frame.Held()
	}
	s.hold(book.with(sheet))
	return nil
}

func closeSheet(_ context.Context, call *Call, p closeParams) (any, error) {
	s := call.Session
	book := s.bookNamed(p.Book)
	left := &bookState{name: p.Book}
	if p.Sheet != nil {
		if book.sheet(*p.Sheet) == nil {
			return nil, fmt.Errorf("the sheet %s of %s is not open", quoted(*p.Sheet), quoted(p.Book))
		}
		left.sheets = slices.DeleteFunc(slices.Clone(book.sheets), func(h *heldSheet) bool { return h.name == *p.Sheet })
	} else if len(book.sheets) == 0 {
		return nil, fmt.Errorf("no sheet of %s is open", quoted(p.Book))
	}
	s.hold(left)
	return nil, nil
}

// openSheets counts the open sheets and the cells that they hold.
func (s *Session) openSheets() (count, held int) {
	for _, live := range s.live {
		for _, sheet := range live.held.sheets {
			count++
			held += sheet.held
		}
	}
	return count, held
}

// asParams makes an error about the text of the cells one about params.
func asParams(err error) error {
	if fault, ok := err.(*syntaxError); ok {
		return badParams("/cells", "cells", "cannot be read: "+fault.Error(), "")
	}
	return err
}

// layOut adds to an opened sheet what is not a value, in at most so many steps.
func (p *openParams) layOut(sheet *heldSheet, steps int) *Error {
	for i, pair := range p.Hidden {
		if len(pair) != 2 || pair[0] < 1 || pair[1] < pair[0] || pair[1] > calculation.MaxRow {
			return badParams(fmt.Sprintf("/hiddenRows/%d", i), "hiddenRows", "is no pair of rows", "give first and last, such as [5, 9]")
		}
		if steps -= pair[1] - pair[0]; steps < 0 {
			return tooManySteps("/hiddenRows")
		}
		for row := pair[0]; row <= min(pair[1], sheet.frame.LastRow()); row++ {
			sheet.frame.SetRow(row, calculation.RowHidden)
		}
	}
	for i, text := range p.Merged {
		area, err := areaOf(text, fmt.Sprintf("/merged/%d", i))
		if err != nil {
			return err
		}
		area.LastRow, area.LastCol = min(area.LastRow, sheet.frame.LastRow()), min(area.LastCol, sheet.frame.LastCol())
		if steps -= sizeOf(area); steps < 0 {
			return tooManySteps("/merged")
		}
		for col := area.FirstCol; col <= area.LastCol; col++ {
			for row := area.FirstRow; row <= area.LastRow; row++ {
				if row != area.FirstRow || col != area.FirstCol {
					sheet.frame.Column(col).Cover(row)
				}
			}
		}
	}
	for i, table := range p.Tables {
		area, err := areaOf(table.Range, fmt.Sprintf("/tables/%d/range", i))
		if err != nil {
			return err
		}
		place := placeOf(calculation.Table, table.Name, sheet.name, area)
		place.HeaderRows = 1
		for _, rows := range []struct {
			given *int
			place *int
			name  string
		}{{table.HeaderRows, &place.HeaderRows, "headerRows"}, {table.TotalsRows, &place.TotalsRows, "totalsRows"}} {
			if rows.given == nil {
				continue
			}
			if *rows.given < 0 || *rows.given > area.LastRow-area.FirstRow+1 {
				return badParams(fmt.Sprintf("/tables/%d/%s", i, rows.name), rows.name, fmt.Sprintf("is %d", *rows.given), "give how many rows of the table they are")
			}
			*rows.place = *rows.given
		}
		sheet.places = append(sheet.places, place)
	}
	for i, name := range p.Names {
		area, err := areaOf(name.Range, fmt.Sprintf("/names/%d/range", i))
		if err != nil {
			return err
		}
		sheet.places = append(sheet.places, placeOf(calculation.DefinedName, name.Name, sheet.name, area))
	}
	return nil
}

// sizeOf is how many cells an area has.
func sizeOf(a calculation.Area) int {
	return max(0, a.LastRow-a.FirstRow+1) * max(0, a.LastCol-a.FirstCol+1)
}

func tooManySteps(pointer string) *Error {
	return badParams(pointer, lastOf(pointer), "covers the same cells again and again", "name each cell once")
}

func areaOf(text, pointer string) (calculation.Area, *Error) {
	area, ok := calculation.ParseArea(text)
	if !ok {
		argument, element := partAt(pointer)
		return area, badElement(pointer, argument, element, "is "+quoted(text), `give a range, such as "A1:D61"`)
	}
	if area.WholeCols {
		area.LastRow = calculation.MaxRow
	}
	if area.WholeRows {
		area.LastCol = calculation.MaxCol
	}
	return area, nil
}

func placeOf(kind calculation.PlaceKind, name, sheet string, area calculation.Area) calculation.Place {
	return calculation.Place{Kind: kind, Name: name, Sheet: sheet,
		FirstRow: area.FirstRow, LastRow: area.LastRow, FirstCol: area.FirstCol, LastCol: area.LastCol}
}
