package calculation

import "slices"

// HoleKind is what an expression lacks at a place.
type HoleKind uint8

// The kinds of holes.
const (
	NoHole     HoleKind = iota // nothing that is known
	StartHole                  // anything that an expression begins with
	ColumnHole                 // a column's name
	PlaceHole                  // a sheet, a table, a defined name or a file
	ValueHole                  // the right side of a condition
	WordHole                   // one of the Words
)

// Hole is what may be written at a place of an expression, for completion.
type Hole struct {
	Kind   HoleKind
	Span   Span     // of the word that is begun there; empty where none is
	Begun  string   // the word as far as the place, without its quote
	Words  []string // keywords and signs that may stand there
	Column string   // the column of a ValueHole's condition
	Place  *PlaceRef
}

// HoleAt finds what may be written at a byte offset of an expression. What
// stands before the offset decides; the place is looked for behind it too, since
// a column is written before its sheet.
func HoleAt(text string, offset int) Hole {
	offset = max(0, min(offset, len(text)))
	tokens, begun := tokensBefore(text[:offset])
	h := Hole{Span: Span{offset, offset}}
	if begun != nil {
		h.Begun, h.Span.Start = begun.text, begun.span.Start
	}
	whole, err := tokenize(text)
	if err == nil && begun != nil {
		if i := slices.IndexFunc(whole, func(t token) bool { return t.span.Start == begun.span.Start }); i >= 0 && whole[i].kind == begun.kind {
			h.Span.End = max(offset, whole[i].span.End)
		}
	}
	if err != nil {
		whole = tokens
	}
	h.Place = placeIn(text, whole)
	g := &holeFinder{parser: parser{text: text, tokens: append(tokens, token{kind: tokenEnd, span: Span{offset, offset}})}, hole: &h}
	g.find()
	return h
}

// tokensBefore splits what stands before an offset, and takes the word that
// reaches up to it, or the quote that is open there, from the others.
func tokensBefore(text string) (tokens []token, begun *token) {
	tokens, err := tokenize(text)
	if err != nil {
		start := err.Span.Start
		tokens, _ = tokenize(text[:start])
		quote := string(firstRune(text[start:]))
		return tokens[:len(tokens)-1], &token{kind: tokenQuoted, text: text[start+len(quote):], span: Span{start, len(text)}}
	}
	tokens = tokens[:len(tokens)-1]
	if n := len(tokens); n > 0 && tokens[n-1].kind == tokenWord && tokens[n-1].span.End == len(text) {
		return tokens[:n-1], &tokens[n-1]
	}
	return tokens, nil
}

// placeIn gives the place that an expression names, nil where it names none.
func placeIn(text string, tokens []token) *PlaceRef {
	at := slices.IndexFunc(tokens, func(t token) bool { return t.is("in") })
	if at < 0 {
		return nil
	}
	p := &parser{text: text, tokens: slices.Concat(tokens, []token{{kind: tokenEnd}}), at: at + 1}
	if p.peek().kind != tokenWord && p.peek().kind != tokenQuoted {
		return nil
	}
	place := p.place()
	if p.err != nil {
		return nil
	}
	return &place
}

// holeFinder goes through the tokens before a hole as the parser of queries
// does, up to the end.
type holeFinder struct {
	parser
	hole *Hole
}

// lacks reports whether the hole comes here, and says what it is.
func (g *holeFinder) lacks(kind HoleKind, words ...string) bool {
	if g.peek().kind != tokenEnd {
		return false
	}
	g.hole.Kind, g.hole.Words = kind, words
	return true
}

// take takes a keyword that has to come.
func (g *holeFinder) take(word string) bool {
	return !g.lacks(WordHole, word) && g.accept(word)
}

// column takes a column's name, with its unit where it may have one.
func (g *holeFinder) column(words ...string) (name string, ok bool) {
	if g.lacks(ColumnHole, words...) {
		return "", false
	}
	t := g.next()
	if t.kind == tokenSign {
		return "", false
	}
	if g.accept("(") {
		if g.lacks(WordHole, unitNames()...) {
			return "", false
		}
		g.next()
		if g.lacks(WordHole, ")") || !g.accept(")") {
			return "", false
		}
	}
	return t.text, true
}

func (g *holeFinder) find() {
	if g.lacks(StartHole, "count in", "sum of", "columns") {
		return
	}
	switch {
	case g.accept("count"):
	case g.accept("sum"):
		if !g.take("of") {
			return
		}
		if _, ok := g.column(); !ok {
			return
		}
	case g.accept("columns"):
		for {
			if _, ok := g.column(); !ok {
				return
			}
			if !g.accept(",") {
				break
			}
		}
	default:
		if _, ok := g.column(); !ok {
			return
		}
	}
	if g.accept("header", "row") {
		g.next()
	}
	if !g.take("in") || g.lacks(PlaceHole) {
		return
	}
	g.next()
	for g.peek().kind != tokenEnd && g.peek().glue { // the sheet after a file in quotes
		g.next()
	}
	g.clauses()
}

func (g *holeFinder) clauses() {
	if g.lacks(WordHole, clauses...) {
		return
	}
	if g.accept("where") {
		for {
			if !g.condition() || g.lacks(WordHole, "and", "for each", "matched by") {
				return
			}
			if !g.accept("and") {
				break
			}
		}
	}
	switch {
	case g.accept("for"):
		if g.take("each") {
			g.column()
		}
	case g.accept("matched"):
		if g.take("by") {
			g.column()
		}
	}
}

// condition goes through one condition; it is false where the hole lies in it.
func (g *holeFinder) condition() bool {
	if g.accept("row", "is", "visible") {
		return true
	}
	name, ok := g.column("row is visible")
	if !ok || g.lacks(WordHole, "=", "<>", "<", "<=", ">", ">=", "is missing", "is present", "is one of") {
		return false
	}
	g.hole.Column = name
	switch {
	case g.accept("is"):
		if g.lacks(WordHole, "missing", "present", "one of") {
			return false
		}
		if !g.accept("one") {
			g.next()
			return true
		}
		if !g.take("of") {
			return false
		}
		for {
			if g.lacks(ValueHole) {
				return false
			}
			g.next()
			if !g.accept(";") {
				return true
			}
		}
	case g.peek().kind == tokenSign:
		g.next()
		if g.lacks(ValueHole) {
			return false
		}
		g.next()
		return true
	}
	return false
}
