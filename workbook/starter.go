package workbook

import (
	"context"
	"errors"
	"fmt"
	"math"
	"os"
	"path/filepath"
	"slices"
	"strings"
	"unicode/utf16"

	"halfwidth/funcs"
	"halfwidth/workbook/calculation"
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
	s := &starter{looks: []look{{}}}
	withTrips := slices.ContainsFunc(blocks, func(b *starterBlock) bool { return b.overTrips })
	s.calculations(blocks, list, withTrips)
	if withTrips {
		s.trips()
	}
	s.names(list)
	return s.pack()
}

// starter is the workbook under construction.
type starter struct {
	parts []*starterPart
	looks []look // by their index among the styles
}

func starterCell(col, row int) string { return calculation.CellRef{Row: row, Col: col}.String() }

// put stores a value as it stands in a sheet: numbers with every digit, yes and
// no as words, lists as the text that an expression writes them in.
func (p *starterPart) put(col, row int, value any) {
	switch v := value.(type) {
	case nil:
	case int, float64:
		if text := funcs.FormatArgument(v); text != funcs.Infinite {
			p.number(col, row, text)
			return
		}
		p.text(col, row, funcs.Infinite)
	default:
		p.text(col, row, funcs.FormatArgument(v))
	}
}

var (
	titleLook  = look{font: titleFont}
	nameLook   = look{font: boldFont}
	headLook   = look{font: boldFont, border: lineBelow, wrap: true}
	inputLook  = look{border: frameAround}
	textLook   = look{border: frameAround, wrap: true}
	resultHead = look{font: boldFont, border: lineBelow, wrap: true, grey: "D9D9D9"}
	resultLook = look{border: frameAround, wrap: true, grey: "F2F2F2"}
)

// look gives an area its look; a number format is added where there is one.
func (s *starter) look(p *starterPart, col, row, lastCol, lastRow int, l look, format string) {
	l.format = format
	id := s.styleOf(l)
	for r := row; r <= lastRow; r++ {
		for c := col; c <= lastCol; c++ {
			p.cell(c, r).look = id
		}
	}
}

// tall makes a row as high as the texts that stand in its columns need, within
// reason. Not every program does so by itself.
func (p *starterPart) tall(row int, lines float64) {
	const line, most = 15, 8 // a line in points; how many at most
	if lines > 1 {
		p.heights[row] = line * min(lines, most)
	}
}

// linesIn is how many lines a text takes in a column of a width.
func linesIn(text string, width float64) float64 {
	const perWidth = 0.95 // characters; words do not fill a line to its end
	return math.Ceil(float64(units(text)) / (width * perWidth))
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
func (p *starterPart) noteOn(area, title, text string, choices []string) {
	list := strings.Join(choices, ",")
	if units(list) > mostList {
		list = ""
	}
	p.notes = append(p.notes, partNote{area, clip(title, mostTitle), clip(text, mostNote), list})
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
func (p *starterPart) onPaper(pages, cols, headerRow int) {
	p.pages, p.titleCols, p.titleRow = pages, cols, headerRow
}

// trips writes the data sheet.
func (s *starter) trips() {
	p := s.sheet(tripsSheet)
	for i, name := range tripColumns {
		p.put(i+1, 1, name)
		p.widths[i+1] = 11
	}
	s.look(p, 1, 1, len(tripColumns), 1, headLook, "")
	for i, t := range larkmoorTrips() {
		for j, v := range []any{t.number, t.depot, t.planned, t.minutes, t.parcels, t.damaged} {
			p.put(j+1, i+2, v)
		}
	}
	p.frozenRows = 1
	p.onPaper(1, 0, 1)
}

// names writes the sheet that lists every name.
func (s *starter) names(list []*funcs.Function) {
	p := s.sheet(namesSheet)
	header := []struct {
		name  string
		width float64
	}{{"function", 32}, {"part", 12}, {"name", 26}, {"kind", 14}, {"takes", 34}, {"default", 14}, {"summary", 90}}
	for i, h := range header {
		p.put(i+1, 1, h.name)
		p.widths[i+1] = h.width
	}
	s.look(p, 1, 1, len(header), 1, headLook, "")
	row := 1
	add := func(cells ...any) {
		row++
		for i, c := range cells {
			p.put(i+1, row, c)
		}
		s.look(p, 1, row, len(header), row, look{wrap: true}, "")
		lines := 1.0
		for i, c := range cells {
			if text, ok := c.(string); ok {
				lines = max(lines, linesIn(text, header[i].width))
			}
		}
		p.tall(row, lines)
	}
	for _, f := range list {
		add(f.Name, "function", f.Name, nil, nil, nil, aboutFunction(f))
		s.look(p, 1, row, len(header), row, look{font: boldFont, wrap: true}, "")
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
	p.filtered = "A1:" + starterCell(len(header), row)
	p.frozenRows = 1
	p.onPaper(1, 0, 1)
}
