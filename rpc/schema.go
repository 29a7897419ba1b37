package rpc

import (
	"math"
	"slices"

	"halfwidth/funcs"
)

// Schemas are JSON Schema 2020-12, without references, so that each stands for
// itself. x-unit says how a value's unit follows from the sample's: same,
// squared or none.

// dialect stands at the root of a schema that is served by itself.
const dialect = "https://json-schema.org/draft/2020-12/schema"

// argumentsSchema describes the arguments of a function. What it takes is
// well formed; a list of the wrong length, say, is found out only by working out.
func argumentsSchema(f *funcs.Function) object {
	properties, required := object{}, []string{}
	for _, in := range f.Inputs {
		properties = append(properties, entry{in.Name, inputSchema(in)})
		if f.Required(in.Name) {
			required = append(required, in.Name)
		}
	}
	s := object{{"title", "arguments of " + f.Name}, {"type", "object"}, {"properties", properties},
		{"required", required}, {"additionalProperties", false}}
	var ways []object
	for _, one := range f.OneOf {
		ways = append(ways, object{{"oneOf", waysSchema(one)}})
	}
	switch len(ways) {
	case 0:
		return s
	case 1:
		return append(s, ways[0]...)
	}
	return append(s, entry{"allOf", ways})
}

// waysSchema describes each way: what it needs is there, and nothing that
// belongs to other ways alone.
func waysSchema(one funcs.OneOf) []object {
	var members []string
	for _, way := range one {
		for _, name := range slices.Concat(way.Needs, way.May) {
			if !slices.Contains(members, name) {
				members = append(members, name)
			}
		}
	}
	var out []object
	for _, way := range one {
		needs, foreign, either := []string{}, object{}, []object{}
		for _, name := range way.Needs {
			if instead := way.Unless[name]; instead != "" {
				either = append(either, object{{"anyOf", []object{{{"required", []string{name}}}, {{"required", []string{instead}}}}}})
			} else {
				needs = append(needs, name)
			}
		}
		for _, name := range members {
			if !slices.Contains(way.Needs, name) && !slices.Contains(way.May, name) {
				foreign = append(foreign, entry{name, false})
			}
		}
		s := object{{"required", needs}}
		if len(foreign) > 0 {
			s = append(s, entry{"properties", foreign})
		}
		if len(either) > 0 {
			s = append(s, entry{"allOf", either})
		}
		out = append(out, s)
	}
	return out
}

// inputSchema describes what may stand under an input's name.
func inputSchema(in funcs.Input) object {
	s := object{{"description", in.Summary}}
	if in.Default != nil {
		s = append(s, entry{"default", wireValue(in.Default)})
	}
	number := numberSchema(in.Domain, in.Kind == funcs.Count)
	element := number
	if in.MayBeGaps {
		element = object{{"anyOf", []object{number, {{"type", "null"}}}}}
	}
	list := object{{"type", "array"}, {"items", element}, {"minItems", 1}}
	switch in.Kind {
	case funcs.YesNo:
		return append(s, entry{"type", "boolean"})
	case funcs.Text:
		return append(s, entry{"type", "string"}, entry{"minLength", 1})
	case funcs.Choice:
		return append(s, entry{"enum", in.Choices})
	case funcs.Level:
		return append(append(s, number...), entry{"x-unit", in.Unit.String()})
	}
	s = append(s, entry{"x-unit", in.Unit.String()})
	switch in.Kind {
	case funcs.Numbers:
		byName := object{{"type", "object"}, {"additionalProperties", element}, {"minProperties", 1}}
		if in.Most > 0 {
			list, byName = append(list, entry{"maxItems", in.Most}), append(byName, entry{"maxProperties", in.Most})
		}
		return append(s, entry{"anyOf", []object{list, packedSchema(), byName, expressionSchema()}})
	case funcs.Sample:
		return append(s, entry{"anyOf", []object{list, packedSchema(), expressionSchema()}})
	case funcs.Samples:
		byName := object{{"type", "object"}, {"additionalProperties", object{{"anyOf", []object{list, packedSchema()}}}}, {"minProperties", 1}}
		if in.Most > 0 {
			byName = append(byName, entry{"maxProperties", in.Most})
		}
		return append(s, entry{"anyOf", []object{byName, expressionSchema()}})
	}
	forms := []object{number}
	if in.Infinite {
		forms = append(forms, object{{"const", funcs.Infinite}})
	}
	return append(s, entry{"anyOf", append(forms, expressionSchema())})
}

// packedSchema describes a list of doubles in base64.
func packedSchema() object {
	return object{{"type", "object"}, {"description", "doubles as 8 bytes each, lowest byte first, in base64; NaN is a gap"},
		{"properties", object{{packedName, object{{"type", "string"}, {"contentEncoding", "base64"}}}}},
		{"required", []string{packedName}}, {"additionalProperties", false}}
}

func expressionSchema() object {
	return object{{"type", "string"}, {"minLength", 1}, {"description", "a sample expression, such as: minutes in Trips where depot = North"}}
}

