package funcs

import (
	"context"
	"fmt"
	"slices"
)

// bind turns the arguments into typed values, fills in defaults, and reports
// every bad argument at once, in catalogue order.
func (f *Function) bind(ctx context.Context, arguments map[string]any) (*Call, error) {
	c := &Call{Function: f, ctx: ctx, args: make(map[string]From, len(f.Inputs)), results: map[string]any{}, known: map[listKey]*listFacts{}}
	b := &binder{function: f, call: c}
	for _, in := range f.Inputs {
		raw, given := arguments[in.Name]
		if !given || raw == nil {
			continue
		}
		from, ok := raw.(From)
		if !ok {
			from = From{Value: raw}
		}
		if v, ok := b.value(in, from.Value); ok {
			c.args[in.Name] = From{Value: v, Origin: from.Origin}
			c.remember(c.args[in.Name])
		} else {
			b.bad = append(b.bad, in.Name)
		}
	}
	b.unknown(arguments)
	for _, one := range f.OneOf {
		b.alternatives(one)
	}
	for _, in := range f.Inputs {
		if c.has(in.Name) || slices.Contains(b.bad, in.Name) {
			continue
		}
		if in.Default != nil {
			c.args[in.Name] = From{Value: in.Default, byDefault: true}
		} else if f.Required(in.Name) {
			b.fail(in.Name, "", "is missing", "give "+in.Summary)
		}
	}
	if len(b.errors) > 0 {
		slices.SortStableFunc(b.errors, func(x, y *ArgumentError) int { return f.position(x.Argument) - f.position(y.Argument) })
		return nil, b.errors
	}
	c.unusualLevels()
	c.originFindings()
	return c, nil
}

// position is the place of an input in the catalogue; unknown names come last.
func (f *Function) position(name string) int {
	if i := slices.IndexFunc(f.Inputs, func(in Input) bool { return in.Name == name }); i >= 0 {
		return i
	}
	return len(f.Inputs)
}

// binder gathers the faults of one call.
type binder struct {
	function *Function
	call     *Call
	errors   ArgumentErrors
	bad      []string // inputs given with a bad value
}

func (b *binder) fail(input, got, reason, advice string) {
	b.failAt(input, "", -1, got, reason, advice)
}

func (b *binder) failAt(input, group string, index int, got, reason, advice string) {
	b.errors = append(b.errors, &ArgumentError{Function: b.function.Name, Argument: input, Group: group, Index: index,
		Got: got, Reason: reason, Advice: advice})
}

// unknown reports arguments that are no inputs of the function.
func (b *binder) unknown(arguments map[string]any) {
	names := make([]string, len(b.function.Inputs))
	for i, in := range b.function.Inputs {
		names[i] = in.Name
	}
	var strange []string
	for name := range arguments {
		if !slices.Contains(names, name) {
			strange = append(strange, name)
		}
	}
	slices.Sort(strange)
	for _, name := range strange {
		advice := "its inputs are " + AndList(names)
		if near := Closest(name, names); len(near) > 0 {
			advice = didYouMean(near)
		}
		b.fail(name, "", "is no input of "+b.function.Name, advice)
	}
}

// alternatives checks that exactly one way was given, whole.
func (b *binder) alternatives(one OneOf) {
	given := func(name string) bool { return b.call.has(name) || slices.Contains(b.bad, name) }
	var present []string // members given, in catalogue order
	for _, in := range b.function.Inputs {
		member := slices.ContainsFunc(one, func(w Way) bool { return slices.Contains(w.Needs, in.Name) || slices.Contains(w.May, in.Name) })
		if member && given(in.Name) {
			present = append(present, in.Name)
		}
	}
	var partial *Way // a way that holds all that was given, but lacks something
	var lacks []string
	for i, way := range one {
		holds := !slices.ContainsFunc(present, func(n string) bool { return !slices.Contains(way.Needs, n) && !slices.Contains(way.May, n) })
		if !holds {
			continue
		}
		var missing []string
		for _, n := range way.Needs {
			if !given(n) && !(way.Unless[n] != "" && given(way.Unless[n])) {
				missing = append(missing, n)
			}
		}
		if len(missing) == 0 {
			return
		}
		if len(present) > 0 && (partial == nil || len(missing) < len(lacks)) {
			partial, lacks = &one[i], missing
		}
	}
	switch {
	case partial != nil:
		b.fail(lacks[0], "", "is missing", fmt.Sprintf("with %s give %s too", AndList(present), AndList(lacks)))
	case len(present) == 0:
		b.fail(one[0].Needs[0], "", "is missing", "give "+one.String())
	default:
		b.fail(present[len(present)-1], "", "cannot be given together with "+AndList(present[:len(present)-1]), "give "+one.String())
	}
}

// String words the ways: "either sample, or mean with sd and n".
func (one OneOf) String() string {
	ways := make([]string, len(one))
	for i, w := range one {
		ways[i] = w.Needs[0]
		if len(w.Needs) > 1 {
			ways[i] += " with " + AndList(w.Needs[1:])
		}
		if len(w.May) > 0 {
			ways[i] += " (and perhaps " + AndList(w.May) + ")"
		}
	}
	if len(ways) == 1 {
		return ways[0]
	}
	text := "either " + ways[0]
	for _, w := range ways[1:] {
		text += ", or " + w
	}
	return text
}

// unusualLevels raises the caution for a confidence that was probably meant the
// other way round.
func (c *Call) unusualLevels() {
	if conf, ok := confidence.Given(c); ok && conf < 0.5 {
		c.caution("unusual-level", "confidence", "A confidence of %s is a %s interval; did you mean %s?",
			FormatNumber(conf), percent(conf), percent(1-conf))
	}
	if alpha, ok := significance.Given(c); ok && alpha > 0.5 {
		c.caution("unusual-level", "significance", "A significance of %s allows an error in %s of cases; did you mean %s?",
			FormatNumber(alpha), percent(alpha), percent(1-alpha))
	}
}

// originFindings takes over what the reading of the data found.
func (c *Call) originFindings() {
	for _, in := range c.Function.Inputs {
		for _, f := range c.origin(in.Name).Findings {
			if f.Input == "" {
				f.Input = in.Name
			}
			c.add(f)
		}
	}
}
