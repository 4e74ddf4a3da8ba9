package report

import (
	"fmt"
	"io"
	"math"
	"strings"

	"cedewright/cmd/internal/study"
	"cedewright/optimize"
)

// moneyAxis gives an axis from low to high with round ends, named with unit and currency.
func moneyAxis(low, high float64, name, currency string) axis {
	u := unitFor(max(math.Abs(low), math.Abs(high)))
	words := map[string]string{"bn": "billion ", "m": "million ", "k": "thousand ", "": ""}
	return axis{low: low, high: high, label: fmt.Sprintf("%s, %s%s", name, words[u.suffix], currency), format: func(x float64) string {
		return significant(x/u.factor, 4)
	}}
}

// frontierPicture draws ceded margin against capital relief with the programmes in hand.
func frontierPicture(s study.Searched) string {
	front := s.Result.Frontier
	right, top := 0.0, 0.0
	shown := append([]optimize.Appraisal{s.Start, s.Result.Best}, front...)
	for _, p := range s.Programmes {
		shown = append(shown, p)
	}
	left := 0.0
	for _, p := range shown {
		right, top = max(right, p.Capital[0].Relief.Value), max(top, p.CededMargin.Value)
		left = min(left, p.Capital[0].Relief.Value)
	}
	if left < 0 {
		left = -upTo(-left)
	}
	c := newChart(760, 420,
		moneyAxis(left, upTo(right*1.02), "capital relief ("+s.NoCover.Capital[0].Standard+")", s.Currency),
		moneyAxis(0, upTo(top*1.05), "ceded margin a year", s.Currency))
	// Where a margin buys relief at just the cost of capital.
	reach := min(c.x.high, c.y.high/max(s.CostOfCapital, 1e-12))
	c.curve("own", []float64{0, reach}, []float64{0, reach * s.CostOfCapital})
	var xs, ys []float64
	for _, p := range front {
		xs, ys = append(xs, p.Capital[0].Relief.Value), append(ys, p.CededMargin.Value)
	}
	if len(xs) > 0 {
		c.curve("front", xs, ys)
	}
	for _, p := range front {
		c.mark("front-point", "dot", p.Capital[0].Relief.Value, p.CededMargin.Value,
			fmt.Sprintf("%s: relief %s, margin %s", p.Programme.Name, Estimated(p.Capital[0].Relief), Estimated(p.CededMargin)))
	}
	var labels []label
	for _, p := range s.Programmes {
		class, shape := "other", "triangle"
		switch p.Programme.Name {
		case s.Result.Best.Programme.Name:
			class, shape = "best", "diamond"
		case s.NoCover.Programme.Name:
			class, shape = "none", "circle"
		case s.Start.Programme.Name:
			class, shape = "start", "square"
		}
		x, y := p.Capital[0].Relief.Value, p.CededMargin.Value
		c.mark(class, shape, x, y, fmt.Sprintf("%s: relief %s, margin %s", p.Programme.Name, Estimated(p.Capital[0].Relief), Estimated(p.CededMargin)))
		labels = append(labels, label{c.x.at(x), c.y.at(y), p.Programme.Name})
	}
	labels = append(labels, label{c.x.at(reach * 0.93), c.y.at(reach * 0.93 * s.CostOfCapital), "own cost of capital " + Percent(s.CostOfCapital)})
	c.labels(labels)
	return c.svg("Least ceded margin for each capital relief",
		fmt.Sprintf("%d programmes, from no relief to %s; below the dashed line relief costs less than own capital", len(front), Money(right)))
}

