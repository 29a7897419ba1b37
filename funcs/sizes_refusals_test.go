package funcs

import (
	"context"
	"errors"
	"math"
	"slices"
	"strings"
	"testing"
)

// refusals are requests that no n can meet.
func refusals() []found {
	mean := map[string]any{"sd": 1.0, "difference": 0.5}
	return []found{
		{"mean-test-size", map[string]any{"sd": 1.0, "difference": 0.0}, "no-difference"},
		{"mean-test-size", with(mean, "direction", below), "against-direction"},
		{"mean-test-size", with(mean, "power", 0.05), "power-not-above-significance"},
		{"mean-test-size", map[string]any{"sd": 1.0, "difference": 1e-5}, "too-many"},
		{"mean-test-size", with(mean, "design-effect", 1e9), "too-many"},
		{"mean-test-power", map[string]any{"sd": 1.0, "difference": -0.5, "n": 10, "direction": above}, "against-direction"},
		{"mean-test-power", map[string]any{"sd": 1.0, "difference": 0.5, "n": 3, "non-response": 0.5}, "few-values"},
		{"mean-test-detectable", map[string]any{"sd": 1.0, "n": 10, "power": 0.01}, "power-not-above-significance"},
		{"paired-test-size", map[string]any{"sd": 1.0, "difference": 0.0, "correlation": 0.3}, "no-difference"},
		{"difference-test-size", map[string]any{"first-sd": 1.0, "difference": 0.0}, "no-difference"},
		{"difference-test-size", map[string]any{"first-sd": 1.0, "difference": 0.5, "allocation-ratio": 1e-12}, "too-many"},
		{"difference-test-size", map[string]any{"first-sd": 1.0, "difference": 0.5, "allocation-ratio": 1e12}, "too-many"},
		{"mean-precision-size", map[string]any{"sd": 1.0, "half-width": 1e-6}, "too-many"},
		{"mean-precision-size", map[string]any{"sd": 1.0, "half-width": 1.0, "direction": above, "confidence": 0.4}, "level-too-low"},
		{"mean-precision-size", map[string]any{"sample": []float64{4, 4, 4}, "half-width": 1.0}, "no-spread"},
		{"mean-precision-size", map[string]any{"sample": []float64{4}, "half-width": 1.0}, "few-values"},
		{"difference-precision-size", map[string]any{"first-sd": 1.0, "half-width": 1e-6}, "too-many"},
		{"proportion-precision-size", map[string]any{"half-width": 1e-6}, "too-many"},
		{"proportion-precision-size", map[string]any{"half-width": 0.1, "kind": exactShare, "population-size": 100}, "kind-without-population"},
		{"rate-precision-size", map[string]any{"rate": 1.0, "half-width": 1e-6}, "too-many"},
		{"rate-precision-size", map[string]any{"rate": 1.0, "half-width": 2.0, "direction": above}, "any-exposure-does"},
		{"proportion-test-size", map[string]any{"proportion": 0.2, "reference": 0.2}, "no-difference"},
		{"proportion-test-size", map[string]any{"proportion": 0.2, "reference": 0.1, "direction": below}, "against-direction"},
		{"proportion-test-size", map[string]any{"proportion": 0.2, "reference": 0.1, "power": 0.04}, "power-not-above-significance"},
		{"proportion-test-size", map[string]any{"proportion": 0.50001, "reference": 0.5}, "too-many"},
		{"proportion-test-size", map[string]any{"proportion": 0.2, "reference": 0.1, "power": 0.9, "direction": above, "significance": 0.6}, "significance-too-high"},
		{"proportion-difference-size", map[string]any{"first-proportion": 0.2, "second-proportion": 0.2}, "no-difference"},
		{"proportion-difference-size", map[string]any{"first-proportion": 0.2, "second-proportion": 0.4, "direction": above}, "against-direction"},
		{"several-means-size", map[string]any{"means": []float64{2, 2, 2}, "sd": 1.0}, "no-difference"},
		{"several-means-size", map[string]any{"means": []float64{2}, "sd": 1.0}, "few-groups"},
		{"variance-size", map[string]any{"variance-ratio": 1.0}, "no-difference"},
		{"variance-size", map[string]any{"variance-ratio": 0.5, "direction": above}, "against-direction"},
		{"variance-size", map[string]any{"relative-half-width": 1e-6}, "too-many"},
		{"stratified-size", map[string]any{"sizes": []float64{100, 50}, "sds": []float64{2, 3}, "budget": 3.5}, "budget-too-small"},
		{"stratified-size", map[string]any{"sizes": []float64{100, 50}, "sds": []float64{0, 0}, "budget": 30.0}, "no-spread"},
		{"stratified-size", map[string]any{"sizes": []float64{1e12}, "sds": []float64{1}, "half-width": 1e-5}, "too-many"},
		{"equivalence-size", map[string]any{"sd": 1.0, "difference": 0.6, "margin": 0.5}, "outside-margins"},
		{"equivalence-size", map[string]any{"sd": 1.0, "difference": 0.5, "margin": 0.5}, "outside-margins"},
		{"equivalence-size", map[string]any{"sd": 1.0, "margin": 0.5, "power": 0.05}, "power-not-above-significance"},
		{"equivalence-size", map[string]any{"sd": 1.0, "margin": 1e-6}, "too-many"},
		{"discovery-size", map[string]any{"tolerable-deviation-rate": 0.05, "population-size": 100, "allowed-deviations": 5}, "never-discovered"},
		{"discovery-size", map[string]any{"tolerable-deviation-rate": 1e-10}, "too-many"},
		{"distribution-free-tolerance-size", map[string]any{"content": 0.9999999999}, "too-many"},
		{"enough-n-for-mean", map[string]any{"sample": []float64{1, 2, 3}}, "few-values"},
		{"enough-n-for-mean", map[string]any{"sample": []float64{2, 2, 2, 2}}, "no-spread"},
		{"enough-n-for-mean", map[string]any{"skewness": 1e5, "excess-kurtosis": 2e10}, "too-many"},
	}
}

