package main

import (
	"bytes"
	"os"
	"slices"
	"strings"
	"testing"
)

const references = "../../../testdata/references"

func TestThePageIsUpToDate(t *testing.T) {
	want, err := measure(references)
	if err != nil {
		t.Fatal(err)
	}
	got, err := os.ReadFile("../../ACCURACY.md")
	if err != nil {
		t.Fatal(err)
	}
	if string(bytes.ReplaceAll(got, []byte("\r\n"), []byte("\n"))) != want {
		t.Error("out of date; run: go run ./funcs/internal/accuracy funcs/ACCURACY.md")
	}
}

// Relative errors that no point may pass: whole numbers are equal, a quantile of
// the studentized range is held to 1e-11, all else to 1e-13, or nearly so.
func TestEveryPointIsWithinItsBound(t *testing.T) {
	list, err := measureAll(references)
	if err != nil {
		t.Fatal(err)
	}
	for _, m := range list {
		bound := 1e-13
		switch {
		case strings.Contains(m.name, "sample_size"):
			bound = 0
		case m.name == "studentized_range_quantile", m.name == "studentized_range_upper_quantile":
			bound = 1e-11
		case strings.HasPrefix(m.name, "noncentral"), strings.HasPrefix(m.name, "studentized_range"):
			bound = 2e-13 // far tails, and degrees of freedom to 1e10
		}
		if worst := slices.Max(m.errors); worst > bound {
			t.Errorf("%s: largest relative error %.2g, bound %.0g", m.name, worst, bound)
		}
	}
}
