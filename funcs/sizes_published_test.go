package funcs

import (
	"math"
	"strings"
	"testing"

	"halfwidth/funcs/internal/dist"
	"halfwidth/funcs/internal/num"
)

// Sizes in print often rest on a known sd. They are the start of the exact
// search here, and check that much of it: the exact n is never less, and by
// Guenther 1981 no more than z²/2 and a rounding above.
func TestSizesInPrintForAKnownSD(t *testing.T) {
	for _, r := range publishedTable(t, "nist-sample-size-mean") {
		alpha, effect, wanted := r.number(t, "alpha"), r.number(t, "delta_over_sigma"), 1-r.number(t, "beta")
		known := normalN(alpha, wanted, either) / float64(effect*effect)
		r.check(t, ceilWhole(known))
		n := answered(t, "mean-test-size", map[string]any{"sd": 1.0, "difference": effect, "significance": alpha, "power": wanted}).whole(t, "n")
		z := dist.Normal{}.UpperQuantile(alpha / 2)
		if x := float64(n); x < known || (known > 10 && x > known+float64(z*z)/2+2) {
			t.Errorf("%s: exact n = %d, with a known sd %.3f", r.id, n, known)
		}
	}
	for _, r := range publishedExamples(t, "sample_size_mean") {
		switch r.quantity {
		case "n, sd known":
			r.check(t, ceilWhole(normalN(r.number(t, "alpha"), 1-r.number(t, "beta"), above)))
		case "n, one t iteration": // t in the place of z, once; the exact n is the same here
			n := answered(t, "mean-test-size", map[string]any{"sd": 1.0, "difference": r.number(t, "delta_over_sigma"),
				"significance": r.number(t, "alpha"), "power": 1 - r.number(t, "beta"), "direction": above}).whole(t, "n")
			r.check(t, float64(n))
		}
	}
}

func TestCochransFinitePopulation(t *testing.T) {
	for _, r := range publishedExamples(t, "sample_size_finite_population") {
		p := meanPrecision{sd: math.Sqrt(r.number(t, "variance")), outside: dist.Normal{}.SF(r.number(t, "t")), population: math.Inf(1)}
		if _, finite := r.inputs["population"]; finite {
			p.population = r.number(t, "population")
		}
		r.check(t, p.guess(r.number(t, "relative_error")*r.number(t, "mean")))
	}
}

// Cohen 1992, Table 2, rounds to the nearest whole number the n at which the
// exact power is the one wanted, n taken as any real number.
func TestCohensTable(t *testing.T) {
	real := func(power func(n float64) float64, wanted float64) float64 {
		n, ok := num.Root(func(n float64) float64 { return power(n) - wanted }, 2, 1e5)
		if !ok {
			t.Fatal("no n")
		}
		return n
	}
	for _, r := range publishedExamples(t, "sample_size_two_means") {
		d, alpha, wanted := r.number(t, "d"), r.number(t, "alpha"), r.number(t, "power")
		n := real(func(n float64) float64 { return tPower(2*n-2, d*math.Sqrt(n/2), alpha, either) }, wanted)
		r.check(t, n)
		out := answered(t, "difference-test-size", map[string]any{"first-sd": 1.0, "difference": d, "significance": alpha, "power": wanted, "variances": pooled})
		if out.whole(t, "n") != int(math.Ceil(n)) {
			t.Errorf("%s: n = %d, want %v rounded up", r.id, out.whole(t, "n"), n)
		}
	}
	for _, r := range publishedExamples(t, "sample_size_anova") {
		f, wanted, k := r.number(t, "f"), r.number(t, "power"), int(r.number(t, "groups"))
		// Two means apart from the others by ±x: f² = 2x²/k, the variance of the means.
		means := make([]float64, k)
		means[0], means[1] = f*math.Sqrt(float64(k)/2), -f*math.Sqrt(float64(k)/2)
		p := severalMeans{means, 1, r.number(t, "alpha")}
		n := real(p.power, wanted)
		r.check(t, n)
		out := answered(t, "several-means-size", map[string]any{"means": means, "sd": 1.0, "power": wanted})
		if out.whole(t, "n") != int(math.Ceil(n)) {
			t.Errorf("%s: n = %d, want %v rounded up", r.id, out.whole(t, "n"), n)
		}
	}
	for _, r := range publishedExamples(t, "sample_size_two_proportions") {
		// By the difference h of arcsines, whose variance is 1/n in each group.
		h := r.number(t, "h")
		r.check(t, 2*normalN(r.number(t, "alpha"), r.number(t, "power"), either)/float64(h*h))
	}
}