// found is a call and the finding that it raises.
type found struct {
	function  string
	arguments map[string]any
	code      string
}

// Requests that no n can meet are outcomes with a reason, not errors.
func TestAbsurdPlansAreRefusedWithTheReason(t *testing.T) {
	for _, c := range refusals() {
		out, err := Answer(context.Background(), c.function, c.arguments)
		if err != nil {
			t.Errorf("%s(%v): %v", c.function, c.arguments, err)
			continue
		}
		if out.Status != StatusRefused || out.Findings[0].Code != c.code {
			t.Errorf("%s(%v): %s %v, want refused for %s", c.function, c.arguments, out.Status, out.Findings, c.code)
		}
		checkDeclared(t, out.Function, out)
	}
}

// pilotCautions are pilots that raise the cautions of a sample.
func pilotCautions(function string, more map[string]any) []found {
	skewed, alike, heavy := make([]float64, 40), make([]float64, 40), make([]float64, 200)
	for i := range 40 {
		skewed[i] = math.Exp(math.Mod(float64(i)*0.618, 1) * 6)
		alike[i] = float64(i)
	}
	for i := range heavy {
		u := math.Mod(float64(i+1)*0.6180339887, 1)
		heavy[i] = 1 / (u - 0.5001)
	}
	var out []found
	for _, c := range []struct {
		sample []float64
		code   string
	}{{[]float64{3, 1, 4, 1.5}, "few-values"}, {skewed, "skewed-for-n"}, {alike, "neighbours-alike"},
		{[]float64{3, 1, 4, 1, 5, 2, 3, 900}, "far-value"}, {heavy, "heavy-tail"}} {
		out = append(out, found{function, with(more, "sample", c.sample), c.code})
	}
	return out
}

