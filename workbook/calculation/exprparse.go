package calculation

import (
	"slices"
	"strings"

	"halfwidth/funcs"
)

// ParseExpression reads a sample expression. The error is a *SyntaxError.
//
// A leading single quote that a spreadsheet program took for its mark of a text
// is forgiven: where the expression is wrong without it and right with it, it
// is read with it.
func ParseExpression(text string) (Expr, error) {
	e, err := parse(text, 0)
	if err == nil {
		return e, nil
	}
	if strings.Contains(text, "'") || strings.Contains(text, "’") {
		for _, q := range [...]string{"'", "‘"} {
			if e, err := parse(q+text, len(q)); err == nil {
				return e, nil
			}
		}
	}
	return nil, err
}

// parse reads an expression before which `before` bytes were put that do not
// stand in the text.
func parse(text string, before int) (Expr, *SyntaxError) {
	tokens, err := tokenize(text)
	if err != nil {
		return nil, err
	}
	p := &parser{text: text, tokens: tokens, before: before}
	e := p.expression()
	if p.err == nil && p.peek().kind != tokenEnd {
		p.unexpected(e)
	}
	if p.err != nil {
		return nil, p.err
	}
	return e, nil
}

// parser goes through the tokens; the first error is kept and ends the work.
type parser struct {
	text   string
	tokens []token
	at     int
	before int
	err    *SyntaxError
}

func (p *parser) peek() token { return p.look(0) }

// look gives the token n after the next; the last token is the end.
func (p *parser) look(n int) token { return p.tokens[min(p.at+n, len(p.tokens)-1)] }

func (p *parser) next() token {
	t := p.peek()
	if t.kind != tokenEnd {
		p.at++
	}
	return t
}

// accept takes the words, if they come next.
func (p *parser) accept(words ...string) bool {
	for i, w := range words {
		if !p.look(i).is(w) {
			return false
		}
	}
	p.at += len(words)
	return true
}

// fail keeps the first error: at the token, this is wanted.
func (p *parser) fail(t token, want string, closest ...string) {
	if p.err == nil {
		p.err = &SyntaxError{Text: p.text, Span: p.span(t, t), Found: t.found(), Want: want, Closest: closest}
	}
}

// span is the stretch from one token to another, in the text as it was given.
func (p *parser) span(from, to token) Span {
	return Span{max(0, from.span.Start-p.before), max(0, to.span.End-p.before)}
}

// last is the token before the next.
func (p *parser) last() token { return p.tokens[max(0, p.at-1)] }

// expression reads any of the forms.
func (p *parser) expression() Expr {
	first, second := p.peek(), p.look(1)
	switch {
	case first.kind == tokenEnd:
		p.fail(first, "write numbers with ; between them, a range such as Trips!C2:C61, or NAME in SHEET")
		return nil
	case first.is("header") && second.is("row") && p.look(3).is("in"):
		return p.headedQuery()
	case first.is("count") && (second.is("in") || second.is("header")):
		return p.query(Count)
	case first.is("sum") && second.is("of"):
		return p.query(Sum)
	case first.is("columns"):
		return p.query(Several)
	case p.isRange():
		return p.rangeOf()
	case p.isList():
		return p.list()
	}
	return p.query(Values)
}

// headedQuery reads `header row N in` before the rest.
func (p *parser) headedQuery() Expr {
	start := p.peek()
	row := p.headerRow()
	p.accept("in")
	e := p.expression()
	q, ok := e.(*Query)
	if p.err == nil && !ok {
		p.fail(start, "header row goes with a column: NAME in header row N in SHEET")
	}
	if p.err != nil {
		return nil
	}
	if q.Place.HeaderRow != 0 {
		p.fail(start, "give the header row once")
	}
	q.Place.HeaderRow = row
	return q
}

// headerRow reads `header row N`.
func (p *parser) headerRow() int {
	p.accept("header", "row")
	t := p.next()
	x, ok := parseNumber(t.text)
	if t.kind != tokenWord || !ok || x < 1 || x > MaxRow || x != float64(int(x)) {
		p.fail(t, "write the number of the header's row, such as header row 3")
		return 0
	}
	return int(x)
}

// isRange reports whether a range comes next: a sheet and an exclamation mark,
// or a bare A1 reference that nothing follows.
func (p *parser) isRange() bool {
	if p.peek().kind == tokenSign {
		return false
	}
	if p.placeLength() > 0 {
		return true
	}
	area, ok := ParseArea(p.peek().text)
	if p.peek().kind != tokenWord || !ok {
		return false
	}
	after := p.look(1)
	return after.kind == tokenEnd || !area.Single() && !after.is("in") && !after.is("(") && !after.is("=")
}

