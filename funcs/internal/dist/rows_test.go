package dist

import (
	"encoding/csv"
	"encoding/json"
	"math"
	"os"
	"path/filepath"
	"strconv"
	"strings"
	"testing"
)

// A row of testdata/references/numerics: its cells by the names in the header.
type row map[string]string

func (r row) function() string { return r["function"] }

func (r row) number(t *testing.T, name string) float64 {
	t.Helper()
	x, err := strconv.ParseFloat(r[name], 64)
	if err != nil {
		t.Fatalf("%s of %v: %v", name, r, err)
	}
	return x
}

func (r row) count(t *testing.T, name string) int {
	t.Helper()
	n, err := strconv.Atoi(r[name])
	if err != nil {
		t.Fatalf("%s of %v: %v", name, r, err)
	}
	return n
}

// highPrecisionRows reads one file of values computed at 60 digits; its README
// says by which two formulas.
func highPrecisionRows(t *testing.T, file string) []row {
	t.Helper()
	return readRows(t, "numerics", file)
}

// publishedTable reads the entries of one printed table.
func publishedTable(t *testing.T, id string) []row {
	t.Helper()
	var rows []row
	for _, r := range readRows(t, "published", "tables.csv") {
		if r["table_id"] == id {
			rows = append(rows, r)
		}
	}
	if len(rows) == 0 {
		t.Fatalf("no table %q", id)
	}
	return rows
}

func readRows(t *testing.T, folder, file string) []row {
	t.Helper()
	f, err := os.Open(filepath.Join("..", "..", "..", "testdata", "references", folder, file))
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	cells, err := csv.NewReader(f).ReadAll()
	if err != nil {
		t.Fatal(err)
	}
	var rows []row
	for _, line := range cells[1:] {
		r := row{}
		for i, name := range cells[0] {
			r[name] = line[i]
		}
		rows = append(rows, r)
	}
	if len(rows) == 0 {
		t.Fatalf("%s has no rows", file)
	}
	return rows
}

// parameters decodes the JSON cell that says which entry of a table a row is.
func parameters(t *testing.T, r row, into any) {
	t.Helper()
	if err := json.Unmarshal([]byte(r["params"]), into); err != nil {
		t.Fatalf("%v: %v", r, err)
	}
}

// wantDigits fails the test unless got is within the relative tolerance of want.
func wantDigits(t *testing.T, what any, got, want, tolerance float64) {
	t.Helper()
	if d := relativeError(got, want); !(d <= tolerance) {
		t.Errorf("%v: got %.17g, want %.17g, off by %.2g", what, got, want, d)
	}
}

func relativeError(got, want float64) float64 {
	if want == 0 || got == want {
		return math.Abs(got - want)
	}
	return math.Abs(got/want - 1)
}

// wantPrinted fails the test unless got agrees with an entry of a printed table:
// within half a unit of its last place, or one unit where the row says that the
// source cut the last place or raised it.
func wantPrinted(t *testing.T, r row, got float64) {
	t.Helper()
	_, decimals, _ := strings.Cut(r["value"], ".")
	unit := math.Pow(10, -float64(len(decimals)))
	d := (got - r.number(t, "value")) / unit
	low, high := -0.5, 0.5
	switch r["reproduced"] {
	case "truncated":
		low, high = 0, 1
	case "rounded up":
		low, high = -1, 0
	}
	if !(d >= low-1e-6 && d <= high+1e-6) {
		t.Errorf("%s %s: got %v, printed %s", r["table_id"], r["params"], got, r["value"])
	}
}

// tableNumber is a number in the parameters of a table entry, "inf" included.
type tableNumber float64

func (n *tableNumber) UnmarshalJSON(b []byte) error {
	x, err := strconv.ParseFloat(strings.Trim(string(b), `"`), 64)
	*n = tableNumber(x)
	return err
}
