package page

import (
	"fmt"
	"math"
	"slices"
	"strconv"
	"strings"

	"gonum.org/v1/plot/vg"
)

// mostDots is how many values of a sample are drawn where it stands alone,
// mostBeside where others stand below it. Of more, values evenly spaced by rank
// stand for all, the outermost of them being drawn each.
const (
	mostDots   = 600
	mostBeside = 300
	outermost  = 20
)

// strip is a sample as dots at their values, stacked where they would overlap.
type strip struct {
	name    string
	written string    // the expression that it comes from, or ""
	sorted  []float64 // what is drawn
	n       int       // of the whole sample
	lo, hi  float64
}

func newStrip(name string, values []float64, most int) strip {
	s := strip{name: name, sorted: slices.Sorted(slices.Values(withoutGaps(values)))}
	s.n = len(s.sorted)
	s.lo, s.hi = math.NaN(), math.NaN()
	if s.n > 0 {
		s.lo, s.hi = s.sorted[0], s.sorted[s.n-1]
	}
	s.sorted = thinned(s.sorted, most)
	return s
}

// thinned gives at most so many of sorted values: the outermost all, between
// them every so manyth.
func thinned(sorted []float64, most int) []float64 {
	n := len(sorted)
	if n <= most {
		return sorted
	}
	out := slices.Clone(sorted[:outermost])
	inside := most - 2*outermost
	rest := sorted[outermost : n-outermost]
	for i := range inside {
		out = append(out, rest[(2*i+1)*len(rest)/(2*inside)])
	}
	return append(out, sorted[n-outermost:]...)
}

// says counts the values and names their range.
func (s strip) says() string {
	text := plural(s.n, "value")
	if s.name != "" {
		text = s.name + ": " + text
	}
	if s.n > 1 {
		text += " from " + figure(s.lo) + " to " + figure(s.hi)
	}
	return text + "."
}

// captionOf says what a dot stands for.
func captionOf(strips ...strip) string {
	i := slices.IndexFunc(strips, func(s strip) bool { return s.n > len(s.sorted) })
	switch {
	case i < 0:
		return "Each dot is one value."
	case len(strips) > 1:
		return fmt.Sprintf("Each dot is one value; of a larger sample, %d are drawn, evenly by rank, the %d smallest and largest all.", len(strips[i].sorted), outermost)
	}
	return fmt.Sprintf("Each dot is one value: %d of %d are drawn, evenly by rank, the %d smallest and largest all.", len(strips[i].sorted), strips[i].n, outermost)
}

// The sizes that dots come in.
var dotSizes = []vg.Length{6, 5, 4.2, 3.5, 3, 2.6, 2.2, 1.8}

// stack puts dots of one size at their places, each in the lowest lane that has
// room, and gives the number of lanes.
func stack(at []vg.Length, size vg.Length) (lanes []int, most int) {
	lanes = make([]int, len(at))
	var last []vg.Length
	for i, x := range at {
		lane := slices.IndexFunc(last, func(l vg.Length) bool { return x-l >= size*0.95 })
		if lane < 0 {
			lane = len(last)
			last = append(last, x)
		}
		last[lane] = x
		lanes[i] = lane
	}
	return lanes, len(last)
}

// fit chooses the largest dots with which the stacks of all samples stay within
// a height.
func (p *panel) fit(strips []strip, height vg.Length) (size vg.Length) {
	for _, size = range dotSizes {
		if !slices.ContainsFunc(strips, func(s strip) bool { return size*vg.Length(p.lanes(s, size)) > height }) {
			return size
		}
	}
	return size
}

// lanes is about how many dots of that size stand above one another.
func (p *panel) lanes(s strip, size vg.Length) int {
	at := make([]vg.Length, len(s.sorted))
	for i, v := range s.sorted {
		at[i] = pictureWidth * 0.95 * vg.Length(p.x.norm(v))
	}
	_, most := stack(at, size)
	return most
}

