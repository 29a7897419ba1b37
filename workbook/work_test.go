package workbook

import (
	"context"
	"os"
	"path/filepath"
	"testing"
)

func TestWorkGivesWhatFillWritesAndWritesNothing(t *testing.T) {
	dir := t.TempDir()
	path := filepath.Join(dir, "larkmoor.xlsx")
	data, err := os.ReadFile("../testdata/workbooks/larkmoor.xlsx")
	if err != nil {
		t.Fatal(err)
	}
	if err := os.WriteFile(path, data, 0o600); err != nil {
		t.Fatal(err)
	}
	worked, err := Work(context.Background(), path, Options{KeepValues: true})
	if err != nil {
		t.Fatal(err)
	}
	if files, err := os.ReadDir(dir); err != nil || len(files) != 1 {
		t.Fatalf("the folder holds %v (%v)", files, err)
	}
	filled, err := Fill(context.Background(), path, Options{})
	if err != nil {
		t.Fatal(err)
	}
	for i, row := range worked.Results.Rows {
		other := filled.Results.Rows[i]
		if len(row.Edits) != len(other.Edits) || row.Status != other.Status {
			t.Fatalf("row %d: %d edits, %s; a fill has %d, %s", row.Row.Number, len(row.Edits), row.Status, len(other.Edits), other.Status)
		}
		for j, e := range row.Edits {
			if e != other.Edits[j] {
				t.Errorf("row %d: %v; a fill writes %v", row.Row.Number, e, other.Edits[j])
			}
		}
		if row.Outcome != nil && row.Row.Function.Name == "mean-interval" {
			if _, kept := row.Outcome.Arguments["sample"].Value.([]float64); !kept {
				t.Errorf("row %d: its sample was not kept", row.Row.Number)
			}
		}
	}
}
