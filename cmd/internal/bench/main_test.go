package main

import (
	"os"
	"strings"
	"testing"
)

func TestMain(m *testing.M) {
	if os.Getenv(roleVariable) != "" {
		main()
		return
	}
	os.Exit(m.Run())
}

// Everything runs and every figure has its place; what the figures are at a
// hundredth of the sizes means nothing.
func TestThePageHasEveryFigure(t *testing.T) {
	if testing.Short() {
		t.Skip("runs some fifty processes")
	}
	page, err := measure("python3", true)
	if err != nil {
		t.Fatal(err)
	}
	for _, want := range []string{"Measured on ", "| 10,000 × 5, beside the data | ", "| many short ones | ", "| one long list | ", "| without the automatic cautions | ", "| with them | ",
		"| rows of a data sheet | 1,000 |", "| rows of a data file (csv) |", "| questions | 10 |", "| files | 10 |"} {
		if !strings.Contains(page, want) {
			t.Errorf("the page has no %q:\n%s", want, page)
		}
	}
	if got := strings.Count(page, "| time for each | "); got != 4 {
		t.Errorf("%d tables of growth", got)
	}
}

func TestFiguresHaveTwoDigits(t *testing.T) {
	for x, want := range map[float64]string{123.4: "123", 12.3: "12", 1.234: "1.2", 0.1234: "0.12"} {
		if got := figure(x); got != want {
			t.Errorf("%v is shown as %s, want %s", x, got, want)
		}
	}
	for n, want := range map[int]string{1: "1", 1000: "1,000", 1234567: "1,234,567"} {
		if got := thousands(n); got != want {
			t.Errorf("%d is shown as %s, want %s", n, got, want)
		}
	}
}
