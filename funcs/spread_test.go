package funcs

import (
	"context"
	"fmt"
	"math"
	"math/rand/v2"
	"strings"
	"testing"
)

// gear is the published data of NIST/SEMATECH e-Handbook 1.3.5.4 (ten batches of ten diameters).
func gear(t *testing.T) []Group {
	return publishedGroups(t, "data/nist_gear_diameter.csv", "batch", "diameter")
}

// joined puts the values of all groups one after the other.
func joined(groups []Group) []float64 {
	var all []float64
	for _, g := range groups {
		all = append(all, g.Values...)
	}
	return all
}

// quantileRow answers the rows of worked examples that quote a quantile.
func quantileRow(t *testing.T, row publishedRow) (float64, bool) {
	p, ok := row.inputs["p"].(float64)
	if !ok {
		return 0, false
	}
	arguments, name := map[string]any{"probability": p}, "t-quantile"
	switch {
	case strings.HasPrefix(row.quantity, "chi-square"):
		name, arguments["df"] = "chi-square-quantile", row.number(t, "df")
	case strings.HasPrefix(row.quantity, "F"):
		name, arguments["first-df"], arguments["second-df"] = "f-quantile", row.number(t, "df1"), row.number(t, "df2")
	default:
		arguments["df"] = row.number(t, "df")
	}
	return resultOf(t, answer(t, name, arguments), "value"), true
}

func TestSpreadReproducesPublishedExamples(t *testing.T) {
	yarn := publishedGroups(t, "data/iso2854_yarn.csv", "yarn", "breaking_load_newton")[0].Values
	diameters := joined(gear(t))
	interval := func(arguments map[string]any, result string) float64 {
		return resultOf(t, answer(t, "variance-interval", arguments), result)
	}
	for _, row := range publishedExamples(t, "variance_test", "variance_interval", "variance_ratio", "homogeneity_of_variance") {
		got, ok := quantileRow(t, row)
		if !ok {
			switch row.id {
			case "nist-eda-1358.sd":
				got = interval(map[string]any{"sample": diameters}, "sd")
			case "nist-eda-1358.chi_square_statistic_for_sigma0_2_0_01":
				got = interval(map[string]any{"sample": diameters, "reference": row.number(t, "variance0")}, "chi-square")
			case "nist-prc-23.chi_square_statistic":
				sigma := row.number(t, "sigma0")
				got = interval(map[string]any{"sd": row.number(t, "sd"), "n": row.number(t, "n"), "reference": sigma * sigma}, "chi-square")
			case "iso2854-var.chi_square":
				got = interval(map[string]any{"sample": yarn, "reference": row.number(t, "variance0")}, "chi-square")
			case "iso2854-var.sigma_lower_95", "iso2854-var.sigma_lower_99":
				got = interval(map[string]any{"sample": yarn, "confidence": percentIn(row.id)}, "sd-lower")
			case "iso2854-var.sigma_upper_95", "iso2854-var.sigma_upper_99":
				got = interval(map[string]any{"sample": yarn, "confidence": percentIn(row.id)}, "sd-upper")
			case "nist-eda-1359.f":
				got = resultOf(t, answer(t, "variance-ratio-interval", map[string]any{"first-sd": row.number(t, "sd1"), "first-n": row.number(t, "n1"),
					"second-sd": row.number(t, "sd2"), "second-n": row.number(t, "n2")}), "f")
			default:
				t.Errorf("%s: no computation for this row", row.id)
				continue
			}
		}
		row.check(t, got)
	}
}

// percentIn reads the level at the end of a row's name, "sigma_lower_95".
func percentIn(id string) float64 {
	if strings.HasSuffix(id, "99") {
		return 0.99
	}
	return 0.95
}

// The handbook prints 20.78580 and 1.705910, which its errata (README beside the
// values) put at 20.7858734281 and 1.705917693: exact arithmetic on its data.
func TestEqualSpreadOnGearData(t *testing.T) {
	for _, c := range []struct {
		kind string
		want float64
	}{{bartlett, 20.7858734281}, {brownForsythe, 1.705917693}} {
		out := answer(t, "equal-spread-test", map[string]any{"samples": gear(t), "kind": c.kind})
		within(t, c.kind, resultOf(t, out, "statistic"), c.want, 1e-10)
	}
}

