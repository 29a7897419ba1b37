package main

import (
	"bytes"
	"os"
	"strconv"
	"strings"
	"testing"
)

func TestTheTableIsUpToDate(t *testing.T) {
	if testing.Short() {
		t.Skip("draws every sample of the table")
	}
	want, err := page(samples)
	if err != nil {
		t.Fatal(err)
	}
	if got := table(t); got != want {
		t.Error("out of date; run: go run ./funcs/internal/calibration funcs/internal/calibration/table.md, then go run ./cmd/internal/gendocs")
	}
}

func table(t *testing.T) string {
	t.Helper()
	got, err := os.ReadFile("table.md")
	if err != nil {
		t.Fatal(err)
	}
	return string(bytes.ReplaceAll(got, []byte("\r\n"), []byte("\n")))
}

// Where all is well no caution comes for more than 5% of samples; heavy-tail says
// that no n is enough, and so must be as rare for any law with a variance.
func TestCautionsAreRareWhereAllIsWell(t *testing.T) {
	rows := 0
	for line := range strings.Lines(table(t)) {
		cells := strings.Split(line, "|")
		caution, law := strings.TrimSpace(cells[1]), strings.TrimSpace(cells[2])
		well := law == "normal" || strings.HasPrefix(law, "normal, variances 1 to 1") ||
			caution == "heavy-tail" && (law == "exponential" || strings.HasPrefix(law, "lognormal")) ||
			caution == "neighbours-alike" && !strings.Contains(law, "lag-1")
		if !well {
			continue
		}
		rows++
		for i, cell := range cells[3 : 3+len(sizes)] {
			share, err := strconv.ParseFloat(strings.TrimSpace(cell), 64)
			if err != nil {
				t.Fatal(err)
			}
			if share > 5 {
				t.Errorf("%s, %s, n = %d: %v%%", caution, law, sizes[i], share)
			}
		}
	}
	if rows < 10 {
		t.Errorf("%d rows looked at", rows)
	}
}

// Where a caution is due it comes: the least shares, in %, are what sizes of the
// table with the law's own trouble reach.
func TestCautionsComeWhereTheyAreDue(t *testing.T) {
	for _, c := range []struct {
		caution, law string
		n            int
		least        float64
	}{
		{"skewed-for-n", "exponential", 30, 65}, {"skewed-for-n", "lognormal, log-sd 1", 20, 65},
		{"neighbours-alike", "normal, lag-1 correlation 0.5", 50, 75}, {"neighbours-alike", "normal, lag-1 correlation 0.5", 100, 97},
		{"far-value", "Cauchy", 30, 80}, {"heavy-tail", "Cauchy", 200, 70}, {"heavy-tail", "Cauchy", 1000, 95},
		{"spreads-unlike", "normal, variances 9 to 1, n and n", 20, 95}, {"spreads-unlike", "normal, variances 9 to 1, n and 3n", 10, 80},
	} {
		for line := range strings.Lines(table(t)) {
			cells := strings.Split(line, "|")
			if strings.TrimSpace(cells[1]) != c.caution || strings.TrimSpace(cells[2]) != c.law {
				continue
			}
			for i, n := range sizes {
				share, err := strconv.ParseFloat(strings.TrimSpace(cells[3+i]), 64)
				if n == c.n && (err != nil || share < c.least) {
					t.Errorf("%s, %s, n = %d: %v%%, want %v or more", c.caution, c.law, n, share, c.least)
				}
			}
		}
	}
}
