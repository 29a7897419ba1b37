package calculation

import (
	"context"
	"encoding/binary"
	"fmt"
	"math"
	"math/rand/v2"
	"testing"

	"halfwidth/funcs"
)

// choices makes a book out of bytes, each byte a decision, so that the fuzzer
// works on sheets and not on their spelling.
type choices struct{ data []byte }

func (c *choices) pick(n int) int {
	if len(c.data) == 0 {
		return 0
	}
	b := c.data[0]
	c.data = c.data[1:]
	return int(b) % n
}

func (c *choices) of(list ...string) string { return list[c.pick(len(list))] }

// cell makes a data cell.
func (c *choices) cell() Cell {
	switch c.pick(16) {
	case 0:
		return Cell{}
	case 1:
		return Cell{Kind: Text, Text: c.of("North", "Quay", "north ", "total", "12.5", "", "depot", "yes")}
	case 2:
		return Cell{Kind: Bool, Number: float64(c.pick(2))}
	case 3:
		return Cell{Kind: Error, Text: "#N/A"}
	case 4:
		return Cell{Kind: Date, Number: 45352 + float64(c.pick(8))/2}
	case 5:
		return Cell{Kind: Duration, Number: float64(c.pick(90)) / 1440}
	case 6:
		return Cell{Kind: Number, Number: float64(c.pick(40)), Formula: true}
	case 7:
		return Cell{Formula: true, Unsaved: true}
	case 8:
		return Cell{Covered: true}
	}
	return Cell{Kind: Number, Number: float64(c.pick(250)) / 4}
}

// condition, place and expression make texts that are mostly right.
func (c *choices) condition() string {
	column := c.of("depot", "minutes", "wait (minutes)", "day", "wait")
	switch c.pick(5) {
	case 0:
		return column + c.of(" is missing", " is present")
	case 1:
		return column + " is one of North; 3; 2024-03-02"
	case 2:
		return "row is visible"
	}
	return column + c.of(" = ", " <> ", " < ", " <= ", " > ", " >= ") + c.of("North", "'quay'", "12.5", "2024-03-02", "2024-03-02 12:00", "5%", "yes", "")
}

func (c *choices) expression() string {
	place := c.of("Trips", "Trips", "Trips", "Depots", "Week", "Block", "trips.csv", "Calculations", "header row 1 in Trips", "Tripz", "By depot")
	column := c.of("minutes", "minutes", "depot", "wait", "wait (hours)", "day", "minuts")
	text := column + " in " + place
	switch c.pick(14) {
	case 0:
		return c.of("12; 13; 14.5; 16", "1", "95%", "12,5", "North = 1; Quay = 2", "1; B3; 4", "12 13")
	case 1:
		return c.of("Trips!B2:B9", "Trips!C:C", "Trips!2:3", "Trips!B2", "Week!B2:C5", "B2:C9", "Nowhere!A1")
	case 2:
		return CellRef{1 + c.pick(14), 1 + c.pick(12)}.String()
	case 3:
		text = "count in " + place
	case 4:
		text = "sum of " + column + " in " + place
	case 5:
		text = "columns " + column + ", depot in " + place
	case 6:
		return c.of("either", "yes", "sideways", "", " ", "pooled", "infinite")
	}
	for n := c.pick(3); n > 0; n-- {
		text += c.of(" where ", " and ") + c.condition()
	}
	return text + c.of("", "", "", " for each depot", " matched by depot", " for each minutes")
}

// book makes a book with data and a calculation sheet.
func (c *choices) book() *Rows {
	src := NewRows()
	trips := NewFrame()
	for i, name := range []string{"depot", "minutes", "wait", "day"} {
		trips.Set(1+c.pick(2)/2, i+1, asText(name))
	}
	for row := 2; row < 4+c.pick(14); row++ {
		trips.SetRow(row, []RowFlags{0, 0, 0, RowHidden}[c.pick(4)])
		for col := 1; col <= 4; col++ {
			cell := c.cell()
			if col == 1 && c.pick(4) > 0 {
				cell = asText(c.of("North", "Quay", "Mill"))
			}
			if cell != (Cell{}) {
				trips.Set(row, col, cell)
			}
		}
	}
	src.AddFrame("Trips", trips)
	src.AddFrame("Depots", trips)
	src.AddPlace(Place{Kind: Table, Name: "Week", Sheet: "Trips", FirstRow: 1, LastRow: 3 + c.pick(9), FirstCol: 1, LastCol: 3, HeaderRows: c.pick(2), TotalsRows: c.pick(2)})
	src.AddPlace(Place{Kind: DefinedName, Name: "Block", Sheet: "Trips", FirstRow: 1 + c.pick(3), LastRow: 4 + c.pick(200), FirstCol: 1, LastCol: 4})
	file := NewRows()
	file.AddFrame("trips.csv", trips)
	src.AddFile("trips.csv", file)
	src.AddFrame("Calculations", c.calculations())
	if c.pick(3) == 0 {
		src.AddPlace(Place{Kind: Table, Name: "Own", Sheet: "Calculations", FirstRow: 3, LastRow: 7, FirstCol: 1, LastCol: 12, HeaderRows: 1, TotalsRows: 1})
	}
	src.SetRecalculatesLate(c.pick(2) == 1)
	return src
}

