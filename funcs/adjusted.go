package funcs

import (
	"cmp"
	"fmt"
	"math"
	"slices"
)

// The kinds of adjusted-p-values.
const (
	bonferroni        = "bonferroni"
	holm              = "holm"
	benjaminiHochberg = "benjamini-hochberg"
)

var (
	pValues = In[List]{Input{Name: "p-values", Kind: Numbers, Domain: fromZeroToOne, MayBeGaps: true,
		Summary: "the p-values of the tests made together; blanks are not counted"}}.
		atMost(mostItems, "adjust tests that belong together, one family at a time")
	adjustment = choice("kind", "holm and bonferroni hold the chance of any false finding; benjamini-hochberg the share of false ones among the findings",
		bonferroni, holm, benjaminiHochberg).withDefault(holm)
)

var adjustedPValues = &Function{
	Name:    "adjusted-p-values",
	Version: 1,
	Summary: "p-values of several tests, adjusted for their number",
	Inputs:  inputs(pValues, adjustment),
	Table: []Result{
		{"name", Text, NoUnit, "the p-value's name; absent where the list has no names"},
		{"p-value", Number, NoUnit, "the p-value as given; absent for a blank"},
		{"adjusted", Number, NoUnit, "the p-value to compare with the significance of all tests together"},
	},
	Assumptions: []string{"for benjamini-hochberg: tests independent of one another, or positively dependent"},
	Citations:   []string{"Holm 1979", "Benjamini & Hochberg 1995"},
	Example: Example{
		Label: "fifteen outcomes of one trial",
		Arguments: []Argument{
			{"p-values", []float64{0.0001, 0.0004, 0.0019, 0.0095, 0.0201, 0.0278, 0.0298, 0.0344, 0.0459, 0.3240, 0.4262, 0.5719, 0.6528, 0.7590, 1}},
			{"kind", benjaminiHochberg},
		},
		// 15·p/rank, made monotone.
		WantRows:  [][]Argument{{{"adjusted", 0.0015}}, {{"adjusted", 0.003}}, {{"adjusted", 0.0095}}, {{"adjusted", 0.035625}}, {{"adjusted", 0.0603}}, {{"adjusted", 0.4470 / 7}}},
		Tolerance: 1e-12,
		Source:    "p-values of Benjamini & Hochberg 1995; rational arithmetic",
	},
	compute: func(c *Call) error {
		list, kind := pValues.Of(c), adjustment.Of(c)
		adjusted := adjust(list.Values, kind)
		least, m := -1, 0
		for i, p := range list.Values {
			row := Row{Values: map[string]any{}}
			if list.Names != nil {
				row.Values["name"] = list.Names[i]
			}
			if !math.IsNaN(p) {
				row.Values["p-value"], row.Values["adjusted"] = p, adjusted[i]
				if m++; least < 0 || p < list.Values[least] {
					least = i
				}
			}
			c.rows = append(c.rows, row)
		}
		if m == 0 {
			return c.wrong("p-values", "", "holds no number", "give at least one")
		}
		c.count(m)
		c.method = map[string]string{
			bonferroni:        "Bonferroni: each p-value times the number of tests",
			holm:              "Holm's step-down method",
			benjaminiHochberg: "Benjamini and Hochberg's step-up method",
		}[kind]
		smallest := pText(list.Values[least])
		if list.Names != nil {
			smallest += " of " + list.Names[least]
		}
		c.sentence = fmt.Sprintf("Of %s the smallest, %s, becomes %s when adjusted for all (%s).",
			plural(m, "p-value"), smallest, pText(adjusted[least]), c.method)
		return nil
	},
}

// adjust gives the adjusted p-values in the order of ps; NaN for NaN, which does
// not count as a test.
func adjust(ps []float64, kind string) []float64 {
	out := slices.Repeat([]float64{math.NaN()}, len(ps))
	var order []int
	for i, p := range ps {
		if !math.IsNaN(p) {
			order = append(order, i)
		}
	}
	slices.SortStableFunc(order, func(a, b int) int { return cmp.Compare(ps[a], ps[b]) })
	m := len(order)
	switch kind {
	case bonferroni:
		for _, i := range order {
			out[i] = math.Min(1, float64(m)*ps[i])
		}
	case holm:
		largest := 0.0
		for rank, i := range order {
			largest = math.Max(largest, float64(m-rank)*ps[i])
			out[i] = math.Min(1, largest)
		}
	case benjaminiHochberg:
		smallest := 1.0
		for rank := m; rank > 0; rank-- {
			i := order[rank-1]
			smallest = math.Min(smallest, float64(m)*ps[i]/float64(rank))
			out[i] = smallest
		}
	}
	return out
}
