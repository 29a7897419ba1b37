package funcs

import (
	"encoding/csv"
	"encoding/json"
	"math"
	"os"
	"path/filepath"
	"slices"
	"strconv"
	"strings"
	"testing"
)

// The published check values; see the README beside them for the columns.
const published = "../testdata/references/published/"

// csvRows reads a file of testdata/references as one map a row, by header.
func csvRows(t *testing.T, path string) []map[string]string {
	t.Helper()
	file, err := os.Open(filepath.FromSlash(path))
	if err != nil {
		t.Fatal(err)
	}
	defer file.Close()
	records, err := csv.NewReader(file).ReadAll()
	if err != nil || len(records) < 2 {
		t.Fatalf("%s: %d records, %v", path, len(records), err)
	}
	rows := make([]map[string]string, 0, len(records)-1)
	for _, record := range records[1:] {
		row := map[string]string{}
		for i, name := range records[0] {
			row[name] = record[i]
		}
		rows = append(rows, row)
	}
	return rows
}

// publishedRow is one number that a source prints, with what it belongs to.
type publishedRow struct {
	id, topic, quantity string
	source              string
	inputs              map[string]any // numbers as float64, lists as []any
	text                string         // as printed
	reproduced, route   string
}

// publishedExamples gives the rows of examples.csv of the topics, errors of the
// sources (reproduced: no) left out.
func publishedExamples(t *testing.T, topics ...string) []publishedRow {
	t.Helper()
	var out []publishedRow
	for _, r := range csvRows(t, published+"examples.csv") {
		if !slices.Contains(topics, r["topic"]) || r["reproduced"] == "no" {
			continue
		}
		row := publishedRow{id: r["id"], topic: r["topic"], quantity: r["quantity"], text: r["expected"], reproduced: r["reproduced"], route: r["route"],
			source: strings.Join([]string{r["author_or_body"], r["year"], r["title"], r["section"]}, ", ")}
		row.decode(t, r["inputs"])
		out = append(out, row)
	}
	if len(out) == 0 {
		t.Fatalf("no published example of %v", topics)
	}
	return out
}

// publishedExample gives the row of that id.
func publishedExample(t *testing.T, id string) publishedRow {
	t.Helper()
	for _, r := range csvRows(t, published+"examples.csv") {
		if r["id"] == id {
			rows := publishedExamples(t, r["topic"])
			if i := slices.IndexFunc(rows, func(p publishedRow) bool { return p.id == id }); i >= 0 {
				return rows[i]
			}
		}
	}
	t.Fatalf("examples.csv has no row %s to be tested", id)
	return publishedRow{}
}

// publishedTable gives the entries of one table of tables.csv, errors of the
// source left out.
func publishedTable(t *testing.T, table string) []publishedRow {
	t.Helper()
	var out []publishedRow
	for _, r := range csvRows(t, published+"tables.csv") {
		if r["table_id"] != table || strings.HasPrefix(r["reproduced"], "no") {
			continue
		}
		row := publishedRow{id: table + " " + r["params"], topic: table, source: r["source"], text: r["value"], reproduced: r["reproduced"], route: "full precision"}
		row.decode(t, r["params"])
		out = append(out, row)
	}
	if len(out) == 0 {
		t.Fatalf("no entry of table %s", table)
	}
	return out
}

func (p *publishedRow) decode(t *testing.T, text string) {
	t.Helper()
	if err := json.Unmarshal([]byte(text), &p.inputs); err != nil {
		t.Fatalf("%s: inputs: %v", p.id, err)
	}
}

// number gives a number of the inputs.
func (p publishedRow) number(t *testing.T, name string) float64 {
	t.Helper()
	x, ok := p.inputs[name].(float64)
	if !ok {
		t.Fatalf("%s: no number %q among its inputs", p.id, name)
	}
	return x
}

// list gives a list of numbers of the inputs.
func (p publishedRow) list(t *testing.T, name string) []float64 {
	t.Helper()
	list, ok := p.inputs[name].([]any)
	if !ok {
		t.Fatalf("%s: no list %q among its inputs", p.id, name)
	}
	out := make([]float64, len(list))
	for i, x := range list {
		out[i] = x.(float64)
	}
	return out
}

// groups gives every list of the inputs under its name, ordered by name.
func (p publishedRow) groups(t *testing.T) []Group {
	t.Helper()
	var out []Group
	for name := range p.inputs {
		if _, ok := p.inputs[name].([]any); ok {
			out = append(out, Group{name, p.list(t, name)})
		}
	}
	slices.SortFunc(out, func(a, b Group) int { return strings.Compare(a.Name, b.Name) })
	return out
}

