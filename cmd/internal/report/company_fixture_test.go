package report

import (
	"math"
	"slices"

	"cedewright/cmd/internal/study"
	"cedewright/optimize"
	"cedewright/portfolio/capital"
	"cedewright/portfolio/security"
	"cedewright/portfolio/treaty"
)

// The same invented insurer with all that a study can say of capital and security: five standards of which two drive, a rest of the company, owners with a
// price of risk of their own, and reinsurers that can fail. No figure here was computed by the program.

func companyStandards() []capital.Standard {
	list := marramStandards()
	oneYear, tail := list[0].Criteria[0], list[1].Criteria[0]
	tail.Ratio, tail.Basis = 0.7, capital.Result
	level := list[1].Criteria[0].Level
	return append(list,
		capital.Standard{Name: "rating", Source: "set in the study", Criteria: []capital.Criterion{oneYear, tail}},
		capital.Standard{Name: "formula", Source: "factors eu-2015-35, an invented version; the other inputs are the company's own", Formula: &capital.Formula{}},
		capital.Standard{Name: "charges", Source: "set in the study", Covariance: &capital.Covariance{Perils: []string{"windstorm", "flood"}, Level: level}},
	)
}

func companyRegister() *security.Register {
	return &security.Register{Correlation: 0.3, Seed: 7, Reinsurers: []security.Reinsurer{
		{Name: "Harbour Re", Default: 0.0005, Step: 2, LossGiven: 0.5, RatedBy: "credit quality step 2"},
		{Name: "Dune Re", Default: 0.0024, Step: 3, LossGiven: 0.5, RatedBy: "credit quality step 3"},
		{Name: "Saltmarsh Mutual", Default: 0.012, Step: -1, LossGiven: 0.5, Tied: true, RatedBy: "solvency ratio of 122 %"},
	}}
}

var (
	companyRest = &capital.Rest{Quantile: func(float64) float64 { return 0 }, Law: "lognormal, mean 20m, standard deviation 60m", RankCorrelation: 0.2, Seed: 5}
	otherRisks  = &capital.Rest{Capital: 150e6, Correlation: 0.25} // by which the fixture makes up figures of the company
)

