package funcs

import (
	"math"
	"regexp"
	"strings"
	"testing"
)

// leftOut gives the reason for every row of these topics that no function of the
// catalogue answers; patterns match the row's id.
var leftOut = map[string]string{
	`^newcombe1998a-other-.*(wald|continuity)`:       "limits that the catalogue does not offer",
	`^newcombe1998c-`:                                "paired shares are no function of the catalogue",
	`^nist-prc-474\..*critical_range`:                "simultaneous limits of another method than Newcombe's",
	`^fisher1935-tea\.`:                              "the exact test of a 2 by 2 table with both margins fixed is no function",
	`^nist-prc-263\..*(howe|natrella|noncentrality)`: "approximate factors and their parts; the exact ones are tested",
	`^nist-prc-264\.n_`:                              "a size: tested with distribution-free-tolerance-size",
	`^nist-eda-135h2\.`:                              "the Tietjen-Moore test is no function",
	`^nist-eda-135d\.z$`:                             "a normal approximation: tested below against the exact mean and sd of the runs",
	`^(gum-g23|gums1-923)\.`:                         "quantiles of sums of rectangular laws are no function; normal-sum is tested with the normal ones",
	`^berry-esseen\.`:                                "a constant of a bound, which the catalogue does not use",
	`^gum-e1\.`:                                      "the spread of the sd itself is no result of a function",
}

// answers compares what a function answers with every row of the topics; each
// row must be answered or left out with its reason.
func answers(t *testing.T, least int, of func(p publishedRow) (float64, bool), topics ...string) {
	t.Helper()
	tested := 0
	for _, p := range publishedExamples(t, topics...) {
		got, ok := quantileRow(t, p)
		if !ok {
			got, ok = of(p)
		}
		if ok {
			p.check(t, got)
			tested++
			continue
		}
		reason := ""
		for pattern, why := range leftOut {
			if regexp.MustCompile(pattern).MatchString(p.id) {
				reason = why
			}
		}
		if reason == "" {
			t.Errorf("%s (%s): neither tested nor left out with a reason", p.id, p.quantity)
		}
	}
	if tested < least {
		t.Errorf("%v: only %d rows were tested, want %d", topics, tested, least)
	}
}

func TestAveragesReproducePublishedExamples(t *testing.T) {
	mean := func(result string, arguments map[string]any) (float64, bool) {
		return resultOf(t, answer(t, "mean-interval", arguments), result), true
	}
	columns := map[any]string{"data/nist_zarr13_heat_flow.csv": "y", "data/gum_443_temperature.csv": "celsius"}
	answers(t, 16, func(p publishedRow) (float64, bool) {
		arguments := map[string]any{}
		if column, ok := columns[p.inputs["data"]]; ok {
			arguments["sample"] = publishedColumn(t, p.inputs["data"].(string), column)
		}
		if _, ok := p.inputs["values"]; ok {
			arguments["sample"] = p.list(t, "values")
		}
		if p.id == "nist-eda-1352.t_statistic_for_mu0_5" { // from the printed mean and sd
			arguments = map[string]any{"mean": 9.261460, "sd": 0.02278881, "n": 195}
		}
		if mu, ok := p.inputs["mu0"]; ok {
			arguments["reference"] = mu
		}
		result, ok := map[string]string{"n": "n", "mean": "mean", "sd": "sd", "sd of the mean": "standard-error", "df": "df", "t": "t", "t statistic for mu0=5": "t",
			"lower 95% limit": "lower", "upper 95% limit": "upper"}[p.quantity]
		if !ok {
			return 0, false
		}
		return mean(result, arguments)
	}, "mean_interval", "one_sample_test")

	drugs := map[string][]float64{"1": publishedColumn(t, "data/student1908_sleep.csv", "extra_hours_drug1"), "2": publishedColumn(t, "data/student1908_sleep.csv", "extra_hours_drug2")}
	sleep := answer(t, "paired-interval", map[string]any{"sample": drugs["2"], "second-sample": drugs["1"]})
	byN := math.Sqrt(9.0 / 10) // Student divides by n
	answers(t, 12, func(p publishedRow) (float64, bool) {
		switch q := p.quantity; {
		case strings.HasPrefix(q, "mean drug "):
			return mean("mean", map[string]any{"sample": drugs[strings.TrimPrefix(q, "mean drug ")]})
		case strings.HasPrefix(q, "sd drug "):
			sd, ok := mean("sd", map[string]any{"sample": drugs[q[len("sd drug "):len("sd drug ")+1]]})
			return sd * byN, ok
		case strings.HasPrefix(q, "sd difference"):
			return resultOf(t, sleep, "sd") * byN, true
		case q == "P(mean 2 > 0)":
			p, ok := mean("p-value", map[string]any{"sample": drugs["2"], "reference": 0.0, "direction": above})
			return 1 - p, ok
		case q == "P(difference > 0)":
			return 1 - resultOf(t, answer(t, "paired-interval", map[string]any{"sample": drugs["2"], "second-sample": drugs["1"], "direction": above}), "p-value"), true
		case strings.HasPrefix(q, "table value"): // Student's z is mean over the sd with divisor n
			n := p.number(t, "n")
			return mean("p-value", map[string]any{"mean": p.number(t, "z"), "sd": math.Sqrt(n / (n - 1)), "n": n, "reference": 0.0, "direction": below})
		}
		out := sleep
		if _, ok := p.inputs["a"]; ok {
			out = answer(t, "paired-interval", map[string]any{"sample": p.list(t, "b"), "second-sample": p.list(t, "a")})
		}
		result, ok := map[string]string{"mean difference": "difference", "standard error of the mean difference": "standard-error", "t": "t"}[p.quantity]
		if !ok {
			return 0, false
		}
		return resultOf(t, out, result), true
	}, "paired")
}

