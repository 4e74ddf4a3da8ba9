package settings

import (
	"fmt"
	"slices"

	"cedewright/portfolio/capital"
	"cedewright/portfolio/sample"
	"cedewright/portfolio/security"
	"cedewright/portfolio/treaty"
)

// DefaultFactors names the factors by which reinsurers are rated when no standard of the study names any.
const DefaultFactors = "eu-2015-35"

// panel gives the lines that the keys describe; nil without any.
func panel(lines []Line) []treaty.Line {
	var list []treaty.Line
	for _, l := range lines {
		list = append(list, treaty.Line{Reinsurer: l.Reinsurer, Share: float64(l.Share), Collateral: float64(l.Collateral)})
	}
	return list
}

// panelOr gives a panel, or that of the whole study when the key is left out; an empty list is a panel of nobody who can fail.
func (s Study) panelOr(own []Line) []treaty.Line {
	if own == nil && s.Security != nil {
		own = s.Security.Panel
	}
	return panel(own)
}

// Terms gives the programme that the keys describe, with the study's panel behind treaties that have none of their own.
func (s Study) Terms(p Programme) treaty.Programme {
	terms := p.Terms()
	for i := range terms.Treaties {
		terms.Treaties[i].Panel = s.panelOr(p.Treaties[i].Panel)
	}
	return terms
}

// Rule gives the standard that the keys describe, formula and covariance aside. Its source is the preset's as long as nothing beside the preset changes it.
func (s Standard) Rule() capital.Standard {
	rule := capital.Standard{Name: s.Name, Source: "set in the study"}
	combination, err := capital.ParseCombination(s.Combine)
	if err == nil {
		rule.Combination = combination
	}
	for _, c := range s.Criteria {
		k := capital.Criterion{Level: c.Level.Level, Basis: capital.Result, Ratio: 1}
		override(&k, c.Measure, nil, c.Basis, c.Ratio)
		if c.Weight != nil {
			k.Weight = float64(*c.Weight)
		}
		rule.Criteria = append(rule.Criteria, k)
	}
	if s.Formula != nil || s.Covariance != nil || len(s.Criteria) > 0 {
		return rule
	}
	only := capital.Criterion{Basis: capital.Result, Ratio: 1}
	preset, ok := capital.Preset(s.Preset)
	if ok {
		only, rule.Source = preset.Criteria[0], preset.Source
	}
	before := only
	if override(&only, s.Measure, s.Level, s.Basis, s.Ratio); ok && only != before {
		rule.Source = "set in the study, from the preset " + preset.Name
	}
	rule.Criteria = []capital.Criterion{only}
	return rule
}

// override sets what the keys give.
func override(c *capital.Criterion, measure string, level *Level, basis string, ratio *Fraction) {
	if m, err := capital.ParseMeasure(measure); err == nil {
		c.Measure = m
	}
	if b, err := capital.ParseBasis(basis); err == nil {
		c.Basis = b
	}
	if level != nil {
		c.Level = level.Level
	}
	if ratio != nil {
		c.Ratio = float64(*ratio)
	}
}

// nonProportional are the words for when the factor for excess cover applies.
var nonProportional = []string{capital.ByTreaty: "by-treaty", capital.Always: "always", capital.Never: "never"}

