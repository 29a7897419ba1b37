package workbook

import (
	"math"
	"slices"
	"strings"

	"halfwidth/funcs"
	"halfwidth/workbook/calculation"
)

// calculations writes the calculation sheet.
func (s *starter) calculations(blocks []*starterBlock, list []*funcs.Function, withTrips bool) {
	sheet := s.sheet(starterSheet)
	sheet.put(1, 1, "calculation sheet")
	s.look(sheet, 1, 1, 1, 1, titleLook, "")
	sheet.put(1, 2, "Write one question a row, save the workbook, and run: halfwidth fill, with the workbook's name. The grey columns, headed >, are filled in.")
	about := "Select a header or a cell to read what belongs there. The sheet Names lists every input and result."
	if withTrips {
		about += " The sheet Trips holds invented values; replace it by your own."
	}
	sheet.put(1, 3, about)
	row := 5
	for _, d := range sharedDefaults(list) {
		sheet.put(1, row, "default "+d.Name)
		sheet.put(2, row, d.Default)
		s.look(sheet, 1, row, 1, row, nameLook, "")
		s.look(sheet, 2, row, 2, row, inputLook, levelFormat(d.Default))
		sheet.noteOn(starterCell(2, row), d.Name, sentenceOf(d.Summary)+" It holds for every row below whose own cell is empty.", choicesOf(d))
		row++
	}
	if row > 5 {
		row++
	}
	widths := []float64{}
	for _, b := range blocks {
		for i, c := range b.columns {
			if i == len(widths) {
				widths = append(widths, 0)
			}
			widths[i] = max(widths[i], c.width)
		}
	}
	for _, b := range blocks {
		row = s.block(sheet, b, widths, row) + 1
	}
	all := 0.0
	for i, w := range widths {
		sheet.widths[i+1] = w
		all += w
	}
	header := 0
	if len(blocks) == 1 {
		header = row - 1 - readyRows - len(blocks[0].rows) - 1
	}
	sheet.frozenCols, sheet.frozenRows = 2, header
	// The first two columns stand on every page; the others share the pages.
	const onPage = 180
	still := widths[0] + widths[1]
	sheet.onPaper(int(math.Ceil(max(all-still, 1)/(onPage-still))), 2, header)
}

// sharedDefaults gives the levels that `default NAME` may set and that all the
// functions which take them have the same default for.
func sharedDefaults(list []*funcs.Function) []funcs.Input {
	var found []funcs.Input
	unlike := map[string]bool{}
	for _, f := range list {
		for _, in := range f.Inputs {
			if in.Kind != funcs.Level || in.Default == nil || !slices.Contains(calculation.OptionNames(), in.Name) {
				continue
			}
			i := slices.IndexFunc(found, func(d funcs.Input) bool { return d.Name == in.Name })
			if i < 0 {
				found = append(found, in)
			} else if found[i].Default != in.Default {
				unlike[in.Name] = true
			}
		}
	}
	return slices.DeleteFunc(found, func(d funcs.Input) bool { return unlike[d.Name] })
}

// levelFormat is the number format of a level that reads well as a percentage.
func levelFormat(value any) string {
	x, ok := value.(float64)
	if !ok {
		return ""
	}
	text, isPercent := strings.CutSuffix(percent(x), "%")
	if !isPercent {
		return ""
	}
	if _, decimals, ok := strings.Cut(text, "."); ok {
		return "0." + strings.Repeat("0", len(decimals)) + "%"
	}
	return "0%"
}

// block writes a block from a row on and gives the row below it.
func (s *starter) block(sheet *starterPart, b *starterBlock, widths []float64, row int) int {
	for _, f := range b.functions {
		sheet.put(1, row, f.Name+": "+aboutFunction(f))
		s.look(sheet, 1, row, 1, row, nameLook, "")
		row++
	}
	first, last := row+1, row+len(b.rows)+readyRows
	levels := map[string]bool{}
	for _, in := range b.functions[0].Inputs {
		levels[in.Name] = in.Kind == funcs.Level
	}
	for i, c := range b.columns {
		col := i + 1
		head, look := headLook, inputLook
		switch {
		case c.result:
			head, look = resultHead, resultLook
		case c.text:
			look = textLook
		}
		sheet.put(col, row, c.title)
		s.look(sheet, col, row, col, row, head, "")
		format := ""
		if levels[c.title] {
			format = "0%"
		}
		s.look(sheet, col, first, col, last, look, format)
		for k, r := range b.rows {
			value := r.cells[c.title]
			sheet.put(col, first+k, value)
			if levels[c.title] && value != nil {
				s.look(sheet, col, first+k, col, first+k, look, levelFormat(value))
			}
		}
		sheet.noteOn(starterCell(col, row), c.title, c.note, nil)
		if !c.result {
			sheet.noteOn(starterCell(col, first)+":"+starterCell(col, last), c.title, c.note, c.choices)
		}
	}
	head := 1.0
	for i, c := range b.columns {
		head = max(head, linesIn(c.title, widths[i]))
	}
	sheet.tall(row, head)
	for k, r := range b.rows {
		lines := 1.0
		for i, c := range b.columns {
			text := r.filled[c.title]
			if value := r.cells[c.title]; c.text && value != nil {
				text = funcs.FormatArgument(value)
			}
			lines = max(lines, linesIn(text, widths[i]))
		}
		sheet.tall(first+k, lines)
	}
	return last + 1
}