func TestEveryFindingThatAPlanDeclaresIsReached(t *testing.T) {
	cases := append(refusals(), pilotCautions("mean-precision-size", map[string]any{"half-width": 100.0})...)
	cases = append(cases, pilotCautions("mean-precision", map[string]any{"n": 100})...)
	cases = append(cases, pilotCautions("enough-n-for-mean", nil)...)
	cases = append(cases, []found{
		{"mean-precision-size", map[string]any{"sd": 1.0, "half-width": 0.7, "population-size": 12, "non-response": 0.5}, "losses-exceed-population"},
		{"proportion-precision-size", map[string]any{"half-width": 0.1, "population-size": 12, "non-response": 0.5}, "losses-exceed-population"},
		{"discovery-size", map[string]any{"tolerable-deviation-rate": 0.1, "population-size": 12, "non-response": 0.5}, "losses-exceed-population"},
		{"stratified-size", with(depots, "half-width", 0.1), "losses-exceed-population"},
		{"difference-precision-size", map[string]any{"first-sd": 1.0, "second-sd": 3.0, "half-width": 1.0, "variances": pooled}, "spreads-unlike"},
		{"difference-precision", map[string]any{"first-sd": 1.0, "second-sd": 3.0, "n": 9, "variances": pooled}, "spreads-unlike"},
		{"difference-test-size", map[string]any{"first-sd": 1.0, "second-sd": 3.0, "difference": 1.0, "variances": pooled}, "spreads-unlike"},
		{"difference-test-power", map[string]any{"first-sd": 1.0, "second-sd": 3.0, "difference": 1.0, "n": 9, "variances": pooled}, "spreads-unlike"},
		{"difference-test-detectable", map[string]any{"first-sd": 1.0, "second-sd": 3.0, "n": 9, "variances": pooled}, "spreads-unlike"},
		{"proportion-test-size", map[string]any{"proportion": 0.50007, "reference": 0.5}, "plan-is-a-bound"},
		{"proportion-difference-size", map[string]any{"first-proportion": 0.501, "second-proportion": 0.5}, "plan-is-a-bound"},
	}...)
	for i := range cases {
		if cases[i].code == "losses-exceed-population" {
			cases[i].arguments["non-response"] = 0.5
		}
	}
	reached := map[string]bool{}
	for _, c := range cases {
		out, err := Answer(context.Background(), c.function, c.arguments)
		if err != nil {
			t.Errorf("%s(%v): %v", c.function, c.arguments, err)
			continue
		}
		checkDeclared(t, out.Function, out)
		all := out.Findings
		for _, row := range out.Rows {
			all = append(all, row.Findings...)
		}
		for _, f := range all {
			reached[c.function+" "+f.Code] = true
		}
		if !reached[c.function+" "+c.code] {
			t.Errorf("%s(%v): %v, want %s", c.function, c.arguments, all, c.code)
		}
	}
	for _, f := range sizesFamily {
		for _, k := range f.Findings {
			if !reached[f.Name+" "+k.Code] && !reachedByChange(f, k.Code) {
				t.Errorf("%s declares %s, which no case reaches", f.Name, k.Code)
			}
		}
	}
}

// changes turn the example of any function into a call that raises a finding;
// nil takes an argument away.
var changes = map[string][]map[string]any{
	"few-values":                   {{"n": 3, "non-response": 0.9}},
	"few-groups":                   {{"means": []float64{1}}},
	"too-many":                     {{"n": 2_000_000_000}, {"n": 2_000_000_000, "population-size": nil}, {"difference": 1e-9}, {"sd": 1e9}, {"first-proportion": 0.6 + 1e-9, "direction": either}, {"half-width": 1e-9}},
	"level-too-low":                {{"confidence": 0.4, "direction": above}, {"confidence": 0.4, "direction": below, "variance-ratio": nil, "relative-half-width": 0.1, "power": nil}, {"confidence": 0.4, "direction": below, "variance-ratio": nil}},
	"no-spread":                    {{"sd": nil, "sample": []float64{2, 2, 2}}},
	"no-difference":                {{"difference": 0.0}, {"proportion": 0.1}, {"first-proportion": 0.6}, {"variance-ratio": 1.0}, {"means": []float64{1, 1}}},
	"outside-margins":              {{"difference": 99.0}},
	"against-direction":            {{"direction": above, "difference": -1.0}, {"direction": below}, {"direction": above}},
	"power-not-above-significance": {{"power": 0.0001}},
	"significance-too-high":        {{"significance": 0.6, "direction": above}, {"significance": 0.6, "direction": below}},
	"never-discovered":             {{"allowed-deviations": 60}},
	"kind-without-population":      {{"kind": exactShare, "population-size": 1000}},
}

