package report

import (
	"fmt"
	"html"
	"math"
	"strings"

	"cedewright/cmd/internal/study"
	"cedewright/optimize"
	"cedewright/portfolio/treaty"
)

// column is the treaties of a programme that answer the same thing, drawn one above the other.
type column struct {
	name     string
	treaties []optimize.TreatyFigure
	scale    []float64 // loss exceeded once in each of study.ReturnPeriods; nil = not known
}

// columnsOf groups treaties by kind and subject, in the order in which they stand.
func columnsOf(a optimize.Appraisal, scales [][]float64) []column {
	var list []column
	index := map[string]int{}
	for k, f := range a.Treaties {
		t := f.Terms
		if t.Placed() == 0 || t.Kind == treaty.QuotaShare || math.IsInf(t.Limit, 1) {
			continue
		}
		what := t.Perils
		if len(what) == 0 {
			what = t.Classes
		}
		if len(what) == 0 {
			what = []string{"all"}
		}
		unit := map[treaty.Kind]string{treaty.EventExcess: "per event", treaty.RiskExcess: "per risk", treaty.AggregateExcess: "per year"}[t.Kind]
		name := strings.Join(what, ", ") + ", " + unit
		key := name + "|" + strings.Join(t.Classes, ",")
		i, ok := index[key]
		if !ok {
			i = len(list)
			index[key] = i
			list = append(list, column{name: name})
			if k < len(scales) {
				list[i].scale = scales[k]
			}
		}
		list[i].treaties = append(list[i].treaties, f)
	}
	return list
}

// towersPicture draws the layers of programmes on one money axis, drawn by square root so that low layers can be seen beside high ones:
// height is money, width is the share placed, beside each layer stand its terms and how often it is hit, and along each column the return periods
// of its loss.
func towersPicture(currency string, scales [][][]float64, all ...optimize.Appraisal) string {
	top := 0.0
	for _, a := range all {
		for _, c := range columnsOf(a, nil) {
			for _, f := range c.treaties {
				top = max(top, f.Terms.Retention+f.Terms.Limit)
			}
		}
	}
	if top == 0 {
		return ""
	}
	var parts []string
	columns := 1
	for _, a := range all {
		columns = max(columns, len(columnsOf(a, nil)))
	}
	for k, a := range all {
		var scale [][]float64
		if first := len(scales) - len(all); first+k >= 0 { // the best alone stands when there is no start programme
			scale = scales[first+k]
		}
		parts = append(parts, towerPicture(currency, a, scale, upTo(top), columns))
	}
	return strings.Join(parts, "")
}

const (
	blockWidth  = 66.0
	columnWidth = 252.0
)

func towerPicture(currency string, a optimize.Appraisal, scales [][]float64, top float64, room int) string {
	columns := columnsOf(a, scales)
	width := marginLeft + marginRight + columnWidth*float64(room)
	height := 460.0
	y := moneyAxis(0, top, "loss of the event, risk or year", currency)
	y.scale = squareRoot
	c := &chart{width: width, height: height, y: y}
	c.y.from, c.y.to = height-marginBottom, marginTop
	c.x.from, c.x.to = marginLeft, width-marginRight
	last := math.Inf(1)
	for _, m := range append([]float64{0, top / 50, top / 20, top / 10}, c.y.ticks(8)...) {
		at := c.y.at(m)
		if math.Abs(last-at) < 15 {
			continue
		}
		c.line("grid", c.x.from, at, c.x.to, at)
		c.text("tick", c.x.from-8, at+4, "end", c.y.format(m))
		last = at
	}
	fmt.Fprintf(&c.body, `<text class="axis" transform="translate(14 %s) rotate(-90)" text-anchor="middle">%s</text>`, place((c.y.from+c.y.to)/2), html.EscapeString(c.y.label))
	var quota []string
	for _, f := range a.Treaties {
		if f.Terms.Kind == treaty.QuotaShare && f.Terms.Placed() > 0 {
			quota = append(quota, fmt.Sprintf("%s: %s ceded", f.Terms.Name, Percent(f.Terms.Cession)))
		}
	}
	for k, col := range columns {
		left := marginLeft + columnWidth*float64(k) + 46
		c.periods(left-6, col.scale)
		var labels []label
		for _, f := range col.treaties {
			low, high := c.y.at(f.Terms.Retention), c.y.at(f.Terms.Retention+f.Terms.Limit)
			placed := blockWidth * f.Terms.Share
			fmt.Fprintf(&c.body, `<g><title>%s</title><rect class="unplaced" x="%s" y="%s" width="%s" height="%s"/><rect class="block" x="%s" y="%s" width="%s" height="%s"/></g>`,
				html.EscapeString(f.Terms.Name+": "+f.Terms.Describe(Money)), place(left), place(high), place(blockWidth), place(low-high), place(left), place(high), place(placed), place(low-high))
			middle := (low + high) / 2
			labels = append(labels, label{left + blockWidth - 4, middle - 7, fmt.Sprintf("%s xs %s", Money(f.Terms.Limit), Money(f.Terms.Retention))})
			labels = append(labels, label{left + blockWidth - 4, middle + 8, fmt.Sprintf("%s, hit %s", Percent(f.Terms.Share), ReturnPeriod(f.AttachmentProbability.Value))})
		}
		c.labels(labels)
		c.text("tick", left-40, height-28, "start", col.name)
	}
	if len(columns) == 0 {
		c.text("label", (c.x.from+c.x.to)/2, height/2, "middle", "no excess cover")
	}
	c.text("axis", marginLeft+10, height-8, "start", strings.Join(quota, "; "))
	return fmt.Sprintf(`<figure class="tower"><figcaption>%s</figcaption>%s</figure>`, html.EscapeString(a.Programme.Name),
		c.svg("Layers of “"+a.Programme.Name+"”", "Height is money, filled width the share placed; left of each column the return periods of its loss, beside each layer its terms and how often it is hit"))
}

// periods marks, beside a column, the losses that are exceeded once in so many years.
func (c *chart) periods(x float64, scale []float64) {
	last := math.Inf(1)
	for k, loss := range scale {
		at := c.y.at(loss)
		if loss <= 0 || loss > c.y.high || last-at < 13 {
			continue
		}
		c.line("period-mark", x-4, at, x, at)
		c.text("period", x-6, at+4, "end", significant(study.ReturnPeriods[k], 4)+" y")
		last = at
	}
}
