package report

import (
	"fmt"
	"html/template"
	"strings"

	"cedewright/cmd/internal/study"
	"cedewright/market"
	"cedewright/optimize"
)

// pricesOf gives the explained prices of a programme; nil when they were not worked out.
func pricesOf(a study.Appraised, name string) []optimize.ExplainedPrice {
	for i, p := range a.Programmes {
		if p.Programme.Name == name && i < len(a.Prices) {
			return a.Prices[i]
		}
	}
	return nil
}

// priceTable shows how the prices of a programme's excess treaties come about, for 100 % of each.
func priceTable(prices []optimize.ExplainedPrice) textTable {
	t := textTable{Title: "How the prices come about, a year for 100 % of each treaty", Head: []string{"treaty", "recovery", "asked by the curve", "premium", "multiple", "rate on line", "quotes allow", "reinstatement", "brokerage"}}
	var amounts []float64
	for _, p := range prices {
		amounts = append(amounts, p.Base, p.Expected)
	}
	u := unitOf(amounts...)
	money := func(x float64) string {
		if !finite(x) {
			return "–"
		}
		return u.amount(x)
	}
	for _, p := range prices {
		multiple := "–"
		if finite(p.Multiple) {
			multiple = fixed(p.Multiple, 2)
		}
		t.Rows = append(t.Rows, []string{clean(p.Treaty), money(p.Expected), money(p.Distorted), money(p.Base), multiple, Percent(p.RateOnLine), allowedRates(p.Allowed), money(p.Reinstatement), money(p.Brokerage)})
	}
	return t
}

// allowedRates writes an interval of rates on line.
func allowedRates(i *market.Interval) string {
	if i == nil || !finite(i.Low) || !finite(i.High) {
		return "–"
	}
	return strings.TrimSuffix(percentTo(i.Low, 2, false), " %") + "–" + percentTo(i.High, 2, false)
}

// pricePicture draws a price by thin layers: along the year's recovery, how likely each part is paid, and above it what the curve adds. Areas are money:
// the lower one the expected recovery, the upper one what is asked beyond it.
func pricePicture(p optimize.ExplainedPrice, currency string) string {
	if len(p.Slices) == 0 || !finite(p.Distorted) {
		return ""
	}
	top := 0.0
	for _, s := range p.Slices {
		top = max(top, s.Price/(s.To-s.From))
	}
	c := newChart(480, 260, usual, moneyAxis(0, p.Slices[len(p.Slices)-1].To, "recovery of a year", currency), axis{low: 0, high: upTo(top), label: "probability, price", format: Percent})
	for _, s := range p.Slices {
		width := s.To - s.From
		title := fmt.Sprintf("%s to %s: hit %s, expected %s, asked %s", Money(s.From), Money(s.To), ReturnPeriod(s.Hit), Money(s.Expected), Money(s.Price))
		c.block("block-other", title, s.From, s.To, 0, s.Expected/width)
		c.block("block-best", title, s.From, s.To, s.Expected/width, s.Price/width)
	}
	return c.svg("Price of "+p.Treaty+" by thin layers", fmt.Sprintf("Expected recovery %s, asked %s a year for 100 %%", Money(p.Expected), Money(p.Distorted)))
}

// block fills a rectangle given in values.
func (c *chart) block(class, title string, x1, x2, y1, y2 float64) {
	left, right, low, high := c.x.at(x1), c.x.at(x2), c.y.at(y1), c.y.at(y2)
	fmt.Fprintf(&c.body, `<g><title>%s</title><rect class="%s" x="%s" y="%s" width="%s" height="%s"/></g>`, escape(title), class, place(left), place(high), place(right-left), place(low-high))
}

// pricePanels gives the pictures of all prices, each with its treaty's name.
func pricePanels(prices []optimize.ExplainedPrice, currency string) template.HTML {
	text := ""
	for _, p := range prices {
		if picture := pricePicture(p, currency); picture != "" {
			text += `<figure><figcaption>` + escape(clean(p.Treaty)) + `</figcaption>` + picture + `</figure>`
		}
	}
	return template.HTML(text) // built of escaped parts
}

// pricesJSON writes the explained prices of all programmes.
func pricesJSON(a study.Appraised) []object {
	list := []object{}
	for i, prices := range a.Prices {
		list = append(list, object{{"programme", a.Programmes[i].Programme.Name}, {"treaties", objects(prices, func(p optimize.ExplainedPrice) object {
			o := object{
				{"name", p.Treaty}, {"expected_recovery", number(p.Expected)}, {"asked", number(p.Distorted)}, {"base_premium", number(p.Base)}, {"multiple", number(p.Multiple)},
				{"rate_on_line", number(p.RateOnLine)}, {"reinstatement_premium", number(p.Reinstatement)}, {"brokerage", number(p.Brokerage)}, {"probability", number(p.MostProbability)},
			}
			if p.Allowed != nil {
				o = append(o, field{"allowed_by_quotes", object{{"low", number(p.Allowed.Low)}, {"high", number(p.Allowed.High)}}})
			}
			slices := make([]object, 0, len(p.Slices)) // an empty list, not null
			for _, s := range p.Slices {
				slices = append(slices, object{{"from", number(s.From)}, {"to", number(s.To)}, {"probability", number(s.Hit)}, {"expected_recovery", number(s.Expected)}, {"asked", number(s.Price)}})
			}
			return append(o, field{"thin_layers", slices})
		})}})
	}
	return list
}
