package report

import (
	"fmt"
	"io"
	"math"
	"strings"

	"cedewright/cmd/internal/study"
	"cedewright/optimize"
)

// pictureWidth is the width of a picture as wide as the page.
const pictureWidth = 860.0

// look gives the class and the shape by which a programme is known in every picture.
func look(s study.Searched, name string) (class, shape string) {
	switch name {
	case s.Result.Best.Programme.Name:
		return "best", "diamond"
	case s.NoCover.Programme.Name:
		return "none", "circle"
	case s.Start.Programme.Name:
		return "start", "square"
	}
	return "other", "triangle"
}

// frontierPicture draws ceded margin against capital relief with the programmes in hand.
func frontierPicture(s study.Searched) string {
	front, named := s.Result.Frontier, shownProgrammes(s)
	left, right, bottom, top := 0.0, 0.0, 0.0, 0.0
	for _, p := range append(append([]optimize.Appraisal{}, named...), front...) {
		relief, margin := p.Driving.Relief, p.CededMargin
		left, right = min(left, relief.Value-relief.StandardError), max(right, relief.Value+relief.StandardError)
		bottom, top = min(bottom, margin.Value), max(top, margin.Value)
	}
	downTo := func(x float64) float64 {
		if x < 0 {
			return -upTo(-x)
		}
		return 0
	}
	c := newChart(pictureWidth, 430, usual,
		moneyAxis(downTo(left), upTo(right*1.02), shortened("capital relief ("+driving(s.Appraised, false)+")", 700, labelSize), s.Currency),
		moneyAxis(downTo(bottom), upTo(top*1.08), "ceded margin a year", s.Currency))
	ray := c.ownCapital(s.CostOfCapital)
	var xs, ys []float64
	for _, p := range front {
		xs, ys = append(xs, p.Driving.Relief.Value), append(ys, p.CededMargin.Value)
	}
	if len(xs) > 1 {
		c.curve("front", xs, ys)
	}
	for _, p := range front {
		c.mark("front-point", "dot", p.Driving.Relief.Value, p.CededMargin.Value,
			fmt.Sprintf("%s: relief %s, margin %s, rent %s", Count(len(p.Treaties), "treaty", "treaties"), Estimated(p.Driving.Relief), Estimated(p.CededMargin), rent(p)))
	}
	var labels []label
	for i := len(named) - 1; i >= 0; i-- {
		p := named[i]
		class, shape := look(s, p.Programme.Name)
		x, y := p.Driving.Relief, p.CededMargin
		c.whiskers("whisker", x.Value, y.Value, x.StandardError, y.StandardError)
		c.mark(class, shape, x.Value, y.Value, fmt.Sprintf("%s: relief %s, margin %s, rent %s", p.Programme.Name, Estimated(x), Estimated(y), rent(p)))
		labels = append(labels, label{x: c.x.at(x.Value), y: c.y.at(y.Value), text: p.Programme.Name, class: "strong"})
	}
	if len(front) > 2 {
		k := len(front) * 9 / 10
		labels = append(labels, label{x: c.x.at(xs[k]), y: c.y.at(ys[k]), text: "frontier", class: "main-text"})
	}
	c.labels(append(labels, ray...))
	about := fmt.Sprintf("%s on the frontier; the best found frees %s for a margin of %s a year.", Count(len(front), "programme", "programmes"), Estimated(s.Result.Best.Driving.Relief),
		Estimated(s.Result.Best.CededMargin))
	if len(ray) > 0 {
		about += " Below the dashed line relief costs less than own capital."
	}
	return c.svg("Least ceded margin for each capital relief", about)
}

// ownCapital shades where relief costs less than the cost of own capital and draws the border; it gives the border's label.
func (c *chart) ownCapital(cost float64) []label {
	if !(cost > 0) {
		return nil
	}
	reach := min(c.x.high, c.y.high/cost)
	xs, ys := []float64{0, reach, c.x.high, c.x.high}, []float64{0, reach * cost, min(c.x.high*cost, c.y.high), 0}
	c.area("cheap", xs, ys)
	c.curve("own", xs[:2], ys[:2])
	return []label{{x: c.x.at(reach * 0.8), y: c.y.at(reach * 0.8 * cost), text: "own capital costs " + Percent(cost) + " a year", class: "warm-text"}}
}

// exceedancePicture draws the annual loss at return periods, gross and net of recoveries.
func exceedancePicture(s study.Searched) string {
	e := s.Curve
	if len(e.ReturnPeriods) == 0 || len(e.Gross) != len(e.ReturnPeriods) {
		return ""
	}
	last := len(e.ReturnPeriods) - 1
	top, bottom := e.Gross[last], e.Gross[0]
	for _, net := range e.Net {
		top, bottom = max(top, net[last]), min(bottom, net[0])
	}
	y := moneyAxis(min(0, bottom), upTo(top*1.02), "loss of a year", s.Currency)
	if step := niceStep(top / 5); bottom > top/3 {
		y.low = math.Floor(bottom/step-0.2) * step
	}
	c := newChart(pictureWidth, 380, frame{left: 66, right: 140, top: 14, bottom: 50},
		axis{low: e.ReturnPeriods[0], high: e.ReturnPeriods[last], scale: logarithmic, label: "exceeded once in so many years", format: func(x float64) string { return significant(x, 4) }}, y)
	c.curve("gross", e.ReturnPeriods, e.Gross)
	labels := []label{{x: c.x.to, y: c.y.at(e.Gross[last]), text: "gross"}}
	for i, net := range e.Net {
		class, text := "start-line", "warm-text"
		if i == len(e.Net)-1 {
			class, text = "best-line", "main-text"
		}
		c.curve(class, e.ReturnPeriods, net)
		labels = append(labels, label{x: c.x.to, y: c.y.at(net[last]), text: shortened("net, "+e.Programmes[i], 126, labelSize), class: text})
	}
	c.labels(labels)
	return c.svg("Loss of a year at return periods, gross and net of recoveries",
		fmt.Sprintf("Once in %v years the gross loss exceeds %s. Premiums are left out.", e.ReturnPeriods[last], Money(e.Gross[last])))
}

// CurvePictures gives a file for the picture of each curve.
func CurvePictures(curves []study.CurveFit) []File {
	var files []File
	for i, f := range curves {
		picture := standalone(curvePicture(f))
		files = append(files, File{Name: fmt.Sprintf("curve-%d-%s.svg", i+1, fileName(f.Curve.Name)), Write: func(w io.Writer) error {
			_, err := io.WriteString(w, picture)
			return err
		}}, File{Name: fmt.Sprintf("curve-%d-%s.png", i+1, fileName(f.Curve.Name)), Write: func(w io.Writer) error { return CurvePNG(w, f) }})
	}
	return files
}

// fileName keeps letters and digits of a name, at most 60 of them.
func fileName(name string) string {
	kept := strings.Map(func(r rune) rune {
		if r >= 'a' && r <= 'z' || r >= 'A' && r <= 'Z' || r >= '0' && r <= '9' {
			return r
		}
		return '-'
	}, name)
	return kept[:min(len(kept), 60)]
}
