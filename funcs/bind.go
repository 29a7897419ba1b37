package funcs

import (
	"context"
	"fmt"
	"math"
	"slices"
	"strconv"
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
		b.alternatives(one, arguments)
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
			advice = "did you mean " + OrList(quoted(near)) + "?"
		}
		b.fail(name, "", "is no input of "+b.function.Name, advice)
	}
}

// alternatives checks that exactly one way was given, whole.
func (b *binder) alternatives(one OneOf, arguments map[string]any) {
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

// value checks one argument and gives it its canonical Go type.
func (b *binder) value(in Input, raw any) (any, bool) {
	switch in.Kind {
	case Number, Level:
		return b.number(in, "", -1, raw)
	case Count:
		x, ok := b.number(in, "", -1, raw)
		if !ok {
			return nil, false
		}
		return int(x), true
	case Choice:
		text, ok := raw.(string)
		if ok && slices.Contains(in.Choices, text) {
			return text, true
		}
		advice := "write " + OrList(in.Choices)
		if near := Closest(text, in.Choices); ok && len(near) > 0 {
			advice = "did you mean " + OrList(quoted(near)) + "? The choices are " + AndList(in.Choices)
		}
		b.fail(in.Name, show(raw), "must be one of its choices", advice)
	case YesNo:
		if v, ok := raw.(bool); ok {
			return v, true
		}
		b.fail(in.Name, show(raw), "must be yes or no", "write yes or no")
	case Text:
		if v, ok := raw.(string); ok && v != "" {
			return v, true
		}
		b.fail(in.Name, show(raw), "must be a text", "write a name")
	case Numbers:
		return b.list(in, raw)
	case Sample:
		if v, ok := raw.([]float64); ok {
			return v, b.sample(in, "", v)
		}
		b.fail(in.Name, show(raw), "must be a list of numbers", "write numbers, or name a column")
	case Samples:
		return b.groups(in, raw)
	}
	return nil, false
}

// number checks one number against the input's domain.
func (b *binder) number(in Input, group string, index int, raw any) (float64, bool) {
	var x float64
	switch v := raw.(type) {
	case float64:
		x = v
	case int:
		x = float64(v)
	case string:
		if in.Infinite && v == Infinite {
			return math.Inf(1), true
		}
		b.failAt(in.Name, group, index, show(v), "must be a number ("+in.Expects()+")", "")
		return 0, false
	default:
		b.failAt(in.Name, group, index, show(raw), "must be a number ("+in.Expects()+")", "")
		return 0, false
	}
	if in.Domain.Contains(x) && !math.IsInf(x, 0) {
		return x, true
	}
	advice := ""
	switch {
	case in.Kind == Level && x > 1 && x <= 100:
		advice = fmt.Sprintf("write %s%% or %s", shortest(x), strconv.FormatFloat(x/100, 'g', 15, 64))
	case in.Kind == Level && !(x > 0 && x < 1):
		advice = "write a share such as 95% or 0.95"
	case in.Infinite && math.IsInf(x, 1):
		return x, true
	}
	b.failAt(in.Name, group, index, shortest(x), "must be "+in.Expects(), advice)
	return 0, false
}

// Expects words what a value of the input must be.
func (in Input) Expects() string {
	switch in.Kind {
	case Choice:
		return OrList(in.Choices)
	case YesNo:
		return "yes or no"
	case Text:
		return "a text"
	}
	text := in.Domain.String()
	if in.Infinite {
		text += `, or the text "` + Infinite + `"`
	}
	return text
}

func (b *binder) list(in Input, raw any) (any, bool) {
	var list List
	switch v := raw.(type) {
	case List:
		list = v
	case []float64:
		list = List{Values: v}
	case float64, int: // one number is a list of one
		x, ok := b.number(in, "", -1, v)
		return List{Values: []float64{x}}, ok
	default:
		b.fail(in.Name, show(raw), "must be a list of numbers", "write numbers with ; between them")
		return nil, false
	}
	if len(list.Values) == 0 {
		b.fail(in.Name, "", "holds no number", "give at least one")
		return nil, false
	}
	for i, x := range list.Values {
		if math.IsNaN(x) && in.MayBeGaps {
			continue
		}
		name := ""
		if list.Names != nil {
			name = list.Names[i]
		}
		if _, ok := b.number(in, name, i, x); !ok {
			return nil, false
		}
	}
	return list, b.distinct(in, list.Names)
}

// sample checks that a sample holds a number and no infinity.
func (b *binder) sample(in Input, group string, v []float64) bool {
	gaps := 0
	for i, x := range v {
		if x-x == 0 {
			continue
		}
		if !math.IsNaN(x) {
			b.failAt(in.Name, group, i, shortest(x), "must be a finite number", "leave the cell blank where there is no value")
			return false
		}
		gaps++
	}
	if gaps == len(v) {
		b.failAt(in.Name, group, -1, "", "holds no number", "give at least two values")
		return false
	}
	return true
}

func (b *binder) groups(in Input, raw any) (any, bool) {
	groups, ok := raw.([]Group)
	if !ok {
		b.fail(in.Name, show(raw), "must be samples by name", "name a column with `for each`, or give each group's values under its name")
		return nil, false
	}
	if len(groups) == 0 {
		b.fail(in.Name, "", "holds no group", "give at least two groups")
		return nil, false
	}
	names := make([]string, len(groups))
	for i, g := range groups {
		names[i] = g.Name
		if !b.sample(in, g.Name, g.Values) {
			return nil, false
		}
	}
	return groups, b.distinct(in, names)
}

// distinct reports names that are empty or stand twice.
func (b *binder) distinct(in Input, names []string) bool {
	seen := map[string]bool{}
	for i, n := range names {
		if n == "" || seen[n] {
			b.failAt(in.Name, "", i, show(n), "must be a name of its own", "give each group another name")
			return false
		}
		seen[n] = true
	}
	return true
}

// show words a value as it was found.
func show(v any) string {
	switch v := v.(type) {
	case string:
		return `"` + v + `"`
	case float64:
		return shortest(v)
	case bool:
		if v {
			return "yes"
		}
		return "no"
	case []float64, List:
		return "a list"
	case []Group:
		return "several samples"
	}
	return fmt.Sprint(v)
}

// unusualLevels raises the caution for a confidence that was probably meant the
// other way round.
func (c *Call) unusualLevels() {
	if conf, ok := confidence.Given(c); ok && conf < 0.5 {
		c.caution("unusual-level", "confidence", "A confidence of %s is a %s interval; did you mean %s?",
			shortest(conf), percent(conf), percent(1-conf))
	}
	if alpha, ok := significance.Given(c); ok && alpha > 0.5 {
		c.caution("unusual-level", "significance", "A significance of %s allows an error in %s of cases; did you mean %s?",
			shortest(alpha), percent(alpha), percent(1-alpha))
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
