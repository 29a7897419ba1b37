package calculation

import (
	"bytes"
	"strings"
)

// dialect is how a text file separates its cells.
type dialect struct {
	separator    byte
	decimalComma bool
}

// findDialect finds the separator from the header line: the first line that
// comma, semicolon or tab parts into cells; a line with a `work out` cell goes
// before others. A .tsv file has tabs. Where numbers have a decimal comma, a comma
// between digits separates nothing.
func findDialect(name string, head []byte, decimalComma bool) dialect {
	if strings.HasSuffix(strings.ToLower(name), ".tsv") {
		return dialect{'\t', decimalComma}
	}
	best, found := dialect{',', decimalComma}, headerLine{}
	if decimalComma {
		best.separator = ';'
	}
	for _, separator := range []byte{',', ';', '\t'} {
		d := dialect{separator, decimalComma}
		if h := d.headerLine(head, found); h.before(found) {
			best, found = d, h
		}
	}
	return best
}

// headerLine is the header line of a file under one separator.
type headerLine struct {
	workOut bool // a cell reads `work out`
	clean   bool // no cell begins a text in quotes that goes on in the next
	end     int
	parts   int // how often the separator stands in it
}

// before reports whether h is rather the header of the file than other. Results
// are written below the header, so no filling of the file makes a line that ends
// further down go before it. Of one line, the separator that stands in it most
// often parts it, and of equals the one that is sought later.
func (h headerLine) before(other headerLine) bool {
	switch {
	case h.workOut != other.workOut:
		return h.workOut
	case h.parts == 0 || other.parts == 0:
		return h.parts > 0
	case h.clean != other.clean:
		return h.clean
	case h.end != other.end:
		return h.end < other.end
	}
	return h.parts >= other.parts
}

// headerLine finds the header line. It is sought no further than where it could
// go before another; parts is 0 where there is none.
func (d dialect) headerLine(head []byte, other headerLine) (h headerLine) {
	s := newCSVScanner(bytes.NewReader(head), d)
	for s.next() {
		if other.workOut && other.clean && s.end.Start > other.end {
			break
		}
		line := headerLine{clean: true, end: s.end.Start}
		for i, f := range s.fields {
			if i > 0 && !(d.decimalComma && d.separator == ',' && endsInDigit(s.fields[i-1].text) && beginsWithDigit(f.text)) {
				line.parts++
			}
			line.clean = line.clean && (f.quoted || !opensQuotes(f.text))
			if !line.workOut && bytes.ContainsAny(f.text, "wW") {
				_, line.workOut = workOut(Cell{Kind: Text, Text: string(f.text)})
			}
		}
		if line.parts > 0 && line.workOut {
			return line
		}
		if line.parts > 0 && h.parts == 0 {
			h = line
		}
	}
	return h
}

// opensQuotes reports whether, were the separator another one, quotes would be
// opened in a cell and not closed.
func opensQuotes(cell []byte) bool {
	for i, c := range cell {
		if c == '"' && i > 0 && strings.IndexByte(",;\t", cell[i-1]) >= 0 {
			return bytes.Count(cell[i:], []byte{'"'})%2 == 1
		}
	}
	return false
}

func beginsWithDigit(text []byte) bool { return len(text) > 0 && '0' <= text[0] && text[0] <= '9' }

func endsInDigit(text []byte) bool { return len(text) > 0 && beginsWithDigit(text[len(text)-1:]) }
