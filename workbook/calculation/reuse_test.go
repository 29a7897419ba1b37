package calculation

import (
	"context"
	"fmt"
	"math/rand/v2"
	"reflect"
	"runtime"
	"slices"
	"sync/atomic"
	"testing"
)

// liveBook is a book of two data sheets and a calculation sheet, as frames that
// change step by step.
type liveBook struct {
	names  []string
	frames map[string]*Frame
}

func (b *liveBook) source() Source {
	rows := NewRows()
	for _, name := range b.names {
		rows.AddFrame(name, b.frames[name])
	}
	return rows
}

func (b *liveBook) run(t *testing.T, before *Results) *Results {
	t.Helper()
	plan, err := NewPlan(context.Background(), b.source(), Options{})
	if err != nil {
		t.Fatal(err)
	}
	results, err := plan.RunAfter(context.Background(), 2, before)
	if err != nil {
		t.Fatal(err)
	}
	return results
}

func (b *liveBook) change(sheet, at string, value any) {
	ref, _ := ParseCell(at)
	b.frames[sheet] = b.frames[sheet].With([]Change{{ref, plainCell(value)}})
}

func plainCell(value any) Cell {
	switch v := value.(type) {
	case float64:
		return Cell{Kind: Number, Number: v}
	case string:
		return Cell{Kind: Text, Text: v}
	}
	return Cell{}
}

// newLiveBook has rows that read a column, a range, another sheet, another
// row's result, and the number in a cell of the calculation sheet.
func newLiveBook() *liveBook {
	b := &liveBook{names: []string{"Trips", "Damage", "Calculations"}, frames: map[string]*Frame{}}
	trips := NewFrame()
	for col, head := range []string{"depot", "minutes", "parcels"} {
		trips.Set(1, col+1, plainCell(head))
	}
	for row := 2; row <= 9001; row++ {
		trips.Set(row, 1, plainCell([]string{"North", "Quay", "Mill"}[row%3]))
		trips.Set(row, 2, plainCell(30+float64(row*7919%101)/10))
		trips.Set(row, 3, plainCell(float64(row%40)))
	}
	damage := NewFrame()
	damage.Set(1, 1, plainCell("found"))
	for row := 2; row <= 40; row++ {
		damage.Set(row, 1, plainCell(float64(row*row%17)))
	}
	calc := NewFrame()
	for i, line := range [][]any{
		{"work out", "sample", "reference", "> mean", "> status", "> note"},
		{"mean-interval", "minutes in Trips where depot = North", nil, nil, nil, nil},
		{"mean-interval", "Trips!B2:B61", nil, nil, nil, nil},
		{"mean-interval", "found in Damage", nil, nil, nil, nil},
		{"mean-interval", "parcels in Trips", "D2", nil, nil, nil},
		{"mean-interval", "found in Damage", "H1", nil, nil, nil},
		{"mean-interval", "mintes in Trips", nil, nil, nil, nil},
	} {
		for j, v := range line {
			calc.Set(i+1, j+1, plainCell(v))
		}
	}
	calc.Set(1, 8, plainCell(4.0))
	b.frames["Trips"], b.frames["Damage"], b.frames["Calculations"] = trips, damage, calc
	return b
}

func TestRowsThatReadNothingChangedKeepTheirOutcome(t *testing.T) {
	for _, test := range []struct {
		name, sheet, at string
		value           any
		anew            []int // the rows of the calculation sheet worked out again; row 7 always is, it has a fault
	}{
		{"a number of a column, past the range", "Trips", "B9000", 99.0, []int{2, 5, 7}}, // row 5 reads the mean of row 2
		{"a number of the range too, of Quay", "Trips", "B7", 99.0, []int{2, 3, 7}},      // so that the mean of North stays
		{"a column that one row reads", "Trips", "C70", 99.0, []int{5, 7}},
		{"a column that a condition reads", "Trips", "A9000", "Fell", []int{2, 5, 7}},
		{"a column that nobody reads", "Trips", "E70", 99.0, []int{7}},
		{"a text that starts like a total, beside the numbers", "Trips", "E70", "Total", []int{2, 5, 7}},
		{"another sheet", "Damage", "A9", 99.0, []int{4, 6, 7}},
		{"a cell of the calculation sheet", "Calculations", "H1", 5.0, []int{6, 7}},
		{"an expression", "Calculations", "B4", "found in Damage where found > 3", []int{4, 7}},
		{"a cell beside the blocks", "Calculations", "J9", "checked on Monday", []int{7}},
		{"the same value", "Trips", "B7", 30 + float64(7*7919%101)/10, []int{7}},
		{"the last row becomes longer", "Trips", "B9002", 31.0, []int{2, 5, 7}},
	} {
		t.Run(test.name, func(t *testing.T) {
			b := newLiveBook()
			before := b.run(t, nil)
			b.change(test.sheet, test.at, test.value)
			after := b.run(t, before)
			var anew []int
			for _, r := range after.Rows {
				if !r.Kept {
					anew = append(anew, r.Row.Number)
				}
			}
			if !slices.Equal(anew, test.anew) {
				t.Errorf("rows %v were worked out again, want %v", anew, test.anew)
			}
			sameResults(t, after, b.run(t, nil))
		})
	}
}

