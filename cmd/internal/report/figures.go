package report

import (
	"fmt"
	"slices"

	"cedewright/cmd/internal/study"
	"cedewright/market"
	"cedewright/optimize"
	"cedewright/portfolio/treaty"
)

// figureGroup is figures of programmes that belong together, a row each, a cell for each programme. Terminal and paper show the same.
type figureGroup struct {
	name string
	rows []figureRow
}

type figureRow struct {
	name  string
	cells []string
	total bool // a sum of the rows above it
}

// figureGroups gives the figures of programmes side by side, all money in one unit.
func figureGroups(a study.Appraised, all []optimize.Appraisal) []figureGroup {
	u := unitOfProgrammes(all)
	row := func(name string, read func(optimize.Appraisal) string) figureRow {
		r := figureRow{name: name}
		for _, p := range all {
			r.cells = append(r.cells, read(p))
		}
		return r
	}
	money := func(name string, read func(optimize.Appraisal) optimize.Estimate) figureRow {
		return row(name, func(p optimize.Appraisal) string { return u.estimate(read(p)) })
	}
	total := func(r figureRow) figureRow { r.total = true; return r }

	groups := []figureGroup{{"What is given to reinsurers, a year", []figureRow{
		money("ceded premium", func(p optimize.Appraisal) optimize.Estimate { return p.CededPremium }),
		money("+ reinstatement premium", func(p optimize.Appraisal) optimize.Estimate { return p.ReinstatementPremium }),
		money("− commission", func(p optimize.Appraisal) optimize.Estimate { return p.Commission }),
		money("− expected recoveries", func(p optimize.Appraisal) optimize.Estimate { return p.ExpectedRecoveries }),
		total(money("= ceded margin", func(p optimize.Appraisal) optimize.Estimate { return p.CededMargin })),
	}}}
	fromQuotes := func(g *figureGroup, read func(optimize.Appraisal) float64) {
		if slices.ContainsFunc(all, func(p optimize.Appraisal) bool { return read(p) > 0 }) {
			g.rows = append(g.rows, row("error from few quotes", func(p optimize.Appraisal) string { return priceError(read(p), u) }))
		}
	}
	fromQuotes(&groups[0], func(p optimize.Appraisal) float64 { return p.MarginPriceError })
	groups = append(groups, capitalGroups(a, all, u)...)
	cost := figureGroup{totalCostName(a), []figureRow{
		money("ceded margin", func(p optimize.Appraisal) optimize.Estimate { return p.CededMargin }),
	}}
	if a.Security != nil {
		cost.rows = append(cost.rows, money("+ expected unpaid recoveries", func(p optimize.Appraisal) optimize.Estimate { return p.ExpectedUnpaid }))
	}
	cost.rows = append(cost.rows, money("+ "+capitalCostName(a), func(p optimize.Appraisal) optimize.Estimate { return p.CapitalCost }),
		total(money("= total cost", func(p optimize.Appraisal) optimize.Estimate { return p.TotalCost })))
	fromQuotes(&cost, func(p optimize.Appraisal) float64 { return p.CostPriceError })
	if len(a.Differences) > 0 {
		cost.rows = append(cost.rows, row("difference to "+a.Differences[0].Against, func(p optimize.Appraisal) string {
			if d, ok := difference(a, p.Programme.Name); ok {
				return u.estimate(d.TotalCost)
			}
			return "–"
		}))
	}
	if slices.ContainsFunc(a.Differences, func(d study.Difference) bool { return d.Prices > 0 }) {
		cost.rows = append(cost.rows, row("error from few quotes", func(p optimize.Appraisal) string {
			d, _ := difference(a, p.Programme.Name)
			return priceError(d.Prices, u)
		}))
	}
	cost.rows = append(cost.rows, row("rent (margin / relief)", rent))
	if a.Owners != "" {
		cost.rows = append(cost.rows, row("owners' price / capital", ownersRate))
	}
	return append(groups, cost, figureGroup{"Net result of a year", []figureRow{
		money("expected", func(p optimize.Appraisal) optimize.Estimate { return p.NetResult.Mean }),
		row("standard deviation", func(p optimize.Appraisal) string { return u.amount(p.NetResult.StandardDeviation) }),
		money("1 in 10", func(p optimize.Appraisal) optimize.Estimate { return p.NetResult.OneIn10 }),
		money("1 in 200", func(p optimize.Appraisal) optimize.Estimate { return p.NetResult.OneIn200 }),
	}})
}