// Rule gives the formula that the keys describe, for the classes of a book and the reinsurers of the study, in their orders. The study must have been checked.
func (f Formula) Rule(factors capital.Factors, classes []Class, reinsurers []security.Reinsurer) *capital.Formula {
	rule := &capital.Formula{
		Factors: factors, NonProportional: capital.NonProportional(max(slices.Index(nonProportional, f.NonProportional), 0)), Lapse: float64(f.Lapse),
		OtherCatastrophe: float64(f.OtherCatastrophe), PropertyReinsurance: float64(f.PropertyReinsurance), Market: float64(f.Market), Life: float64(f.Life),
		Health: float64(f.Health), Intangible: float64(f.Intangible), Operational: float64(f.Operational), Adjustment: float64(f.Adjustment), TypeTwo: float64(f.TypeTwo),
		Recoverables: make([]float64, len(reinsurers)),
	}
	for _, class := range classes {
		k := capital.FormulaClass{Segment: -1, Diversification: 1}
		for _, given := range f.Classes {
			if given.Class == class.Name {
				k.Segment = slices.IndexFunc(factors.Segments, func(s capital.Segment) bool { return s.Number == int(given.Segment) })
				k.Reserves, k.LastPremium, k.FuturePremium = float64(given.Reserves), float64(given.LastPremium), float64(given.FuturePremium)
				if given.Diversification != nil {
					k.Diversification = float64(*given.Diversification)
				}
			}
		}
		rule.Classes = append(rule.Classes, k)
	}
	for _, s := range f.Scenarios {
		k := capital.Scenario{Name: s.Name, Kind: s.Kind, Peril: s.Peril, OneRisk: s.OneRisk, Losses: make([]float64, len(classes))}
		if k.Peril == "" {
			k.Peril = s.Kind
		}
		for _, l := range s.Losses {
			if c := slices.IndexFunc(classes, func(c Class) bool { return c.Name == l.Class }); c >= 0 {
				k.Losses[c] += float64(l.Loss)
			}
		}
		rule.Scenarios = append(rule.Scenarios, k)
	}
	place := func(name string) int {
		return slices.IndexFunc(f.Scenarios, func(s LossScenario) bool { return s.Name == name })
	}
	for _, c := range f.Correlations {
		rule.ScenarioCorrelations = append(rule.ScenarioCorrelations, capital.ScenarioCorrelation{A: place(c.Between[0]), B: place(c.Between[1]), Correlation: float64(c.Correlation)})
	}
	for j, r := range reinsurers {
		rule.Default, rule.Tied = append(rule.Default, r.Default), append(rule.Tied, r.Tied)
		for _, owed := range f.Recoverables {
			if owed.Reinsurer == r.Name {
				rule.Recoverables[j] += float64(owed.Amount)
			}
		}
	}
	return rule
}

// Rule gives the covariance that the keys describe.
func (c Covariance) Rule() *capital.Covariance {
	rule := &capital.Covariance{
		Uncorrelated: float64(c.Charges.R0), Perils: c.Perils, ContingentCredit: float64(c.ContingentCredit), Operational: float64(c.Operational), Multiple: 1,
		Charges: [5]float64{float64(c.Charges.R1), float64(c.Charges.R2), float64(c.Charges.R3), float64(c.Charges.R4), float64(c.Charges.R5)},
	}
	if c.Multiple != nil {
		rule.Multiple = float64(*c.Multiple)
	}
	if c.Level != nil {
		rule.Level = c.Level.Level
	} else {
		rule.Level, _ = sample.ParseLevel("1 in 100")
	}
	return rule
}

// Rule gives the rest of the company that the keys describe. The study must have been checked.
func (r Rest) Rule() (*capital.Rest, error) {
	rule := &capital.Rest{}
	if r.Family == "" {
		rule.Capital = float64(*r.Capital)
		if r.Correlation != nil {
			rule.Correlation = float64(*r.Correlation)
		}
		return rule, nil
	}
	var err error
	if rule.Quantile, err = capital.RestLaw(r.Family, float64(*r.Mean), float64(*r.SD)); err != nil {
		return nil, err
	}
	rule.Law = fmt.Sprintf("%s, mean %s, standard deviation %s", r.Family, moneyText(float64(*r.Mean)), moneyText(float64(*r.SD)))
	if r.RankCorrelation != nil {
		rule.RankCorrelation = float64(*r.RankCorrelation)
	}
	if r.Seed != nil {
		rule.Seed = uint64(*r.Seed)
	}
	return rule, nil
}

// Register gives the reinsurers that the keys describe, rated by the factors; seed is that of the book. The study must have been checked.
func (s Security) Register(factors capital.Factors, seed uint64) *security.Register {
	register := &security.Register{Correlation: float64(s.Correlation), Seed: seed}
	if s.Seed != nil {
		register.Seed = uint64(*s.Seed)
	}
	for _, r := range s.Reinsurers {
		u := security.Reinsurer{Name: r.Name, Step: -1, LossGiven: 0.5, Tied: r.TiedAssets}
		switch {
		case r.Step != nil && int(*r.Step) < len(factors.Steps):
			u.Step, u.Default, u.RatedBy = int(*r.Step), factors.Steps[*r.Step], fmt.Sprintf("credit quality step %d", *r.Step)
		case r.SolvencyRatio != nil:
			u.Default, u.RatedBy = factors.UnratedProbability(float64(*r.SolvencyRatio)), fmt.Sprintf("solvency ratio of %.4g %%", 100*float64(*r.SolvencyRatio))
		case r.DefaultProbability != nil:
			u.Default, u.RatedBy = float64(*r.DefaultProbability), "set in the study"
		}
		if r.LossGivenDefault != nil {
			u.LossGiven = float64(*r.LossGivenDefault)
		}
		register.Reinsurers = append(register.Reinsurers, u)
	}
	return register
}
