package funcs

import (
	"math"
	"math/rand/v2"
	"strings"
	"testing"
)

// A size and its power are two sides of one thing: n attains what was wanted,
// n - 1 does not, and the difference detectable with n is at most the one that n
// was planned for.
func TestSizePowerAndDetectableDifferenceInvertOneAnother(t *testing.T) {
	random := rand.New(rand.NewPCG(11, 1))
	for range 25 {
		sd, effect := math.Exp(4*random.Float64()-2), math.Exp(-2.5*random.Float64())
		common := map[string]any{"significance": []float64{0.001, 0.05, 0.2}[random.IntN(3)], "direction": []string{either, above}[random.IntN(2)]}
		wanted := 0.3 + 0.69*random.Float64()
		for _, family := range []string{"mean-test", "paired-test", "difference-test"} {
			arguments := with(with(common, "sd", sd), "difference", sd*effect)
			ratio := 1.0
			if family == "difference-test" {
				ratio = []float64{0.5, 1, 2}[random.IntN(3)]
				arguments = with(with(common, "first-sd", sd), "difference", sd*effect)
				arguments = with(with(arguments, "second-sd", sd*(0.4+2*random.Float64())), "variances", []string{separate, pooled}[random.IntN(2)])
				arguments["checks"] = false
			}
			plan := with(arguments, "power", wanted)
			if family == "difference-test" {
				plan["allocation-ratio"] = ratio
			}
			size := answered(t, family+"-size", plan)
			n := size.whole(t, "n")
			powerAt := func(n int) float64 {
				a := with(arguments, "n", n)
				if family == "difference-test" {
					a["second-n"] = secondSize(n, ratio)
				}
				return answered(t, family+"-power", a).float(t, "attained-power")
			}
			if p := powerAt(n); p != size.float(t, "attained-power") || !reaches(p, wanted) {
				t.Errorf("%s(%v): power %v at n = %d, the plan says %v", family, arguments, p, n, size.float(t, "attained-power"))
			}
			if n > 2 && secondSize(n-1, ratio) >= 2 && reaches(powerAt(n-1), wanted) {
				t.Errorf("%s(%v): n = %d is not the smallest for power %v", family, arguments, n, wanted)
			}
			found := with(arguments, "n", n)
			delete(found, "difference")
			if family == "difference-test" {
				found["second-n"] = secondSize(n, ratio)
			}
			found["power"] = size.float(t, "attained-power")
			d := answered(t, family+"-detectable", found).float(t, "difference")
			within(t, family+"-detectable", d, sd*effect, 1e-9)
		}
	}
}

// The definition in the catalogue, applied word for word, where attainment may
// fall as n grows: a Welch interval that hangs on a small second group, and a
// small chance that a half-width is met.
func TestUnsteadyPlansAreTheSmallestByTheDefinition(t *testing.T) {
	random := rand.New(rand.NewPCG(11, 2))
	for range 60 {
		p := differencePrecision{first: 1, second: math.Exp(4*random.Float64() - 2), outside: []float64{0.1, 0.025, 0.005}[random.IntN(3)]}
		ratio := []float64{0.07, 0.15, 0.3, 0.5, 0.8, 1, 1.4, 3}[random.IntN(8)]
		wanted := 2 * (p.first + p.second) * (0.1 + random.Float64())
		holds := func(n, m int) bool { return m >= 2 && staysIn(p.halfWidth(n, m), wanted) }
		want, _ := literally(func(n int) bool { return holds(n, secondSize(n, ratio)) }, 300)
		n, m, found, err := planning().smallestGroups(ratio, 10, holds)
		if want > 0 && (err != nil || !found || n != want || m != secondSize(n, ratio)) {
			t.Errorf("%+v, ratio %v, half-width %v: n = %d and %d (%v), want %d", p, ratio, wanted, n, m, err, want)
		}
	}
	for range 40 {
		p := meanPrecision{sd: 1, outside: 0.025, pilotDF: []float64{math.Inf(1), 4, 30}[random.IntN(3)], population: []float64{math.Inf(1), 40}[random.IntN(2)]}
		wanted, chance := math.Exp(-2.5*random.Float64()), math.Exp(-8*random.Float64())
		holds := func(n int) bool { return float64(n) >= p.population || reaches(p.chance(n, wanted), chance) }
		want, _ := literally(holds, 400)
		hi := int(math.Min(largestPlan, p.population))
		n, found, err := planning().smallestPlan(hi, 2, func(n int) bool { return reaches(p.chance(n, wanted), chance) })
		if want > 0 && (err != nil || !found || n != want) {
			t.Errorf("%+v, half-width %v, chance %v: n = %d (%v), want %d", p, wanted, chance, n, err, want)
		}
	}
}

