package funcs

import (
	"context"
	"fmt"
	"math"
	"math/rand/v2"
	"strings"
	"testing"
)

// assembly gives the two samples of NIST/SEMATECH e-Handbook 7.3.1.
func assembly(t *testing.T) (old, fresh []float64) {
	row := publishedExample(t, "nist-prc-31.welch_t")
	return row.list(t, "old"), row.list(t, "new")
}

func TestDifferencesReproducePublishedExamples(t *testing.T) {
	old, fresh := assembly(t)
	welch := answer(t, "difference-interval", map[string]any{"sample": old, "second-sample": fresh})
	for _, row := range publishedExamples(t, "two_sample_mean") {
		got, ok := quantileRow(t, row)
		if !ok {
			result := ""
			switch row.id {
			case "nist-eda-1353.pooled_sd":
				result = "pooled-sd"
			case "nist-eda-1353.pooled_t":
				result = "t"
			case "nist-eda-1353.df":
				result = "df"
			case "nist-eda-1353.standard_error_of_mean_1":
				got = math.Sqrt(summary{n: 249, sd: row.number(t, "sd1")}.variance())
			case "nist-eda-1353.standard_error_of_mean_2":
				got = math.Sqrt(summary{n: 79, sd: row.number(t, "sd2")}.variance())
			case "nist-prc-31.mean_old":
				got = summarise(old).mean
			case "nist-prc-31.mean_new":
				got = summarise(fresh).mean
			case "nist-prc-31.sd_old":
				got = summarise(old).sd
			case "nist-prc-31.sd_new":
				got = summarise(fresh).sd
			case "nist-prc-31.welch_t":
				got = resultOf(t, welch, "t")
			case "nist-prc-31.welch_satterthwaite_df":
				got = resultOf(t, welch, "df")
			default:
				t.Errorf("%s: no computation for this row", row.id)
				continue
			}
			if result != "" {
				got = resultOf(t, answer(t, "difference-interval", map[string]any{"variances": pooled,
					"first-mean": row.number(t, "mean1"), "first-sd": row.number(t, "sd1"), "first-n": row.number(t, "n1"),
					"second-mean": row.number(t, "mean2"), "second-sd": row.number(t, "sd2"), "second-n": row.number(t, "n2")}), result)
			}
		}
		row.check(t, got)
	}
}

// High-precision arithmetic (40 digits) on the data of e-Handbook 7.3.1.
func TestDifferencesOfAssemblyTimesToFullPrecision(t *testing.T) {
	old, fresh := assembly(t)
	for _, c := range []struct {
		function, variances string
		want                map[string]float64
	}{
		{"difference-interval", separate, map[string]float64{"t": 2.269373133361947918736, "df": 15.53251435354790013004, "lower": 0.2459434679695797018060,
			"upper": 7.491430269404157671931, "p-value": 0.03787947613890913676877, "pooled-sd": 4.030885251989019516903,
			"standardized-difference": 0.9191117894619859526990}},
		{"difference-interval", pooled, map[string]float64{"t": 2.135333648243522602458, "df": 18, "lower": 0.06234516845604814029363, "upper": 7.675028568917689233443,
			"p-value": 0.04673027356010553196103}},
		{"ratio-interval", separate, map[string]float64{"ratio": 1.120062695924764890282, "lower": 1.007926816167049424778, "upper": 1.239133339600687533163,
			"df": 16.43050550695983693378, "t": 2.269373133361947918736, "p-value": 0.03703665598995521208636}},
		{"ratio-interval", pooled, map[string]float64{"df": 18, "lower": 1.001816765994549448849, "upper": 1.255634117533601120180}},
	} {
		out := answer(t, c.function, map[string]any{"sample": old, "second-sample": fresh, "variances": c.variances})
		for name, want := range c.want {
			within(t, c.function+" "+c.variances+" "+name, resultOf(t, out, name), want, 2e-12)
		}
	}
}

