package report

import (
	"fmt"
	"math"
	"slices"
	"strings"

	"cedewright/cmd/internal/study"
	"cedewright/optimize"
	"cedewright/portfolio/treaty"
)

// panel is what programmes do about one subject: the layers of each, drawn side by side on one axis.
type panel struct {
	title    string
	unit     string                    // what the money axis counts: "loss of one event"
	scale    []float64                 // loss exceeded once in each of study.ReturnPeriods; nil = not known
	treaties [][]optimize.TreatyFigure // by programme
}

// panels groups the excess treaties of programmes by kind and subject, in the order in which they stand. scales gives the losses at return
// periods by programme and treaty.
func panels(all []optimize.Appraisal, scales [][][]float64) []panel {
	var list []panel
	index := map[string]int{}
	for k, a := range all {
		for i, f := range a.Treaties {
			t := f.Terms
			if t.Placed() == 0 || t.Kind == treaty.QuotaShare {
				continue
			}
			key := t.Kind.String() + "\x00" + strings.Join(slices.Sorted(slices.Values(t.Classes)), "\x00") + "\x01" + strings.Join(slices.Sorted(slices.Values(t.Perils)), "\x00")
			at, ok := index[key]
			if !ok {
				at = len(list)
				index[key] = at
				list = append(list, panel{title: subject(t), unit: unitWords(t.Kind), treaties: make([][]optimize.TreatyFigure, len(all))})
			}
			list[at].treaties[k] = append(list[at].treaties[k], f)
			if k < len(scales) && i < len(scales[k]) && scales[k][i] != nil {
				list[at].scale = scales[k][i]
			}
		}
	}
	return list
}

func unitWords(k treaty.Kind) string {
	switch k {
	case treaty.RiskExcess:
		return "loss of one risk"
	case treaty.AggregateExcess:
		return "losses of one year"
	}
	return "loss of one event"
}

// top gives the highest money that the layers of a panel reach; an unlimited layer is drawn half as high again as it starts.
func (p panel) top() float64 {
	top := 0.0
	for _, figures := range p.treaties {
		for _, f := range figures {
			if math.IsInf(f.Terms.Limit, 1) {
				top = max(top, 1.5*f.Terms.Retention, 1)
			} else {
				top = max(top, f.Terms.Retention+f.Terms.Limit)
			}
		}
	}
	return top
}

// Sizes of a panel of layers.
const (
	panelWidth  = 480.0
	panelHeight = 380.0
	blockWidth  = 58.0 // of a layer that is placed in full
)

// towersPicture draws the layers of programmes: a panel for each subject, a column for each programme. Height is money, width the share
// placed; the right axis says how often the loss is exceeded.
func towersPicture(currency string, scales [][][]float64, all ...optimize.Appraisal) string {
	var b strings.Builder
	for _, p := range panels(all, scales) {
		fmt.Fprintf(&b, `<figure class="panel"><figcaption>%s</figcaption>%s</figure>`, escape(sentence(p.title)), p.picture(currency, all))
	}
	return b.String()
}

func sentence(text string) string {
	r := []rune(text)
	if len(r) == 0 {
		return ""
	}
	return strings.ToUpper(string(r[:1])) + string(r[1:])
}

func (p panel) picture(currency string, all []optimize.Appraisal) string {
	room := frame{left: 62, right: 68, top: 22, bottom: 30}
	if p.scale == nil {
		room.right = 26
	}
	c := newChart(panelWidth, panelHeight, room, axis{}, moneyAxis(0, upTo(p.top()), p.unit, currency))
	c.periods(p.scale)
	width := (c.x.to - c.x.from) / float64(len(all))
	var told []string
	for k, a := range all {
		left := c.x.from + width*float64(k) + 10
		class := "block-other"
		switch k {
		case len(all) - 1:
			class = "block-best"
		case 0:
			class = "block-start"
		}
		c.text("tick", left, c.height-10, "start", shortened(a.Programme.Name, width-6, tickSize))
		if len(p.treaties[k]) == 0 {
			c.text("tick", left+4, c.y.from-8, "start", "none")
			told = append(told, a.Programme.Name+": none")
			continue
		}
		told = append(told, a.Programme.Name+": "+c.layers(class, left, left+width-10, p.treaties[k]))
	}
	return c.svg("Layers: "+p.title+", "+p.unit, strings.Join(told, "; "))
}