// placeLength counts the tokens that name a sheet before an exclamation mark.
func (p *parser) placeLength() int {
	for n := 1; n <= 3; n++ {
		switch t := p.look(n); {
		case t.is("!"):
			return n
		case t.kind == tokenEnd || t.kind == tokenSign || !t.glue:
			return 0
		}
	}
	return 0
}

func (p *parser) rangeOf() Expr {
	start := p.peek()
	r := &Range{}
	if p.placeLength() > 0 {
		place := p.place()
		r.Place = &place
		p.accept("!")
	}
	t := p.next()
	area, ok := ParseArea(t.text)
	if t.kind != tokenWord || !ok {
		p.fail(t, "write a range such as C2:C61 or C:C after the exclamation mark")
	}
	r.Area, r.Span = area, p.span(start, t)
	return r
}

// isList reports whether numbers come next: a number or a cell with a list's
// sign after it, or a name with an equals sign.
func (p *parser) isList() bool {
	first, after := p.peek(), p.look(1)
	if after.is("=") && first.kind != tokenSign {
		return true
	}
	_, isNumber := parseNumber(first.text)
	_, isCell := ParseCell(first.text)
	if first.kind != tokenWord || !isNumber && !isCell {
		return false
	}
	return !after.is("in") && !after.is("(") && !after.is("header")
}

func (p *parser) list() Expr {
	l := &List{}
	for {
		l.Items = append(l.Items, p.item())
		if p.err != nil {
			return nil
		}
		if t := p.peek(); t.is(",") {
			p.fail(t, "write numbers with ; between them and . as the decimal mark")
			return nil
		}
		if !p.accept(";") {
			return l
		}
	}
}

func (p *parser) item() Item {
	start := p.peek()
	var item Item
	if p.look(1).is("=") && start.kind != tokenSign {
		item.Name = p.name("the number's name", "=").text
		if strings.TrimSpace(item.Name) == "" {
			p.fail(start, "write a name before the equals sign")
		}
		p.accept("=")
	}
	t := p.next()
	x, isNumber := p.number(t)
	cell, isCell := ParseCell(t.text)
	switch {
	case t.kind == tokenWord && isNumber:
		item.Number = x
	case t.kind == tokenWord && isCell:
		item.Cell = &cell
	case t.kind == tokenEnd || t.kind == tokenSign:
		p.fail(t, "write a number here")
	default:
		p.fail(t, "write a number, with . as the decimal mark and ; between numbers")
	}
	item.Span = p.span(start, p.last())
	return item
}

// number reads the token just taken as a number, with a percent sign that may
// stand apart.
func (p *parser) number(t token) (float64, bool) {
	text := t.text
	if p.peek().kind == tokenWord && p.peek().text == "%" {
		if x, ok := parseNumber(text + "%"); ok {
			p.next()
			return x, true
		}
	}
	return parseNumber(text)
}

// name takes a name: a word that is no keyword, or a text in quotes. what and
// before word the error.
func (p *parser) name(what string, before ...string) token {
	t := p.peek()
	bare := t.kind == tokenWord && (!isKeyword(t.text) || slices.ContainsFunc(before, p.look(1).is))
	switch {
	case t.kind == tokenQuoted && strings.TrimSpace(t.text) == "":
		p.fail(t, "write "+what+" between the quotes")
	case t.kind == tokenQuoted || bare:
	case t.kind == tokenWord:
		p.fail(t, "write "+what+"; a name that is a keyword stands in quotes: "+quote(t.text))
	default:
		p.fail(t, "write "+what)
	}
	return p.next()
}

// words is the keywords that may come after a query's place.
var clauses = []string{"where", "for each", "matched by"}

// unexpected reports what stands after a whole expression.
func (p *parser) unexpected(e Expr) {
	t := p.peek()
	if t.kind == tokenWord {
		switch _, isQuery := e.(*Query); {
		case !isQuery && (t.is("where") || t.is("for") || t.is("matched")):
			p.fail(t, "conditions and groups need a column: NAME in SHEET "+strings.ToLower(t.text)+" …")
			return
		case isQuery && (t.is("where") || t.is("for") || t.is("matched")):
			p.fail(t, "the order is: column, in, where, for each, matched by, each at most once")
			return
		}
	}
	want := "nothing more was expected"
	switch e := e.(type) {
	case *Query:
		want = "expected where, for each, matched by or the end; names and texts of several words stand in quotes"
		if len(e.Where) > 0 {
			want = "expected and, for each, matched by or the end; names and texts of several words stand in quotes"
		}
		if t.is(",") {
			want = "write . as the decimal mark, and ; between values"
		}
	case *List:
		want = "expected ; between numbers, or the end"
	}
	p.fail(t, want, funcs.Closest(t.text, clauses)...)
}
