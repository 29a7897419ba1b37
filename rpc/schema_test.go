package rpc

import (
	"bytes"
	"encoding/json"
	"maps"
	"math"
	"slices"
	"strings"
	"sync"
	"testing"

	"github.com/santhosh-tekuri/jsonschema/v6"

	"halfwidth/funcs"
)

func anyJSON(t *testing.T, text []byte) any {
	t.Helper()
	v, err := jsonschema.UnmarshalJSON(bytes.NewReader(text))
	if err != nil {
		t.Fatalf("%v: %s", err, text)
	}
	return v
}

func schemaText(t *testing.T, schema object) []byte {
	t.Helper()
	text, err := json.Marshal(schema)
	if err != nil {
		t.Fatal(err)
	}
	return text
}

var compiled sync.Map // of *jsonschema.Schema by their text

// compile reads a schema as JSON Schema 2020-12, and holds it against the
// schema of schemas.
func compile(t *testing.T, text []byte) *jsonschema.Schema {
	t.Helper()
	if s, ok := compiled.Load(string(text)); ok {
		return s.(*jsonschema.Schema)
	}
	c := jsonschema.NewCompiler()
	c.DefaultDraft(jsonschema.Draft2020)
	if err := c.AddResource("schema.json", anyJSON(t, text)); err != nil {
		t.Fatalf("%v: %s", err, text)
	}
	s, err := c.Compile("schema.json")
	if err != nil {
		t.Fatalf("%v: %s", err, text)
	}
	compiled.Store(string(text), s)
	return s
}

// validate fails where a value does not keep to a schema.
func validate(t *testing.T, schema, value []byte) {
	t.Helper()
	if err := compile(t, schema).Validate(anyJSON(t, value)); err != nil {
		t.Errorf("%v: %.2000s", err, value)
	}
}

// The schema of a function's arguments refuses what the catalogue refuses.
func TestSchemasRefuseWhatTheCatalogueRefuses(t *testing.T) {
	for _, f := range funcs.All() {
		schema := compile(t, schemaText(t, argumentsSchema(f)))
		_, example := exampleArguments(t, f)
		refused := func(what, name string, value any) {
			t.Helper()
			arguments := anyJSON(t, []byte(example)).(map[string]any)
			if value == nil {
				delete(arguments, name)
			} else {
				text, err := json.Marshal(value)
				if err != nil {
					t.Fatal(err)
				}
				arguments[name] = anyJSON(t, text)
			}
			if schema.Validate(arguments) == nil {
				t.Errorf("%s: the schema lets pass %s: %s = %v", f.Name, what, name, value)
			}
			text, err := json.Marshal(arguments)
			if err != nil {
				t.Fatal(err)
			}
			if err := checkArguments(t, f, string(text)); err == nil {
				t.Errorf("%s: the catalogue lets pass %s: %s = %v", f.Name, what, name, value)
			}
		}
		refused("an unknown member", "no-such-input", 1)
		refused("another case", strings.ToUpper(f.Inputs[0].Name), 1)
		for _, in := range f.Inputs {
			if f.Required(in.Name) {
				refused("a missing input", in.Name, nil)
			}
			refused("an empty object", in.Name, object{})
			switch in.Kind {
			case funcs.YesNo, funcs.Choice, funcs.Text:
				refused("a number", in.Name, 7)
			case funcs.Level:
				refused("a percentage", in.Name, 95)
				refused("a text", in.Name, "95%")
			case funcs.Number, funcs.Count:
				refused("a list", in.Name, []int{1})
			case funcs.Sample, funcs.Numbers:
				refused("a bare number", in.Name, 1)
				refused("a list with a text", in.Name, []any{1, "2"})
				refused("an empty list", in.Name, []any{})
			case funcs.Samples:
				refused("a list", in.Name, []int{1})
				refused("a text in a group", in.Name, object{{"North", []any{1, "2"}}})
			}
			if in.Kind == funcs.Number || in.Kind == funcs.Level || in.Kind == funcs.Count {
				for _, x := range outside(in.Domain) {
					refused("a number outside its domain", in.Name, x)
				}
			}
			if in.Kind == funcs.Numbers {
				for _, x := range outside(in.Domain) {
					refused("a list with a number outside its domain", in.Name, []float64{x})
				}
			}
		}
	}
}