// TestKeptOutcomesAreThoseOfAWholeRun changes cells at random and compares each
// state with one that knows nothing of the states before.
func TestKeptOutcomesAreThoseOfAWholeRun(t *testing.T) {
	random := rand.New(rand.NewPCG(7, 1))
	b := newLiveBook()
	results := b.run(t, nil)
	kept := 0
	for range 60 {
		for range 1 + random.IntN(3) {
			sheet := b.names[random.IntN(3)]
			at := CellRef{1 + random.IntN(12), 1 + random.IntN(7)}
			if random.IntN(3) == 0 {
				at.Row = 1 + random.IntN(9100)
			}
			value := []any{nil, float64(random.IntN(50)), "North", "minutes", "found in Damage", "Trips!C2:C40", "Total", "D2", "mean-interval"}[random.IntN(9)]
			if sheet == "Calculations" && at.Row == 1 && at.Col <= 6 {
				continue
			}
			b.change(sheet, at.String(), value)
		}
		results = b.run(t, results)
		for _, r := range results.Rows {
			if r.Kept {
				kept++
			}
		}
		sameResults(t, results, b.run(t, nil))
		if t.Failed() {
			return
		}
	}
	if kept < 60 {
		t.Errorf("only %d outcomes were kept", kept)
	}
}

func sameResults(t *testing.T, got, want *Results) {
	t.Helper()
	text := func(r *Results) []string {
		var out []string
		for _, row := range r.Rows {
			out = append(out, fmt.Sprint(row.Row.Sheet(), " ", row.Row.Number, " ", row.Status, " ", row.Edits, " ", row.Findings))
		}
		return append(out, fmt.Sprint(r.Diagnostics))
	}
	if a, b := text(got), text(want); !reflect.DeepEqual(a, b) {
		for i := range a {
			if i >= len(b) || a[i] != b[i] {
				t.Fatalf("got  %s\nwant %s", a[i], b[min(i, len(b)-1)])
			}
		}
		t.Fatalf("%d rows, want %d", len(a), len(b))
	}
}

func TestProgressCountsEveryRow(t *testing.T) {
	b := newLiveBook()
	var told [7]atomic.Int64
	plan, err := NewPlan(context.Background(), b.source(), Options{Progress: func(done, total int) {
		if total != 6 {
			t.Errorf("%d rows in all, want 6", total)
		}
		told[done].Add(1)
	}})
	if err != nil {
		t.Fatal(err)
	}
	results, err := plan.Run(context.Background(), 3)
	if err != nil {
		t.Fatal(err)
	}
	if _, err := plan.RunAfter(context.Background(), 3, results); err != nil { // rows that are kept count too
		t.Fatal(err)
	}
	for done := 1; done <= 6; done++ {
		if n := told[done].Load(); n != 2 {
			t.Errorf("%d rows were told %d times, want once a run", done, n)
		}
	}
}

// Outcomes that are kept over many changes hold on to none of the sheets that
// they were worked out from.
func TestKeptOutcomesHoldNoEarlierSheet(t *testing.T) {
	const rows, changes = 500_000, 40
	trips, calc := NewFrame(), NewFrame()
	trips.Set(rows, 1, plainCell(1.0))
	for i, title := range []string{"work out", "p-values", "> note"} {
		calc.Set(1, i+1, plainCell(title))
	}
	for i := range changes {
		for row := 10*i + 1; row <= 10*i+3; row++ {
			trips.Set(row, 1, plainCell(0.25))
		}
		calc.Set(i+2, 1, plainCell("adjusted-p-values"))
		calc.Set(i+2, 2, plainCell(fmt.Sprintf("Trips!A%d:A%d", 10*i+1, 10*i+3)))
	}
	b := &liveBook{names: []string{"Trips", "Calculations"}, frames: map[string]*Frame{"Trips": trips, "Calculations": calc}}
	held := func() int64 {
		var m runtime.MemStats
		runtime.GC()
		runtime.ReadMemStats(&m)
		return int64(m.HeapAlloc)
	}
	results := b.run(t, nil)
	before := held()
	for i := range changes {
		b.change("Trips", CellRef{10*i + 1, 1}.String(), 0.5)
		results = b.run(t, results)
		for _, r := range results.Rows {
			if r.Status == "refused" || r.Kept == (r.Row.Number == i+2) {
				t.Fatalf("range %d changed: row %d is %s, kept: %v", i, r.Row.Number, r.Status, r.Kept)
			}
		}
	}
	// A frame of half a million rows has flags of half a megabyte, anew with each change.
	if grown := held() - before; grown > 5_000_000 {
		t.Errorf("%d changes left %d bytes", changes, grown)
	}
	runtime.KeepAlive(results)
}
