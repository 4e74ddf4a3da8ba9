package report

import (
	"fmt"
	"io"
	"math"

	"cedewright/cmd/internal/study"
	"cedewright/market"
	"cedewright/optimize"
	"cedewright/portfolio/treaty"
)

func printHead(w io.Writer, h study.Head, what string) {
	fmt.Fprintf(w, "%s\n%s, %s a year unless said otherwise, %s simulated years, seed %d\n\n", h.Title, what, h.Currency, thousands(h.Years), h.Seed)
}

func thousands(n int) string {
	s := fmt.Sprint(n)
	for i := len(s) - 3; i > 0; i -= 3 {
		s = s[:i] + "," + s[i:]
	}
	return s
}

func printFoot(w io.Writer, h study.Head) {
	for _, n := range h.Notes {
		bullet(w, n)
	}
	for _, n := range h.Warnings {
		bullet(w, "Mind: "+n)
	}
	if len(h.Notes)+len(h.Warnings) > 0 {
		fmt.Fprintln(w)
	}
	wrapped(w, Caution, "", textWidth)
}

// PrintLook writes the answer of look for a terminal.
func PrintLook(w io.Writer, l study.Look) {
	printHead(w, l.Head, "The book before reinsurance")
	g := newGrid("Classes", "class", "premium", "expenses", "expected loss", "loss ratio", "std. deviation", "1-in-10 loss", "1-in-200 loss", "events")
	row := func(c study.ClassLook) {
		ratio := "–"
		if c.Premium > 0 {
			ratio = Percent(c.Loss.Value / c.Premium)
		}
		g.add(c.Name, Money(c.Premium), Percent(c.Expenses), Estimated(c.Loss), ratio, Money(c.SD), Money(c.OneIn10), Money(c.OneIn200), significant(c.Events, 3))
	}
	for _, c := range l.Classes {
		row(c)
	}
	g.rule()
	row(l.Total)
	g.print(w)

	head := []string{"peril", "events", "expected loss"}
	shown := []int{2, 4, 5, 6, 8} // of study.ReturnPeriods
	for _, i := range shown {
		head = append(head, fmt.Sprintf("1 in %v", study.ReturnPeriods[i]))
	}
	g = newGrid("Perils: expected loss, and the largest event of a year (attritional: the year's sum) at return periods in years", append(head, "largest")...)
	for _, p := range l.Perils {
		cells := []string{p.Name, significant(p.Events, 3), Estimated(p.Loss)}
		for _, i := range shown {
			at := p.LargestOneIn[i]
			if p.Events == 0 {
				at = p.AnnualOneIn[i]
			}
			cells = append(cells, Money(at))
		}
		g.add(append(cells, Money(p.LargestOfBook))...)
	}
	g.print(w)

	if len(l.Fits) > 0 {
		g = newGrid("Fitted to history", "model", "losses", "years", "above", "count", "shape ξ", "scale β", "frequency", "largest")
		g.left[7] = true
		for _, f := range l.Fits {
			g.add(f.Model, thousands(f.Losses), fmt.Sprint(f.Years), Money(f.Threshold), fmt.Sprint(f.Exceedances),
				scaled(optimize.Estimate{Value: f.Xi, StandardError: f.XiError}, 1)+" ± "+errorOf(optimize.Estimate{StandardError: f.XiError}, 1),
				Estimated(optimize.Estimate{Value: f.Beta, StandardError: f.BetaError}), f.Frequency, Money(f.LargestLoss))
		}
		g.print(w)
	}
	g = newGrid("Gross position", "figure", "value")
	g.add("expected result", Estimated(l.Gross.NetResult.Mean))
	g.add("standard deviation of the result", Money(l.Gross.NetResult.StandardDeviation))
	g.add("1-in-10 result", Estimated(l.Gross.NetResult.OneIn10))
	g.add("1-in-200 result", Estimated(l.Gross.NetResult.OneIn200))
	for _, c := range l.Gross.Capital {
		g.add("required capital, "+c.Standard, Estimated(c.Gross))
	}
	g.print(w)
	printFoot(w, l.Head)
}

// PrintFitted writes the answer of fit for a terminal.
func PrintFitted(w io.Writer, f study.Fitted) {
	printHead(w, f.Head, "Market curves against their quotes")
	for _, c := range f.Curves {
		fmt.Fprintf(w, "Curve %s: %s; brokerage %s, minimum rate on line %s\n", c.Curve.Name, c.Curve.Distortion, Percent(c.Curve.Brokerage), Percent(c.Curve.MinimumRateOnLine))
		if c.Chosen == nil {
			fmt.Fprintf(w, "Set by hand in the study; no quotes stand behind it.\n\n")
			printPoints(w, c.Curve)
			continue
		}
		printQuotes(w, c.Chosen)
		printCandidates(w, c)
		printPoints(w, c.Curve)
	}
	printFoot(w, f.Head)
}