// addStrip adds a row with the dots of a sample. Where they do not fit in the
// height, they are pressed together.
func (p *panel) addStrip(s strip, size, height vg.Length) {
	height = max(10, min(height, size*vg.Length(p.lanes(s, size)))+2)
	p.row(height, func(g pen) {
		at := make([]vg.Length, len(s.sorted))
		for i, v := range s.sorted {
			at[i] = g.x(v)
		}
		lanes, most := stack(at, size)
		step := min(size, (height-2)/vg.Length(max(most, 1)))
		points := make([]vg.Point, 0, len(at))
		for i, x := range at {
			pt := vg.Point{X: x, Y: g.down(height) + size/2 + step*vg.Length(lanes[i])}
			if k := len(points); k > 0 && math.Abs(float64(points[k-1].X-x)) < .05 && math.Abs(float64(points[k-1].Y-pt.Y)) < .3 {
				continue // it would cover the last one
			}
			points = append(points, pt)
		}
		g.dots(dotInk, size*0.86, points)
	})
}

// addTall adds the one strip of a picture.
func (p *panel) addTall(s strip) { p.addStrip(s, p.fit([]strip{s}, tallStrip), tallStrip) }

// interval is an estimate with its limits; what is not there is NaN.
type interval struct {
	name                   string
	estimate, lower, upper float64
	level                  string // "95%"
	named                  bool   // the name is a group's: it is written as it stands
}

func (v interval) has() bool { return !math.IsNaN(v.lower) || !math.IsNaN(v.upper) }

// halfWidth is what the digits follow.
func (v interval) halfWidth() float64 {
	switch {
	case !math.IsNaN(v.lower) && !math.IsNaN(v.upper):
		return (v.upper - v.lower) / 2
	case !math.IsNaN(v.lower):
		return v.estimate - v.lower
	case !math.IsNaN(v.upper):
		return v.upper - v.estimate
	}
	return math.NaN()
}

// digits writes a number to the second digit of the half-width.
func (v interval) digits(x float64) string {
	half := math.Abs(v.halfWidth())
	if !(half > 0) || math.IsInf(half, 0) {
		return figure(x)
	}
	place := int(math.Floor(math.Log10(half))) - 1
	if place < -12 || math.Abs(x) >= 1e12 {
		return figure(x)
	}
	s := strconv.FormatFloat(x, 'f', max(0, -place), 64)
	if strings.Trim(s, "-0.") == "" {
		s = strings.TrimPrefix(s, "-")
	}
	return minus(s)
}

// limits words the limits alone.
func (v interval) limits() string {
	switch {
	case !math.IsNaN(v.lower) && !math.IsNaN(v.upper):
		return v.digits(v.lower) + " to " + v.digits(v.upper)
	case !math.IsNaN(v.lower):
		return "at least " + v.digits(v.lower)
	case !math.IsNaN(v.upper):
		return "at most " + v.digits(v.upper)
	}
	return ""
}

// label stands below the bracket.
func (v interval) label() string {
	s := v.name
	if !math.IsNaN(v.estimate) {
		if s != "" {
			s += " "
		}
		s += v.digits(v.estimate)
	}
	if !v.has() {
		return s
	}
	if s != "" {
		s += ", "
	}
	switch {
	case v.level == "":
		return s + v.limits()
	case math.IsNaN(v.lower) || math.IsNaN(v.upper):
		return s + v.limits() + " with " + v.level + " confidence"
	}
	return s + v.level + " interval " + v.limits()
}

// says is the label as a sentence.
func (v interval) says() string {
	if v.named {
		return v.label() + "."
	}
	return sentence(v.label())
}

// within gives the numbers to be seen, for the range of an axis.
func (v interval) within() []float64 { return []float64{v.estimate, v.lower, v.upper} }

// bracketHeight is the row of a bracket with its label.
const bracketHeight = 16 + lineHeight

// addBracket adds a row with an interval as a bracket, its estimate as a dot
// on it and its label below.
func (p *panel) addBracket(v interval) {
	p.row(bracketHeight, func(g pen) {
		g.bracket(v, g.down(8))
		from, to := g.span(v)
		g.label(markWordInk, (from+to)/2, g.down(16), v.label())
	})
}