// More precision, more certainty, more spread: never fewer values.
func TestPlansGrowWithWhatIsAsked(t *testing.T) {
	for _, c := range []struct {
		function  string
		arguments map[string]any
		result    string
		input     string
		rising    []float64 // values of the input that ask for more and more
	}{
		{"mean-precision-size", map[string]any{"sd": 3.0, "half-width": 1.0}, "n", "half-width", []float64{9, 3, 1, 0.3, 0.1, 1e-3}},
		{"mean-precision-size", map[string]any{"sd": 3.0, "half-width": 1.0}, "n", "sd", []float64{0.1, 1, 3, 10, 1e3}},
		{"mean-precision-size", map[string]any{"sd": 3.0, "half-width": 1.0}, "n", "confidence", []float64{0.2, 0.5, 0.9, 0.99, 0.999999}},
		{"mean-precision-size", map[string]any{"sd": 3.0, "half-width": 1.0}, "n", "chance-met", []float64{0.2, 0.5, 0.9, 0.99, 0.999999}},
		{"mean-precision-size", map[string]any{"sd": 3.0, "half-width": 1.0}, "n-planned", "non-response", []float64{0, 0.1, 0.5, 0.99}},
		{"mean-precision-size", map[string]any{"sd": 3.0, "half-width": 1.0}, "n-planned", "design-effect", []float64{0.5, 1, 1.7, 30}},
		{"difference-precision-size", map[string]any{"first-sd": 3.0, "half-width": 1.0}, "n", "second-sd", []float64{0.1, 1, 3, 10, 1e3}},
		{"difference-precision-size", map[string]any{"first-sd": 3.0, "half-width": 1.0}, "n", "allocation-ratio", []float64{100, 3, 1, 0.5, 0.01}},
		{"mean-test-size", map[string]any{"sd": 3.0, "difference": 1.0}, "n", "difference", []float64{9, 3, 1, 0.3, 0.01}},
		{"mean-test-size", map[string]any{"sd": 3.0, "difference": 1.0}, "n", "power", []float64{0.06, 0.5, 0.8, 0.99, 0.999999}},
		{"mean-test-size", map[string]any{"sd": 3.0, "difference": 1.0}, "n", "significance", []float64{0.3, 0.05, 0.001, 1e-9}},
		{"paired-test-size", map[string]any{"sd": 3.0, "difference": 1.0}, "n", "correlation", []float64{0.99, 0.5, 0, -0.5, -1}},
		{"difference-test-size", map[string]any{"first-sd": 3.0, "difference": 2.0}, "n", "second-sd", []float64{0.1, 1, 3, 10}},
		{"proportion-precision-size", map[string]any{"half-width": 0.05}, "n", "proportion", []float64{0.02, 0.1, 0.3, 0.5}},
		{"rate-precision-size", map[string]any{"rate": 1.0, "half-width": 0.3}, "exposure", "half-width", []float64{30, 3, 0.3, 0.03, 0.001}},
		{"several-means-size", map[string]any{"means": []float64{1, 2, 4}, "sd": 1.0}, "n", "sd", []float64{0.1, 1, 3, 30}},
		{"variance-size", map[string]any{"relative-half-width": 0.1}, "n", "relative-half-width", []float64{3, 0.5, 0.1, 0.01}},
		{"stratified-size", map[string]any{"sizes": []float64{100, 400}, "sds": []float64{2, 5}, "half-width": 1.0}, "total-n", "half-width", []float64{9, 3, 1, 0.3, 0.01}},
		{"discovery-size", map[string]any{"tolerable-deviation-rate": 0.05, "population-size": 1000}, "n", "tolerable-deviation-rate", []float64{0.5, 0.1, 0.02, 0.001}},
		{"equivalence-size", map[string]any{"sd": 1.0, "margin": 0.5}, "n", "margin", []float64{3, 1, 0.5, 0.1}},
		{"distribution-free-tolerance-size", map[string]any{}, "n", "content", []float64{0.1, 0.5, 0.9, 0.999}},
		{"enough-n-for-mean", map[string]any{"skewness": 2.0, "excess-kurtosis": 6.0}, "n", "allowed-shortfall", []float64{0.5, 0.05, 0.01, 0.001}},
	} {
		last := 0.0
		for _, x := range c.rising {
			v, _ := answered(t, c.function, with(c.arguments, c.input, x)).Get(c.result)
			n, isFloat := v.(float64)
			if !isFloat {
				n = float64(v.(int))
			}
			if n < last {
				t.Errorf("%s: %s falls from %v to %v at %s = %v", c.function, c.result, last, n, c.input, x)
			}
			last = n
		}
	}
}

