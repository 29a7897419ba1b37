package funcs

import (
	"context"
	"math"
	"slices"
	"strings"
	"testing"
)

// Certified values of the NIST StRD univariate sets. The digits asked for are
// those that the values stored as doubles still determine (certified.csv), at
// most 15 for the mean and 14 for the sd and the lag-1 autocorrelation.
func TestSampleSummaryReachesTheCertifiedDigits(t *testing.T) {
	for _, row := range csvRows(t, published+"nist-strd-univariate/certified.csv") {
		name := row["dataset"]
		values := publishedColumn(t, "nist-strd-univariate/"+name+".csv", "y")
		out := answer(t, "sample-summary", map[string]any{"sample": values})
		if got := numberOf(t, out, "n"); got != float(t, row["n"]) {
			t.Errorf("%s: n = %v, want %s", name, got, row["n"])
		}
		for _, c := range []struct {
			result, column, digits string
			most                   float64
		}{
			{"mean", "mean", "mean_digits_float64_input", 15},
			{"sd", "sd", "sd_digits_float64_input", 14},
			{"lag-1-autocorrelation", "lag1_autocorrelation", "lag1_digits_float64_input", 14},
		} {
			got, want := numberOf(t, out, c.result), float(t, row[c.column])
			digits := math.Min(c.most, float(t, row[c.digits]))
			// The digits in the file are cut to one decimal; 5 stands for half a unit of the last.
			tolerance := math.Pow(10, -digits) * 1.3
			if digits == c.most {
				tolerance = 5 * math.Pow(10, -digits)
			}
			within(t, name+" "+c.result, got, want, tolerance)
		}
	}
}

func TestSampleSummaryReproducesPublishedSummaries(t *testing.T) {
	names := map[string]string{"n": "n", "mean": "mean", "sd": "sd", "sd of the mean": "standard-error"}
	tested := 0
	for _, p := range publishedExamples(t, "mean_interval", "one_sample_test", "outlier", "variance_test") {
		result, ok := names[p.quantity]
		if !ok {
			continue
		}
		var values []float64
		if file, isFile := p.inputs["data"].(string); isFile {
			column := map[string]string{"data/gum_443_temperature.csv": "celsius", "data/nist_gear_diameter.csv": "diameter"}[file]
			if column == "" {
				column = "y"
			}
			values = publishedColumn(t, file, column)
		} else {
			values = p.list(t, "values")
		}
		p.check(t, numberOf(t, answer(t, "sample-summary", map[string]any{"sample": values}), result))
		tested++
	}
	if tested < 11 {
		t.Errorf("only %d published summaries were tested", tested)
	}
}

// Means and their standard errors of JCGM 100:2008, H.2, Table H.2.
func TestSampleSummaryReproducesRepeatedReadings(t *testing.T) {
	for _, c := range []struct{ quantity, column, result string }{
		{"mean_v", "volt", "mean"}, {"mean_i_ma", "milliampere", "mean"}, {"mean_phase", "phase_rad", "mean"},
		{"u_mean_v", "volt", "standard-error"}, {"u_mean_i_ma", "milliampere", "standard-error"}, {"u_mean_phase", "phase_rad", "standard-error"},
	} {
		values := publishedColumn(t, "data/gum_h2_vi_phi.csv", c.column)
		out := answer(t, "sample-summary", map[string]any{"sample": values})
		publishedExample(t, "gum-h2."+c.quantity).check(t, numberOf(t, out, c.result))
	}
}

func TestQuartilesFollowTheirDefinition(t *testing.T) {
	// Positions h for n = 5 (Hyndman & Fan 1996): type 6 (n+1)p, type 7 (n-1)p + 1,
	// type 8 (n+1/3)p + 1/3, then linear between the values.
	values := []float64{16, 1, 8, 2, 4}
	for _, c := range []struct {
		kind         any
		lower, upper float64
	}{
		{6, 1.5, 12}, {7, 2, 8}, {8, 5.0 / 3, 32.0 / 3}, {nil, 5.0 / 3, 32.0 / 3}, {7.0, 2, 8},
	} {
		out := answer(t, "sample-summary", map[string]any{"sample": values, "quartile-type": c.kind})
		within(t, "lower quartile", numberOf(t, out, "lower-quartile"), c.lower, 2e-15)
		within(t, "upper quartile", numberOf(t, out, "upper-quartile"), c.upper, 2e-15)
		within(t, "median", numberOf(t, out, "median"), 4, 0)
		within(t, "minimum", numberOf(t, out, "minimum"), 1, 0)
		within(t, "maximum", numberOf(t, out, "maximum"), 16, 0)
	}
}

