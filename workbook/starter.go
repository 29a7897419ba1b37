package workbook

import (
	"archive/zip"
	"bytes"
	"cmp"
	"context"
	"errors"
	"fmt"
	"math"
	"os"
	"path/filepath"
	"slices"
	"strings"
	"unicode/utf16"

	"github.com/xuri/excelize/v2"

	"halfwidth/funcs"
)

// ErrTaken is a file that is there already.
var ErrTaken = errors.New("is there already")

// WriteStarter writes a starter workbook for some functions to a file, whole or
// not at all. A file that is there is written over only with replace.
func WriteStarter(ctx context.Context, path string, list []*funcs.Function, replace bool) error {
	if !strings.EqualFold(filepath.Ext(path), ".xlsx") {
		return fmt.Errorf("a starter is an .xlsx workbook, but the name is %s; write %s.xlsx", path, strings.TrimSuffix(path, filepath.Ext(path)))
	}
	if _, err := os.Lstat(path); !replace && err == nil {
		return fmt.Errorf("%s %w", path, ErrTaken)
	}
	data, err := Starter(ctx, list)
	if err != nil {
		return err
	}
	return WriteFile(path, data)
}

// StarterFunctions gives the functions that words name: functions, families, or
// all. The error is a *funcs.UnknownError with the closest names.
func StarterFunctions(words []string) ([]*funcs.Function, error) {
	const all = "all"
	var list []*funcs.Function
	for _, word := range words {
		name := strings.ToLower(strings.Join(strings.Fields(word), "-"))
		names := append(funcs.Names(), all)
		f, err := funcs.Lookup(name)
		found := []*funcs.Function{f}
		for _, family := range funcs.Families() {
			names = append(names, family.Name)
			if name == family.Name {
				found, err = family.Functions, nil
			}
		}
		if name == all {
			found, err = funcs.All(), nil
		}
		if err != nil {
			return nil, &funcs.UnknownError{What: "function or family", Name: word, Closest: funcs.Closest(word, names)}
		}
		for _, f := range found {
			if !slices.Contains(list, f) {
				list = append(list, f)
			}
		}
	}
	return list, nil
}

// The sheets of a starter, besides its trips.
const (
	starterSheet = "Calculations"
	namesSheet   = "Names"
)

// Starter makes a workbook with a calculation sheet for some functions: blocks
// with worked rows and rows to be filled in, drop-down lists, notes on what
// belongs into a cell, and a sheet that lists the names. All of it follows from
// the descriptors; the same functions give the same bytes.
func Starter(ctx context.Context, list []*funcs.Function) ([]byte, error) {
	if len(list) == 0 {
		return nil, errors.New("a starter needs a function")
	}
	blocks, err := starterBlocks(ctx, list)
	if err != nil {
		return nil, err
	}
	s := &starter{File: excelize.NewFile()}
	defer s.Close()
	s.check(s.SetSheetName("Sheet1", starterSheet))
	withTrips := slices.ContainsFunc(blocks, func(b *starterBlock) bool { return b.overTrips })
	s.calculations(blocks, list, withTrips)
	if withTrips {
		s.trips()
	}
	s.names(list)
	const made = "2026-01-05T08:00:00Z" // any fixed time: the bytes do not follow the clock
	s.check(s.SetDocProps(&excelize.DocProperties{Creator: "halfwidth starter", Title: "Calculations", Created: made, Modified: made}))
	s.check(s.SetAppProps(&excelize.AppProperties{Application: "halfwidth"}))
	buffer, err := s.WriteToBuffer()
	s.check(err)
	if s.err != nil {
		return nil, s.err
	}
	return inOrder(buffer.Bytes())
}

// starter is the workbook under construction; the first error ends the work.
type starter struct {
	*excelize.File
	err error
}

func (s *starter) check(err error) {
	if s.err == nil {
		s.err = err
	}
}

// inOrder puts the parts of a package in the order of their names, the content
// types first, since the library writes them in a different order each time.
func inOrder(packed []byte) ([]byte, error) {
	in, err := zip.NewReader(bytes.NewReader(packed), int64(len(packed)))
	if err != nil {
		return nil, err
	}
	first := func(f *zip.File) int {
		if f.Name == "[Content_Types].xml" {
			return 0
		}
		return 1
	}
	slices.SortFunc(in.File, func(a, b *zip.File) int {
		return cmp.Or(cmp.Compare(first(a), first(b)), cmp.Compare(a.Name, b.Name))
	})
	var buffer bytes.Buffer
	out := zip.NewWriter(&buffer)
	for _, f := range in.File {
		if err := out.Copy(f); err != nil {
			return nil, err
		}
	}
	err = out.Close()
	return buffer.Bytes(), err
}