// Γ(ν/2)/(√(ν/2)·Γ((ν-1)/2)) by 40-digit arithmetic.
func TestHedgesFactor(t *testing.T) {
	for nu, want := range map[float64]float64{
		2: 0.5641895835477562869481, 3: 0.7236012545582676593631, 39: 0.9806242386803415130083, 40: 0.9811121944366950581850,
		41: 0.9815761767045170378735, 1000: 0.9992497811797163675182, 1e9: 0.99999999924999999978125, 1e18: 1,
	} {
		within(t, fmt.Sprintf("ν = %g", nu), hedgesFactor(nu), want, 2e-15)
	}
}

// twoArguments are the arguments of a call with two summaries.
func twoArguments(a, b summary, more ...Argument) map[string]any {
	m := map[string]any{"first-mean": a.mean, "first-sd": a.sd, "first-n": a.n, "second-mean": b.mean, "second-sd": b.sd, "second-n": b.n}
	for _, x := range more {
		m[x.Name] = x.Value
	}
	return m
}

func TestTwoSamplesAndTheirSummariesAgreeDigitForDigit(t *testing.T) {
	rng := rand.New(rand.NewPCG(2, 1))
	for range 10 {
		x, y := noise(rng, 2+rng.IntN(30), 1e3, 2), noise(rng, 2+rng.IntN(30), 990, 1)
		for _, kind := range []string{separate, pooled} {
			for name, more := range map[string]Argument{"difference-interval": {"reference", 3.0}, "ratio-interval": {"reference", 1.1}, "equivalence-test": {"margin", 4.0}} {
				samples := map[string]any{"sample": x, "second-sample": y, "variances": kind, more.Name: more.Value}
				sameResults(t, answer(t, name, samples), answer(t, name, twoArguments(summarise(x), summarise(y), Argument{"variances", kind}, more)))
			}
		}
	}
}

func TestTheDifferenceMirrorsWhenTheSamplesAreSwapped(t *testing.T) {
	a, b := summary{7, 12.5, 3.25}, summary{19, 10, 0.8}
	for _, kind := range []string{separate, pooled} {
		for _, d := range [][2]string{{either, either}, {above, below}, {below, above}} {
			there := answer(t, "difference-interval", twoArguments(a, b, Argument{"variances", kind}, Argument{"direction", d[0]}, Argument{"reference", 0.5}))
			back := answer(t, "difference-interval", twoArguments(b, a, Argument{"variances", kind}, Argument{"direction", d[1]}, Argument{"reference", -0.5}))
			for name, other := range map[string]string{"difference": "difference", "lower": "upper", "upper": "lower", "t": "t", "standardized-difference": "standardized-difference"} {
				x, ok := there.Get(name)
				y, okBack := back.Get(other)
				if ok != okBack || ok && x.(float64) != -y.(float64) {
					t.Errorf("%s %v: %s is %v, mirrored %v", kind, d, name, x, y)
				}
			}
			if x, y := resultOf(t, there, "p-value"), resultOf(t, back, "p-value"); x != y {
				t.Errorf("%s %v: p %v and %v", kind, d, x, y)
			}
		}
	}
}

func TestIntervalAndTestAgreeForTwoMeans(t *testing.T) {
	for _, n := range []int{2, 5, 40} {
		a, b := summary{n, 12.5, 3.25}, summary{n + 3, -20, 1.5}
		for _, function := range []string{"difference-interval", "ratio-interval"} {
			for _, kind := range []string{separate, pooled} {
				for _, d := range []string{either, above, below} {
					arguments := twoArguments(a, b, Argument{"variances", kind}, Argument{"direction", d}, Argument{"confidence", 0.9})
					out := answer(t, function, arguments)
					for _, limit := range []string{"lower", "upper"} {
						v, ok := out.Get(limit)
						if ok == (d == above && limit == "upper" || d == below && limit == "lower") {
							t.Errorf("%s, %s: %s given: %t", function, d, limit, ok)
						}
						if ok {
							arguments["reference"] = v
							what := fmt.Sprintf("%s %s, n = %d, %s, p at %s", function, kind, n, d, limit)
							within(t, what, resultOf(t, answer(t, function, arguments), "p-value"), 0.1, 1e-9)
						}
					}
				}
			}
		}
	}
}

