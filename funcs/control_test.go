package funcs

import (
	"context"
	"fmt"
	"math"
	"strings"
	"testing"
)

// designed are the lists of a control and groups with sd 1.
func designed(control int, groups ...int) map[string]any {
	m := List{Names: []string{"control"}, Values: []float64{0}}
	s, n := List{Values: []float64{1}}, List{Values: []float64{float64(control)}}
	for i, g := range groups {
		m.Names, m.Values = append(m.Names, fmt.Sprintf("dose %d", i+1)), append(m.Values, 0)
		s.Values, n.Values = append(s.Values, 1), append(n.Values, float64(g))
	}
	return map[string]any{"means": m, "sds": s, "ns": n, "control": "control"}
}

// Dunnett's table is for groups of one size; where the degrees of freedom are
// whole groups of n - 1, the half-width is the tabled value times √(2/n).
func TestDifferencesFromControlReproduceDunnettsTable(t *testing.T) {
	met := 0
	for _, row := range publishedTable(t, "dunnett-one-sided-095") {
		p, df := int(row.number(t, "comparisons")), 0.0
		if x, ok := row.inputs["df"].(float64); ok {
			df = x
		}
		each := df / float64(p+1)
		if df == 0 || each != math.Trunc(each) {
			continue // no such design
		}
		met++
		n := int(each) + 1
		groups := make([]int, p)
		for i := range groups {
			groups[i] = n
		}
		arguments := designed(n, groups...)
		arguments["direction"], arguments["confidence"] = above, row.number(t, "p")
		lower := answer(t, "differences-from-control", arguments).Rows[0].Values["lower"].(float64)
		row.check(t, -lower/math.Sqrt(2/float64(n)))
	}
	if met < 8 {
		t.Errorf("only %d entries could be compared", met)
	}
}

// Dunnett's integral at 25 digits, with unequal n (control 6, groups 4, 5 and 10; sd 2).
func TestDifferencesFromControlWithUnequalGroups(t *testing.T) {
	arguments := differencesFromControl.Example.arguments()
	for _, c := range []struct {
		direction string
		critical  float64
		p         [3]float64
	}{
		{either, 2.532950384001587198288, [3]float64{0.527139786443180557365, 0.126521625158104485343, 0.0225516491533113110407}},
		{above, 2.188609984842362888860, [3]float64{0.270959863566654603993, 0.998022007765566271, 0.0112780450540587607942}},
		{below, 2.188609984842362888860, [3]float64{0.975972501597149135, 0.0633742500220370543321, 0.999849806337929074}},
	} {
		arguments["direction"] = c.direction
		out := answer(t, "differences-from-control", arguments)
		for i, n := range []float64{4, 5, 10} {
			r, half := out.Rows[i].Values, c.critical*2*math.Sqrt(1/n+1.0/6)
			d := r["difference"].(float64)
			within(t, fmt.Sprintf("%s, row %d, p", c.direction, i+1), r["p-value"].(float64), c.p[i], 1e-11)
			lower, hasLower := r["lower"].(float64)
			upper, hasUpper := r["upper"].(float64)
			if hasLower != (c.direction != below) || hasUpper != (c.direction != above) {
				t.Errorf("%s: limits %v", c.direction, r)
			}
			if hasLower {
				within(t, c.direction+" lower", lower, d-half, 1e-11)
			}
			if hasUpper {
				within(t, c.direction+" upper", upper, d+half, 1e-11)
			}
		}
	}
}

// One group against the control is difference-interval with pooled variances.
func TestOneGroupAgainstControlIsADifferenceInterval(t *testing.T) {
	old, fresh := assembly(t)
	for _, d := range []string{either, above, below} {
		row := answer(t, "differences-from-control", map[string]any{"samples": []Group{{"new", fresh}, {"old", old}}, "control": "new", "direction": d}).Rows[0].Values
		alone := answer(t, "difference-interval", map[string]any{"sample": old, "second-sample": fresh, "variances": pooled, "direction": d})
		for _, name := range []string{"difference", "lower", "upper", "p-value"} {
			want, ok := alone.Get(name)
			got, given := row[name]
			if ok != given {
				t.Errorf("%s: %s given: %t", d, name, given)
			} else if ok {
				within(t, d+" "+name, got.(float64), want.(float64), 1e-10)
			}
		}
	}
}

