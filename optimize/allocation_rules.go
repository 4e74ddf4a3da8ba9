package optimize

import (
	"math"
	"slices"

	"cedewright/portfolio/capital"
	"cedewright/portfolio/treaty"
)

// classScenarios gives what is left of every scenario and alternative by class, in money: recoveries fall on the classes whose rows they pay, reinstatement
// premiums on the same classes as the base premium.
func (r *formulaRule) classScenarios(p *position) ([][][]float64, error) {
	outcome, err := treaty.Apply(r.scenarios, placedPart(p.programme))
	if err != nil {
		return nil, err
	}
	columns := r.scenarios.Columns()
	net := make([][]float64, r.scenarios.Years())
	for y := range net {
		net[y] = make([]float64, len(r.a.premiums))
		for row := columns.Offset[y]; row < columns.Offset[y+1]; row++ {
			net[y][columns.Class[row]] += columns.Loss[row]
		}
	}
	placed := placedPart(p.programme)
	for i, t := range placed.Treaties {
		it := p.items[itemOf(p.items, t.Name)]
		for y := range net {
			for row := columns.Offset[y]; row < columns.Offset[y+1]; row++ {
				net[y][columns.Class[row]] -= float64(t.Placed() * outcome.Treaties[i].RowRecovery[row])
			}
			if f := outcome.Treaties[i].Reinstated[y]; f > 0 {
				for c := range net[y] {
					net[y][c] += float64(t.Placed()*it.priced.base*f) * it.subject.byClass[c]
				}
			}
		}
	}
	list := make([][][]float64, len(r.years))
	for s, years := range r.years {
		for _, y := range years {
			list[s] = append(list[s], net[y])
		}
	}
	return list, nil
}

// placedPart gives the placed treaties of a programme; what is not placed inures to nothing.
func placedPart(p treaty.Programme) treaty.Programme {
	for _, t := range p.Treaties {
		if t.Placed() == 0 {
			p = without(p, t.Name)
		}
	}
	return p
}

// allocate fills an allocation under the formula: classes by their volumes and scenarios, reinsurers by what they owe, and what the company gave as numbers.
func (r *formulaRule) allocate(k *Allocation, gross, net *position, flows *bookFlows) error {
	before, after := r.newWork(), r.newWork()
	r.fill(gross, before)
	r.fill(net, after)
	scenariosBefore, err := r.classScenarios(gross)
	if err != nil {
		return err
	}
	scenariosAfter, err := r.classScenarios(net)
	if err != nil {
		return err
	}
	from, to := r.formula.Parts(before.position, r.nonLife, scenariosBefore), r.formula.Parts(after.position, r.nonLife, scenariosAfter)
	for c, class := range r.a.c.Book.Classes {
		k.Classes = append(k.Classes, ClassCapital{
			Name: class.Name, Gross: Estimate{Value: from.Class(c)}, Net: Estimate{Value: to.Class(c)}, GrossMean: flows.grossMean(c), NetMean: flows.netMean(c),
		})
	}
	for j, u := range r.a.reinsurers() {
		k.Others = append(k.Others, OtherCapital{Name: "default of " + u.Name, Gross: from.Reinsurer[j], Net: to.Reinsurer[j]})
	}
	for i := range from.Other {
		if from.Other[i].Amount != 0 || to.Other[i].Amount != 0 {
			k.Others = append(k.Others, OtherCapital{Name: from.Other[i].Name, Gross: from.Other[i].Amount, Net: to.Other[i].Amount})
		}
	}
	slopes := r.formula.Slopes(after.position, r.nonLife)
	for _, it := range net.items {
		placed := it.terms.Placed()
		premium := float64(placed * it.priced.base)
		taken := 0.0 // what the treaty adds to the requirement
		for c, slope := range slopes.Premium {
			taken -= slope * premium * r.a.classShare(net.programme, it, c)
		}
		paid := it.priced.scenarios[r.number]
		for s, years := range r.years {
			for a, y := range years {
				taken += slopes.Scenario[s][a] * (premium*it.terms.Reinstated(paid[y]) - placed*paid[y])
			}
		}
		for _, line := range it.terms.Panel {
			taken += slopes.Recoverable[r.a.reinsurer[line.Reinsurer]] * placed * line.Share * it.priced.recovery
		}
		k.Treaties[it.place].Natural.Value = -taken
	}
	return nil
}

// allocate fills an allocation under a covariance: its perils, and the charges that are given.
func (r *covarianceRule) allocate(k *Allocation, gross, net *position) {
	before, after := r.rule.Parts(gross.perils[r.number]), r.rule.Parts(net.perils[r.number])
	slopes := r.rule.Slopes(net.perils[r.number])
	w := r.a.scratch.Get().(*workspace)
	defer r.a.scratch.Put(w)
	for i, y := range r.perils {
		k.Perils = append(k.Perils, PerilCapital{Name: y.name, Gross: Estimate{Value: before.Perils[i]}, Net: Estimate{Value: after.Perils[i]}})
		if len(net.items) == 0 {
			continue
		}
		effects, years := r.effects(net, y, w)
		weights := yearWeights{years: capitalWeights(capital.Criterion{Measure: capital.ValueAtRisk, Level: r.rule.Level, Basis: capital.Result}, years, net.perils[r.number][i].Net)}
		for j, effect := range effects {
			if effect != nil {
				taken := weights.part(effect)
				natural := &k.Treaties[net.items[j].place].Natural
				slope := slopes[i].Net - slopes[i].Recoverable
				natural.Value -= slope * taken.Value
				natural.StandardError = math.Hypot(natural.StandardError, slope*taken.StandardError)
			}
		}
	}
	for i, name := range capital.ChargeNames() {
		k.Others = append(k.Others, OtherCapital{Name: "charge " + name, Gross: before.Charges[i], Net: after.Charges[i]})
	}
}

// effects gives what each item adds to the yearly losses of one peril, nil for one that does not answer it, and the losses that remain.
func (r *covarianceRule) effects(p *position, y perilAtLevel, w *workspace) (effects [][]float64, net []float64) {
	effects, net = make([][]float64, len(p.items)), slices.Clone(y.annual)
	r.eachTreaty(p, y.name, w, func(item) bool { return true }, func(k int, t treaty.Treaty, annual []float64, touched []int32) {
		effect := make([]float64, r.a.years)
		placed := t.Placed()
		if t.Kind == treaty.QuotaShare {
			addScaled(effect, -placed, annual)
		}
		premium := float64(placed * p.items[k].priced.base)
		for _, year := range touched {
			effect[year] = float64(premium*t.Reinstated(annual[year])) - float64(placed*annual[year])
		}
		effects[k] = effect
		addScaled(net, 1, effect)
	})
	return effects, net
}
