package funcs

import (
	"maps"
	"math"
	"slices"
	"strings"
	"sync"
)

// CommonResults are the results that every function gives besides its own.
var CommonResults = []Result{
	{Name: "status", Kind: Text, Summary: "ok, caution or refused"},
	{Name: "note", Kind: Text, Summary: "all findings, the most serious first"},
	{Name: "used", Kind: Whole, Summary: "how many values were used"},
	{Name: "skipped", Kind: Whole, Summary: "how many were left out though their cells were not blank, or their pair was missing"},
	{Name: "level", Kind: Number, Summary: "the confidence or significance used"},
	{Name: "direction", Kind: Text, Summary: "either, above or below"},
	{Name: "method", Kind: Text, Summary: "how the answer was computed, in one phrase"},
	{Name: "citation", Kind: Text, Summary: "where the method is published"},
	{Name: "sentence", Kind: Text, Summary: "the answer as a sentence fit for a document"},
	{Name: "range", Kind: Text, Summary: "the cells and conditions that were read"},
	{Name: "version", Kind: Whole, Summary: "the version of the function"},
	{Name: "fingerprint", Kind: Text, Summary: "16 hexadecimal digits that stand for the function and all its inputs"},
}

// Row is one row of a table that a function gives.
type Row struct {
	Values   map[string]any // by column name; float64, int, string or bool
	Findings []Finding
}

// Status is the row's own status.
func (r Row) Status() Status { return StatusOf(r.Findings) }

// Outcome is what a call gave. A refused outcome has no results.
type Outcome struct {
	Function  *Function
	Status    Status
	Findings  []Finding       // the most serious first
	Rows      []Row           // the table, where the function gives one
	Arguments map[string]From // as bound, defaults included

	results map[string]any
	late    func() string // the fingerprint, worked out when it is first asked for
}

// Get gives a result by name: a float64, int, string or bool. Status and note
// are there always, the others only where they exist.
func (o *Outcome) Get(name string) (any, bool) {
	if v, ok := o.results[name]; ok || name != "fingerprint" || o.late == nil {
		return v, ok
	}
	return o.late(), true
}

// Forget lets go of arguments that need not be held any longer. The fingerprint
// stands for all of them: it is worked out before they go, or goes with them.
func (o *Outcome) Forget(keepFingerprint bool, names ...string) {
	for _, name := range names {
		delete(o.Arguments, name)
	}
	if keepFingerprint && o.late != nil {
		o.results["fingerprint"] = o.late()
	}
	o.late = nil
}

// Results lists what exists, in catalogue order: the function's own results,
// then the common ones. A refused outcome has none.
func (o *Outcome) Results() []Argument {
	if o.Status == StatusRefused {
		return nil
	}
	var out []Argument
	for _, list := range [][]Result{o.Function.Results, CommonResults} {
		for _, r := range list {
			if v, ok := o.Get(r.Name); ok {
				out = append(out, Argument{r.Name, v})
			}
		}
	}
	return out
}

// finish adds the common results.
func (c *Call) finish() *Outcome {
	SortFindings(c.findings)
	o := &Outcome{Function: c.Function, Status: StatusOf(c.findings), Findings: c.findings, Arguments: maps.Clone(c.args)}
	if o.Status == StatusRefused {
		o.results = map[string]any{"status": string(o.Status), "note": Note(c.findings)}
		return o
	}
	o.results, o.Rows = c.results, c.rows
	c.set("status", string(o.Status))
	c.set("note", Note(c.findings))
	used, skipped, sampled := c.tally()
	if sampled || c.counted {
		c.set("used", used)
		c.set("skipped", skipped)
	}
	_, levelled := c.results["level"] // by a function that takes both and used one
	for _, name := range []string{"confidence", "significance"} {
		if v, ok := c.args[name].Value.(float64); ok && !levelled {
			c.set("level", v)
		}
	}
	if c.has("direction") {
		c.set("direction", direction.Of(c))
	}
	c.set("method", c.method)
	c.set("citation", strings.Join(c.Function.Citations, "; "))
	c.set("sentence", c.sentence)
	if r := c.ranges(); r != "" {
		c.set("range", r)
	}
	c.set("version", c.Function.Version)
	o.late = sync.OnceValue(c.fingerprint)
	return o
}

// tally counts the values used and those left out, over all sample inputs.
func (c *Call) tally() (used, skipped int, sampled bool) {
	for _, in := range c.Function.Inputs {
		from, ok := c.args[in.Name]
		if !ok {
			continue
		}
		skipped += c.origin(in.Name).Skipped
		switch v := from.Value.(type) {
		case []float64:
			sampled = true
			if !c.counted {
				used += present(v)
			}
		case []Group:
			for _, g := range v {
				used += present(g.Values)
			}
			sampled = true
		}
	}
	if c.counted {
		used = c.used
	}
	return used, skipped + c.dropped, sampled
}

// present counts the values that are no gaps.
func present(v []float64) int {
	n := 0
	for _, x := range v {
		if !math.IsNaN(x) {
			n++
		}
	}
	return n
}

// withoutGaps gives the values that are no gaps, in their order.
func withoutGaps(v []float64) []float64 {
	if present(v) == len(v) {
		return v
	}
	return slices.DeleteFunc(slices.Clone(v), math.IsNaN)
}

// ranges joins the origins of the inputs; the input's name stands before each
// where there are several.
func (c *Call) ranges() string {
	var names, texts []string
	for _, in := range c.Function.Inputs {
		if r := c.origin(in.Name).Range; r != "" {
			names, texts = append(names, in.Name), append(texts, r)
		}
	}
	if len(texts) == 1 {
		return texts[0]
	}
	for i := range texts {
		texts[i] = names[i] + ": " + texts[i]
	}
	return strings.Join(texts, "; ")
}

// RefusedOutcome is the outcome of a call that was refused before it was made,
// because its data could not be used.
func RefusedOutcome(f *Function, findings []Finding) *Outcome {
	SortFindings(findings)
	return &Outcome{Function: f, Status: StatusRefused, Findings: findings,
		results: map[string]any{"status": string(StatusRefused), "note": Note(findings)}}
}