func TestOneSidedLimitsNestInTwoSidedOnes(t *testing.T) {
	a, b := summary{9, 12.5, 3.25}, summary{12, 20, 1.5}
	for _, function := range []string{"difference-interval", "ratio-interval"} {
		wide := answer(t, function, twoArguments(a, b, Argument{"confidence", 0.95}))
		narrow := answer(t, function, twoArguments(a, b, Argument{"confidence", 0.9}))
		lower := resultOf(t, answer(t, function, twoArguments(a, b, Argument{"direction", above})), "lower")
		upper := resultOf(t, answer(t, function, twoArguments(a, b, Argument{"direction", below})), "upper")
		if !(resultOf(t, wide, "lower") < lower && upper < resultOf(t, wide, "upper")) {
			t.Errorf("%s: one-sided limits %v and %v lie outside the two-sided ones", function, lower, upper)
		}
		within(t, function+" lower", lower, resultOf(t, narrow, "lower"), 1e-12)
		within(t, function+" upper", upper, resultOf(t, narrow, "upper"), 1e-12)
	}
}

func TestTwoMeansShiftAndScale(t *testing.T) {
	x, y := []float64{2.25, 3.5, 3.75, 6, 4.5}, []float64{1, 2.5, 1.75, 2}
	moved := func(v []float64, shift, factor float64) []float64 {
		out := make([]float64, len(v))
		for i := range v {
			out[i] = shift + factor*v[i] // exact in binary
		}
		return out
	}
	for _, kind := range []string{separate, pooled} {
		plain := answer(t, "difference-interval", map[string]any{"sample": x, "second-sample": y, "variances": kind})
		far := answer(t, "difference-interval", map[string]any{"sample": moved(x, 1e9, 1), "second-sample": moved(y, 1e9, 1), "variances": kind})
		for _, r := range differenceInterval.Results {
			within(t, "1e9 + the values: "+r.Name, resultOf(t, far, r.Name), resultOf(t, plain, r.Name), 1e-6)
		}
		within(t, "1e9 + the values: standard-error", resultOf(t, far, "standard-error"), resultOf(t, plain, "standard-error"), 0)
		for _, factor := range []float64{0x1p-400, 8, 0x1p+400} {
			scaled := answer(t, "difference-interval", twoArguments(scaledSummary(x, factor), scaledSummary(y, factor), Argument{"variances", kind}))
			for _, r := range differenceInterval.Results {
				f := 1.0
				if r.Unit == SameUnit {
					f = factor
				}
				within(t, fmt.Sprintf("%g times the values: %s", factor, r.Name), resultOf(t, scaled, r.Name), f*resultOf(t, plain, r.Name), 1e-14)
			}
		}
		ratio := answer(t, "ratio-interval", map[string]any{"sample": x, "second-sample": y, "variances": kind})
		tripled := answer(t, "ratio-interval", map[string]any{"sample": moved(x, 0, 4), "second-sample": moved(y, 0, 4), "variances": kind})
		sameResults(t, ratio, tripled)
	}
}

func scaledSummary(v []float64, factor float64) summary {
	s := summarise(v)
	return summary{s.n, factor * s.mean, factor * s.sd}
}

func TestHugeCountsInSummaries(t *testing.T) {
	n := math.MaxInt >> 23
	out := answer(t, "difference-interval", twoArguments(summary{n, 1, 1}, summary{n, 0, 1}))
	// The normal limit; sds 1, so the standard error is √(2/n).
	within(t, "lower", resultOf(t, out, "half-width"), 1.959963984540054*math.Sqrt(2/float64(n)), 1e-6)
	within(t, "df", resultOf(t, out, "df"), 2*float64(n-1), 1e-15)
	within(t, "standardized-difference", resultOf(t, out, "standardized-difference"), 1, 1e-11)
}

