package funcs

import (
	"context"
	"math"
	"testing"
)

func TestNormalSumReproducesPublishedSums(t *testing.T) {
	sum := func(sds []float64) *Outcome {
		return answer(t, "normal-sum", map[string]any{"means": make([]float64, len(sds)), "sds": sds})
	}
	ones := publishedExample(t, "gums1-922.u_y")
	ones.check(t, resultOf(t, sum(ones.list(t, "normal_sd")), "sd"))
	half := publishedExample(t, "gums1-922.95_half_width")
	half.check(t, resultOf(t, sum(half.list(t, "normal_sd")), "upper"))
	rectangular := publishedExample(t, "gums1-923.95_half_width_normal_approximation")
	rectangular.check(t, resultOf(t, sum(rectangular.list(t, "rectangular_sd")), "upper"))
	gauge := publishedExample(t, "gum-h1.combined_uncertainty_nm")
	gauge.check(t, resultOf(t, sum(gauge.list(t, "u_nm")), "sd"))
	part := publishedExample(t, "gum-h1.u_d_nm")
	part.check(t, resultOf(t, sum(part.list(t, "u_nm")), "sd"))
	relative := publishedExample(t, "gum-g41.combined_relative_standard_uncertainty_percent")
	relative.check(t, resultOf(t, sum(relative.list(t, "u_percent")), "sd"))
}

// JCGM 100:2008, H.2: the linear combination of correlated means that its
// equation (13) prescribes, with the derivatives of R = V/I·cos φ, X = V/I·sin φ
// and Z = V/I at the means as weights.
func TestNormalSumReproducesCorrelatedInputs(t *testing.T) {
	columns := [3][]float64{}
	var means, errors [3]float64
	for i, name := range []string{"volt", "milliampere", "phase_rad"} {
		columns[i] = publishedColumn(t, "data/gum_h2_vi_phi.csv", name)
		if name == "milliampere" {
			for k := range columns[i] {
				columns[i][k] /= 1000
			}
		}
		out := answer(t, "sample-summary", map[string]any{"sample": columns[i]})
		means[i], errors[i] = resultOf(t, out, "mean"), resultOf(t, out, "standard-error")
	}
	var matrix []float64
	for i := range columns {
		for j := range columns {
			r, _ := correlation(columns[i], columns[j])
			if i == j {
				r = 1
			}
			matrix = append(matrix, r)
		}
	}
	v, amp, phase := means[0], means[1], means[2]
	sin, cos := math.Sin(phase), math.Cos(phase)
	for id, weights := range map[string][]float64{
		"gum-h2.u_r": {cos / amp, -v * cos / (amp * amp), -v * sin / amp},
		"gum-h2.u_x": {sin / amp, -v * sin / (amp * amp), v * cos / amp},
		"gum-h2.u_z": {1 / amp, -v / (amp * amp), 0},
	} {
		out := answer(t, "normal-sum", map[string]any{"means": means[:], "sds": errors[:], "weights": weights, "correlations": matrix})
		publishedExample(t, id).check(t, resultOf(t, out, "sd"))
		if total := totalShare(t, out); math.Abs(total-1) > 1e-12 {
			t.Errorf("%s: shares sum to %v", id, total)
		}
	}
}

func totalShare(t *testing.T, out *Outcome) float64 {
	t.Helper()
	total := 0.0
	for _, r := range out.Rows {
		total += r.Values["share"].(float64)
	}
	return total
}

// By hand: items 1·N(10, 3²) and -2·N(4, 2²), correlation 0.5, constant 7. Mean
// 9; a = (3, -4), variance 9 + 16 - 12 = 13, shares 3(3-2)/13 and -4(-4+1.5)/13.
func TestNormalSumByHand(t *testing.T) {
	arguments := map[string]any{"means": []float64{10, 4}, "sds": []float64{3, 2}, "weights": []float64{1, -2}, "constant": 7.0, "correlation": 0.5,
		"threshold": 9.0, "chance": 0.5}
	out := answer(t, "normal-sum", arguments)
	for name, want := range map[string]float64{"mean": 9, "variance": 13, "sd": math.Sqrt(13), "sd-independent": 5, "sd-together": 1,
		"probability-above": 0.5, "value-for-chance": 9} {
		within(t, name, resultOf(t, out, name), want, 1e-15)
	}
	within(t, "first share", out.Rows[0].Values["share"].(float64), 3.0/13, 1e-15)
	within(t, "second share", out.Rows[1].Values["share"].(float64), 10.0/13, 1e-15)
	if out.Rows[0].Values["item"] != "1" || out.Rows[1].Values["item"] != "2" {
		t.Errorf("items are called %v and %v", out.Rows[0].Values["item"], out.Rows[1].Values["item"])
	}
	delete(arguments, "correlation")
	arguments["correlations"] = []float64{1, 0.5, 0.5, 1}
	matrix := answer(t, "normal-sum", arguments)
	for _, r := range normalSum.Results {
		within(t, r.Name+" by matrix", resultOf(t, matrix, r.Name), resultOf(t, out, r.Name), 1e-15)
	}
}

