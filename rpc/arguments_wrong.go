package rpc

import (
	"cmp"
	"fmt"
	"slices"
	"strconv"
	"strings"

	"halfwidth/funcs"
)

// wrong is what is told of one bad argument.
type wrong struct {
	position int // of the input in the catalogue
	data     ErrorData
	message  string // the sentence without its full stop
}

// refuse notes a bad argument.
func (q *question) refuse(e *funcs.ArgumentError) {
	q.refuseAt(e, q.pointer(e))
}

func (q *question) refuseAt(e *funcs.ArgumentError, pointer string) {
	f := q.function
	reason, suggestion := e.Reason, e.Advice
	if e.Got != "" {
		reason = "is " + e.Got + ", but " + reason
	}
	names := make([]string, len(f.Inputs))
	for i, in := range f.Inputs {
		names[i] = in.Name
	}
	position, said := slices.Index(names, e.Argument), *e
	if position < 0 {
		position, said.Argument = len(names), sayName(e.Argument)
		if best := near(e.Argument, names); best != "" {
			suggestion = best
		}
	}
	q.wrong = append(q.wrong, wrong{position, ErrorData{Function: f.Name, Argument: e.Argument, Pointer: pointer, Reason: reason, Suggestion: suggestion}, said.Error()})
}

// refuseFault notes an argument whose JSON has a fault.
func (q *question) refuseFault(m Member) {
	fault := m.Value.Fault.Data
	e := &funcs.ArgumentError{Argument: m.Name, Index: -1, Reason: fault.Reason, Advice: fault.Suggestion}
	inside := m.Value
	for inside.Pointer != fault.Pointer {
		name := firstOf(fault.Pointer[len(inside.Pointer):])
		i := slices.IndexFunc(inside.Members, func(m Member) bool { return m.Name == name })
		if i < 0 {
			if n, err := strconv.Atoi(name); err == nil && inside.Kind != Object {
				e.Index = n
			}
			break
		}
		inside, e.Group = inside.Members[i].Value, name
	}
	q.refuseAt(e, fault.Pointer)
}

// pointer gives the place in the params that an error of the catalogue is about.
func (q *question) pointer(e *funcs.ArgumentError) string {
	at := pointerTo(q.arguments.Pointer, e.Argument)
	v, given := q.arguments.member(e.Argument)
	if !given {
		return at
	}
	if v.Kind == Object {
		if e.Group == "" { // the name itself is at fault
			if e.Index >= 0 && e.Index < len(v.Members) {
				at = v.Members[e.Index].Value.Pointer
			}
			return at
		}
		if v, given = v.member(e.Group); !given {
			return at
		}
		at = v.Pointer
	}
	if e.Index >= 0 && !v.Packed && (v.Kind == Numbers || v.Kind == List) {
		at = pointerTo(at, strconv.Itoa(e.Index))
	}
	return at
}

func (v Value) member(name string) (Value, bool) {
	i := slices.IndexFunc(v.Members, func(m Member) bool { return m.Name == name })
	if i < 0 {
		return Value{}, false
	}
	return v.Members[i].Value, true
}

// wrongArguments is the one error for all bad arguments of a call, in
// catalogue order.
func wrongArguments(all []wrong) *Error {
	slices.SortStableFunc(all, func(a, b wrong) int { return cmp.Compare(a.position, b.position) })
	data, message := all[0].data, all[0].message
	for _, w := range all[1:] {
		data.Others = append(data.Others, w.data)
	}
	if n := len(all); n > 1 {
		message = fmt.Sprintf("The arguments have %d faults, the first: %s", n, message)
	}
	if !strings.HasSuffix(message, "?") {
		message += "."
	}
	return &Error{Code: CodeInvalidParams, Message: message, Data: &data}
}