// Where the second sample has no spread, Fieller's interval is that of the
// first mean over a constant; where the first has none, of a constant over the
// second mean.
func TestFiellerWithOneConstant(t *testing.T) {
	out := answer(t, "ratio-interval", twoArguments(summary{10, 6, 1.5}, summary{5, 4, 0}))
	mean := answer(t, "mean-interval", map[string]any{"mean": 1.5, "sd": 0.375, "n": 10})
	within(t, "lower", resultOf(t, out, "lower"), resultOf(t, mean, "lower"), 1e-14)
	within(t, "upper", resultOf(t, out, "upper"), resultOf(t, mean, "upper"), 1e-14)
	within(t, "df", resultOf(t, out, "df"), 9, 1e-15)
	out = answer(t, "ratio-interval", twoArguments(summary{5, 6, 0}, summary{10, -4, 1}, Argument{"reference", 0.0}))
	mean = answer(t, "mean-interval", map[string]any{"mean": -4.0, "sd": 1.0, "n": 10})
	within(t, "lower", resultOf(t, out, "lower"), 6/resultOf(t, mean, "upper"), 1e-14)
	within(t, "upper", resultOf(t, out, "upper"), 6/resultOf(t, mean, "lower"), 1e-14)
	absent(t, out, "t", "p-value")
	out = answer(t, "ratio-interval", twoArguments(summary{10, 0, 1.5}, summary{5, 4, 0.25}))
	within(t, "limits of a ratio of 0", resultOf(t, out, "lower"), -resultOf(t, out, "upper"), 0)
}

func TestTheDenominatorMustBeSeparatedFromZero(t *testing.T) {
	critical := resultOf(t, answer(t, "t-quantile", map[string]any{"probability": 0.975, "df": 18.0}), "value")
	near := critical * math.Sqrt(0.1) // sd 1, n 10, pooled
	for _, c := range []struct {
		mean    float64
		refused bool
	}{{0, true}, {0.999 * near, true}, {-0.999 * near, true}, {1.001 * near, false}, {-1.001 * near, false}} {
		out := answer(t, "ratio-interval", twoArguments(summary{10, 5, 1}, summary{10, c.mean, 1}, Argument{"variances", pooled}))
		if c.refused {
			refusedFor(t, out, "denominator-not-separated-from-zero")
		} else if lower, r, upper := resultOf(t, out, "lower"), resultOf(t, out, "ratio"), resultOf(t, out, "upper"); !(lower < r && r < upper) {
			t.Errorf("second mean %v: %v, limits %v and %v", c.mean, r, lower, upper)
		}
	}
}

func TestEquivalenceAgreesWithItsInterval(t *testing.T) {
	a, b := summary{9, 12.5, 3.25}, summary{12, 12, 1.5}
	for _, kind := range []string{separate, pooled} {
		plain := answer(t, "equivalence-test", twoArguments(a, b, Argument{"variances", kind}, Argument{"margin", 5.0}))
		lower, upper := resultOf(t, plain, "lower"), resultOf(t, plain, "upper")
		two := answer(t, "difference-interval", twoArguments(a, b, Argument{"variances", kind}, Argument{"confidence", 0.9}))
		within(t, "lower", lower, resultOf(t, two, "lower"), 1e-13)
		within(t, "upper", upper, resultOf(t, two, "upper"), 1e-13)
		for _, c := range []struct {
			low, high float64
			want      bool
		}{{lower - 1e-6, upper + 1e-6, true}, {lower + 1e-6, upper + 1, false}, {lower - 1, upper - 1e-6, false}} {
			out := answer(t, "equivalence-test", twoArguments(a, b, Argument{"variances", kind}, Argument{"lower-margin", c.low}, Argument{"upper-margin", c.high}))
			if got, _ := out.Get("equivalent"); got != c.want {
				t.Errorf("margins %v and %v: equivalent %v, p %v", c.low, c.high, got, resultOf(t, out, "p-value"))
			}
		}
		at := answer(t, "equivalence-test", twoArguments(a, b, Argument{"variances", kind}, Argument{"lower-margin", lower}, Argument{"upper-margin", 100.0}))
		within(t, "p at the limit", resultOf(t, at, "p-value"), 0.05, 1e-9)
		moved := answer(t, "equivalence-test", twoArguments(a, b, Argument{"variances", kind}, Argument{"margin", 2.0}, Argument{"reference", -1.0}))
		named := answer(t, "equivalence-test", twoArguments(a, b, Argument{"variances", kind}, Argument{"lower-margin", -3.0}, Argument{"upper-margin", 1.0}))
		sameResults(t, moved, named)
	}
}