// priceError writes an error that comes from the quotes, as a cell that holds no figure but an error.
func priceError(x float64, u unit) string {
	if !(x > 0) || !finite(x) {
		return "–"
	}
	return plusMinus + fixed(x/u.factor, decimals(x/u.factor)) + u.suffix
}

func unitOfProgrammes(all []optimize.Appraisal) unit {
	var amounts []float64
	for _, p := range all {
		amounts = append(amounts, p.CededPremium.Value, p.TotalCost.Value, p.NetResult.OneIn200.Value)
		for _, c := range p.Capital {
			amounts = append(amounts, c.Net.Value)
		}
	}
	return unitOf(amounts...)
}

// difference gives the difference of total cost of a programme to the one that all are compared with.
func difference(a study.Appraised, name string) (study.Difference, bool) {
	for _, d := range a.Differences {
		if d.Programme == name {
			return d, true
		}
	}
	return study.Difference{}, false
}

// rent gives margin over relief; a programme without relief has none.
func rent(a optimize.Appraisal) string {
	if !a.RentDefined {
		return "–"
	}
	return EstimatedPercent(a.Rent)
}

// treatyHead names the figures of treatyCells.
var treatyHead = []string{"treaty", "premium", "rate on line", "recovery", "margin", "attaches", "exhausts", "relief"}

// treatyCells gives a treaty's figures in the order of treatyHead, money in one unit for the programme.
func treatyCells(f optimize.TreatyFigure, u unit) []string {
	line, attaches, exhausts := Percent(f.RateOnLine), estimatedPeriod(f.AttachmentProbability), estimatedPeriod(f.ExhaustionProbability)
	if f.RateOnLine == 0 {
		line = "–"
	}
	if f.Terms.Kind == treaty.QuotaShare {
		line, attaches, exhausts = "–", "–", "–"
	}
	return []string{clean(f.Terms.Name), u.estimate(f.Premium), line, u.estimate(f.ExpectedRecovery), u.estimate(f.Margin), attaches, exhausts, u.estimate(f.Relief)}
}

// unitOfTreaties gives the unit for the treaties of a programme.
func unitOfTreaties(p optimize.Appraisal) unit {
	var amounts []float64
	for _, f := range p.Treaties {
		amounts = append(amounts, f.Premium.Value, f.ExpectedRecovery.Value, f.Relief.Value)
	}
	return unitOf(amounts...)
}

// termsOf says what a treaty promises and what priced it.
func termsOf(f optimize.TreatyFigure) string {
	text := f.Terms.Describe(Terms)
	if len(f.Terms.Classes)+len(f.Terms.Perils) > 0 {
		text += "; covers " + subject(f.Terms)
	}
	if len(f.Terms.After) > 0 {
		text += "; after " + joined(f.Terms.After)
	}
	by := f.PricedBy
	if f.Terms.Kind == treaty.QuotaShare {
		by += fmt.Sprintf(", %s of ceded premium", Percent(f.CommissionRate))
	}
	if by != "" {
		text += "; priced by " + by
	}
	if f.Reliance == market.Extrapolated || f.Reliance == market.Assumed {
		text += " (" + f.Reliance.String() + ")"
	}
	if e := priceError(f.PriceError, unitFor(max(f.Premium.Value, f.PriceError))); e != "–" {
		text += "," + e + " from few quotes"
	}
	if panel := panelWords(f.Terms); panel != "" {
		text += "; behind it: " + panel
		if f.ExpectedUnpaid != (optimize.Estimate{}) {
			text += "; expected unpaid " + Estimated(f.ExpectedUnpaid)
		}
	}
	return clean(text)
}

// subject names what a treaty looks at.
func subject(t treaty.Treaty) string {
	switch {
	case len(t.Classes) == 0 && len(t.Perils) == 0:
		return "all losses"
	case len(t.Classes) == 0:
		return joined(t.Perils)
	case len(t.Perils) == 0:
		return joined(t.Classes)
	}
	return joined(t.Perils) + " in " + joined(t.Classes)
}

// joined gives "a", "a and b", "a, b and c".
func joined(names []string) string {
	text := ""
	for i, n := range names {
		switch {
		case i == 0:
		case i == len(names)-1:
			text += " and "
		default:
			text += ", "
		}
		text += n
	}
	return text
}
