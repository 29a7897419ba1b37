package calculation

import (
	"strconv"
	"strings"

	"halfwidth/funcs"
)

// Expr is a sample expression: a *List, a *Range or a *Query. String writes it
// in one canonical way, which parses to the same expression.
type Expr interface {
	String() string
	expr()
}

// List is numbers written out, each perhaps with a name.
type List struct{ Items []Item }

// Item is one number of a List, or the cell that holds it.
type Item struct {
	Name   string // "" where there is none
	Number float64
	Cell   *CellRef
	Span   Span
}

// Range is a range of a sheet; without a place, of the calculation sheet.
type Range struct {
	Place *PlaceRef
	Area  Area
	Span  Span
}

// What says what a Query takes from its rows.
type What uint8

// What a Query takes.
const (
	Values  What = iota // the numbers of one column
	Several             // those of several columns, a sample each
	Count               // how many rows there are
	Sum                 // the sum of one column
)

// Query is a column, or several, or a count or a sum of rows, in a place.
type Query struct {
	What    What
	Columns []ColumnRef // one, or several for Several, none for Count
	Place   PlaceRef
	Where   []Condition
	ForEach *ColumnRef
	Matched *ColumnRef
	Span    Span
}

// ColumnRef names a column; Unit is the unit of durations, or "".
type ColumnRef struct {
	Name string
	Unit string
	Span Span
}

// PlaceRef names what stands after `in`.
type PlaceRef struct {
	HeaderRow int    // 0 where the header is to be found
	File      string // "" for the book itself
	Name      string // sheet, table or defined name; may be "" with a File
	Span      Span
}

// Op is the operator of a Condition.
type Op uint8

// The operators.
const (
	Equal Op = iota
	NotEqual
	Less
	LessOrEqual
	Greater
	GreaterOrEqual
	IsMissing
	IsPresent
	IsOneOf
	RowIsVisible
)

// String writes the operator.
func (o Op) String() string {
	return [...]string{"=", "<>", "<", "<=", ">", ">=", "is missing", "is present", "is one of", "row is visible"}[o]
}

// Condition is one condition on a row.
type Condition struct {
	Column   ColumnRef // not for RowIsVisible
	Op       Op
	Literals []Literal // one; several for IsOneOf; none for the other words
	Span     Span
}

// LiteralKind is the kind of a Literal.
type LiteralKind uint8

// The kinds of literals.
const (
	NumberLiteral LiteralKind = iota
	DateLiteral               // Number is days since 1899-12-30
	WordLiteral               // an unquoted word
	QuotedLiteral             // a text in quotes
)

// Literal is the right side of a condition.
type Literal struct {
	Kind   LiteralKind
	Number float64
	Day    bool // a date without a time, which means the whole day
	Text   string
	Span   Span
}

func (*List) expr()  {}
func (*Range) expr() {}
func (*Query) expr() {}

// String writes the numbers with `; ` between them.
func (l *List) String() string {
	parts := make([]string, len(l.Items))
	for i, item := range l.Items {
		parts[i] = funcs.FormatNumber(item.Number)
		if item.Cell != nil {
			parts[i] = item.Cell.String()
		}
		if item.Name != "" {
			parts[i] = nameText(item.Name) + " = " + parts[i]
		}
	}
	return strings.Join(parts, "; ")
}

// String writes the sheet, an exclamation mark and the area.
func (r *Range) String() string {
	if r.Place == nil {
		return r.Area.String()
	}
	return r.Place.String() + "!" + r.Area.String()
}

// String writes the query in the fixed order of its parts.
func (q *Query) String() string {
	var b strings.Builder
	switch q.What {
	case Count:
		b.WriteString("count")
	case Sum:
		b.WriteString("sum of " + q.Columns[0].String())
	case Several:
		b.WriteString("columns ")
		for i, c := range q.Columns {
			if i > 0 {
				b.WriteString(", ")
			}
			b.WriteString(c.String())
		}
	default:
		b.WriteString(q.Columns[0].String())
	}
	b.WriteString(" in " + q.Place.String())
	for i, c := range q.Where {
		if i == 0 {
			b.WriteString(" where ")
		} else {
			b.WriteString(" and ")
		}
		b.WriteString(c.String())
	}
	if q.ForEach != nil {
		b.WriteString(" for each " + q.ForEach.String())
	}
	if q.Matched != nil {
		b.WriteString(" matched by " + q.Matched.String())
	}
	return b.String()
}

// String writes the name, and the unit in parentheses.
func (c ColumnRef) String() string {
	if c.Unit != "" {
		return nameText(c.Name) + " (" + c.Unit + ")"
	}
	return nameText(c.Name)
}

// String writes the place as it stands after `in`.
func (p *PlaceRef) String() string {
	text := ""
	if p.HeaderRow > 0 {
		text = "header row " + strconv.Itoa(p.HeaderRow) + " in "
	}
	switch {
	case p.File == "" && fileEnd(p.Name) > 0:
		return text + quote(p.Name)
	case p.File == "":
		return text + nameText(p.Name)
	case isPlainWord(p.File) && fileEnd(p.File) == len(p.File):
		text += p.File
	default:
		text += quote(p.File)
	}
	if p.Name != "" {
		text += "/" + nameText(p.Name)
	}
	return text
}

// String writes the condition.
func (c Condition) String() string {
	switch c.Op {
	case RowIsVisible:
		return "row is visible"
	case IsMissing, IsPresent:
		return c.Column.String() + " " + c.Op.String()
	}
	parts := make([]string, len(c.Literals))
	for i, l := range c.Literals {
		parts[i] = l.String()
	}
	return c.Column.String() + " " + c.Op.String() + " " + strings.Join(parts, "; ")
}

// String writes the literal so that it is read back as the same kind.
func (l Literal) String() string {
	switch l.Kind {
	case NumberLiteral:
		return funcs.FormatNumber(l.Number)
	case DateLiteral:
		return dateText(l.Number, l.Day)
	case WordLiteral:
		return l.Text
	}
	return quote(l.Text)
}

// ValueText writes a text as it stands in a condition: in quotes where without
// them it would not be read as that text.
func ValueText(text string) string {
	_, number := parseNumber(text)
	_, _, date := parseDate(text)
	if number || date {
		return quote(text)
	}
	return nameText(text)
}

// nameText writes a name, in quotes where it needs them.
func nameText(name string) string {
	if isPlainWord(name) {
		return name
	}
	return quote(name)
}

// fileKinds are the endings of the files that an expression may name.
var fileKinds = [...]string{".csv", ".tsv", ".xlsx", ".xlsm"}

// fileEnd gives where the name of a file ends in a word, at its end or before
// a slash; 0 where the word names no file.
func fileEnd(word string) int {
	for i := range word {
		for _, kind := range fileKinds {
			end := i + len(kind)
			if i > 0 && end <= len(word) && strings.EqualFold(word[i:end], kind) && (end == len(word) || word[end] == '/') {
				return end
			}
		}
	}
	return 0
}
