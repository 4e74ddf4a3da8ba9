package report

import (
	"fmt"
	"io"

	"cedewright/cmd/internal/study"
	"cedewright/optimize"
)

// PrintLook writes the answer of look for a terminal.
func PrintLook(w io.Writer, l study.Look, s Style) {
	printHead(w, s, l.Head, "The book before reinsurance")
	printClasses(w, s, l)
	printPerils(w, s, l)
	printHistory(w, s, l.Fits)
	u := unitOfProgrammes([]optimize.Appraisal{l.Gross})
	g := newGrid("Gross position", "", "value")
	g.add("expected result", u.estimate(l.Gross.NetResult.Mean))
	g.add("standard deviation of the result", u.amount(l.Gross.NetResult.StandardDeviation))
	g.add("1-in-10 result", u.estimate(l.Gross.NetResult.OneIn10))
	g.add("1-in-200 result", u.estimate(l.Gross.NetResult.OneIn200))
	for _, c := range l.Gross.Capital {
		if c.Alone != nil {
			g.add("required capital, "+c.Standard+", book alone", u.estimate(c.Alone.Gross))
		}
		g.add("required capital, "+c.Standard, u.estimate(c.Gross))
	}
	g.print(w, s)
	printFoot(w, s, l.Head)
}

func printClasses(w io.Writer, s Style, l study.Look) {
	u := unitOf(l.Total.OneIn200, l.Total.Premium)
	g := newGrid("Classes, a year", "class", "premium", "expenses", "expected loss", "loss ratio", "std. deviation", "1-in-10 loss", "1-in-200 loss", "events")
	row := func(c study.ClassLook) {
		ratio := "–"
		if c.Premium > 0 {
			ratio = Percent(c.Loss.Value / c.Premium)
		}
		g.add(c.Name, Terms(c.Premium), Percent(c.Expenses), u.estimate(c.Loss), ratio, u.amount(c.SD), u.amount(c.OneIn10), u.amount(c.OneIn200), rounded(c.Events))
	}
	for _, c := range l.Classes {
		row(c)
	}
	g.rule()
	row(l.Total)
	g.rows[len(g.rows)-1].total = true
	g.print(w, s)
}

// shownPeriods are the places in study.ReturnPeriods that a terminal has room for.
var shownPeriods = []int{2, 4, 5, 6, 8}

func printPerils(w io.Writer, s Style, l study.Look) {
	if len(l.Perils) == 0 {
		return
	}
	head := []string{"peril", "events", "expected loss"}
	for _, i := range shownPeriods {
		head = append(head, fmt.Sprintf("1 in %v", study.ReturnPeriods[i]))
	}
	g := newGrid("Perils, a year: expected loss, and the largest event at return periods (attritional: the year's sum)", append(head, "largest")...)
	largest := 0.0
	for _, p := range l.Perils {
		largest = max(largest, p.LargestOfBook)
	}
	u := unitOf(largest, l.Total.Loss.Value)
	for _, p := range l.Perils {
		cells := []string{p.Name, rounded(p.Events), u.estimate(p.Loss)}
		at, most := p.LargestOneIn, u.amount(p.LargestOfBook)
		if p.Events == 0 {
			cells[1], at, most = "–", p.AnnualOneIn, "–"
		}
		for _, i := range shownPeriods {
			if i < len(at) {
				cells = append(cells, u.amount(at[i]))
			} else {
				cells = append(cells, "–")
			}
		}
		g.add(append(cells, most)...)
	}
	g.print(w, s)
}

func printHistory(w io.Writer, s Style, fits []study.HistoryFit) {
	if len(fits) == 0 {
		return
	}
	g := newGrid("Fitted to history: a generalised Pareto tail above a threshold", "model", "losses", "years", "above", "count", "shape ξ", "scale β", "largest", "frequency")
	g.left[8] = true
	for _, f := range fits {
		years := fmt.Sprint(f.Years)
		if f.Years == 0 {
			years = "–"
		}
		g.add(f.Model, thousands(f.Losses), years, Terms(f.Threshold), fmt.Sprint(f.Exceedances),
			Number(optimize.Estimate{Value: f.Xi, StandardError: f.XiError}), Estimated(optimize.Estimate{Value: f.Beta, StandardError: f.BetaError}),
			Money(f.LargestLoss), f.Frequency)
	}
	g.print(w, s)
}
