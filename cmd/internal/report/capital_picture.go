package report

import (
	"fmt"
	"strings"

	"cedewright/cmd/internal/study"
	"cedewright/optimize"
)

// decided gives the programmes between which is decided: no cover, the start and the best found.
func decided(s study.Searched) []optimize.Appraisal {
	list := []optimize.Appraisal{s.NoCover}
	if s.Start.Programme.Name != s.NoCover.Programme.Name {
		list = append(list, s.Start)
	}
	return append(list, s.Result.Best)
}

// capitalPicture draws required capital by standard: gross, which is no cover, beside net of the start and the best, with own funds for comparison. Every bar
// bears its programme's name and its figure, so that colour need not tell it.
func capitalPicture(s study.Searched) string {
	all := decided(s)
	top := s.OwnFunds
	for _, p := range all {
		for _, f := range p.Capital {
			top = max(top, f.Net.Value+max(f.Net.StandardError, 0))
		}
	}
	const bar, group = 22.0, 34.0
	standards := all[0].Capital
	height := float64(len(standards))*(group+bar*float64(len(all))) + 66
	c := newChart(pictureWidth, height, frame{left: 150, right: 170, top: 12, bottom: 50}, moneyAxis(0, upTo(top*1.02), "required capital", s.Currency), axis{})
	if s.OwnFunds > 0 {
		c.line("own", c.x.at(s.OwnFunds), c.y.from, c.x.at(s.OwnFunds), c.y.to)
		c.text("note warm-text", c.x.at(s.OwnFunds)+6, c.y.to+12, "start", "own funds "+Terms(s.OwnFunds))
	}
	u := unitOfProgrammes(all)
	var told []string
	y := c.y.to
	for i, standard := range standards {
		c.text("label strong", c.x.from, y+20, "start", "standard “"+shortened(standard.Standard, 400, labelSize)+"”")
		y += group - 6
		var figures []string
		for _, p := range all {
			figure := c.capitalBar(s, p, i, y, bar, u)
			figures = append(figures, p.Programme.Name+" "+figure)
			y += bar
		}
		told = append(told, standard.Standard+": "+strings.Join(figures, ", "))
		y += 6
	}
	about := "By standard, with no cover (gross) and net of programmes. " + strings.Join(told, "; ") + "."
	if s.OwnFunds > 0 {
		about += " Own funds are " + Terms(s.OwnFunds) + "."
	}
	return c.svg(fmt.Sprintf("Required capital under %s, gross and net", Count(len(standards), "standard", "standards")), about)
}

// capitalBar draws the requirement of one programme under one standard, and gives its figure.
func (c *chart) capitalBar(s study.Searched, p optimize.Appraisal, standard int, y, height float64, u unit) string {
	class, _ := look(s, p.Programme.Name)
	net := p.Capital[standard].Net
	c.text("tick", c.x.from-10, y+14, "end", shortened(p.Programme.Name, c.x.from-14, tickSize))
	c.rectangle("bar-"+class, c.x.from, y+3, c.x.at(net.Value)-c.x.from, height-7)
	if known(net) {
		middle := y + 3 + (height-7)/2
		c.line("whisker", c.x.at(net.Value-net.StandardError), middle, c.x.at(net.Value+net.StandardError), middle)
	}
	text := u.estimate(net)
	if p.Capital[standard].Binding && len(p.Capital) > 1 {
		text += ", binding"
	}
	c.text("note", c.x.at(net.Value+max(net.StandardError, 0))+7, y+14, "start", text)
	return text
}