// High-precision arithmetic (40 digits) on the data of e-Handbook 7.4.3.3.
func TestEqualSpreadOfThreeTreatments(t *testing.T) {
	treatments := threeTreatments(t)
	for _, c := range []struct {
		kind         string
		statistic, p float64
	}{
		{levene, 6552.0 / 28633, 0.79885864593025908851},
		{bartlett, 0.23367971620701510842, 0.88972766443084112421},
	} {
		out := answer(t, "equal-spread-test", map[string]any{"samples": treatments, "kind": c.kind})
		within(t, c.kind, resultOf(t, out, "statistic"), c.statistic, 1e-13)
		within(t, c.kind+" p", resultOf(t, out, "p-value"), c.p, 1e-12)
	}
	var sdList, nList []float64
	for _, g := range treatments {
		s := summarise(g.Values)
		sdList, nList = append(sdList, s.sd), append(nList, float64(s.n))
	}
	whole := answer(t, "equal-spread-test", map[string]any{"samples": treatments, "kind": bartlett})
	summed := answer(t, "equal-spread-test", map[string]any{"sds": List{Values: sdList}, "ns": List{Values: nList}, "kind": bartlett})
	if a, b := resultOf(t, whole, "statistic"), resultOf(t, summed, "statistic"); a != b {
		t.Errorf("bartlett from values %v, from sds %v", a, b)
	}
}

// threeTreatments is the data of NIST/SEMATECH e-Handbook 7.4.3.3.
func threeTreatments(t *testing.T) []Group {
	return publishedExample(t, "nist-prc-43.f").groups(t)
}

func TestSpreadOfASampleAndOfItsSummaryAgreeDigitForDigit(t *testing.T) {
	rng := rand.New(rand.NewPCG(1, 1))
	for range 20 {
		x, y := noise(rng, 2+rng.IntN(30), 1e3, 2), noise(rng, 2+rng.IntN(30), -5, 1)
		sx, sy := summarise(x), summarise(y)
		sameResults(t, answer(t, "variance-interval", map[string]any{"sample": x, "reference": 3.0}),
			answer(t, "variance-interval", map[string]any{"sd": sx.sd, "n": sx.n, "reference": 3.0}))
		sameResults(t, answer(t, "variance-ratio-interval", map[string]any{"sample": x, "second-sample": y}),
			answer(t, "variance-ratio-interval", map[string]any{"first-sd": sx.sd, "first-n": sx.n, "second-sd": sy.sd, "second-n": sy.n}))
		sameResults(t, answer(t, "pooled-variance", map[string]any{"samples": []Group{{"a", x}, {"b", y}}}),
			answer(t, "pooled-variance", map[string]any{"sds": List{Values: []float64{sx.sd, sy.sd}}, "ns": List{Values: []float64{float64(sx.n), float64(sy.n)}}}))
		one := answer(t, "pooled-variance", map[string]any{"samples": []Group{{"a", x}}})
		alone := answer(t, "variance-interval", map[string]any{"sample": x})
		for a, b := range map[string]string{"pooled-variance": "variance", "pooled-sd": "sd", "variance-lower": "variance-lower", "sd-upper": "sd-upper"} {
			if g, w := resultOf(t, one, a), resultOf(t, alone, b); g != w {
				t.Errorf("one group: %s = %v, but %s = %v", a, g, b, w)
			}
		}
	}
}

// noise gives n values about a centre.
func noise(rng *rand.Rand, n int, centre, scale float64) []float64 {
	v := make([]float64, n)
	for i := range v {
		v[i] = centre + scale*rng.NormFloat64()
	}
	return v
}

