package calculation

import (
	"fmt"
	"slices"
	"strings"

	"halfwidth/funcs"
)

// term is what an input's cell means: a value, the result of another row, or
// an expression tied to its sheets.
type term struct {
	input   funcs.Input
	value   any         // given outright
	result  *resultCell // the result of another row
	list    []listTerm
	query   *bound
	area    *boundRange
	one     bool // area is a single cell whose value is wanted as it is
	unit    string
	written string  // the expression's text
	far     bool    // the expression stands in another cell than the input's
	notes   []fault // what should be known, such as a saved formula value
}

// span gives a stretch of the expression within the input's own cell.
func (t *term) span(s Span) Span {
	if t.far {
		return Span{}
	}
	return s
}

// point gives a diagnostic the stretch of the input's own cell that a fault is
// about, and what may have been meant by it.
func (t *term) point(d *Diagnostic, f *fault) {
	if !t.far {
		d.Span, d.Instead = f.span, f.instead
	}
}

// listTerm is one number of a list.
type listTerm struct {
	name   string
	number float64
	result *resultCell
	text   string // the cell as written
}

// reader ties the cells of inputs to sheets.
type reader struct {
	lib     *library
	calc    *calcSheet // the sheet that bare addresses lie on; nil where there is none
	visited []string   // the addresses gone through, to find circles
}

// asText reads a cell's text as an input given as text, such as on a command
// line.
func asText(text string) Cell { return Cell{Kind: Text, Text: text} }

// term reads the cell of an input. A nil term with no fault means that the
// input is not given.
func (r *reader) term(in funcs.Input, cell Cell) (*term, *fault) {
	t := &term{input: in}
	if cell.Formula && cell.Kind != Blank {
		t.notes = append(t.notes, fault{Finding: r.savedValue(in)})
	}
	switch cell.Kind {
	case Blank:
		switch {
		case cell.Unsaved:
			return nil, bad("formula-without-value", "is a formula of which no value is saved; open the book in a spreadsheet program, recalculate and save it")
		case cell.Covered:
			return nil, bad("merged-cells", "lies inside merged cells; unmerge them and fill in every row")
		}
		return nil, nil
	case Error:
		return nil, bad("error-value", "is the error "+cell.Text+"; correct it, or empty the cell for the default")
	case Text:
		if fold(cell.Text) == "" {
			if cell.Formula {
				return nil, bad("no-value", "is a formula that gives nothing; give a value, or empty the cell for the default")
			}
			return nil, bad("no-value", "holds only spaces; give a value, or empty the cell for the default")
		}
		return t, r.text(t, cell.Text)
	}
	v, f := valueOf(in, cell)
	t.value = v
	return t, f
}

// savedValue tells that an input is the saved result of a formula.
func (r *reader) savedValue(in funcs.Input) funcs.Finding {
	f := funcs.Finding{Code: "saved-formula-values", Severity: funcs.Information, Input: in.Name,
		Message: fmt.Sprintf("The %s is the last saved result of a formula.", in.Name)}
	if r.lib.own != nil && r.lib.own.source.RecalculatesLate() {
		f.Severity = funcs.Caution
		f.Message = fmt.Sprintf("The %s is the last saved result of a formula, and this book recalculates by hand or on load. Recalculate and save it first.", in.Name)
	}
	return f
}

// bad makes the fault of an input; its message goes on from the input's name.
func bad(code, message string) *fault {
	return &fault{Finding: funcs.Finding{Code: code, Severity: funcs.Refused, Message: message}, tail: true}
}

// valueOf gives the value of a cell that holds no text, for an input.
func valueOf(in funcs.Input, cell Cell) (any, *fault) {
	wrong := func() (any, *fault) {
		return nil, bad("bad-value", fmt.Sprintf("is %s (%s), but must be %s", cellText(cell), kindWord(cell.Kind), expects(in)))
	}
	switch cell.Kind {
	case Bool:
		if in.Kind != funcs.YesNo {
			return wrong()
		}
		return cell.Number != 0, nil
	case Number:
		switch in.Kind {
		case funcs.Number, funcs.Count, funcs.Level:
			return cell.Number, nil
		case funcs.Choice, funcs.Text:
			return funcs.FormatNumber(cell.Number), nil
		case funcs.Numbers:
			return funcs.List{Values: []float64{cell.Number}}, nil
		case funcs.Sample:
			return []float64{cell.Number}, nil
		}
	case Date:
		if in.Kind == funcs.Text {
			return groupName(cell), nil
		}
	case Duration:
		return nil, bad("bad-value", "is a duration, kept as a fraction of a day; write it as a plain number in the unit of the sample")
	}
	return wrong()
}

