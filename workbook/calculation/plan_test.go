package calculation

import (
	"context"
	"errors"
	"fmt"
	"reflect"
	"strings"
	"testing"

	"halfwidth/funcs"
)

// counted is a source that counts how often each sheet is read, and can fail.
type counted struct {
	*Rows
	reads map[string]int
	fail  string
}

func (c *counted) Read(ctx context.Context, sheet string, choose func(*Frame) Columns) (*Frame, error) {
	if sheet == c.fail {
		return nil, errors.New("cell C7 is damaged")
	}
	return c.Rows.Read(ctx, sheet, func(head *Frame) Columns {
		columns := choose(head)
		if !columns.None() {
			c.reads[sheet]++
		}
		return columns
	})
}

func calculationRows(samples ...string) [][]Cell {
	rows := [][]Cell{{asText("work out"), asText("label"), asText("sample"), asText("> mean"), asText("> note")}}
	for i, s := range samples {
		rows = append(rows, []Cell{asText("mean-interval"), asText(fmt.Sprint("row ", i)), asText(s)})
	}
	return rows
}

func TestCalculationSheetsAreFoundByNameMarkAndWish(t *testing.T) {
	src := smallBook()
	src.AddSheet("calculations", calculationRows("1; 2; 3"))
	src.AddSheet("Calculations of May", calculationRows("1; 2; 3"))
	src.AddSheet("Calculationsheet", calculationRows("1; 2; 3"))
	marked := append([][]Cell{{asText("Calculation  Sheet")}, {}}, calculationRows("1; 2; 3")...)
	src.AddSheet("Other", marked)
	src.AddSheet("Wished", calculationRows("1; 2; 3"))
	for _, c := range []struct {
		options Options
		want    []string
	}{
		{Options{}, []string{"calculations", "Calculations of May", "Other"}},
		{Options{Sheets: []string{"WISHED"}}, []string{"calculations", "Calculations of May", "Other", "Wished"}},
		{Options{Sheets: []string{"Wished"}, Only: true}, []string{"Wished"}},
	} {
		plan, err := NewPlan(context.Background(), src, c.options)
		if err != nil || !reflect.DeepEqual(plan.Sheets, c.want) {
			t.Errorf("%+v: got %v %v, want %v", c.options, plan.Sheets, err, c.want)
		}
	}
	_, err := NewPlan(context.Background(), src, Options{Sheets: []string{"Wishd"}})
	var unknown *funcs.UnknownError
	if !errors.As(err, &unknown) || len(unknown.Closest) == 0 || unknown.Closest[0] != "Wished" {
		t.Errorf("an unknown sheet gives %v", err)
	}
	_, err = NewPlan(context.Background(), src, Options{Sheets: []string{"Nothing like them"}})
	if !errors.As(err, &unknown) || !strings.Contains(err.Error(), "; its sheets are ") {
		t.Errorf("a sheet unlike all others gives %v", err)
	}
}

func TestEachSheetIsReadOnceForAllCalculations(t *testing.T) {
	src := &counted{Rows: smallBook(), reads: map[string]int{}}
	src.AddSheet("Calculations", calculationRows("before in Trips", "after in Trips where depot = Quay", "Trips!B2:B5", "before in Trips where after > 1"))
	src.AddSheet("Calculations 2", calculationRows("before in Trips", "wait (minutes) in Trips"))
	plan, err := NewPlan(context.Background(), src, Options{})
	if err != nil {
		t.Fatal(err)
	}
	if _, err := plan.Run(context.Background(), 2); err != nil {
		t.Fatal(err)
	}
	if want := map[string]int{"Trips": 1, "Calculations": 1, "Calculations 2": 1}; !reflect.DeepEqual(src.reads, want) {
		t.Errorf("reads are %v, want %v", src.reads, want)
	}
}