func TestFromControlOfGroupsAndOfTheirSummariesAgreeDigitForDigit(t *testing.T) {
	groups := threeTreatments(t)
	lists := listsOf(groups)
	lists["control"] = groups[1].Name
	a := answer(t, "differences-from-control", map[string]any{"samples": groups, "control": groups[1].Name})
	b := answer(t, "differences-from-control", lists)
	for i := range a.Rows {
		for name, v := range a.Rows[i].Values {
			if b.Rows[i].Values[name] != v {
				t.Errorf("row %d: %s is %v and %v", i+1, name, v, b.Rows[i].Values[name])
			}
		}
	}
}

func TestFromControlRowsAndTestsAgree(t *testing.T) {
	arguments := differencesFromControl.Example.arguments()
	for _, d := range []string{either, above, below} {
		arguments["direction"] = d
		for i, r := range answer(t, "differences-from-control", arguments).Rows {
			p := r.Values["p-value"].(float64)
			arguments["confidence"] = 1 - p
			s := answer(t, "differences-from-control", arguments).Rows[i].Values
			nearest := math.Inf(1)
			for _, limit := range []string{"lower", "upper"} {
				if v, ok := s[limit].(float64); ok {
					nearest = math.Min(nearest, math.Abs(v))
				}
			}
			within(t, fmt.Sprintf("%s, row %d: nearest limit at 1 - p", d, i+1), nearest, 0, 1e-8)
			delete(arguments, "confidence")
		}
	}
}

func TestFromControlRefusalsAndErrors(t *testing.T) {
	other := []float64{4, 5, 6}
	for _, c := range []struct {
		code   string
		groups []Group
	}{
		{"few-groups", []Group{{"North", other}}},
		{"few-values", []Group{{"North", []float64{4}}, {"Quay", []float64{5}}}},
		{"no-spread", []Group{{"North", []float64{4, 4}}, {"Quay", []float64{5, 5}}}},
	} {
		out := answer(t, "differences-from-control", map[string]any{"samples": c.groups, "control": "North"})
		refusedFor(t, out, c.code)
		checkDeclared(t, out.Function, out)
	}
	_, err := Answer(context.Background(), "differences-from-control", map[string]any{"samples": []Group{{"North", other}, {"Quay", other}}, "control": "Norht"})
	if want := `control is "Norht", but must be one of the groups of samples; did you mean "North"?`; err == nil || !strings.Contains(err.Error(), want) {
		t.Errorf("got %v, want %s", err, want)
	}
	_, err = Answer(context.Background(), "differences-from-control", map[string]any{"samples": []Group{{"North", other}, {"Quay", other}}})
	if want := "control is missing; give the name of the group"; err == nil || !strings.Contains(err.Error(), want) {
		t.Errorf("got %v, want %s", err, want)
	}
	// A group of one value is compared by the others' sd.
	out := answer(t, "differences-from-control", map[string]any{"samples": []Group{{"North", other}, {"Fell", []float64{9}}}, "control": "North"})
	if len(out.Rows) != 1 || out.Rows[0].Status() != StatusOK {
		t.Errorf("rows %v", out.Rows)
	}
}

func TestFromControlSentence(t *testing.T) {
	arguments := differencesFromControl.Example.arguments()
	arguments["direction"] = above
	got, _ := answer(t, "differences-from-control", arguments).Get("sentence")
	if want := "Of 3 differences of means, 1 can be told from 0 at 95% confidence for all together (n = 25 in 4 groups; Dunnett's comparisons of 3 groups with " +
		"the control group control, one pooled variance and 21 degrees of freedom, direction above). The clearest is c - control: 3.0, at least 0.7, p = 0.0113."; got != want {
		t.Errorf("got  %s\nwant %s", got, want)
	}
}
