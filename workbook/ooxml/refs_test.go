package ooxml

import "testing"

func TestCellNames(t *testing.T) {
	for _, test := range []struct {
		row, col int
		name     string
	}{{1, 1, "A1"}, {7, 26, "Z7"}, {7, 27, "AA7"}, {10, 52, "AZ10"}, {10, 53, "BA10"}, {99, 702, "ZZ99"}, {99, 703, "AAA99"}, {1048576, 16384, "XFD1048576"}} {
		if got := CellName(test.row, test.col); got != test.name {
			t.Errorf("row %d, column %d is %s, want %s", test.row, test.col, got, test.name)
		}
		if row, col, ok := ParseCell(test.name); row != test.row || col != test.col || !ok {
			t.Errorf("%s is row %d, column %d (%v)", test.name, row, col, ok)
		}
	}
	for col := 1; col <= maxColumns; col++ {
		if _, got, ok := ParseCell(CellName(1, col)); got != col || !ok {
			t.Fatalf("column %d is %s, which reads as %d", col, ColumnName(col), got)
		}
	}
	for _, name := range []string{"$C$7", "C$7", "$C7", "c7"} {
		if row, col, ok := ParseCell(name); row != 7 || col != 3 || !ok {
			t.Errorf("%s is row %d, column %d (%v)", name, row, col, ok)
		}
	}
	for _, name := range []string{"", "A", "7", "A0", "A01", "XFE1", "A1048577", "A12345678", "AAAA1", "A1B", "A 1", "$", "$$A1", "A$$1", "A1$", "A-1", "Ä1"} {
		if row, col, ok := ParseCell(name); ok {
			t.Errorf("%q is row %d, column %d", name, row, col)
		}
	}
}

func TestRanges(t *testing.T) {
	for text, want := range map[string]string{"A1": "A1", "A1:B2": "A1:B2", "$B$2:A1": "A1:B2", "A5:B2": "A2:B5", "C3:C3": "C3"} {
		if r, ok := ParseRange(text); !ok || r.String() != want {
			t.Errorf("%s is %s (%v), want %s", text, r, ok, want)
		}
	}
	for _, text := range []string{"", "A1:", ":A1", "A1:B2:C3", "A:B", "1:2", "A1 B2"} {
		if r, ok := ParseRange(text); ok {
			t.Errorf("%q is %s", text, r)
		}
	}
	r := Range{2, 2, 4, 3}
	for _, in := range [][2]int{{2, 2}, {4, 3}, {3, 2}} {
		if !r.Contains(in[0], in[1]) {
			t.Errorf("%s does not contain %v", r, in)
		}
	}
	for _, out := range [][2]int{{1, 2}, {5, 3}, {3, 1}, {3, 4}} {
		if r.Contains(out[0], out[1]) {
			t.Errorf("%s contains %v", r, out)
		}
	}
	if got := ColumnName(0); got != "" {
		t.Errorf("column 0 is %q", got)
	}
}
