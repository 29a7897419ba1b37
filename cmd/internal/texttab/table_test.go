package texttab

import (
	"encoding/csv"
	"encoding/json"
	"strings"
	"testing"
)

var trips = &Table{
	Columns: []Column{{Name: "depot"}, {Name: "mean", Right: true}},
	Rows: []Row{
		{Cells: []any{"North", 31.4159265}, Notes: []string{"Few values."}},
		{Cells: []any{"Québec", 7.0}, Notes: []string{"Few values.", "Skewed."}},
		{Cells: []any{"=1+1", nil}},
	},
}

func write(t *testing.T, f Format) string {
	t.Helper()
	var b strings.Builder
	if err := trips.Write(&b, f); err != nil {
		t.Fatal(err)
	}
	return b.String()
}

func TestNumbersStandByTheirDecimalMarksAndEqualNotesShareAFootnote(t *testing.T) {
	want := "depot      mean\n" +
		"North   31.4159  [1]\n" +
		"Québec   7       [1][2]\n" +
		"=1+1\n\n" +
		"[1] Few values.\n[2] Skewed.\n"
	if got := write(t, Text); got != want {
		t.Errorf("got\n%s\nwant\n%s", got, want)
	}
}

func TestCSVKeepsEveryDigitAndGuardsTexts(t *testing.T) {
	records, err := csv.NewReader(strings.NewReader(write(t, CSV))).ReadAll()
	if err != nil {
		t.Fatal(err)
	}
	if records[1][1] != "31.4159265" || records[2][2] != "Few values. Skewed." || records[3][0] != " =1+1" {
		t.Errorf("got %q", records)
	}
}

func TestJSONLeavesAbsentCellsOut(t *testing.T) {
	var rows []map[string]any
	if err := json.Unmarshal([]byte(write(t, JSON)), &rows); err != nil {
		t.Fatal(err)
	}
	if rows[0]["mean"] != 31.4159265 || len(rows[1]["notes"].([]any)) != 2 {
		t.Errorf("got %v", rows)
	}
	if _, ok := rows[2]["mean"]; ok {
		t.Error("an absent cell became a member")
	}
}

func TestLongNotesAreWrapped(t *testing.T) {
	got := Wrap("[1] one two three four", 11, "    ")
	if got != "[1] one two\n    three\n    four" {
		t.Errorf("got %q", got)
	}
}
