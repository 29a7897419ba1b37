package rpc

import (
	"context"
	"errors"
	"fmt"
	"slices"
	"strconv"
	"strings"
	"unicode/utf8"

	"halfwidth/funcs"
	"halfwidth/workbook/calculation"
)

// question is one call of the catalogue: a function, and its arguments as they
// came.
type question struct {
	function  *funcs.Function
	arguments Value
	book      calculation.Source // that expressions read; nil where none was named
	limits    Limits

	values map[string]any // by the catalogue's names and types, or unread
	texts  map[string]string
	wrong  []wrong
}

// unread stands for an argument that was given and has no value, so that the
// catalogue does not take it for missing.
type unread struct{}

// String is how the catalogue's errors show it; no argument is shown so.
func (unread) String() string { return "\x00" }

// long reports that a question may take more than a few milliseconds: it draws
// at random, integrates the range of many, searches for a size, works out the
// rows of a table, brings many numbers or reads sheets.
func (q *question) long() bool {
	_, draws := q.function.Input("resamples")
	_, ranges := q.function.Input("groups")
	return draws || ranges || q.function.Family == "sizes" || q.function.Table != nil || numbersIn(q.arguments) > quickNumbers || q.book != nil
}

const quickNumbers = 1000

func numbersIn(v Value) int {
	n := len(v.Numbers)
	for _, m := range v.Members {
		n += numbersIn(m.Value)
	}
	return n
}

// answer works the question out. Its error is an *Error about the arguments,
// the context's, or wraps funcs.ErrInternal.
func (q *question) answer(ctx context.Context) (*funcs.Outcome, error) {
	q.read()
	refusal, err := q.readTexts(ctx)
	if err != nil {
		return nil, err
	}
	if refusal == nil && q.wrong == nil {
		outcome, err := q.function.Answer(ctx, q.values)
		if q.takeErrors(err) {
			return nil, wrongArguments(q.wrong)
		}
		return outcome, err
	}
	if err := q.function.Check(q.values); !q.takeErrors(err) && err != nil {
		return nil, err
	}
	if q.wrong != nil {
		return nil, wrongArguments(q.wrong)
	}
	return funcs.RefusedOutcome(q.function, refusal.Findings), nil
}

// takeErrors takes over the catalogue's errors about arguments, and reports
// whether there was such an error.
func (q *question) takeErrors(err error) bool {
	var wrong funcs.ArgumentErrors
	if !errors.As(err, &wrong) {
		return false
	}
	for _, e := range wrong {
		if e.Got != (unread{}).String() {
			q.refuse(e)
		}
	}
	return true
}

// read turns the arguments into values and texts.
func (q *question) read() {
	q.values, q.texts = make(map[string]any, len(q.arguments.Members)), map[string]string{}
	for _, m := range q.arguments.Members {
		in, known := q.function.Input(m.Name)
		switch {
		case !known:
			q.values[m.Name] = unread{} // told of by the catalogue, with the closest name
		case m.Value.Fault != nil:
			q.refuseFault(m)
		default:
			q.take(in, m.Value)
		}
		if _, ok := q.values[m.Name]; !ok {
			q.values[m.Name] = unread{}
		}
	}
}

// take reads one argument that has no fault by itself.
func (q *question) take(in funcs.Input, v Value) {
	if v.Kind == Null {
		q.refuse(&funcs.ArgumentError{Argument: in.Name, Index: -1, Reason: "is null", Advice: "leave it out, or give " + form(in)})
		return
	}
	if v.Kind == Text && readsText(in.Kind) {
		q.takeText(in, v.Text)
		return
	}
	switch in.Kind {
	case funcs.YesNo:
		if v.Kind == YesNo {
			q.values[in.Name] = v.YesNo
			return
		}
	case funcs.Choice:
		if v.Kind == Text && slices.Contains(in.Choices, v.Text) {
			q.values[in.Name] = v.Text
			return
		}
		q.refuseText(in, v, in.Choices)
		return
	case funcs.Text:
		if v.Kind == Text {
			q.values[in.Name] = v.Text
			return
		}
	case funcs.Level:
		if v.Kind == Number && in.Domain.Contains(v.Number) {
			q.values[in.Name] = v.Number
			return
		}
		q.refuse(wrongLevel(in, v))
		return
	case funcs.Number, funcs.Count:
		if v.Kind == Number {
			q.values[in.Name] = v.Number
			return
		}
	case funcs.Numbers:
		if v.Kind == Numbers || v.Kind == List || v.Kind == Object {
			q.takeNumbers(in, v)
			return
		}
	case funcs.Sample:
		if v.Kind == Numbers || v.Kind == List {
			q.takeSample(in, v)
			return
		}
	case funcs.Samples:
		if v.Kind == Object {
			q.takeSamples(in, v)
			return
		}
	}
	q.refuse(&funcs.ArgumentError{Argument: in.Name, Index: -1, Got: shown(v), Reason: "must be " + form(in)})
}

// readsText reports whether a text in the place of the kind is an expression.
func readsText(k funcs.Kind) bool {
	switch k {
	case funcs.Number, funcs.Count, funcs.Numbers, funcs.Sample, funcs.Samples:
		return true
	}
	return false
}