func printQuotes(w io.Writer, f *market.Fit) {
	g := newGrid("", "quote", "attaches", "exhausts", "expected loss", "quoted", "fitted", "residual", "left out", "multiple")
	for _, q := range f.Quotes {
		expected := "–"
		if q.Multiple > 0 {
			expected = Percent(q.RateOnLine / q.Multiple)
		}
		left := "–"
		if finite(q.LeftOut) {
			left = signed(q.LeftOut/q.RateOnLine - 1)
		}
		name := q.Name
		if q.Weight == 0 {
			name += " (not used)"
		}
		g.add(name, Percent(q.Attachment), Percent(q.Exhaustion), expected, Percent(q.RateOnLine), Percent(q.Fitted), signed(q.Residual), left, significant(q.Multiple, 3))
	}
	g.print(w)
	fmt.Fprintln(w, "Rates on line include brokerage. Left out: the residual when the curve is fitted to the other quotes. Multiple: quoted rate over expected loss.")
	fmt.Fprintf(w, "The quotes speak for probabilities from %s to %s; prices beyond are extrapolated.\n\n", Percent(f.LowestTail), Percent(f.HighestTail))
}

func signed(x float64) string {
	text := Percent(x)
	if x > 0 {
		return "+" + text
	}
	return text
}

func printCandidates(w io.Writer, c study.CurveFit) {
	g := newGrid("All families, typical relative error of a quote's price", "family", "parameter", "in sample", "left out", "")
	g.left[4] = true
	for _, f := range c.Candidates {
		parameter := "–"
		if f.Family != market.FamilyFree {
			parameter = scaled(optimize.Estimate{Value: f.Parameter, StandardError: f.StandardError}, 1)
			if f.StandardError > 0 {
				parameter += " ± " + errorOf(optimize.Estimate{StandardError: f.StandardError}, 1)
			}
		}
		note := ""
		if f.Family == c.Chosen.Family {
			note = "chosen in the study"
		}
		left := Percent(f.LeaveOneOut)
		if math.IsNaN(f.LeaveOneOut) {
			left = "–"
		}
		g.add(f.Family, parameter, Percent(f.InSample), left, note)
	}
	g.print(w)
}

func printPoints(w io.Writer, c market.Curve) {
	g := newGrid("The curve: price of a thin layer by its probability of loss, as a fraction of the limit, before brokerage", "hit", "1 in 500", "1 in 200", "1 in 100", "1 in 50", "1 in 20", "1 in 10", "1 in 5", "1 in 2")
	price, multiple := []string{"price"}, []string{"over probability"}
	for _, s := range []float64{0.002, 0.005, 0.01, 0.02, 0.05, 0.1, 0.2, 0.5} {
		price = append(price, Percent(c.Distortion.At(s)))
		multiple = append(multiple, significant(c.Distortion.At(s)/s, 3))
	}
	g.add(price...)
	g.add(multiple...)
	g.print(w)
}

// PrintAppraised writes the answer of appraise for a terminal.
func PrintAppraised(w io.Writer, a study.Appraised) {
	printHead(w, a.Head, "Programmes side by side")
	printSideBySide(w, a, a.Programmes)
	for _, p := range a.Programmes {
		printTreaties(w, p)
	}
	printFoot(w, a.Head)
}

// printSideBySide writes one row a figure and one column a programme.
func printSideBySide(w io.Writer, a study.Appraised, all []optimize.Appraisal) {
	head := []string{"figure"}
	for _, p := range all {
		head = append(head, p.Programme.Name)
	}
	g := newGrid("", head...)
	for _, r := range figureRows(a, all) {
		if r == nil {
			g.rule()
			continue
		}
		g.add(r...)
	}
	g.print(w)
}

// figureRows gives the figures of programmes, a row each, the name first; nil is a rule. Terminal and paper show the same rows.
func figureRows(a study.Appraised, all []optimize.Appraisal) [][]string {
	var rows [][]string
	add := func(name string, read func(optimize.Appraisal) string) {
		row := []string{name}
		for _, p := range all {
			row = append(row, read(p))
		}
		rows = append(rows, row)
	}
	rule := func() { rows = append(rows, nil) }
	add("ceded premium", func(p optimize.Appraisal) string { return Estimated(p.CededPremium) })
	add("+ reinstatement premium", func(p optimize.Appraisal) string { return Estimated(p.ReinstatementPremium) })
	add("− commission", func(p optimize.Appraisal) string { return Estimated(p.Commission) })
	add("− expected recoveries", func(p optimize.Appraisal) string { return Estimated(p.ExpectedRecoveries) })
	add("= ceded margin", func(p optimize.Appraisal) string { return Estimated(p.CededMargin) })
	rule()
	for i := range all[0].Capital {
		name := all[0].Capital[i].Standard
		add("required capital, "+name, func(p optimize.Appraisal) string { return Estimated(p.Capital[i].Net) })
		add("capital relief, "+name, func(p optimize.Appraisal) string { return Estimated(p.Capital[i].Relief) })
		if a.OwnFunds > 0 {
			add("own funds ratio, "+name, func(p optimize.Appraisal) string { return EstimatedPercent(p.OwnFundsRatio[i]) })
		}
	}
	rule()
	add("ceded margin", func(p optimize.Appraisal) string { return Estimated(p.CededMargin) })
	add(fmt.Sprintf("+ capital cost at %s", Percent(a.CostOfCapital)), func(p optimize.Appraisal) string { return Estimated(p.CapitalCost) })
	add("= total cost", func(p optimize.Appraisal) string { return Estimated(p.TotalCost) })
	if len(a.Differences) > 0 {
		add("  against "+a.Differences[0].Against, func(p optimize.Appraisal) string {
			for _, d := range a.Differences {
				if d.Programme == p.Programme.Name {
					return Estimated(d.TotalCost)
				}
			}
			return "–"
		})
	}
	add("rent (margin per relief)", rent)
	rule()
	add("expected result", func(p optimize.Appraisal) string { return Estimated(p.NetResult.Mean) })
	add("standard deviation", func(p optimize.Appraisal) string { return Money(p.NetResult.StandardDeviation) })
	add("1-in-10 result", func(p optimize.Appraisal) string { return Estimated(p.NetResult.OneIn10) })
	add("1-in-200 result", func(p optimize.Appraisal) string { return Estimated(p.NetResult.OneIn200) })
	return rows
}

