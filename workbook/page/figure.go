package page

import (
	"fmt"
	"html/template"
	"math"
	"strconv"
	"strings"

	"gonum.org/v1/plot/vg"
)

// Lengths of pictures, in units that are 0.85 pixels on a phone of 390 pixels
// and 1.1 on a wide screen: text of 13 units is 11 pixels at the least.
const (
	pictureWidth = 420
	textSize     = 13
	lineHeight   = 17
	ascent       = 11.7 // of text above its base line
	panelGap     = 14
)

// picture is what one calculation looks like.
type picture struct {
	says    []string // the text in place of the picture: sentences with numbers
	caption []string // sentences that say how to read it
	panels  []*panel
}

// panel is one plot of a picture; panels stand below one another. It has an
// axis of values below and, where vertical gives it one, an axis upward.
type panel struct {
	x, y   axis
	title  string
	height vg.Length // of the data area
	marks  []func(p pen)
	rows   vg.Length // height taken by rows so far
}

// pen draws in the data area of a panel. Heights are counted downward from the
// top of the row.
type pen struct {
	*canvas
	vg.Rectangle // the data area
	panel        *panel
	top          vg.Length
}

func (p pen) x(v float64) vg.Length { return p.Min.X + p.Size().X*vg.Length(p.panel.x.norm(v)) }
func (p pen) y(v float64) vg.Length { return p.Min.Y + p.Size().Y*vg.Length(p.panel.y.norm(v)) }

// down is a height below the top of the row.
func (p pen) down(h vg.Length) vg.Length { return p.Max.Y - p.top - h }

// newPanel gives a panel over a range of values, with ticks below.
func newPanel(lo, hi float64, title string) *panel {
	return &panel{x: newAxis(lo, hi, roundTicks), title: title}
}

// vertical gives the panel an axis of values upward, of that height.
func (p *panel) vertical(lo, hi float64, height vg.Length) {
	p.y = newAxis(lo, hi, roundTicks)
	p.height = height
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

// draw draws axes and marks inside a frame.
func (p *panel) draw(c *canvas, frame vg.Rectangle) {
	g := pen{canvas: c, panel: p, Rectangle: p.dataArea(frame)}
	g.drawAxes(frame)
	for _, mark := range p.marks {
		mark(g)
	}
}

// svg draws the picture. id makes its names unique on the page.
func (f *picture) svg(id string) template.HTML {
	var height vg.Length
	for i, p := range f.panels {
		if i > 0 {
			height += panelGap
		}
		if p.title != "" {
			height += lineHeight + 4
		}
		height += p.height + axisHeight
	}
	c := &canvas{height: height}
	top := height
	for i, p := range f.panels {
		if i > 0 {
			top -= panelGap
		}
		if p.title != "" {
			c.say(faintInk, vg.Point{Y: top - ascent}, start, shortened(p.title, pictureWidth))
			top -= lineHeight + 4
		}
		bottom := top - p.height - axisHeight
		p.draw(c, vg.Rectangle{Min: vg.Point{X: 1, Y: bottom}, Max: vg.Point{X: pictureWidth - 1, Y: top}})
		top = bottom
	}
	var b strings.Builder
	fmt.Fprintf(&b, `<svg class="picture" viewBox="0 0 %d %s" role="img" aria-labelledby="%s"><title id="%s">%s</title>`+"\n",
		pictureWidth, tenths(float64(height)), id, id, template.HTMLEscapeString(printable(f.alt())))
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

// through is a line from point to point.
func through(points []vg.Point) vg.Path {
	var path vg.Path
	for i, pt := range points {
		if i == 0 {
			path.Move(pt)
		} else {
			path.Line(pt)
		}
	}
	return path
}

func (p pen) line(name ink, width vg.Length, points ...vg.Point) {
	if len(points) > 1 {
		p.stroke(name, width, "", through(points))
	}
}

// dashed draws a line that differs by its form, not by its colour alone.
func (p pen) dashed(name ink, width vg.Length, points ...vg.Point) {
	p.stroke(name, width, "5 4", through(points))
}

// segments draws a line between every two points, as one path.
func (p pen) segments(name ink, width vg.Length, points []vg.Point) {
	var path vg.Path
	for i := 0; i+1 < len(points); i += 2 {
		path.Move(points[i])
		path.Line(points[i+1])
	}
	p.stroke(name, width, "", path)
}

// dots draws dots of one size as one path.
func (p pen) dots(name ink, size vg.Length, points []vg.Point) {
	var path vg.Path
	for _, pt := range points {
		path.Move(pt)
		path.Line(pt)
	}
	p.stroke(name, size, "", path)
}

// rings draws open circles.
func (p pen) rings(name ink, radius vg.Length, points []vg.Point) {
	for _, pt := range points {
		var path vg.Path
		path.Arc(pt, radius, 0, 2*math.Pi)
		p.stroke(name, 1.6, "", path)
	}
}

func (p pen) area(name ink, points ...vg.Point) {
	if len(points) > 0 {
		path := through(points)
		path.Close()
		p.fill(name, path)
	}
}

// label writes text near x below a height, inside the picture whatever its
// width: centred where there is room.
func (p pen) label(name ink, x, y vg.Length, s string) {
	half, a := widthOf(name, s)/2, middle
	switch {
	case x-half < 0:
		x, a = 0, start
	case x+half > pictureWidth:
		x, a = pictureWidth, end
	}
	p.say(name, vg.Point{X: x, Y: y - ascent}, a, s)
}

// left writes text from the left edge of the picture.
func (p pen) left(name ink, y vg.Length, s string) {
	p.say(name, vg.Point{Y: y - ascent}, start, shortened(s, pictureWidth))
}
