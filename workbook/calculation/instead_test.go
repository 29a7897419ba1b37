package calculation

import (
	"context"
	"slices"
	"strings"
	"testing"

	"halfwidth/funcs"
)

// A misspelt name is found where it stands, with what may have been meant: put
// in its place, it makes the sheet right.
func TestWhatMayHaveBeenMeant(t *testing.T) {
	data := "depot,minutes\nNorth,12\nNorth,13\nQuay,15\nNorth,14\nNorth,12\nNorth,17\nNight shift,15\nand,16\n"
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
		{"work out,sample,> mean\nmean-interval,minutes in trips.csv where depot = Nrth,\n", "Nrth", "North"},
		{"work out,sample,> mean\nmean-interval,minutes in trips.csv where depot <> Qay,\n", "Qay", "Quay"},
		{"work out,sample,> mean\nmean-interval,minutes in trips.csv where depot is one of North; Night-shft,\n", "Night-shft", `"Night shift"`},
		{"work out,sample,> mean\nmean-interval,minutes in trips.csv where depot = ands,\n", "ands", `"and"`},
		{"work out,sample,> mean\nmean-interval,\"minutes in trips.csv where depot = \"\"Nrth\"\"\",\n", `"Nrth"`, `"North"`},
		{"work out,successes,n,> proportion\nproportion-interval,count in trips.csv where depot = Nrth,20,\n", "Nrth", "North"},
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

// A preview offers what a fill does.
func TestAPreviewOffersTheClosestValue(t *testing.T) {
	source := NewRows()
	frame := NewFrame()
	for row, cells := range [][]string{{"depot", "minutes"}, {"North", "12"}, {"Quay", "13"}} {
		for col, text := range cells {
			frame.Set(row+1, col+1, cellOf(t, text))
		}
	}
	source.AddFrame("Trips", frame)
	calc := NewFrame()
	for row, cells := range [][]string{{"work out", "sample", "> mean"}, {"mean-interval", "minutes in Trips where depot is one of Nrth; Quay"}} {
		for col, text := range cells {
			calc.Set(row+1, col+1, Cell{Kind: Text, Text: text})
		}
	}
	source.AddFrame("Calculations", calc)
	plan, err := NewPlan(context.Background(), source, Options{})
	if err == nil {
		err = plan.Count(context.Background(), 1)
	}
	if err != nil {
		t.Fatal(err)
	}
	list := plan.Rows[0].Findings()
	if len(list) != 1 || list[0].Message != `"Nrth" stands nowhere in the column "depot" (Trips!A2:A3). Did you mean "North"?` ||
		list[0].Span != (Span{39, 43}) || !slices.Equal(list[0].Instead, []string{"North"}) {
		t.Errorf("%+v", list)
	}
}

// A text written as a value is read as that text.
func TestAValueIsReadAsItsText(t *testing.T) {
	for _, text := range []string{"North", "Night shift", "and", "count", "12.5", "12%", "-3", "1e5", "2024-03-01", "2024-03-01 08:00", `the "old" one`, "'t Zand",
		"a;b", "a, b", "(x)", "=", "x=1", "yes", "row", "d'Or", "“Mill”", "Trips!A1", "A1", "loads.xlsx/Lods", "Zürich", "%"} {
		for _, written := range []string{ValueText(text), Literal{Kind: QuotedLiteral}.inPlace(text)} {
			e, err := ParseExpression("minutes in Trips where depot = " + written + " and minutes > 1")
			if err != nil {
				t.Errorf("%q, written %s: %v", text, written, err)
				continue
			}
			l := e.(*Query).Where[0].Literals[0]
			if l.Text != text || l.Kind != WordLiteral && l.Kind != QuotedLiteral {
				t.Errorf("%q, written %s, is read as %+v", text, written, l)
			}
		}
	}
}

// A column of very many texts is searched for the closest all the same.
func TestTheClosestOfVeryManyValues(t *testing.T) {
	frame := NewFrame()
	frame.Set(1, 1, Cell{Kind: Text, Text: "stop"})
	frame.Set(1, 2, Cell{Kind: Text, Text: "minutes"})
	for row := 2; row < mostValues; row++ {
		frame.Set(row, 1, Cell{Kind: Text, Text: "stop " + decimal(row)})
		frame.Set(row, 2, Cell{Kind: Number, Number: float64(row)})
	}
	source := NewRows()
	source.AddFrame("Trips", frame)
	f, _ := funcs.Lookup("mean-interval")
	_, err := Arguments(context.Background(), source, f, map[string]string{"sample": `minutes in Trips where stop is one of "sotp 4711"; "stopp 98765"`}, FileOptions{})
	if err == nil || !strings.Contains(err.Error(), `Did you mean "stop 4711"`) || !strings.Contains(err.Error(), `Did you mean "stop 98765"`) {
		t.Errorf("%v", err)
	}
}