func TestSizesInPrintForAProportion(t *testing.T) {
	r := publishedExample(t, "nist-prc-242.n")
	p0, p1 := r.number(t, "p0"), r.number(t, "p1")
	r.check(t, ceilWhole(normalShares(p1-p0, shareSD(p0), shareSD(p1), r.number(t, "alpha"), 1-r.number(t, "beta"), above)))
}

// The audit guide's tables are for a large population: binomial.
func TestAuditTables(t *testing.T) {
	for _, r := range publishedExamples(t, "sample_size_audit") {
		out := answered(t, "discovery-size", map[string]any{"tolerable-deviation-rate": r.number(t, "tolerable_rate"),
			"allowed-deviations": int(r.number(t, "expected_deviations")), "confidence": 1 - r.number(t, "risk")})
		r.check(t, float64(out.whole(t, "n")))
	}
}

func TestOrderStatisticsInPrint(t *testing.T) {
	for _, r := range publishedExamples(t, "tolerance_interval") {
		if !strings.HasPrefix(r.id, "nist-prc-264.") {
			continue
		}
		switch {
		case strings.HasPrefix(r.quantity, "confidence for"):
			r.check(t, orderConfidence(int(r.number(t, "n")), r.number(t, "coverage"), either))
		case strings.HasPrefix(r.quantity, "n for"):
			out := answered(t, "distribution-free-tolerance-size", map[string]any{"content": r.number(t, "coverage"), "confidence": r.number(t, "confidence")})
			r.check(t, float64(out.whole(t, "n")))
		}
	}
}

// Kupper & Hafner 1989: n(n-1) ≥ n₀·χ²(n-1; 1-γ)·F(1, n-1; 1-α)/χ²(1; 1-α), n₀ being
// the n of a known sd, unrounded.
func TestChanceMetIsKupperAndHafnersInequality(t *testing.T) {
	for _, chance := range []float64{0.5, 0.8, 0.9, 0.99} {
		for _, wanted := range []float64{1, 0.5, 0.2, 0.1} {
			holds := func(n float64) bool {
				z2 := dist.ChiSquare{DF: 1}.UpperQuantile(0.05)
				known := z2 / float64(wanted*wanted)
				return n*(n-1) >= known*dist.ChiSquare{DF: n - 1}.Quantile(chance)*dist.F{DF1: 1, DF2: n - 1}.UpperQuantile(0.05)/z2
			}
			n := float64(answered(t, "mean-precision-size", map[string]any{"sd": 1.0, "half-width": wanted, "chance-met": chance}).whole(t, "n"))
			if !holds(n) || holds(n-1) {
				t.Errorf("chance %v, half-width %v: n = %v", chance, wanted, n)
			}
		}
	}
}

// Cochran 1977, section 2.15: n > 25·G1², and so one more where that is whole.
func TestCochransSkewnessRule(t *testing.T) {
	for _, r := range csvRows(t, published+"tables.csv") {
		if r["params"] == `{"formula":"n > 25*G1^2"}` && float(t, r["value"]) != cochranN(1)-1 {
			t.Errorf("skewness 1 asks for more than %v, want %s (%s)", cochranN(1)-1, r["value"], r["source"])
		}
	}
	if cochranN(2) != 101 || cochranN(0.5) != 7 || cochranN(math.Sqrt(0.2)) != 6 {
		t.Errorf("cochran-n %v, %v and %v, want 101, 7 and 6", cochranN(2), cochranN(0.5), cochranN(math.Sqrt(0.2)))
	}
}
