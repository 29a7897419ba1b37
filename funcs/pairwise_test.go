package funcs

import (
	"math"
	"strings"
	"testing"
)

// pairRow gives the row of two groups and the sign of first - second in it.
func pairRow(t *testing.T, out *Outcome, first, second string) (row Row, sign float64) {
	t.Helper()
	for _, r := range out.Rows {
		switch {
		case r.Values["first"] == first && r.Values["second"] == second:
			return r, 1
		case r.Values["first"] == second && r.Values["second"] == first:
			return r, -1
		}
	}
	t.Fatalf("%s: no row of %s and %s", out.Function.Name, first, second)
	return Row{}, 0
}

func TestPairwiseDifferencesReproducePublishedExamples(t *testing.T) {
	for _, row := range publishedExamples(t, "multiple_comparison") {
		out := answer(t, "pairwise-differences", map[string]any{"samples": row.groups(t)})
		_, quantity, _ := strings.Cut(row.id, ".") // such as mu1_mu4_lower
		parts := strings.Split(quantity, "_")
		r, sign := pairRow(t, out, strings.Replace(parts[0], "mu", "group", 1), strings.Replace(parts[1], "mu", "group", 1))
		limit := parts[2]
		if sign < 0 {
			limit = map[string]string{"lower": "upper", "upper": "lower"}[limit]
		}
		row.check(t, sign*r.Values[limit].(float64))
	}
}

// With sd 1 and one group that holds all degrees of freedom, the half-width of
// a pair is the tabled quantile times √((1/n₁ + 1/n₂)/2).
func TestPairwiseDifferencesReproduceTheTableOfTheRange(t *testing.T) {
	for _, row := range publishedTable(t, "studentized-range-095") {
		k, df := int(row.number(t, "groups")), 1e10 // stands for the table's "inf"
		if row.inputs["df"] != "inf" {
			df = row.number(t, "df")
		}
		m, s, n := make([]float64, k), make([]float64, k), make([]float64, k)
		for i := range n {
			n[i] = 1
		}
		s[0], n[0] = 1, df+1
		out := answer(t, "pairwise-differences", map[string]any{"means": List{Values: m}, "sds": List{Values: s}, "ns": List{Values: n},
			"confidence": row.number(t, "p")})
		r := out.Rows[0].Values
		row.check(t, (r["upper"].(float64)-r["lower"].(float64))/2/math.Sqrt((1/n[0]+1)/2))
	}
}

// The integrals of the studentized range at 25 digits, on the data of e-Handbook 7.4.3.3.
func TestPairwiseDifferencesWithSeparateVariances(t *testing.T) {
	out := answer(t, "pairwise-differences", map[string]any{"samples": threeTreatments(t), "variances": separate})
	for _, c := range []struct {
		row             int
		lower, upper, p float64
	}{
		{0, -4.386391323793307304081, -0.3736086762066926959189, 0.02305399768522746905699},
		{1, -5.507021903875263690121, -0.9329780961247363098789, 0.009790029679486543754432},
	} {
		r := out.Rows[c.row].Values
		within(t, "lower", r["lower"].(float64), c.lower, 1e-11)
		within(t, "upper", r["upper"].(float64), c.upper, 1e-11)
		within(t, "p-value", r["p-value"].(float64), c.p, 1e-11)
	}
}

// Two groups: the range of two is √2|t|, so the row is that of difference-interval.
func TestOnePairIsADifferenceInterval(t *testing.T) {
	old, fresh := assembly(t)
	for _, kind := range []string{separate, pooled} {
		pair := answer(t, "pairwise-differences", map[string]any{"samples": []Group{{"old", old}, {"new", fresh}}, "variances": kind}).Rows[0].Values
		alone := answer(t, "difference-interval", map[string]any{"sample": old, "second-sample": fresh, "variances": kind})
		for _, name := range []string{"difference", "lower", "upper", "p-value"} {
			within(t, kind+" "+name, pair[name].(float64), resultOf(t, alone, name), 1e-10)
		}
	}
}