// The formulas of Joanes & Gill 1998 for 0, 0, 0, 1 in exact arithmetic: g1 =
// (3/32)/(3/16)^1.5, G1 = g1·√12/2 = 2; g2 = -2/3, G2 = (3/2)(5·g2 + 6) = 4.
func TestShapeFollowsItsDefinition(t *testing.T) {
	out := answer(t, "sample-summary", map[string]any{"sample": []float64{0, 0, 0, 1}})
	within(t, "skewness", numberOf(t, out, "skewness"), 2, 1e-15)
	within(t, "excess-kurtosis", numberOf(t, out, "excess-kurtosis"), 4, 1e-15)
	within(t, "variance", numberOf(t, out, "variance"), 0.25, 0)
	within(t, "coefficient-of-variation", numberOf(t, out, "coefficient-of-variation"), 2, 0)
}

func TestAGapSeparatesNeighbours(t *testing.T) {
	// Mean 3, squares 10; the pairs are (1, 2) and (4, 5): (2 + 2)/10.
	gap := answer(t, "sample-summary", map[string]any{"sample": []float64{1, 2, math.NaN(), 4, 5}})
	within(t, "lag-1 with a gap", numberOf(t, gap, "lag-1-autocorrelation"), 0.4, 1e-15)
	within(t, "n", numberOf(t, gap, "n"), 4, 0)
	within(t, "used", numberOf(t, gap, "used"), 4, 0)
	joined := answer(t, "sample-summary", map[string]any{"sample": []float64{1, 2, 4, 5}})
	within(t, "lag-1 without it", numberOf(t, joined, "lag-1-autocorrelation"), 0.3, 1e-15) // (2 - 1 + 2)/10
}

func TestSampleSummaryTellsOnlyWhatExists(t *testing.T) {
	for _, c := range []struct {
		values []float64
		absent []string
		status Status
		code   string
	}{
		{[]float64{7}, []string{"sd", "variance", "standard-error", "coefficient-of-variation", "skewness", "excess-kurtosis", "lag-1-autocorrelation"},
			StatusCaution, "few-values"},
		{[]float64{3, 9}, []string{"skewness", "excess-kurtosis"}, StatusCaution, "few-values"},
		{[]float64{3, 9, 4}, []string{"excess-kurtosis"}, StatusCaution, "few-values"},
		{[]float64{-1, 1, -2, 2, 0}, []string{"coefficient-of-variation"}, StatusOK, ""},
		{[]float64{2, 2, 2, 2, 2}, []string{"skewness", "excess-kurtosis", "lag-1-autocorrelation"}, StatusCaution, "no-spread"},
	} {
		out := answer(t, "sample-summary", map[string]any{"sample": c.values})
		if out.Status != c.status || (c.code != "" && !raises(out, c.code)) {
			t.Errorf("%v: %s, %v", c.values, out.Status, out.Findings)
		}
		for _, r := range sampleSummary.Results {
			_, got := out.Get(r.Name)
			if want := !slices.Contains(c.absent, r.Name); got != want {
				t.Errorf("%v: %s is there: %v, want %v", c.values, r.Name, got, want)
			}
		}
	}
}

func TestSampleSummaryCautions(t *testing.T) {
	drift := make([]float64, 30) // neighbours alike
	for i := range drift {
		drift[i] = float64(i) + float64(i%3)
	}
	far := []float64{12, 11, 13, 12, 10, 14, 12, 11, 13, 60}
	heavy := make([]float64, 200) // quantiles of the Cauchy law, in a mixed order
	for i := range heavy {
		heavy[i] = math.Tan(math.Pi * ((float64(i*77%200)+0.5)/200 - 0.5))
	}
	for _, c := range []struct {
		code    string
		values  []float64
		message string
	}{
		{"neighbours-alike", drift, "Neighbouring values of the sample are not independent (lag-1 autocorrelation 0.8"},
		{"far-value", far, "Value 10 of the sample, 60, lies 2.8"},
		{"heavy-tail", heavy, "has tails so heavy"},
		{"no-spread", []float64{5, 5, 5}, "All values of the sample are equal, so skewness, kurtosis and autocorrelation do not exist"},
		{"few-values", []float64{5, 6, 8}, "The sample has only 3 values: its spread, quartiles and shape say little. Measure at least 5."},
	} {
		out := answer(t, "sample-summary", map[string]any{"sample": c.values})
		if out.Status != StatusCaution || !raises(out, c.code) || !strings.Contains(Note(out.Findings), c.message) {
			t.Errorf("%s: %s, %s", c.code, out.Status, Note(out.Findings))
		}
		checkDeclared(t, sampleSummary, out)
		if quiet := answer(t, "sample-summary", map[string]any{"sample": c.values, "checks": false}); quiet.Status != StatusOK {
			t.Errorf("%s: with checks off: %s", c.code, Note(quiet.Findings))
		}
	}
	unordered := From{Value: drift, Origin: &Origin{Unordered: true}}
	if out := answer(t, "sample-summary", map[string]any{"sample": unordered}); raises(out, "neighbours-alike") {
		t.Error("values in no order have no neighbours")
	}
}

