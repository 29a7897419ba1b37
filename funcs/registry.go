package funcs

import "slices"

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
