package page

import (
	"math"
	"strconv"
	"strings"

	"gonum.org/v1/plot/vg"
)

// Lengths of axes.
const (
	tickLabelHeight = 14.5
	tickLength      = 4
	labelGap        = 3.6 // between the labels and the ticks of an axis upward
	dataGap         = 6.5 // between an axis and the data, so that no data lie on it
	axisHeight      = 30  // what an axis below takes of a panel
)

// axis is a range of values with ticks; one without ticks is not drawn.
type axis struct {
	min, max float64
	ticks    func(lo, hi float64) []tick
}

// tick is a value that is marked on an axis.
type tick struct {
	value float64
	label string
}

// newAxis gives an axis over a range, which it widens where it has no width.
func newAxis(lo, hi float64, ticks func(lo, hi float64) []tick) axis {
	if lo == hi {
		lo, hi = lo-1, hi+1
	}
	return axis{min: lo, max: hi, ticks: ticks}
}

// norm is where a value stands: 0 at the lower end of the axis, 1 at the upper.
func (a axis) norm(v float64) float64 { return (v - a.min) / (a.max - a.min) }

// marked gives the ticks within the range, nil for an axis that is not drawn.
func (a axis) marked() []tick {
	if a.ticks == nil {
		return nil
	}
	return a.ticks(a.min, a.max)
}

// fit gives the upper end of a data area that begins at from, so that no tick's
// label, which reaches half its size past the tick, ends beyond to.
func (a axis) fit(from, to vg.Length, half func(tick) vg.Length) vg.Length {
	upper := to
	for _, t := range a.marked() {
		if at := vg.Length(a.norm(t.value)); at > 0 {
			upper = min(upper, from+(to-half(t)-from)/at)
		}
	}
	return upper
}

// dataArea is what is left of a frame beside the axes.
func (p *panel) dataArea(frame vg.Rectangle) vg.Rectangle {
	area := frame
	area.Min.Y += tickLabelHeight + tickLength + dataGap
	area.Min.X += dataGap
	if p.y.ticks != nil {
		area.Min.X += p.y.labelWidth()
	}
	area.Max.X = p.x.fit(area.Min.X, frame.Max.X, func(t tick) vg.Length { return widthOf(wordInk, t.label) / 2 })
	area.Max.Y = p.y.fit(area.Min.Y, frame.Max.Y, func(tick) vg.Length { return tickLabelHeight / 2 })
	return area
}

// labelWidth is what labels and ticks of an axis upward take.
func (a axis) labelWidth() vg.Length {
	var widest vg.Length
	for _, t := range a.marked() {
		widest = max(widest, widthOf(wordInk, t.label))
	}
	return widest + labelGap + tickLength
}

// drawAxes draws the axes between frame and data.
func (p pen) drawAxes(frame vg.Rectangle) {
	line := p.Min.Y - dataGap
	strokes := []vg.Point{{X: p.Min.X, Y: line}, {X: p.Max.X, Y: line}}
	for _, t := range p.panel.x.marked() {
		x := p.x(t.value)
		p.say(wordInk, vg.Point{X: x, Y: frame.Min.Y + tickLabelHeight - ascent}, middle, t.label)
		strokes = append(strokes, vg.Point{X: x, Y: line}, vg.Point{X: x, Y: line - tickLength})
	}
	if p.panel.y.ticks != nil {
		line := p.Min.X - dataGap
		strokes = append(strokes, vg.Point{X: line, Y: p.Min.Y}, vg.Point{X: line, Y: p.Max.Y})
		for _, t := range p.panel.y.marked() {
			y := p.y(t.value)
			// Digits are 0.72 of the size high.
			p.say(wordInk, vg.Point{X: line - tickLength - labelGap, Y: y - textSize*0.36}, end, t.label)
			strokes = append(strokes, vg.Point{X: line, Y: y}, vg.Point{X: line - tickLength, Y: y})
		}
	}
	p.segments(axisInk, 1, strokes)
}

// mostSteps is how many steps between ticks an axis of round values has at most.
const mostSteps = 6

// roundTicks marks round values: steps of 1, 2 or 5 times a power of ten.
func roundTicks(lo, hi float64) []tick {
	step, place := roundStep((hi - lo) / mostSteps)
	if step == 0 || math.IsInf(step, 0) {
		return nil
	}
	var out []tick
	for k := math.Ceil(lo/step - 1e-9); k*step <= hi+step*1e-9 && len(out) < 4*mostSteps; k++ {
		out = append(out, tick{k * step, tickLabel(k*step, place, math.Max(math.Abs(lo), math.Abs(hi)))})
	}
	return out
}

// powerTicks marks an axis of decimal logarithms with the numbers themselves: at
// most seven, at 1, 2 and 5 times powers of ten or at powers alone.
func powerTicks(lo, hi float64) []tick {
	var out []tick
	steps := []float64{1, 2, 5}
	if hi-lo > 2 {
		steps = steps[:1]
	}
	every := max(1, math.Ceil((hi-lo)/6))
	for k := math.Floor(lo); k <= hi; k += every {
		for _, m := range steps {
			if v := k + math.Log10(m); v >= lo && v <= hi {
				out = append(out, tick{v, figure(m * math.Pow(10, k))})
			}
		}
	}
	return out
}

// roundStep is the smallest round step from least upward, and its last decimal
// place.
func roundStep(least float64) (step float64, place int) {
	if !(least > 0) || math.IsInf(least, 0) {
		return 0, 0
	}
	place = int(math.Floor(math.Log10(least)))
	unit := math.Pow(10, float64(place))
	for _, m := range []float64{1, 2, 5} {
		if m*unit >= least*(1-1e-9) {
			return m * unit, place
		}
	}
	return 10 * unit, place + 1
}

func tickLabel(x float64, place int, largest float64) string {
	if largest >= 1e7 || largest < 1e-4 {
		if math.Abs(x) < largest*1e-9 {
			return "0"
		}
		rounded, _ := strconv.ParseFloat(strconv.FormatFloat(x, 'g', 12, 64), 64)
		return minus(strconv.FormatFloat(rounded, 'g', -1, 64))
	}
	s := strconv.FormatFloat(x, 'f', max(0, -place), 64)
	if strings.Trim(s, "-0.") == "" {
		s = strings.TrimPrefix(s, "-")
	}
	return minus(s)
}