// span is where an interval reaches from and to on the drawing.
func (g pen) span(v interval) (from, to vg.Length) {
	from, to = g.Min.X, g.Max.X
	if !math.IsNaN(v.lower) {
		from = g.x(v.lower)
	}
	if !math.IsNaN(v.upper) {
		to = g.x(v.upper)
	}
	if !v.has() {
		from = g.x(v.estimate)
		to = from
	}
	return from, to
}

// bracket draws an interval: arms at its limits, an arrow where there is none,
// a dot at the estimate.
func (g pen) bracket(v interval, y vg.Length) {
	const arm = 5
	from, to := g.span(v)
	if v.has() {
		points := []vg.Point{{X: from, Y: y}, {X: to, Y: y}}
		if !math.IsNaN(v.lower) {
			points = append([]vg.Point{{X: from, Y: y + arm}}, points...)
		} else {
			g.line(intervalInk, 2, vg.Point{X: from + arm, Y: y + arm}, points[0], vg.Point{X: from + arm, Y: y - arm})
		}
		if !math.IsNaN(v.upper) {
			points = append(points, vg.Point{X: to, Y: y + arm})
		} else {
			g.line(intervalInk, 2, vg.Point{X: to - arm, Y: y + arm}, vg.Point{X: to, Y: y}, vg.Point{X: to - arm, Y: y - arm})
		}
		g.line(intervalInk, 2, points...)
	}
	if !math.IsNaN(v.estimate) {
		size := vg.Length(7)
		if v.has() {
			size = min(size, max(3.5, (to-from)/2)) // so that a narrow bracket is seen
		}
		g.dots(intervalInk, size, []vg.Point{{X: g.x(v.estimate), Y: y}})
	}
}

// reference is a value to compare with.
type reference struct {
	name     string
	value    float64
	computed bool // not as written by the user, so that it may be rounded
}

// addReferences makes room for labels above and draws each reference as a
// dashed line over the whole panel. It is called before the rows.
func (p *panel) addReferences(refs []reference) {
	if len(refs) == 0 {
		return
	}
	lanes := make([]vg.Length, len(refs))
	var ends []vg.Length
	for i, r := range refs {
		w := widthOf(refWordInk, r.label())
		x := pictureWidth * vg.Length(p.x.norm(r.value))
		at := min(max(x, w/2), pictureWidth-w/2)
		lane := slices.IndexFunc(ends, func(e vg.Length) bool { return at-w/2 >= e+10 })
		if lane < 0 {
			lane = len(ends)
			ends = append(ends, 0)
		}
		ends[lane] = at + w/2
		lanes[i] = lineHeight * vg.Length(lane)
	}
	p.row(lineHeight*vg.Length(len(ends))+3, func(g pen) {
		for i, r := range refs {
			x := g.x(r.value)
			g.label(refWordInk, x, g.down(lanes[i]), r.label())
			g.dashed(refInk, 1.6, vg.Point{X: x, Y: g.down(lanes[i] + lineHeight)}, vg.Point{X: x, Y: g.Min.Y - 6})
		}
	})
}

func (r reference) label() string {
	if r.computed {
		return r.name + " " + short(r.value)
	}
	return r.name + " " + figure(r.value)
}

// spanOf is the range of an axis that shows all of the numbers, with some room
// at either end.
func spanOf(values ...float64) (lo, hi float64) {
	lo, hi = math.Inf(1), math.Inf(-1)
	for _, v := range values {
		if !math.IsNaN(v) && !math.IsInf(v, 0) {
			lo, hi = math.Min(lo, v), math.Max(hi, v)
		}
	}
	switch {
	case lo > hi:
		return 0, 1
	case lo == hi:
		room := math.Max(math.Abs(lo)*0.1, 1e-9)
		if lo == 0 {
			room = 1
		}
		return lo - room, hi + room
	}
	room := hi/32 - lo/32
	return lo - room, hi + room
}
