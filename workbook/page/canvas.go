package page

import (
	"fmt"
	"html"
	"math"
	"strconv"
	"strings"
	"sync"

	"gonum.org/v1/plot/font"
	"gonum.org/v1/plot/font/liberation"
	"gonum.org/v1/plot/vg"
)

// ink is a colour by the name of its class; the page's style sheet says what it
// looks like on light paper, dark paper and in print.
type ink string

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

// canvas is a picture as SVG for a page: with classes in place of colours and
// fonts, in tenths of a unit, and each path relative to its last point, so that
// a thousand dots take few bytes. Heights are counted upward; a unit is a pixel
// where the picture is as wide as it was drawn for.
type canvas struct {
	out    strings.Builder
	height vg.Length
}

// stroke draws a path as a line. A part of a path that goes nowhere is a dot.
func (c *canvas) stroke(name ink, width vg.Length, dash string, path vg.Path) {
	if len(path) == 0 {
		return
	}
	fmt.Fprintf(&c.out, `<path class="%s" stroke-width="%s"`, name, tenths(float64(width)))
	if dash != "" {
		fmt.Fprintf(&c.out, ` stroke-dasharray="%s"`, dash)
	}
	c.out.WriteString(` d="`)
	c.writePath(path)
	c.out.WriteString("\"/>\n")
}

// fill draws a path as an area.
func (c *canvas) fill(name ink, path vg.Path) {
	fmt.Fprintf(&c.out, `<path class="%s-area" d="`, name)
	c.writePath(path)
	c.out.WriteString("\"/>\n")
}

// writePath writes path data in whole tenths, so that relative steps add up.
func (c *canvas) writePath(path vg.Path) {
	var lastX, lastY int
	var from vg.Point
	first := true
	step := func(p vg.Point) (dx, dy int) {
		ix, iy := int(math.Round(float64(p.X)*10)), int(math.Round(float64(c.height-p.Y)*10))
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

// anchor says which part of a text stands at its point.
type anchor string

const (
	start  anchor = "start"
	middle anchor = "middle"
	end    anchor = "end"
)

// say draws one line of text on a base line.
func (c *canvas) say(name ink, at vg.Point, a anchor, s string) {
	if s == "" {
		return
	}
	fmt.Fprintf(&c.out, `<text class="%s" x="%s" y="%s"`, name, tenths(float64(at.X)), tenths(float64(c.height-at.Y)))
	if a != start {
		fmt.Fprintf(&c.out, ` text-anchor="%s"`, a)
	}
	fmt.Fprintf(&c.out, ">%s</text>\n", html.EscapeString(printable(s)))
}

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

// face is a font of the widths of those that the style sheet names for pictures.
// It is read on first use, for only pages need it.
var face = sync.OnceValue(func() font.Face {
	return font.NewCache(liberation.Collection()).Lookup(font.Font{Typeface: "Liberation", Variant: "Sans"}, textSize)
})

// widthOf is how wide a text is drawn; bold text is a little wider.
func widthOf(name ink, s string) vg.Length {
	f := face()
	w := f.Width(printable(s))
	if name == markWordInk {
		w *= 1.07
	}
	return w
}

// shortened cuts a text so that it fits a width.
func shortened(s string, width vg.Length) string {
	if widthOf(wordInk, s) <= width {
		return s
	}
	runes := []rune(s)
	for len(runes) > 1 && widthOf(wordInk, string(runes)+"…") > width {
		runes = runes[:len(runes)-1]
	}
	return strings.TrimRight(string(runes), " ") + "…"
}
