package page

import (
	"fmt"
	"html/template"
	"math"
	"slices"
	"strconv"
	"strings"

	"gonum.org/v1/plot"
	"gonum.org/v1/plot/font"
	"gonum.org/v1/plot/text"
	"gonum.org/v1/plot/vg"
	"gonum.org/v1/plot/vg/draw"
)

// Lengths of pictures, in units that are 0.85 pixels on a phone of 390 pixels
// and 1.1 on a wide screen: text of 13 units is 11 pixels at the least.
const (
	pictureWidth = 420
	textSize     = 13
	lineHeight   = 17
	descent      = 2.8 // of text below its line, which the library's axes add to the top of a label
)

// picture is what one calculation looks like.
type picture struct {
	says    []string // the text in place of the picture: sentences with numbers
	caption []string // sentences that say how to read it
	panels  []*panel
}

// panel is one plot of a picture; panels stand below one another.
type panel struct {
	*plot.Plot
	title  string
	height vg.Length // of the data area
	marks  []func(p pen)
	rows   vg.Length // height taken by rows so far
}

// pen draws in the data area of a panel. Heights are counted downward from the
// top of the row.
type pen struct {
	draw.Canvas
	plot *plot.Plot
	top  vg.Length
}

func (p pen) x(v float64) vg.Length { return p.Canvas.X(p.plot.X.Norm(v)) }
func (p pen) y(v float64) vg.Length { return p.Canvas.Y(p.plot.Y.Norm(v)) }

// down is a height below the top of the row.
func (p pen) down(h vg.Length) vg.Length { return p.Max.Y - p.top - h }

func style(name ink, x text.XAlignment, y text.YAlignment) text.Style {
	return text.Style{Color: name, Font: typeface, XAlign: x, YAlign: y, Handler: handler}
}

// typeface has the widths of the fonts that the style sheet names for pictures.
var typeface = font.Font{Typeface: "Liberation", Variant: "Sans", Size: textSize}

var handler = words{text.Plain{Fonts: font.DefaultCache}}

// newPanel gives a panel over a range of values, with ticks below.
func newPanel(lo, hi float64, title string) *panel {
	p := &panel{Plot: plot.New(), title: title}
	p.BackgroundColor = nil
	p.X.Min, p.X.Max = lo, hi
	p.Y.Min, p.Y.Max = 0, 1
	dress(&p.X, text.XCenter, text.YTop, 6)
	p.HideY()
	return p
}

// vertical gives the panel an axis of values upward, of that height.
func (p *panel) vertical(lo, hi float64, height vg.Length) {
	p.Y.Min, p.Y.Max = lo, hi
	p.height = height
	dress(&p.Y, text.XRight, text.YCenter, 6)
}

// dress gives an axis its lines and at most so many ticks.
func dress(a *plot.Axis, x text.XAlignment, y text.YAlignment, most int) {
	a.LineStyle = draw.LineStyle{Color: axisInk, Width: 1}
	a.Tick.LineStyle = a.LineStyle
	a.Tick.Length = 4
	a.Padding = 6
	a.Tick.Label = style(wordInk, x, y)
	a.Tick.Marker = ticks{most: most}
}

// row adds a row of that height below the others.
func (p *panel) row(height vg.Length, mark func(p pen)) {
	top := p.rows
	p.marks = append(p.marks, func(g pen) { g.top = top; mark(g) })
	p.rows += height
	p.height = max(p.height, p.rows)
}

// over adds a mark over the whole height.
func (p *panel) over(mark func(p pen)) { p.marks = append(p.marks, mark) }

// Draw draws axes and marks.
func (p *panel) Draw(c draw.Canvas) {
	p.Plot.Add(plotter(func(area draw.Canvas, pl *plot.Plot) {
		for _, mark := range p.marks {
			mark(pen{Canvas: area, plot: pl})
		}
	}))
	p.Plot.Draw(c)
}

type plotter func(draw.Canvas, *plot.Plot)

func (f plotter) Plot(c draw.Canvas, p *plot.Plot) { f(c, p) }

// axisHeight is what an axis below takes: padding, ticks and labels.
const axisHeight = 30

// svg draws the picture. id makes its names unique on the page.
func (f *picture) svg(id string) template.HTML {
	var height vg.Length
	for i, p := range f.panels {
		if i > 0 {
			height += 14
		}
		if p.title != "" {
			height += lineHeight + 4
		}
		height += p.height + axisHeight
	}
	c := newCanvas(pictureWidth, height)
	area := draw.New(c)
	top := height
	for i, p := range f.panels {
		if i > 0 {
			top -= 14
		}
		if p.title != "" {
			area.FillText(style(faintInk, text.XLeft, text.YTop), vg.Point{X: 0, Y: top + descent}, shortened(p.title, pictureWidth))
			top -= lineHeight + 4
		}
		part := area
		part.Max.Y, part.Min.Y = top, top-p.height-axisHeight
		part.Min.X, part.Max.X = 1, pictureWidth-1
		p.Draw(part)
		top = part.Min.Y
	}
	var b strings.Builder
	fmt.Fprintf(&b, `<svg class="picture" viewBox="0 0 %s %s" role="img" aria-labelledby="%s"><title id="%s">%s</title>`+"\n",
		tenths(float64(c.width)), tenths(float64(c.height)), id, id, template.HTMLEscapeString(printable(f.alt())))
	b.WriteString(c.out.String())
	b.WriteString("</svg>")
	return template.HTML(b.String())
}

