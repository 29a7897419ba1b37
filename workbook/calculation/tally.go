package calculation

import (
	"fmt"
	"math"
	"strings"

	"halfwidth/funcs"
)

// tally counts what becomes of the cells of one expression, so that nothing is
// left out in silence.
type tally struct {
	sheet     *sheet
	used      int
	skipped   [5]skip // by skipKind
	looks     skip    // of the skipped texts, those that look like a number
	undecided skip    // rows that a condition could not decide
	noGroup   skip    // rows without a group
	noKey     skip    // values without a key to pair them by
	paired    int     // skipped cells that are counted as a dropped pair
	formulas  skip
	hidden    int
	stray     fault // why the whole is refused: set where code is not empty
	skips     []int32
	keepSkips bool // list the rows of skipped cells in skips
	ofRange   bool // of a range, which takes no conditions
}

// skip counts cells of one kind and remembers the first.
type skip struct {
	n        int
	row, col int
	text     string
}

func (s *skip) add(row, col int, text string) {
	if s.n == 0 {
		s.row, s.col, s.text = row, col, text
	}
	s.n++
}

type skipKind int

const (
	skippedText skipKind = iota
	skippedError
	skippedBool
	skippedDate
	skippedNumber // where durations are wanted
)

var skipWords = [...]string{"text", "error", "yes-or-no value", "date", "plain number among durations"}

// take gives the number of a cell that a sample may use. Other cells are
// counted; NaN stands for them and for blanks.
func (t *tally) take(column *Column, row int, ofRow RowFlags, name ColumnRef, factor float64) float64 {
	kind, flags := column.kind(row)
	if flags&IsFormula != 0 {
		if flags&IsUnsaved != 0 {
			t.refuse(t.sheet.unsaved(row, column.col, name.Span))
			return math.NaN()
		}
		t.formulas.add(row, column.col, "")
	}
	switch kind {
	case Number:
		if factor > 0 {
			return t.leaveOut(skippedNumber, column, row)
		}
		t.used++
		t.hide(ofRow)
		return column.number(row)
	case Duration:
		if factor == 0 {
			t.refuse(t.sheet.noUnit(row, column.col, name))
			return math.NaN()
		}
		t.used++
		t.hide(ofRow)
		return inUnit(column.number(row), factor)
	case Text:
		text := t.sheet.frame.texts[column.text(row)]
		if fold(text) == "" {
			return math.NaN()
		}
		if looksLikeNumber(text) {
			t.looks.add(row, column.col, text)
		}
		return t.leaveOut(skippedText, column, row)
	case Error:
		return t.leaveOut(skippedError, column, row)
	case Bool:
		return t.leaveOut(skippedBool, column, row)
	case Date:
		return t.leaveOut(skippedDate, column, row)
	}
	return math.NaN()
}

func (t *tally) leaveOut(kind skipKind, column *Column, row int) float64 {
	t.skipped[kind].add(row, column.col, cellText(column.At(row)))
	if t.keepSkips {
		t.skips = append(t.skips, int32(row))
	}
	return math.NaN()
}

func (t *tally) hide(row RowFlags) {
	if row&RowHidden != 0 {
		t.hidden++
	}
}

// refuse keeps the first reason to refuse the whole.
func (t *tally) refuse(f *fault) {
	if t.stray.Code == "" {
		t.stray = *f
	}
}

// cellText writes what a cell holds, for messages.
func cellText(c Cell) string {
	switch c.Kind {
	case Text:
		return quote(trim(c.Text))
	case Error:
		return c.Text
	case Bool:
		if c.Number != 0 {
			return "TRUE"
		}
		return "FALSE"
	case Date:
		return dateText(c.Number, c.Number == math.Trunc(c.Number))
	case Number:
		return funcs.FormatNumber(c.Number)
	case Duration:
		return "a duration"
	}
	return "nothing"
}

// skippedCells counts the cells left out though they were not blank.
func (t *tally) skippedCells() int {
	n := 0
	for _, s := range t.skipped {
		n += s.n
	}
	return n
}

// left counts all that was left out: cells, and rows that could not be decided
// or have no group.
func (t *tally) left() int {
	return t.skippedCells() - t.paired + t.undecided.n + t.noGroup.n + t.noKey.n
}

// findings words the counts. They are about the whole expression.
func (t *tally) findings() []fault {
	var out []fault
	say := func(code string, severity funcs.Severity, cells []string, format string, a ...any) {
		out = append(out, fault{Finding: funcs.Finding{Code: code, Severity: severity, Cells: cells, Message: fmt.Sprintf(format, a...)}})
	}
	at := func(s skip) string { return t.sheet.address(s.row, s.col) }
	if n := t.skippedCells(); n > 0 {
		var first *skip
		var parts []string
		for kind := range t.skipped {
			s := &t.skipped[kind]
			if s.n == 0 {
				continue
			}
			parts = append(parts, plural(s.n, skipWords[kind]))
			if first == nil || s.row < first.row || s.row == first.row && s.col < first.col {
				first = s
			}
		}
		say("cells-skipped", funcs.Caution, []string{at(*first)}, "%s skipped (%s); the first is %s, which holds %s. %s",
			wereWas(n, "cell"), strings.Join(parts, ", "), at(*first), first.text, t.advice())
	}
	if s := t.looks; s.n > 0 {
		say("text-looks-like-number", funcs.Caution, []string{at(s)}, "%s as text; the first is %s, %s. Turn them into numbers in the sheet.",
			looks(s.n), at(s), quote(trim(s.text)))
	}
	if s := t.undecided; s.n > 0 {
		say("cells-skipped", funcs.Caution, []string{at(s)}, "%s left out because a condition could not be decided; the first is %s, which holds %s. Correct the cells, or write the condition's value as they are.",
			wereWas(s.n, "row"), at(s), s.text)
	}
	if s := t.noGroup; s.n > 0 {
		say("cells-skipped", funcs.Caution, []string{at(s)}, "%s left out because the group's cell is blank or an error; the first is %s. Fill in the groups.",
			wereWas(s.n, "row"), at(s))
	}
	if s := t.formulas; s.n > 0 {
		severity, advice := funcs.Information, "."
		if t.sheet.shelf.source.RecalculatesLate() {
			severity, advice = funcs.Caution, ", and this book recalculates by hand or on load. Recalculate and save it first."
		}
		say("saved-formula-values", severity, []string{at(s)}, "%s the last saved result of a formula; the first is %s%s", valuesAre(s.n), at(s), advice)
	}
	if t.hidden > 0 {
		say("hidden-rows-counted", funcs.Information, nil, "%s in hidden or filtered rows and counted; write `row is visible` to leave them out.", standWord(t.hidden))
	}
	return out
}

// advice says what to do about skipped cells.
func (t *tally) advice() string {
	if t.ofRange {
		return "Correct them, or write a range without them, such as one that begins below its header."
	}
	return "Correct them, or leave their rows out by a condition."
}

func wereWas(n int, noun string) string {
	if n == 1 {
		return "1 " + noun + " was"
	}
	return decimal(n) + " " + noun + "s were"
}

func looks(n int) string {
	if n == 1 {
		return "1 of the skipped texts looks like a number but stands there"
	}
	return decimal(n) + " of the skipped texts look like numbers but stand there"
}

func valuesAre(n int) string {
	if n == 1 {
		return "1 value is"
	}
	return decimal(n) + " values are"
}

func standWord(n int) string {
	if n == 1 {
		return "1 value stands"
	}
	return decimal(n) + " values stand"
}
