package optimize

import (
	"fmt"
	"slices"

	"cedewright/portfolio/capital"
	"cedewright/portfolio/fault"
	"cedewright/portfolio/loss"
	"cedewright/portfolio/treaty"
)

// formulaRule measures volumes, scenarios and recoverables under the standard formula. A programme enters through the premium it takes from each class, through
// what it pays of each scenario's events, and through what each reinsurer is expected to owe.
//
// Base premiums of an excess treaty fall on its classes by their part of its expected subject loss, those of a quota share by premium ceded;
// reinstatement premiums, due after a loss alone, do not reduce the volumes. Neither does commission.
type formulaRule struct {
	a         *Appraiser
	number    int // of the formula, among those of the case
	formula   *capital.Formula
	scenarios *loss.Table // a year for each scenario and alternative of its pattern
	gross     [][]float64 // loss of each scenario and alternative
	years     [][]int     // year of the table of each
	none      capital.FormulaPosition
	nonLife   float64 // of the position without cover: what the programme mitigates
}

func (a *Appraiser) newFormulaRule(f *capital.Formula, number int) (*formulaRule, error) {
	r := &formulaRule{a: a, formula: f, number: number}
	classes := a.c.Book.Table.Classes()
	years := 0
	for _, s := range f.Scenarios {
		years += len(f.Factors.Alternatives(s.Kind))
	}
	b := loss.NewBuilder(max(years, 1), classes)
	year := 0
	for _, s := range f.Scenarios {
		var gross []float64
		var at []int
		for _, events := range f.Factors.Alternatives(s.Kind) {
			year++
			total := 0.0
			for e, fraction := range events {
				for c, x := range s.Losses {
					row := loss.Row{Year: year, Event: fmt.Sprint(e + 1), Class: classes[c], Peril: s.Peril, Loss: fraction * x}
					if s.OneRisk {
						row.Risk = "1"
					}
					if err := b.Add(row); err != nil {
						return nil, fmt.Errorf("scenario %q: %w", s.Name, err)
					}
					total += row.Loss
				}
			}
			gross, at = append(gross, total), append(at, year-1)
		}
		r.gross, r.years = append(r.gross, gross), append(r.years, at)
	}
	table, err := b.Build()
	if err != nil {
		return nil, err
	}
	r.scenarios = table
	r.none = capital.FormulaPosition{
		Premium: a.premiums, ExcessCover: make([]bool, len(classes)), Scenario: r.gross,
		Recoverable: make([]float64, len(a.reinsurers())), Collateral: make([]float64, len(a.reinsurers())),
	}
	// Nothing is mitigated without cover, so the requirement of the other modules does not matter here.
	r.nonLife = f.Require(r.none, 0, &capital.FormulaScratch{}).NonLife
	return r, nil
}

// scenarioRecoveries gives what treaty i of a programme pays, at 100 %, in each year of the formula's scenarios; treaties inuring to it go first.
func (r *formulaRule) scenarioRecoveries(p treaty.Programme, i int) ([]float64, error) {
	needed := map[string]bool{}
	var need func(name string)
	need = func(name string) {
		if needed[name] {
			return
		}
		needed[name] = true
		for _, t := range p.Treaties {
			if t.Name == name {
				for _, other := range t.After {
					need(other)
				}
			}
		}
	}
	need(p.Treaties[i].Name)
	part := treaty.Programme{Name: p.Name}
	for _, t := range p.Treaties {
		if needed[t.Name] {
			part.Treaties = append(part.Treaties, t)
		}
	}
	outcome, err := treaty.Apply(r.scenarios, part)
	if err != nil {
		return nil, err
	}
	k := slices.IndexFunc(part.Treaties, func(t treaty.Treaty) bool { return t.Name == p.Treaties[i].Name })
	return outcome.Treaties[k].Recovery, nil
}

// classShare gives the part of a treaty's base premium that falls on each class.
func (a *Appraiser) classShare(p treaty.Programme, it item, c int) float64 {
	if it.terms.Kind != treaty.QuotaShare {
		return it.subject.byClass[c]
	}
	if it.priced.base == 0 {
		return 0
	}
	return p.SubjectFraction(it.place, a.c.Book.Table.Classes()[c]) * a.premiums[c] / it.priced.base
}

