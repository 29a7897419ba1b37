package num

import (
	"encoding/csv"
	"math"
	"os"
	"strconv"
	"testing"
)

func readTable(t *testing.T, name string) []map[string]string {
	t.Helper()
	f, err := os.Open("../../../testdata/references/published/nist-strd-univariate/" + name)
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	lines, err := csv.NewReader(f).ReadAll()
	if err != nil {
		t.Fatal(err)
	}
	var rows []map[string]string
	for _, line := range lines[1:] {
		row := map[string]string{}
		for i, cell := range line {
			row[lines[0][i]] = cell
		}
		rows = append(rows, row)
	}
	return rows
}

// Certified values of the NIST statistical reference datasets, univariate. The
// decimal data lose digits when stored as float64; certified.csv says how many
// are left to an error-free calculation, and that many are asked for, up to 15
// of the mean and 14 of the others (the certified values have 15).
func TestMomentsReproduceCertifiedValues(t *testing.T) {
	number := func(text string) float64 {
		x, err := strconv.ParseFloat(text, 64)
		if err != nil {
			t.Fatal(err)
		}
		return x
	}
	rows := readTable(t, "certified.csv")
	if len(rows) != 9 {
		t.Fatalf("%d datasets, want 9", len(rows))
	}
	for _, row := range rows {
		var xs []float64
		for _, r := range readTable(t, row["dataset"]+".csv") {
			xs = append(xs, number(r["y"]))
		}
		m := Moments(xs)
		if float64(m.N) != number(row["n"]) {
			t.Errorf("%s: n = %d, want %s", row["dataset"], m.N, row["n"])
		}
		for _, c := range []struct {
			name  string
			got   float64
			most  float64
			input string
		}{
			{"mean", m.Mean, 15, "mean_digits_float64_input"},
			{"sd", math.Sqrt(m.SumSquares / float64(m.N-1)), 14, "sd_digits_float64_input"},
			{"lag1_autocorrelation", Lag1(xs), 14, "lag1_digits_float64_input"},
		} {
			want := number(row[c.name])
			digits := min(c.most, number(row[c.input]))
			// The numbers of digits are rounded to a tenth.
			if e := math.Abs(c.got/want - 1); !(e <= math.Pow(10, 0.06-digits)) {
				t.Errorf("%s: %s = %.16g, certified %s, off by %.2g, %v digits wanted", row["dataset"], c.name, c.got, row[c.name], e, digits)
			}
		}
	}
}
