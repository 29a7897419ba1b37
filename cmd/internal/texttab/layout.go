package texttab

import (
	"bytes"
	"fmt"
	"slices"
	"strconv"
	"strings"
)

// gap stands between columns.
const gap = 2

// grid is a table laid out as text: the header first, then the rows.
type grid struct {
	columns []Column
	lines   [][]string
	words   [][]string // the cells without what was added to them
	marks   []string   // of each line: the numbers of its footnotes, unless they stand in a noted column
	widths  []int
	rigid   []bool // columns of numbers, which are not broken
}

// layout aligns the columns. On a terminal, texts that are too long for it are
// broken at spaces, and a table whose columns do not fit goes on below itself,
// its key columns repeated. The numbers of a row's footnotes stand in brackets
// in its noted column, or after its last cell; equal notes share one number.
func (t *Table) layout(s Screen) string {
	g, footnotes := t.grid()
	var b strings.Builder
	parts := [][]int{g.all()}
	if s.Terminal {
		parts = g.parts(s.Width)
	}
	for i, part := range parts {
		if i > 0 {
			b.WriteByte('\n')
		}
		g.write(&b, part, s.Styled)
	}
	if len(footnotes) > 0 {
		b.WriteString("\n")
	}
	for i, note := range footnotes {
		mark := fmt.Sprintf("[%d] ", i+1)
		b.WriteString(Wrap(mark+note, s.Width, strings.Repeat(" ", len(mark))) + "\n")
	}
	return b.String()
}

func (t *Table) grid() (*grid, []string) {
	g := &grid{columns: t.Columns, lines: [][]string{nil}, marks: []string{""}, widths: make([]int, len(t.Columns)), rigid: make([]bool, len(t.Columns))}
	for _, c := range t.Columns {
		g.lines[0] = append(g.lines[0], c.Name)
	}
	g.words = [][]string{g.lines[0]}
	noted := slices.IndexFunc(t.Columns, func(c Column) bool { return c.Noted })
	numbers := map[string]int{}
	var footnotes []string
	for _, row := range t.Rows {
		line := make([]string, len(t.Columns))
		for i, cell := range row.Cells {
			line[i] = show(cell, false)
			if _, text := cell.(string); text {
				line[i] = oneLine(line[i])
			}
		}
		marks := ""
		for _, note := range row.Notes {
			if numbers[note] == 0 {
				footnotes = append(footnotes, note)
				numbers[note] = len(footnotes)
			}
			marks += "[" + strconv.Itoa(numbers[note]) + "]"
		}
		g.words = append(g.words, line)
		if noted >= 0 && marks != "" {
			line = slices.Clone(line)
			line[noted], marks = strings.TrimSpace(line[noted]+" "+marks), ""
		}
		g.lines, g.marks = append(g.lines, line), append(g.marks, marks)
	}
	for i, c := range t.Columns {
		if c.Right {
			g.alignDecimals(i, t.Rows)
		}
		for _, line := range g.lines {
			g.widths[i] = max(g.widths[i], cells(line[i]))
		}
	}
	return g, footnotes
}

// oneLine is a text with single spaces, and nothing that steers a terminal.
func oneLine(text string) string {
	plain, before := true, byte(' ')
	for i := 0; i < len(text) && plain; i++ {
		plain = ' ' <= text[i] && text[i] <= '~' && (text[i] != ' ' || before != ' ')
		before = text[i]
	}
	if plain && before != ' ' {
		return text
	}
	return strings.Join(strings.Fields(Clean(text)), " ")
}

// alignDecimals pads the numbers of a column, so that their decimal marks stand
// under one another when they stand at the right.
func (g *grid) alignDecimals(col int, rows []Row) {
	behind := func(text string) int {
		if at := strings.IndexAny(text, ".e"); at >= 0 {
			return len(text) - at
		}
		return 0
	}
	isNumber := func(row Row) bool {
		if col >= len(row.Cells) {
			return false
		}
		switch row.Cells[col].(type) {
		case float64, int:
			return true
		}
		return false
	}
	most := 0
	for i, row := range rows {
		if isNumber(row) {
			g.rigid[col] = true
			most = max(most, behind(g.lines[i+1][col]))
		}
	}
	for i, row := range rows {
		if isNumber(row) {
			if text := g.lines[i+1][col]; behind(text) < most {
				g.lines[i+1][col] = text + strings.Repeat(" ", most-behind(text))
			}
		}
	}
}

