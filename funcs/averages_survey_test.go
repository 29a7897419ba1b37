package funcs

import (
	"fmt"
	"math"
	"slices"
	"testing"
)

func strataOf(groups []Group, sizes ...float64) map[string]any {
	names := make([]string, len(groups))
	for i, g := range groups {
		names[i] = g.Name
	}
	return map[string]any{"samples": groups, "sizes": List{Names: names, Values: sizes}}
}

// One stratum is mean-interval with population-size.
func TestOneStratumIsAMeanInterval(t *testing.T) {
	for _, d := range everyDirection {
		a := answer(t, "stratified-interval", altered(strataOf([]Group{{"North", sixTimes}}, 40), "direction", d))
		b := answer(t, "mean-interval", map[string]any{"sample": sixTimes, "population-size": 40, "direction": d})
		limitsExist(t, a, d)
		for _, r := range a.Function.Results {
			if v, ok := b.Get(r.Name); ok {
				within(t, r.Name, resultOf(t, a, r.Name), v.(float64), 1e-14)
			} else {
				absent(t, a, r.Name)
			}
		}
	}
}

func TestStrataOfValuesAndOfSummariesAgreeDigitForDigit(t *testing.T) {
	groups := []Group{{"North", sixTimes}, {"Quay", []float64{20, 24, math.NaN(), 22, 27, 19}}, {"Mill", []float64{50, 61}}}
	a := answer(t, "stratified-interval", strataOf(groups, 100, 30, 2))
	lists := listsOf([]Group{groups[0], {"Quay", withoutGaps(groups[1].Values)}, groups[2]})
	lists["sizes"] = List{Names: []string{"Mill", "North", "Quay"}, Values: []float64{2, 100, 30}} // by name
	sameResults(t, a, answer(t, "stratified-interval", lists))
	// Mill was measured whole: its values add nothing to the error, though only 2.
	if raises(a, "few-values") {
		t.Errorf("a whole stratum: %s", Note(a.Findings))
	}
	few := answer(t, "stratified-interval", strataOf(groups, 100, 30, 9))
	if !raises(few, "few-values") {
		t.Error("two values of nine without a caution")
	}
	checkDeclared(t, few.Function, few)
	variance := 0.0 // Cochran 1977, equation 5.7, by the samples' own variances
	for i, n := range []float64{6, 5} {
		size := []float64{100, 30}[i]
		s := answer(t, "sample-summary", map[string]any{"sample": groups[i].Values})
		variance += size * (size - n) / n * resultOf(t, s, "variance")
	}
	within(t, "standard-error", resultOf(t, a, "standard-error"), math.Sqrt(variance)/132, 1e-14)
}

func TestStrataMeasuredWhole(t *testing.T) {
	groups := []Group{{"North", []float64{1, 3}}, {"Quay", []float64{7}}}
	out := answer(t, "stratified-interval", strataOf(groups, 2, 1))
	for _, limit := range []string{"mean", "lower", "upper"} {
		within(t, limit, resultOf(t, out, limit), 11.0/3, 1e-15)
	}
	within(t, "total", resultOf(t, out, "total"), 11, 1e-15)
	within(t, "standard-error", resultOf(t, out, "standard-error"), 0, 0)
	absent(t, out, "df")
}

func TestStrataRefusals(t *testing.T) {
	out := answer(t, "stratified-interval", strataOf([]Group{{"North", sixTimes}, {"Quay", []float64{7}}}, 100, 30))
	refusedFor(t, out, "few-values")
	if want := "The stratum Quay has only one value of 30, so its spread is unknown; measure at least 2, or join it with a stratum like it."; Note(out.Findings) != want {
		t.Errorf("got %s", Note(out.Findings))
	}
	equal := answer(t, "stratified-interval", map[string]any{"sizes": []float64{9, 9}, "means": []float64{1, 2}, "sds": []float64{0, 0}, "ns": []float64{3, 3}})
	refusedFor(t, equal, "no-spread")
	if want := "The groups group 1 and group 2: all values equal (sd 0), so neither an interval nor a test exists; " +
		"check whether the values were rounded or copied down."; Note(equal.Findings) != want {
		t.Errorf("got %s", Note(equal.Findings))
	}
	refuses(t, "stratified-interval", strataOf([]Group{{"North", sixTimes}, {"Quay", sixTimes}}, 100, 5),
		`sizes is 5, but is smaller than the sample of the stratum "Quay" (n = 6); give the number in the whole stratum`)
	refuses(t, "stratified-interval", map[string]any{"samples": []Group{{"North", sixTimes}, {"Quay", sixTimes}}, "sizes": List{Names: []string{"North", "Quai"}, Values: []float64{100, 50}}},
		`sizes has a value for "Quai", which is no group of samples; did you mean "Quay"?`)
}

