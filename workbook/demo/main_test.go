package main

import (
	"archive/zip"
	"io"
	"path/filepath"
	"slices"
	"testing"
)

func TestTheCommittedDemoWorkbookIsWhatTheGeneratorWrites(t *testing.T) {
	path := filepath.Join(t.TempDir(), "demo.xlsx")
	if err := write(path); err != nil {
		t.Fatal(err)
	}
	got, want := parts(t, path), parts(t, "../../testdata/workbooks/larkmoor.xlsx")
	if !slices.Equal(got, want) {
		t.Error("they differ; run: go run ./workbook/demo testdata/workbooks/larkmoor.xlsx")
	}
}

// parts gives names and contents of a package's parts in their order; not the
// packed bytes, which may change with the compressor.
func parts(t *testing.T, path string) []string {
	t.Helper()
	in, err := zip.OpenReader(path)
	if err != nil {
		t.Fatal(err)
	}
	defer in.Close()
	var out []string
	for _, f := range in.File {
		r, err := f.Open()
		if err != nil {
			t.Fatal(err)
		}
		content, err := io.ReadAll(r)
		if err != nil {
			t.Fatal(err)
		}
		out = append(out, f.Name, string(content))
	}
	return out
}