// By hand: the triangle from 2 over 5 to 14 has mean 7 and variance
// (4+25+196-10-28-70)/18 = 6.5; moved by 1e9 only the mean changes.
func TestTriangularItems(t *testing.T) {
	for _, offset := range []float64{0, 1e9} {
		list := func(x float64) []float64 { return []float64{x + offset, x, x} }
		out := answer(t, "normal-sum", map[string]any{"lows": list(2), "likelies": list(5), "highs": list(14)})
		within(t, "mean", resultOf(t, out, "mean"), 21+offset, 1e-15)
		within(t, "variance", resultOf(t, out, "variance"), 19.5, 2e-15)
		within(t, "share", out.Rows[0].Values["share"].(float64), 1.0/3, 1e-15)
		if out.Status != StatusOK {
			t.Errorf("status %s: %s", out.Status, Note(out.Findings))
		}
	}
	fixed := answer(t, "normal-sum", map[string]any{"lows": []float64{3, 1}, "likelies": []float64{3, 1}, "highs": []float64{3, 1.5}})
	within(t, "share of a fixed item", fixed.Rows[0].Values["share"].(float64), 0, 0)
}

func TestATriangularItemThatRulesTheSumIsACaution(t *testing.T) {
	named := func(values ...float64) List { return List{Names: []string{"fuel", "tolls"}, Values: values} }
	out := answer(t, "normal-sum", map[string]any{"lows": named(10, 20), "likelies": named(15, 21), "highs": named(40, 22)})
	want := "Item fuel, which is not normal, holds 100% of the variance, so the sum is not close to normal and its limits and probabilities are rough. " +
		"Split the item into smaller ones, or look at it by itself."
	if out.Status != StatusCaution || Note(out.Findings) != want || !raises(out, "one-item-dominates") {
		t.Errorf("%s: %s", out.Status, Note(out.Findings))
	}
	checkDeclared(t, normalSum, out)
	normal := answer(t, "normal-sum", map[string]any{"means": named(10, 20), "sds": named(10, 1)})
	if normal.Status != StatusOK {
		t.Errorf("normal items may hold any share: %s", Note(normal.Findings))
	}
}

func TestNormalSumAgreesWithNormalTransform(t *testing.T) {
	for _, c := range []struct{ mean, sd, weight, constant float64 }{
		{10, 3, 2, 1}, {-7.3, 0.1, -1.7, 1e9}, {1e-300, 1e-200, 3, 0}, {0.1, 1e150, 1.1, -0.3},
	} {
		sum := answer(t, "normal-sum", map[string]any{"means": []float64{c.mean}, "sds": []float64{c.sd}, "weights": []float64{c.weight}, "constant": c.constant})
		moved := answer(t, "normal-transform", map[string]any{"mean": c.mean, "sd": c.sd, "multiply": c.weight, "add": c.constant})
		for _, name := range []string{"mean", "sd", "variance"} {
			within(t, name, resultOf(t, sum, name), resultOf(t, moved, name), 3e-16)
		}
		within(t, "share", sum.Rows[0].Values["share"].(float64), 1, 0)
	}
}

func TestCorrelationsAtTheirEnds(t *testing.T) {
	means, sds := []float64{1, 2, 3}, []float64{1, 2.5, 4}
	at := func(r float64) *Outcome {
		return answer(t, "normal-sum", map[string]any{"means": means, "sds": sds, "correlation": r})
	}
	within(t, "correlation 0", resultOf(t, at(0), "sd"), resultOf(t, at(0), "sd-independent"), 1e-15)
	within(t, "correlation 1", resultOf(t, at(1), "sd"), resultOf(t, at(1), "sd-together"), 1e-15)
	// Σa² + 2rΣaᵢaⱼ = 23.25 - 0.5·33 at r = -1/2, the lowest for three items.
	within(t, "correlation -1/2", resultOf(t, at(-0.5), "variance"), 6.75, 1e-15)
	for _, r := range []float64{-0.5, -0.2, 0.3, 1} {
		within(t, "shares", totalShare(t, at(r)), 1, 1e-14)
	}
	// Two items that all but cancel: sd 1 - b, which is exact for doubles so near.
	b := 0.9999999
	cancel := answer(t, "normal-sum", map[string]any{"means": []float64{0, 0}, "sds": []float64{1, b}, "weights": []float64{1, -1}, "correlation": 1.0})
	within(t, "what is left", resultOf(t, cancel, "sd"), 1-b, 1e-15)
}

