package ooxml

import (
	"fmt"
	"strings"
)

// Format says what a cell's number format shows its number as.
type Format uint8

const (
	FormatNumber  Format = iota // a plain number, also General
	FormatPercent               // a percentage: 0.95 is shown as 95%
	FormatDate                  // a date, with or without a time of day
	FormatTime                  // a time of day without a date
	FormatElapsed               // an elapsed time, such as [h]:mm or mm:ss
	FormatText                  // text, also for numbers
)

// Format gives the format of a style, as in Cell.Style. Times of day and
// elapsed times are both durations, as fractions of a day.
func (b *Book) Format(style int) Format {
	if style < 0 || style >= len(b.formats) {
		return FormatNumber
	}
	return b.formats[style]
}

// readStyles reads the number formats of the cell styles.
func (b *Book) readStyles(entry int) error {
	root := false
	var section string
	codes := make(map[int]Format)
	var ids []int
	err := b.walk(entry, func(x *lexer) error {
		if !root {
			if root = true; !x.is("styleSheet") {
				return x.wrong("the part holds a <%.40s>, not styles", x.local)
			}
			return nil
		}
		if x.depth() == 2 {
			section = ""
			if x.space == spaceMain {
				section = string(x.local)
			}
			return nil
		}
		switch {
		case x.depth() != 3:
		case section == "numFmts" && x.is("numFmt"):
			id, err := x.number("numFmtId", 0)
			if err != nil {
				return err
			}
			code, err := x.attrText("formatCode")
			codes[id] = classifyFormat(code)
			return err
		case section == "cellXfs" && x.is("xf"):
			id, err := x.number("numFmtId", 0)
			ids = append(ids, id)
			return err
		}
		return nil
	})
	b.formats = make([]Format, len(ids))
	for i, id := range ids {
		format, ok := codes[id]
		if !ok {
			format = builtInFormat(id)
		}
		b.formats[i] = format
	}
	b.hasStyles = true
	return err
}

// styleLimit is the number of styles that cells may point to; a book without
// styles takes any number for the plain style.
func (b *Book) styleLimit() int {
	if !b.hasStyles {
		return 1 << 30
	}
	return max(1, len(b.formats))
}

func outOfStyles(style, count int) string {
	return fmt.Sprintf("the cell points to style %d, of %d", style, count)
}

// builtInFormat gives the format of a built-in id (ECMA-376 part 1, 18.8.30,
// with the ids of the Far East and of Thailand). Where the languages give an id
// either a date or a time of day, it is taken for a date.
func builtInFormat(id int) Format {
	switch {
	case id == 9, id == 10, id == 67, id == 68:
		return FormatPercent
	case id == 49:
		return FormatText
	case id >= 14 && id <= 17, id == 22, id >= 27 && id <= 31, id >= 34 && id <= 36, id >= 50 && id <= 58, id >= 71 && id <= 74, id == 77, id == 81:
		return FormatDate
	case id >= 18 && id <= 21, id == 32, id == 33, id == 75, id == 76:
		return FormatTime
	case id >= 45 && id <= 47, id >= 78 && id <= 80:
		return FormatElapsed
	}
	return FormatNumber
}

// classifyFormat reads a number format code. A code has up to four sections,
// for positive, negative, zero and text; the first that shows dates or times
// decides, else the first.
func classifyFormat(code string) Format {
	first := FormatNumber
	for i := 0; ; i++ {
		section, rest, more := cutSection(code)
		format := sectionFormat(section)
		if format == FormatDate || format == FormatTime || format == FormatElapsed {
			return format
		}
		if i == 0 {
			first = format
		}
		if !more {
			return first
		}
		code = rest
	}
}

// cutSection splits a code at its first semicolon that is not quoted.
func cutSection(code string) (section, rest string, more bool) {
	for i := 0; i < len(code); i++ {
		switch code[i] {
		case ';':
			return code[:i], code[i+1:], true
		case '\\', '_', '*':
			i++
		case '"', '[':
			i = closing(code, i)
		}
	}
	return code, "", false
}

// closing gives the index of the quote or bracket that ends what opens at i.
func closing(code string, i int) int {
	end := byte('"')
	if code[i] == '[' {
		end = ']'
	}
	if n := strings.IndexByte(code[i+1:], end); n >= 0 {
		return i + 1 + n
	}
	return len(code)
}

// sectionFormat reads the letters of one section that stand outside quotes,
// escapes and brackets. A bracket counts only as an elapsed [h], [m] or [s];
// colours, conditions, languages and number shapes do not. An m means minutes
// next to an hour or a second, else the month.
func sectionFormat(code string) Format {
	var date, clock, hour, elapsed, percent, digit, text bool
	var last byte // the last letter that counted: h, s, m (open), or d
	month := func() { date = date || last == 'm' }
	for i := 0; i < len(code); i++ {
		c := code[i] | 0x20
		switch {
		case code[i] == '\\' || code[i] == '_' || code[i] == '*':
			i++
		case code[i] == '"':
			i = closing(code, i)
		case code[i] == '[':
			end := closing(code, i)
			if unit := strings.ToLower(code[i+1 : min(end, len(code))]); unit != "" && strings.Trim(unit, unit[:1]) == "" && strings.ContainsAny(unit[:1], "hms") {
				month()
				elapsed, last = true, unit[0]
				if last == 'm' {
					last = 'h'
				}
			}
			i = end
		case c == 'g' && len(code)-i >= 7 && strings.EqualFold(code[i:i+7], "general"):
			i += 6
		case c == 'e' && i+1 < len(code) && (code[i+1] == '+' || code[i+1] == '-'):
			digit = true
		case c == 'a' && (hasFold(code[i:], "am/pm") || hasFold(code[i:], "a/p")):
			month()
			clock, hour = true, true
			i += 2
			if code[i] == '/' {
				i += 2 // the end of am/pm; a/p ended before
			}
			last = 0
		case c == 'h':
			month()
			clock, hour, last = true, true, 'h'
		case c == 's':
			if last == 'm' {
				last = 's' // those were minutes
			}
			month()
			clock, last = true, 's'
		case c == 'm':
			switch last {
			case 'h':
				clock, last = true, 'n'
			case 'n', 'm':
			case 's':
				// After seconds only months of a new date can come.
				last = 'm'
			default:
				last = 'm'
			}
		case c == 'y', c == 'd', c == 'e', c == 'g', c == 'b':
			month()
			date, last = true, 'd'
		case code[i] == '0', code[i] == '#', code[i] == '?':
			digit = true
		case code[i] == '%':
			percent = true
		case code[i] == '@':
			text = true
		}
	}
	month()
	switch {
	case date:
		return FormatDate
	case elapsed, clock && !hour:
		return FormatElapsed
	case clock:
		return FormatTime
	case percent:
		return FormatPercent
	case text && !digit:
		return FormatText
	}
	return FormatNumber
}

func hasFold(s, prefix string) bool {
	return len(s) >= len(prefix) && strings.EqualFold(s[:len(prefix)], prefix)
}