// inCompany puts an appraisal into the whole company.
func inCompany(a optimize.Appraisal) optimize.Appraisal {
	share := a.Capital[0].Net.Value / grossOneYear // what the programme leaves
	part := func(name string, gross, slope float64) optimize.CapitalPart {
		return optimize.CapitalPart{Name: name, Gross: gross, Amount: gross * (1 - slope*(1-share))}
	}
	figure := func(name string, gross, net float64) optimize.CapitalFigure {
		return optimize.CapitalFigure{Standard: name, Gross: est(gross, 0), Net: est(net, 0), Relief: est(gross-net, 0)}
	}
	a.Capital = slices.Clone(a.Capital)
	rating := a.Capital[1]
	rating.Standard = "rating"
	for _, e := range []*optimize.Estimate{&rating.Gross, &rating.Net, &rating.Relief} {
		*e = est(0.7*e.Value, 0.7*e.StandardError)
	}
	criteria := []optimize.CapitalPart{
		{Name: "value-at-risk 99.5%", Gross: a.Capital[0].Gross.Value, Amount: a.Capital[0].Net.Value},
		{Name: "70 % of tail-value-at-risk 99%", Gross: rating.Gross.Value, Amount: rating.Net.Value},
	}
	criteria[1].Sets = criteria[1].Amount > criteria[0].Amount
	criteria[0].Sets = !criteria[1].Sets
	for i := range criteria { // they look at the whole company
		criteria[i].Gross, criteria[i].Amount = otherRisks.Combine(criteria[i].Gross), otherRisks.Combine(criteria[i].Amount)
	}
	rating.Parts = criteria
	if criteria[0].Sets {
		rating.Net, rating.Relief = a.Capital[0].Net, est(rating.Gross.Value-a.Capital[0].Net.Value, a.Capital[0].Relief.StandardError)
	}
	a.Capital = append(a.Capital, rating)
	for i := range a.Capital {
		c := &a.Capital[i]
		c.Binding = false
		c.Alone = &optimize.Alone{Gross: c.Gross, Net: c.Net, Relief: c.Relief}
		within := func(e optimize.Estimate) optimize.Estimate {
			return est(otherRisks.Combine(e.Value), otherRisks.Slope(e.Value)*e.StandardError)
		}
		c.Gross, c.Net = within(c.Gross), within(c.Net)
		if len(a.Treaties) > 0 {
			c.Relief = est(c.Gross.Value-c.Net.Value, otherRisks.Slope(c.Alone.Net.Value)*c.Relief.StandardError)
		}
	}
	formula := figure("formula", 462e6, 462e6*(1-0.4*(1-share)))
	formula.Parts = []optimize.CapitalPart{part("premium and reserve risk", 241e6, 0.2), part("natural catastrophes", 288e6, 0.8), part("catastrophe risk", 301e6, 0.8),
		part("non-life", 437e6, 0.45), {Name: "default of reinsurers (type 1)", Amount: 31e6 * (1 - share)}, part("whole requirement", 462e6, 0.4)}
	charges := figure("charges", 298e6, 298e6*(1-0.5*(1-share)))
	charges.Parts = []optimize.CapitalPart{part("net loss of windstorm", 293e6, 0.7), part("net loss of flood", 41e6, 0), part("catastrophe charge", 296e6, 0.7), part("all charges", 298e6, 0.5)}
	a.Capital = append(a.Capital, formula, charges)
	a.Capital[1].Binding = true
	a.OwnFundsRatio = nil
	for _, c := range a.Capital {
		a.OwnFundsRatio = append(a.OwnFundsRatio, est(ownFunds/c.Net.Value, ownFunds/c.Net.Value*c.Net.StandardError/c.Net.Value))
	}
	a.Driving = a.Capital[0]
	if a.Capital[2].Net.Value > a.Driving.Net.Value {
		a.Driving = a.Capital[2]
	}
	a.CapitalCost = est(0.071*a.Driving.Net.Value, 0.071*a.Driving.Net.StandardError)
	a.Treaties = slices.Clone(a.Treaties)
	for i := range a.Treaties {
		f := &a.Treaties[i]
		f.Terms.Panel = []treaty.Line{{Reinsurer: "Harbour Re", Share: 0.6}, {Reinsurer: "Dune Re", Share: 0.4}}
		if i%2 == 1 {
			f.Terms.Panel = []treaty.Line{{Reinsurer: "Harbour Re", Share: 0.5, Collateral: 5e6}, {Reinsurer: "Saltmarsh Mutual", Share: 0.3}}
		}
		f.ExpectedUnpaid = est(0.0011*f.ExpectedRecovery.Value, 0.0002*f.ExpectedRecovery.Value)
		a.ExpectedUnpaid.Value += f.ExpectedUnpaid.Value
		a.ExpectedUnpaid.StandardError = math.Hypot(a.ExpectedUnpaid.StandardError, f.ExpectedUnpaid.StandardError)
	}
	a.TotalCost.Value = a.CededMargin.Value + a.ExpectedUnpaid.Value + a.CapitalCost.Value
	if r := a.Driving.Relief.Value; r > 0 {
		a.Rent = est(a.CededMargin.Value/r, 0.006)
	}
	return a
}

