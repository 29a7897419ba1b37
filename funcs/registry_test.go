package funcs

import (
	"context"
	"errors"
	"fmt"
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
		if len(f.Example.Want)+len(f.Example.WantRows) == 0 || f.Example.Source == "" {
			t.Errorf("%s: the example names no wanted value or no source", f.Name)
		}
		for _, want := range f.Example.Want {
			got, ok := out.Get(want.Name)
			f.Example.compare(t, f.Name, got, ok, want)
		}
		for i, row := range f.Example.WantRows {
			if i >= len(out.Rows) {
				t.Errorf("%s: its table has %d rows, want %d", f.Name, len(out.Rows), len(f.Example.WantRows))
				break
			}
			for _, want := range row {
				got, ok := out.Rows[i].Values[want.Name]
				f.Example.compare(t, fmt.Sprintf("%s, row %d", f.Name, i+1), got, ok, want)
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

// compare fails where a result is not what the example's source says.
func (e Example) compare(t *testing.T, where string, got any, ok bool, want Argument) {
	t.Helper()
	w, isNumber := want.Value.(float64)
	switch {
	case !ok:
		t.Errorf("%s: %s is absent, want %v", where, want.Name, want.Value)
	case !isNumber && got != want.Value:
		t.Errorf("%s: %s = %v, want %v (%s)", where, want.Name, got, want.Value, e.Source)
	case isNumber && !(math.Abs(got.(float64)-w) <= e.Tolerance*math.Abs(w)):
		t.Errorf("%s: %s = %v, want %v within %g (%s)", where, want.Name, got, w, e.Tolerance, e.Source)
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
