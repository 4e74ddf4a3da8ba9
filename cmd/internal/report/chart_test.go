package report

import (
	"fmt"
	"math"
	"strings"
	"testing"
)

func TestNiceNumbers(t *testing.T) {
	for x, want := range map[float64]float64{0.3: 0.5, 1: 1, 1.1: 2, 3: 5, 7: 10, 0: 1, -4: 1, math.Inf(1): 1} {
		if got := niceStep(x); got != want {
			t.Errorf("step for %v is %v, want %v", x, got, want)
		}
	}
	for x, want := range map[float64]float64{103: 120, 100: 100, 0.07: 0.07, 0: 1, -1: 1} {
		if got := upTo(x); math.Abs(got-want) > 1e-12*want { // a product of round numbers
			t.Errorf("an axis to %v ends at %v, want %v", x, got, want)
		}
	}
	if got := upTo(math.NaN()); got != 1 {
		t.Errorf("an axis to no number ends at %v", got)
	}
}

func TestAxis(t *testing.T) {
	a := axis{low: 0, high: 103, from: 0, to: 100}
	if ticks := a.ticks(5); fmt.Sprint(ticks) != "[0 50 100]" {
		t.Errorf("ticks %v", ticks)
	}
	if a.at(-5) != 0 || a.at(1e9) != 100 || a.at(51.5) != 50 || a.at(math.NaN()) != 0 {
		t.Errorf("places %v %v %v %v", a.at(-5), a.at(1e9), a.at(51.5), a.at(math.NaN()))
	}
	l := axis{low: 0.01, high: 1, from: 0, to: 100, scale: logarithmic}
	if ticks := l.ticks(5); len(ticks) != 7 || ticks[0] != 0.01 || ticks[6] != 1 {
		t.Errorf("logarithmic ticks %v", ticks)
	}
	if got := l.at(0.1); math.Abs(got-50) > 1e-9 { // logarithms
		t.Errorf("a tenth stands at %v", got)
	}
	if got := l.at(0); got != 0 {
		t.Errorf("zero stands at %v", got)
	}
	if ticks := (axis{low: 1e-6, high: 1, scale: logarithmic}).ticks(5); len(ticks) != 7 {
		t.Errorf("six decades have ticks %v", ticks)
	}
	for _, odd := range []axis{{low: 0, high: 1, scale: logarithmic}, {low: 1, high: math.Inf(1), scale: logarithmic}} {
		if ticks := odd.ticks(5); ticks != nil {
			t.Errorf("an axis from %v to %v has ticks %v", odd.low, odd.high, ticks)
		}
	}
	if flat := (axis{low: 3, high: 3, from: 10, to: 20}); flat.at(3) != 15 {
		t.Errorf("an axis without length puts its value at %v", flat.at(3))
	}
}

// TestLabelsKeepApart: labels of many points crowded together meet neither each other nor a mark nor the edge.
func TestLabelsKeepApart(t *testing.T) {
	numbers := func(x float64) string { return significant(x, 4) }
	c := newChart(860, 430, usual, axis{low: 0, high: 10, label: "x", format: numbers}, axis{low: 0, high: 10, label: "y", format: numbers})
	var list []label
	for i := range 6 {
		x, y := 5+0.1*float64(i), 5+0.05*float64(i%2)
		c.mark("other", "triangle", x, y, "")
		list = append(list, label{x: c.x.at(x), y: c.y.at(y), text: fmt.Sprintf("programme %d", i)})
	}
	list = append(list, label{x: c.x.at(10), y: c.y.at(10), text: "in the corner at the top"}, label{x: c.x.at(0), y: c.y.at(0), text: "in the corner below"}, label{})
	before := len(c.taken)
	c.labels(list)
	placed := c.taken[before:]
	if len(placed) != 8 {
		t.Fatalf("%d labels", len(placed))
	}
	for i, b := range placed {
		if b.left < 0 || b.top < 0 || b.right > c.width || b.bottom > c.height {
			t.Errorf("label %d lies outside: %v", i, b)
		}
		for j, o := range c.taken[:before+i] {
			if b.meets(o) {
				t.Errorf("label %d meets the box %d", i, j)
			}
		}
	}
}

func TestShapesDiffer(t *testing.T) {
	seen := map[string]string{}
	for _, shape := range []string{"circle", "square", "triangle", "diamond", "dot"} {
		drawn := shapeOf(shape, 10, 10)
		if other, ok := seen[drawn]; ok {
			t.Errorf("%s is drawn like %s", shape, other)
		}
		seen[drawn] = shape
	}
}

func TestShortened(t *testing.T) {
	if got := shortened("best found", 500, tickSize); got != "best found" {
		t.Errorf("a short name becomes %q", got)
	}
	got := shortened(strings.Repeat("long ", 20), 100, tickSize)
	if !strings.HasSuffix(got, "…") || textWidth(got, tickSize) > 100 {
		t.Errorf("a long name becomes %q", got)
	}
	if got := shortened("", 10, tickSize); got != "" {
		t.Errorf("no name becomes %q", got)
	}
}