var treatyHead = []string{"treaty", "terms", "premium", "rate on line", "recovery", "margin", "attaches", "exhausts", "relief", "priced by"}

// treatyCells gives a treaty's figures in the order of treatyHead.
func treatyCells(f optimize.TreatyFigure) []string {
	line, attaches, exhausts := Percent(f.RateOnLine), ReturnPeriod(f.AttachmentProbability.Value), ReturnPeriod(f.ExhaustionProbability.Value)
	by := f.PricedBy
	if f.Terms.Kind == treaty.QuotaShare {
		line, attaches, exhausts = "–", "–", "–"
		by += " " + Percent(f.CommissionRate)
	}
	return []string{
		f.Terms.Name, f.Terms.Describe(Money), Estimated(f.Premium), line, Estimated(f.ExpectedRecovery), Estimated(f.Margin), attaches, exhausts,
		Estimated(f.Relief), by,
	}
}

func printTreaties(w io.Writer, p optimize.Appraisal) {
	if len(p.Treaties) == 0 {
		return
	}
	fmt.Fprintf(w, "Treaties of “%s” (as placed; relief: last in, first standard)\n", p.Programme.Name)
	g := newGrid("", "treaty", "premium", "rate on line", "recovery", "margin", "attaches", "exhausts", "relief", "priced by")
	g.left[8] = true
	for _, f := range p.Treaties {
		cells := treatyCells(f)
		g.add(append([]string{cells[0]}, cells[2:]...)...)
	}
	g.print(w)
	for _, f := range p.Treaties {
		bullet(w, f.Terms.Name+": "+f.Terms.Describe(Money))
	}
	fmt.Fprintln(w)
}

// PrintSearched writes the answer of search for a terminal.
func PrintSearched(w io.Writer, s study.Searched) {
	printHead(w, s.Head, "The recommended programme")
	wrapped(w, Recommendation(s), "", textWidth)
	fmt.Fprintln(w)
	columns := []optimize.Appraisal{s.NoCover}
	if s.Start.Programme.Name != s.NoCover.Programme.Name {
		columns = append(columns, s.Start)
	}
	printSideBySide(w, s.Appraised, append(columns, s.Result.Best))
	printTreaties(w, s.Result.Best)
	printFrontier(w, s)
	fmt.Fprintf(w, "Searched: %s; %s programmes appraised in %d generations, seed %d; %s", s.Space, thousands(s.Result.Evaluations), s.Result.Generations, s.Result.Seed, s.Result.Status)
	if s.Result.Polished && s.Result.Status != optimize.Proven {
		fmt.Fprint(w, "; no single move on the steps improves the best")
	}
	fmt.Fprintln(w, ".")
	for _, k := range keepWords(s.Keep) {
		fmt.Fprintf(w, "Kept: %s.\n", k)
	}
	fmt.Fprintln(w, "\nWhat the figures leave out")
	for _, text := range leftOut {
		bullet(w, text)
	}
	fmt.Fprintln(w)
	printFoot(w, s.Head)
}

// frontierShown is about how many programmes of the frontier a terminal shows.
const frontierShown = 10

func printFrontier(w io.Writer, s study.Searched) {
	front := s.Result.Frontier
	if len(front) == 0 {
		return
	}
	g := newGrid(fmt.Sprintf("Frontier: least ceded margin for the capital relief, %d programmes, every %s shown", len(front), ordinal(step(len(front)))),
		"relief", "ceded margin", "total cost", "rent", "ceded premium", "treaties")
	for i := 0; i < len(front); i += step(len(front)) {
		p := front[i]
		g.add(Estimated(p.Capital[0].Relief), Estimated(p.CededMargin), Estimated(p.TotalCost), rent(p), Estimated(p.CededPremium), fmt.Sprint(len(p.Treaties)))
	}
	g.print(w)
}

func step(n int) int { return max((n+frontierShown-1)/frontierShown, 1) }

func ordinal(n int) string {
	switch n {
	case 1:
		return "one"
	case 2:
		return "second"
	case 3:
		return "third"
	}
	return fmt.Sprintf("%dth", n)
}