// companyAllocations sketches allocations under three standards: one simulated that drives, the formula, and the charges.
func companyAllocations(a optimize.Appraisal) []optimize.Allocation {
	gross, net := a.Capital[0].Gross.Value, a.Capital[0].Net.Value
	var oneYear, formula, charges []optimize.TreatyCapital
	for _, f := range a.Treaties {
		natural := est(f.Relief.Value, f.Relief.StandardError)
		oneYear = append(oneYear, optimize.TreatyCapital{Name: f.Terms.Name, StandAlone: 0.9 * f.Relief.Value, LastIn: f.Relief.Value, Natural: natural, Cost: 0.071 * f.Relief.Value})
		formula = append(formula, optimize.TreatyCapital{Name: f.Terms.Name, StandAlone: 0.5 * f.Relief.Value, LastIn: 0.4 * f.Relief.Value, Natural: est(0.45*f.Relief.Value, 0)})
		charges = append(charges, optimize.TreatyCapital{Name: f.Terms.Name, StandAlone: 0.6 * f.Relief.Value, LastIn: 0.5 * f.Relief.Value, Natural: est(0.5*f.Relief.Value, 2e6)})
	}
	classes := func(gross, net, err, rate float64) []optimize.ClassCapital {
		var list []optimize.ClassCapital
		for _, c := range []struct {
			name        string
			share, mean float64
		}{{"household", 0.42, 31e6}, {"motor", 0.13, 24e6}, {"commercial", 0.25, 14e6}, {"liability", 0.2, 12e6}} {
			list = append(list, optimize.ClassCapital{Name: c.name, Gross: est(c.share*gross, err), Net: est(c.share*net, err), GrossMean: c.mean, NetMean: 0.88 * c.mean,
				GrossCost: rate * c.share * gross, NetCost: rate * c.share * net})
		}
		return list
	}
	fg, fn, cg, cn := a.Capital[3].Gross.Value, a.Capital[3].Net.Value, a.Capital[4].Gross.Value, a.Capital[4].Net.Value
	return []optimize.Allocation{
		{Standard: "charges", Gross: cg, Net: cn, Perils: []optimize.PerilCapital{{Name: "windstorm", Gross: est(cg-30e6, 0), Net: est(cn-30e6, 0)}, {Name: "flood", Gross: est(6e6, 0), Net: est(6e6, 0)}},
			Others: []optimize.OtherCapital{{Name: "charge R0"}, {Name: "charge R1", Gross: 24e6, Net: 24e6}}, Treaties: charges},
		{Standard: "one-year", Drives: true, Gross: gross, Net: net, Classes: classes(gross-60e6, net-60e6, 5e6, 0.071), Certain: -530e6,
			Perils: []optimize.PerilCapital{{Name: "attritional", Gross: est(480e6, 2e6), Net: est(470e6, 2e6)}, {Name: "windstorm", Gross: est(430e6, 9e6), Net: est(330e6, 8e6)}},
			Others: []optimize.OtherCapital{{Name: "rest of the company", Gross: 60e6, Net: 60e6}}, Treaties: oneYear},
		{Standard: "formula", Gross: fg, Net: fn, Classes: classes(fg-40e6, fn-52e6, 0, 0), Treaties: formula,
			Others: []optimize.OtherCapital{{Name: "default of Harbour Re", Net: 9e6}, {Name: "default of Dune Re", Net: 3e6}, {Name: "market risk", Gross: 40e6, Net: 40e6}}},
	}
}

func companyAppraised() study.Appraised {
	a := marramAppraised()
	a.Standards, a.Drive, a.Rest, a.Security = companyStandards(), []string{"one-year", "rating"}, companyRest, companyRegister()
	a.CostOfCapital, a.Owners = 0, "Wang, λ 0.3"
	for i, p := range a.Programmes {
		a.Programmes[i] = inCompany(p)
		a.Allocations = append(a.Allocations, companyAllocations(a.Programmes[i]))
	}
	a.Gross.Capital = a.Programmes[0].Capital
	reference := a.Programmes[1]
	for i, p := range []optimize.Appraisal{a.Programmes[0], a.Programmes[2]} {
		a.Differences[i].TotalCost.Value = p.TotalCost.Value - reference.TotalCost.Value
	}
	return a
}

func companySearched() study.Searched {
	s := marramSearched()
	s.Appraised = companyAppraised()
	s.NoCover, s.Start, s.Result.Best = s.Programmes[0], s.Programmes[1], inCompany(s.Result.Best)
	for i, p := range s.Result.Frontier {
		s.Result.Frontier[i] = inCompany(p)
	}
	s.Programmes, s.Allocations = append(s.Programmes, s.Result.Best), append(s.Allocations, companyAllocations(s.Result.Best))
	s.Differences = append(s.Differences, study.Difference{Programme: "best found", Against: "expiring", TotalCost: est(s.Result.Best.TotalCost.Value-s.Start.TotalCost.Value, 0.3e6)})
	s.Bound = optimize.Bound{Reason: "the owners price the risk they keep by a distortion"}
	return s
}