// kindWord words a kind of cell.
func kindWord(k CellKind) string {
	return [...]string{"a blank cell", "a number", "a text", "yes or no", "an error", "a date", "a duration"}[k]
}

// expects words what an input must be.
func expects(in funcs.Input) string {
	switch in.Kind {
	case funcs.Sample:
		return "numbers, or a column of them"
	case funcs.Samples:
		return "several samples, such as minutes in Trips for each depot"
	case funcs.Numbers:
		return "numbers with ; between them"
	}
	return in.Expects()
}

// text reads an input's text.
func (r *reader) text(t *term, text string) *fault {
	if ref, ok := bareCell(text); ok {
		return r.follow(t, r.calc, ref, text)
	}
	in := t.input
	switch in.Kind {
	case funcs.Text:
		t.value = plainText(text)
		return nil
	case funcs.Choice:
		t.value = text
		for _, c := range in.Choices {
			if nameForm(c) == nameForm(plainText(text)) {
				t.value = c
			}
		}
		return nil
	case funcs.YesNo:
		switch truthOf(plainText(text)) {
		case meets:
			t.value = true
		case fails:
			t.value = false
		default:
			return bad("bad-value", fmt.Sprintf("is %s, but must be yes or no", quote(trim(text))))
		}
		return nil
	}
	if in.Infinite && nameForm(plainText(text)) == funcs.Infinite {
		t.value = funcs.Infinite
		return nil
	}
	if groups, f := writtenGroups(in, text); groups != nil || f != nil {
		t.value = groups
		return f
	}
	e, err := ParseExpression(text)
	if err != nil {
		f := bad("bad-expression", "cannot be read: "+err.Error())
		if oneNumber(in.Kind) && isPlainWord(trim(text)) {
			return bad("bad-value", fmt.Sprintf("is %s, but must be %s; write a number with . as the decimal mark, or a cell such as B7", quote(trim(text)), expects(in)))
		}
		if syntax, ok := err.(*SyntaxError); ok {
			f.span, f.instead = syntax.Span, syntax.Closest
		}
		return f
	}
	t.written = text
	return r.expression(t, e)
}

// oneNumber reports whether an input of that kind is one number.
func oneNumber(k funcs.Kind) bool { return k == funcs.Number || k == funcs.Count || k == funcs.Level }

// plainText gives a text without outer space and the quotes round the whole.
func plainText(text string) string {
	tokens, err := tokenize(text)
	if err == nil && len(tokens) == 2 && tokens[0].kind == tokenQuoted {
		return tokens[0].text
	}
	return trim(text)
}

// bareCell reads a text that is one cell's address and nothing else.
func bareCell(text string) (CellRef, bool) { return ParseCell(trim(text)) }

// expression ties an expression to its sheets, as far as the input takes it.
func (r *reader) expression(t *term, e Expr) *fault {
	switch e := e.(type) {
	case *List:
		return r.listOf(t, e)
	case *Range:
		return r.rangeOf(t, e)
	case *Query:
		if f := takes(t.input, e); f != nil {
			return f
		}
		t.query = r.lib.bind(e)
		if t.query.fault != nil {
			return t.query.fault
		}
		return nil
	}
	return nil
}

// listOf reads numbers written out.
func (r *reader) listOf(t *term, l *List) *fault {
	in := t.input
	single := oneNumber(in.Kind)
	switch {
	case single && len(l.Items) > 1:
		return bad("bad-value", fmt.Sprintf("takes one number, but %d are written", len(l.Items)))
	case in.Kind == funcs.Samples:
		return bad("bad-value", "takes several samples; write minutes in Trips for each depot, or columns North, Quay in Trips")
	case in.Kind == funcs.Sample && slices.ContainsFunc(l.Items, func(i Item) bool { return i.Name != "" }),
		single && l.Items[0].Name != "":
		return bad("bad-value", "takes numbers without names; leave out the names and equals signs")
	}
	named := 0
	for _, item := range l.Items {
		lt := listTerm{name: item.Name, number: item.Number}
		if item.Name != "" {
			named++
		}
		if item.Cell != nil {
			lt.text = item.Cell.String()
			sub := &term{input: funcs.Input{Name: in.Name, Kind: funcs.Number}}
			if f := r.follow(sub, r.calc, *item.Cell, lt.text); f != nil {
				f.span = item.Span
				return f
			}
			x, isNumber := sub.value.(float64)
			if sub.result == nil && !isNumber {
				return bad("bad-value", fmt.Sprintf("names %s, which must hold a number", lt.text))
			}
			lt.number, lt.result = x, sub.result
			t.notes = append(t.notes, sub.notes...)
		}
		t.list = append(t.list, lt)
	}
	if named > 0 && named < len(l.Items) {
		return bad("bad-value", "names some of its numbers; name all of them, or none")
	}
	return nil
}