func TestPairwiseRowsAndTestsAgree(t *testing.T) {
	for _, kind := range []string{separate, pooled} {
		lists := map[string]any{"means": List{Values: []float64{0, 2.1, 3.3, 3.4}}, "sds": List{Values: []float64{1, 1.5, 2, 1.2}},
			"ns": List{Values: []float64{5, 8, 6, 9}}, "variances": kind}
		for _, r := range answer(t, "pairwise-differences", lists).Rows {
			p := r.Values["p-value"].(float64)
			// At the confidence 1 - p one limit is 0.
			lists["confidence"] = 1 - p
			for _, s := range answer(t, "pairwise-differences", lists).Rows {
				if s.Values["first"] == r.Values["first"] && s.Values["second"] == r.Values["second"] {
					nearest := math.Min(math.Abs(s.Values["lower"].(float64)), math.Abs(s.Values["upper"].(float64)))
					within(t, kind+": nearest limit at 1 - p", nearest, 0, 1e-8)
				}
			}
			delete(lists, "confidence")
		}
	}
}

func TestPairwiseOfGroupsAndOfTheirSummariesAgreeDigitForDigit(t *testing.T) {
	groups := threeTreatments(t)
	lists := listsOf(groups)
	for _, kind := range []string{separate, pooled} {
		lists["variances"] = kind
		a := answer(t, "pairwise-differences", map[string]any{"samples": groups, "variances": kind})
		b := answer(t, "pairwise-differences", lists)
		for i := range a.Rows {
			for name, v := range a.Rows[i].Values {
				if b.Rows[i].Values[name] != v {
					t.Errorf("%s, row %d: %s is %v and %v", kind, i+1, name, v, b.Rows[i].Values[name])
				}
			}
		}
	}
}

func TestPairwiseRowsRefuseByThemselves(t *testing.T) {
	groups := []Group{{"North", []float64{4, 5, 9, 2, 3}}, {"Fell", []float64{6}}, {"Quay", []float64{7, 7, 7}}, {"Mill", []float64{5, 5}}}
	out := answer(t, "pairwise-differences", map[string]any{"samples": groups, "variances": separate})
	want := map[string]string{"Fell": "few-values", "Quay": "", "Mill": ""}
	for _, r := range out.Rows {
		first, second := r.Values["first"].(string), r.Values["second"].(string)
		code := want[second]
		if first == "Fell" {
			code = want[first]
		}
		if first == "Quay" && second == "Mill" {
			code = "no-spread"
		}
		switch _, given := r.Values["lower"]; {
		case code == "" && (!given || r.Status() != StatusOK):
			t.Errorf("%s and %s: %v, want it worked out", first, second, r)
		case code != "" && (given || r.Status() != StatusRefused || r.Findings[0].Code != code):
			t.Errorf("%s and %s: %v, want refused: %s", first, second, r, code)
		}
	}
	if out.Status != StatusCaution || !raises(out, "few-values") || !raises(out, "no-spread") {
		t.Errorf("%s: %v", out.Status, out.Findings)
	}
	checkDeclared(t, out.Function, out)
	// Pooled, the single value of Fell has its differences too.
	for _, r := range answer(t, "pairwise-differences", map[string]any{"samples": groups}).Rows {
		if r.Status() != StatusOK {
			t.Errorf("pooled: %v", r)
		}
	}
	still := []Group{{"Quay", []float64{7, 7, 7}}, {"Mill", []float64{5, 5}}}
	for _, kind := range []string{separate, pooled} {
		refusedFor(t, answer(t, "pairwise-differences", map[string]any{"samples": still, "variances": kind}), "no-spread")
		refusedFor(t, answer(t, "pairwise-differences", map[string]any{"samples": still[:1], "variances": kind}), "few-groups")
	}
	refusedFor(t, answer(t, "pairwise-differences", map[string]any{"samples": []Group{{"a", []float64{7}}, {"b", []float64{5}}}}), "few-values")
}

func TestPairwiseSentence(t *testing.T) {
	out := answer(t, "pairwise-differences", pairwiseDifferences.Example.arguments())
	got, _ := out.Get("sentence")
	if want := "Of 6 differences of means, 4 can be told from 0 at 95% confidence for all together (n = 20 in 4 groups; Tukey-Kramer studentized range of " +
		"4 groups with one pooled variance and 16 degrees of freedom). The clearest is group 1 - group 3: -3.2, -5.3 to -1.1, p = 0.00221."; got != want {
		t.Errorf("got  %s\nwant %s", got, want)
	}
}
