package funcs

import (
	"math"
	"slices"
	"testing"
)

// preciseRow is one high-precision check value of testdata/references/numerics.
type preciseRow struct {
	function string
	value    float64
	columns  map[string]string
}

// preciseValues gives the rows of a file for the functions named; all where
// none is named.
func preciseValues(t *testing.T, file string, functions ...string) []preciseRow {
	t.Helper()
	var out []preciseRow
	for _, r := range csvRows(t, "../testdata/references/numerics/"+file) {
		if len(functions) == 0 || slices.Contains(functions, r["function"]) {
			out = append(out, preciseRow{r["function"], float(t, r["value"]), r})
		}
	}
	if len(out) == 0 {
		t.Fatalf("%s holds no row of %v", file, functions)
	}
	return out
}

// arg gives an argument of the row; "inf" is infinite.
func (p preciseRow) arg(t *testing.T, name string) float64 {
	t.Helper()
	return float(t, p.columns[name])
}

// degrees gives degrees of freedom as a call takes them.
func (p preciseRow) degrees(t *testing.T, name string) any {
	t.Helper()
	if x := p.arg(t, name); !math.IsInf(x, 1) {
		return x
	}
	return Infinite
}

// check compares relatively, with 0 absolutely.
func (p preciseRow) check(t *testing.T, got, tolerance float64) {
	t.Helper()
	off := math.Abs(got)
	if p.value != 0 {
		off = math.Abs(got/p.value - 1)
	}
	if !(off <= tolerance) {
		t.Errorf("%v: got %v, want %v within %g; off by %.2g", p.columns, got, p.value, tolerance, off)
	}
}

// numberOf gives a numeric result of an outcome, NaN where it is absent.
func numberOf(t *testing.T, out *Outcome, name string) float64 {
	t.Helper()
	switch v, _ := out.Get(name); v := v.(type) {
	case nil:
		return math.NaN()
	case float64:
		return v
	case int:
		return float64(v)
	default:
		t.Fatalf("%s: %s is %v, not a number", out.Function.Name, name, v)
		return 0
	}
}