// fill works out the formula's inputs of a position in scratch memory.
func (r *formulaRule) fill(p *position, w *formulaWork) {
	copy(w.position.Premium, r.a.premiums)
	clear(w.position.ExcessCover)
	clear(w.position.Recoverable)
	clear(w.position.Collateral)
	for s, list := range r.gross {
		copy(w.position.Scenario[s], list)
	}
	classes := r.a.c.Book.Table.Classes()
	for _, it := range p.items {
		placed := it.terms.Placed()
		premium := float64(placed * it.priced.base)
		excess := it.terms.Kind == treaty.EventExcess || it.terms.Kind == treaty.RiskExcess
		for c := range classes {
			if share := r.a.classShare(p.programme, it, c); share > 0 {
				w.position.Premium[c] -= float64(share * premium)
				w.position.ExcessCover[c] = w.position.ExcessCover[c] || excess
			}
		}
		paid := it.priced.scenarios[r.number]
		for s, years := range r.years {
			for k, y := range years {
				if paid[y] > 0 {
					w.position.Scenario[s][k] += float64(premium*it.terms.Reinstated(paid[y])) - float64(placed*paid[y])
				}
			}
		}
		for _, line := range it.terms.Panel {
			j := r.a.reinsurer[line.Reinsurer]
			w.position.Recoverable[j] += float64(placed * line.Share * it.priced.recovery)
			w.position.Collateral[j] += line.Collateral
		}
	}
}

// formulaWork is the scratch memory of one formula.
type formulaWork struct {
	position capital.FormulaPosition
	scratch  capital.FormulaScratch
}

func (r *formulaRule) newWork() *formulaWork {
	w := &formulaWork{position: capital.FormulaPosition{
		Premium: make([]float64, len(r.none.Premium)), ExcessCover: make([]bool, len(r.none.ExcessCover)),
		Recoverable: make([]float64, len(r.none.Recoverable)), Collateral: make([]float64, len(r.none.Collateral)),
	}}
	for _, list := range r.gross {
		w.position.Scenario = append(w.position.Scenario, make([]float64, len(list)))
	}
	return w
}

func (r *formulaRule) figures(p *position, w *workspace) (capital.FormulaFigures, *formulaWork) {
	for len(w.formulas) <= r.number {
		w.formulas = append(w.formulas, nil)
	}
	if w.formulas[r.number] == nil {
		w.formulas[r.number] = r.newWork()
	}
	work := w.formulas[r.number]
	r.fill(p, work)
	return r.formula.Require(work.position, r.nonLife, &work.scratch), work
}

func (r *formulaRule) require(p *position, w *workspace) requirement {
	f, _ := r.figures(p, w)
	return requirement{f.Total, f.Total, 0}
}

// moves differentiates the formula by the premiums and expected recoveries that are simulated. What part of a premium falls on which class is taken as known.
func (r *formulaRule) moves(p *position, _ requirement, flows []flow) moves {
	w := r.newWork()
	r.fill(p, w)
	slopes := r.formula.Slopes(w.position, r.nonLife)
	m := r.a.noMoves(len(p.items))
	for k, it := range p.items {
		placed := it.terms.Placed()
		for c, slope := range slopes.Premium {
			m.base[k] -= slope * placed * r.a.classShare(p.programme, it, c)
		}
		paid := it.priced.scenarios[r.number]
		for s, years := range r.years {
			for a, y := range years {
				m.base[k] += slopes.Scenario[s][a] * placed * it.terms.Reinstated(paid[y])
			}
		}
		rise := 0.0
		for _, line := range it.terms.Panel {
			rise += slopes.Recoverable[r.a.reinsurer[line.Reinsurer]] * placed * line.Share
		}
		if rise != 0 {
			for y, x := range flows[k].recovery {
				m.years[y] += float64(rise * (x - it.priced.recovery))
			}
		}
	}
	return m
}

func (r *formulaRule) parts(p *position, w *workspace) []CapitalPart {
	f, _ := r.figures(p, w)
	return []CapitalPart{
		{Name: "premium and reserve risk", Amount: f.PremiumReserve},
		{Name: "natural catastrophes", Amount: f.Natural},
		{Name: "man-made catastrophes", Amount: f.ManMade},
		{Name: "catastrophe risk", Amount: f.Catastrophe},
		{Name: "non-life", Amount: f.NonLife},
		{Name: "default of reinsurers (type 1)", Amount: f.TypeOne},
		{Name: "default risk", Amount: f.Default},
		{Name: "basic requirement", Amount: f.Basic},
		{Name: "whole requirement", Amount: f.Total},
	}
}

// checkPanels reports reinsurers that nobody knows.
func (a *Appraiser) checkPanels(p treaty.Programme) error {
	var faults fault.List
	for _, t := range p.Treaties {
		for i, line := range t.Panel {
			if _, ok := a.reinsurer[line.Reinsurer]; !ok {
				faults.Add(fault.Fault{Key: fmt.Sprintf("%s.panel[%d].reinsurer", t.Name, i), Found: fmt.Sprintf("no reinsurer is named %q", line.Reinsurer)})
			}
		}
	}
	return faults.Err()
}
