package ooxml

import "fmt"

// tagAt says where the start tag of a row, or of the sheet's data, stands in
// the part.
type tagAt struct {
	from, to int64
	single   bool   // the tag is its own end
	name     string // with its prefix; known where a splice needs it
	style    int    // of a row: the style that its new cells take, -1 if none
}

// sheetData reads the rows. The current token is its start tag.
func (s *scanner) sheetData() error {
	s.prefix = append(s.prefix[:0], s.name[:len(s.name)-len(s.local)]...)
	data := tagAt{from: s.offset(s.start), to: s.offset(s.pos), single: s.single, name: string(s.name)}
	depth := s.depth()
	for {
		if s.plan.over() {
			s.plan.endData(data, -1)
			return errPlanned
		}
		if s.fastRow() {
			if err := s.cells(); err != nil {
				return err
			}
			continue
		}
		if err := s.nextIn(depth); err != nil {
			return err
		}
		switch {
		case s.kind == tokenEnd && s.depth() < depth:
			s.plan.endData(data, s.offset(s.start))
			return nil
		case s.kind == tokenStart && s.is("row"):
			if err := s.startRow(); err != nil {
				return err
			}
			if err := s.cells(); err != nil {
				return err
			}
		case s.kind == tokenStart:
			if err := s.stray(); err != nil {
				return err
			}
		}
	}
}

// startRow takes up the row whose start tag is the current token.
func (s *scanner) startRow() error {
	s.resetRow()
	s.row.Hidden = s.flag("hidden")
	s.rowTag = tagAt{from: s.offset(s.start), to: s.offset(s.pos), single: s.single, style: -1}
	if s.plan != nil {
		s.rowTag.name = string(s.name)
		if s.flag("customFormat") {
			style, err := s.number("s", -1)
			if err != nil {
				return err
			}
			s.rowTag.style = style
		}
	}
	bound := len(s.spaces) > 0 && s.spaces[len(s.spaces)-1].depth == s.depth()
	s.fast = !s.careful && !bound && len(s.prefix) <= maxFastPrefix
	number, err := s.number("r", 0)
	if err != nil {
		return err
	}
	if len(s.attr("r")) > 0 {
		return s.numberRow(number)
	}
	return nil
}

func (s *scanner) resetRow() {
	s.row = Row{Cells: s.row.Cells[:0]}
	s.texts = s.texts[:0]
	s.known = false
	s.lastCol = 0
	s.stamp++
}

// numberRow settles the number of the row: its own, or that of its first cell
// with a reference, or the one after the row before.
func (s *scanner) numberRow(number int) error {
	switch {
	case number < 1 || number > maxRows:
		return s.faulty("a row has the number %d; rows go from 1 to %d", number, maxRows)
	case number > s.limits.Rows:
		return beyond(fmt.Sprintf("the sheet has a row %d, the limit is %d", number, s.limits.Rows), "Rows")
	case s.rowSeen(number):
		return s.faulty("row %d is given twice", number)
	}
	s.takeRow(number)
	return nil
}

func (s *scanner) rowSeen(number int) bool {
	return number>>6 < len(s.rowsSeen) && s.rowsSeen[number>>6]&(1<<(number&63)) != 0
}

func (s *scanner) takeRow(number int) {
	if number>>6 >= len(s.rowsSeen) {
		s.rowsSeen = append(s.rowsSeen, make([]uint64, min(maxRows, 2*number)>>6+1-len(s.rowsSeen))...)
	}
	s.rowsSeen[number>>6] |= 1 << (number & 63)
	s.row.Number = number
	s.disordered = s.disordered || number < s.greatest
	s.greatest = max(s.greatest, number)
	s.known = true
	if s.plan != nil && s.plan.startRow(number, s.rowTag) {
		s.fast = false
	}
}

// cells reads the cells of a row up to its end tag.
func (s *scanner) cells() error {
	depth := s.depth()
	for {
		if s.fast && s.known && !s.single {
			switch s.fastCell() {
			case fastGot:
				continue
			case fastDone:
				s.close()
				return s.endRow()
			}
		}
		if err := s.nextIn(depth); err != nil {
			return err
		}
		switch {
		case s.kind == tokenEnd && s.depth() < depth:
			return s.endRow()
		case s.kind == tokenStart && s.is("c"):
			if err := s.cell(); err != nil {
				return err
			}
		case s.kind == tokenStart:
			if err := s.stray(); err != nil {
				return err
			}
		}
	}
}

// endRow hands out the row. The current token is its end tag.
func (s *scanner) endRow() error {
	if !s.known {
		if err := s.numberRow(s.lastRow + 1); err != nil {
			return err
		}
	}
	s.plan.endRow(s.offset(s.start))
	s.lastRow = s.row.Number
	if s.row.Filled {
		s.facts.Rows++
		s.facts.LastRow = max(s.facts.LastRow, s.row.Number)
		if s.row.Hidden {
			s.facts.HiddenRows++
		}
	}
	if s.visit != nil {
		if err := s.visit(&s.row); err != nil {
			return visitError{err}
		}
	}
	return nil
}

// faulty is the error for values that contradict the format. The cell or row
// that it names says where it happened.
func (s *scanner) faulty(format string, args ...any) error {
	return damaged(fmt.Sprintf(format, args...))
}

// claim settles the column of a cell.
func (s *scanner) claim(col int) error {
	switch {
	case col < 1 || col > maxColumns:
		return s.faulty("row %d has more than %d columns", s.row.Number, maxColumns)
	case col > s.limits.Columns:
		return beyond(fmt.Sprintf("the sheet has a column %s, the limit is %d columns", ColumnName(col), s.limits.Columns), "Columns")
	case col < len(s.colsSeen) && s.colsSeen[col] == s.stamp:
		return s.faulty("the cell is given twice")
	}
	if col >= len(s.colsSeen) {
		s.colsSeen = append(s.colsSeen, make([]uint32, min(maxColumns, 2*col)+1-len(s.colsSeen))...)
	}
	s.colsSeen[col] = s.stamp
	s.lastCol = col
	return nil
}

// filled notes that the row has a value in the column.
func (s *scanner) filled(col int) {
	s.row.Filled = true
	if col > s.facts.LastCol {
		s.facts.LastCol = col
	}
}

// keepText copies a text to where it lasts until the row has been handed out.
func (s *scanner) keepText(text []byte) []byte {
	from := len(s.texts)
	s.texts = append(s.texts, text...)
	return s.texts[from:len(s.texts):len(s.texts)]
}

// classify adds a text's class to the row's.
func (s *scanner) classify(text []byte) {
	if s.options.Classify != nil {
		s.row.Class |= s.options.Classify(text)
	}
}

// The classes of a shared string are kept with a bit that says they are known.
const classKnown = 1 << 8

// shared checks the index of a shared string and adds its class to the row's.
// It tells whether the text is empty.
func (s *scanner) shared(index int) (empty bool, err error) {
	if s.strings == nil {
		if s.table == nil {
			return false, nil
		}
		if s.strings, err = s.table(); err != nil {
			return false, err
		}
		if s.options.Classify != nil {
			s.classes = make([]uint16, len(s.strings.items))
		}
	}
	if index >= len(s.strings.items) {
		return false, s.faulty("%s", outOfTable(index, len(s.strings.items)))
	}
	if s.strings.empty(index) {
		return true, nil
	}
	if s.classes != nil {
		class := s.classes[index]
		if class == 0 {
			class = classKnown | uint16(s.options.Classify(s.strings.bytes(index)))
			s.classes[index] = class
		}
		s.row.Class |= uint8(class)
	}
	return false, nil
}
