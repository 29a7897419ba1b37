package funcs

import (
	"encoding/json"
	"math"
	"strconv"
	"testing"
)

// planRow is one row of plans/plans.csv or plans/calls.csv in testdata/references.
type planRow struct {
	function, result, text string
	arguments              map[string]any
}

func planRows(t *testing.T, file string) []planRow {
	t.Helper()
	var rows []planRow
	for _, r := range csvRows(t, "../testdata/references/"+file) {
		row := planRow{function: r["function"], result: r["result"], text: r["value"]}
		if err := json.Unmarshal([]byte(r["arguments"]), &row.arguments); err != nil {
			t.Fatal(err)
		}
		for name, v := range row.arguments {
			if list, ok := v.([]any); ok {
				values := make([]float64, len(list))
				for i, x := range list {
					values[i] = x.(float64)
				}
				row.arguments[name] = values
			}
		}
		rows = append(rows, row)
	}
	return rows
}

// Source: plans.csv, arithmetic at 24 to 34 digits by formulas of its own; calls.csv,
// sums over every count at 33 digits.
func TestPlansAgreeWithHighPrecisionArithmetic(t *testing.T) {
	for _, r := range append(planRows(t, "plans/plans.csv"), planRows(t, "plans/calls.csv")...) {
		out := answered(t, r.function, r.arguments)
		got, ok := out.Get(r.result)
		if !ok {
			t.Errorf("%s(%v): no %s", r.function, r.arguments, r.result)
			continue
		}
		switch v := got.(type) {
		case int:
			if strconv.Itoa(v) != r.text {
				t.Errorf("%s(%v): %s = %d, want %s", r.function, r.arguments, r.result, v, r.text)
			}
		case float64:
			if want := float(t, r.text); !(math.Abs(v-want) <= 1e-12*math.Abs(want)) {
				t.Errorf("%s(%v): %s = %.17g, want %s", r.function, r.arguments, r.result, v, r.text)
			}
		}
	}
}
