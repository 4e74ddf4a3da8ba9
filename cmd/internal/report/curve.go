package report

import (
	"fmt"
	"math"
	"slices"
	"strings"

	"cedewright/cmd/internal/study"
	"cedewright/market"
)

// curvePicture draws a market curve on probability scales with its quotes, and below it how far each quote lies from the curve.
func curvePicture(f study.CurveFit) string {
	low := 0.001
	quoted := []market.FittedQuote{}
	from, to := 0.0, 1.0 // where quotes speak
	if f.Chosen != nil {
		quoted, from, to = f.Chosen.Quotes, f.Chosen.LowestTail, f.Chosen.HighestTail
		for low > from && low > 1e-5 {
			low /= 2
		}
	}
	floor := low
	for floor > f.Curve.Distortion.At(low) && floor > 1e-6 {
		floor /= 2
	}
	height, room := 400.0, usual
	if len(quoted) > 0 {
		height, room.bottom = 510, 176
	}
	across := axis{low: low, high: 1, scale: logarithmic, format: Percent}
	up := axis{low: floor, high: 1, scale: logarithmic, label: "price over limit", format: Percent}
	if len(quoted) == 0 {
		across.label = probabilityLabel
	}
	c := newChart(pictureWidth, height, room, across, up)
	c.band("allowed", f.BandAt, f.Band, low)
	c.band("resampled", f.BandAt, f.Resampled, low)
	c.curve("diagonal", []float64{low, 1}, []float64{low, 1})
	for _, part := range []struct {
		class    string
		from, to float64
	}{{"beyond", low, max(from, low)}, {"front", max(from, low), min(to, 1)}, {"beyond", min(to, 1), 1}} {
		if part.to > part.from {
			c.distortion(part.class, f.Curve.Distortion, part.from, part.to)
		}
	}
	for _, q := range quoted {
		c.quote(q, f.Curve.Brokerage, low)
	}
	c.reconciled(f, low)
	labels := []label{{x: c.x.at(0.03), y: c.y.at(0.03), text: "expected loss", class: "quiet-text"}}
	if at := 0.3; to >= at || f.Chosen == nil {
		labels = append(labels, label{x: c.x.at(at), y: c.y.at(f.Curve.Distortion.At(at)), text: f.Curve.Distortion.String(), class: "main-text"})
	} else {
		labels = append(labels, label{x: c.x.at(math.Sqrt(from * to)), y: c.y.at(f.Curve.Distortion.At(math.Sqrt(from * to))), text: f.Curve.Distortion.String(), class: "main-text"})
	}
	if from > low*1.5 {
		at := math.Sqrt(low * from)
		labels = append(labels, label{x: c.x.at(at), y: c.y.at(f.Curve.Distortion.At(at)), text: "extrapolated", class: "quiet-text"})
	}
	c.labels(labels)
	if len(quoted) > 0 {
		c.residuals(quoted, low)
	}
	return c.svg("Market curve "+f.Curve.Name+": "+f.Curve.Distortion.String(),
		fmt.Sprintf("Price of a thin layer by the probability that it is hit, %s", Count(len(quoted), "quote", "quotes")))
}

// band fills the area between the ends of intervals, from a probability on.
func (c *chart) band(class string, at []float64, band []market.Interval, low float64) {
	if len(band) != len(at) || len(band) == 0 {
		return
	}
	var there, back []string
	for i, s := range at {
		if s < low {
			continue
		}
		x := place(c.x.at(s))
		there = append(there, x+","+place(c.y.at(band[i].High)))
		back = append(back, x+","+place(c.y.at(max(band[i].Low, c.y.low))))
	}
	slices.Reverse(back)
	fmt.Fprintf(&c.body, `<polygon class="%s" points="%s"/>`, class, strings.Join(append(there, back...), " "))
}

const probabilityLabel = "yearly probability that the layer is hit"

// distortion draws g between two probabilities.
func (c *chart) distortion(class string, g market.Distortion, from, to float64) {
	const points = 160
	var xs, ys []float64
	for i := range points + 1 {
		s := from * math.Pow(to/from, float64(i)/points)
		xs, ys = append(xs, s), append(ys, g.At(s))
	}
	c.curve(class, xs, ys)
}

// middle is where a quote stands on the probability axis: between exhaustion and attachment, evenly on the scale.
func middle(q market.FittedQuote, low float64) float64 {
	return math.Sqrt(max(q.Exhaustion, low) * max(q.Attachment, low))
}

// quote draws a quote at its price after brokerage, spanning from exhaustion to attachment.
func (c *chart) quote(q market.FittedQuote, brokerage, low float64) {
	price := q.RateOnLine * (1 - brokerage)
	class := "quote"
	if q.Weight == 0 {
		class = "unused"
	}
	from, to, at := c.x.at(max(q.Exhaustion, low)), c.x.at(q.Attachment), c.y.at(price)
	c.line("span", from, at, to, at)
	c.avoidLine(from, at, to, at)
	c.mark(class, "dot", middle(q, low), price, fmt.Sprintf("%s: quoted %s, fitted %s, multiple %s", q.Name, Percent(q.RateOnLine), Percent(q.Fitted), fixed(q.Multiple, 2)))
}

// reconciled marks, with a cross, the price at which each quote at fault would have to stand for one curve to price all of them.
func (c *chart) reconciled(f study.CurveFit, low float64) {
	if f.Consistency == nil {
		return
	}
	for _, change := range f.Consistency.LeastTotal {
		if change.Relative == 0 {
			continue
		}
		x, y := c.x.at(middle(market.FittedQuote{Quote: change.Quote}, low)), c.y.at(change.Rate*(1-f.Curve.Brokerage))
		fmt.Fprintf(&c.body, `<g class="fault"><title>%s</title><path d="M%s %sl7 7m0-7l-7 7"/></g>`,
			escape(fmt.Sprintf("%s: %s would make the quotes consistent", change.Quote.Name, percentTo(change.Relative, 1, true))), place(x-3.5), place(y-3.5))
	}
}

// residuals draws, on the same probabilities, by how much the curve asks more than each quote.
func (c *chart) residuals(quoted []market.FittedQuote, low float64) {
	most := 0.01
	for _, q := range quoted {
		if finite(q.Residual) {
			most = max(most, math.Abs(q.Residual))
		}
	}
	most = upTo(most * 1.1)
	across := axis{low: low, high: 1, scale: logarithmic, label: probabilityLabel, format: Percent}
	below := newChart(c.width, c.height, frame{left: usual.left, right: usual.right, top: c.height - 126, bottom: 50}, across,
		axis{low: -most, high: most, label: "residual", format: func(x float64) string {
			text := significant(100*x, 2) + " %"
			if x > 0 {
				return "+" + text
			}
			return text
		}})
	below.line("edge", below.x.from, below.y.at(0), below.x.to, below.y.at(0))
	for _, q := range quoted {
		if !finite(q.Residual) {
			continue
		}
		at := below.x.at(middle(q, low))
		below.line("stem", at, below.y.at(0), at, below.y.at(q.Residual))
		class := "quote"
		if q.Weight == 0 {
			class = "unused"
		}
		below.mark(class, "dot", middle(q, low), q.Residual, fmt.Sprintf("%s: the curve asks %s against the quote", q.Name, percentTo(q.Residual, 1, true)))
	}
	c.body.WriteString(below.body.String())
}
