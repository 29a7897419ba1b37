package page

import (
	"math"
	"strings"
	"testing"

	"gonum.org/v1/plot/vg"
)

// By hand.
func TestTicksAreRoundAndFew(t *testing.T) {
	for _, c := range []struct {
		ticks  func(lo, hi float64) []tick
		lo, hi float64
		want   string
	}{
		{roundTicks, 0, 10, "0 2 4 6 8 10"},
		{roundTicks, -1, 1, "−1.0 −0.5 0.0 0.5 1.0"},
		{roundTicks, 9.2576, 9.2653, "9.258 9.260 9.262 9.264"},
		{roundTicks, 58000, 73000, "60000 65000 70000"},
		{roundTicks, 0, 3e8, "0 5e+07 1e+08 1.5e+08 2e+08 2.5e+08 3e+08"},
		{roundTicks, 0.00002, 0.00007, "2e-05 3e-05 4e-05 5e-05 6e-05 7e-05"},
		{powerTicks, 0, 1.5, "1 2 5 10 20"},
		{powerTicks, -3, 2, "0.001 0.01 0.1 1 10 100"},
		{powerTicks, 0, 12, "1 100 10000 1000000 100000000 10000000000 1000000000000"},
	} {
		var got []string
		for _, k := range c.ticks(c.lo, c.hi) {
			got = append(got, k.label)
		}
		if text := strings.Join(got, " "); text != c.want {
			t.Errorf("%g to %g: %s, want %s", c.lo, c.hi, text, c.want)
		}
	}
	if got := roundTicks(0, math.Inf(1)); got != nil {
		t.Errorf("an axis without end has ticks %v", got)
	}
}

func TestTickLabelsStayInsideTheFrame(t *testing.T) {
	frame := vg.Rectangle{Min: vg.Point{X: 1, Y: 50}, Max: vg.Point{X: 419, Y: 250}}
	for _, r := range [][2]float64{{0, 10}, {0, 1e5}, {-3e8, 3e8}, {0, 9.99e300}, {1e-300, 5e-300}, {7, 7}, {-0.3, 12345.6}} {
		for _, ticks := range []func(lo, hi float64) []tick{roundTicks, powerTicks} {
			p := newPanel(r[0], r[1], "")
			p.vertical(r[0], r[1], 150)
			p.x.ticks, p.y.ticks = ticks, ticks
			g := pen{Rectangle: p.dataArea(frame), panel: p}
			if len(p.x.marked()) == 0 {
				continue
			}
			if g.Min.X < frame.Min.X || g.Min.Y < frame.Min.Y || g.Max.X > frame.Max.X || g.Max.Y > frame.Max.Y || g.Size().X < 200 || g.Size().Y < 100 {
				t.Errorf("%g: the data lie in %v of the frame %v", r, g.Rectangle, frame)
			}
			for _, k := range p.x.marked() {
				if right := g.x(k.value) + widthOf(wordInk, k.label)/2; right > frame.Max.X+1e-9 {
					t.Errorf("%g: %q ends at %g", r, k.label, right)
				}
				if left := g.Min.X - dataGap - tickLength - labelGap - widthOf(wordInk, k.label); left < frame.Min.X-1e-9 {
					t.Errorf("%g: %q begins at %g", r, k.label, left)
				}
				if top := g.y(k.value) + tickLabelHeight/2; top > frame.Max.Y+1e-9 {
					t.Errorf("%g: %q reaches up to %g", r, k.label, top)
				}
			}
		}
	}
}

// Liberation Sans has the widths of its kind: a digit 1139, a space 569 of 2048
// units (its hmtx table).
func TestTextIsMeasuredAsTheFontOfPicturesIs(t *testing.T) {
	want := vg.Length(textSize) * (4*1139 + 569) / 2048
	if got := widthOf(wordInk, "20 35"); math.Abs(float64(got-want)) > 1e-9 {
		t.Errorf("width %g, want %g", got, want)
	}
	if got := widthOf(markWordInk, "20 35"); !(got > want) {
		t.Errorf("bold text is %g wide, no more than %g", got, want)
	}
	if one, two := widthOf(wordInk, "a b"), widthOf(wordInk, "a\nb"); one != two {
		t.Errorf("a line break is drawn as a space, %g wide, and measured %g", one, two)
	}
}
