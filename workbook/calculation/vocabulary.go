package calculation

import (
	"slices"
	"sync"

	"halfwidth/funcs"
)

// vocabulary is the names that a block knows: those of all functions, or of
// one.
type vocabulary struct {
	inputs, results []string
}

// words gives the names that a block of f knows; of all functions where f is
// nil.
func words(f *funcs.Function) vocabulary {
	if f == nil {
		return allWords()
	}
	return wordsOf([]*funcs.Function{f})
}

var allWords = sync.OnceValue(func() vocabulary { return wordsOf(funcs.All()) })

func wordsOf(list []*funcs.Function) vocabulary {
	var v vocabulary
	add := func(names *[]string, name string) {
		if !slices.Contains(*names, name) {
			*names = append(*names, name)
		}
	}
	for _, f := range list {
		for _, in := range f.Inputs {
			add(&v.inputs, in.Name)
		}
		for _, r := range f.Results {
			add(&v.results, r.Name)
		}
	}
	for _, r := range funcs.CommonResults {
		add(&v.results, r.Name)
	}
	return v
}

func (v vocabulary) hasInput(name string) bool  { return slices.Contains(v.inputs, name) }
func (v vocabulary) hasResult(name string) bool { return slices.Contains(v.results, name) }

// nearly gives the name that a header probably meant: one letter off, two in
// names of nine letters or more.
func (v vocabulary) nearly(header string) string {
	n := len(header)
	if n < 5 {
		return ""
	}
	edits := 1
	if n >= 9 {
		edits = 2
	}
	for e := 1; e <= edits; e++ {
		for _, list := range [][]string{v.inputs, v.results, {"label", "table-sheet"}} {
			for _, name := range list {
				if within(header, name, e) {
					return name
				}
			}
		}
	}
	return ""
}

// within reports whether a few insertions, deletions, replacements or exchanges
// of neighbours turn a into b.
func within(a, b string, edits int) bool {
	for len(a) > 0 && len(b) > 0 && a[0] == b[0] {
		a, b = a[1:], b[1:]
	}
	if len(a) == 0 || len(b) == 0 {
		return len(a)+len(b) <= edits
	}
	if edits == 0 {
		return false
	}
	swapped := len(a) > 1 && len(b) > 1 && a[0] == b[1] && a[1] == b[0] && within(a[2:], b[2:], edits-1)
	return swapped || within(a[1:], b, edits-1) || within(a, b[1:], edits-1) || within(a[1:], b[1:], edits-1)
}

// options lists the inputs that `default NAME` may set: levels, choices,
// yes-no, and numbers with a default wherever they are taken. The others are
// data.
var options = sync.OnceValue(func() []string {
	var names []string
	data := map[string]bool{} // inputs that are data to some function
	for _, f := range funcs.All() {
		for i := range f.Inputs {
			in := &f.Inputs[i]
			if _, met := data[in.Name]; !met {
				names = append(names, in.Name)
			}
			data[in.Name] = data[in.Name] || !mayBeSet(in)
		}
	}
	names = slices.DeleteFunc(names, func(name string) bool { return data[name] })
	return append(names, decimalMark)
})

// decimalMark is the option that is no input: how text files write numbers.
const decimalMark = "decimal-mark"

func mayBeSet(in *funcs.Input) bool {
	switch in.Kind {
	case funcs.Level, funcs.Choice, funcs.YesNo:
		return true
	case funcs.Number, funcs.Count, funcs.Numbers:
		return in.Default != nil
	}
	return false
}
