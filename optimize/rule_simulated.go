package optimize

import (
	"slices"

	"cedewright/portfolio/capital"
	"cedewright/portfolio/sample"
)

// simulatedRule measures the simulated result of a year, alone and together with the rest of the company.
type simulatedRule struct {
	a        *Appraiser
	standard capital.Standard
	level    []int // by criterion: place of its level in Appraiser.levels
}

// collectLevels gives the levels of all criteria and of the net result, rising, each once, and the place of the lowest at which a tail value at risk is asked.
func collectLevels(standards []capital.Standard) (levels []sample.Level, means int) {
	levels = []sample.Level{oneIn10, oneIn200}
	var tails []sample.Level
	for _, s := range standards {
		for _, c := range s.Criteria {
			levels = append(levels, c.Level)
			if c.Measure == capital.TailValueAtRisk {
				tails = append(tails, c.Level)
			}
		}
	}
	slices.SortFunc(levels, func(a, b sample.Level) int {
		switch {
		case a == b:
			return 0
		case a.Tail() > b.Tail():
			return -1
		}
		return 1
	})
	levels = slices.Compact(levels)
	means = slices.IndexFunc(levels, func(l sample.Level) bool { return slices.Contains(tails, l) })
	if means < 0 {
		means = len(levels)
	}
	return levels, means
}

func (a *Appraiser) newSimulatedRule(s capital.Standard) *simulatedRule {
	r := &simulatedRule{a: a, standard: s}
	for _, c := range s.Criteria {
		r.level = append(r.level, slices.Index(a.levels, c.Level))
	}
	return r
}

// of gives required capital of one view, and the criterion that sets it.
func (r *simulatedRule) of(v view, w *workspace) (float64, int) {
	w.amounts = w.amounts[:0]
	for i, c := range r.standard.Criteria {
		w.amounts = append(w.amounts, c.From(v.tails[r.level[i]], v.mean))
	}
	return r.standard.Combine(w.amounts)
}

func (r *simulatedRule) require(p *position, w *workspace) requirement {
	alone, setBy := r.of(view{p.losses, p.mean, p.tails}, w)
	rest := r.a.c.Rest
	switch {
	case rest == nil:
		return requirement{alone, alone, setBy}
	case rest.Quantile == nil:
		return requirement{rest.Combine(alone), alone, setBy}
	}
	amount, setBy := r.of(p.company, w)
	return requirement{amount, alone, setBy}
}

func (r *simulatedRule) moves(p *position, q requirement, flows []flow) moves {
	m := r.movesOf(p.company, q.setBy, p.items, flows)
	r.a.withinStrata(m.years)
	if rest := r.a.c.Rest; rest != nil && rest.Quantile == nil {
		return m.scaled(rest.Slope(q.alone))
	}
	return m
}

// movesOf gives the moves of the requirement of one view.
func (r *simulatedRule) movesOf(v view, setBy int, items []item, flows []flow) moves {
	m := r.a.noMoves(len(items))
	for i, share := range r.standard.Shares(setBy) {
		c := r.standard.Criteria[i]
		if share == 0 {
			continue
		}
		addScaled(m.years, share, c.Influence(v.losses, nil))
		if c.From(v.tails[r.level[i]], v.mean) == 0 && c.Basis == capital.Result {
			continue
		}
		share *= c.Ratio
		var weights []float64
		for k, it := range items {
			f, placed := flows[k], it.terms.Placed()
			if f.reinstated != nil && weights == nil {
				weights = tailWeights(v.losses, c.Measure, c.Level)
			}
			m.base[k] += share * placed * capitalSlope(c.Basis, weights, f, it.priced)
			if c.Basis == capital.Result {
				m.commission[k] -= share * placed
			}
		}
	}
	return m
}

// capitalSlope is by how much the measure of a criterion rises when the base premium of a full treaty, placed in full, rises by one.
func capitalSlope(b capital.Basis, weights []float64, f flow, k *priced) float64 {
	slope := 1.0
	if b == capital.Deviation {
		slope = 0
	}
	if f.reinstated != nil {
		slope += meanProduct(weights, f.reinstated)
		if b == capital.Deviation {
			slope -= k.reinstated
		}
	}
	return slope
}

func (r *simulatedRule) parts(p *position, w *workspace) []CapitalPart {
	if len(r.standard.Criteria) == 1 {
		return nil
	}
	_, setBy := r.of(p.company, w)
	var list []CapitalPart
	for i, c := range r.standard.Criteria {
		list = append(list, CapitalPart{Name: c.String(), Amount: w.amounts[i], Sets: i == setBy})
	}
	return list
}
