package calculation

import (
	"slices"
	"strings"

	"halfwidth/funcs"
)

// query reads a column, several columns, a count or a sum, then the place and
// what follows it.
func (p *parser) query(what What) Expr {
	start := p.peek()
	q := &Query{What: what}
	switch what {
	case Count:
		p.next()
	case Sum:
		p.accept("sum", "of")
		q.Columns = []ColumnRef{p.column("a column's name")}
	case Several:
		p.next()
		q.Columns = p.columns()
	default:
		q.Columns = []ColumnRef{p.column("a column's name")}
	}
	if p.err != nil {
		return nil
	}
	headed := false
	if p.peek().is("header") && p.look(1).is("row") {
		q.Place.HeaderRow, headed = p.headerRow(), true
	}
	if t := p.peek(); !p.accept("in") {
		p.fail(t, p.wantIn(q), funcs.Closest(t.text, []string{"in"})...)
		return nil
	}
	row := q.Place.HeaderRow
	if p.peek().is("header") && p.look(1).is("row") && !headed {
		row = p.headerRow()
		if t := p.peek(); !p.accept("in") {
			p.fail(t, "write in and the sheet: NAME in header row 3 in SHEET")
		}
	}
	q.Place = p.place()
	q.Place.HeaderRow = row
	p.clauses(q)
	q.Span = p.span(start, p.last())
	return q
}

// wantIn words what is missing where no `in` follows a column.
func (p *parser) wantIn(q *Query) string {
	t := p.peek()
	if len(q.Columns) == 1 {
		c := q.Columns[0]
		if t.kind == tokenEnd {
			return "write where the column is: " + c.String() + " in SHEET"
		}
		if t.is(",") {
			return "write ; between numbers, and name several columns as: columns " + c.String() + ", … in SHEET"
		}
	}
	return "expected in and the place; names of several words stand in quotes"
}

// columns reads names with commas between them.
func (p *parser) columns() []ColumnRef {
	var list []ColumnRef
	for {
		c := p.column("a column's name")
		if p.err != nil {
			return nil
		}
		list = append(list, c)
		if t := p.peek(); t.is(";") {
			p.fail(t, "write a comma between the names of columns")
		}
		if !p.accept(",") {
			return list
		}
	}
}

// units are the units of durations, with their length in days.
var units = []struct {
	name string
	days float64
}{{"seconds", 1.0 / secondsPerDay}, {"minutes", 1.0 / 1440}, {"hours", 1.0 / 24}, {"days", 1}}

func unitNames() []string {
	names := make([]string, len(units))
	for i, u := range units {
		names[i] = u.name
	}
	return names
}

// column reads a column's name and perhaps a unit in parentheses.
func (p *parser) column(what string) ColumnRef {
	start := p.peek()
	c := ColumnRef{Name: p.name(what, "in", "(", "=", "<", ">", "<=", ">=", "<>", "is").text}
	if p.accept("(") {
		t := p.next()
		c.Unit = strings.ToLower(t.text)
		if c.Unit != "" && !strings.HasSuffix(c.Unit, "s") {
			c.Unit += "s"
		}
		if t.kind != tokenWord || !slices.Contains(unitNames(), c.Unit) {
			p.fail(t, "the unit of a duration is "+funcs.OrList(unitNames())+"; parentheses that belong to a name stand in quotes with it",
				funcs.Closest(t.text, unitNames())...)
		}
		if t := p.peek(); !p.accept(")") {
			p.fail(t, "close the parenthesis after the unit")
		}
	}
	c.Span = p.span(start, p.last())
	return c
}

// place reads a sheet, a table or a defined name, or a file and perhaps a
// sheet of it.
func (p *parser) place() PlaceRef {
	start := p.peek()
	t := p.name("a sheet, a table, a defined name or a file")
	place := PlaceRef{Name: t.text}
	end := 0
	if t.kind == tokenWord {
		end = fileEnd(t.text)
	}
	after := p.peek()
	switch {
	case end == len(t.text):
		place.File, place.Name = t.text, ""
	case end > 0:
		place.File, place.Name = t.text[:end], t.text[end+1:]
		if place.Name == "" {
			place.Name = p.afterSlash(after)
		}
	case t.kind == tokenQuoted && after.kind == tokenWord && after.glue && after.text[0] == '/':
		if fileEnd(t.text) != len(t.text) {
			p.fail(t, "before the slash stands a file: its name ends in "+funcs.OrList(fileKinds[:]))
		}
		p.next()
		place.File, place.Name = t.text, after.text[1:]
		if place.Name == "" {
			place.Name = p.afterSlash(p.peek())
		}
	}
	place.Span = p.span(start, p.last())
	return place
}

