package main

import (
	"bytes"
	"os"
	"slices"
	"strconv"
	"strings"
	"testing"
)

func TestTheTableIsUpToDate(t *testing.T) {
	if testing.Short() {
		t.Skip("draws every sample of the table")
	}
	want, err := page(calls)
	if err != nil {
		t.Fatal(err)
	}
	got, err := os.ReadFile("table.md")
	if err != nil {
		t.Fatal(err)
	}
	if string(bytes.ReplaceAll(got, []byte("\r\n"), []byte("\n"))) != want {
		t.Error("out of date; run: go run ./funcs/internal/calibration funcs/internal/calibration/table.md, then go run ./cmd/internal/gendocs")
	}
}

// share reads one cell of the table, in %.
func share(t *testing.T, caution, values string, n int) float64 {
	t.Helper()
	page, err := os.ReadFile("table.md")
	if err != nil {
		t.Fatal(err)
	}
	for line := range strings.Lines(string(page)) {
		cells := strings.Split(line, "|")
		for i := range cells {
			cells[i] = strings.TrimSpace(cells[i])
		}
		if at := slices.Index(sizes, n); cells[1] == caution && cells[2] == values && at >= 0 {
			share, err := strconv.ParseFloat(cells[3+at], 64)
			if err != nil {
				t.Fatal(err)
			}
			return share
		}
	}
	t.Fatalf("the table has no cell for %s, %s, n = %d", caution, values, n)
	return 0
}

// most is the largest share, in %, of calls that a caution may take in when all is
// well.
const most = 5

// Where all is well no caution comes for more than 5% of calls, nor do all of them
// together. The size of the samples is the only thing that few-values is about.
// Heavy-tail says that no n is enough, and so must be as rare for any law with a
// variance; neighbours-alike asks nothing of the law.
func TestCautionsAreRareWhereAllIsWell(t *testing.T) {
	well := map[string][]string{
		"few-values":       {"normal"},
		"skewed-for-n":     {"normal", "normal, ten groups", "normal, lag-1 correlation 0.5"},
		"neighbours-alike": {"normal", "normal, ten groups", "exponential", "lognormal, log-sd 1", "t with 2 df", "Cauchy"},
		"far-value":        {"normal", "normal, ten groups"},
		"heavy-tail":       {"normal", "normal, ten groups", "exponential", "lognormal, log-sd 1", "lognormal, log-sd 1, ten groups", "normal, lag-1 correlation 0.5"},
		"spreads-unlike":   {twoNormal.name, twoOfOtherN.name, "normal, ten groups"},
		anyCaution:         {"normal", twoNormal.name, twoOfOtherN.name, "normal, ten groups"},
	}
	for _, row := range rows {
		if len(well[row.caution]) == 0 {
			t.Errorf("%s: nothing says when all is well", row.caution)
		}
		for _, values := range well[row.caution] {
			for _, n := range sizes[slices.Index(sizes, 5):] {
				if got := share(t, row.caution, values, n); got > most {
					t.Errorf("%s, %s, n = %d: %v%%", row.caution, values, n, got)
				}
			}
		}
	}
}

// Where a caution is due it comes: the least shares, in %, are what sizes of the
// table with the law's own trouble reach.
func TestCautionsComeWhereTheyAreDue(t *testing.T) {
	due := map[string]bool{}
	for _, c := range []struct {
		caution, values string
		n               int
		least           float64
	}{
		{"few-values", "normal", 4, 100},
		{"skewed-for-n", "exponential", 30, 65}, {"skewed-for-n", "lognormal, log-sd 1", 20, 65},
		{"neighbours-alike", "normal, lag-1 correlation 0.5", 50, 75}, {"neighbours-alike", "normal, lag-1 correlation 0.5", 100, 97},
		{"far-value", "t with 2 df", 100, 80}, {"far-value", "Cauchy", 30, 80},
		{"heavy-tail", "Cauchy", 150, 60}, {"heavy-tail", "Cauchy", 200, 70}, {"heavy-tail", "Cauchy", 1000, 95},
		{"spreads-unlike", "normal, variances 9 to 1, n and n", 20, 95}, {"spreads-unlike", "normal, variances 9 to 1, n and 3n", 10, 80},
		{"spreads-unlike", "normal, variances 1 to 9, n and 3n", 10, 80},
		{anyCaution, "normal", 4, 100},
	} {
		due[c.caution] = true
		if got := share(t, c.caution, c.values, c.n); got < c.least {
			t.Errorf("%s, %s, n = %d: %v%%, want %v or more", c.caution, c.values, c.n, got, c.least)
		}
	}
	for _, row := range rows {
		if !due[row.caution] {
			t.Errorf("%s: nothing says when it is due", row.caution)
		}
	}
}
