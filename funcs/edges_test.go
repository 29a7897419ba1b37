package funcs

import (
	"context"
	"errors"
	"fmt"
	"maps"
	"math"
	"slices"
	"testing"
	"time"
)

// outside gives values just outside an input's domain, made from its
// descriptor.
func outside(in Input) []any {
	var out []any
	switch in.Kind {
	case Number, Level, Count, Numbers:
		d := in.Domain
		ends := []float64{math.NaN()}
		if !in.Infinite {
			ends = append(ends, math.Inf(1))
		}
		ends = append(ends, math.Inf(-1))
		for _, end := range []struct {
			at     float64
			open   bool
			beyond float64
		}{{d.Low, d.LowOpen, math.Inf(-1)}, {d.High, d.HighOpen, math.Inf(1)}} {
			switch {
			case math.IsInf(end.at, 0):
			case end.open:
				ends = append(ends, end.at)
			case d.Whole:
				ends = append(ends, end.at+math.Copysign(1, end.beyond))
			default:
				ends = append(ends, math.Nextafter(end.at, end.beyond))
			}
		}
		if d.Whole {
			ends = append(ends, d.Low+0.5)
		}
		for _, x := range ends {
			if d.Contains(x) && !math.IsInf(x, 0) {
				continue // 2^53 + 1 is 2^53
			}
			if in.Kind == Numbers {
				if in.MayBeGaps && math.IsNaN(x) {
					continue
				}
				out = append(out, []float64{x})
			} else {
				out = append(out, x)
			}
		}
		out = append(out, "thirty", true)
	case Choice:
		out = append(out, "no such choice", 1.0)
	case YesNo:
		out = append(out, "yes", 1.0)
	case Text:
		out = append(out, "", 1.0)
	case Sample:
		out = append(out, []float64{}, []float64{math.NaN()}, []float64{1, math.Inf(1)}, "1; 2", 3.0)
	case Samples:
		out = append(out, []Group{}, []Group{{"a", nil}}, []Group{{"a", []float64{1}}, {"a", []float64{2}}}, []Group{{"", []float64{1}}}, []float64{1, 2})
	}
	return out
}

// The edges are made from the descriptors, so that a new function is held to
// its own domains without a line here.
func TestAValueOutsideItsDomainIsNamed(t *testing.T) {
	for _, f := range All() {
		for _, in := range f.Inputs {
			for _, bad := range outside(in) {
				arguments := f.Example.arguments()
				arguments[in.Name] = bad
				_, err := f.Answer(context.Background(), arguments)
				var wrong ArgumentErrors
				if !errors.As(err, &wrong) {
					t.Errorf("%s: %s = %v: got %v, want an ArgumentErrors", f.Name, in.Name, bad, err)
					continue
				}
				if !slices.ContainsFunc(wrong, func(e *ArgumentError) bool { return e.Argument == in.Name }) {
					t.Errorf("%s: %s = %v: %v does not name it", f.Name, in.Name, bad, err)
				}
			}
		}
	}
}

// inside gives values at or just inside the ends of an input's domain.
func inside(in Input) []any {
	d := in.Domain
	var out []any
	switch in.Kind {
	case Number, Level, Count:
		for _, end := range []struct {
			at     float64
			open   bool
			inward float64
		}{{d.Low, d.LowOpen, math.Inf(1)}, {d.High, d.HighOpen, math.Inf(-1)}} {
			x := end.at
			switch {
			case math.IsInf(x, -1):
				x = -1e300
			case math.IsInf(x, 1):
				x = 1e300
			case end.open:
				x = math.Nextafter(x, end.inward)
			}
			if in.Name == "resamples" || in.Name == "seed" || in.Name == "n" && x > 1e6 {
				continue // the work grows with them; their ends are tested by their functions
			}
			out = append(out, x)
		}
	case Choice:
		for _, c := range in.Choices {
			out = append(out, c)
		}
	case YesNo:
		out = append(out, true, false)
	case Sample:
		out = append(out, []float64{5}, []float64{1e308, -1e308, 3}, []float64{math.NaN(), 2, 2, 2}, []float64{1e9 + 1e-6, 1e9, 1e9 - 1e-6})
	case Samples:
		out = append(out, []Group{{"a", []float64{5}}}, []Group{{"a", []float64{1, 2}}, {"b", []float64{3}}}, []Group{{"a", []float64{1e308, -1e308}}, {"b", []float64{2, 2}}})
	}
	return out
}

// slow is how long one call may take at the most. The bound is wide, since the
// machine may be busy; it tells a hang from work.
const slow = 20 * time.Second

// checkOutcome fails where an outcome holds what none may hold.
func checkOutcome(t *testing.T, what string, out *Outcome) {
	t.Helper()
	if out.Status == StatusRefused {
		if len(out.Results()) != 0 || len(out.Findings) == 0 || out.Findings[0].Severity != Refused {
			t.Errorf("%s: refused with results %v and findings %v", what, out.Results(), out.Findings)
		}
	}
	for _, r := range out.Results() {
		if !finite(r.Value) {
			t.Errorf("%s: %s is %v", what, r.Name, r.Value)
		}
	}
	for _, row := range out.Rows {
		for name, v := range row.Values {
			if !finite(v) {
				t.Errorf("%s: %s is %v in a row of the table", what, name, v)
			}
		}
	}
	checkDeclared(t, out.Function, out)
}

func TestAValueAtTheEdgeOfItsDomainIsAnswered(t *testing.T) {
	for _, f := range All() {
		for _, in := range f.Inputs {
			for _, edge := range inside(in) {
				arguments := maps.Clone(f.Example.arguments())
				arguments[in.Name] = edge
				what := fmt.Sprintf("%s: %s = %v", f.Name, in.Name, edge)
				start := time.Now()
				ctx, cancel := context.WithTimeout(context.Background(), slow)
				out, err := f.Answer(ctx, arguments)
				cancel()
				if d := time.Since(start); d > slow {
					t.Errorf("%s: took %v", what, d)
				} else if d > time.Second {
					t.Logf("%s: took %v", what, d)
				}
				var wrong ArgumentErrors
				switch {
				case errors.As(err, &wrong):
					// Together with the example's other arguments an edge may be wrong, such as
					// a reference against the direction; the domain itself must not refuse it.
					for _, e := range wrong {
						if e.Reason == "must be "+in.Expects() {
							t.Errorf("%s: %v", what, err)
						}
					}
				case err != nil:
					t.Errorf("%s: %v", what, err)
				default:
					checkOutcome(t, what, out)
				}
			}
		}
	}
}
