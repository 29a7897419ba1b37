package page

import (
	"fmt"
	"html"
	"image"
	"image/color"
	"math"
	"strconv"
	"strings"

	"gonum.org/v1/plot/font"
	"gonum.org/v1/plot/text"
	"gonum.org/v1/plot/vg"
	"gonum.org/v1/plot/vg/draw"
)

// ink is a colour by the name of its class; the page's style sheet says what it
// looks like on light paper, dark paper and in print.
type ink string

// RGBA is black: only the name is drawn.
func (ink) RGBA() (r, g, b, a uint32) { return 0, 0, 0, 0xffff }

// The inks.
const (
	axisInk     ink = "axis" // axes, ticks and rails
	gridInk     ink = "grid" // lines to read by
	dotInk      ink = "dot"  // measured values
	ringInk     ink = "ring" // values picked out from the others
	lineInk     ink = "line" // curves and laws
	intervalInk ink = "mark" // estimates and intervals
	refInk      ink = "ref"  // the reference
	bandInk     ink = "band" // areas
	wordInk     ink = "word" // text
	faintInk    ink = "faint"
	markWordInk ink = "markword"
	refWordInk  ink = "refword"
)

// canvas draws plots as SVG for a page: with classes in place of colours and
// fonts, in tenths of a unit, and each path relative to its last point, so that
// a thousand dots take few bytes. The library's own SVG canvas writes every
// colour and font into each element.
type canvas struct {
	out    strings.Builder
	width  vg.Length
	height vg.Length
	now    pencil
	stack  []pencil
}

// pencil is the state that Push keeps.
type pencil struct {
	ink   ink
	width vg.Length
	dash  []vg.Length
	m     matrix
}

// matrix is an affine map: x' = a·x + c·y + e, y' = b·x + d·y + f.
type matrix struct{ a, b, c, d, e, f float64 }

func (m matrix) at(p vg.Point) (x, y float64) {
	px, py := float64(p.X), float64(p.Y)
	return m.a*px + m.c*py + m.e, m.b*px + m.d*py + m.f
}

// then is the map that applies n first.
func (m matrix) then(n matrix) matrix {
	return matrix{
		m.a*n.a + m.c*n.b, m.b*n.a + m.d*n.b,
		m.a*n.c + m.c*n.d, m.b*n.c + m.d*n.d,
		m.a*n.e + m.c*n.f + m.e, m.b*n.e + m.d*n.f + m.f,
	}
}

var _ vg.CanvasSizer = (*canvas)(nil)

func newCanvas(width, height vg.Length) *canvas {
	c := &canvas{width: width, height: height}
	c.now.m = matrix{a: 1, d: -1, f: float64(height)}
	vg.Initialize(c)
	return c
}

// Size is the size in units, which are pixels where the picture is as wide as
// it was drawn for.
func (c *canvas) Size() (w, h vg.Length) { return c.width, c.height }

// SetLineWidth, SetLineDash and SetColor set what the next paths are drawn with.
func (c *canvas) SetLineWidth(w vg.Length)                  { c.now.width = w }
func (c *canvas) SetLineDash(dash []vg.Length, _ vg.Length) { c.now.dash = dash }
func (c *canvas) SetColor(clr color.Color) {
	c.now.ink = wordInk
	if named, ok := clr.(ink); ok {
		c.now.ink = named
	}
}

// Rotate, Translate and Scale change the map from drawing to page.
func (c *canvas) Rotate(rad float64) {
	sin, cos := math.Sincos(rad)
	c.now.m = c.now.m.then(matrix{a: cos, b: sin, c: -sin, d: cos})
}
func (c *canvas) Translate(p vg.Point) {
	c.now.m = c.now.m.then(matrix{a: 1, d: 1, e: float64(p.X), f: float64(p.Y)})
}
func (c *canvas) Scale(x, y float64) { c.now.m = c.now.m.then(matrix{a: x, d: y}) }

// Push and Pop keep the state and bring it back.
func (c *canvas) Push() { c.stack = append(c.stack, c.now) }
func (c *canvas) Pop() {
	c.now = c.stack[len(c.stack)-1]
	c.stack = c.stack[:len(c.stack)-1]
}

// Stroke draws a path as a line. A part of a path that goes nowhere is a dot.
func (c *canvas) Stroke(path vg.Path) {
	if c.now.width <= 0 || len(path) == 0 {
		return
	}
	fmt.Fprintf(&c.out, `<path class="%s" stroke-width="%s"`, c.now.ink, tenths(float64(c.now.width)))
	if len(c.now.dash) > 0 {
		parts := make([]string, len(c.now.dash))
		for i, d := range c.now.dash {
			parts[i] = tenths(float64(d))
		}
		fmt.Fprintf(&c.out, ` stroke-dasharray="%s"`, strings.Join(parts, " "))
	}
	c.out.WriteString(` d="`)
	c.writePath(path)
	c.out.WriteString("\"/>\n")
}