// check compares what was computed with what is printed: within half a unit of
// the last printed place; one unit, in that direction, where the source cut or
// raised the last place; one unit where it went by rounded intermediates.
func (p publishedRow) check(t *testing.T, got float64) {
	t.Helper()
	want, unit := printed(t, p.text)
	low, high := -unit/2, unit/2
	switch {
	case p.route != "full precision":
		low, high = -unit, unit
	case p.reproduced == "truncated" && want >= 0, p.reproduced == "rounded up" && want < 0:
		low, high = 0, unit
	case p.reproduced == "truncated", p.reproduced == "rounded up":
		low, high = -unit, 0
	}
	// A tie at half a unit may stand a rounding error beyond it.
	slack := 1e-9*unit + 4e-16*math.Abs(want)
	if d := got - want; !(d >= low-slack && d <= high+slack) {
		t.Errorf("%s: %.12g, but %s (%s) is printed in %s", p.id, got, p.text, p.reproduced, p.source)
	}
}

// printed gives a printed number and the unit of its last place.
func printed(t *testing.T, text string) (value, unit float64) {
	t.Helper()
	value, err := strconv.ParseFloat(text, 64)
	if err != nil {
		t.Fatal(err)
	}
	digits, exponent, _ := strings.Cut(strings.ToLower(text), "e")
	place, _ := strconv.Atoi(exponent)
	if _, decimals, ok := strings.Cut(digits, "."); ok {
		place -= len(decimals)
	}
	return value, math.Pow(10, float64(place))
}

// publishedColumn reads one column of a data file, such as "data/x.csv".
func publishedColumn(t *testing.T, file, column string) []float64 {
	t.Helper()
	var out []float64
	for _, row := range csvRows(t, published+file) {
		out = append(out, float(t, row[column]))
	}
	return out
}

// publishedGroups reads the values of a data file by the names in one column,
// in the order in which the names appear.
func publishedGroups(t *testing.T, file, groupColumn, valueColumn string) []Group {
	t.Helper()
	var out []Group
	at := map[string]int{}
	for _, row := range csvRows(t, published+file) {
		i, ok := at[row[groupColumn]]
		if !ok {
			i = len(out)
			at[row[groupColumn]] = i
			out = append(out, Group{Name: row[groupColumn]})
		}
		out[i].Values = append(out[i].Values, float(t, row[valueColumn]))
	}
	return out
}

func float(t *testing.T, text string) float64 {
	t.Helper()
	x, err := strconv.ParseFloat(text, 64)
	if err != nil {
		t.Fatal(err)
	}
	return x
}

// within fails where got is off want by more than the relative tolerance (the
// absolute one where want is 0).
func within(t *testing.T, what string, got, want, tolerance float64) {
	t.Helper()
	scale := math.Abs(want)
	if want == 0 {
		scale = 1
	}
	if !(math.Abs(got-want) <= tolerance*scale) {
		t.Errorf("%s: got %.17g, want %.17g within %g", what, got, want, tolerance)
	}
}

// resultOf gives a number among the results of an outcome.
func resultOf(t *testing.T, out *Outcome, name string) float64 {
	t.Helper()
	v, ok := out.Get(name)
	if !ok {
		t.Fatalf("%s: %s is absent (%s: %s)", out.Function.Name, name, out.Status, Note(out.Findings))
	}
	switch x := v.(type) {
	case float64:
		return x
	case int:
		return float64(x)
	}
	t.Fatalf("%s: %s is %v, which is no number", out.Function.Name, name, v)
	return 0
}

// absent fails where an outcome has one of the results.
func absent(t *testing.T, out *Outcome, names ...string) {
	t.Helper()
	for _, name := range names {
		if v, ok := out.Get(name); ok {
			t.Errorf("%s: %s is %v, want it absent", out.Function.Name, name, v)
		}
	}
}

// refusedFor fails where an outcome was not refused with that code.
func refusedFor(t *testing.T, out *Outcome, code string) {
	t.Helper()
	if out.Status != StatusRefused || out.Findings[0].Code != code {
		t.Errorf("%s: status %s, findings %v, want refused: %s", out.Function.Name, out.Status, out.Findings, code)
	}
}

// raises reports whether an outcome has a finding of that code.
func raises(out *Outcome, code string) bool {
	return slices.ContainsFunc(out.Findings, func(f Finding) bool { return f.Code == code })
}
