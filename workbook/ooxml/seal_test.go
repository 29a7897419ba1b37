package ooxml

import (
	"archive/zip"
	"bytes"
	"io"
	"os"
	"path/filepath"
	"testing"
)

func TestASealHoldsUntilAPartChanges(t *testing.T) {
	dir := t.TempDir()
	b, err := Open("../../testdata/workbooks/larkmoor.xlsx", Limits{})
	if err != nil {
		t.Fatal(err)
	}
	defer b.Close()
	path := filepath.Join(dir, "saved.xlsx")
	if _, err := b.SaveAs(path, Changes{Edits: map[int][]Edit{0: {{Row: 2, Col: 9, Value: NumberValue(7)}}}}); err != nil {
		t.Fatal(err)
	}
	if ok, err := Sealed(path); !ok || err != nil {
		t.Errorf("a book just written: %v %v", ok, err)
	}
	if ok, err := Sealed("../../testdata/workbooks/larkmoor.xlsx"); ok || err != nil {
		t.Errorf("a book without a seal: %v %v", ok, err)
	}
	// Another program keeps the entries and their extra fields, but changes one.
	in, err := zip.OpenReader(path)
	if err != nil {
		t.Fatal(err)
	}
	defer in.Close()
	var changed bytes.Buffer
	out := zip.NewWriter(&changed)
	for i, f := range in.File {
		if i < len(in.File)-1 {
			if err := out.Copy(f); err != nil {
				t.Fatal(err)
			}
			continue
		}
		header := f.FileHeader
		w, err := out.CreateHeader(&header)
		if err != nil {
			t.Fatal(err)
		}
		if _, err := io.WriteString(w, "other"); err != nil {
			t.Fatal(err)
		}
	}
	if err := out.Close(); err != nil {
		t.Fatal(err)
	}
	other := filepath.Join(dir, "other.xlsx")
	if err := os.WriteFile(other, changed.Bytes(), 0o600); err != nil {
		t.Fatal(err)
	}
	if ok, err := Sealed(other); ok || err != nil {
		t.Errorf("a book changed since: %v %v", ok, err)
	}
}
