package ooxml

// cell reads a cell written in any way the format allows. The current token is
// its start tag.
func (s *scanner) cell() error {
	if s.plan != nil {
		s.keep = s.start
	}
	col := s.lastCol + 1
	err := s.readCell(&col)
	if s.plan != nil {
		if err == nil {
			err = s.plan.cell(s, col)
		}
		s.keep = -1
	}
	// A part that cannot be read on is not at fault in the cell that was reached.
	if s.known && col <= maxColumns && (err == nil || err != s.unread) {
		return placeCell(err, s.row.Number, col)
	}
	return err
}

// cellTypes are the values of a cell's type attribute (ECMA-376 part 1, 18.18.11).
var cellTypes = map[string]CellType{"": TypeNumber, "n": TypeNumber, "s": TypeShared, "inlineStr": TypeInline,
	"str": TypeString, "b": TypeBool, "e": TypeError, "d": TypeDate}

func (s *scanner) readCell(col *int) error {
	ref := s.attr("r")
	switch {
	case len(ref) > 0:
		row, c, ok := parseCell(ref)
		if !ok {
			return s.faulty("a cell has the reference %.40q", ref)
		}
		if !s.known {
			if err := s.numberRow(row); err != nil {
				return err
			}
		}
		*col = c
		if row != s.row.Number {
			return s.faulty("a cell with the reference %s stands in row %d", ref, s.row.Number)
		}
	case !s.known:
		if err := s.numberRow(s.lastRow + 1); err != nil {
			return err
		}
	}
	if err := s.claim(*col); err != nil {
		return err
	}
	style, err := s.number("s", 0)
	if err != nil {
		return err
	}
	if style >= s.styles {
		return s.faulty("%s", outOfStyles(style, s.styles))
	}
	kind, ok := cellTypes[string(s.attr("t"))]
	if !ok {
		return s.faulty("the cell has the type %.40q, which does not exist", s.attr("t"))
	}
	s.current = Cell{Col: int32(*col), Style: int32(style), Type: kind}
	hasValue, err := s.cellContent(&s.current)
	if err != nil {
		return err
	}
	return s.store(&s.current, hasValue)
}

// cellContent reads on to the end of the cell and leaves its value in scratch,
// decoded. It tells whether there is one.
func (s *scanner) cellContent(cell *Cell) (hasValue bool, err error) {
	s.scratch = s.scratch[:0]
	hasInline := false
	err = s.children(func() error {
		switch {
		case s.is("v"):
			if hasValue {
				return s.faulty("the cell has two values")
			}
			hasValue = true
			if hasInline {
				return s.skip()
			}
			s.scratch, err = s.elementText(s.scratch)
			return err
		case s.is("is") && cell.Type == TypeInline:
			if hasInline {
				return s.faulty("the cell has two texts")
			}
			hasInline = true
			s.scratch, err = s.richText(s.scratch[:0])
			return err
		case s.is("f"):
			if cell.Formula {
				return s.faulty("the cell has two formulas")
			}
			cell.Formula = true
			return s.formula(int(cell.Col))
		}
		return s.stray()
	})
	return hasValue || hasInline, err
}

// formula takes note of a formula and reads on to its end.
func (s *scanner) formula(col int) error {
	s.facts.Formulas++
	switch string(s.attr("t")) {
	case "array", "dataTable":
		if r, ok := ParseRange(string(s.attr("ref"))); ok {
			s.facts.Arrays = append(s.facts.Arrays, r)
		}
	}
	if s.options.Formula == nil {
		return s.skip()
	}
	text, err := s.elementText(nil)
	if err == nil {
		s.options.Formula(s.row.Number, col, text)
	}
	return err
}

// store decodes the value in scratch and adds the cell to its row, if it is not
// blank and if it is wanted.
func (s *scanner) store(cell *Cell, hasValue bool) error {
	wanted := s.options.Columns.Has(int(cell.Col))
	text := s.scratch
	if cell.Type < TypeInline || cell.Type > TypeString {
		text = trimSpace(text)
	}
	cell.Saved = hasValue && (len(text) > 0 || cell.Type == TypeString && cell.Formula)
	filled := cell.Saved
	if cell.Saved {
		var err error
		if filled, err = s.decode(cell, text, wanted); err != nil {
			return err
		}
	}
	if filled || cell.Formula && !cell.Saved {
		s.filled(int(cell.Col))
	}
	if wanted && (filled || cell.Formula) {
		s.row.Cells = append(s.row.Cells, *cell)
	}
	return nil
}

// decode sets the value of a cell that has one. It is false for an empty text.
func (s *scanner) decode(cell *Cell, text []byte, wanted bool) (filled bool, err error) {
	switch cell.Type {
	case TypeNumber:
		ok := isNumberLike(text)
		if ok && wanted {
			cell.Number, ok = parseNumber(text)
		}
		if !ok {
			return false, s.faulty("the cell's value is %.40q, not a number that a cell can hold", text)
		}
	case TypeShared:
		index, ok := parseIndex(text)
		if !ok {
			return false, s.faulty("the cell points to shared string %.40q", text)
		}
		cell.Index = int32(index)
		empty, err := s.shared(index)
		return !empty, err
	case TypeBool:
		switch string(text) {
		case "1", "true":
			cell.Number = 1
		case "0", "false":
		default:
			return false, s.faulty("the cell's value is %.40q, neither true nor false", text)
		}
	case TypeDate:
		var clock, ok bool
		if cell.Number, clock, ok = parseDate(text, s.date1904); !ok {
			return false, s.faulty("the cell's value is %.40q, not a date in the form 2024-03-05T08:15:00", text)
		}
		if clock {
			cell.Type = TypeTime
		}
	default:
		if len(text) == 0 {
			return false, nil
		}
		if cell.Type != TypeError {
			s.classify(text)
		}
		if wanted {
			cell.Text = s.keepText(text)
		}
	}
	return true, nil
}

// isNumberLike tells whether the text holds bytes of decimal numbers only. It is
// all that is asked of the numbers in columns that nobody wants.
func isNumberLike(text []byte) bool {
	for _, c := range text {
		if !numberBytes[c] {
			return false
		}
	}
	return true
}

var numberBytes = func() (set [256]bool) {
	for _, c := range []byte("0123456789+-.eE") {
		set[c] = true
	}
	return set
}()

func parseIndex(text []byte) (int, bool) {
	if len(text) > 9 {
		return 0, false
	}
	n := 0
	for _, c := range text {
		if c < '0' || c > '9' {
			return 0, false
		}
		n = n*10 + int(c-'0')
	}
	return n, true
}