// curvePicture draws a market curve on probability scales with its quotes.
func curvePicture(f study.CurveFit) string {
	low := 0.001
	if f.Chosen != nil {
		for low > f.Chosen.LowestTail && low > 1e-5 {
			low /= 2
		}
	}
	percent := func(x float64) string { return Percent(x) }
	c := newChart(760, 400,
		axis{low: low, high: 1, scale: logarithmic, label: "yearly probability that the layer is hit", format: percent},
		axis{low: low, high: 1, scale: logarithmic, label: "price over limit, after brokerage", format: percent})
	c.curve("diagonal", []float64{low, 1}, []float64{low, 1})
	var xs, ys []float64
	for i := range 201 {
		s := low * math.Pow(1/low, float64(i)/200)
		xs, ys = append(xs, s), append(ys, f.Curve.Distortion.At(s))
	}
	c.curve("front", xs, ys)
	if f.Chosen != nil {
		for _, q := range f.Chosen.Quotes {
			price := q.RateOnLine * (1 - f.Curve.Brokerage)
			title := fmt.Sprintf("%s: quoted %s, fitted %s", q.Name, Percent(q.RateOnLine), Percent(q.Fitted))
			c.line("span", c.x.at(max(q.Exhaustion, low)), c.y.at(price), c.x.at(q.Attachment), c.y.at(price))
			middle := math.Sqrt(max(q.Exhaustion, low) * q.Attachment)
			c.mark("quote", "diamond", middle, price, title)
		}
	}
	c.labels([]label{{c.x.at(0.3), c.y.at(0.3), "expected loss"}, {c.x.at(0.02), c.y.at(f.Curve.Distortion.At(0.02)), f.Curve.Name + ": " + f.Curve.Distortion.String()}})
	return c.svg("Market curve "+f.Curve.Name+" and its quotes",
		"Price of a thin layer by its probability; each quote spans from its exhaustion to its attachment probability")
}

// exceedancePicture draws the annual loss at return periods, gross and net of recoveries.
func exceedancePicture(s study.Searched) string {
	e := s.Curve
	top := e.Gross[len(e.Gross)-1]
	bottom := e.Gross[0]
	for _, net := range e.Net {
		bottom = min(bottom, net[0])
	}
	y := moneyAxis(0, upTo(top), "loss of a year", s.Currency)
	if bottom > top/3 {
		step := niceStep(top / 5)
		y.low = math.Floor(bottom/step) * step
		if y.low == bottom {
			y.low -= step
		}
	}
	c := newChart(760, 380,
		axis{low: e.ReturnPeriods[0], high: e.ReturnPeriods[len(e.ReturnPeriods)-1], scale: logarithmic, label: "return period, years", format: func(x float64) string { return significant(x, 4) }}, y)
	last := len(e.ReturnPeriods) - 1
	c.curve("gross", e.ReturnPeriods, e.Gross)
	at := func(ys []float64, k int) label {
		return label{c.x.at(e.ReturnPeriods[last-k]), c.y.at(ys[last-k]), ""}
	}
	l := at(e.Gross, 1)
	l.text = "gross"
	labels := []label{l}
	for i, net := range e.Net {
		class := "start-line"
		if i == len(e.Net)-1 {
			class = "best-line"
		}
		c.curve(class, e.ReturnPeriods, net)
		l := at(net, 1)
		l.text = "net, " + e.Programmes[i]
		labels = append(labels, l)
	}
	c.labels(labels)
	return c.svg("Loss of a year, gross and net of recoveries",
		"Premiums are left out; the net loss is what stays after the recoveries of the programme")
}

// CurvePictures gives a file for the picture of each curve.
func CurvePictures(curves []study.CurveFit) ([]File, error) {
	var files []File
	for i, f := range curves {
		picture := standalone(curvePicture(f))
		files = append(files, File{Name: fmt.Sprintf("curve-%d-%s.svg", i+1, fileName(f.Curve.Name)), Write: func(w io.Writer) error {
			_, err := io.WriteString(w, picture)
			return err
		}})
	}
	return files, nil
}

// fileName keeps letters and digits of a name.
func fileName(name string) string {
	return strings.Map(func(r rune) rune {
		if r >= 'a' && r <= 'z' || r >= 'A' && r <= 'Z' || r >= '0' && r <= '9' {
			return r
		}
		return '-'
	}, name)
}

// standalone puts the style into a picture that leaves the paper.
func standalone(svg string) string {
	i := strings.Index(svg, "<title>")
	return svg[:i] + "<style>svg{background:#fff;font-family:system-ui,sans-serif;" + lightColours + "}" + pictureStyle + "</style>" + svg[i:] + "\n"
}
