package optimize

import (
	"cmp"
	"slices"
	"strconv"
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
			moved = moved || !v.absent(best)
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
		if u.Placed() > 0 && (slices.Contains(t.t.Replaces, u.Name) || t.t.layerNumber(u.Name) > 0) {
			layers = append(layers, u)
		}
	}
	if len(layers) == 0 {
		return false
	}
	slices.SortStableFunc(layers, func(a, b treaty.Treaty) int { return cmp.Compare(a.Retention, b.Retention) })
	list := make([]segment, 0, len(layers))
	reached, last := 0, t.grid.count()-1
	for _, u := range layers {
		if reached == last {
			moved = true
			break
		}
		low, exactLow := t.grid.nearest(u.Retention)
		high, exactHigh := t.grid.nearest(u.Retention + u.Limit)
		share, exactShare := t.t.Share.nearest(u.Share)
		s := segment{low: min(max(low, reached), last-1), share: share}
		s.high = max(high, s.low+1)
		if t.t.Share.at(s.share) == 0 {
			s.share = min(1, t.t.Share.count()-1) // the least that is placed
		}
		if t.amounts >= 0 {
			moved = t.t.Reinstatements.encode(u, &s.amount) || moved
		}
		moved = moved || !exactLow || !exactHigh || !exactShare || s.low != low || s.high != high || !t.like(u)
		list = append(list, s)
		reached = s.high
	}
	return t.write(best, list) || moved
}

// like tells whether a treaty has the terms that all layers of the tower have.
func (t towerGenes) like(u treaty.Treaty) bool {
	v := t.t.Template
	sameAnnual := t.amounts >= 0 || u.AnnualLimit == v.AnnualLimit && (u.Reinstatements == nil) == (v.Reinstatements == nil) && slices.Equal(u.Reinstatements, v.Reinstatements)
	return sameAnnual && u.Kind == v.Kind && u.AnnualDeductible == v.AnnualDeductible && u.EventLimit == v.EventLimit &&
		u.Premium == v.Premium && (u.Curve == v.Curve || u.Premium.Given) && sameNames(u.Classes, v.Classes) && sameNames(u.Perils, v.Perils)
}

// layerNumber gives n for the name of the tower's layer n, 0 for any other name.
func (t Tower) layerNumber(name string) int {
	rest, ok := strings.CutPrefix(name, t.Name+" ")
	n, err := strconv.Atoi(rest)
	if !ok || err != nil || n < 1 || strconv.Itoa(n) != rest {
		return 0
	}
	return n
}
