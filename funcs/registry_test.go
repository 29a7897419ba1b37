package funcs

import (
	"context"
	"errors"
	"fmt"
	"math"
	"regexp"
	"slices"
	"strings"
	"testing"
)

func TestEveryDescriptorHoldsTogether(t *testing.T) {
	seen := map[string]bool{}
	for _, f := range All() {
		if err := f.validate(); err != nil {
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

var hyphenated = regexp.MustCompile(`^[a-z][a-z0-9]*(-[a-z0-9]+)*$`)

// validate reports what is wrong with a descriptor: names, alternatives,
// defaults and citations that do not hold together.
func (f *Function) validate() error {
	var faults []string
	fault := func(format string, a ...any) { faults = append(faults, fmt.Sprintf(format, a...)) }
	seen := map[string]bool{}
	for _, in := range f.Inputs {
		if !hyphenated.MatchString(in.Name) || seen[in.Name] {
			fault("input name %q is not a hyphenated name of its own", in.Name)
		}
		seen[in.Name] = true
		if in.Summary == "" {
			fault("input %s has no summary", in.Name)
		}
		if in.Kind == Choice && !slices.Contains(in.Choices, fmt.Sprint(in.Default)) {
			fault("input %s: its default is none of its choices", in.Name)
		}
	}
	for _, one := range f.OneOf {
		for _, way := range one {
			for _, n := range slices.Concat(way.Needs, way.May) {
				if _, ok := f.Input(n); !ok {
					fault("alternative names %q, which is no input", n)
				}
			}
		}
	}
	given := map[string]bool{}
	for _, r := range slices.Concat(f.Results, CommonResults) {
		if !hyphenated.MatchString(r.Name) || given[r.Name] {
			fault("result name %q is not a hyphenated name of its own", r.Name)
		}
		given[r.Name] = true
		if r.Summary == "" {
			fault("result %s has no summary", r.Name)
		}
	}
	for name, missing := range map[string]bool{
		"name": !hyphenated.MatchString(f.Name), "summary": f.Summary == "", "citation": len(f.Citations) == 0, "version": f.Version < 1,
		"results": len(f.Results)+len(f.Table) == 0, "example": len(f.Example.Arguments) == 0, "computation": f.compute == nil,
	} {
		if missing {
			fault("no %s", name)
		}
	}
	if faults != nil {
		slices.Sort(faults)
		return fmt.Errorf("%s: %s", f.Name, strings.Join(faults, "; "))
	}
	return nil
}