func reachedByChange(f *Function, code string) bool {
	for _, change := range changes[code] {
		arguments := f.Example.arguments()
		for name, v := range change {
			arguments[name] = v
		}
		out, err := f.Answer(context.Background(), arguments)
		if err == nil && slices.ContainsFunc(out.Findings, func(finding Finding) bool { return finding.Code == code }) {
			return true
		}
	}
	return false
}

// with is a copy of arguments with one more.
func with(arguments map[string]any, name string, value any) map[string]any {
	m := map[string]any{name: value}
	for n, v := range arguments {
		if n != name {
			m[n] = v
		}
	}
	return m
}

func TestWrongArgumentsOfPlansAreNamed(t *testing.T) {
	for _, c := range []struct {
		function  string
		arguments map[string]any
		argument  string
	}{
		{"mean-precision-size", map[string]any{"sd": 1.0, "half-width": 0.0}, "half-width"},
		{"mean-precision-size", map[string]any{"sd": 1.0}, "half-width"},
		{"mean-precision-size", map[string]any{"half-width": 1.0}, "sample"},
		{"mean-precision-size", map[string]any{"sample": []float64{1, 2}, "sd": 1.0, "half-width": 1.0}, "sd"},
		{"mean-precision-size", map[string]any{"pilot-n": 5, "half-width": 1.0}, "sd"},
		{"mean-precision-size", map[string]any{"sd": 1.0, "half-width": 1.0, "chance-met": 90.0}, "chance-met"},
		{"mean-precision-size", map[string]any{"sd": 0.0, "half-width": 1.0}, "sd"},
		{"mean-precision-size", map[string]any{"sd": 1.0, "half-width": 1.0, "non-response": 1.0}, "non-response"},
		{"mean-precision-size", map[string]any{"sd": 1.0, "half-width": 1.0, "design-effect": 0.0}, "design-effect"},
		{"mean-precision", map[string]any{"sd": 1.0, "n": 30, "population-size": 20}, "n"},
		{"mean-test-size", map[string]any{"sd": 1.0, "difference": 1.0, "power": 90.0}, "power"},
		{"paired-test-size", map[string]any{"sd": 1.0, "difference": 1.0, "correlation": 1.0}, "correlation"},
		{"proportion-precision-size", map[string]any{"proportion": 1.2, "half-width": 0.1}, "proportion"},
		{"proportion-test-size", map[string]any{"proportion": 0.2, "reference": 0.0}, "reference"},
		{"variance-size", map[string]any{"relative-half-width": 0.1, "variance-ratio": 2.0}, "variance-ratio"},
		{"variance-size", map[string]any{}, "relative-half-width"},
		{"stratified-size", map[string]any{"sizes": []float64{10, 20}, "sds": []float64{1}, "half-width": 1.0}, "sds"},
		{"stratified-size", map[string]any{"sizes": []float64{10, 20.5}, "sds": []float64{1, 1}, "half-width": 1.0}, "sizes"},
		{"stratified-size", map[string]any{"sizes": []float64{10, 20}, "sds": []float64{1, 2}, "half-width": 1.0, "budget": 10.0}, "budget"},
		{"equivalence-size", map[string]any{"sd": 1.0}, "margin"},
		{"equivalence-size", map[string]any{"sd": 1.0, "lower-margin": 1.0, "upper-margin": -1.0}, "upper-margin"},
		{"equivalence-size", map[string]any{"sd": 1.0, "margin": 1.0, "design": "paired", "allocation-ratio": 2.0}, "allocation-ratio"},
		{"enough-n-for-mean", map[string]any{"skewness": 2.0, "excess-kurtosis": 1.0}, "excess-kurtosis"},
		{"enough-n-for-mean", map[string]any{"skewness": 1e200, "excess-kurtosis": 3.0}, "skewness"},
		{"enough-n-for-mean", map[string]any{"skewness": 2.0}, "excess-kurtosis"},
	} {
		_, err := Answer(context.Background(), c.function, c.arguments)
		var wrong ArgumentErrors
		if !errors.As(err, &wrong) || wrong[0].Argument != c.argument || !strings.Contains(err.Error(), c.argument) {
			t.Errorf("%s(%v): %v, want an error about %s", c.function, c.arguments, err, c.argument)
		}
	}
}
