package report

import (
	"math"
)

// Sizes of type in a picture, in its units; the style must agree.
const (
	labelSize = 13.0
	tickSize  = 12.0
)

// textWidth estimates how wide a text is drawn: no font is at hand, so a letter counts 0.56 of its size, a wide one twice that.
func textWidth(text string, size float64) float64 {
	return 0.56 * size * float64(columns(text))
}

// box is a rectangle of a picture.
type box struct{ left, top, right, bottom float64 }

func (b box) meets(o box) bool {
	return b.left < o.right && o.left < b.right && b.top < o.bottom && o.top < b.bottom
}

// label is a text beside a point, in places of the picture.
type label struct {
	x, y  float64
	text  string
	class string // further classes of style
}

// labels writes texts beside their points. Each takes the first free spot among a ring of them around its point: beside, above, below, then
// farther away, with a thin line back when it is far. Spots are free when they meet no other label, no mark, no line and no edge of the
// picture; when none is, the one that meets least is taken.
func (c *chart) labels(list []label) {
	for _, l := range list {
		if l.text == "" {
			continue
		}
		width := textWidth(l.text, labelSize)
		best, bestAnchor, bestX, least := box{}, "start", 0.0, math.Inf(1)
		for _, s := range spots(l, width) {
			b := box{s.left, s.baseline - 11, s.left + width, s.baseline + 3}
			cost := s.cost
			for _, o := range c.taken {
				if b.meets(o) {
					cost += 40
				}
			}
			if b.left < 2 || b.right > c.width-2 || b.top < 2 || b.bottom > c.height-2 {
				cost += 4000
			}
			if cost < least {
				least, best, bestAnchor, bestX = cost, b, s.anchor, s.x
			}
		}
		c.taken = append(c.taken, best)
		nearX, nearY := min(max(l.x, best.left), best.right), min(max(l.y, best.top), best.bottom)
		if math.Hypot(nearX-l.x, nearY-l.y) > 22 {
			c.line("leader", l.x, l.y, nearX, nearY)
		}
		class := "label"
		if l.class != "" {
			class += " " + l.class
		}
		c.text(class, bestX, best.bottom-3, bestAnchor, l.text)
	}
}

// spot is where a label may stand; what is farther from its point costs more.
type spot struct {
	left, baseline, x, cost float64
	anchor                  string
}

func spots(l label, width float64) []spot {
	var list []spot
	for ring := range 9 {
		away := 16 * float64(ring)
		cost := 6 * float64(ring)
		for _, dy := range []float64{0, -away, away} {
			if ring == 0 && dy != 0 {
				continue
			}
			list = append(list,
				spot{l.x + 11, l.y + 4 + dy, l.x + 11, cost, "start"},
				spot{l.x - 11 - width, l.y + 4 + dy, l.x - 11, cost + 1, "end"},
				spot{l.x - width/2, l.y - 12 + min(dy, 0), l.x, cost + 2, "middle"},
				spot{l.x - width/2, l.y + 20 + max(dy, 0), l.x, cost + 2, "middle"})
		}
	}
	return list
}