// Fill draws a path as an area.
func (c *canvas) Fill(path vg.Path) {
	fmt.Fprintf(&c.out, `<path class="%s-area" d="`, c.now.ink)
	c.writePath(path)
	c.out.WriteString("\"/>\n")
}

// writePath writes path data in whole tenths, so that relative steps add up.
func (c *canvas) writePath(path vg.Path) {
	var lastX, lastY int
	var from vg.Point
	first := true
	step := func(p vg.Point) (dx, dy int) {
		x, y := c.now.m.at(p)
		ix, iy := int(math.Round(x*10)), int(math.Round(y*10))
		dx, dy = ix-lastX, iy-lastY
		lastX, lastY, from = ix, iy, p
		return dx, dy
	}
	pair := func(letter byte, p vg.Point) {
		dx, dy := step(p)
		c.out.WriteByte(letter)
		y := ofTenths(dy)
		c.out.WriteString(ofTenths(dx))
		if !strings.HasPrefix(y, "-") {
			c.out.WriteByte(' ')
		}
		c.out.WriteString(y)
	}
	line := func(p vg.Point) {
		if p == from {
			c.out.WriteString("h0")
			return
		}
		pair('l', p)
	}
	for _, part := range path {
		switch part.Type {
		case vg.MoveComp:
			letter := byte('m')
			if first {
				letter = 'M'
			}
			pair(letter, part.Pos)
			first = false
		case vg.LineComp:
			line(part.Pos)
		case vg.ArcComp:
			// Arcs are drawn as chords of at most 15 degrees.
			n := int(math.Ceil(math.Abs(part.Angle) / (math.Pi / 12)))
			for i := range n + 1 {
				sin, cos := math.Sincos(part.Start + part.Angle*float64(i)/float64(max(n, 1)))
				p := vg.Point{X: part.Pos.X + part.Radius*vg.Length(cos), Y: part.Pos.Y + part.Radius*vg.Length(sin)}
				if first {
					pair('M', p)
					first = false
				} else {
					line(p)
				}
			}
		case vg.CurveComp:
			line(part.Pos) // no plot of this page has curves of its own
		case vg.CloseComp:
			c.out.WriteByte('z')
		}
	}
}

// FillString draws text that starts at a point; words draws it otherwise.
func (c *canvas) FillString(_ font.Face, at vg.Point, s string) { c.say(at, "start", s) }

// say draws text at a point that is its start, middle or end.
func (c *canvas) say(at vg.Point, anchor, s string) {
	x, y := c.now.m.at(at)
	fmt.Fprintf(&c.out, `<text class="%s" x="%s" y="%s"`, c.now.ink, tenths(x), tenths(y))
	if anchor != "start" {
		fmt.Fprintf(&c.out, ` text-anchor="%s"`, anchor)
	}
	fmt.Fprintf(&c.out, ">%s</text>\n", html.EscapeString(printable(s)))
}

// DrawImage draws nothing: no picture of this page holds another.
func (c *canvas) DrawImage(vg.Rectangle, image.Image) {}

// tenths writes a length to a tenth of a unit.
func tenths(x float64) string { return ofTenths(int(math.Round(x * 10))) }

func ofTenths(n int) string {
	if n%10 == 0 {
		return strconv.Itoa(n / 10)
	}
	sign := ""
	if n < 0 {
		sign, n = "-", -n
	}
	whole := ""
	if n >= 10 {
		whole = strconv.Itoa(n / 10)
	}
	return sign + whole + "." + strconv.Itoa(n%10)
}

// words is the text handler of plots: it measures as the library does, and hands
// the alignment on, so that text stands right in whatever font the page has.
type words struct{ text.Plain }

// Draw draws one line of text.
func (words) Draw(c vg.Canvas, s string, style text.Style, at vg.Point) {
	if s == "" {
		return
	}
	c.SetColor(style.Color)
	descent := style.FontExtents().Descent
	if style.YAlign == text.YCenter {
		at.Y -= descent + style.Font.Size*0.36 // an axis gives the middle of digits, and the descent on top
	} else {
		at.Y += style.Height(s) * vg.Length(style.YAlign) // callers give the top and the descent on top
	}
	anchor := "middle"
	switch style.XAlign {
	case text.XLeft:
		anchor = "start"
	case text.XRight:
		anchor = "end"
	}
	inner(c).say(at, anchor, s)
}

// inner finds the canvas below the library's areas.
func inner(c vg.Canvas) *canvas {
	for {
		switch v := c.(type) {
		case *canvas:
			return v
		case *draw.Canvas:
			c = v.Canvas
		case draw.Canvas:
			c = v.Canvas
		default:
			panic(fmt.Sprintf("page: text on a %T", c))
		}
	}
}
