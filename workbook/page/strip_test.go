package page

import (
	"math"
	"slices"
	"strings"
	"testing"

	"gonum.org/v1/plot/vg"
)

func TestStackedDotsDoNotCoverOneAnother(t *testing.T) {
	var at []vg.Length
	for i := range 400 {
		at = append(at, vg.Length(i*i%211)+vg.Length(i)/400)
	}
	slices.Sort(at)
	for _, size := range dotSizes {
		lanes, most := stack(at, size)
		last := make([]vg.Length, most)
		for i := range last {
			last[i] = -100
		}
		for i, x := range at {
			if x-last[lanes[i]] < size*0.95 {
				t.Fatalf("size %g: dot %d lies %g from the last of its lane", size, i, x-last[lanes[i]])
			}
			last[lanes[i]] = x
		}
	}
}

func TestManyValuesAreThinnedEvenlyAndKeepTheirEnds(t *testing.T) {
	values := normal(100_000, 0, 1)
	s := newStrip("", values, mostDots)
	if len(s.sorted) != mostDots || s.n != len(values) || !slices.IsSorted(s.sorted) {
		t.Fatalf("%d of %d are drawn", len(s.sorted), s.n)
	}
	slices.Sort(values)
	if !slices.Equal(s.sorted[:outermost], values[:outermost]) || !slices.Equal(s.sorted[mostDots-outermost:], values[len(values)-outermost:]) {
		t.Error("the outermost values are not all drawn")
	}
	middle := s.sorted[mostDots/2]
	if rank, _ := slices.BinarySearch(values, middle); math.Abs(float64(rank)/float64(len(values))-0.5) > 0.01 {
		t.Errorf("the middle dot has rank %d", rank)
	}
	if few := []float64{3, 1, math.NaN(), 2}; !slices.Equal(newStrip("", few, mostDots).sorted, []float64{1, 2, 3}) {
		t.Errorf("%v", newStrip("", few, mostDots).sorted)
	}
	if text := captionOf(s); !strings.Contains(text, "600 of 100000") {
		t.Errorf("the caption reads %q", text)
	}
}

func TestNumbersAreWrittenForReading(t *testing.T) {
	for x, want := range map[float64]string{
		0: "0", 12: "12", -3.5: "−3.5", 1.0 / 3: "0.333333", 123456.789: "123457", 1234567.8: "1234568",
		3.44657e-18: "3.44657e-18", 2.5e20: "2.5e+20", math.Inf(1): "infinite", -0.0001: "−0.0001",
	} {
		if got := figure(x); got != want {
			t.Errorf("%v is written %q, want %q", x, got, want)
		}
	}
	v := interval{name: "mean", estimate: 31.0141, lower: -0.004, upper: 62.03, level: "95%"}
	if got := v.label(); got != "mean 31, 95% interval 0 to 62" {
		t.Errorf("%q", got)
	}
	v = interval{name: "mean", estimate: 2.66182, lower: 2.03375, upper: math.NaN(), level: "95%"}
	if got := v.says(); got != "Mean 2.66, at least 2.03 with 95% confidence." {
		t.Errorf("%q", got)
	}
	v = interval{name: "a: mean", estimate: 5, lower: math.NaN(), upper: math.NaN(), level: "95%", named: true}
	if got := v.says(); got != "a: mean 5." {
		t.Errorf("%q", got)
	}
}
