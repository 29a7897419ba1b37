package rpc

import (
	"encoding/json"
	"errors"
	"fmt"
	"math"
	"reflect"
	"strconv"
	"strings"
)

// decodeStrict fills in a struct from params by name. Members are matched by
// their exact names; one that is unknown, given twice, null or of another kind
// is refused, and so is the lack of one that is not marked omitempty. Fields are
// string, bool, int (a whole number), float64, []float64 (gaps NaN), Value, Faulty,
// structs, and slices of and pointers to these. A progress token may always come along.
func decodeStrict(raw []byte, target any) error {
	v := Value{Kind: Object}
	if len(raw) > 0 {
		var err error
		if v, err = parseFaulty(raw, ""); err != nil {
			return err
		}
	}
	return fill(reflect.ValueOf(target).Elem(), v, "params", 0)
}

// Faulty is a value whose parts may have faults, so that who looks into it can
// tell of all of them at once.
type Faulty struct{ Value }

var (
	faultyType  = reflect.TypeFor[Faulty]()
	valueType   = reflect.TypeFor[Value]()
	cellsType   = reflect.TypeFor[cellBlocks]()
	numbersType = reflect.TypeFor[[]float64]()
)

// fill stores v, which came under the name given, as an element from 1 on or as
// the whole (0).
func fill(target reflect.Value, v Value, name string, element int) error {
	if target.Type() == cellsType {
		return nil // read apart, by readCells
	}
	if target.Type() == faultyType {
		target.Set(reflect.ValueOf(Faulty{v}))
		return nil
	}
	if parts := target.Kind() == reflect.Struct || target.Kind() == reflect.Slice; v.Fault != nil && (!parts || target.Type() == valueType || target.Type() == numbersType) {
		return v.Fault
	}
	if target.Type() == valueType {
		target.Set(reflect.ValueOf(v))
		return nil
	}
	if v.Kind == Null {
		return badElement(v.Pointer, name, element, "is null", "leave it out, or give "+wanted(target.Type()))
	}
	switch {
	case target.Kind() == reflect.Pointer:
		target.Set(reflect.New(target.Type().Elem()))
		return fill(target.Elem(), v, name, element)
	case target.Type() == numbersType && v.Kind == Numbers:
		target.Set(reflect.ValueOf(v.Numbers))
		return nil
	case target.Type() == numbersType:
		return fillNothing(target, v, name, element)
	case target.Kind() == reflect.Struct && v.Kind == Object:
		return fillStruct(target, v)
	case target.Kind() == reflect.Slice && (v.Kind == List || v.Kind == Numbers):
		elements := v.Elements()
		target.Set(reflect.MakeSlice(target.Type(), len(elements), len(elements)))
		for i := range elements {
			if err := fill(target.Index(i), elements[i], name, i+1); err != nil {
				return err
			}
		}
		return nil
	case target.Kind() == reflect.String && v.Kind == Text:
		target.SetString(v.Text)
		return nil
	case target.Kind() == reflect.Bool && v.Kind == YesNo:
		target.SetBool(v.YesNo)
		return nil
	case target.Kind() == reflect.Float64 && v.Kind == Number:
		target.SetFloat(v.Number)
		return nil
	case target.Kind() == reflect.Int && v.Kind == Number:
		const most = 1 << 53 // beyond it not every whole number is a double
		if v.Number != math.Trunc(v.Number) || math.Abs(v.Number) > most {
			advice := "give a whole number"
			if math.Abs(v.Number) > most {
				advice += fmt.Sprintf(" from -%d to %d", most, most)
			}
			return badElement(v.Pointer, name, element, "is "+string(appendNumber(nil, v.Number)), advice)
		}
		target.SetInt(int64(v.Number))
		return nil
	}
	return fillNothing(target, v, name, element)
}

// fillNothing says what came and what belongs there. Of a list of numbers it
// names the first element that is none.
func fillNothing(target reflect.Value, v Value, name string, element int) error {
	if target.Type() == numbersType && v.Kind == List {
		for i, inner := range v.List {
			if inner.Kind != Number && inner.Kind != Null {
				return badElement(inner.Pointer, name, i+1, "is "+inner.Kind.String(), "give a number, or null for a gap")
			}
		}
	}
	return badElement(v.Pointer, name, element, "is "+v.Kind.String(), "give "+wanted(target.Type()))
}

func wanted(t reflect.Type) string {
	switch {
	case t == numbersType:
		return Numbers.String()
	case t == cellsType:
		return "a list of blocks of cells"
	case t.Kind() == reflect.Pointer:
		return wanted(t.Elem())
	case t.Kind() == reflect.String:
		return Text.String()
	case t.Kind() == reflect.Bool:
		return YesNo.String()
	case t.Kind() == reflect.Int:
		return "a whole number"
	case t.Kind() == reflect.Float64:
		return Number.String()
	case t.Kind() == reflect.Slice:
		return List.String()
	}
	return Object.String()
}

