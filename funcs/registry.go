package funcs

import (
	"fmt"
	"regexp"
	"slices"
	"strings"
)

// Family is a named part of the catalogue.
type Family struct {
	Name      string
	Summary   string
	Functions []*Function
}

// families lists the catalogue in order; a new family is one line here.
var families = []Family{
	{"samples", "what a sample looks like", samplesFamily},
	{"normal", "arithmetic of normal and related distributions", normalFamily},
	{"averages", "how sure is this average", averages},
	{"spread", "how much do values vary", spread},
	{"differences", "is it real", differences},
	{"counts", "shares and rates", counts},
	{"checks", "may the answer be trusted", checksFamily},
	{"sizes", "how many must be measured", sizesFamily},
}

var byName = func() map[string]*Function {
	m := map[string]*Function{}
	for _, family := range families {
		for _, f := range family.Functions {
			f.Family = family.Name
			m[f.Name] = f
		}
	}
	return m
}()

// Families gives the families of the catalogue in order.
func Families() []Family { return slices.Clone(families) }

// All gives every function in catalogue order.
func All() []*Function {
	var out []*Function
	for _, family := range families {
		out = append(out, family.Functions...)
	}
	return out
}

// Names gives the name of every function in catalogue order.
func Names() []string {
	var out []string
	for _, f := range All() {
		out = append(out, f.Name)
	}
	return out
}

// Lookup finds a function by its exact name; the error is an *UnknownError with
// the closest names.
func Lookup(name string) (*Function, error) {
	if f, ok := byName[name]; ok {
		return f, nil
	}
	return nil, &UnknownError{What: "function", Name: name, Closest: Closest(name, Names())}
}

var hyphenated = regexp.MustCompile(`^[a-z][a-z0-9]*(-[a-z0-9]+)*$`)

// Validate reports what is wrong with a descriptor: names, alternatives,
// defaults and citations that do not hold together. Tests call it for all.
func (f *Function) Validate() error {
	var faults []string
	fault := func(format string, a ...any) { faults = append(faults, fmt.Sprintf(format, a...)) }
	seen := map[string]bool{}
	for _, in := range f.Inputs {
		if !hyphenated.MatchString(in.Name) || seen[in.Name] {
			fault("input name %q is not a hyphenated name of its own", in.Name)
		}
		seen[in.Name] = true
		if in.Summary == "" {
			fault("input %s has no summary", in.Name)
		}
		if in.Kind == Choice && !slices.Contains(in.Choices, fmt.Sprint(in.Default)) {
			fault("input %s: its default is none of its choices", in.Name)
		}
	}
	for _, one := range f.OneOf {
		for _, way := range one {
			for _, n := range slices.Concat(way.Needs, way.May) {
				if _, ok := f.Input(n); !ok {
					fault("alternative names %q, which is no input", n)
				}
			}
		}
	}
	given := map[string]bool{}
	for _, r := range slices.Concat(f.Results, CommonResults) {
		if !hyphenated.MatchString(r.Name) || given[r.Name] {
			fault("result name %q is not a hyphenated name of its own", r.Name)
		}
		given[r.Name] = true
		if r.Summary == "" {
			fault("result %s has no summary", r.Name)
		}
	}
	for name, missing := range map[string]bool{
		"name": !hyphenated.MatchString(f.Name), "summary": f.Summary == "", "citation": len(f.Citations) == 0, "version": f.Version < 1,
		"results": len(f.Results)+len(f.Table) == 0, "example": len(f.Example.Arguments) == 0, "computation": f.compute == nil,
	} {
		if missing {
			fault("no %s", name)
		}
	}
	if faults != nil {
		slices.Sort(faults)
		return fmt.Errorf("%s: %s", f.Name, strings.Join(faults, "; "))
	}
	return nil
}
