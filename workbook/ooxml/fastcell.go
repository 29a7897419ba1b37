package ooxml

import "bytes"

// fastCell reads a cell, or the row's end tag, at pos.
func (s *scanner) fastCell() fastResult {
	for {
		result := s.tryCell()
		if result != fastNot {
			return result
		}
		s.start = s.pos
		if s.end-s.pos > maxFastTail || !s.fill() {
			return fastNot
		}
	}
}

func (s *scanner) tryCell() fastResult {
	b, i, prefix := s.buf, s.pos, len(s.prefix)
	for isXMLSpace(b[i]) {
		i++
	}
	from := i
	if b[i] != '<' {
		return fastNot
	}
	if b[i+1] == '/' {
		i += 2
		if prefix > 0 && !bytes.HasPrefix(b[i:], s.prefix) {
			return fastNot
		}
		i += prefix
		if b[i] == 'r' && b[i+1] == 'o' && b[i+2] == 'w' && b[i+3] == '>' {
			s.start, s.pos = from, i+4
			return fastDone
		}
		return fastNot
	}
	if i = s.after(i+1, 'c'); i < 0 {
		return fastNot
	}
	cell := &s.current
	*cell = Cell{}
	if i = s.cellTagAt(cell, i); i < 0 {
		return fastNot
	}
	col := int(cell.Col)
	if col < 1 || col > s.limits.Columns || col >= len(s.colsSeen) || s.colsSeen[col] == s.stamp {
		return fastNot
	}
	if b[i] == '/' && b[i+1] == '>' {
		s.take(col, i+2)
		return fastGot
	}
	if b[i] != '>' {
		return fastNot
	}
	if i = s.fastContent(cell, i+1); i < 0 {
		return fastNot
	}
	s.take(col, i)
	return fastGot
}

// cellTagAt reads the attributes of a cell's start tag, each once at most. i is
// after its name; it gives the index after the last attribute, or -1.
func (s *scanner) cellTagAt(cell *Cell, i int) int {
	b := s.buf
	col, style := s.lastCol+1, 0
	const hasR, hasS, hasT = 1, 2, 4
	seen := 0
	for b[i] == ' ' {
		if b[i+2] != '=' || b[i+3] != '"' {
			return -1
		}
		name, from, ok := b[i+1], i+4, false
		i = from
		switch {
		case name == 'r' && seen&hasR == 0:
			seen |= hasR
			col = 0
			for c := b[i] - 'A'; c < 26; c = b[i] - 'A' {
				col = col*26 + int(c) + 1
				i++
			}
			row, digits := 0, i
			for d := b[i] - '0'; d <= 9; d = b[i] - '0' {
				row = row*10 + int(d)
				i++
			}
			ok = digits-from <= 3 && i-digits <= 7 && b[digits] != '0' && row == s.row.Number
		case name == 's' && seen&hasS == 0:
			seen |= hasS
			for d := b[i] - '0'; d <= 9; d = b[i] - '0' {
				style = style*10 + int(d)
				i++
			}
			ok = i > from && i-from <= 8 && style < s.styles
		case name == 't' && seen&hasT == 0:
			seen |= hasT
			cell.Type, i, ok = s.cellTypeAt(i)
		}
		if !ok || b[i] != '"' {
			return -1
		}
		i++
	}
	cell.Col, cell.Style = int32(col), int32(style)
	return i
}

// cellTypeAt reads the value of a cell's type attribute.
func (s *scanner) cellTypeAt(i int) (kind CellType, next int, ok bool) {
	b := s.buf
	switch b[i] {
	case 's':
		if b[i+1] == 't' && b[i+2] == 'r' {
			return TypeString, i + 3, true
		}
		return TypeShared, i + 1, true
	case 'n':
		return TypeNumber, i + 1, true
	case 'b':
		return TypeBool, i + 1, true
	case 'e':
		return TypeError, i + 1, true
	case 'i':
		return TypeInline, i + len("inlineStr"), string(b[i:i+len("inlineStr")]) == "inlineStr"
	}
	return 0, i, false
}

// take moves on past a cell that was read.
func (s *scanner) take(col, next int) {
	s.colsSeen[col] = s.stamp
	s.lastCol = col
	s.pos = next
}

// after gives the index after the prefix and a one-letter name, or -1 if they
// do not stand at i.
func (s *scanner) after(i int, name byte) int {
	if k := len(s.prefix); k > 0 {
		if !bytes.HasPrefix(s.buf[i:], s.prefix) {
			return -1
		}
		i += k
	}
	if s.buf[i] != name {
		return -1
	}
	return i + 1
}

// closes gives the index after the end tag of a one-letter name, or -1.
func (s *scanner) closes(i int, name byte) int {
	if s.buf[i] != '<' || s.buf[i+1] != '/' {
		return -1
	}
	if i = s.after(i+2, name); i < 0 || s.buf[i] != '>' {
		return -1
	}
	return i + 1
}

