package funcs

import (
	"fmt"
	"math"
	"slices"
	"strconv"
)

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
			advice = didYouMean(near) + " The choices are " + AndList(in.Choices)
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
		advice = fmt.Sprintf("write %s%% or %s", FormatNumber(x), strconv.FormatFloat(x/100, 'g', 15, 64))
	case in.Kind == Level && !(x > 0 && x < 1):
		advice = "write a share such as 95% or 0.95"
	case in.Infinite && math.IsInf(x, 1):
		return x, true
	}
	b.failAt(in.Name, group, index, FormatNumber(x), "must be "+in.Expects(), advice)
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
	if b.tooMany(in, len(list.Values)) {
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
			b.failAt(in.Name, group, i, FormatNumber(x), "must be a finite number", "leave the cell blank where there is no value")
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
	if b.tooMany(in, len(groups)) {
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

// tooMany reports a list that is longer than the function works out.
func (b *binder) tooMany(in Input, n int) bool {
	if in.Most == 0 || n <= in.Most {
		return false
	}
	b.fail(in.Name, in.howMany(n), "may be at most "+strconv.Itoa(in.Most)+" here", in.Instead)
	return true
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
		return FormatNumber(v)
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
