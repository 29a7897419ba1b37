package funcs

import (
	"context"
	"errors"
	"strings"
	"testing"
)

// Requests that no n can meet are outcomes with a reason, not errors.
func TestAbsurdPlansAreRefusedWithTheReason(t *testing.T) {
	mean := map[string]any{"sd": 1.0, "difference": 0.5}
	for _, c := range []struct {
		function  string
		arguments map[string]any
		code      string
	}{
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
	} {
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
		{"enough-n-for-mean", map[string]any{"skewness": 2.0}, "excess-kurtosis"},
	} {
		_, err := Answer(context.Background(), c.function, c.arguments)
		var wrong ArgumentErrors
		if !errors.As(err, &wrong) || wrong[0].Argument != c.argument || !strings.Contains(err.Error(), c.argument) {
			t.Errorf("%s(%v): %v, want an error about %s", c.function, c.arguments, err, c.argument)
		}
	}
}
