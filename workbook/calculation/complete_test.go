package calculation

import (
	"context"
	"io"
	"slices"
	"strings"
	"testing"
)

func textFile(text string) *TextFile {
	return NewTextFile("trips.csv", func() (io.ReadCloser, error) { return io.NopCloser(strings.NewReader(text)), nil }, FileOptions{})
}

func TestNamesAndValuesOfADataFile(t *testing.T) {
	source := textFile("Trips of March\n\ndepot,minutes,Handling  time\nNorth,12,0:30\n north ,13,0:31\nQuay,14,0:20\n,9,0:10\n7,1,0:01\n")
	names, err := HeaderNames(context.Background(), source, "trips.csv")
	if err != nil || !slices.Equal(names, []string{"depot", "minutes", "Handling  time"}) {
		t.Errorf("columns %q, %v", names, err)
	}
	for column, want := range map[string][]string{"DEPOT": {"North", "Quay"}, "handling time": nil, "driver": nil} {
		if values, err := ColumnValues(context.Background(), source, "trips.csv", column, 9); err != nil || !slices.Equal(values, want) {
			t.Errorf("%s holds %q, %v, want %q", column, values, err, want)
		}
	}
	if values, _ := ColumnValues(context.Background(), source, "trips.csv", "depot", 1); len(values) != 1 {
		t.Errorf("one value was asked for: %q", values)
	}
}

func TestHeaderCellsAreReadAsTheSheetDoes(t *testing.T) {
	for text, want := range map[string]string{" Second sample (minutes)": "second-sample", "> Mean": "mean", "label": "label"} {
		if name, isResult := HeaderName(text); name != want || isResult != strings.HasPrefix(text, ">") {
			t.Errorf("%q is %q, %v", text, name, isResult)
		}
	}
	if name, ok := WorkOut("Work Out: Mean Interval"); name != "mean-interval" || !ok {
		t.Errorf("%q, %v", name, ok)
	}
	if _, ok := WorkOut("workout"); ok {
		t.Error("workout is no mark of a block")
	}
	if name, ok := DefaultName("Default Confidence"); name != "confidence" || !ok || !slices.Contains(OptionNames(), name) {
		t.Errorf("%q, %v", name, ok)
	}
}
