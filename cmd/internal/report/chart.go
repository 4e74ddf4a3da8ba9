package report

import (
	"fmt"
	"math"
	"strings"
)

// frame is the room around the plot, for labels.
type frame struct{ left, right, top, bottom float64 }

// usual is the frame of most charts.
var usual = frame{left: 66, right: 26, top: 14, bottom: 50}

// chart is a picture under way: two axes and what is drawn so far.
type chart struct {
	width, height float64
	x, y          axis
	body          strings.Builder
	taken         []box // places that labels keep clear of
}

// newChart draws the axes of a picture; an axis without a format is not drawn.
func newChart(width, height float64, room frame, x, y axis) *chart {
	c := &chart{width: width, height: height, x: x, y: y}
	c.x.from, c.x.to = room.left, width-room.right
	c.y.from, c.y.to = height-room.bottom, room.top
	c.yAxis()
	c.xAxis()
	return c
}

func (c *chart) xAxis() {
	if c.x.format == nil {
		return
	}
	last := math.Inf(-1)
	for _, v := range c.x.ticks(7) {
		at, text := c.x.at(v), c.x.format(v)
		c.line("grid", at, c.y.from, at, c.y.to)
		if half := textWidth(text, tickSize) / 2; at-half > last+8 {
			c.text("tick", at, c.y.from+17, "middle", text)
			c.taken = append(c.taken, box{at - half, c.y.from + 6, at + half, c.y.from + 20})
			last = at + half
		}
	}
	c.line("edge", c.x.from, c.y.from, c.x.to, c.y.from)
	if c.x.label != "" {
		c.text("axis", (c.x.from+c.x.to)/2, c.height-8, "middle", c.x.label)
	}
}

func (c *chart) yAxis() {
	if c.y.format == nil {
		return
	}
	last := math.Inf(1)
	for _, v := range c.y.ticks(6) {
		at := c.y.at(v)
		c.line("grid", c.x.from, at, c.x.to, at)
		if last-at > 15 {
			text := c.y.format(v)
			c.text("tick", c.x.from-8, at+4, "end", text)
			c.taken = append(c.taken, box{c.x.from - 8 - textWidth(text, tickSize), at - 7, c.x.from - 8, at + 5})
			last = at
		}
	}
	if c.y.label != "" {
		fmt.Fprintf(&c.body, `<text class="axis" transform="translate(14 %s) rotate(-90)" text-anchor="middle">%s</text>`, place((c.y.from+c.y.to)/2), escape(c.y.label))
	}
}

// place writes a coordinate to a tenth of a unit of the picture.
func place(x float64) string {
	s := strings.TrimSuffix(fmt.Sprintf("%.1f", x), ".0")
	if s == "-0" {
		return "0"
	}
	return s
}

func (c *chart) line(class string, x1, y1, x2, y2 float64) {
	fmt.Fprintf(&c.body, `<line class="%s" x1="%s" y1="%s" x2="%s" y2="%s"/>`, class, place(x1), place(y1), place(x2), place(y2))
}

func (c *chart) text(class string, x, y float64, anchor, text string) {
	fmt.Fprintf(&c.body, `<text class="%s" x="%s" y="%s" text-anchor="%s">%s</text>`, class, place(x), place(y), anchor, escape(text))
}

func (c *chart) rectangle(class string, left, top, width, height float64) {
	fmt.Fprintf(&c.body, `<rect class="%s" x="%s" y="%s" width="%s" height="%s"/>`, class, place(left), place(top), place(max(width, 0)), place(max(height, 0)))
}

// curve joins points, given as values, and keeps labels off the line.
func (c *chart) curve(class string, xs, ys []float64) {
	var points []string
	for i := range xs {
		if math.IsNaN(xs[i]) || math.IsNaN(ys[i]) {
			continue
		}
		x, y := c.x.at(xs[i]), c.y.at(ys[i])
		points = append(points, place(x)+","+place(y))
		c.avoid(x, y)
		if i > 0 && !math.IsNaN(ys[i-1]) { // and off the way between two points
			c.avoidLine(c.x.at(xs[i-1]), c.y.at(ys[i-1]), x, y)
		}
	}
	if len(points) > 0 {
		fmt.Fprintf(&c.body, `<polyline class="%s" points="%s"/>`, class, strings.Join(points, " "))
	}
}

// area fills the polygon of points, given as values.
func (c *chart) area(class string, xs, ys []float64) {
	points := make([]string, len(xs))
	for i := range xs {
		points[i] = place(c.x.at(xs[i])) + "," + place(c.y.at(ys[i]))
	}
	fmt.Fprintf(&c.body, `<polygon class="%s" points="%s"/>`, class, strings.Join(points, " "))
}

// avoidLine keeps labels off a line between two places.
func (c *chart) avoidLine(fromX, fromY, x, y float64) {
	steps := math.Ceil(math.Hypot(x-fromX, y-fromY) / 10)
	for k := 1.0; k < steps; k++ {
		c.avoid(fromX+(x-fromX)*k/steps, fromY+(y-fromY)*k/steps)
	}
}

func (c *chart) avoid(x, y float64) { c.taken = append(c.taken, box{x - 2, y - 2, x + 2, y + 2}) }

// mark draws a point in a shape of its own, so that colour need not tell it; the title shows where the pointer rests.
func (c *chart) mark(class, shape string, x, y float64, title string) {
	px, py := c.x.at(x), c.y.at(y)
	fmt.Fprintf(&c.body, `<g class="%s"><title>%s</title>%s</g>`, class, escape(title), shapeOf(shape, px, py))
	c.taken = append(c.taken, box{px - 7, py - 7, px + 7, py + 7})
}

// shapeOf gives a mark about ten units across.
func shapeOf(shape string, x, y float64) string {
	switch shape {
	case "circle":
		return fmt.Sprintf(`<circle cx="%s" cy="%s" r="5.5"/>`, place(x), place(y))
	case "dot":
		return fmt.Sprintf(`<circle cx="%s" cy="%s" r="2.4"/>`, place(x), place(y))
	case "square":
		return fmt.Sprintf(`<rect x="%s" y="%s" width="10" height="10"/>`, place(x-5), place(y-5))
	case "triangle":
		return fmt.Sprintf(`<path d="M%s %sl6 11h-12z"/>`, place(x), place(y-7))
	}
	return fmt.Sprintf(`<path d="M%s %sl7 8-7 8-7-8z"/>`, place(x), place(y-8)) // diamond
}

// whiskers draw one standard error to each side of a point, given as values.
func (c *chart) whiskers(class string, x, y, xError, yError float64) {
	if xError > 0 && finite(xError) {
		c.line(class, c.x.at(x-xError), c.y.at(y), c.x.at(x+xError), c.y.at(y))
	}
	if yError > 0 && finite(yError) {
		c.line(class, c.x.at(x), c.y.at(y-yError), c.x.at(x), c.y.at(y+yError))
	}
}

// svg closes the picture; title says what it shows, description adds what the eye would read off it.
func (c *chart) svg(title, description string) string {
	return fmt.Sprintf(`<svg class="picture" role="img" viewBox="0 0 %s %s" xmlns="http://www.w3.org/2000/svg"><title>%s</title><desc>%s</desc>%s</svg>`,
		place(c.width), place(c.height), escape(title), escape(description), c.body.String())
}