// Of all the ways to give and leave out what has alternatives, the schema lets
// pass those that the catalogue lets pass.
func TestSchemasKnowTheAlternatives(t *testing.T) {
	for _, f := range funcs.All() {
		schema := compile(t, schemaText(t, argumentsSchema(f)))
		var members []string
		for _, one := range f.OneOf {
			for _, way := range one {
				members = append(members, slices.Concat(way.Needs, way.May, slices.Collect(maps.Values(way.Unless)))...)
			}
		}
		slices.Sort(members)
		members = slices.Compact(members)
		passed := 0
		for set := range 1 << len(members) {
			arguments := object{}
			for _, in := range f.Inputs {
				if i := slices.Index(members, in.Name); f.Required(in.Name) || i >= 0 && set>>i&1 == 1 {
					arguments = append(arguments, entry{in.Name, someValue(in)})
				}
			}
			text := schemaText(t, arguments)
			bySchema, byCatalogue := schema.Validate(anyJSON(t, text)), checkArguments(t, f, string(text))
			if (bySchema == nil) != (byCatalogue == nil) {
				t.Errorf("%s: %s\nschema: %v\ncatalogue: %v", f.Name, text, bySchema, byCatalogue)
			}
			if byCatalogue == nil {
				passed++
			}
		}
		if passed == 0 || len(members) > 0 && passed == 1<<len(members) {
			t.Errorf("%s: of %d sets of arguments %d pass", f.Name, 1<<len(members), passed)
		}
	}
}

// someValue gives a value that an input takes.
func someValue(in funcs.Input) any {
	x := 1.0
	for _, candidate := range []float64{1, 0.25, 10, in.Domain.Low, in.Domain.High} {
		if in.Domain.Contains(candidate) {
			x = candidate
			break
		}
	}
	switch in.Kind {
	case funcs.Choice:
		return in.Choices[0]
	case funcs.YesNo:
		return true
	case funcs.Text:
		return "North"
	case funcs.Numbers, funcs.Sample:
		return []float64{x}
	case funcs.Samples:
		return object{{"North", []float64{x}}}
	}
	return x
}

// outside gives numbers just outside a domain.
func outside(d funcs.Domain) []float64 {
	var out []float64
	if !math.IsInf(d.Low, -1) {
		low := math.Nextafter(d.Low, math.Inf(-1))
		if d.LowOpen {
			low = d.Low
		}
		if d.Whole {
			low = d.Low - 1
			out = append(out, d.Low+0.5)
		}
		out = append(out, low)
	}
	if !math.IsInf(d.High, 1) && d.High < 1<<53 {
		high := math.Nextafter(d.High, math.Inf(1))
		if d.HighOpen {
			high = d.High
		}
		if d.Whole {
			high = d.High + 1
		}
		out = append(out, high)
	}
	return out
}

// checkArguments reads arguments as a call does, without computing.
func checkArguments(t *testing.T, f *funcs.Function, arguments string) error {
	t.Helper()
	v, err := parseFaulty([]byte(arguments), "/arguments")
	if err != nil {
		t.Fatal(err)
	}
	q := &question{function: f, arguments: v, limits: DefaultLimits()}
	q.read()
	if _, err := q.readTexts(t.Context()); err != nil {
		return err
	}
	if err := f.Check(q.values); !q.takeErrors(err) && err != nil {
		return err
	}
	if q.wrong != nil {
		return wrongArguments(q.wrong)
	}
	return nil
}
