package report

import (
	"fmt"
	"html"
	"math"
	"strings"
)

// axis maps values to places on a picture.
type axis struct {
	low, high float64 // values at the ends
	from, to  float64 // places of the ends
	scale     scaling
	label     string
	format    func(float64) string
}

// scaling is how values are spread along an axis.
type scaling uint8

const (
	linear scaling = iota
	logarithmic
	squareRoot
)

func (a axis) spread(x float64) float64 {
	switch a.scale {
	case logarithmic:
		return math.Log(max(x, math.SmallestNonzeroFloat64))
	case squareRoot:
		return math.Sqrt(max(x, 0))
	}
	return x
}

// at gives the place of a value; values beyond the ends stop there.
func (a axis) at(x float64) float64 {
	low, high := a.spread(a.low), a.spread(a.high)
	if high == low {
		return (a.from + a.to) / 2
	}
	share := min(max((a.spread(x)-low)/(high-low), 0), 1)
	return a.from + share*(a.to-a.from)
}

// ticks gives values that read well, about count of them.
func (a axis) ticks(count int) []float64 {
	var list []float64
	if a.scale == logarithmic {
		for power := math.Floor(math.Log10(a.low)); power <= math.Ceil(math.Log10(a.high)); power++ {
			for _, m := range []float64{1, 2, 5} {
				if x := m * math.Pow(10, power); x >= a.low*(1-1e-9) && x <= a.high*(1+1e-9) {
					list = append(list, x)
				}
			}
		}
		return list
	}
	step := niceStep((a.high - a.low) / float64(count))
	for x := math.Ceil(a.low/step-1e-9) * step; x <= a.high+step*1e-9 && len(list) < 50; x += step {
		list = append(list, x)
	}
	return list
}

// niceStep rounds up to 1, 2 or 5 times a power of ten.
func niceStep(x float64) float64 {
	if !(x > 0) || math.IsInf(x, 0) {
		return 1
	}
	power := math.Pow(10, math.Floor(math.Log10(x)))
	for _, m := range []float64{1, 2, 5} {
		if x <= m*power*(1+1e-9) {
			return m * power
		}
	}
	return 10 * power
}

// upTo gives an end of an axis that reads well, at or above x.
func upTo(x float64) float64 {
	if !(x > 0) {
		return 1
	}
	step := niceStep(x / 5)
	return math.Ceil(x/step-1e-9) * step
}

// chart is a picture under way.
type chart struct {
	width, height float64
	x, y          axis
	body          strings.Builder
}

// Margins of every chart, for labels of axes.
const (
	marginLeft   = 74
	marginRight  = 24
	marginTop    = 16
	marginBottom = 50
)

func newChart(width, height float64, x, y axis) *chart {
	c := &chart{width: width, height: height, x: x, y: y}
	c.x.from, c.x.to = marginLeft, width-marginRight
	c.y.from, c.y.to = height-marginBottom, marginTop
	c.axes()
	return c
}

// axes draws grid lines, numbers and names.
func (c *chart) axes() {
	lastAt := math.Inf(-1)
	for _, x := range c.x.ticks(7) {
		at := c.x.at(x)
		c.line("grid", at, c.y.from, at, c.y.to)
		text := c.x.format(x)
		if width := 7 * float64(len([]rune(text))); at-lastAt > width {
			c.text("tick", at, c.y.from+18, "middle", text)
			lastAt = at
		}
	}
	lastAt = math.Inf(1)
	for _, y := range c.y.ticks(6) {
		at := c.y.at(y)
		c.line("grid", c.x.from, at, c.x.to, at)
		if lastAt-at > 14 {
			c.text("tick", c.x.from-8, at+4, "end", c.y.format(y))
			lastAt = at
		}
	}
	c.text("axis", (c.x.from+c.x.to)/2, c.height-8, "middle", c.x.label)
	fmt.Fprintf(&c.body, `<text class="axis" transform="translate(14 %s) rotate(-90)" text-anchor="middle">%s</text>`, place((c.y.from+c.y.to)/2), html.EscapeString(c.y.label))
}