func TestTwoMeansRefusalsAndErrors(t *testing.T) {
	same, other := []float64{4, 4, 4}, []float64{4, 5, 6}
	for _, name := range []string{"difference-interval", "ratio-interval", "equivalence-test"} {
		call := func(a, b []float64) *Outcome {
			arguments := map[string]any{"sample": a, "second-sample": b}
			if name == "equivalence-test" {
				arguments["margin"] = 1.0
			}
			return answer(t, name, arguments)
		}
		refusedFor(t, call(same, same), "no-spread")
		refusedFor(t, call(other, []float64{1}), "few-values")
		refusedFor(t, call([]float64{math.NaN(), 1}, other), "few-values")
		if out := call(same, []float64{7, 8}); out.Status == StatusRefused || !raises(out, "few-values") {
			t.Errorf("%s: one sample without spread: %v", name, out.Findings)
		}
	}
	// A ratio of 0 whose numerator does not vary has no standard error.
	refusedFor(t, answer(t, "ratio-interval", twoArguments(summary{5, 0, 0}, summary{5, 9, 1})), "no-spread")
	for _, c := range []struct {
		name      string
		arguments map[string]any
		want      string
	}{
		{"equivalence-test", map[string]any{"sample": other, "second-sample": same, "lower-margin": 2.0, "upper-margin": -2.0},
			"upper-margin is -2, but must be more than lower-margin (2); give the lower one first, such as -2 and 2"},
		{"equivalence-test", map[string]any{"sample": other, "second-sample": same, "margin": 1.0, "significance": 0.5},
			"significance is 0.5, but must be strictly between 0 and 0.5"},
		{"equivalence-test", map[string]any{"sample": other, "second-sample": same}, "margin is missing; give either margin, or lower-margin with upper-margin"},
		{"difference-interval", map[string]any{"sample": other, "first-mean": 3.0}, "first-mean cannot be given together with sample"},
		{"difference-interval", map[string]any{"sample": other}, "second-sample is missing; with sample give second-sample too"},
		{"difference-interval", map[string]any{"first-mean": 1.0, "first-sd": 1.0, "first-n": 1, "second-mean": 1.0, "second-sd": 1.0, "second-n": 5},
			"first-n is 1, but must be a whole number, 2 or more"},
	} {
		_, err := Answer(context.Background(), c.name, c.arguments)
		if err == nil || !strings.Contains(err.Error(), c.want) {
			t.Errorf("%s: got %v, want %s", c.name, err, c.want)
		}
	}
}

func TestSpreadsUnlikeIsRaisedOnlyWhenPooled(t *testing.T) {
	for _, c := range []struct {
		kind  string
		ratio float64
		want  bool
	}{{pooled, 2.01, true}, {pooled, 2, false}, {separate, 9, false}} {
		for _, name := range []string{"difference-interval", "ratio-interval"} {
			out := answer(t, name, twoArguments(summary{40, 12.5, 1}, summary{50, 12, c.ratio}, Argument{"variances", c.kind}))
			if raises(out, "spreads-unlike") != c.want {
				t.Errorf("%s, %s, %v: %v", name, c.kind, c.ratio, out.Findings)
			}
		}
	}
}

func TestDifferenceSentences(t *testing.T) {
	for _, c := range []struct {
		name string
		more []Argument
		want string
	}{
		{"difference-interval", []Argument{{"direction", below}, {"reference", 3.0}, {"variances", pooled}},
			"The difference of means (first - second) is 2.5, at most 4.1 with 95% confidence (half-width 1.6, direction below, n = 16 and 9; " +
				"t interval with one pooled variance and 23 degrees of freedom, sds with divisor n - 1). Against the reference 3: t = -0.5292, one-sided (below) p = 0.301."},
		{"equivalence-test", []Argument{{"margin", 1.0}},
			"The difference of means (first - second) is 2.5, 90% interval 1.0 to 4.0 (half-width 1.5, n = 16 and 9; t interval with separate variances and " +
				"21.68 degrees of freedom by Satterthwaite, sds with divisor n - 1). By two one-sided tests at significance 5% the difference is " +
				"not shown to lie within the margins -1 and 1 (p = 0.953)."},
	} {
		out := answer(t, c.name, twoArguments(summary{16, 12.5, 2.5}, summary{9, 10, 1.75}, c.more...))
		if got, _ := out.Get("sentence"); got != c.want {
			t.Errorf("got  %s\nwant %s", got, c.want)
		}
	}
}