// By the rules themselves: a factor of 1.1 on 10 is 11 though the product of the
// doubles is a little more, and never more are planned than there are.
func TestDesignEffectLossesAndPopulation(t *testing.T) {
	base := map[string]any{"sd": 1.0, "half-width": 0.7} // n = 11
	n := answered(t, "mean-precision-size", base).whole(t, "n")
	for _, c := range []struct {
		effect, lost float64
		want         int
	}{{1, 0, n}, {2, 0, 2 * n}, {1, 0.5, 2 * n}, {1.1, 0, int(math.Ceil(float64(11*n) / 10))}, {3, 0.4, 5 * n}} {
		out := answered(t, "mean-precision-size", with(with(base, "design-effect", c.effect), "non-response", c.lost))
		if out.whole(t, "n") != n || out.whole(t, "n-planned") != c.want {
			t.Errorf("design effect %v, %v lost: n %d, planned %d, want %d and %d", c.effect, c.lost, out.whole(t, "n"), out.whole(t, "n-planned"), n, c.want)
		}
		back := answered(t, "mean-precision", map[string]any{"sd": 1.0, "n": c.want, "design-effect": c.effect, "non-response": c.lost})
		if h := back.float(t, "attained-half-width"); !staysIn(h, 0.7) {
			t.Errorf("design effect %v, %v lost: %d planned attain %v", c.effect, c.lost, c.want, h)
		}
	}
	small := answered(t, "mean-precision-size", with(with(base, "population-size", 12), "design-effect", 5.0))
	if small.whole(t, "n") > 12 || small.whole(t, "n-planned") != 12 {
		t.Errorf("population of 12: n %d, planned %d", small.whole(t, "n"), small.whole(t, "n-planned"))
	}
	all := answered(t, "mean-precision-size", map[string]any{"sd": 1.0, "half-width": 1e-12, "population-size": 50})
	if all.whole(t, "n") != 50 || all.float(t, "attained-half-width") != 0 || all.float(t, "chance-met") != 1 {
		t.Errorf("the whole population: n %d, half-width %v", all.whole(t, "n"), all.float(t, "attained-half-width"))
	}
	groups := answered(t, "difference-precision-size", map[string]any{"first-sd": 1.0, "half-width": 0.5, "allocation-ratio": 1.5, "non-response": 0.5})
	if groups.whole(t, "n-planned") != 2*groups.whole(t, "n") || groups.whole(t, "second-n-planned") != 2*groups.whole(t, "second-n") {
		t.Errorf("half lost: %d and %d planned for %d and %d", groups.whole(t, "n-planned"), groups.whole(t, "second-n-planned"), groups.whole(t, "n"), groups.whole(t, "second-n"))
	}
}

// The level reported is the one that the plan used.
func TestAVariancePlanReportsTheLevelItUsed(t *testing.T) {
	arguments := map[string]any{"confidence": 0.9, "significance": 0.01}
	if level := answered(t, "variance-size", with(arguments, "relative-half-width", 0.2)).float(t, "level"); level != 0.9 {
		t.Errorf("level %v of a half-width, want 0.9", level)
	}
	if level := answered(t, "variance-size", with(arguments, "variance-ratio", 2.0)).float(t, "level"); level != 0.01 {
		t.Errorf("level %v of a test, want 0.01", level)
	}
}

// Sentences say what was planned for.
func TestSentencesSayWhatWasPlannedFor(t *testing.T) {
	for _, f := range sizesFamily {
		out := answered(t, f.Name, f.Example.arguments())
		v, _ := out.Get("sentence")
		sentence := v.(string)
		want := "planned for "
		switch {
		case !strings.HasSuffix(f.Name, "-size") && f.Name != "enough-n-for-mean":
			want = "With "
		case strings.Contains(f.Name, "precision"):
			want = "planned for a half-width of "
		case strings.Contains(f.Name, "test") || strings.Contains(f.Name, "equivalence") || strings.Contains(f.Name, "several") || strings.Contains(f.Name, "proportion"):
			want = "planned for power "
		}
		if !strings.Contains(sentence, want) || strings.Contains(sentence, "%!") {
			t.Errorf("%s: %s", f.Name, sentence)
		}
	}
	out := answered(t, "mean-test-size", map[string]any{"sd": 2.0, "difference": 0.8, "design-effect": 1.5, "non-response": 0.1})
	const want = "Measure n = 68, planned for power 90%: a true mean 0.8 from the reference will be found with probability 0.9016 at significance 5%, either direction " +
		"(t test, exact power from the noncentral t with n - 1 degrees of freedom, sd 2). Plan 114, for design effect 1.5 and 10% lost."
	if v, _ := out.Get("sentence"); v != want {
		t.Errorf("got  %v\nwant %v", v, want)
	}
}
