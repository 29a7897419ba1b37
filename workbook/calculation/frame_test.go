package calculation

import (
	"context"
	"fmt"
	"maps"
	"math"
	"math/rand/v2"
	"runtime"
	"testing"
)

// bigFrame is a sheet of a million rows with a text and a number kept.
func bigFrame(rows int) *Frame {
	f := NewFrame()
	f.Set(1, 1, Cell{Kind: Text, Text: "depot"})
	f.Set(1, 2, Cell{Kind: Text, Text: "minutes"})
	f.Keep(Columns{List: []int{1, 2}})
	depots, minutes := f.Column(1), f.Column(2)
	var ids [40]uint32
	for i := range ids {
		ids[i] = f.Intern(fmt.Sprintf("depot %d", i))
	}
	for row := 2; row <= rows; row++ {
		f.SetRow(row, RowFilled)
		depots.SetText(row, Text, ids[row*7%len(ids)])
		minutes.SetNumber(row, Number, float64(row*2654435761%1000003)/7)
	}
	return f
}

func TestAMillionRowsOfTwoColumnsTakeAbout15Megabytes(t *testing.T) {
	var before, after runtime.MemStats
	runtime.GC()
	runtime.ReadMemStats(&before)
	f := bigFrame(1_000_000)
	runtime.GC()
	runtime.ReadMemStats(&after)
	used := int64(after.HeapAlloc) - int64(before.HeapAlloc)
	// 1 byte a row, 9 a number, 5 a text: 15 bytes, and room to grow.
	if used > 18_000_000 {
		t.Errorf("the frame takes %d bytes, want at most 18 million", used)
	}
	if f.LastRow() != 1_000_000 || f.At(1_000_000, 1).Kind != Text {
		t.Errorf("the last row is %d, %v", f.LastRow(), f.At(1_000_000, 1))
	}
}

func TestFrameGivesBackWhatWasSetInAnyOrder(t *testing.T) {
	f := NewFrame()
	cells := map[CellRef]Cell{}
	for i := range 40_000 {
		row, col := 1+i*7919%40_009, 1+i%3
		cell := [...]Cell{
			{Kind: Number, Number: float64(i) / 3},
			{Kind: Text, Text: fmt.Sprint("text ", i%50)},
			{Kind: Bool, Number: float64(i % 2), Formula: true},
			{Kind: Date, Number: float64(i)},
			{Kind: Duration, Number: 0.25, Formula: true},
			{Kind: Error, Text: "#N/A"},
			{Formula: true, Unsaved: true},
			{Covered: true},
		}[i%8]
		f.Set(row, col, cell)
		cells[CellRef{row, col}] = cell
	}
	for at, want := range cells {
		if got := f.At(at.Row, at.Col); got != want {
			t.Fatalf("%s: got %+v, want %+v", at, got, want)
		}
	}
	if got := f.At(3, 9); got != (Cell{}) {
		t.Errorf("a cell never set is %+v", got)
	}
	f.Keep(Columns{List: []int{2}})
	if got := f.At(1, 1); got != (Cell{}) || f.Column(1) != nil {
		t.Errorf("a column that is not kept gives %+v", got)
	}
}

func TestCoveredCellLosesItsGhostValue(t *testing.T) {
	f := NewFrame()
	f.Set(2, 1, Cell{Kind: Number, Number: 5})
	f.Column(1).Cover(2)
	if got := f.At(2, 1); got != (Cell{Covered: true}) {
		t.Errorf("got %+v, want a covered blank", got)
	}
}

func TestWordsThatStartATotalsRow(t *testing.T) {
	for text, want := range map[string]bool{
		"Total": true, "total:": true, " TOTALS 2024": true, "Subtotal North": true, "sub-total": true, "Sum": true, "average": true, "Averages": true,
		"summer": false, "Totally": false, "grand total": false, "": false, "summary": false, "averaged": false, "sum2": true,
	} {
		if got := StartsLikeTotal(text); got != want {
			t.Errorf("%q: got %v, want %v", text, got, want)
		}
	}
}

// bigBook is the big sheet with calculations, each over another depot.
func bigBook(rows, calculations int) *Rows {
	src := NewRows()
	src.AddFrame("Trips", bigFrame(rows))
	sheet := [][]Cell{{asText("work out"), asText("sample"), asText("checks"), asText("> mean"), asText("> note")}}
	for i := range calculations {
		sheet = append(sheet, []Cell{asText("mean-interval"), asText(fmt.Sprintf("minutes in Trips where depot = 'depot %d' and minutes > %d", i%40, i)), asText("no")})
	}
	src.AddSheet("Calculations", sheet)
	return src
}