// sameResults fails where the functions' own results differ in any digit.
func sameResults(t *testing.T, a, b *Outcome) {
	t.Helper()
	for _, r := range a.Function.Results {
		x, okX := a.Get(r.Name)
		y, okY := b.Get(r.Name)
		if x != y || okX != okY {
			t.Errorf("%s: %s is %v and %v", a.Function.Name, r.Name, x, y)
		}
	}
}

func TestVarianceIntervalAndTestAgree(t *testing.T) {
	for _, n := range []int{2, 3, 10, 500} {
		for _, d := range []string{either, above, below} {
			arguments := map[string]any{"sd": 1.7, "n": n, "direction": d, "confidence": 0.9}
			out := answer(t, "variance-interval", arguments)
			for _, limit := range []string{"variance-lower", "variance-upper"} {
				if v, ok := out.Get(limit); ok {
					arguments["reference"] = v
					within(t, fmt.Sprintf("p at %s, n = %d, %s", limit, n, d), resultOf(t, answer(t, "variance-interval", arguments), "p-value"), 0.1, 1e-10)
				}
			}
			if d != either {
				arguments["confidence"], arguments["direction"] = 0.8, either
				two := answer(t, "variance-interval", arguments)
				for _, limit := range []string{"variance-lower", "variance-upper", "sd-lower", "sd-upper"} {
					if v, ok := out.Get(limit); ok {
						within(t, "one-sided 90% against two-sided 80%, "+limit, v.(float64), resultOf(t, two, limit), 1e-13)
					}
				}
			}
		}
	}
}

func TestVarianceRatioMirrorsWhenTheSamplesAreSwapped(t *testing.T) {
	first := answer(t, "variance-ratio-interval", map[string]any{"first-sd": 3.0, "first-n": 7, "second-sd": 1.25, "second-n": 12, "reference": 2.0})
	second := answer(t, "variance-ratio-interval", map[string]any{"first-sd": 1.25, "first-n": 12, "second-sd": 3.0, "second-n": 7, "reference": 0.5})
	within(t, "ratio", resultOf(t, first, "ratio"), 1/resultOf(t, second, "ratio"), 1e-14)
	within(t, "lower", resultOf(t, first, "lower"), 1/resultOf(t, second, "upper"), 1e-12)
	within(t, "upper", resultOf(t, first, "upper"), 1/resultOf(t, second, "lower"), 1e-12)
	within(t, "p-value", resultOf(t, first, "p-value"), resultOf(t, second, "p-value"), 1e-12)
	one := answer(t, "variance-ratio-interval", map[string]any{"first-sd": 3.0, "first-n": 7, "second-sd": 1.25, "second-n": 12, "direction": above, "confidence": 0.975})
	within(t, "one-sided", resultOf(t, one, "lower"), resultOf(t, first, "lower"), 1e-13)
	absent(t, one, "upper")
}

func TestSpreadScalesAndShifts(t *testing.T) {
	x := []float64{2.25, 3.5, 3.75, 6, 4.5, 2.5}
	big := make([]float64, len(x))
	for i := range x {
		big[i] = 1024 + 8*x[i] // exact in binary
	}
	a, b := answer(t, "variance-interval", map[string]any{"sample": x}), answer(t, "variance-interval", map[string]any{"sample": big})
	for name, factor := range map[string]float64{"variance": 64, "variance-lower": 64, "variance-upper": 64, "sd": 8, "sd-lower": 8, "sd-upper": 8} {
		within(t, name, resultOf(t, b, name), factor*resultOf(t, a, name), 1e-14)
	}
	far := make([]float64, len(x))
	for i := range x {
		far[i] = 1e9 + x[i] // exact: quarters at 1e9
	}
	sameResults(t, a, answer(t, "variance-interval", map[string]any{"sample": far}))
}

