package funcs

import (
	"fmt"
	"math"
	"math/rand/v2"
	"strings"
	"testing"
)

// The certified values belong to the decimal data. The columns *_digits_float64_input
// say how many digits an error-free calculation keeps once the data are stored as
// doubles; the tolerance is half a digit wider, at most 14 digits (all that is certified).
func TestAnalysisOfVarianceOnCertifiedSets(t *testing.T) {
	for _, row := range csvRows(t, published+"nist-strd-anova/certified.csv") {
		groups := publishedGroups(t, "nist-strd-anova/"+row["dataset"]+".csv", "group", "value")
		out := answer(t, "analysis-of-variance", map[string]any{"samples": groups, "checks": false})
		digits := func(columns ...string) float64 {
			d := math.Inf(1)
			for _, c := range columns {
				d = math.Min(d, float(t, row[c]))
			}
			return math.Pow(10, 0.5-math.Min(d, 14.5))
		}
		f, between, residual := digits("f_digits_float64_input"), digits("between_ss_digits_float64_input"), digits("residual_sd_digits_float64_input")
		for _, c := range []struct {
			result, column string
			tolerance      float64
		}{
			{"f", "f", f}, {"df-between", "between_df", 0}, {"df-within", "within_df", 0},
			{"sum-squares-between", "between_ss", between}, {"mean-square-between", "between_ms", between},
			{"sum-squares-within", "within_ss", 2 * residual}, {"mean-square-within", "within_ms", 2 * residual},
			{"r-squared", "r_squared", 2 * math.Max(between, residual)}, {"residual-sd", "residual_sd", residual},
		} {
			within(t, row["dataset"]+" "+c.result, resultOf(t, out, c.result), float(t, row[c.column]), c.tolerance)
		}
	}
}

func TestSeveralMeansReproducePublishedExamples(t *testing.T) {
	batches, treatments := gear(t), threeTreatments(t)
	all := summarise(joined(treatments))
	for _, row := range publishedExamples(t, "anova") {
		if strings.HasPrefix(row.id, "nist-prc-43.mu") {
			continue // unadjusted intervals from rounded factors, which no function gives
		}
		got, ok := quantileRow(t, row)
		if !ok {
			groups := batches
			if strings.HasPrefix(row.id, "nist-prc-43") {
				groups = treatments
			}
			out := answer(t, "analysis-of-variance", map[string]any{"samples": groups})
			value := func(name string) float64 { return resultOf(t, out, name) }
			_, quantity, _ := strings.Cut(row.id, ".")
			switch {
			case quantity == "between_ss" || quantity == "treatment_ss":
				got = value("sum-squares-between")
			case quantity == "within_ss" || quantity == "error_ss":
				got = value("sum-squares-within")
			case quantity == "total_ss":
				got = value("sum-squares-between") + value("sum-squares-within")
			case quantity == "between_ms" || quantity == "treatment_ms":
				got = value("mean-square-between")
			case quantity == "within_ms" || quantity == "error_ms":
				got = value("mean-square-within")
			case quantity == "total_ms":
				got = (value("sum-squares-between") + value("sum-squares-within")) / 99
			case quantity == "f":
				got = value("f")
			case quantity == "p_value":
				got = value("p-value")
			case quantity == "residual_sd":
				got = value("residual-sd")
			case quantity == "sd_of_a_batch_mean":
				got = value("residual-sd") / math.Sqrt(10)
			case quantity == "standard_error_of_a_difference":
				got = value("residual-sd") * math.Sqrt(2.0/5)
			case quantity == "correction_factor":
				got = float64(all.n) * all.mean * all.mean
			case strings.HasPrefix(quantity, "mean_batch_"):
				var i int
				if _, err := fmt.Sscanf(quantity, "mean_batch_%d", &i); err != nil {
					t.Fatal(err)
				}
				got = summarise(batches[i-1].Values).mean
			default:
				t.Errorf("%s: no computation for this row", row.id)
				continue
			}
		}
		row.check(t, got)
	}
}

// High-precision arithmetic (40 digits) on the data of e-Handbook 7.4.3.3.
func TestSeparateVariancesOnThreeTreatments(t *testing.T) {
	out := answer(t, "analysis-of-variance", map[string]any{"samples": threeTreatments(t), "variances": separate})
	within(t, "f", resultOf(t, out, "f"), 9.0237413440489297570, 1e-13)
	within(t, "df-within", resultOf(t, out, "df-within"), 7.9302353843618663175, 1e-13)
	within(t, "p-value", resultOf(t, out, "p-value"), 0.0090513985791233503666, 1e-12)
	absent(t, out, "sum-squares-between", "sum-squares-within", "mean-square-between", "mean-square-within", "r-squared", "residual-sd")
}

// listsOf reduces groups to the lists that stand for them.
func listsOf(groups []Group) map[string]any {
	var m, s, n List
	for _, g := range groups {
		v := summarise(g.Values)
		for list, x := range map[*List]float64{&m: v.mean, &s: v.sd, &n: float64(v.n)} {
			list.Names, list.Values = append(list.Names, g.Name), append(list.Values, x)
		}
	}
	return map[string]any{"means": m, "sds": s, "ns": n}
}

