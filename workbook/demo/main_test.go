package main

import (
	"bytes"
	"os"
	"path/filepath"
	"testing"
)

func TestTheCommittedDemoWorkbookIsWhatTheGeneratorWrites(t *testing.T) {
	path := filepath.Join(t.TempDir(), "demo.xlsx")
	if err := write(path); err != nil {
		t.Fatal(err)
	}
	got, err := os.ReadFile(path)
	if err != nil {
		t.Fatal(err)
	}
	want, err := os.ReadFile("../../testdata/workbooks/larkmoor.xlsx")
	if err != nil {
		t.Fatal(err)
	}
	if !bytes.Equal(got, want) {
		t.Error("they differ; run: go run ./workbook/demo testdata/workbooks/larkmoor.xlsx")
	}
}