func TestSpreadKeepsWithinTheRangeOfDoubles(t *testing.T) {
	out := answer(t, "pooled-variance", map[string]any{"sds": List{Values: []float64{3e-150, 4e-150}}, "ns": List{Values: []float64{3, 3}}})
	within(t, "pooled-sd", resultOf(t, out, "pooled-sd"), math.Sqrt(12.5)*1e-150, 1e-15)
	out = answer(t, "variance-ratio-interval", map[string]any{"first-sd": 3e200, "first-n": 5, "second-sd": 1e200, "second-n": 5})
	within(t, "ratio", resultOf(t, out, "ratio"), 9, 1e-15)
	// Of a million million values the sd is known to 1/√(2n) of itself (normal limit of chi-square).
	out = answer(t, "variance-interval", map[string]any{"sd": 1.0, "n": 1_000_000_001})
	within(t, "sd-upper - 1", resultOf(t, out, "sd-upper")-1, 1.959963984540054/math.Sqrt(2e9), 1e-4)
	refusedFor(t, answer(t, "variance-interval", map[string]any{"sd": 1e200, "n": 5}), "too-large-to-hold")
}

func TestSpreadRefusals(t *testing.T) {
	same := []float64{4, 4, 4}
	other := []float64{4, 5, 6}
	for _, c := range []struct {
		name, code string
		arguments  map[string]any
	}{
		{"variance-interval", "no-spread", map[string]any{"sample": same}},
		{"variance-interval", "few-values", map[string]any{"sample": []float64{4}}},
		{"variance-ratio-interval", "no-spread", map[string]any{"sample": same, "second-sample": other}},
		{"variance-ratio-interval", "no-spread", map[string]any{"sample": other, "second-sample": same}},
		{"variance-ratio-interval", "few-values", map[string]any{"sample": other, "second-sample": []float64{1}}},
		{"pooled-variance", "no-spread", map[string]any{"samples": []Group{{"North", same}, {"Quay", same}}}},
		{"pooled-variance", "few-values", map[string]any{"samples": []Group{{"North", []float64{1}}, {"Quay", []float64{2}}}}},
		{"equal-spread-test", "few-groups", map[string]any{"samples": []Group{{"North", other}}}},
		{"equal-spread-test", "few-groups", map[string]any{"samples": []Group{{"North", other}, {"Quay", []float64{2}}}}},
		{"equal-spread-test", "few-values", map[string]any{"samples": []Group{{"North", []float64{0.1, 0.3}}, {"Quay", []float64{2, 7}}}}},
		{"equal-spread-test", "few-values", map[string]any{"samples": []Group{{"North", []float64{0.1, 0.3}}, {"Quay", []float64{2, 7}}}, "kind": levene}},
		{"equal-spread-test", "no-spread", map[string]any{"samples": []Group{{"North", same}, {"Quay", same}}}},
		{"equal-spread-test", "no-spread", map[string]any{"samples": []Group{{"North", same}, {"Quay", other}}, "kind": bartlett}},
	} {
		out := answer(t, c.name, c.arguments)
		refusedFor(t, out, c.code)
		checkDeclared(t, out.Function, out)
	}
}

func TestAGroupOfOneValueIsLeftOutByName(t *testing.T) {
	with := []Group{{"North", []float64{4, 5, 9, 2, 3}}, {"Quay", []float64{7, 7.5, 3, 1, 0}}, {"Fell", []float64{6}}}
	for _, kind := range []string{brownForsythe, levene, bartlett} {
		out := answer(t, "equal-spread-test", map[string]any{"samples": with, "kind": kind})
		sameResults(t, out, answer(t, "equal-spread-test", map[string]any{"samples": with[:2], "kind": kind}))
		if out.Status != StatusCaution || !strings.Contains(Note(out.Findings), "The group Fell has only 1 value") {
			t.Errorf("%s: %s, %s", kind, out.Status, Note(out.Findings))
		}
	}
	// A pooled variance asks nothing of it.
	out := answer(t, "pooled-variance", map[string]any{"samples": with})
	within(t, "df", resultOf(t, out, "df"), 8, 0)
	within(t, "groups", resultOf(t, out, "groups"), 3, 0)
}