func TestResultsOfAnotherCalculationSheetAreReadWhenWorkedOut(t *testing.T) {
	src := NewRows()
	src.AddSheet("Calculations", [][]Cell{
		{asText("work out: mean-interval"), asText("mean"), asText("sd"), asText("n"), asText("> upper")},
		{asText("a"), asText("'Calculations 2'!E2"), asText("1"), asText("4")},
	})
	src.AddSheet("Calculations 2", [][]Cell{
		{asText("work out: mean-interval"), asText("mean"), asText("sd"), asText("n"), asText("> mean")},
		{asText("b"), asText("40"), asText("1"), asText("4"), {Kind: Number, Number: 7}}, // 7 is an older result
	})
	plan, err := NewPlan(context.Background(), src, Options{})
	if err != nil {
		t.Fatal(err)
	}
	results, err := plan.Run(context.Background(), 2)
	if err != nil {
		t.Fatal(err)
	}
	// 40 + t(0.975; 3)/2, t = 3.182446 (ISO 2602, table 1).
	if x, ok := results.Rows[0].Edits[0].Value.(float64); !ok || x < 41.5912 || x > 41.5913 {
		t.Errorf("the upper limit is %v, want 41.59122 (%s)", results.Rows[0].Edits[0].Value, results.Rows[0].Note())
	}
}

func TestDamagedSheetsRefuseTheirRowsAndAreReported(t *testing.T) {
	src := &counted{Rows: smallBook(), reads: map[string]int{}, fail: "Trips"}
	src.AddSheet("Calculations", calculationRows("before in Trips", "1; 2; 4"))
	_, err := NewPlan(context.Background(), src, Options{})
	if err == nil || !strings.Contains(err.Error(), "Trips cannot be read: cell C7 is damaged") {
		t.Errorf("a sheet whose head cannot be read gives %v", err)
	}
	plan, err := NewPlan(context.Background(), src, Options{Sheets: []string{"Calculations"}, Only: true})
	if err != nil {
		t.Fatal(err)
	}
	if err := plan.Unreadable(); err == nil || !strings.Contains(err.Error(), "cell C7") {
		t.Errorf("the damage is reported as %v", err)
	}
	results, err := plan.Run(context.Background(), 1)
	if err != nil {
		t.Fatal(err)
	}
	if got := results.Rows[0]; got.Status != funcs.StatusRefused || !strings.Contains(got.Note(), "Trips cannot be read: cell C7 is damaged.") {
		t.Errorf("row 2 is %s: %s", got.Status, got.Note())
	}
	if got := results.Rows[1]; got.Status == funcs.StatusRefused {
		t.Errorf("row 3 is %s: %s", got.Status, got.Note())
	}
}

func TestPreviewCountsWithoutComputing(t *testing.T) {
	src := smallBook()
	src.AddSheet("Calculations", calculationRows("before in Trips where depot = North", "after in Trips", "wait in Trips", "1; 2"))
	plan, err := NewPlan(context.Background(), src, Options{})
	if err != nil {
		t.Fatal(err)
	}
	if err := plan.Count(context.Background(), 2); err != nil {
		t.Fatal(err)
	}
	type seen struct {
		label, rng    string
		used, skipped int
		findings      int
	}
	var got []seen
	for _, r := range plan.Rows {
		in := r.Inputs[0]
		got = append(got, seen{r.Label, in.Range, in.Used, in.Skipped, len(r.Findings())})
	}
	want := []seen{
		{"row 0", "Trips!B2:B6 where depot (A2:A6) = North", 3, 0, 0},
		{"row 1", "Trips!C2:C6", 3, 1, 1},
		{"row 2", "Trips!D2:D6", 0, 0, 1},
		{"row 3", "", 2, 0, 0},
	}
	if !reflect.DeepEqual(got, want) {
		t.Errorf("got %+v\nwant %+v", got, want)
	}
}

func TestCancelledRunGivesTheContextsError(t *testing.T) {
	src := bigBook(100_000, 30)
	plan, err := NewPlan(context.Background(), src, Options{})
	if err != nil {
		t.Fatal(err)
	}
	ctx, cancel := context.WithCancel(context.Background())
	cancel()
	if _, err := plan.Run(ctx, 2); !errors.Is(err, context.Canceled) {
		t.Errorf("got %v, want context.Canceled", err)
	}
	if err := plan.Count(ctx, 2); !errors.Is(err, context.Canceled) {
		t.Errorf("got %v, want context.Canceled", err)
	}
	if _, err := NewPlan(ctx, src, Options{}); !errors.Is(err, context.Canceled) {
		t.Errorf("got %v, want context.Canceled", err)
	}
	if _, err := plan.Run(context.Background(), 2); err != nil {
		t.Errorf("after a cancelled run: %v", err)
	}
}