// rangeOf reads a range: the value of a single cell, or numbers.
func (r *reader) rangeOf(t *term, e *Range) *fault {
	b := r.lib.area(e, r.ownSheet())
	if b.fault != nil {
		return b.fault
	}
	if e.Area.Single() && b.sheet.calc != nil {
		return r.follow(t, b.sheet.calc, CellRef{e.Area.FirstRow, e.Area.FirstCol}, e.String())
	}
	switch t.input.Kind {
	case funcs.Sample, funcs.Numbers:
	case funcs.Samples:
		return bad("bad-value", "takes several samples; write columns NAME, NAME in SHEET, or NAME in SHEET for each GROUP")
	default:
		if !e.Area.Single() {
			return bad("bad-value", fmt.Sprintf("takes one value, but %s is several cells", e.String()))
		}
		t.one = true
	}
	t.area = b
	return nil
}

func (r *reader) ownSheet() *sheet {
	if r.calc == nil {
		return nil
	}
	return r.calc.sheet
}

// follow reads the cell of a calculation sheet that an input refers to: a
// result, or a cell that is read as though it stood in the input's place.
func (r *reader) follow(t *term, calc *calcSheet, ref CellRef, written string) *fault {
	if calc == nil {
		return bad("unknown-name", fmt.Sprintf("is %s, a cell of a calculation sheet, and there is none here; put a text of that form in quotes", trim(written)))
	}
	at := calc.sheet.address(ref.Row, ref.Col)
	if slices.Contains(r.visited, at) {
		circle := append(r.visited[slices.Index(r.visited, at):], at)
		return bad("circle", "goes round in a circle: "+strings.Join(circle, " reads ")+"; write the value in one of these cells")
	}
	if result, ok := calc.results[ref]; ok {
		t.result = &result
		return nil
	}
	cell := calc.at(ref.Row, ref.Col)
	if !isFilled(cell) {
		return bad("no-value", fmt.Sprintf("is read from %s, which is blank; write a value there", at))
	}
	sub := &reader{lib: r.lib, calc: calc, visited: append(slices.Clone(r.visited), at)}
	got, f := sub.term(t.input, cell)
	if f != nil {
		if f.Code != "circle" && f.tail {
			f.Message = fmt.Sprintf("is read from %s, which %s", at, f.Message)
		}
		f.Cells, f.span, f.instead = append(f.Cells, at), Span{}, nil
		return f
	}
	got.unit, got.far = t.unit, true
	got.notes = append(t.notes, got.notes...)
	*t = *got
	return nil
}

// takes checks that an input takes what a query gives.
func takes(in funcs.Input, q *Query) *fault {
	text := q.String()
	switch in.Kind {
	case funcs.Number, funcs.Count, funcs.Level:
		switch {
		case q.What != Count && q.What != Sum:
			return bad("bad-value", fmt.Sprintf("takes one number, and %s is a sample; write count in … or sum of … in …, or the number", text))
		case q.ForEach != nil:
			return bad("bad-value", fmt.Sprintf("takes one number, and %s gives one for each group; leave out for each", text))
		case in.Kind == funcs.Level:
			return bad("bad-value", "is a level; write it as 95% or 0.95")
		}
	case funcs.Numbers:
		if q.What == Several {
			return bad("bad-value", "takes a list of numbers; name one column, or write them with ; between them")
		}
	case funcs.Sample:
		switch q.What {
		case Count, Sum:
			return bad("bad-value", fmt.Sprintf("takes measured values, and %s is a count or a sum; name a column: NAME in SHEET", text))
		case Several:
			return bad("bad-value", "takes one sample; name one column")
		}
	case funcs.Samples:
		if q.What == Count || q.What == Sum || q.What == Values && q.ForEach == nil {
			return bad("bad-value", "takes several samples; add for each and the column of the groups, or write columns NAME, NAME in SHEET")
		}
	}
	return nil
}
