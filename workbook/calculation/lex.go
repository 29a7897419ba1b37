package calculation

import (
	"slices"
	"strings"
	"unicode"
	"unicode/utf8"

	"halfwidth/funcs"
)

// tokenKind is the kind of a token of a sample expression.
type tokenKind uint8

const (
	tokenEnd    tokenKind = iota
	tokenWord             // an unquoted word
	tokenQuoted           // a quoted name or text
	tokenSign             // ; , ( ) ! = <> < <= > >=
)

// token is one token of a sample expression. text is the word, what stands
// between the quotes, or the sign.
type token struct {
	kind tokenKind
	text string
	span Span
	glue bool // no space before it
}

// keywords count only outside quotes; a name that is one must be quoted.
var keywords = []string{"and", "by", "columns", "count", "each", "for", "header", "in", "is", "matched", "of", "one", "row", "sum", "where"}

func isKeyword(word string) bool { return slices.Contains(keywords, strings.ToLower(word)) }

// is reports whether the token is a keyword or a sign.
func (t token) is(word string) bool {
	return t.kind == tokenSign && t.text == word || t.kind == tokenWord && strings.EqualFold(t.text, word)
}

// found words the token for an error.
func (t token) found() string {
	switch t.kind {
	case tokenEnd:
		return "the end"
	case tokenQuoted:
		return quote(t.text)
	}
	return t.text
}

// closers are the quotes that end what the key began. A typographic quote may
// be ended by a straight one, since programs change quotes while one types.
var closers = map[rune]string{
	'"': `"`, '“': `”“"`, '„': `“”"`, '”': `”"`, '«': `»`, '»': `«»`,
	'\'': `'`, '‘': `’‘'`, '‚': `‘’'`, '’': `’'`,
}

// doubleQuotes end a word wherever they stand; single ones only begin a token,
// so that an apostrophe may stand in a word.
const doubleQuotes = "\"“”„«»"

// tokenize splits an expression. A stretch in quotes that does not end is
// an error.
func tokenize(text string) ([]token, *SyntaxError) {
	var tokens []token
	end := 0
	for i := 0; i < len(text); {
		r, size := utf8.DecodeRuneInString(text[i:])
		if unicode.IsSpace(r) {
			i += size
			continue
		}
		t := token{span: Span{i, i + size}, glue: i == end && i > 0}
		switch {
		case closers[r] != "":
			body, n := unquote(text[i+size:], closers[r])
			if n < 0 {
				return nil, &SyntaxError{Text: text, Span: Span{i, len(text)}, Found: text[i:],
					Want: "end the quote with " + string(firstRune(closers[r]))}
			}
			t.kind, t.text, t.span.End = tokenQuoted, body, i+size+n
		case signAt(text[i:]) != "":
			sign := signAt(text[i:])
			t.kind, t.text, t.span.End = tokenSign, plainSign(sign), i+len(sign)
		default:
			t.kind, t.span.End = tokenWord, i+wordLength(text[i:])
			t.text = text[i:t.span.End]
		}
		tokens = append(tokens, t)
		i, end = t.span.End, t.span.End
	}
	return append(tokens, token{kind: tokenEnd, span: Span{len(text), len(text)}}), nil
}

func firstRune(s string) rune {
	r, _ := utf8.DecodeRuneInString(s)
	return r
}

// unquote reads up to one of the closing quotes, a quote doubled inside
// standing for itself. It gives what stands between and the bytes taken with
// the closing quote, -1 where there is none.
func unquote(text, closing string) (string, int) {
	var b strings.Builder
	for i := 0; i < len(text); {
		r, size := utf8.DecodeRuneInString(text[i:])
		i += size
		if !strings.ContainsRune(closing, r) {
			b.WriteString(text[i-size : i])
			continue
		}
		if next, n := utf8.DecodeRuneInString(text[i:]); next != r || n == 0 {
			return b.String(), i
		}
		b.WriteRune(r)
		i += size
	}
	return "", -1
}

// signAt gives the sign that the text begins with, or "".
func signAt(text string) string {
	for _, sign := range [...]string{"<>", "<=", ">=", "!=", "==", "=<", "=>", "≤", "≥", "≠", "<", ">", "=", ";", ",", "(", ")", "!"} {
		if strings.HasPrefix(text, sign) {
			return sign
		}
	}
	return ""
}

// plainSign gives the sign that stands for another way of writing it.
func plainSign(sign string) string {
	switch sign {
	case "≤", "=<":
		return "<="
	case "≥", "=>":
		return ">="
	case "≠", "!=":
		return "<>"
	case "==":
		return "="
	}
	return sign
}

// wordLength is the length of the unquoted word that the text begins with.
func wordLength(text string) int {
	last := rune(0)
	for i, r := range text {
		if unicode.IsSpace(r) || strings.ContainsRune(doubleQuotes, r) || i > 0 && signAt(text[i:]) != "" {
			return i
		}
		if last == '/' && closers[r] != "" { // other-book.xlsx/'Night shift'
			return i
		}
		last = r
	}
	return len(text)
}

// isPlainWord reports whether the text, written without quotes, is one word
// and no keyword.
func isPlainWord(text string) bool {
	if text == "" || isKeyword(text) || !utf8.ValidString(text) {
		return false
	}
	r := firstRune(text)
	return closers[r] == "" && signAt(text) == "" && wordLength(text) == len(text)
}

// quote writes a text in double quotes, those inside doubled.
func quote(text string) string { return `"` + strings.ReplaceAll(text, `"`, `""`) + `"` }

// quoteAll puts double quotes round each text.
func quoteAll(texts []string) []string {
	out := make([]string, len(texts))
	for i, t := range texts {
		out[i] = quote(t)
	}
	return out
}

// SyntaxError says what is wrong with a sample expression, and where.
type SyntaxError struct {
	Text    string // the expression
	Span    Span   // the part that is wrong
	Found   string
	Want    string   // what to write instead
	Closest []string // names that exist, where one was misspelt
}

// Error words the fault: position, what was found, what to write.
func (e *SyntaxError) Error() string {
	var b strings.Builder
	b.WriteString("character ")
	b.WriteString(decimal(ByteToCharacter(e.Text, e.Span.Start)))
	if e.Found != "" {
		b.WriteString(", at " + e.Found)
	}
	b.WriteString(": " + e.Want)
	if len(e.Closest) > 0 {
		b.WriteString("; did you mean " + funcs.OrList(quoteAll(e.Closest)) + "?")
	}
	return b.String()
}