func TestRatioOfSums(t *testing.T) {
	minutes, parcels := []float64{30, 24, 42, 36, 51}, []float64{10, 9, 15, 10, 18}
	for _, d := range everyDirection {
		a := answer(t, "ratio-of-sums-interval", map[string]any{"sample": minutes, "second-sample": parcels, "direction": d})
		limitsExist(t, a, d)
		// Scales, and a negative denominator mirrors it.
		seconds, negative := make([]float64, 5), make([]float64, 5)
		for i := range minutes {
			seconds[i], negative[i] = 60*minutes[i], -parcels[i]
		}
		b := answer(t, "ratio-of-sums-interval", map[string]any{"sample": seconds, "second-sample": parcels, "direction": d})
		for _, r := range []string{"ratio", "lower", "upper", "standard-error"} {
			if v, ok := a.Get(r); ok {
				within(t, r, resultOf(t, b, r), 60*v.(float64), 1e-13)
			}
		}
		turned := map[string]string{either: either, above: below, below: above}[d]
		mirrored(t, a, answer(t, "ratio-of-sums-interval", map[string]any{"sample": minutes, "second-sample": negative, "direction": turned}), "ratio", 1e-14)
		// Denominators of 1 make it the mean.
		ones := answer(t, "ratio-of-sums-interval", map[string]any{"sample": minutes, "second-sample": []float64{1, 1, 1, 1, 1}, "direction": d, "population-size": 20})
		mean := answer(t, "mean-interval", map[string]any{"sample": minutes, "direction": d, "population-size": 20})
		for _, r := range [][2]string{{"ratio", "mean"}, {"lower", "lower"}, {"upper", "upper"}, {"standard-error", "standard-error"}, {"df", "df"}} {
			if v, ok := mean.Get(r[1]); ok {
				within(t, fmt.Sprint("denominators of 1: ", r), resultOf(t, ones, r[0]), v.(float64), 1e-14)
			}
		}
	}
	whole := answer(t, "ratio-of-sums-interval", map[string]any{"sample": minutes, "second-sample": parcels, "population-size": 5})
	within(t, "of all rows", resultOf(t, whole, "upper"), 183.0/62, 1e-15)
}

func TestRatioOfSumsRefusals(t *testing.T) {
	for _, c := range []struct {
		code string
		y, x []float64
	}{
		{"zero-denominator", []float64{1, 2}, []float64{1, -1}},
		{"no-spread", []float64{1, 3, 7}, []float64{10, 30, 70}}, // 0.1 is no double: rounding is no spread
		{"no-spread", []float64{1, 2, 3}, []float64{3, 6, 9}},
		{"few-values", []float64{1, math.NaN()}, []float64{3, 6}},
	} {
		out := answer(t, "ratio-of-sums-interval", map[string]any{"sample": c.y, "second-sample": c.x})
		refusedFor(t, out, c.code)
		checkDeclared(t, out.Function, out)
	}
	refuses(t, "ratio-of-sums-interval", map[string]any{"sample": sixTimes, "second-sample": sixTimes, "population-size": 5},
		"population-size is 5, but is smaller than the sample (n = 6); give the number of all rows")
}

// A caution about one row names that row's cell, incomplete rows counted.
func TestRatioOfSumsNamesTheRow(t *testing.T) {
	y := []float64{math.NaN(), 10, 11, 9, 10, 12, 90, 10, 11, 9}
	x := []float64{5, 10, 10, 10, 10, 10, 10, 10, 10, 10}
	address := func(_, i int) string { return fmt.Sprintf("C%d", i+2) }
	out := answer(t, "ratio-of-sums-interval", map[string]any{"sample": From{Value: y, Origin: &Origin{Address: address}}, "second-sample": x})
	at := slices.IndexFunc(out.Findings, func(f Finding) bool { return f.Code == "far-value" })
	if at < 0 || !slices.Equal(out.Findings[at].Cells, []string{"C8"}) {
		t.Errorf("%v", out.Findings)
	}
}
