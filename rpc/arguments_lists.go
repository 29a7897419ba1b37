package rpc

import (
	"fmt"
	"math"

	"halfwidth/funcs"
)

// takeNumbers reads a list of numbers, or an object with a number under each name.
func (q *question) takeNumbers(in funcs.Input, v Value) {
	if v.Kind != Object {
		if q.plainList(in, "", v, in.MayBeGaps) {
			q.values[in.Name] = funcs.List{Values: v.Numbers}
		}
		return
	}
	list := funcs.List{Names: make([]string, len(v.Members)), Values: make([]float64, len(v.Members))}
	for i, m := range v.Members {
		list.Names[i], list.Values[i] = m.Name, m.Value.Number
		switch {
		case m.Name == "":
			q.refuse(&funcs.ArgumentError{Argument: in.Name, Index: i, Got: `""`, Reason: "must be a name of its own", Advice: "give each number a name"})
			return
		case m.Value.Kind == Number:
		case m.Value.Kind == Null && in.MayBeGaps:
			list.Values[i] = math.NaN()
		default:
			q.refuse(notANumber(in, m.Name, i, m.Value, in.MayBeGaps))
			return
		}
	}
	q.values[in.Name] = list
}

func (q *question) takeSample(in funcs.Input, v Value) {
	if q.plainList(in, "", v, true) {
		q.values[in.Name] = v.Numbers
	}
}

// takeSamples reads an object with a list of numbers under each name.
func (q *question) takeSamples(in funcs.Input, v Value) {
	groups := make([]funcs.Group, len(v.Members))
	for i, m := range v.Members {
		if m.Name == "" {
			q.refuse(&funcs.ArgumentError{Argument: in.Name, Index: i, Got: `""`, Reason: "must be a name of its own", Advice: "give each group a name"})
			return
		}
		if m.Value.Kind != Numbers && m.Value.Kind != List {
			q.refuse(&funcs.ArgumentError{Argument: in.Name, Group: m.Name, Index: -1, Got: shown(m.Value),
				Reason: "must be a list of numbers", Advice: `give a list, or {"float64le": "BASE64"}`})
			return
		}
		if !q.plainList(in, m.Name, m.Value, true) {
			return
		}
		groups[i] = funcs.Group{Name: m.Name, Values: m.Value.Numbers}
	}
	q.values[in.Name] = groups
}

// plainList refuses a list that is too long or holds anything but numbers and,
// where they are allowed, gaps.
func (q *question) plainList(in funcs.Input, group string, v Value, gaps bool) bool {
	if n, most := max(len(v.Numbers), len(v.List)), q.limits.SampleValues; n > most {
		q.refuse(&funcs.ArgumentError{Argument: in.Name, Group: group, Index: -1, Got: fmt.Sprintf("a list of %d numbers", n),
			Reason: fmt.Sprintf("may hold at most %d", most), Advice: "give fewer, or start the server with a higher --max-sample-values"})
		return false
	}
	for i, x := range v.Numbers {
		if math.IsNaN(x) && !gaps {
			q.refuse(notANumber(in, group, i, Value{}, gaps))
			return false
		}
	}
	for i, element := range v.List {
		if element.Kind != Number && (element.Kind != Null || !gaps) {
			q.refuse(notANumber(in, group, i, element, gaps))
			return false
		}
	}
	return true
}

func notANumber(in funcs.Input, group string, index int, v Value, gaps bool) *funcs.ArgumentError {
	e := &funcs.ArgumentError{Argument: in.Name, Group: group, Index: index, Got: shown(v), Reason: "must be a number"}
	if gaps {
		e.Reason = "must be a number, or null for a gap"
	}
	return e
}