// mostSaid is how long the text in place of a picture may grow.
const mostSaid = 900

// alt is the text in place of the picture.
func (f *picture) alt() string {
	var said string
	for i, s := range f.says {
		if len(said)+len(s) > mostSaid {
			return said + " And " + strconv.Itoa(len(f.says)-i) + " more."
		}
		if said != "" {
			said += " "
		}
		said += s
	}
	return said
}

// The strokes of a pen.

func (p pen) line(name ink, width vg.Length, points ...vg.Point) {
	if len(points) < 2 {
		return
	}
	p.StrokeLines(draw.LineStyle{Color: name, Width: width}, points)
}

// dashed draws a line that differs by its form, not by its colour alone.
func (p pen) dashed(name ink, width vg.Length, points ...vg.Point) {
	p.StrokeLines(draw.LineStyle{Color: name, Width: width, Dashes: []vg.Length{5, 4}}, points)
}

// segments draws a line between every two points, as one path.
func (p pen) segments(name ink, width vg.Length, points []vg.Point) {
	var path vg.Path
	for i := 0; i+1 < len(points); i += 2 {
		path.Move(points[i])
		path.Line(points[i+1])
	}
	p.SetLineStyle(draw.LineStyle{Color: name, Width: width})
	p.Stroke(path)
}

// dots draws dots of one size as one path.
func (p pen) dots(name ink, size vg.Length, points []vg.Point) {
	var path vg.Path
	for _, pt := range points {
		path.Move(pt)
		path.Line(pt)
	}
	p.SetLineStyle(draw.LineStyle{Color: name, Width: size})
	p.Stroke(path)
}

// rings draws open circles.
func (p pen) rings(name ink, radius vg.Length, points []vg.Point) {
	p.SetLineStyle(draw.LineStyle{Color: name, Width: 1.6})
	for _, pt := range points {
		var path vg.Path
		path.Arc(pt, radius, 0, 2*math.Pi)
		p.Stroke(path)
	}
}

func (p pen) area(name ink, points ...vg.Point) { p.FillPolygon(name, points) }

// label writes text near x, inside the area whatever its width: centred where
// there is room.
func (p pen) label(name ink, x, y vg.Length, s string) {
	st := style(name, text.XCenter, text.YTop)
	half := st.Width(s) / 2
	if name == markWordInk {
		half *= 1.07 // it is bold
	}
	left, right := vg.Length(0), vg.Length(pictureWidth)
	switch {
	case x-half < left:
		st.XAlign, x = text.XLeft, left
	case x+half > right:
		st.XAlign, x = text.XRight, right
	}
	p.FillText(st, vg.Point{X: x, Y: y + descent}, s)
}

// left writes text from the left edge of the picture.
func (p pen) left(name ink, y vg.Length, s string) {
	p.FillText(style(name, text.XLeft, text.YTop), vg.Point{X: 0, Y: y + descent}, shortened(s, pictureWidth))
}

// shortened cuts a text so that it fits a width.
func shortened(s string, width vg.Length) string {
	st := style(wordInk, text.XLeft, text.YTop)
	if st.Width(s) <= width {
		return s
	}
	runes := []rune(s)
	for len(runes) > 1 && st.Width(string(runes)+"…") > width {
		runes = runes[:len(runes)-1]
	}
	return strings.TrimRight(string(runes), " ") + "…"
}

// ticks marks round values: steps of 1, 2 or 5 times a power of ten, at most so
// many. fixed are used where they are given.
type ticks struct {
	most  int
	fixed []plot.Tick
}

// Ticks gives the ticks of an axis.
func (t ticks) Ticks(lo, hi float64) []plot.Tick {
	if t.fixed != nil {
		return slices.DeleteFunc(slices.Clone(t.fixed), func(k plot.Tick) bool { return k.Value < lo || k.Value > hi })
	}
	step, place := roundStep((hi - lo) / float64(t.most))
	if step == 0 || math.IsInf(step, 0) {
		return nil
	}
	var out []plot.Tick
	for k := math.Ceil(lo/step - 1e-9); k*step <= hi+step*1e-9 && len(out) < 4*t.most; k++ {
		out = append(out, plot.Tick{Value: k * step, Label: tickLabel(k*step, place, math.Max(math.Abs(lo), math.Abs(hi)))})
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

// minus writes a negative number with a minus sign.
func minus(s string) string {
	if rest, ok := strings.CutPrefix(s, "-"); ok {
		return "−" + rest
	}
	return s
}
