package calculation

import (
	"context"
	"testing"
)

func TestTheLayoutIsThatOfThePlan(t *testing.T) {
	sheet, err := ParseTextSheet("x.calculations.csv", []byte("default confidence,90%\n\nwork out,label,\"sample\",> mean,,work out: sd-interval,sample,> sd\n"+
		"mean-interval,a,minutes in trips.csv,,,b,1; 2; 3,\nmean-interval,,,,,,,\n\nwork out,sample\n"))
	if err != nil {
		t.Fatal(err)
	}
	layout := sheet.Layout()
	plan, err := NewPlan(context.Background(), sheet.Source(nil), Options{})
	if err != nil {
		t.Fatal(err)
	}
	if len(layout.Blocks) != 3 || len(layout.Blocks) != len(plan.Blocks) || len(layout.Rows) != 3 || len(layout.Rows) != len(plan.Rows) {
		t.Fatalf("%d blocks and %d rows, the plan has %d and %d", len(layout.Blocks), len(layout.Rows), len(plan.Blocks), len(plan.Rows))
	}
	for i, r := range layout.Rows {
		if p := plan.Rows[i]; r.Number != p.Number || r.Function != p.Function || r.Label != p.Label || r.Block.FirstCol != p.Block.FirstCol {
			t.Errorf("row %d is %+v, in the plan %+v", i, r, p)
		}
	}
}

func TestCellsOfARow(t *testing.T) {
	sheet, err := ParseTextSheet("x.csv", []byte("a,\"b\"\n\nc;d,e,f\n"))
	if err != nil {
		t.Fatal(err)
	}
	for row, want := range map[int]int{0: 0, 1: 2, 2: 1, 3: 3, 4: 0} {
		if got := sheet.Columns(row); got != want {
			t.Errorf("row %d has %d cells, want %d", row, got, want)
		}
	}
	if sheet.Quoted(CellRef{1, 1}) || !sheet.Quoted(CellRef{1, 2}) || sheet.Quoted(CellRef{9, 9}) {
		t.Error("B1 alone stands in quotes")
	}
	if got := sheet.Encode(`a,"b"`); got != `"a,""b"""` {
		t.Errorf("encoded %s", got)
	}
	if got := sheet.ValueText(0.5); got != "0.5" {
		t.Errorf("a value is written %s", got)
	}
}