// layers draws the blocks of one programme with their terms beside them, and tells them in words.
func (c *chart) layers(class string, left, right float64, figures []optimize.TreatyFigure) string {
	figures = slices.Clone(figures)
	slices.SortStableFunc(figures, func(a, b optimize.TreatyFigure) int {
		switch {
		case a.Terms.Retention > b.Terms.Retention:
			return -1
		case a.Terms.Retention < b.Terms.Retention:
			return 1
		}
		return 0
	})
	var told []string
	next := math.Inf(-1) // where the next text may stand
	for i, f := range figures {
		t := f.Terms
		low, high := c.y.at(t.Retention), c.y.at(t.Retention+t.Limit)
		shift := 0.0
		for _, o := range figures[:i] { // layers that overlap share the width
			if t.Retention < o.Terms.Retention+o.Terms.Limit && o.Terms.Retention < t.Retention+t.Limit {
				shift += o.Terms.Share
			}
		}
		from := left + blockWidth*min(shift, 1-min(t.Share, 1))
		fmt.Fprintf(&c.body, `<g><title>%s</title>`, escape(t.Name+": "+t.Describe(Terms)))
		c.rectangle("unplaced", left, high, blockWidth, low-high)
		c.rectangle(class, from, high, blockWidth*t.Share, low-high)
		c.body.WriteString("</g>")
		c.share(t.Share, left, from, (low+high)/2+4, low-high)
		text := Terms(t.Limit) + " xs " + Terms(t.Retention)
		y := max((low+high)/2+4, next)
		if y-4 > low || y-4 < high {
			c.line("leader", left+blockWidth, (low+high)/2, left+blockWidth+7, y-4)
		}
		c.text("note", left+blockWidth+9, y, "start", shortened(text, right-left-blockWidth-9, tickSize))
		next = y + 14
		told = append(told, fmt.Sprintf("%s, %s placed", text, percentOf(t.Share)))
	}
	return strings.Join(told, ", ")
}

// share writes the share placed into the wider of the two parts of a block that is high enough.
func (c *chart) share(share, left, from, y, height float64) {
	if share >= 1 || height < 15 {
		return
	}
	if from > left || share > 0.5 {
		c.text("share", from+3, y, "start", percentOf(share))
		return
	}
	c.text("share", left+blockWidth-3, y, "end", percentOf(share))
}

func percentOf(x float64) string { return significant(100*x, 4) + " %" }

// shortened cuts a text that would be drawn wider than the room for it.
func shortened(text string, room, size float64) string {
	r := []rune(clean(text))
	for n := len(r); n > 1; n-- {
		short := string(r[:n])
		if n < len(r) {
			short = strings.TrimRight(short, " ") + "…"
		}
		if textWidth(short, size) <= room {
			return short
		}
	}
	return string(r[:min(len(r), 1)])
}

// periods draws the right axis: the loss exceeded once in so many years.
func (c *chart) periods(scale []float64) {
	if scale == nil {
		return
	}
	c.line("edge", c.x.to, c.y.from, c.x.to, c.y.to)
	last := math.Inf(1)
	for k, loss := range scale {
		at := c.y.at(loss)
		if !(loss > 0) || loss > c.y.high || last-at < 14 {
			continue
		}
		c.line("edge", c.x.to, at, c.x.to+5, at)
		c.text("tick", c.x.to+8, at+4, "start", "1 in "+significant(study.ReturnPeriods[k], 4))
		last = at
	}
	c.text("tick", c.width-4, 12, "end", "exceeded")
}