// narrow is the width that no column of texts is made narrower than.
const narrow = 16

// parts gives the columns of each part that a table is written in. Columns of
// texts are made narrower first.
func (g *grid) parts(width int) [][]int {
	all := g.all()
	marks := 0
	for _, m := range g.marks {
		if m != "" {
			marks = max(marks, gap+len(m))
		}
	}
	natural := slices.Clone(g.widths)
	if g.shrink(all, width-marks) || !slices.ContainsFunc(g.columns, func(c Column) bool { return c.Key }) {
		return [][]int{all}
	}
	copy(g.widths, natural)
	var keys []int
	for i, c := range g.columns {
		if c.Key {
			keys = append(keys, i)
		}
	}
	g.shrink(keys, width/2)
	var parts [][]int
	part := slices.Clone(keys)
	for i, c := range g.columns {
		if c.Key {
			continue
		}
		room := width
		if i == len(g.columns)-1 {
			room -= marks
		}
		if len(part) > len(keys) && g.total(append(slices.Clone(part), i)) > room {
			parts, part = append(parts, part), slices.Clone(keys)
		}
		part = append(part, i)
	}
	return append(parts, part)
}

func (g *grid) all() []int {
	all := make([]int, len(g.columns))
	for i := range all {
		all[i] = i
	}
	return all
}

func (g *grid) total(columns []int) int {
	sum := gap * (len(columns) - 1)
	for _, i := range columns {
		sum += g.widths[i]
	}
	return sum
}

// shrink makes the widest columns of texts narrower, no narrower than their
// longest word, until the columns fit, and reports whether they do.
func (g *grid) shrink(columns []int, width int) bool {
	least := map[int]int{}
	for _, i := range columns {
		least[i] = g.widths[i]
		if g.rigid[i] {
			continue
		}
		least[i] = min(g.widths[i], narrow)
		for _, line := range g.lines {
			for word := range strings.FieldsSeq(line[i]) {
				least[i] = max(least[i], cells(word))
			}
		}
	}
	for g.total(columns) > width {
		widest := -1
		for _, i := range columns {
			if g.widths[i] > least[i] && (widest < 0 || g.widths[i] > g.widths[widest]) {
				widest = i
			}
		}
		if widest < 0 {
			return false
		}
		g.widths[widest]--
	}
	return true
}

// write writes some columns of the table, the footnotes' numbers after the last
// column.
func (g *grid) write(b *strings.Builder, columns []int, styled bool) {
	withMarks := columns[len(columns)-1] == len(g.columns)-1
	texts := make([][]string, len(columns))
	var out []byte
	for k, line := range g.lines {
		height := 1
		for j, i := range columns {
			texts[j] = append(texts[j][:0], line[i])
			if cells(line[i]) > g.widths[i] {
				texts[j] = strings.Split(Wrap(line[i], g.widths[i], ""), "\n")
			}
			height = max(height, len(texts[j]))
		}
		for h := range height {
			out = out[:0]
			for j, i := range columns {
				cell := ""
				if h < len(texts[j]) {
					cell = texts[j][h]
				}
				if j > 0 {
					out = spaces(out, gap)
				}
				pad := g.widths[i] - cells(cell)
				if styled && cell != "" && (k == 0 || slices.Contains(g.columns[i].Strong, g.words[k][i])) {
					cell = bold(cell)
				}
				if g.columns[i].Right {
					out = append(spaces(out, pad), cell...)
				} else {
					out = spaces(append(out, cell...), pad)
				}
			}
			if withMarks && h == 0 {
				out = append(spaces(out, gap), g.marks[k]...)
			}
			b.Write(bytes.TrimRight(out, " "))
			b.WriteByte('\n')
		}
	}
}

// spaces adds so many spaces to a line.
func spaces(line []byte, n int) []byte {
	for range n {
		line = append(line, ' ')
	}
	return line
}

// bold puts a text into bold type on a terminal (ECMA-48, select graphic
// rendition).
func bold(text string) string { return "\x1b[1m" + text + "\x1b[0m" }
