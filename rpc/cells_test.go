package rpc

import (
	"fmt"
	"math/rand/v2"
	"strings"
	"testing"

	"halfwidth/workbook/calculation"
)

func TestDatesAreDaysAsSheetsCount(t *testing.T) {
	for text, want := range map[string]float64{
		// ECMA-376 part 1, 18.17.4.1: serial 1 of the 1900 system with the day before it as 0 is 1899-12-31
		// only below 60; from 1900-03-01 (61) on the count runs from 1899-12-30.
		"1900-03-01": 61, "2000-01-01": 36526, "2026-03-02": 46083, "2026-03-02T12:00:00": 46083.5, "2026-03-02T06:00": 46083.25,
	} {
		if got, ok := dayNumber(text); !ok || got != want {
			t.Errorf("%s is day %v, want %v", text, got, want)
		}
	}
	for _, text := range []string{"", "2026-3-2", "2.3.2026", "2026-02-30", "2026-03-02 12:00"} {
		if got, ok := dayNumber(text); ok {
			t.Errorf("%q was read as day %v", text, got)
		}
	}
}

// TestOpeningAndChangingGiveTheSameSheet reads random blocks once as a new
// sheet and once as changes of an empty one.
func TestOpeningAndChangingGiveTheSameSheet(t *testing.T) {
	random := rand.New(rand.NewPCG(5, 5))
	forms := []string{`12.5`, `-3`, `"North"`, `"Total"`, `"a\"b\u00e9"`, `true`, `false`, `{"date":"2026-03-02"}`, `{"date":1.5}`, `{"duration":0.25}`,
		`{"error":"#N/A"}`, `{"formula":3}`, `{"formula":null}`, `{"formula":{"date":2}}`, `null`, `""`}
	form := func() string { return forms[random.IntN(len(forms))] }
	for range 200 {
		var blocks []string
		row := 1
		for range 1 + random.IntN(4) {
			var cells []string
			for range random.IntN(6) {
				cells = append(cells, form())
			}
			list := "[" + strings.Join(cells, " , ") + "]"
			if random.IntN(2) == 0 {
				blocks = append(blocks, fmt.Sprintf(`{ "column": %s, "at":"B%d" }`, list, row))
			} else {
				blocks = append(blocks, fmt.Sprintf(`{"at":"B%d","rows":[%s,[],%s]}`, row, list, list))
			}
			row += 7
		}
		text := []byte("[" + strings.Join(blocks, ",\n") + "]")
		fresh := newSheetCells(1<<30, 1<<30)
		if err := readCells(text, fresh); err != nil {
			t.Fatalf("%s: %v", text, err)
		}
		changed := &changedCells{frame: calculation.NewFrame(), steps: 1000}
		if err := readCells(text, changed); err != nil {
			t.Fatalf("%s: %v", text, err)
		}
		other := changed.frame.With(changed.changes)
		for row := 1; row <= 40; row++ {
			if fresh.frame.Row(row) != other.Row(row) {
				t.Fatalf("%s: row %d has the flags %v as new, %v as changed", text, row, fresh.frame.Row(row), other.Row(row))
			}
			for col := 1; col <= 9; col++ {
				if a, b := fresh.frame.At(row, col), other.At(row, col); a != b {
					t.Fatalf("%s: %v is %+v as new, %+v as changed", text, calculation.CellRef{Row: row, Col: col}, a, b)
				}
			}
		}
	}
}

func TestClearingEmptiesWhatStandsAndWhatCameBefore(t *testing.T) {
	frame := calculation.NewFrame()
	for row := 1; row <= 5; row++ {
		frame.Set(row, 1, calculation.Cell{Kind: calculation.Number, Number: 1})
		frame.Set(row, 2, calculation.Cell{Kind: calculation.Number, Number: 2})
	}
	for clear, want := range map[string]string{
		"A2:A3": "1...1 22222", "A:A": "..... 22222", "4:5": "1118. 222..", "B1:ZZ1048576": "11181 ....."} {
		sink := &changedCells{frame: frame, steps: 1000}
		text := `[{"at":"A4","rows":[[8]]},{"clear":"` + clear + `"},{"at":"A4","rows":[[null]]}]`
		if clear != "A:A" && clear != "A2:A3" {
			text = `[{"at":"A4","rows":[[9]]},{"clear":"` + clear + `"},{"at":"A4","rows":[[8]]}]`
		}
		if err := readCells([]byte(text), sink); err != nil {
			t.Fatal(err)
		}
		after := frame.With(sink.changes)
		got := ""
		for col := 1; col <= 2; col++ {
			for row := 1; row <= 5; row++ {
				if cell := after.At(row, col); cell.Kind == calculation.Blank {
					got += "."
				} else {
					got += fmt.Sprint(cell.Number)
				}
			}
			got += " "
		}
		if got = strings.TrimSpace(got); got != want {
			t.Errorf("clearing %s leaves %s, want %s", clear, got, want)
		}
	}
	sink := &changedCells{frame: frame, steps: 1000}
	if err := readCells([]byte("["+strings.Repeat(`{"clear":"A:XFD"},`, 2000)+`{"clear":"A1"}]`), sink); err == nil {
		t.Error("clearing the same cells again and again has no end")
	}
}

// FuzzCells reads any text as cells: no panic, and an error or cells inside
// the greatest sheet.
func FuzzCells(f *testing.F) {
	for _, seed := range []string{`[{"at":"A1","rows":[[1,"a",null,true,{"date":"2026-03-02"}]]}]`, `[{"at":"B2","column":{"float64le":"AAAAAAAA8D8="}}]`,
		`[{"clear":"A1:B2"}]`, `[{"at":"A1","rows":[[1],{}]}]`, `[{}]`, `[{"at":"A1048576","column":[1,2]}]`, `{"at":1}`,
		`[{"` + strings.Repeat("\x88", 100) + `":1}]`} {
		f.Add(seed)
	}
	f.Fuzz(func(t *testing.T, text string) {
		s := scanner{data: []byte(text)}
		if _, err := s.value(); err != nil || s.deepest > DefaultLimits().Depth {
			return // the envelope has refused it before
		}
		sink := &changedCells{frame: calculation.NewFrame(), steps: 100_000}
		if err := readCells([]byte(text), sink); err != nil {
			return
		}
		for _, c := range sink.changes {
			if c.At.Row < 1 || c.At.Row > calculation.MaxRow || c.At.Col < 1 || c.At.Col > calculation.MaxCol {
				t.Fatalf("a cell at %v", c.At)
			}
		}
	})
}