func TestToleranceReproducesPublishedExamples(t *testing.T) {
	answers(t, 10, func(p publishedRow) (float64, bool) {
		oneSided := func(result string) float64 {
			return resultOf(t, answer(t, "tolerance-interval", map[string]any{"mean": 0.0, "sd": 1.0, "n": p.number(t, "n"), "content": p.number(t, "coverage"),
				"confidence": p.number(t, "confidence"), "direction": below}), result)
		}
		switch q := p.quantity; {
		case q == "noncentral t quantile":
			return oneSided("factor") * math.Sqrt(p.number(t, "n")), true
		case strings.HasPrefix(q, "k1 one-sided exact"):
			return oneSided("upper"), true
		case strings.HasPrefix(q, "confidence for coverage"):
			return resultOf(t, answer(t, "tolerance-interval", map[string]any{"sample": counting(int(p.number(t, "n"))), "content": p.number(t, "coverage"),
				"kind": distributionFree, "confidence": 0.001}), "attained-confidence"), true
		}
		return 0, false
	}, "tolerance_interval")
	for _, p := range publishedTable(t, "tolerance-one-sided-95") {
		p.check(t, resultOf(t, answer(t, "tolerance-interval", map[string]any{"mean": 0.0, "sd": 1.0, "n": p.number(t, "n"), "content": p.number(t, "coverage"),
			"confidence": p.number(t, "confidence"), "direction": above}), "factor"))
	}
	// The two-sided table is an approximation of Wald & Wolfowitz, some 0.4% off at
	// n = 5; the exact factor stands in the note.
	for _, row := range csvRows(t, published+"tables.csv") {
		if row["table_id"] != "tolerance-two-sided-95" {
			continue
		}
		p := publishedRow{id: "tolerance-two-sided-95 " + row["params"], text: regexp.MustCompile(`[0-9.]+$`).FindString(row["note"]), reproduced: "yes", route: "full precision"}
		p.decode(t, row["params"])
		got := resultOf(t, answer(t, "tolerance-interval", map[string]any{"mean": 0.0, "sd": 1.0, "n": p.number(t, "n"), "content": p.number(t, "coverage"),
			"confidence": p.number(t, "confidence")}), "factor")
		p.check(t, got)
		within(t, "printed "+p.id, got, float(t, row["value"]), 0.008)
	}
}

