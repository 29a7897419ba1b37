package calculation

import (
	"context"
	"errors"
	"fmt"
	"slices"
	"strings"
	"testing"

	"halfwidth/funcs"
)

// smallBook has trips with a pair of times, and depots.
func smallBook() *Rows {
	src := NewRows()
	text := func(s string) Cell { return Cell{Kind: Text, Text: s} }
	number := func(x float64) Cell { return Cell{Kind: Number, Number: x} }
	src.AddSheet("Trips", [][]Cell{
		{text("depot"), text("before"), text("after"), text("wait")},
		{text("North"), number(12.5), number(11), {Kind: Duration, Number: 0.25}},
		{text("North"), number(13.5), {}, {Kind: Duration, Number: 0.5}},
		{text("Quay"), number(14.5), number(12.5), {}},
		{text("Quay"), number(16), text("late"), {}},
		{text("North"), number(11), number(10.5), {}},
	})
	return src
}

func lookup(t *testing.T, name string) *funcs.Function {
	t.Helper()
	f, err := funcs.Lookup(name)
	if err != nil {
		t.Fatal(err)
	}
	return f
}

func TestArgumentsAreReadByTheRulesOfCells(t *testing.T) {
	for _, c := range []struct {
		function, input, text string
		want                  any
	}{
		{"mean-interval", "sample", "12.1; 11.8", []float64{12.1, 11.8}},
		{"mean-interval", "sample", "before in Trips where depot = north", []float64{12.5, 13.5, 11}},
		{"mean-interval", "sample", "Trips!B2:B4", []float64{12.5, 13.5, 14.5}},
		{"mean-interval", "confidence", "95%", 0.95},
		{"mean-interval", "confidence", " 0.95 ", 0.95},
		{"mean-interval", "n", "count in Trips where after is present", 4.0},
		{"mean-interval", "population-size", "sum of before in Trips where depot = Quay", 30.5},
		{"mean-interval", "direction", "ABOVE", "above"},
		{"mean-interval", "checks", "No", false},
		{"mean-interval", "reference", "Trips!B3", 13.5},
		{"t-probability", "df", "Infinite", "infinite"},
		{"analysis-of-variance", "samples", "before in Trips for each depot",
			[]funcs.Group{{Name: "North", Values: []float64{12.5, 13.5, 11}}, {Name: "Quay", Values: []float64{14.5, 16}}}},
		{"analysis-of-variance", "ns", "count in Trips for each depot", funcs.List{Names: []string{"North", "Quay"}, Values: []float64{3, 2}}},
		{"analysis-of-variance", "ns", "Quay = 2; North = 3", funcs.List{Names: []string{"Quay", "North"}, Values: []float64{2, 3}}},
	} {
		got, err := Arguments(context.Background(), smallBook(), lookup(t, c.function), map[string]string{c.input: c.text}, FileOptions{})
		if err != nil {
			t.Errorf("%s = %s: %v", c.input, c.text, err)
			continue
		}
		from, _ := got[c.input].(funcs.From)
		if fmt.Sprintf("%#v", from.Value) != fmt.Sprintf("%#v", c.want) {
			t.Errorf("%s = %s: got %#v, want %#v", c.input, c.text, from.Value, c.want)
		}
	}
}

func TestArgumentsThatPairAreReadTogether(t *testing.T) {
	f := lookup(t, "paired-interval")
	args, err := Arguments(context.Background(), smallBook(), f, map[string]string{"sample": "before in Trips", "second-sample": "after in Trips"}, FileOptions{})
	if err != nil {
		t.Fatal(err)
	}
	out, err := f.Answer(context.Background(), args)
	if err != nil {
		t.Fatal(err)
	}
	// (12.5-11 + 14.5-12.5 + 11-10.5) / 3; two pairs dropped, one of them by a text.
	for name, want := range map[string]any{"difference": 4.0 / 3, "n": 3, "used": 3, "skipped": 2,
		"range": "sample: Trips!B2:B6; second-sample: Trips!C2:C6"} {
		if got, _ := out.Get(name); got != want {
			t.Errorf("%s = %v, want %v", name, got, want)
		}
	}
	origin := args["sample"].(funcs.From).Origin
	if got := origin.Address(0, 2); got != "Trips!B4" {
		t.Errorf("the third pair's first value stands in %s, want Trips!B4", got)
	}
}

func TestFaultyArgumentsAreErrorsAndDataFaultsRefusals(t *testing.T) {
	ask := func(function string, texts map[string]string) error {
		_, err := Arguments(context.Background(), smallBook(), lookup(t, function), texts, FileOptions{})
		return err
	}
	err := ask("mean-interval", map[string]string{"sample": "befor in Trips", "confidence": "12,5", "direction": "B7"})
	var wrong funcs.ArgumentErrors
	if !errors.As(err, &wrong) || len(wrong) != 3 {
		t.Fatalf("got %v, want an error for each of the three", err)
	}
	for _, want := range []string{`Did you mean "before"?`, "confidence cannot be read: character 3, at ,", "direction is B7, a cell of a calculation sheet"} {
		if !strings.Contains(err.Error(), want) {
			t.Errorf("%v does not say %q", err, want)
		}
	}
	if err := ask("mean-interval", map[string]string{"sample": "befor in Trips"}); !errors.As(err, &wrong) || !strings.Contains(err.Error(), `Did you mean "before"?`) {
		t.Errorf("got %v, want the closest column", err)
	}
	if err := ask("mean-interval", map[string]string{"sample": "before in Trips for each depot"}); !errors.As(err, &wrong) {
		t.Errorf("got %v, want an error for several samples", err)
	}
	if err := ask("difference-interval", map[string]string{"sample": "before in Trips matched by depot", "second-sample": "after in Trips"}); !errors.As(err, &wrong) {
		t.Errorf("got %v, want an error for a key", err)
	}
	var refusal *Refusal
	err = ask("mean-interval", map[string]string{"sample": "wait in Trips"})
	if !errors.As(err, &refusal) || refusal.Findings[0].Code != "duration-without-unit" || refusal.Findings[0].Input != "sample" {
		t.Errorf("got %v, want the refusal of durations without a unit", err)
	}
	err = ask("mean-interval", map[string]string{"sample": "before in Trips where depot = Nort"})
	if !errors.As(err, &refusal) || !slices.ContainsFunc(refusal.Findings, func(f funcs.Finding) bool { return f.Code == "condition-matches-nothing" }) {
		t.Errorf("got %v, want a refusal that names the nearest value", err)
	}
}

func TestTextsForUnknownInputsComeBack(t *testing.T) {
	args, err := Arguments(context.Background(), nil, lookup(t, "mean-interval"), map[string]string{"sampel": "1; 2", "mean": "3"}, FileOptions{})
	if err != nil || args["sampel"] != "1; 2" {
		t.Errorf("got %v, %v", args, err)
	}
	_, err = Arguments(context.Background(), nil, lookup(t, "mean-interval"), map[string]string{"sample": "a in Trips"}, FileOptions{})
	if err == nil || !strings.Contains(err.Error(), "No workbook is open") {
		t.Errorf("without a book: %v", err)
	}
}