func starterCell(col, row int) string {
	name, err := excelize.CoordinatesToCellName(col, row)
	if err != nil {
		panic(err) // the layout is ours
	}
	return name
}

// put stores a value as it stands in a sheet: numbers with every digit, yes and
// no as words, lists as the text that an expression writes them in.
func (s *starter) put(sheet string, col, row int, value any) {
	at := starterCell(col, row)
	switch v := value.(type) {
	case nil:
	case int:
		s.check(s.SetCellInt(sheet, at, int64(v)))
	case float64:
		text := funcs.FormatArgument(v)
		if text == funcs.Infinite {
			s.check(s.SetCellStr(sheet, at, text))
			return
		}
		// The library keeps 15 digits unless it is told how many are wanted.
		_, decimals, _ := strings.Cut(text, ".")
		s.check(s.SetCellFloat(sheet, at, v, len(decimals), 64))
	default:
		s.check(s.SetCellStr(sheet, at, funcs.FormatArgument(v)))
	}
}

// The looks of cells. They rest on weight, borders and greys, so that a print
// without colour tells the same.
var (
	thin  = []excelize.Border{{Type: "bottom", Style: 1, Color: "404040"}}
	frame = []excelize.Border{{Type: "left", Style: 1, Color: "BFBFBF"}, {Type: "right", Style: 1, Color: "BFBFBF"},
		{Type: "top", Style: 1, Color: "BFBFBF"}, {Type: "bottom", Style: 1, Color: "BFBFBF"}}
	wrapped = &excelize.Alignment{Vertical: "top", WrapText: true}
	plain   = &excelize.Alignment{Vertical: "top"}
)

func grey(shade string) excelize.Fill {
	return excelize.Fill{Type: "pattern", Pattern: 1, Color: []string{shade}}
}

var (
	bold       = &excelize.Font{Bold: true, Family: "Calibri", Size: 11}
	titleLook  = excelize.Style{Font: &excelize.Font{Bold: true, Family: "Calibri", Size: 13}}
	nameLook   = excelize.Style{Font: bold}
	headLook   = excelize.Style{Font: bold, Border: thin, Alignment: wrapped}
	inputLook  = excelize.Style{Border: frame, Alignment: plain}
	textLook   = excelize.Style{Border: frame, Alignment: wrapped}
	resultHead = excelize.Style{Font: bold, Border: thin, Alignment: wrapped, Fill: grey("D9D9D9")}
	resultLook = excelize.Style{Border: frame, Alignment: wrapped, Fill: grey("F2F2F2")}
)

// look gives a cell, or an area, its look; a number format is added where there
// is one.
func (s *starter) look(sheet string, col, row, lastCol, lastRow int, look excelize.Style, format string) {
	if format != "" {
		look.CustomNumFmt = &format
	}
	id, err := s.NewStyle(&look)
	s.check(err)
	s.check(s.SetCellStyle(sheet, starterCell(col, row), starterCell(lastCol, lastRow), id))
}

// tall makes a row as high as the texts that stand in its columns need, within
// reason. Not every program does so by itself.
func (s *starter) tall(sheet string, row int, lines float64) {
	const line, most = 15, 8 // a line in points; how many at most
	if lines > 1 {
		s.check(s.SetRowHeight(sheet, row, line*min(lines, most)))
	}
}

// linesIn is how many lines a text takes in a column of a width.
func linesIn(text string, width float64) float64 {
	const perWidth = 0.95 // characters; words do not fill a line to its end
	return math.Ceil(float64(units(text)) / (width * perWidth))
}

// widen sets the width of a column in characters.
func (s *starter) widen(sheet string, col int, width float64) {
	name, err := excelize.ColumnNumberToName(col)
	s.check(err)
	s.check(s.SetColWidth(sheet, name, name, width))
}

// The most characters that a note on a cell, its title and a drop-down list may
// have.
const (
	mostNote  = 255
	mostTitle = 32
	mostList  = 255
)

// noteOn shows a note when a cell of the area is selected, and offers a list of
// values there, where there is one. A value that is not on the list may be
// written all the same: it may be a cell, or an expression.
func (s *starter) noteOn(sheet, area, title, text string, choices []string) {
	v := excelize.NewDataValidation(true)
	v.SetSqref(area)
	v.Type = "none"
	if list := strings.Join(choices, ","); list != "" && units(list) <= mostList {
		s.check(v.SetDropList(choices))
	}
	v.SetInput(clip(title, mostTitle), clip(text, mostNote))
	s.check(s.AddDataValidation(sheet, v))
}

func units(text string) int { return len(utf16.Encode([]rune(text))) }

// clip shortens a text that is too long, at a word.
func clip(text string, most int) string {
	for units(text) > most {
		at := strings.LastIndexByte(strings.TrimSuffix(text, "…"), ' ')
		if at < 0 {
			return string([]rune(text)[:most/2])
		}
		text = text[:at] + "…"
	}
	return text
}

