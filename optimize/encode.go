package optimize

import (
	"cmp"
	"slices"
	"strings"

	"cedewright/portfolio/treaty"
)

// encode gives the plan nearest to a programme, and whether something had to be moved to a step of the space.
func (c *coder) encode(p treaty.Programme) (best plan, moved bool) {
	best = make(plan, len(c.genes))
	place := func(gene int, r *Range, value float64) {
		if gene < 0 {
			return
		}
		i, exact := r.nearest(value)
		best[gene], moved = i, moved || !exact
	}
	for _, v := range c.varies {
		i := slices.IndexFunc(p.Treaties, func(t treaty.Treaty) bool { return t.Name == v.v.Treaty })
		if i < 0 || p.Treaties[i].Placed() == 0 {
			if v.bought < 0 && v.share < 0 && v.cession < 0 {
				moved = true
			}
			continue
		}
		t := p.Treaties[i]
		if v.bought >= 0 {
			best[v.bought] = 1
		}
		place(v.retention, v.v.Retention, t.Retention)
		place(v.limit, v.v.Limit, t.Limit)
		place(v.share, v.v.Share, t.Share)
		place(v.cession, v.v.Cession, t.Cession)
		place(v.deductible, v.v.AnnualDeductible, t.AnnualDeductible)
		if v.amount >= 0 {
			moved = v.v.Reinstatements.encode(t, &best[v.amount]) || moved
		}
	}
	for _, t := range c.towers {
		moved = t.encode(p, best) || moved
	}
	return c.normalise(best), moved
}

// encode sets the gene for the count of a treaty's reinstatements, and tells whether count or charge differ from what the range has.
func (r ReinstatementRange) encode(t treaty.Treaty, gene *int) (moved bool) {
	n := len(t.Reinstatements)
	*gene = min(max(n-r.From, 0), r.count()-1)
	for _, charge := range t.Reinstatements {
		moved = moved || charge != r.Charge
	}
	return moved || t.Reinstatements == nil || *gene+r.From != n
}

// encode sets the genes of a tower from the layers of a programme that it replaces or that bear its name.
func (t towerGenes) encode(p treaty.Programme, best plan) (moved bool) {
	var layers []treaty.Treaty
	for _, u := range p.Treaties {
		if u.Placed() > 0 && (slices.Contains(t.t.Replaces, u.Name) || t.named(u.Name)) {
			layers = append(layers, u)
		}
	}
	if len(layers) == 0 {
		return false
	}
	slices.SortStableFunc(layers, func(a, b treaty.Treaty) int { return cmp.Compare(a.Retention, b.Retention) })
	if len(layers) > t.t.Layers {
		layers, moved = layers[:t.t.Layers], true
	}
	best[t.bought] = 1
	for i, u := range layers {
		low, exactLow := t.grid.nearest(u.Retention)
		high, exactHigh := t.grid.nearest(u.Retention + u.Limit)
		share, exactShare := t.t.Share.nearest(u.Share)
		if i > 0 && low != best[t.cuts+i] {
			moved = true // a gap or an overlap, which a tower does not have
		}
		if i == 0 {
			best[t.cuts] = low
		}
		best[t.cuts+i+1] = max(high, best[t.cuts+i]+1)
		best[t.shares+i] = share
		moved = moved || !exactLow || !exactHigh || !exactShare
		if t.amounts >= 0 {
			moved = t.t.Reinstatements.encode(u, &best[t.amounts+i]) || moved
		}
	}
	for i := len(layers) + 1; i <= t.t.Layers; i++ {
		best[t.cuts+i] = best[t.cuts+len(layers)]
	}
	if best[t.cuts] > t.lowest || best[t.cuts+len(layers)] < t.topFirst {
		moved = true
	}
	return moved
}

// named tells whether a treaty bears the name of one of the tower's layers.
func (t towerGenes) named(name string) bool {
	rest, ok := strings.CutPrefix(name, t.t.Name+" ")
	return ok && len(rest) > 0 && rest[0] >= '1' && rest[0] <= '9'
}
