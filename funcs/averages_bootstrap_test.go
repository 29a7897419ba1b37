package funcs

import (
	"context"
	"errors"
	"fmt"
	"math"
	"math/rand/v2"
	"runtime"
	"slices"
	"strings"
	"testing"
	"time"

	"halfwidth/funcs/internal/num"
)

var tenTimes = []float64{2, 4, 6, 7, 8, 9, 10, 11, 13, 20}

// The acceleration of a mean is skewness over 6√n, with skewness and sd of
// divisor n (Efron 1987, equation 7.3 for a sum).
func TestAccelerationOfAMean(t *testing.T) {
	m := num.Moments(tenTimes)
	want := m.Sum3 / (6 * math.Pow(m.SumSquares, 1.5))
	c := &Call{args: map[string]From{"of": {Value: "mean"}}}
	q, _ := c.bootstrapQuantity(10)
	within(t, "acceleration", acceleration(q.leavingOneOut(tenTimes)), want, 1e-13)
	within(t, "of symmetric values", acceleration(q.leavingOneOut([]float64{1, 2, 3, 4, 5})), 0, 1e-16)
	within(t, "of equal ones", acceleration([]float64{0.1, 0.1, 0.1}), 0, 0)
}

// Without bias and acceleration the limits are the percentiles at α(B+1).
func TestLimitsInterpolateAmongReplicates(t *testing.T) {
	replicates := counting(99)
	b, err := newBCa(50, replicates, 0)
	if err != nil {
		t.Fatal(err)
	}
	within(t, "z0", b.z0, 0, 1e-16) // 49 below, 1 equal, 49 above
	var failed error
	within(t, "at 0.025·100", b.limit(-1.959963984540054, &failed), 2.5, 1e-12)
	within(t, "at 0.975·100", b.limit(1.959963984540054, &failed), 97.5, 1e-12)
	if failed != nil {
		t.Error(failed)
	}
	if b.limit(-2.4, &failed); failed == nil { // Φ(-2.4)·100 = 0.82
		t.Error("a limit before the first replicate")
	}
	for _, estimate := range []float64{0, 100} { // all replicates on one side
		if _, err := newBCa(estimate, counting(99), 0); err == nil || !strings.HasPrefix(err.Error(), "All resampled quantities lie on one side of the estimate") {
			t.Errorf("estimate %v: %v", estimate, err)
		}
	}
	failed = nil
	if b.limit(2.4, &failed); failed == nil {
		t.Error("a limit after the last replicate")
	}
	// With z0 and a: Φ(z0 + (z0+z)/(1 - a(z0+z))) of 99, Efron 1987, equation 6.7.
	skewed, err := newBCa(40, counting(99), 0.05)
	if err != nil {
		t.Fatal(err)
	}
	within(t, "z0", skewed.z0, -0.25596249429406464, 1e-14) // Φ⁻¹(39.5/99) by the inverse error function at 20 digits
	w := skewed.z0 + 1
	within(t, "corrected", skewed.limit(1, &failed), 100*0.5*math.Erfc(-(skewed.z0+w/(1-0.05*w))/math.Sqrt2), 1e-12)
}

func TestBootstrapRefusals(t *testing.T) {
	for _, c := range []struct {
		code      string
		arguments map[string]any
	}{
		{"few-values", map[string]any{"sample": []float64{1, 2}}},
		{"no-spread", map[string]any{"sample": []float64{1, 1, 1}}},
		{"few-values", map[string]any{"sample": []float64{1, 2, 3}, "of": "trimmed-mean", "trimmed-each-end": 0.499999999999}},
		{"too-few-resamples", map[string]any{"sample": tenTimes, "resamples": 100, "confidence": 0.999}},
		{"too-few-resamples", map[string]any{"sample": []float64{1, 1, 1, 1, 1, 1, 1, 1, 1, 9}, "of": "median", "resamples": 100, "confidence": 0.999}},
		{"too-many-draws", map[string]any{"sample": counting(7_000), "resamples": 10_000}},
		{"too-many-draws", map[string]any{"sample": counting(70_000)}},
	} {
		out := answer(t, "bootstrap-interval", c.arguments)
		refusedFor(t, out, c.code)
		checkDeclared(t, out.Function, out)
	}
	refuses(t, "bootstrap-interval", map[string]any{"sample": tenTimes, "resamples": 99}, "resamples is 99, but must be a whole number, from 100 to 1000000")
	refuses(t, "bootstrap-interval", map[string]any{"sample": tenTimes, "of": "variance"}, `of is "variance", but must be one of its choices; write mean, median, sd or trimmed-mean`)
}