func TestSeveralMeansOfGroupsAndOfTheirSummariesGiveTheSameDigits(t *testing.T) {
	rng := rand.New(rand.NewPCG(3, 1))
	for range 500 {
		var groups []Group
		for _, name := range []string{"North", "Quay", "Mill", "Fell"}[:2+rng.IntN(3)] {
			groups = append(groups, Group{name, noise(rng, 2+rng.IntN(20), 5+float64(rng.IntN(3)), 1+3*rng.Float64())})
		}
		lists := listsOf(groups)
		for _, kind := range []string{pooled, separate} {
			a := answer(t, "analysis-of-variance", map[string]any{"samples": groups, "variances": kind, "checks": false})
			lists["variances"], lists["checks"] = kind, false
			b := answer(t, "analysis-of-variance", lists)
			sameResults(t, a, b)
			if m, n := methodOf(a), methodOf(b); m != n {
				t.Errorf("method %q of samples, %q of summaries", m, n)
			}
		}
	}
}

// methodOf is the result method.
func methodOf(out *Outcome) string {
	m, _ := out.Get("method")
	return m.(string)
}

// Means near 1e8 that differ by less than 1 are held to 8 digits by a double: the
// values' way stands, as the certified sets ask, and the method says so.
func TestSmallDifferencesOfLargeValuesAreTakenFromTheValues(t *testing.T) {
	groups := []Group{{"a", []float64{1e8 + 0.1, 1e8 + 0.2, 1e8 + 0.4}}, {"b", []float64{1e8 + 0.3, 1e8 + 0.6, 1e8 + 0.5}}}
	out := answer(t, "analysis-of-variance", map[string]any{"samples": groups, "checks": false})
	if m := methodOf(out); !strings.HasSuffix(m, "sums of squares from the values (rounded means would cost digits)") {
		t.Errorf("method: %s", m)
	}
	if m := methodOf(answer(t, "analysis-of-variance", listsOf(groups))); !strings.HasSuffix(m, "from the means and sds") {
		t.Errorf("method: %s", m)
	}
}

// For two groups f is t², pooled and separate.
func TestTwoGroupsGiveTheSquareOfT(t *testing.T) {
	old, fresh := assembly(t)
	for _, kind := range []string{separate, pooled} {
		f := answer(t, "analysis-of-variance", map[string]any{"samples": []Group{{"old", old}, {"new", fresh}}, "variances": kind})
		d := answer(t, "difference-interval", map[string]any{"sample": old, "second-sample": fresh, "variances": kind})
		square := resultOf(t, d, "t")
		within(t, kind+" f", resultOf(t, f, "f"), square*square, 1e-13)
		within(t, kind+" df", resultOf(t, f, "df-within"), resultOf(t, d, "df"), 1e-13)
		within(t, kind+" p", resultOf(t, f, "p-value"), resultOf(t, d, "p-value"), 1e-11)
	}
}

func TestSeveralMeansKeepTheirValueUnderShiftScaleAndOrder(t *testing.T) {
	groups := []Group{{"a", []float64{2.25, 3.5, 3.75, 6}}, {"b", []float64{1, 2.5, 1.75}}, {"c", []float64{4, 4.5, 5, 5.5, 7}}}
	moved := make([]Group, len(groups))
	for i, g := range groups {
		v := make([]float64, len(g.Values))
		for j, x := range g.Values {
			v[j] = 1<<30 + 4*x // exact in binary
		}
		moved[len(groups)-1-i] = Group{g.Name, v}
	}
	for _, kind := range []string{separate, pooled} {
		a := answer(t, "analysis-of-variance", map[string]any{"samples": groups, "variances": kind})
		b := answer(t, "analysis-of-variance", map[string]any{"samples": moved, "variances": kind})
		tolerance := 1e-14
		if kind == separate {
			tolerance = 1e-6 // by the means, of which 7 digits are left at 1e9
		}
		for _, name := range []string{"f", "df-within", "p-value"} {
			within(t, kind+" "+name, resultOf(t, b, name), resultOf(t, a, name), tolerance)
		}
	}
}

func TestSeveralMeansRefusals(t *testing.T) {
	same, other, one := []float64{4, 4, 4}, []float64{4, 5, 6}, []float64{7}
	for _, c := range []struct {
		variances, code string
		groups          []Group
	}{
		{pooled, "few-groups", []Group{{"North", other}}},
		{pooled, "few-values", []Group{{"North", one}, {"Quay", one}}},
		{pooled, "no-spread", []Group{{"North", same}, {"Quay", same}}},
		{separate, "no-spread", []Group{{"North", same}, {"Quay", other}}},
		{separate, "few-groups", []Group{{"North", one}, {"Quay", other}}},
	} {
		out := answer(t, "analysis-of-variance", map[string]any{"samples": c.groups, "variances": c.variances})
		refusedFor(t, out, c.code)
		checkDeclared(t, out.Function, out)
	}
}

func TestAGroupOfOneValueCountsOnlyWhereNoSdOfItsOwnIsNeeded(t *testing.T) {
	groups := []Group{{"North", []float64{4, 5, 9, 2, 3}}, {"Quay", []float64{7, 7.5, 3, 1, 0}}, {"Fell", []float64{12}}}
	out := answer(t, "analysis-of-variance", map[string]any{"samples": groups})
	within(t, "df-between", resultOf(t, out, "df-between"), 2, 0)
	within(t, "df-within", resultOf(t, out, "df-within"), 8, 0)
	out = answer(t, "analysis-of-variance", map[string]any{"samples": groups, "variances": separate})
	sameResults(t, out, answer(t, "analysis-of-variance", map[string]any{"samples": groups[:2], "variances": separate}))
	if used, _ := out.Get("used"); used != 10 || !raises(out, "few-values") || !strings.Contains(Note(out.Findings), "The group Fell") {
		t.Errorf("used %v, %v", used, out.Findings)
	}
}