// numberSchema describes the numbers of a domain.
func numberSchema(d funcs.Domain, whole bool) object {
	s := object{{"type", "number"}}
	if d.Whole || whole {
		s = object{{"type", "integer"}}
	}
	if !math.IsInf(d.Low, -1) {
		s = append(s, entry{bound("inimum", d.LowOpen, "m", "exclusiveM"), shortNumber(d.Low)})
	}
	const wholeDoubles = 1 << 53 // as good as none
	if !math.IsInf(d.High, 1) && d.High != wholeDoubles {
		s = append(s, entry{bound("aximum", d.HighOpen, "m", "exclusiveM"), shortNumber(d.High)})
	}
	return s
}

func bound(word string, open bool, closedStart, openStart string) string {
	if open {
		return openStart + word
	}
	return closedStart + word
}

// outcomeSchema describes the outcomes of a function, or of all where it is nil.
func outcomeSchema(f *funcs.Function) object {
	name, results := object{{"type", "string"}}, object{{"type", "object"}, {"additionalProperties", object{{"type", []string{"number", "string", "boolean"}}}}}
	values := results
	title := "outcome"
	if f != nil {
		title = "outcome of " + f.Name
		name = object{{"const", f.Name}}
		results = resultsSchema(slices.Concat(f.Results, funcs.CommonResults))
		values = resultsSchema(f.Table)
	}
	properties := object{{"function", name}, {"status", statusSchema()}, {"results", results}}
	if f == nil || f.Table != nil {
		row := object{{"type", "object"}, {"properties", object{{"values", values}, {"status", statusSchema()}, {"note", object{{"type", "string"}}}}},
			{"required", []string{"values", "status", "note"}}, {"additionalProperties", false}}
		properties = append(properties, entry{"table", object{{"type", "array"}, {"items", row}}})
	}
	properties = append(properties, entry{"findings", object{{"type", "array"}, {"items", findingSchema()}}})
	return object{{"title", title}, {"type", "object"}, {"properties", properties},
		{"required", []string{"function", "status", "results", "findings"}}, {"additionalProperties", false},
		{"if", object{{"properties", object{{"status", object{{"const", string(funcs.StatusRefused)}}}}}}},
		{"then", object{{"properties", object{{"results", object{{"maxProperties", 0}}}, {"table", false}, {"findings", object{{"minItems", 1}}}}}}}}
}

func resultsSchema(list []funcs.Result) object {
	properties := object{}
	for _, r := range list {
		s := object{{"description", r.Summary}}
		switch r.Kind {
		case funcs.Whole:
			s = append(s, entry{"type", "integer"})
		case funcs.Text:
			s = append(s, entry{"type", "string"})
		case funcs.YesNo:
			s = append(s, entry{"type", "boolean"})
		default:
			s = append(s, entry{"type", "number"}, entry{"x-unit", r.Unit.String()})
		}
		properties = append(properties, entry{r.Name, s})
	}
	return object{{"type", "object"}, {"properties", properties}, {"additionalProperties", false}}
}

func statusSchema() object {
	return object{{"enum", []string{string(funcs.StatusOK), string(funcs.StatusCaution), string(funcs.StatusRefused)}}}
}

func findingSchema() object {
	text := object{{"type", "string"}}
	severity := []string{funcs.Information.String(), funcs.Caution.String(), funcs.Refused.String()}
	return object{{"type", "object"},
		{"properties", object{{"code", text}, {"severity", object{{"enum", severity}}}, {"input", text}, {"message", text},
			{"cells", object{{"type", "array"}, {"items", text}}}}},
		{"required", []string{"code", "severity", "message"}}, {"additionalProperties", false}}
}

// blocksSchema describes the cells of a sheet, in blocks.
func blocksSchema() object {
	strict := func(name string, schema any) object {
		return object{{"type", "object"}, {"properties", object{{name, schema}}}, {"required", []string{name}}, {"additionalProperties", false}}
	}
	number, text := object{{"type", "number"}}, object{{"type", "string"}}
	values := []object{number, text, {{"type", "boolean"}}, {{"type", "null"}},
		strict("date", object{{"anyOf", []object{number, text}}, {"description", "2026-03-02, 2026-03-02T08:15:00, or days since 1899-12-30"}}),
		strict("duration", object{{"type", "number"}, {"description", "in days"}}), strict("error", text)}
	cell := object{{"anyOf", append(slices.Clip(values), strict("formula", object{{"anyOf", values}, {"description", "what the formula gives; null where that is not known"}}))}}
	list := object{{"type", "array"}, {"items", cell}}
	block := func(name string, schema object) object {
		return object{{"type", "object"}, {"properties", object{{"at", object{{"type", "string"}, {"description", "the first cell, such as B2"}}}, {name, schema}}},
			{"required", []string{"at", name}}, {"additionalProperties", false}}
	}
	return object{{"type", "array"}, {"items", object{{"oneOf", []object{
		block("rows", object{{"type", "array"}, {"items", list}}),
		block("column", object{{"anyOf", []object{list, packedSchema()}}}),
		strict("clear", object{{"type", "string"}, {"description", "a range that is blank from now on, such as A5:C9; in sheets/didChange only"}}),
	}}}}}
}