// place writes a coordinate to a tenth of a pixel.
func place(x float64) string { return strings.TrimSuffix(fmt.Sprintf("%.1f", x), ".0") }

func (c *chart) line(class string, x1, y1, x2, y2 float64) {
	fmt.Fprintf(&c.body, `<line class="%s" x1="%s" y1="%s" x2="%s" y2="%s"/>`, class, place(x1), place(y1), place(x2), place(y2))
}

func (c *chart) text(class string, x, y float64, anchor, text string) {
	fmt.Fprintf(&c.body, `<text class="%s" x="%s" y="%s" text-anchor="%s">%s</text>`, class, place(x), place(y), anchor, html.EscapeString(text))
}

// curve joins points, given as values.
func (c *chart) curve(class string, xs, ys []float64) {
	var points []string
	for i := range xs {
		points = append(points, place(c.x.at(xs[i]))+","+place(c.y.at(ys[i])))
	}
	fmt.Fprintf(&c.body, `<polyline class="%s" points="%s"/>`, class, strings.Join(points, " "))
}

// mark draws a point in a shape of its own, so that colour need not tell it.
func (c *chart) mark(class, shape string, x, y float64, title string) {
	px, py := c.x.at(x), c.y.at(y)
	fmt.Fprintf(&c.body, `<g class="%s"><title>%s</title>`, class, html.EscapeString(title))
	switch shape {
	case "circle":
		fmt.Fprintf(&c.body, `<circle cx="%s" cy="%s" r="5"/>`, place(px), place(py))
	case "dot":
		fmt.Fprintf(&c.body, `<circle cx="%s" cy="%s" r="2.6"/>`, place(px), place(py))
	case "square":
		fmt.Fprintf(&c.body, `<rect x="%s" y="%s" width="10" height="10"/>`, place(px-5), place(py-5))
	case "triangle":
		fmt.Fprintf(&c.body, `<path d="M%s %sl6 11h-12z"/>`, place(px), place(py-7))
	default: // diamond
		fmt.Fprintf(&c.body, `<path d="M%s %sl7 8-7 8-7-8z"/>`, place(px), place(py-8))
	}
	c.body.WriteString("</g>")
}

// label is a text beside a point.
type label struct {
	x, y float64 // place of the point
	text string
}

// labels writes texts beside points, moved apart so that they do not overlap, with a thin line back to the point where one was moved far.
func (c *chart) labels(list []label) {
	const lineHeight = 15
	used := [][4]float64{} // left, top, right, bottom of what is written
	for _, l := range list {
		width := 6.7 * float64(len([]rune(l.text)))
		anchor, x := "start", l.x+11
		if x+width > c.width-2 {
			anchor, x = "end", l.x-11
		}
		left := x
		if anchor == "end" {
			left = x - width
		}
		best := l.y + 4
		for k := range 40 {
			offset := float64((k+1)/2*lineHeight) * float64(1-2*(k%2))
			y := l.y + 4 + offset
			box := [4]float64{left, y - 12, left + width, y + 3}
			if y > marginTop && y < c.height-marginBottom+10 && !hits(used, box) {
				best = y
				break
			}
		}
		used = append(used, [4]float64{left, best - 12, left + width, best + 3})
		if math.Abs(best-l.y-4) > lineHeight {
			c.line("leader", l.x, l.y, x, best-4)
		}
		c.text("label", x, best, anchor, l.text)
	}
}

func hits(boxes [][4]float64, b [4]float64) bool {
	for _, o := range boxes {
		if b[0] < o[2] && o[0] < b[2] && b[1] < o[3] && o[1] < b[3] {
			return true
		}
	}
	return false
}

// svg closes the picture; title says what it shows, description adds what the eye would read off it.
func (c *chart) svg(title, description string) string {
	return svgOf(c.width, c.height, title, description, c.body.String())
}

func svgOf(width, height float64, title, description, body string) string {
	return fmt.Sprintf(`<svg class="picture" role="img" viewBox="0 0 %s %s" xmlns="http://www.w3.org/2000/svg"><title>%s</title><desc>%s</desc>%s</svg>`,
		place(width), place(height), html.EscapeString(title), html.EscapeString(description), body)
}