// onPaper sets how a sheet is printed: across, on so many pages side by side,
// with its first columns and its header row on each.
func (s *starter) onPaper(sheet string, pages, cols, headerRow int) {
	a4, across, order, any := 9, "landscape", "overThenDown", 0
	fit := true
	s.check(s.SetPageLayout(sheet, &excelize.PageLayoutOptions{Size: &a4, Orientation: &across, FitToWidth: &pages, FitToHeight: &any, PageOrder: &order}))
	s.check(s.SetSheetProps(sheet, &excelize.SheetPropsOptions{FitToPage: &fit}))
	s.check(s.SetHeaderFooter(sheet, &excelize.HeaderFooterOptions{OddFooter: "&L&A&R&P / &N"}))
	var titles []string
	if cols > 0 {
		name, err := excelize.ColumnNumberToName(cols)
		s.check(err)
		titles = append(titles, fmt.Sprintf("%s!$A:$%s", sheet, name))
	}
	if headerRow > 0 {
		titles = append(titles, fmt.Sprintf("%s!$%d:$%d", sheet, headerRow, headerRow))
	}
	if titles != nil {
		s.check(s.SetDefinedName(&excelize.DefinedName{Name: "_xlnm.Print_Titles", Scope: sheet, RefersTo: strings.Join(titles, ",")}))
	}
}

// freeze keeps the first columns and rows in view.
func (s *starter) freeze(sheet string, cols, rows int) {
	pane := "bottomRight"
	switch {
	case cols == 0:
		pane = "bottomLeft"
	case rows == 0:
		pane = "topRight"
	}
	s.check(s.SetPanes(sheet, &excelize.Panes{Freeze: true, XSplit: cols, YSplit: rows, TopLeftCell: starterCell(cols+1, rows+1), ActivePane: pane}))
}

// trips writes the data sheet.
func (s *starter) trips() {
	_, err := s.NewSheet(tripsSheet)
	s.check(err)
	for i, name := range tripColumns {
		s.put(tripsSheet, i+1, 1, name)
		s.widen(tripsSheet, i+1, 11)
	}
	s.look(tripsSheet, 1, 1, len(tripColumns), 1, headLook, "")
	for i, t := range larkmoorTrips {
		for j, v := range []any{t.number, t.depot, t.planned, t.minutes, t.parcels, t.damaged} {
			s.put(tripsSheet, j+1, i+2, v)
		}
	}
	s.freeze(tripsSheet, 0, 1)
	s.onPaper(tripsSheet, 1, 0, 1)
}

// names writes the sheet that lists every name.
func (s *starter) names(list []*funcs.Function) {
	_, err := s.NewSheet(namesSheet)
	s.check(err)
	header := []struct {
		name  string
		width float64
	}{{"function", 32}, {"part", 12}, {"name", 26}, {"kind", 14}, {"takes", 34}, {"default", 14}, {"summary", 90}}
	for i, h := range header {
		s.put(namesSheet, i+1, 1, h.name)
		s.widen(namesSheet, i+1, h.width)
	}
	s.look(namesSheet, 1, 1, len(header), 1, headLook, "")
	row := 1
	add := func(cells ...any) {
		row++
		for i, c := range cells {
			s.put(namesSheet, i+1, row, c)
		}
		s.look(namesSheet, 1, row, len(header), row, excelize.Style{Alignment: wrapped}, "")
		lines := 1.0
		for i, c := range cells {
			if text, ok := c.(string); ok {
				lines = max(lines, linesIn(text, header[i].width))
			}
		}
		s.tall(namesSheet, row, lines)
	}
	for _, f := range list {
		add(f.Name, "function", f.Name, nil, nil, nil, aboutFunction(f))
		s.look(namesSheet, 1, row, len(header), row, excelize.Style{Font: bold, Alignment: wrapped}, "")
		for _, in := range f.Inputs {
			var standard any
			if in.Default != nil {
				standard = written(in, in.Default)
			}
			add(f.Name, "input", in.Name, in.Kind.String(), in.Expects(), standard, in.Summary)
		}
		for _, r := range f.Results {
			add(f.Name, "result", "> "+r.Name, r.Kind.String(), nil, nil, r.Summary)
		}
		for _, r := range f.Table {
			add(f.Name, "table", r.Name, r.Kind.String(), nil, nil, r.Summary)
		}
	}
	for _, r := range funcs.CommonResults {
		add("(every function)", "result", "> "+r.Name, r.Kind.String(), nil, nil, r.Summary)
	}
	s.check(s.AutoFilter(namesSheet, fmt.Sprintf("A1:%s", starterCell(len(header), row)), nil))
	s.freeze(namesSheet, 0, 1)
	s.onPaper(namesSheet, 1, 0, 1)
}
