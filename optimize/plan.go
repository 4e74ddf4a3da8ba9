package optimize

import (
	"fmt"
	"slices"

	"cedewright/portfolio/treaty"
)

// A plan is a member of a space as small whole numbers, one a gene; it has one canonical form (see normalise), so that two plans are the
// same programme exactly when they are equal.
type plan []int

func (p plan) key() string {
	key := make([]byte, 0, 2*len(p))
	for _, g := range p {
		key = append(key, byte(g), byte(g>>8))
	}
	return string(key)
}

// gene says how many values a place of a plan has.
type gene struct {
	name  string
	count int
}

// coder turns plans into programmes and back.
type coder struct {
	space  Space
	genes  []gene
	varies []varyGenes
	towers []towerGenes
}

// varyGenes are the places of one varied treaty; −1 = not varied.
type varyGenes struct {
	v                                                            Vary
	bought, retention, limit, share, cession, deductible, amount int
}

func newCoder(s Space) *coder {
	c := &coder{space: s}
	add := func(name string, count int) int {
		c.genes = append(c.genes, gene{name, count})
		return len(c.genes) - 1
	}
	ranged := func(name string, r *Range) int {
		if r == nil {
			return -1
		}
		return add(name, r.count())
	}
	for _, v := range s.Vary {
		g := varyGenes{v: v, bought: -1, amount: -1}
		if v.Optional {
			g.bought = add(v.Treaty+" bought", 2)
		}
		g.retention = ranged(v.Treaty+" retention", v.Retention)
		g.limit = ranged(v.Treaty+" limit", v.Limit)
		g.share = ranged(v.Treaty+" share", v.Share)
		g.cession = ranged(v.Treaty+" cession", v.Cession)
		g.deductible = ranged(v.Treaty+" annual deductible", v.AnnualDeductible)
		if v.Reinstatements != nil {
			g.amount = add(v.Treaty+" reinstatements", v.Reinstatements.count())
		}
		c.varies = append(c.varies, g)
	}
	for _, t := range s.Towers {
		g := towerGenes{t: t, grid: t.grid(), amounts: -1}
		g.bought = add(t.Name+" bought", 2)
		g.lowest = min(Range{t.Retention.From, t.Retention.To, t.Step}.count(), g.grid.count()-1) - 1
		g.topFirst = g.grid.count() - 1
		for g.topFirst > 1 && g.grid.at(g.topFirst-1) >= t.Top.From-1e-9*t.Step {
			g.topFirst--
		}
		for i := range t.Layers + 1 {
			place := add(fmt.Sprintf("%s cut %d", t.Name, i), g.grid.count())
			if i == 0 {
				g.cuts = place
			}
		}
		for i := range t.Layers {
			place := add(fmt.Sprintf("%s share %d", t.Name, i+1), t.Share.count())
			if i == 0 {
				g.shares = place
			}
		}
		if t.Reinstatements != nil {
			for i := range t.Layers {
				place := add(fmt.Sprintf("%s reinstatements %d", t.Name, i+1), t.Reinstatements.count())
				if i == 0 {
					g.amounts = place
				}
			}
		}
		c.towers = append(c.towers, g)
	}
	return c
}

// normalise brings a plan, in place, to the canonical form of the programme that it stands for: genes within range, cuts in order, layers
// without width dropped, the genes of what is not placed at 0.
func (c *coder) normalise(p plan) plan {
	for i, g := range c.genes {
		p[i] = min(max(p[i], 0), g.count-1)
	}
	for _, v := range c.varies {
		if v.absent(p) { // a share or cession of 0 is the first value of its range
			for _, place := range v.genes() {
				p[place] = 0
			}
		}
	}
	for _, t := range c.towers {
		t.normalise(p)
	}
	return p
}

// A component is a varied treaty or a tower: what can be left out of a programme as a whole.
type component interface {
	absent(p plan) bool // not placed
	genes() []int       // all its places; with all at 0 it is not placed, or at its least where it cannot be left out
}

func (c *coder) components() []component {
	var list []component
	for _, v := range c.varies {
		list = append(list, v)
	}
	for _, t := range c.towers {
		list = append(list, t)
	}
	return list
}

func (v varyGenes) genes() []int {
	if v.bought >= 0 {
		return append(v.places(), v.bought)
	}
	return v.places()
}

// places lists the genes of a varied treaty's terms.
func (v varyGenes) places() []int {
	var list []int
	for _, place := range []int{v.retention, v.limit, v.share, v.cession, v.deductible, v.amount} {
		if place >= 0 {
			list = append(list, place)
		}
	}
	return list
}

// absent tells whether a plan does not place the treaty: it is not bought, or its share or cession is 0.
func (v varyGenes) absent(p plan) bool {
	return v.bought >= 0 && p[v.bought] == 0 || v.share >= 0 && v.v.Share.at(p[v.share]) == 0 || v.cession >= 0 && v.v.Cession.at(p[v.cession]) == 0
}

// decode gives the programme of a plan.
func (c *coder) decode(p plan) treaty.Programme {
	programme := treaty.Programme{Name: "candidate"}
	became := map[string][]string{} // names of the start programme whose place others take, or none
	for _, t := range c.towers {
		var names []string
		for _, layer := range t.layers(p) {
			names = append(names, layer.Name)
		}
		for _, name := range t.t.Replaces {
			became[name] = names
		}
	}
	for _, t := range c.space.Start.Treaties {
		if _, ok := became[t.Name]; ok {
			continue
		}
		for _, v := range c.varies {
			if v.v.Treaty == t.Name {
				t = v.apply(p, t)
			}
		}
		if t.Placed() == 0 {
			became[t.Name] = nil
			continue
		}
		programme.Treaties = append(programme.Treaties, t)
	}
	for _, t := range c.towers {
		programme.Treaties = append(programme.Treaties, t.layers(p)...)
	}
	for i, t := range programme.Treaties {
		programme.Treaties[i].After = renamed(t.After, became)
	}
	return programme
}

// renamed gives the names with those that were replaced exchanged for what took their place.
func renamed(names []string, became map[string][]string) []string {
	if !slices.ContainsFunc(names, func(name string) bool { _, ok := became[name]; return ok }) {
		return names
	}
	var list []string
	for _, name := range names {
		others, ok := became[name]
		if !ok {
			others = []string{name}
		}
		for _, o := range others {
			if !slices.Contains(list, o) {
				list = append(list, o)
			}
		}
	}
	return list
}

func (v varyGenes) apply(p plan, t treaty.Treaty) treaty.Treaty {
	if v.bought >= 0 && p[v.bought] == 0 {
		t.Share, t.Cession = 0, 0
		return t
	}
	for _, term := range []struct {
		place int
		r     *Range
		to    *float64
	}{
		{v.retention, v.v.Retention, &t.Retention}, {v.limit, v.v.Limit, &t.Limit}, {v.share, v.v.Share, &t.Share},
		{v.cession, v.v.Cession, &t.Cession}, {v.deductible, v.v.AnnualDeductible, &t.AnnualDeductible},
	} {
		if term.place >= 0 {
			*term.to = term.r.at(p[term.place])
		}
	}
	if v.amount >= 0 {
		t.Reinstatements, t.AnnualLimit = v.v.Reinstatements.at(p[v.amount]), 0
	}
	return t
}