func TestListsOfGroupsAreMatchedByNameOrOrder(t *testing.T) {
	byOrder := map[string]any{"sds": List{Values: []float64{1, 2, 3}}, "ns": List{Values: []float64{10, 20, 30}}}
	byName := map[string]any{"sds": List{Names: []string{"North", "Quay", "Mill"}, Values: []float64{1, 2, 3}},
		"ns": List{Names: []string{"Mill", "North", "Quay"}, Values: []float64{30, 10, 20}}}
	sameResults(t, answer(t, "pooled-variance", byOrder), answer(t, "pooled-variance", byName))
	for _, c := range []struct {
		ns   List
		want string
	}{
		{List{Values: []float64{10, 20}}, "ns is 2 numbers, but must have one for each of the 3 groups of sds; give one a group, in the same order or by name"},
		{List{Names: []string{"North", "Quay", "Mil"}, Values: []float64{1, 2, 3}},
			`ns has a value for "Mil", which is no group of sds; did you mean "Mill"?`},
		{List{Names: []string{"North", "Quay"}, Values: []float64{1, 2}}, `ns has no value for "Mill", a group of sds; give one for each group`},
	} {
		_, err := Answer(context.Background(), "pooled-variance", map[string]any{"sds": byName["sds"], "ns": c.ns})
		if err == nil || !strings.Contains(err.Error(), c.want) {
			t.Errorf("got %v, want %s", err, c.want)
		}
	}
	_, err := Answer(context.Background(), "equal-spread-test", byOrder)
	if want := "kind is brown-forsythe, but needs the values themselves; write kind bartlett with sds and ns, or give samples"; err == nil ||
		!strings.Contains(err.Error(), want) {
		t.Errorf("got %v, want %s", err, want)
	}
}

func TestSpreadCautions(t *testing.T) {
	out := answer(t, "pooled-variance", map[string]any{"sds": List{Values: []float64{1, 4}}, "ns": List{Values: []float64{10, 4}}})
	for _, code := range []string{"spreads-unlike", "few-values"} {
		if !raises(out, code) {
			t.Errorf("%s is not raised: %v", code, out.Findings)
		}
	}
	out = answer(t, "pooled-variance", map[string]any{"sds": List{Values: []float64{1, 4}}, "ns": List{Values: []float64{10, 4}}, "checks": false})
	if out.Status != StatusOK {
		t.Errorf("with checks off: %v", out.Findings)
	}
	var skew, far, tail, trend []float64
	for i := range 160 {
		skew = append(skew, math.Exp(float64(i%40)/4))
		far = append(far, float64(i*7%10))
		tail = append(tail, math.Pow(float64(i*37%160+1), -1.5))
		trend = append(trend, float64(i))
	}
	far[7] = 60
	out = answer(t, "equal-spread-test", map[string]any{"samples": From{Value: []Group{{"skew", skew}, {"far", far}, {"tail", tail}, {"trend", trend}},
		Origin: &Origin{Address: func(group, i int) string { return fmt.Sprintf("%c%d", 'A'+group, i+2) }}}})
	for _, code := range []string{"skewed-for-n", "far-value", "heavy-tail", "neighbours-alike"} {
		if !raises(out, code) {
			t.Errorf("%s is not raised: %v", code, out.Findings)
		}
	}
	for _, f := range out.Findings {
		if f.Code == "far-value" && strings.Contains(f.Message, "the group far") && (len(f.Cells) != 1 || f.Cells[0] != "B9") {
			t.Errorf("the far value stands in %v, want B9", f.Cells)
		}
	}
}

func TestSpreadSentences(t *testing.T) {
	out := answer(t, "variance-interval", map[string]any{"sd": 0.5, "n": 10, "reference": 0.3, "direction": above})
	got, _ := out.Get("sentence")
	if want := "The variance is 0.25, at least 0.13 with 95% confidence (half-width 0.12, direction above, n = 10; chi-square limit with 9 degrees of freedom, " +
		"variance with divisor n - 1). Against the reference 0.3: chi-square = 7.5, one-sided (above) p = 0.585. The standard deviation is 0.50, at least 0.36."; got != want {
		t.Errorf("got  %s\nwant %s", got, want)
	}
}
