package rpc

import (
	"slices"
	"strings"
	"unicode/utf8"

	"halfwidth/workbook/calculation"
)

// position is a place in a text as LSP counts: line and column from 0, the
// column in UTF-16 units, or in bytes where the client offered UTF-8.
type position struct {
	Line      int `json:"line"`
	Character int `json:"character"`
}

type textRange struct {
	Start position `json:"start"`
	End   position `json:"end"`
}

// lines is a text with the offsets at which its lines start. A line ends with
// \n, \r\n or \r, as LSP says. It is never changed.
type lines struct {
	text   string
	starts []int
	utf8   bool // columns count bytes
}

func newLines(text string, utf8 bool) *lines {
	return &lines{text: text, starts: lineStarts([]int{0}, text, 0, len(text)), utf8: utf8}
}

// lineStarts adds the offsets of the lines that begin because of a line end
// that starts in text[from:to].
func lineStarts[T string | []byte](starts []int, text T, from, to int) []int {
	for i := from; i < to; i++ {
		if text[i] == '\n' || text[i] == '\r' && (i+1 == len(text) || text[i+1] != '\n') {
			starts = append(starts, i+1)
		}
	}
	return starts
}

// offset gives the byte offset of a position: past the end of a line that end,
// past the last line the end of the text, inside a character its start.
func (l *lines) offset(p position) int {
	return offsetIn(l.text, l.starts, l.utf8, p)
}

func offsetIn[T string | []byte](text T, starts []int, inBytes bool, p position) int {
	switch {
	case p.Line >= len(starts):
		return len(text)
	case p.Line < 0:
		return 0
	}
	start, end := starts[p.Line], len(text)
	if p.Line+1 < len(starts) {
		end = starts[p.Line+1]
	}
	line := strings.TrimRight(string(text[start:end]), "\r\n")
	column := max(0, p.Character)
	if !inBytes {
		return start + calculation.UTF16ToByte(line, column)
	}
	column = min(column, len(line))
	for column > 0 && column < len(line) && !utf8.RuneStart(line[column]) {
		column--
	}
	return start + column
}

// position gives the position of a byte offset.
func (l *lines) position(offset int) position {
	offset = max(0, min(offset, len(l.text)))
	line, found := slices.BinarySearch(l.starts, offset)
	if !found {
		line--
	}
	column := offset - l.starts[line]
	if !l.utf8 {
		column = calculation.ByteToUTF16(l.text[l.starts[line]:offset], column)
	}
	return position{line, column}
}

func (l *lines) span(s calculation.Span) textRange {
	return textRange{l.position(s.Start), l.position(s.End)}
}

// lineCount counts the lines.
func (l *lines) lineCount() int { return len(l.starts) }

// textChange is one change of textDocument/didChange: of a stretch, or of the
// whole text.
type textChange struct {
	Range *textRange `json:"range"`
	Text  string     `json:"text"`
}

// changed gives the text after changes, each of which is meant for the text that
// those before it left. It is done in one copy of the text, whose tail is moved
// once a change, so that many changes of a long text take little time.
func (l *lines) changed(changes []textChange) *lines {
	for i := len(changes) - 1; i >= 0; i-- {
		if changes[i].Range == nil { // those before it do not count
			return newLines(changes[i].Text, l.utf8).changed(changes[i+1:])
		}
	}
	if len(changes) == 0 {
		return l
	}
	text, starts := []byte(l.text), slices.Clone(l.starts)
	for _, c := range changes {
		from, to := offsetIn(text, starts, l.utf8, c.Range.Start), offsetIn(text, starts, l.utf8, c.Range.End)
		from, to = min(from, to), max(from, to)
		text = slices.Replace(text, from, to, []byte(c.Text)...)
		// A line end may begin right before the change and end in it, or begin in
		// it and end right after.
		first := max(0, from-1)
		last := min(len(text), from+len(c.Text)+1)
		low, _ := slices.BinarySearch(starts, first+1)
		high, _ := slices.BinarySearch(starts, to+2)
		tail := starts[high:]
		if d := len(c.Text) - (to - from); d != 0 {
			for i := range tail {
				tail[i] += d
			}
		}
		starts = slices.Replace(starts, low, high, lineStarts(nil, text, first, last)...)
		if len(starts) == 0 || starts[0] != 0 {
			starts = slices.Insert(starts, 0, 0)
		}
	}
	return &lines{text: string(text), starts: starts, utf8: l.utf8}
}
