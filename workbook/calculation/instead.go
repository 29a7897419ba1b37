package calculation

import (
	"errors"
	"slices"
	"strings"
	"unicode"

	"halfwidth/funcs"
)

// closestOf gives the names that an error about an unknown name offers.
func closestOf(err error) []string {
	var unknown *funcs.UnknownError
	if errors.As(err, &unknown) {
		return unknown.Closest
	}
	return nil
}

// lastFault is the fault that refuse has just added.
func (r *Row) lastFault() *Diagnostic { return &r.faults[len(r.faults)-1] }

// meant says what may have been meant by the name in the cell of the finding
// that was just added.
func (c *calcSheet) meant(names ...string) {
	d := &c.found[len(c.found)-1]
	d.Span, d.Instead = nameSpan(c.at(d.Cell.Row, d.Cell.Col).Text), names
}

// nameSpan finds the name in the text of a header cell or of a default: without
// a result's mark, the word default, and words in parentheses.
func nameSpan(text string) Span {
	s := Span{0, len(text)}
	if name := trim(text); strings.HasSuffix(name, ")") && strings.LastIndex(name, "(") > 0 {
		s.End = strings.LastIndex(text, "(")
	}
	skip := func(those func(rune) bool) { s.Start = s.End - len(strings.TrimLeftFunc(text[s.Start:s.End], those)) }
	skip(unicode.IsSpace)
	const word = "default"
	switch name := text[s.Start:s.End]; {
	case strings.HasPrefix(name, ">"):
		s.Start++
	case len(name) > len(word) && strings.EqualFold(name[:len(word)], word) && isGap(firstRune(name[len(word):])):
		s.Start += len(word)
	}
	skip(isGap)
	s.End = s.Start + len(strings.TrimRightFunc(text[s.Start:s.End], unicode.IsSpace))
	return s
}

// isGap reports whether a character may stand between the words of a name.
func isGap(r rune) bool { return r == '-' || r == '_' || unicode.IsSpace(r) }

// afterColon finds the name after `work out:`.
func afterColon(text string) Span {
	at := strings.IndexByte(text, ':') + 1
	name := trim(text[at:])
	start := at + strings.Index(text[at:], name)
	return Span{start, start + len(name)}
}

// Instead gives what may have been meant by a finding's Span of its cell's
// text: names that exist, a level with its percent sign. written is the cell's
// text.
func (r *RowResult) Instead(d Diagnostic, written string) []string {
	if len(d.Instead) > 0 || d.Code != "bad-value" || d.Severity != funcs.Refused {
		return d.Instead
	}
	at := slices.IndexFunc(r.Row.Inputs, func(in *Input) bool { return in.Name == d.Input && in.Cell == d.Cell })
	if at < 0 || r.Row.Inputs[at].term.far {
		return nil
	}
	t := r.Row.Inputs[at].term
	switch v := t.value.(type) {
	case float64:
		if t.input.Kind == funcs.Level && v > 1 && v <= 100 {
			return []string{trim(written) + "%"}
		}
	case string:
		if t.input.Kind == funcs.Choice {
			return funcs.Closest(v, t.input.Choices)
		}
	}
	return nil
}