func TestCountsReproducePublishedExamples(t *testing.T) {
	share := func(arguments map[string]any, result string) (float64, bool) {
		return resultOf(t, answer(t, "proportion-interval", arguments), result), true
	}
	limit := func(p publishedRow) string {
		if strings.Contains(p.quantity, "lower") {
			return "lower"
		}
		return "upper"
	}
	answers(t, 15, func(p publishedRow) (float64, bool) {
		arguments := map[string]any{"successes": p.number(t, "x"), "n": p.number(t, "n"), "confidence": p.number(t, "level")}
		if p.inputs["sided"] == "lower" {
			arguments["direction"] = above
		}
		switch method, _ := p.inputs["method"].(string); {
		case strings.HasPrefix(p.quantity, "exact"):
			arguments["kind"] = exactShare
		case method != "" && method != "Wilson":
			return 0, false
		}
		return share(arguments, limit(p))
	}, "proportion_interval")
	answers(t, 37, func(p publishedRow) (float64, bool) {
		x, ok := share(map[string]any{"successes": p.number(t, "deviations"), "n": p.number(t, "n"), "confidence": 1 - p.number(t, "risk"),
			"kind": exactShare, "direction": below}, "upper")
		return 100 * x, ok
	}, "proportion_upper_limit")
	answers(t, 12, func(p publishedRow) (float64, bool) {
		return resultOf(t, answer(t, "proportion-difference-interval", map[string]any{"first-successes": p.number(t, "x1"), "first-n": p.number(t, "n1"),
			"second-successes": p.number(t, "x2"), "second-n": p.number(t, "n2"), "confidence": p.number(t, "level")}), limit(p)), true
	}, "proportion_difference")
	answers(t, 12, func(p publishedRow) (float64, bool) {
		return resultOf(t, answer(t, "rate-interval", map[string]any{"count": p.number(t, "count"), "confidence": p.number(t, "level")}), limit(p)), true
	}, "poisson_interval")
	for _, p := range publishedTable(t, "poisson-confidence-factor") {
		p.check(t, resultOf(t, answer(t, "rate-interval", map[string]any{"count": p.number(t, "overstatements"), "confidence": 1 - p.number(t, "risk"),
			"direction": below}), "upper"))
	}
	answers(t, 11, func(p publishedRow) (float64, bool) {
		if !strings.HasPrefix(p.id, "nist-prc-474.") {
			return 0, false
		}
		x := p.list(t, "nonconforming")
		ns := make([]float64, len(x))
		for i := range ns {
			ns[i] = p.number(t, "n_each")
		}
		out := answer(t, "proportions-comparison", map[string]any{"successes": x, "ns": ns})
		if p.quantity == "chi-square" {
			return resultOf(t, out, "chi-square"), true
		}
		lots := regexp.MustCompile(`^lot (\d) - lot (\d) difference$`).FindStringSubmatch(p.quantity)
		if lots == nil {
			return 0, false
		}
		row, _ := pairRow(t, out, "group "+lots[1], "group "+lots[2])
		return math.Abs(row.Values["difference"].(float64)), true
	}, "proportion_test")
}

func TestChecksReproducePublishedExamples(t *testing.T) {
	answers(t, 6, func(p publishedRow) (float64, bool) {
		arguments := map[string]any{}
		if _, ok := p.inputs["values"]; ok {
			arguments["sample"] = p.list(t, "values")
		} else if _, ok := p.inputs["n"]; ok { // a one-sided critical value is the two-sided one at twice the significance
			arguments["sample"], arguments["significance"] = counting(int(p.number(t, "n"))), 2*p.number(t, "alpha")
		}
		switch p.quantity {
		case "mean", "sd":
			return resultOf(t, answer(t, "mean-interval", arguments), p.quantity), true
		case "G maximum", "T for the largest value":
			return answer(t, "outlier-check", arguments).Rows[0].Values["statistic"].(float64), true
		case "one-sided 5% critical value", "5% one-sided critical value":
			return answer(t, "outlier-check", arguments).Rows[0].Values["critical-value"].(float64), true
		}
		return 0, false
	}, "outlier")
	for _, p := range publishedTable(t, "grubbs-one-sided") {
		out := answer(t, "outlier-check", map[string]any{"sample": counting(int(p.number(t, "n"))), "significance": 2 * p.number(t, "alpha")})
		p.check(t, out.Rows[0].Values["critical-value"].(float64))
	}
	answers(t, 1, func(p publishedRow) (float64, bool) {
		return resultOf(t, answer(t, "normality-check", map[string]any{"sample": p.list(t, "values")}), "shapiro-wilk"), true
	}, "normality")
	answers(t, 0, func(p publishedRow) (float64, bool) { return 0, false }, "randomness", "clt_adequacy", "sd_reliability", "paired_proportions")
	answers(t, 1, func(p publishedRow) (float64, bool) { return 0, false }, "goodness_of_fit")

	// e-Handbook 1.3.5.13: Z = (runs - mean)/sd about the median of 200 readings.
	lew := publishedColumn(t, "nist-strd-univariate/Lew.csv", "y")
	out := answer(t, "independence-check", map[string]any{"sample": lew})
	r := runCount{above: 100, below: 100, lengths: []int{200}}
	mean, sd := r.moments()
	publishedExample(t, "nist-eda-135d.z").check(t, (resultOf(t, out, "runs")-mean)/sd)
}

// counting gives 1, 2, … n.
func counting(n int) []float64 {
	out := make([]float64, n)
	for i := range out {
		out[i] = float64(i + 1)
	}
	return out
}
