package funcs

import (
	"context"
	"errors"
	"math"
	"slices"
	"testing"
)

func TestEveryDescriptorHoldsTogether(t *testing.T) {
	seen := map[string]bool{}
	for _, f := range All() {
		if err := f.Validate(); err != nil {
			t.Error(err)
		}
		if seen[f.Name] {
			t.Errorf("%s stands twice in the catalogue", f.Name)
		}
		seen[f.Name] = true
	}
}

// arguments gives the example's arguments as a call takes them.
func (e Example) arguments() map[string]any {
	m := map[string]any{}
	for _, a := range e.Arguments {
		m[a.Name] = a.Value
	}
	return m
}

func TestEveryExampleGivesWhatItsSourceSays(t *testing.T) {
	for _, f := range All() {
		out, err := f.Answer(context.Background(), f.Example.arguments())
		if err != nil {
			t.Errorf("%s: %v", f.Name, err)
			continue
		}
		if out.Status == StatusRefused {
			t.Errorf("%s: refused: %s", f.Name, Note(out.Findings))
			continue
		}
		if len(f.Example.Want) == 0 || f.Example.Source == "" {
			t.Errorf("%s: the example names no wanted value or no source", f.Name)
		}
		for _, want := range f.Example.Want {
			got, ok := out.Get(want.Name)
			if !ok {
				t.Errorf("%s: %s is absent, want %v", f.Name, want.Name, want.Value)
				continue
			}
			if w, isNumber := want.Value.(float64); isNumber {
				if g := got.(float64); !(math.Abs(g-w) <= f.Example.Tolerance*math.Abs(w)) {
					t.Errorf("%s: %s = %v, want %v within %g (%s)", f.Name, want.Name, g, w, f.Example.Tolerance, f.Example.Source)
				}
			} else if got != want.Value {
				t.Errorf("%s: %s = %v, want %v (%s)", f.Name, want.Name, got, want.Value, f.Example.Source)
			}
		}
		for _, name := range []string{"status", "method", "citation", "sentence", "version", "fingerprint"} {
			if v, _ := out.Get(name); v == nil || v == "" {
				t.Errorf("%s: its example gives no %s", f.Name, name)
			}
		}
		checkDeclared(t, f, out)
	}
}

// checkDeclared fails where an outcome raises a finding that the descriptor
// does not declare.
func checkDeclared(t *testing.T, f *Function, out *Outcome) {
	t.Helper()
	common := []string{"unusual-level", "too-large-to-hold"}
	for _, finding := range out.Findings {
		declared := slices.ContainsFunc(f.Findings, func(k FindingKind) bool { return k.Code == finding.Code })
		if !declared && !slices.Contains(common, finding.Code) {
			t.Errorf("%s raises %q, which it does not declare", f.Name, finding.Code)
		}
	}
}

func TestUnknownFunctionNamesTheClosest(t *testing.T) {
	_, err := Answer(context.Background(), "mean-intervall", nil)
	var unknown *UnknownError
	if !errors.As(err, &unknown) || !slices.Contains(unknown.Closest, "mean-interval") {
		t.Errorf("got %v, want an UnknownError that names mean-interval", err)
	}
}