// takeText keeps a text for readTexts.
func (q *question) takeText(in funcs.Input, text string) {
	refuse := func(reason, advice string) {
		q.refuse(&funcs.ArgumentError{Argument: in.Name, Index: -1, Reason: reason, Advice: advice})
	}
	switch {
	case in.Infinite && text == funcs.Infinite:
		q.values[in.Name] = text
		return
	case strings.TrimSpace(text) == "":
		refuse("is an empty text", "leave it out, or give "+form(in))
		return
	case (in.Kind == funcs.Number || in.Kind == funcs.Count) && isWord(text):
		words := []string{}
		if in.Infinite {
			words = append(words, funcs.Infinite)
		}
		q.refuseText(in, Value{Kind: Text, Text: text}, words)
		return
	}
	if q.book == nil {
		if place := placeIn(text); place != "" {
			refuse("names "+place+", but no book is open", "name an open book under book, or give the numbers themselves")
			return
		}
	}
	q.texts[in.Name] = text
}

// isWord reports whether a text is one word, and no expression.
func isWord(text string) bool {
	_, err := calculation.ParseExpression(text)
	return err != nil && !strings.ContainsAny(text, " ,;")
}

// refuseText notes a value that is none of a few words, with the closest.
func (q *question) refuseText(in funcs.Input, v Value, words []string) {
	e := &funcs.ArgumentError{Argument: in.Name, Index: -1, Got: shown(v), Reason: "must be " + form(in)}
	best := ""
	if v.Kind == Text {
		best = near(v.Text, words)
	}
	if best != "" {
		e.Advice = fmt.Sprintf("did you mean %q?", best)
	}
	q.refuse(e)
	q.wrong[len(q.wrong)-1].data.Suggestion = best
}

// placeIn gives the sheet, file or range that an expression reads, or "".
func placeIn(text string) string {
	e, err := calculation.ParseExpression(text)
	if err != nil {
		return "" // told of when it is read
	}
	var at *calculation.PlaceRef
	switch e := e.(type) {
	case *calculation.Query:
		at = &e.Place
	case *calculation.Range:
		if at = e.Place; at == nil {
			return "the range " + e.Area.String()
		}
	default:
		return ""
	}
	switch {
	case at.File == "":
		return fmt.Sprintf("the sheet %q", at.Name)
	case at.Name == "":
		return fmt.Sprintf("the file %q", at.File)
	}
	return fmt.Sprintf("the sheet %q of the file %q", at.Name, at.File)
}

// readTexts reads the expressions, together, so that samples which must pair
// are read row by row.
func (q *question) readTexts(ctx context.Context) (*calculation.Refusal, error) {
	if len(q.texts) == 0 {
		return nil, nil
	}
	values, err := calculation.Arguments(ctx, q.book, q.function, q.texts, calculation.FileOptions{})
	for name, value := range values {
		q.values[name] = value
	}
	var refusal *calculation.Refusal
	if q.takeErrors(err) || errors.As(err, &refusal) {
		return refusal, nil
	}
	return nil, err
}

// wrongLevel words what is wrong with a level, and what to write.
func wrongLevel(in funcs.Input, v Value) *funcs.ArgumentError {
	e := &funcs.ArgumentError{Argument: in.Name, Index: -1, Got: shown(v), Reason: "must be " + form(in)}
	share := func(percent float64) string { return strconv.FormatFloat(percent/100, 'g', 15, 64) }
	switch percent, marked := strings.CutSuffix(strings.TrimSpace(v.Text), "%"); {
	case v.Kind == Number && v.Number > 1 && v.Number <= 100:
		e.Advice = "write " + share(v.Number)
	case v.Kind == Number && !(v.Number > 0 && v.Number < 1):
		e.Advice = "write a share such as 0.95"
	case marked:
		if x, err := strconv.ParseFloat(strings.TrimSpace(percent), 64); err == nil && x > 0 && x < 100 {
			e.Advice = "write " + share(x)
		}
	}
	return e
}

// form words how a value of an input is written in JSON.
func form(in funcs.Input) string {
	switch in.Kind {
	case funcs.YesNo:
		return "true or false"
	case funcs.Numbers:
		return "a list of numbers, or an object with a number under each name"
	case funcs.Sample:
		return `a list of numbers, {"float64le": "BASE64"} or a sample expression`
	case funcs.Samples:
		return "an object with a list of numbers under each name, or a sample expression"
	case funcs.Text, funcs.Choice:
		return in.Expects()
	}
	if expects := in.Expects(); !strings.HasPrefix(expects, "a ") && !strings.HasPrefix(expects, "any ") {
		return "a number, " + expects
	}
	return in.Expects()
}

// shown words a value that does not fit.
func shown(v Value) string {
	switch v.Kind {
	case Number:
		return string(appendNumber(nil, v.Number))
	case YesNo:
		return strconv.FormatBool(v.YesNo)
	case Text:
		return "the text " + quoted(v.Text)
	}
	return v.Kind.String()
}

// longestSaid is how many bytes of a client's text a message repeats.
const longestSaid = 60

// quoted puts a text in quotes, cut where it would swell a message.
func quoted(text string) string {
	if len(text) > longestSaid {
		cut := longestSaid
		for cut > longestSaid-utf8.UTFMax && !utf8.RuneStart(text[cut]) {
			cut--
		}
		text = text[:cut] + "…"
	}
	return strconv.Quote(text)
}