func TestBootstrapShiftsAndScales(t *testing.T) {
	for _, of := range []string{"mean", "median", "sd", "trimmed-mean"} {
		arguments := map[string]any{"sample": tenTimes, "of": of, "resamples": 2000, "confidence": 0.8}
		a := answer(t, "bootstrap-interval", arguments)
		moved := make([]float64, len(tenTimes))
		for i, x := range tenTimes {
			moved[i] = 8*x + 1024
		}
		b := answer(t, "bootstrap-interval", altered(arguments, "sample", moved))
		shift := 1024.0
		if of == "sd" {
			shift = 0
		}
		for _, r := range []string{"estimate", "lower", "upper"} {
			within(t, of+" "+r, resultOf(t, b, r), 8*resultOf(t, a, r)+shift, 1e-10)
		}
		if l, e, u := resultOf(t, a, "lower"), resultOf(t, a, "estimate"), resultOf(t, a, "upper"); !(l < e && e < u) {
			t.Errorf("%s: %v in %v to %v", of, e, l, u)
		}
		one := answer(t, "bootstrap-interval", altered(arguments, "direction", above, "confidence", 0.9))
		limitsExist(t, one, above)
		within(t, of+" one-sided", resultOf(t, one, "lower"), resultOf(t, a, "lower"), 1e-9) // the two tails of 0.1 differ by rounding
	}
}

// For many normal values the interval of the mean nears the t interval: within
// the simulation's error, some 2% of the half-width at 20,000 resamples.
func TestBootstrapNearsTheTInterval(t *testing.T) {
	values := noise(rand.New(rand.NewPCG(23, 1)), 400, 10, 2)
	a := answer(t, "bootstrap-interval", map[string]any{"sample": values, "resamples": 20000})
	b := answer(t, "mean-interval", map[string]any{"sample": values})
	for _, limit := range []string{"lower", "upper"} {
		if d := math.Abs(resultOf(t, a, limit)-resultOf(t, b, limit)) / resultOf(t, b, "half-width"); d > 0.06 {
			t.Errorf("%s: off by %v half-widths", limit, d)
		}
	}
	if bias := math.Abs(resultOf(t, a, "bias")); bias > 4*resultOf(t, b, "standard-error")/math.Sqrt(20000) {
		t.Errorf("bias %v of an unbiased estimate", bias)
	}
}

// onCores runs with that many cores at most.
func onCores(n int, run func()) {
	before := runtime.GOMAXPROCS(n)
	defer runtime.GOMAXPROCS(before)
	run()
}

func TestSimulationsGiveTheSameDigitsOnAnyCores(t *testing.T) {
	for name, arguments := range map[string]map[string]any{
		"bootstrap-interval":  {"sample": tenTimes, "of": "median", "resamples": 1000},
		"coverage-check":      {"sample": tenTimes, "resamples": 1000},
		"population-coverage": {"shape": "uniform", "n": 7, "resamples": 1000},
	} {
		var one, many *Outcome
		onCores(1, func() { one = answer(t, name, arguments) })
		onCores(8, func() { many = answer(t, name, arguments) })
		sameResults(t, one, many)
		other := answer(t, name, altered(arguments, "seed", 2))
		differs := slices.ContainsFunc(one.Function.Results, func(r Result) bool { a, _ := one.Get(r.Name); b, _ := other.Get(r.Name); return a != b })
		if !differs {
			t.Errorf("%s: another seed gives the same", name)
		}
	}
}

// Cancelled work stops within a tenth of a second. The shortest of several attempts
// counts, as the machine may be busy.
func TestSimulationsStopWhenCancelled(t *testing.T) {
	const tenth = 100 * time.Millisecond
	for name, arguments := range map[string]map[string]any{
		"bootstrap-interval":  {"sample": counting(20_000), "of": "median", "resamples": 1500},
		"coverage-check":      {"sample": counting(200_000), "resamples": 300},
		"population-coverage": {"shape": "lognormal", "parameter": 1.0, "n": 20_000, "resamples": 1500},
	} {
		shortest := time.Hour
		for attempt := 0; attempt < 3 || attempt < 20 && shortest > tenth; attempt++ {
			ctx, cancel := context.WithCancel(context.Background())
			var cancelled time.Time
			time.AfterFunc(10*time.Millisecond, func() { cancelled = time.Now(); cancel() })
			_, err := Answer(ctx, name, arguments)
			if !errors.Is(err, context.Canceled) {
				t.Fatalf("%s: %v", name, err)
			}
			shortest = min(shortest, time.Since(cancelled))
		}
		if shortest > tenth {
			t.Errorf("%s: stopped after %v", name, shortest)
		}
	}
}

func BenchmarkCoverageOf100Values(b *testing.B) {
	for b.Loop() {
		if _, err := Answer(context.Background(), "coverage-check", map[string]any{"sample": counting(100), "resamples": 20000}); err != nil {
			b.Fatal(err)
		}
	}
}

func BenchmarkBootstrap(b *testing.B) {
	for _, of := range []string{"mean", "median", "sd", "trimmed-mean"} {
		b.Run(fmt.Sprint(of), func(b *testing.B) {
			for b.Loop() {
				if _, err := Answer(context.Background(), "bootstrap-interval", map[string]any{"sample": counting(100), "of": of, "resamples": 20000}); err != nil {
					b.Fatal(err)
				}
			}
		})
	}
}
