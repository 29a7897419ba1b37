package rpc

import (
	"bytes"
	"context"
	"errors"
	"fmt"
	"reflect"
	"strings"

	"halfwidth/funcs"
)

// functionMethods ask the catalogue.
func functionMethods() []Method {
	return []Method{
		Strict(Method{Name: "functions/list", Doc: "Lists the catalogue, or one family of it.",
			Result: listSchema, Announce: announceCatalogue}, listFunctions),
		Strict(Method{Name: "functions/describe", Doc: "Gives all that is known of a function, with JSON Schemas of its arguments and its outcome.",
			Result: descriptionSchema}, describeFunction),
		{Name: "functions/answer", Doc: "Works out one function; a statistical refusal is an outcome with the status refused, not an error.",
			Params: reflect.TypeFor[answerParams](), Result: func() object { return outcomeSchema(nil) }, Handler: answer},
		{Name: "functions/answerMany", Doc: "Works out many functions, in their order; a faulty call fails alone.",
			Params: reflect.TypeFor[answerManyParams](), Result: answersSchema, Handler: answerMany},
	}
}

type listParams struct {
	Family *string `json:"family,omitempty" doc:"a family; left out, all are listed"`
}

type listed struct {
	Name    string `json:"name"`
	Family  string `json:"family"`
	Summary string `json:"summary"`
}

func listFunctions(_ context.Context, _ *Call, p listParams) (any, error) {
	list := []listed{}
	var families []string
	for _, family := range funcs.Families() {
		families = append(families, family.Name)
		if p.Family != nil && *p.Family != family.Name {
			continue
		}
		for _, f := range family.Functions {
			list = append(list, listed{f.Name, f.Family, f.Summary})
		}
	}
	if len(list) == 0 {
		e := badParams("/family", "family", "is "+quoted(*p.Family)+", which is no family", "the families are "+strings.Join(families, ", "))
		if best := near(*p.Family, families); best != "" {
			e.Data.Suggestion = best
		}
		return nil, e
	}
	return list, nil
}

type describeParams struct {
	Name string `json:"name" doc:"the function's name"`
}

func describeFunction(_ context.Context, _ *Call, p describeParams) (any, error) {
	f, err := lookUp(p.Name, "/name")
	if err != nil {
		return nil, err
	}
	return describe(f), nil
}

// lookUp finds a function; where there is none the error names the closest.
func lookUp(name, pointer string) (*funcs.Function, error) {
	f, err := funcs.Lookup(name)
	var unknown *funcs.UnknownError
	if !errors.As(err, &unknown) {
		return f, err
	}
	e := badParams(pointer, "name", "is "+quoted(name)+", which is no function", "functions/list gives the names")
	if len(unknown.Closest) > 0 {
		e.Data.Suggestion = unknown.Closest[0]
		e.Message = fmt.Sprintf("There is no function %s%s", quoted(name), ask(unknown.Closest[0]))
	}
	return nil, e
}

type answerParams struct {
	Name      string  `json:"name" doc:"the function's name"`
	Arguments Faulty  `json:"arguments" doc:"its arguments by name; functions/describe gives their schema"`
	Book      *string `json:"book,omitempty" doc:"the open book whose sheets expressions name"`
}

// quickBytes is how long the params may be that are read in turn.
const quickBytes = 32 << 10

func answer(_ context.Context, call *Call) (any, error) {
	open := call.Session.books
	read := func() (*question, error) {
		var p answerParams
		if err := decodeStrict(call.Params, &p); err != nil {
			return nil, err
		}
		return call.ask(p.Name, p.Arguments.Value, p.Book, open, "")
	}
	if len(call.Params) > quickBytes {
		return Later(func(ctx context.Context) (any, error) {
			q, err := read()
			if err != nil {
				return nil, err
			}
			return call.outcome(ctx, q)
		})
	}
	q, err := read()
	if err != nil {
		return nil, err
	}
	work := func(ctx context.Context) (any, error) { return call.outcome(ctx, q) }
	if q.long() {
		return Later(work)
	}
	return call.soon(q.function.Name, work)
}

// ask makes a question of the members of a call, which lie at pointer.
func (c *Call) ask(name string, arguments Value, book *string, open books, pointer string) (*question, error) {
	f, err := lookUp(name, pointerTo(pointer, "name"))
	if err != nil {
		return nil, err
	}
	if arguments.Kind != Object {
		return nil, badParams(arguments.Pointer, "arguments", "is "+shown(arguments), "give an object with a member for each argument")
	}
	q := &question{function: f, arguments: arguments, limits: c.Session.limits}
	source, fault := open.source(book)
	if fault != nil {
		return nil, fault
	}
	q.book = source
	return q, nil
}

// outcome works a question out and writes its outcome.
func (c *Call) outcome(ctx context.Context, q *question) (encoded, error) {
	o, err := q.answer(ctx)
	var text encoded
	if err == nil {
		text, err = encodeOutcome(o)
	}
	if errors.Is(err, funcs.ErrInternal) {
		c.Session.remarks.say("fault in %s: %v", c.Method, err)
		err = &Error{Code: CodeInternal, Message: internalFault}
	}
	return text, err
}

type answerManyParams struct {
	Calls []Faulty `json:"calls" doc:"the calls, each with name and arguments as in functions/answer"`
	Book  *string  `json:"book,omitempty" doc:"the open book whose sheets expressions name"`
	Token Value    `json:"workDoneToken,omitempty" doc:"under which progress is reported: a text or a whole number"`
}

// oneOfMany is an element of the calls of functions/answerMany.
type oneOfMany struct {
	Name      string `json:"name"`
	Arguments Faulty `json:"arguments"`
}

func answerMany(_ context.Context, call *Call) (any, error) {
	open := call.Session.books
	return Later(func(ctx context.Context) (any, error) {
		var p answerManyParams
		if err := decodeStrict(call.Params, &p); err != nil {
			return nil, err
		}
		if _, fault := open.source(p.Book); fault != nil {
			return nil, fault
		}
		progress := call.Progress(fmt.Sprintf("Working out %d calls", len(p.Calls)))
		answers := []byte{'['}
		for i, one := range p.Calls {
			outcome, err := call.guard(func() (any, error) { return call.oneOfMany(ctx, one.Value, p.Book, open) })
			if ctx.Err() != nil {
				return nil, ctx.Err()
			}
			if i > 0 {
				answers = append(answers, ',')
			}
			if text, ok := outcome.(encoded); ok && err == nil {
				answers = append(append(append(answers, `{"outcome":`...), text...), '}')
			} else {
				answers = append(append(append(answers, `{"error":`...), encodeError(err)...), '}')
			}
			progress.Report(i+1, len(p.Calls), "")
		}
		return encoded(append(answers, ']')), nil
	})
}

// encodeError writes an error as it stands among the answers to many calls.
func encodeError(err error) []byte {
	var b bytes.Buffer
	_ = encodeJSON(&b, wireError(err)) // texts and a whole number cannot fail
	return b.Bytes()
}

func (c *Call) oneOfMany(ctx context.Context, v Value, book *string, open books) (any, error) {
	var one oneOfMany
	if err := fill(reflect.ValueOf(&one).Elem(), v, "call", 0); err != nil {
		return nil, err
	}
	q, err := c.ask(one.Name, one.Arguments.Value, book, open, v.Pointer)
	if err != nil {
		return nil, err
	}
	return c.outcome(ctx, q)
}