// fieldOf reads a field's json tag; embedded structs are not used in params.
func fieldOf(f reflect.StructField) (name string, required bool) {
	name, options, _ := strings.Cut(f.Tag.Get("json"), ",")
	return name, options != "omitempty"
}

// needed reports whether a member may not be left out.
func needed(f reflect.StructField) bool {
	_, required := fieldOf(f)
	return required
}

func fillStruct(target reflect.Value, v Value) error {
	t := target.Type()
	names := make([]string, t.NumField())
	places := make(map[string]int, t.NumField())
	for i := range t.NumField() {
		names[i], _ = fieldOf(t.Field(i))
		places[names[i]] = i
	}
	given := make(map[string]bool, len(v.Members))
	for _, m := range v.Members {
		i, known := places[m.Name]
		switch {
		case given[m.Name]:
			return m.Value.Fault
		case known && m.Value.Kind == Null && needed(t.Field(i)) && t.Field(i).Type != cellsType && t.Field(i).Type != faultyType:
			return badParams(m.Value.Pointer, m.Name, "is null", "give "+wanted(t.Field(i).Type))
		case known:
			if err := fill(target.Field(i), m.Value, m.Name, 0); err != nil {
				return err
			}
		case m.Name == progressMember && v.Pointer == "":
			if m.Value.Fault != nil {
				return m.Value.Fault
			}
		default:
			return unknownMember(m, names)
		}
		given[m.Name] = true
	}
	for i := range t.NumField() {
		if member := names[i]; needed(t.Field(i)) && !given[member] {
			return badParams(pointerTo(v.Pointer, member), member, "is missing", "give "+wanted(t.Field(i).Type))
		}
	}
	return nil
}

func unknownMember(m Member, names []string) error {
	advice := "no members are taken here"
	if len(names) > 0 {
		advice = "the members are " + strings.Join(names, ", ")
	}
	fault := badParams(m.Value.Pointer, sayName(m.Name), "is unknown", advice)
	if best := near(m.Name, names); best != "" {
		fault = badParams(m.Value.Pointer, sayName(m.Name), "is unknown", fmt.Sprintf("did you mean %s?", best))
		fault.Message = strings.TrimSuffix(fault.Message, ".")
		fault.Data.Suggestion = best
	}
	fault.Data.Argument = m.Name
	return fault
}

// sayName gives a name that the client made up as a message says it: in quotes
// where it is empty, and cut where it would swell the message.
func sayName(name string) string {
	if name == "" || len(name) > longestSaid {
		return quoted(name)
	}
	return name
}

// partAt gives what a pointer leads to as messages name it: the member, and the
// element of its list, counted from 1, or 0.
func partAt(pointer string) (argument string, element int) {
	last := lastOf(pointer)
	if i, err := strconv.Atoi(last); err == nil {
		return lastOf(strings.TrimSuffix(pointer, "/"+last)), i + 1
	}
	return last, 0
}

// lastOf gives the last name in a JSON Pointer.
func lastOf(pointer string) string {
	return unescaped(pointer[strings.LastIndexByte(pointer, '/')+1:])
}

// firstOf gives the first name in a JSON Pointer.
func firstOf(pointer string) string {
	first, _, _ := strings.Cut(strings.TrimPrefix(pointer, "/"), "/")
	return unescaped(first)
}

func unescaped(name string) string { return strings.NewReplacer("~1", "/", "~0", "~").Replace(name) }

// decodeLenient is encoding/json's reading with our errors.
func decodeLenient(raw []byte, target any) error {
	if len(raw) == 0 {
		return nil
	}
	err := json.Unmarshal(raw, target)
	var kind *json.UnmarshalTypeError
	switch {
	case err == nil:
		return nil
	case errors.As(err, &kind):
		pointer := ""
		if kind.Field != "" {
			pointer = "/" + strings.ReplaceAll(kind.Field, ".", "/")
		}
		return badParams(pointer, lastOf(pointer), "is "+kindWord(kind.Value), "give "+wanted(kind.Type))
	}
	return badParams("", "params", "cannot be read: "+err.Error(), "")
}

// kindWord puts encoding/json's word for a kind of value into ours.
func kindWord(word string) string {
	switch word, _, _ = strings.Cut(word, " "); word {
	case "string":
		return Text.String()
	case "number":
		return Number.String()
	case "bool":
		return YesNo.String()
	case "array":
		return List.String()
	}
	return Object.String()
}