// The index only makes conditions quicker: sheets below and above its size
// give the same samples.
func TestIndexedConditionsFindTheSameRows(t *testing.T) {
	frame := bigFrame(indexFrom + 5000)
	frame.Set(300, 1, Cell{Kind: Error, Text: "#N/A"})
	frame.Set(4000, 1, Cell{Kind: Number, Number: 5})
	src := NewRows()
	src.AddFrame("Trips", frame)
	f := lookup(t, "mean-interval")
	read := func(where string) (values []float64, origin *funcs.Origin) {
		args, err := Arguments(context.Background(), src, f, map[string]string{"sample": "minutes in Trips where " + where}, FileOptions{})
		if err != nil {
			t.Fatal(err)
		}
		from := args["sample"].(funcs.From)
		return from.Value.([]float64), from.Origin
	}
	for _, c := range [][2]string{
		{"depot = 'depot 7'", "depot >= 'depot 7' and depot <= 'depot 7'"},
		{"depot = 'DEPOT 7' and minutes > 1000", "minutes > 1000 and depot >= 'depot 7' and depot <= 'depot 7'"},
	} {
		indexed, one := read(c[0])
		plain, two := read(c[1])
		if len(indexed) < 100 || !reflect.DeepEqual(indexed, plain) {
			t.Errorf("%s: %d values, %s: %d", c[0], len(indexed), c[1], len(plain))
		}
		if one.Skipped != two.Skipped || one.Skipped < 1 {
			t.Errorf("%s: %d skipped, %s: %d", c[0], one.Skipped, c[1], two.Skipped)
		}
	}
}

func TestBlockColumnAndRowOfACell(t *testing.T) {
	src := smallBook()
	src.AddSheet("Calculations", append([][]Cell{{asText("a remark")}, {}}, calculationRows("1; 2; 3")...))
	plan, err := NewPlan(context.Background(), src, Options{})
	if err != nil {
		t.Fatal(err)
	}
	b, column, row, ok := plan.BlockAt("Calculations", CellRef{4, 3})
	if !ok || b.Header != 3 || column.Role != InputColumn || column.Name != "sample" || row.Label != "row 0" {
		t.Errorf("C4: %+v %+v %+v %v", b, column, row, ok)
	}
	if _, column, row, ok := plan.BlockAt("Calculations", CellRef{3, 4}); !ok || column.Role != ResultColumn || row != nil {
		t.Errorf("D3: %+v %+v %v", column, row, ok)
	}
	if _, _, _, ok := plan.BlockAt("Calculations", CellRef{1, 1}); ok {
		t.Error("A1 lies in a block")
	}
	names, err := HeaderNames(context.Background(), src, "Trips")
	if err != nil || !reflect.DeepEqual(names, []string{"depot", "before", "after", "wait"}) {
		t.Errorf("the columns of Trips are %v, %v", names, err)
	}
}

// A cell far out must not make a sheet slow: only what is held is gone through.
func TestFarCellsDoNotSlowACalculationSheet(t *testing.T) {
	f := NewFrame()
	for i, row := range calculationRows("1; 2; 3", "4; 5; 6") {
		for j, cell := range row {
			f.Set(i+1, j+1, cell)
		}
	}
	f.Set(MaxRow, MaxCol, asText("far"))
	src := NewRows()
	src.AddFrame("Calculations", f)
	plan, err := NewPlan(context.Background(), src, Options{})
	if err != nil || len(plan.Rows) != 2 {
		t.Fatalf("%d rows, %v", len(plan.Rows), err)
	}
}

func TestSamplesAreKeptOnlyWhereAsked(t *testing.T) {
	src := smallBook()
	src.AddSheet("Calculations", calculationRows("before in Trips", "1; 2; 4"))
	for _, keep := range []bool{false, true} {
		plan, err := NewPlan(context.Background(), src, Options{KeepValues: keep})
		if err != nil {
			t.Fatal(err)
		}
		results, err := plan.Run(context.Background(), 1)
		if err != nil {
			t.Fatal(err)
		}
		arguments := results.Rows[0].Outcome.Arguments
		if _, ok := arguments["sample"]; ok != keep {
			t.Errorf("keep %v: the arguments are %v", keep, arguments)
		}
		if arguments["confidence"].Value != 0.95 {
			t.Errorf("keep %v: the confidence is %v", keep, arguments["confidence"].Value)
		}
		if got, _ := results.Rows[1].Outcome.Arguments["sample"].Value.([]float64); len(got) != 3 {
			t.Errorf("keep %v: numbers written out are %v", keep, got)
		}
	}
}