func TestSampleSummaryHoldsAtAnySize(t *testing.T) {
	base := []float64{3, 7, 1.5, 4.25, -2, 11, 6}
	plain := answer(t, "sample-summary", map[string]any{"sample": base})
	for _, exponent := range []int{-900, -500, -400, -201, 201, 400, 505} {
		scaled := make([]float64, len(base))
		for i, x := range base {
			scaled[i] = math.Ldexp(x, exponent)
		}
		out := answer(t, "sample-summary", map[string]any{"sample": scaled})
		for _, r := range sampleSummary.Results {
			want := numberOf(t, plain, r.Name)
			switch r.Unit {
			case SameUnit:
				want = math.Ldexp(want, exponent)
			case SquaredUnit:
				want = math.Ldexp(want, 2*exponent)
				if want == 0 {
					want = math.NaN() // smaller than the smallest double: absent
				}
			}
			if got := numberOf(t, out, r.Name); got != want && !(math.IsNaN(got) && math.IsNaN(want)) {
				t.Errorf("times 2^%d: %s = %v, want %v", exponent, r.Name, got, want)
			}
		}
	}
}

func TestALargeOffsetCostsNoDigits(t *testing.T) {
	// Every value is a whole number of 2^-20, so that the shifted sample is exact.
	noise := []float64{3, 7, 1.5, 4.25, -2, 11, 6, 0.5, -0.25}
	plain, shifted := make([]float64, len(noise)), make([]float64, len(noise))
	for i, x := range noise {
		plain[i] = math.Ldexp(x, -18)
		shifted[i] = 1e9 + plain[i]
	}
	a := answer(t, "sample-summary", map[string]any{"sample": plain})
	b := answer(t, "sample-summary", map[string]any{"sample": shifted})
	for _, name := range []string{"sd", "variance", "standard-error", "skewness", "excess-kurtosis", "lag-1-autocorrelation"} {
		within(t, name, numberOf(t, b, name), numberOf(t, a, name), 1e-13)
	}
	within(t, "mean", numberOf(t, b, "mean")-1e9, numberOf(t, a, "mean"), 3e-3) // to the last place of 1e9
}

func TestSampleSummaryGivesTheDigitsOfMeanInterval(t *testing.T) {
	values := publishedColumn(t, "data/nist_zarr13_heat_flow.csv", "y")
	a := answer(t, "sample-summary", map[string]any{"sample": values})
	b := answer(t, "mean-interval", map[string]any{"sample": values})
	for _, name := range []string{"n", "mean", "sd", "standard-error"} {
		within(t, name, numberOf(t, a, name), numberOf(t, b, name), 0)
	}
}

func TestSampleSummarySentence(t *testing.T) {
	sample := From{Value: []float64{50, 48, 44, 56, 61, 52, 53, 55, 67, 51}, Origin: &Origin{Unit: "minutes", Range: "Trips!C2:C11"}}
	out := answer(t, "sample-summary", map[string]any{"sample": sample})
	want := "The mean is 53.7 minutes, standard deviation 6.6, standard error 2.1; median 52.5, quartiles 49.8 and 56.4, values from 44 to 67 " +
		"(n = 10; sd with divisor n - 1, quartiles of type 8)."
	if got, _ := out.Get("sentence"); got != want {
		t.Errorf("got  %v\nwant %s", got, want)
	}
	one := answer(t, "sample-summary", map[string]any{"sample": []float64{2.5}})
	if got, _ := one.Get("sentence"); got != "The one value is 2.5 (n = 1)." {
		t.Errorf("got %v", got)
	}
}

func TestSampleSummaryRefusesBadArguments(t *testing.T) {
	for _, c := range []struct {
		arguments map[string]any
		want      string
	}{
		{map[string]any{"sample": []float64{1, 2}, "quartile-type": 9}, "sample-summary: quartile-type is 9, but must be a whole number, from 6 to 8"},
		{map[string]any{"sample": []float64{1, 2}, "quartile-type": 6.5}, "sample-summary: quartile-type is 6.5, but must be a whole number, from 6 to 8"},
		{map[string]any{"sample": []float64{1, math.Inf(1)}},
			"sample-summary: sample, value 2 is +Inf, but must be a finite number; leave the cell blank where there is no value"},
		{nil, "sample-summary: sample is missing; give the measured values, in the order measured"},
	} {
		_, err := Answer(context.Background(), "sample-summary", c.arguments)
		if err == nil || err.Error() != c.want {
			t.Errorf("got  %v\nwant %s", err, c.want)
		}
	}
}
