package calculation

import (
	"context"
	"testing"
)

// A misspelt name is found where it stands, with what may have been meant: put
// in its place, it makes the sheet right.
func TestWhatMayHaveBeenMeant(t *testing.T) {
	data := "depot,minutes\nNorth,12\nNorth,13\nQuay,15\nNorth,14\nNorth,12\nNorth,17\n"
	for _, c := range []struct{ sheet, found, instead string }{
		{"work out,sample,> mean\nmean-intervall,12; 13,\n", "mean-intervall", "mean-interval"},
		{"work out: mean-intervall,sample,> mean\nx,12; 13,\n", "mean-intervall", "mean-interval"},
		{"work out,sample,> meen (minutes)\nmean-interval,12; 13,\n", "meen", "mean"},
		{"work out,sample,confidense (share),> mean\nmean-interval,12; 13,95%,\n", "confidense", "confidence"},
		{"work out,sample,lower,> mean\nmean-interval,12; 13,,\n", "lower", "> lower"},
		{"default confidense,95%\n\nwork out,sample,> mean\nmean-interval,12; 13,\n", "confidense", "confidence"},
		{"work out,sample,> mean\nmean-interval, minuets in trips.csv,\n", "minuets", "minutes"},
		{"work out,sample,> mean\nmean-interval,minutes in trips.csv where depott = North,\n", "depott", "depot"},
		{"work out,sample,> mean\nmean-interval,minutes on trips.csv,\n", "on", "in"},
		{"work out,sample,> mean\nmean-interval,minutes in Calculation,\n", "Calculation", "Calculations"},
		{"work out,sample,confidence,> mean\nmean-interval,12; 13,95,\n", "95", "95%"},
		{"default confidence,90\nwork out,sample,> mean\nmean-interval,12; 13,\n", "90", "90%"},
		{"work out,sample,direction,> mean\nmean-interval,12; 13,abov,\n", "abov", "above"},
	} {
		sheet, err := ParseTextSheet("x.calculations.csv", []byte(c.sheet))
		if err != nil {
			t.Fatal(err)
		}
		_, results := fillText(t, "x.calculations.csv", c.sheet, data)
		found := false
		check := func(d Diagnostic, instead []string) {
			if len(instead) == 0 {
				return
			}
			text := sheet.CellText(d.Cell)
			stretch := text
			if d.Span != (Span{}) {
				stretch = text[d.Span.Start:d.Span.End]
			}
			found = found || stretch == c.found && instead[0] == c.instead
		}
		for _, d := range results.Diagnostics {
			check(d, d.Instead)
		}
		for _, r := range results.Rows {
			for _, d := range r.Findings {
				check(d, r.Instead(d, sheet.CellText(d.Cell)))
			}
		}
		if !found {
			t.Errorf("%q: %q is not offered for %q: %+v", c.sheet, c.instead, c.found, results.Diagnostics)
		}
	}
}

// A name that stands in another cell than the input's own is not offered there.
func TestNothingIsOfferedForANameWrittenElsewhere(t *testing.T) {
	sheet, err := ParseTextSheet("x.calculations.csv", []byte("work out,sample,> mean,x\nmean-interval,D2,,minuets in Calculations\n"))
	if err != nil {
		t.Fatal(err)
	}
	plan, err := NewPlan(context.Background(), sheet.Source(nil), Options{})
	if err != nil {
		t.Fatal(err)
	}
	list := plan.Rows[0].Findings()
	if len(list) == 0 {
		t.Fatal("nothing is found")
	}
	for _, d := range list {
		if d.Span != (Span{}) || d.Instead != nil {
			t.Errorf("%+v", d)
		}
	}
}
