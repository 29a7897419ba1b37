package main

import (
	"bytes"
	"os"
	"path/filepath"
	"slices"
	"strings"
	"testing"
)

const references = "../../../testdata/references/numerics"

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
// the studentized range is held to 1e-11, all else to 1e-13.
func TestEveryPointIsWithinItsBound(t *testing.T) {
	files, err := filepath.Glob(references + "/*.csv")
	if err != nil || len(files) == 0 {
		t.Fatal("no reference files", err)
	}
	for _, file := range files {
		list, err := measureFile(file)
		if err != nil {
			t.Fatal(err)
		}
		for _, m := range list {
			bound := 1e-13
			switch {
			case strings.Contains(m.name, "sample_size"):
				bound = 0
			case m.name == "studentized_range_quantile":
				bound = 1e-11
			}
			if worst := slices.Max(m.errors); worst > bound {
				t.Errorf("%s: largest relative error %.2g, bound %.0g", m.name, worst, bound)
			}
		}
	}
}
