package funcs

import "slices"

// Kind is the kind of an input or a result.
type Kind int

// The kinds. Results are of kind Number, Whole, Text or YesNo only.
const (
	Number  Kind = iota // a float64
	Count               // a whole number, as an int
	Level               // a float64 strictly between 0 and 1, written 0.95 or 95%
	Choice              // one of a few words
	YesNo               // a bool
	Text                // a string
	Numbers             // a List: numbers, with a name to each or without
	Sample              // a sample: ordered numbers, []float64, NaN for a gap
	Samples             // samples by name, []Group
	Whole               // a result that is a whole number, as an int
)

// String is the kind's name in documentation and on the wire.
func (k Kind) String() string {
	return [...]string{"number", "count", "level", "choice", "yes-no", "text", "numbers", "sample", "samples", "whole-number"}[k]
}

// Unit says how the unit of a value follows from the unit of the sample.
type Unit int

// The relations of a value's unit to the sample's.
const (
	NoUnit      Unit = iota // a pure number
	SameUnit                // the sample's unit
	SquaredUnit             // its square
)

// String words the relation.
func (u Unit) String() string { return [...]string{"none", "same", "squared"}[u] }

// Input describes one input of a function.
type Input struct {
	Name      string
	Kind      Kind
	Domain    Domain   // of the number, or of each number of a list; the zero Domain for texts
	Unit      Unit     // relation to the sample's unit
	Default   any      // value when not given, or nil
	Choices   []string // the words of a Choice
	Optional  bool     // may be absent though it has no default
	Infinite  bool     // the text "infinite" is a value too (degrees of freedom)
	MayBeGaps bool     // gaps are allowed in the list (they keep their place)
	Most      int      // how many numbers of a list, or groups, there may be; 0 for no bound
	Instead   string   // what to do where there are more
	Summary   string   // one phrase, for help and hover
}

// Way is one of several ways of giving the same thing, such as a sample or its
// mean, sd and n.
type Way struct {
	Needs  []string          // all must be given
	May    []string          // may be given with them
	Unless map[string]string // a needed input that may be left out when another is given
}

// OneOf lists ways of which exactly one must be given, whole.
type OneOf []Way

// Result describes one result of a function.
type Result struct {
	Name    string
	Kind    Kind // Number, Whole, Text or YesNo
	Unit    Unit
	Summary string
}

// Example is a worked example. Want holds the results that its source gives,
// WantRows the values of the table's rows, in order (a row without any is not
// compared); each to the relative tolerance Tolerance.
type Example struct {
	Label     string
	Arguments []Argument
	Want      []Argument
	WantRows  [][]Argument
	Tolerance float64
	Source    string
}

// Argument is a named value.
type Argument struct {
	Name  string
	Value any
}

// Function is one entry of the catalogue. Everything that help, completion,
// schemas, starter workbooks and the reference need stands here.
type Function struct {
	Name        string
	Family      string // set by the registry
	Version     int    // raised when the same inputs give other digits
	Summary     string
	Inputs      []Input // in catalogue order
	OneOf       []OneOf
	Paired      bool     // sample and second-sample are two values of the same rows
	Results     []Result // the function's own; the common ones belong to all
	Table       []Result // columns of the table, where the function gives one
	Findings    []FindingKind
	Assumptions []string
	Citations   []string
	Example     Example

	compute func(*Call) error
}

// Input finds an input by name.
func (f *Function) Input(name string) (Input, bool) {
	if i := f.position(name); i < len(f.Inputs) {
		return f.Inputs[i], true
	}
	return Input{}, false
}

// Result finds a result by name, common ones included.
func (f *Function) Result(name string) (Result, bool) {
	for _, list := range [][]Result{f.Results, CommonResults} {
		if i := slices.IndexFunc(list, func(r Result) bool { return r.Name == name }); i >= 0 {
			return list[i], true
		}
	}
	return Result{}, false
}

// Required reports whether a call without the input is refused whatever else
// it gives: the input has no default, is not optional, and no alternative
// stands for it.
func (f *Function) Required(name string) bool {
	in, ok := f.Input(name)
	if !ok || in.Default != nil || in.Optional {
		return false
	}
	for _, one := range f.OneOf {
		for _, way := range one {
			if slices.Contains(way.Needs, name) || slices.Contains(way.May, name) {
				return false
			}
		}
	}
	return true
}

// Group is a named sample.
type Group struct {
	Name   string
	Values []float64
}

// List is a list of numbers; Names, where present, has a name to each.
type List struct {
	Names  []string
	Values []float64
}

// Origin says where a value came from, when it was read from a sheet or file.
type Origin struct {
	Range     string    // addresses and conditions as resolved, for the result `range`
	Unit      string    // the unit written in the header, or ""
	Skipped   int       // cells left out though they were not blank
	Findings  []Finding // what the reading found; Input is filled in by the call
	Unordered bool      // neighbours in the list are not neighbours in time
	Facts     *Facts    // what is known of the values from other calls; may be nil
	// Address gives the cell of value i (of a group, by its index), or "".
	Address func(group, i int) string
}

// From is a value together with its origin; it may stand for the value in
// the arguments of a call.
type From struct {
	Value  any
	Origin *Origin

	byDefault bool // the call did not give it
}