// Summing in two steps gives the same law as summing at once.
func TestSumsOfSumsAgree(t *testing.T) {
	means, sds := []float64{3, -1, 8.5, 2}, []float64{1, 0.5, 2, 0.25}
	whole := answer(t, "normal-sum", map[string]any{"means": means, "sds": sds})
	var partMeans, partSDs []float64
	for i := 0; i < 4; i += 2 {
		part := answer(t, "normal-sum", map[string]any{"means": means[i : i+2], "sds": sds[i : i+2]})
		partMeans, partSDs = append(partMeans, resultOf(t, part, "mean")), append(partSDs, resultOf(t, part, "sd"))
	}
	again := answer(t, "normal-sum", map[string]any{"means": partMeans, "sds": partSDs})
	for _, name := range []string{"mean", "sd", "variance", "lower", "upper"} {
		within(t, name, resultOf(t, again, name), resultOf(t, whole, name), 1e-15)
	}
}

func TestItemsGoTogetherByName(t *testing.T) {
	out := answer(t, "normal-sum", map[string]any{
		"means":   List{Names: []string{"North", "Quay"}, Values: []float64{10, 20}},
		"sds":     List{Names: []string{"Quay", "North"}, Values: []float64{2, 1}},
		"weights": List{Names: []string{"Quay", "North"}, Values: []float64{0.5, 3}},
	})
	within(t, "mean", resultOf(t, out, "mean"), 40, 0)
	within(t, "variance", resultOf(t, out, "variance"), 10, 1e-15)
	if out.Rows[0].Values["item"] != "North" {
		t.Errorf("the first item is %v", out.Rows[0].Values["item"])
	}
	within(t, "North's share", out.Rows[0].Values["share"].(float64), 0.9, 1e-15)
}

func TestNormalSumRefusals(t *testing.T) {
	three, ones := []float64{10, 20, 3}, []float64{1, 1, 1}
	for _, c := range []struct {
		arguments     map[string]any
		code, message string
	}{
		{map[string]any{"means": three, "sds": ones, "correlation": -0.6}, "not-a-correlation-matrix",
			"No 3 items can all have correlation -0.6 with one another; for so many the lowest is -0.5. Give a higher correlation, or a matrix of correlations."},
		{map[string]any{"means": three, "sds": ones, "correlation": -0.5}, "no-spread",
			"The sum has no spread: every item's weight times its standard deviation is 0, or the correlations cancel them; the sum is 33, and nothing more can be said of it."},
		{map[string]any{"means": three, "sds": []float64{0, 0, 0}}, "no-spread",
			"The sum has no spread: every item's weight times its standard deviation is 0, or the correlations cancel them; the sum is 33, and nothing more can be said of it."},
		{map[string]any{"means": three, "sds": ones, "correlations": []float64{1, .9, .9, .9, 1, -.9, .9, -.9, 1}}, "not-a-correlation-matrix",
			"No quantities can have these correlations (smallest eigenvalue -0.8, but none may be negative); estimate all of them from the same rows, or bring them nearer to 0."},
		{map[string]any{"means": three[:2], "sds": ones[:2], "correlations": []float64{1, .9, .8, 1}}, "not-a-correlation-matrix",
			"The correlations are not symmetric: row 1, column 2 is 0.9, but row 2, column 1 is 0.8; give each pair the same number in both places."},
		{map[string]any{"means": three[:2], "sds": ones[:2], "correlations": []float64{1, .8, .8, .9}}, "not-a-correlation-matrix",
			"Row 2, column 2 of the correlations is 0.9, but an item's correlation with itself is 1; check the order of the numbers."},
		{map[string]any{"means": three, "sds": []float64{1e200, 1, 1}}, "too-large-to-hold",
			"The variance passes what a double can hold; give the numbers in a larger or smaller unit."},
		{map[string]any{"means": three, "sds": []float64{1e200, 1, 1}, "weights": []float64{1e200, 1, 1}}, "too-large-to-hold",
			"The sd passes what a double can hold; give the numbers in a larger or smaller unit."},
	} {
		out := answer(t, "normal-sum", c.arguments)
		refusedFor(t, out, c.code)
		if Note(out.Findings) != c.message {
			t.Errorf("got  %s\nwant %s", Note(out.Findings), c.message)
		}
		checkDeclared(t, normalSum, out)
	}
}