// afterSlash takes the quoted sheet after a file and a slash.
func (p *parser) afterSlash(t token) string {
	if t.kind != tokenQuoted || !t.glue || strings.TrimSpace(t.text) == "" {
		p.fail(t, "write the sheet right after the slash, in quotes where it has several words")
	}
	p.next()
	return t.text
}

// clauses reads conditions, groups and key, in this order.
func (p *parser) clauses(q *Query) {
	if p.err == nil && p.accept("where") {
		q.Where = append(q.Where, p.condition())
		for p.err == nil && p.accept("and") {
			q.Where = append(q.Where, p.condition())
		}
	}
	if t := p.peek(); p.err == nil && p.accept("for") {
		if !p.accept("each") {
			p.fail(p.peek(), "write for each and a column's name")
		}
		c := p.column("a column's name")
		q.ForEach = &c
		if q.What == Several {
			p.fail(t, "several columns are samples already; leave out for each, or name one column")
		}
		p.noUnit(c)
	}
	if t := p.peek(); p.err == nil && p.accept("matched") {
		if !p.accept("by") {
			p.fail(p.peek(), "write matched by and the key's column")
		}
		c := p.column("the key's column")
		q.Matched = &c
		if q.What != Values || q.ForEach != nil {
			p.fail(t, "matched by pairs two single columns; leave it out here")
		}
		p.noUnit(c)
	}
}

// noUnit refuses a unit where only names are compared.
func (p *parser) noUnit(c ColumnRef) {
	if c.Unit != "" {
		p.fail(p.last(), "groups and keys take no unit; leave out the parentheses")
	}
}

// condition reads one condition.
func (p *parser) condition() Condition {
	start := p.peek()
	if p.accept("row", "is", "visible") {
		return Condition{Op: RowIsVisible, Span: p.span(start, p.last())}
	}
	c := Condition{Column: p.column("a condition, such as depot = North")}
	t := p.peek()
	switch {
	case p.err != nil:
		return c
	case p.accept("is", "missing"):
		c.Op = IsMissing
	case p.accept("is", "present"):
		c.Op = IsPresent
	case p.accept("is", "one", "of"):
		c.Op = IsOneOf
		for {
			c.Literals = append(c.Literals, p.literal())
			if sep := p.peek(); sep.is(",") {
				p.fail(sep, "write ; between the values")
			}
			if p.err != nil || !p.accept(";") {
				break
			}
		}
	case t.is("is"):
		p.fail(p.look(1), "write is missing, is present or is one of; for equal write =, for unequal <>")
	default:
		op, ok := operators[t.text]
		if t.kind != tokenSign || !ok {
			p.fail(t, "after a condition's column write =, <>, <, <=, >, >=, is missing, is present or is one of; names of several words stand in quotes")
			return c
		}
		p.next()
		c.Op = op
		c.Literals = []Literal{p.literal()}
	}
	c.Span = p.span(start, p.last())
	return c
}

var operators = map[string]Op{"=": Equal, "<>": NotEqual, "<": Less, "<=": LessOrEqual, ">": Greater, ">=": GreaterOrEqual}

// endsCondition are the keywords that cannot be an unquoted literal.
var endsCondition = []string{"and", "where", "for", "matched", "in", "is"}

// literal reads the right side of a condition.
func (p *parser) literal() Literal {
	t := p.next()
	l := Literal{Kind: QuotedLiteral, Text: t.text, Span: p.span(t, t)}
	switch {
	case t.kind == tokenQuoted && strings.TrimSpace(t.text) == "":
		p.fail(t, "write is missing for blank cells, is present for others")
	case t.kind == tokenQuoted:
	case t.kind != tokenWord:
		p.fail(t, "write a value here: a number, a date such as 2024-03-01, or a text")
	case slices.Contains(endsCondition, strings.ToLower(t.text)):
		p.fail(t, "write a value here; a text that is a keyword stands in quotes: "+quote(t.text))
	default:
		p.bare(&l, t)
	}
	return l
}

// bare gives an unquoted literal its kind: number, date or word.
func (p *parser) bare(l *Literal, t token) {
	if next := p.peek(); next.kind == tokenWord {
		if days, day, ok := parseDate(t.text + " " + next.text); ok {
			p.next()
			l.Kind, l.Number, l.Day, l.Text = DateLiteral, days, day, ""
			l.Span = p.span(t, next)
			return
		}
	}
	if x, ok := p.number(t); ok {
		l.Kind, l.Number, l.Text = NumberLiteral, x, ""
		l.Span = p.span(t, p.last())
		return
	}
	if days, day, ok := parseDate(t.text); ok {
		l.Kind, l.Number, l.Day, l.Text = DateLiteral, days, day, ""
		return
	}
	l.Kind = WordLiteral
}