// fastContent reads from after a cell's start tag to after its end tag, and
// adds the cell to its row. It gives -1, and changes nothing, if it cannot.
func (s *scanner) fastContent(cell *Cell, i int) int {
	b := s.buf
	if b[i] != '<' {
		return -1
	}
	if cell.Type == TypeInline {
		return s.fastInline(cell, i)
	}
	if k := s.after(i+1, 'f'); k >= 0 {
		if i = s.fastFormula(k); i < 0 || b[i] != '<' {
			return -1
		}
		cell.Formula = true
	}
	if i = s.after(i+1, 'v'); i < 0 || b[i] != '>' {
		return -1
	}
	i++
	from := i
	wanted := s.options.Columns.Has(int(cell.Col))
	ok := true
	switch cell.Type {
	case TypeNumber:
		if wanted {
			cell.Number, i, ok = scanNumber(b, i)
		} else {
			for numberBytes[b[i]] {
				i++
			}
		}
	case TypeShared:
		index := 0
		for d := b[i] - '0'; d <= 9; d = b[i] - '0' {
			index = index*10 + int(d)
			i++
		}
		cell.Index = int32(index)
		ok = i-from <= 9
	case TypeBool:
		cell.Number = float64(b[i] - '0')
		ok = b[i] == '0' || b[i] == '1'
		i++
	default:
		i += max(0, bytes.IndexByte(b[i:s.end], '<'))
		ok = plain(b[from:i]) && i-from <= s.limits.TextLength
	}
	if !ok || i == from {
		return -1
	}
	end := i + len("</v></c>")
	if string(b[i:end]) != "</v></c>" || len(s.prefix) > 0 {
		if end = s.closes(i, 'v'); end < 0 {
			return -1
		}
		if end = s.closes(end, 'c'); end < 0 {
			return -1
		}
	}
	switch cell.Type {
	case TypeShared:
		empty, err := s.shared(int(cell.Index))
		if empty || err != nil {
			return -1
		}
	case TypeString, TypeError:
		if cell.Type == TypeString {
			s.classify(b[from:i])
		} else if isXMLSpace(b[from]) || isXMLSpace(b[i-1]) {
			return -1
		}
		if wanted {
			cell.Text = s.keepText(b[from:i])
		}
	}
	s.add(cell, wanted)
	return end
}

// add adds a cell with a value to its row.
func (s *scanner) add(cell *Cell, wanted bool) {
	if cell.Formula {
		s.facts.Formulas++
	}
	cell.Saved = true
	s.filled(int(cell.Col))
	if wanted {
		s.row.Cells = append(s.row.Cells, *cell)
	}
}

// fastFormula gives the index after a formula's end tag. i is after its name.
// Array formulas and data tables, whose range matters, are left to the general
// path, and so are all formulas where somebody wants their text.
func (s *scanner) fastFormula(i int) int {
	b := s.buf
	if s.options.Formula != nil {
		return -1
	}
	switch {
	case b[i] == '>':
	case string(b[i:i+12]) == ` t="shared" ` || string(b[i:i+5]) == ` ca="`:
		return s.sharedFormula(i)
	default:
		return -1
	}
	n := bytes.IndexByte(b[i:s.end], '<')
	if n < 0 {
		return -1
	}
	return s.closes(i+n, 'f')
}

// sharedFormula reads a formula whose attributes are of those that shared
// formulas have, each once.
func (s *scanner) sharedFormula(i int) int {
	b := s.buf
	seen := 0
	for b[i] == ' ' {
		bit, n := 0, 0
		switch {
		case string(b[i:i+12]) == ` t="shared" `, string(b[i:i+12]) == ` t="shared">`, string(b[i:i+12]) == ` t="shared"/`:
			bit, n = 1, 4
		case string(b[i:i+5]) == ` ca="`:
			bit, n = 2, 5
		case string(b[i:i+5]) == ` si="`:
			bit, n = 4, 5
		case string(b[i:i+6]) == ` ref="`:
			bit, n = 8, 6
		}
		if bit == 0 || seen&bit != 0 {
			return -1
		}
		seen |= bit
		for i += n; b[i] != '"'; i++ {
			if b[i] == '<' || b[i] == 0 {
				return -1
			}
		}
		i++
	}
	if b[i] == '/' && b[i+1] == '>' {
		return i + 2
	}
	if b[i] != '>' {
		return -1
	}
	n := bytes.IndexByte(b[i:s.end], '<')
	if n < 0 {
		return -1
	}
	return s.closes(i+n, 'f')
}

// fastInline reads an inline string of one plain text.
func (s *scanner) fastInline(cell *Cell, i int) int {
	b := s.buf
	if i = s.after(i+1, 'i'); i < 0 || b[i] != 's' || b[i+1] != '>' || b[i+2] != '<' {
		return -1
	}
	if i = s.after(i+3, 't'); i < 0 {
		return -1
	}
	const preserve = ` xml:space="preserve"`
	if string(b[i:i+len(preserve)]) == preserve {
		i += len(preserve)
	}
	if b[i] != '>' {
		return -1
	}
	i++
	n := bytes.IndexByte(b[i:s.end], '<')
	if n <= 0 || n > s.limits.TextLength || !plain(b[i:i+n]) {
		return -1
	}
	text := b[i : i+n]
	end := s.closes(i+n, 't')
	if end < 0 || b[end] != '<' || b[end+1] != '/' {
		return -1
	}
	if end = s.after(end+2, 'i'); end < 0 || b[end] != 's' || b[end+1] != '>' {
		return -1
	}
	if end = s.closes(end+2, 'c'); end < 0 {
		return -1
	}
	s.classify(text)
	wanted := s.options.Columns.Has(int(cell.Col))
	if wanted {
		cell.Text = s.keepText(text)
	}
	s.add(cell, wanted)
	return end
}
