package funcs

import (
	"context"
	"math"
	"slices"
	"strings"
	"testing"
)

// column gives one column of a table, NaN where a row has no value.
func column(out *Outcome, name string) []float64 {
	var v []float64
	for _, r := range out.Rows {
		x, ok := r.Values[name].(float64)
		if !ok {
			x = math.NaN()
		}
		v = append(v, x)
	}
	return v
}

// Worked by hand from the definitions.
func TestAdjustedPValuesByDefinition(t *testing.T) {
	gap := math.NaN()
	for _, c := range []struct {
		kind     string
		ps, want []float64
	}{
		{bonferroni, []float64{0.25, 0.125, gap, 0.75}, []float64{0.75, 0.375, gap, 1}},
		{holm, []float64{0.25, 0.125, gap, 0.75}, []float64{0.5, 0.375, gap, 0.75}},
		{holm, []float64{0.25, 0.1875, 0.1875}, []float64{0.5625, 0.5625, 0.5625}},
		{holm, []float64{0.5, 0.9375, 1}, []float64{1, 1, 1}},
		{benjaminiHochberg, []float64{0.25, 0.125, gap, 0.75}, []float64{0.375, 0.375, gap, 0.75}},
		{benjaminiHochberg, []float64{0.75, 0.5, 0.625}, []float64{0.75, 0.75, 0.75}},
		{benjaminiHochberg, []float64{0}, []float64{0}},
	} {
		out := answer(t, "adjusted-p-values", map[string]any{"p-values": c.ps, "kind": c.kind})
		got := column(out, "adjusted")
		if !slices.EqualFunc(got, c.want, func(a, b float64) bool { return a == b || math.IsNaN(a) && math.IsNaN(b) }) {
			t.Errorf("%s of %v: %v, want %v", c.kind, c.ps, got, c.want)
		}
		if used, _ := out.Get("used"); used != present(c.ps) {
			t.Errorf("%s of %v: used %v", c.kind, c.ps, used)
		}
	}
}

func TestAdjustmentsAreOrderedAndMonotone(t *testing.T) {
	ps := []float64{0.03, 0.5, 0.001, 0.04, 0.2, 0.001, 0.9}
	b, h, bh := adjust(ps, bonferroni), adjust(ps, holm), adjust(ps, benjaminiHochberg)
	for i := range ps {
		if !(ps[i] <= bh[i] && bh[i] <= h[i] && h[i] <= b[i] && b[i] <= 1) {
			t.Errorf("p %v: %v, %v, %v", ps[i], bh[i], h[i], b[i])
		}
		for j := range ps {
			if ps[i] <= ps[j] && !(b[i] <= b[j] && h[i] <= h[j] && bh[i] <= bh[j]) {
				t.Errorf("p %v and %v change places when adjusted", ps[i], ps[j])
			}
		}
	}
}

func TestAdjustedPValuesErrors(t *testing.T) {
	for _, c := range []struct {
		ps   []float64
		want string
	}{
		{[]float64{0.5, 1.5}, "p-values, value 2 is 1.5, but must be from 0 to 1"},
		{[]float64{math.NaN()}, "p-values holds no number; give at least one"},
		{nil, "p-values holds no number; give at least one"},
	} {
		_, err := Answer(context.Background(), "adjusted-p-values", map[string]any{"p-values": c.ps})
		if err == nil || !strings.Contains(err.Error(), c.want) {
			t.Errorf("%v: got %v, want %s", c.ps, err, c.want)
		}
	}
}

// Named p-values keep their names, in the rows and in the sentence.
func TestAdjustedPValuesKeepTheirNames(t *testing.T) {
	out := answer(t, "adjusted-p-values", map[string]any{"p-values": List{Names: []string{"North", "Quay"}, Values: []float64{0.04, 0.01}}})
	for i, want := range []string{"North", "Quay"} {
		if got := out.Rows[i].Values["name"]; got != want {
			t.Errorf("row %d is named %v, want %s", i, got, want)
		}
	}
	if s, _ := out.Get("sentence"); !strings.Contains(s.(string), "the smallest, p = 0.01 of Quay, becomes p = 0.02") {
		t.Errorf("sentence: %s", s)
	}
	unnamed := answer(t, "adjusted-p-values", map[string]any{"p-values": []float64{0.04, 0.01}})
	if name, ok := unnamed.Rows[0].Values["name"]; ok {
		t.Errorf("a list without names names its first %v", name)
	}
}
