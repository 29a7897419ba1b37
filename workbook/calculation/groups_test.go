package calculation

import (
	"context"
	"reflect"
	"strings"
	"testing"

	"halfwidth/funcs"
)

func TestGroupsMayBeWrittenOut(t *testing.T) {
	f, err := funcs.Lookup("pooled-variance")
	if err != nil {
		t.Fatal(err)
	}
	for text, want := range map[string][]funcs.Group{
		"North = 12.1; 11.8 | Quay = 10.2; 10.9": {{Name: "North", Values: []float64{12.1, 11.8}}, {Name: "Quay", Values: []float64{10.2, 10.9}}},
		`"Mill 2" = 1;2;-3`:                      {{Name: "Mill 2", Values: []float64{1, 2, -3}}},
	} {
		args, err := Arguments(context.Background(), nil, f, map[string]string{"samples": text}, FileOptions{})
		if err != nil {
			t.Errorf("%s: %v", text, err)
			continue
		}
		got := args["samples"]
		if from, ok := got.(funcs.From); ok {
			got = from.Value
		}
		if !reflect.DeepEqual(got, want) {
			t.Errorf("%s: got %v, want %v", text, got, want)
		}
	}
	for _, text := range []string{"North = 12.1; x | Quay = 10.2", "12.1; 11.8 | 10.2", "North = 1; 2 | = 3", "North = B2; 1 | Quay = 2"} {
		_, err := Arguments(context.Background(), nil, f, map[string]string{"samples": text}, FileOptions{})
		if err == nil || !strings.Contains(err.Error(), "such as North = 12.1") && !strings.Contains(err.Error(), "numbers with ;") {
			t.Errorf("%s: got %v", text, err)
		}
	}
}