func TestWorkersNeverChangeTheAnswer(t *testing.T) {
	src := bigBook(20_000, 60)
	var first []Edit
	for _, workers := range []int{1, 2, 7} {
		plan, err := NewPlan(context.Background(), src, Options{})
		if err != nil {
			t.Fatal(err)
		}
		results, err := plan.Run(context.Background(), workers)
		if err != nil {
			t.Fatal(err)
		}
		var edits []Edit
		for _, r := range results.Rows {
			edits = append(edits, r.Edits...)
		}
		if first == nil {
			first = edits
		}
		for i := range edits {
			if edits[i] != first[i] {
				t.Fatalf("%d workers: %v, one worker: %v", workers, edits[i], first[i])
			}
		}
		if x, ok := edits[0].Value.(float64); !ok || math.IsNaN(x) {
			t.Fatalf("the first mean is %v", edits[0].Value)
		}
	}
}

func BenchmarkTwoHundredSamplesOfAMillionRows(b *testing.B) {
	src := bigBook(1_000_000, 200)
	for b.Loop() {
		plan, err := NewPlan(context.Background(), src, Options{})
		if err != nil {
			b.Fatal(err)
		}
		if _, err := plan.Run(context.Background(), 1); err != nil {
			b.Fatal(err)
		}
	}
}

func TestChangedFrameEqualsOneBuiltAnew(t *testing.T) {
	random := rand.New(rand.NewPCG(5, 6))
	cells := map[CellRef]Cell{}
	frame := NewFrame()
	cell := func() Cell {
		return [...]Cell{{}, {Kind: Number, Number: random.Float64()}, {Kind: Text, Text: fmt.Sprint("text ", random.IntN(3000))}, {Kind: Text, Text: "Total"},
			{Kind: Bool, Number: 1}, {Formula: true, Unsaved: true}}[random.IntN(6)]
	}
	for range 300 {
		before, wasLast := maps.Clone(cells), frame.LastRow()
		var changes []Change
		for range 1 + random.IntN(40) {
			at := CellRef{1 + random.IntN(9000), 1 + random.IntN(4)}
			changes = append(changes, Change{at, cell()})
			cells[at] = changes[len(changes)-1].Value
		}
		old := frame
		frame = frame.With(changes)
		if old.LastRow() != wasLast {
			t.Fatal("the frame that was changed from has changed")
		}
		for at, want := range before {
			if got := old.At(at.Row, at.Col); got != want {
				t.Fatalf("%s of the frame that was changed from: %+v, want %+v", at, got, want)
			}
		}
	}
	anew := NewFrame()
	for at, c := range cells {
		anew.Set(at.Row, at.Col, c)
	}
	for row := 1; row <= 9000; row++ {
		if frame.Row(row) != anew.Row(row) {
			t.Fatalf("row %d: %v, want %v", row, frame.Row(row), anew.Row(row))
		}
		for col := 1; col <= 4; col++ {
			if got, want := frame.At(row, col), anew.At(row, col); got != want {
				t.Fatalf("row %d, column %d: %+v, want %+v", row, col, got, want)
			}
		}
	}
	if frame.LastRow() != anew.LastRow() {
		t.Errorf("the last row is %d, want %d", frame.LastRow(), anew.LastRow())
	}
	if len(frame.texts) > 2*3000+1024+100 {
		t.Errorf("%d texts are kept of 3001", len(frame.texts))
	}
}

func TestHeldCountsTheRoomOfFarCells(t *testing.T) {
	f := NewFrame()
	for row := 1; row <= 10_000; row++ {
		f.Set(row, 1, Cell{Kind: Number, Number: 1})
	}
	// Three chunks of 4096, the last full since those before it are, and 8 for each.
	if got := f.Held(); got != 3*4096+3*8 {
		t.Errorf("a column of 10000 numbers holds %d", got)
	}
	random := rand.New(rand.NewPCG(3, 3))
	for range 200 {
		var changes []Change
		for range random.IntN(5) {
			at := CellRef{1 + random.IntN(MaxRow), 1 + random.IntN(40)}
			changes = append(changes, Change{at, Cell{Kind: Number, Number: 2}}, Change{CellRef{at.Row, 1}, Cell{}})
		}
		most := f.HeldWith(changes)
		if f = f.With(changes); f.Held() > most {
			t.Fatalf("%d cells are held after %v, more than the %d foretold", f.Held(), changes, most)
		}
	}
}
