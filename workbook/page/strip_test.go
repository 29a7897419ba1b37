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

func TestTicksAreRoundAndFew(t *testing.T) {
	for _, c := range []struct {
		lo, hi float64
		want   string
	}{
		{0, 10, "0 2 4 6 8 10"}, {-1, 1, "−1.0 −0.5 0.0 0.5 1.0"}, {9.2576, 9.2653, "9.258 9.260 9.262 9.264"},
		{58000, 73000, "60000 65000 70000"}, {0, 3e8, "0 5e+07 1e+08 1.5e+08 2e+08 2.5e+08 3e+08"}, {0.00002, 0.00007, "2e-05 3e-05 4e-05 5e-05 6e-05 7e-05"},
	} {
		var got []string
		for _, k := range (ticks{most: 6}).Ticks(c.lo, c.hi) {
			got = append(got, k.Label)
		}
		if text := strings.Join(got, " "); text != c.want {
			t.Errorf("%g to %g: %s, want %s", c.lo, c.hi, text, c.want)
		}
	}
	if got := (ticks{most: 6}).Ticks(0, math.Inf(1)); got != nil {
		t.Errorf("an axis without end has ticks %v", got)
	}
}