func (c *choices) calculations() *Frame {
	f := NewFrame()
	row := 1
	if c.pick(2) == 0 {
		f.Set(1, 1, asText("default "+c.of("confidence", "direction", "variances", "mean", "decimal-mark", "x")))
		f.Set(1, 2, asText(c.of("90%", "95", "either", "pooled", ",", "A1", "B1")))
		row += 1 + c.pick(2)
	}
	for block := 0; block <= c.pick(3); block++ {
		col := 1 + c.pick(3)
		work := asText(c.of("work out", "work out", "work out: mean-interval", "work out: analysis-of-variance", "Work  Out (function)", "work out: nothing", "work out:"))
		f.Set(row, col, work)
		columns := 2 + c.pick(9)
		for i := 1; i <= columns; i++ {
			f.Set(row, col+i, asText(c.of("sample", "second-sample", "samples", "mean", "sd", "n", "confidence", "direction", "reference", "table sheet", "label",
				"> mean", "> lower", "> difference", "> f", "> used", "> skipped", "> status", "> note", "> range", "> sentence (minutes)", "own", "confidense", "> nothing", "sizes", ">")))
		}
		for n := 1 + c.pick(5); n > 0; n-- {
			row++
			f.Set(row, col, asText(c.of("mean-interval", "paired-interval", "difference-interval", "analysis-of-variance", "pairwise-differences", "stratified-interval",
				"ratio-of-sums-interval", "mean-intervl", "", "sample-summary")))
			for i := 1; i <= columns; i++ {
				cell := asText(c.expression())
				switch c.pick(6) {
				case 0:
					cell = c.cell()
				case 1, 2:
					continue
				}
				if head := f.At(row-1, col+i); head.Kind == Text && head.Text != "" && c.pick(3) == 0 {
					cell = asText(c.of("By depot", "Trips", "mean-interval", "work out"))
				}
				if cell != (Cell{}) {
					f.Set(row, col+i, cell)
				}
			}
		}
		row += 1 + c.pick(3)
	}
	return f
}

// checkBook plans, counts and runs a book and holds the results to what is
// promised of all of them.
func checkBook(t *testing.T, data []byte) {
	ctx := context.Background()
	src := (&choices{data}).book()
	plan, err := NewPlan(ctx, src, Options{})
	if err != nil {
		t.Fatal(err)
	}
	results, err := plan.Run(ctx, 1)
	if err != nil {
		t.Fatal(err)
	}
	again, err := plan.Run(ctx, 3)
	if err != nil {
		t.Fatal(err)
	}
	calc := src.sheets[2].frame
	written := map[CellRef]bool{}
	for i, r := range results.Rows {
		if got, want := fmt.Sprint(again.Rows[i].Edits), fmt.Sprint(r.Edits); got != want {
			t.Fatalf("three workers give %s, one %s", got, want)
		}
		if r.Status == funcs.StatusRefused && r.Note() == "" {
			t.Fatalf("row %d is refused without a reason", r.Row.Number)
		}
		for _, e := range r.Edits {
			if written[e.Cell] {
				t.Fatalf("%s is written twice", e.Cell)
			}
			written[e.Cell] = true
			if cell := calc.At(e.Cell.Row, e.Cell.Col); cell.Formula || cell.Covered {
				t.Fatalf("%s is overwritten: %+v", e.Cell, cell)
			}
			switch v := e.Value.(type) {
			case nil, bool, int:
			case float64:
				if math.IsNaN(v) || math.IsInf(v, 0) {
					t.Fatalf("%s = %v", e.Cell, v)
				}
			case string:
				if v == "" {
					t.Fatalf("%s is an empty text", e.Cell)
				}
			default:
				t.Fatalf("%s is a %T", e.Cell, v)
			}
		}
		for _, d := range r.Findings {
			if text := calc.At(d.Cell.Row, d.Cell.Col).Text; d.Span.Start > d.Span.End || d.Span.End > len(text) {
				t.Fatalf("%s: a finding at %v of %q: %s", d.Cell, d.Span, text, d.Message)
			}
		}
	}
	if err := plan.Count(ctx, 2); err != nil {
		t.Fatal(err)
	}
}

func FuzzBook(f *testing.F) {
	random := rand.New(rand.NewPCG(1, 2))
	for range 40 {
		f.Add(randomBytes(random))
	}
	f.Fuzz(checkBook)
}

func randomBytes(r *rand.Rand) []byte {
	data := make([]byte, 400)
	for i := 0; i < len(data); i += 8 {
		binary.LittleEndian.PutUint64(data[i:], r.Uint64())
	}
	return data
}

func TestRandomBooksKeepTheirPromises(t *testing.T) {
	random := rand.New(rand.NewPCG(3, 4))
	for range 300 {
		checkBook(t, randomBytes(random))
	}
}