// A matrix with an eigenvalue of 0 belongs to quantities that determine one
// another, which is no fault; rounding may push it a little below.
func TestASingularMatrixIsNoFault(t *testing.T) {
	third := 1.0 / 3
	for _, matrix := range [][]float64{
		{1, 1, 1, 1},
		{1, -third, -third, -third, -third, 1, -third, -third, -third, -third, 1, -third, -third, -third, -third, 1},
	} {
		m := int(math.Sqrt(float64(len(matrix))))
		sds := []float64{1, 2, 3, 4}[:m]
		out := answer(t, "normal-sum", map[string]any{"means": make([]float64, m), "sds": sds, "correlations": matrix})
		if out.Status != StatusOK {
			t.Errorf("%v: %s", matrix, Note(out.Findings))
		}
	}
}

func TestNormalSumArgumentErrors(t *testing.T) {
	two := []float64{1, 2}
	for _, c := range []struct {
		arguments map[string]any
		want      string
	}{
		{map[string]any{"means": two}, "sds is missing; with means give sds too"},
		{map[string]any{"means": two, "sds": two, "lows": two}, "lows cannot be given together with means and sds; give either means with sds, or lows with likelies and highs"},
		{map[string]any{"means": two, "sds": []float64{1}}, "sds is 1 number, but must have one for each item of means (2 numbers); give one an item, in the same order"},
		{map[string]any{"means": two, "sds": []float64{1, -1}}, "sds, value 2 is -1, but must be 0 or more"},
		{map[string]any{"means": two, "sds": two, "weights": []float64{1, 2, 3}},
			"weights is 3 numbers, but must have one for each item of means (2 numbers); give one an item, in the same order"},
		{map[string]any{"means": List{Names: []string{"North", "Quay"}, Values: two}, "sds": List{Names: []string{"North", "Mill"}, Values: two}},
			`sds has no number for "Quay" of means; give one for each, under the same names`},
		{map[string]any{"lows": two, "likelies": []float64{1, 5}, "highs": []float64{2, 4}},
			"likelies is 5, but of item 2 must lie from its low (2) to its high (4); check the order of the three lists"},
		{map[string]any{"means": two, "sds": two, "correlation": 1.5}, "correlation is 1.5, but must be from -1 to 1"},
		{map[string]any{"means": two, "sds": two, "correlation": 0.5, "correlations": []float64{1, 0, 0, 1}},
			"correlation is 0.5, but cannot be given together with correlations; give one of the two"},
		{map[string]any{"means": two, "sds": two, "correlations": []float64{1, 0.5, 1}},
			"correlations is 3 numbers, but must be 4 for 2 items: the whole square matrix, row by row; write its rows one after another, with the ones of the diagonal"},
		{map[string]any{"means": two, "sds": two, "probability": 95.0}, "probability is 95, but must be strictly between 0 and 1; write 95% or 0.95"},
		{map[string]any{"means": two, "sds": two, "chance": 80.0}, "chance is 80, but must be strictly between 0 and 1; write 80% or 0.8"},
	} {
		_, err := Answer(context.Background(), "normal-sum", c.arguments)
		if err == nil || err.Error() != "normal-sum: "+c.want {
			t.Errorf("%v: got\n%v\nwant\n%s", c.arguments, err, c.want)
		}
	}
}

func TestNormalSumSentence(t *testing.T) {
	out := answer(t, "normal-sum", map[string]any{
		"means": From{Value: []float64{10, 20}, Origin: &Origin{Unit: "minutes"}}, "sds": []float64{1, 2}, "threshold": 31.0, "chance": 0.8, "correlation": 0.3})
	want := "The sum of 2 items has mean 30.0 minutes and standard deviation 2.49 and lies from 25.1 to 34.9 with probability 95% " +
		"(normal law of a weighted sum of correlated items). It passes 31 minutes with probability 0.344. It stays at or below 32.1 minutes with probability 80%. " +
		"The standard deviation would be 2.236 if the items were independent and 3 if all moved together."
	if got, _ := out.Get("sentence"); got != want {
		t.Errorf("got  %v\nwant %s", got, want)
	}
	within(t, "used", resultOf(t, out, "used"), 2, 0)
}
