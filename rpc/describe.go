package rpc

import (
	"math"
	"strconv"

	"halfwidth/funcs"
)

// description is a function's descriptor on the wire; descriptionSchema
// describes it.
type description struct {
	Name         string              `json:"name"`
	Family       string              `json:"family"`
	Version      int                 `json:"version"`
	Summary      string              `json:"summary"`
	Inputs       []inputDescription  `json:"inputs"`
	Alternatives [][]wayDescription  `json:"alternatives"`
	Paired       bool                `json:"paired"`
	Results      []resultDescription `json:"results"`
	Table        []resultDescription `json:"table"`
	Findings     []findingMeaning    `json:"findings"`
	Assumptions  []string            `json:"assumptions"`
	Citations    []string            `json:"citations"`
	Example      exampleDescription  `json:"example"`
	Schemas      schemas             `json:"schemas"`
}

type inputDescription struct {
	Name     string   `json:"name"`
	Kind     string   `json:"kind"`
	Summary  string   `json:"summary"`
	Accepts  string   `json:"accepts"` // in words
	Unit     string   `json:"unit"`
	Choices  []string `json:"choices,omitempty"`
	Default  any      `json:"default,omitempty"`
	Required bool     `json:"required"` // whatever else is given
}

type wayDescription struct {
	Needs  []string          `json:"needs"`
	May    []string          `json:"may,omitempty"`
	Unless map[string]string `json:"unless,omitempty"`
}

type resultDescription struct {
	Name    string `json:"name"`
	Kind    string `json:"kind"`
	Summary string `json:"summary"`
	Unit    string `json:"unit"`
}

type findingMeaning struct {
	Code    string `json:"code"`
	Meaning string `json:"meaning"`
}

type exampleDescription struct {
	Label     string   `json:"label"`
	Arguments object   `json:"arguments"`
	Results   object   `json:"results"`
	Table     []object `json:"table,omitempty"`
	Tolerance float64  `json:"tolerance"`
	Source    string   `json:"source"`
}

type schemas struct {
	Arguments object `json:"arguments"`
	Outcome   object `json:"outcome"`
}

func describe(f *funcs.Function) description {
	d := description{
		Name: f.Name, Family: f.Family, Version: f.Version, Summary: f.Summary,
		Inputs: []inputDescription{}, Alternatives: [][]wayDescription{}, Paired: f.Paired,
		Results: describeResults(append(f.Results[:len(f.Results):len(f.Results)], funcs.CommonResults...)), Table: describeResults(f.Table),
		Findings:    []findingMeaning{},
		Assumptions: append([]string{}, f.Assumptions...), Citations: append([]string{}, f.Citations...),
		Example: exampleDescription{Label: f.Example.Label, Arguments: wireArguments(f.Example.Arguments), Results: wireArguments(f.Example.Want),
			Tolerance: f.Example.Tolerance, Source: f.Example.Source},
		Schemas: schemas{append(object{{"$schema", dialect}}, argumentsSchema(f)...), append(object{{"$schema", dialect}}, outcomeSchema(f)...)},
	}
	for _, in := range f.Inputs {
		input := inputDescription{Name: in.Name, Kind: in.Kind.String(), Summary: in.Summary, Accepts: form(in), Unit: in.Unit.String(),
			Choices: in.Choices, Required: f.Required(in.Name)}
		if in.Default != nil {
			input.Default = wireValue(in.Default)
		}
		d.Inputs = append(d.Inputs, input)
	}
	for _, one := range f.OneOf {
		var ways []wayDescription
		for _, way := range one {
			ways = append(ways, wayDescription{way.Needs, way.May, way.Unless})
		}
		d.Alternatives = append(d.Alternatives, ways)
	}
	for _, k := range f.Findings {
		d.Findings = append(d.Findings, findingMeaning{k.Code, k.Meaning})
	}
	for _, row := range f.Example.WantRows {
		d.Example.Table = append(d.Example.Table, wireArguments(row))
	}
	return d
}

func describeResults(list []funcs.Result) []resultDescription {
	out := []resultDescription{}
	for _, r := range list {
		out = append(out, resultDescription{r.Name, r.Kind.String(), r.Summary, r.Unit.String()})
	}
	return out
}

func wireArguments(list []funcs.Argument) object {
	o := object{}
	for _, a := range list {
		o = append(o, entry{a.Name, wireValue(a.Value)})
	}
	return o
}

// wireValue gives a value of the catalogue as a client writes it in a request.
func wireValue(value any) any {
	switch v := value.(type) {
	case float64:
		if math.IsInf(v, 1) {
			return funcs.Infinite
		}
		return shortNumber(v)
	case []float64:
		return Series(v)
	case funcs.List:
		if v.Names == nil {
			return Series(v.Values)
		}
		o := object{}
		for i, name := range v.Names {
			o = append(o, entry{name, shortNumber(v.Values[i])})
		}
		return o
	case []funcs.Group:
		o := object{}
		for _, g := range v {
			o = append(o, entry{g.Name, Series(g.Values)})
		}
		return o
	case funcs.From:
		return wireValue(v.Value)
	}
	return value
}

// shortNumber is a number written as all others are; NaN is null.
type shortNumber float64

// MarshalJSON writes the shortest text that reads back the same.
func (x shortNumber) MarshalJSON() ([]byte, error) {
	if math.IsInf(float64(x), 0) {
		return nil, strconv.ErrRange
	}
	return appendNumber(nil, float64(x)), nil
}
