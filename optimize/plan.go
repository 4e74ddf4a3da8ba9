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

// towerGenes are the places of one tower: whether it is bought, its cuts (one more than layers), and each layer's share and count of
// reinstatements.
type towerGenes struct {
	t        Tower
	grid     Range
	bought   int
	cuts     int // first of Layers+1
	shares   int // first of Layers
	amounts  int // first of Layers; −1 = not varied
	lowest   int // highest cut that may be the retention is lowest; places on the grid
	topFirst int // lowest place that may be the top
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

// size gives the number of plans before those that mean the same are told apart: an upper bound of the count of programmes.
func (c *coder) size() float64 {
	size := 1.0
	for _, v := range c.varies {
		inner := 1.0
		for _, place := range []int{v.retention, v.limit, v.share, v.cession, v.deductible, v.amount} {
			if place >= 0 {
				inner *= float64(c.genes[place].count)
			}
		}
		if v.bought >= 0 {
			inner++
		}
		size *= inner
	}
	for _, t := range c.towers {
		layer := float64(t.t.Share.count())
		if t.amounts >= 0 {
			layer *= float64(t.t.Reinstatements.count())
		}
		inner := 1.0
		for bottom := 0; bottom <= t.lowest; bottom++ {
			for top := max(t.topFirst, bottom+1); top < t.grid.count(); top++ {
				ways, between := layer, float64(top-bottom-1)
				for layers := 1; layers <= t.t.Layers; layers++ {
					inner += ways
					ways *= layer * (between - float64(layers-1)) / float64(layers)
					if ways <= 0 {
						break
					}
				}
			}
		}
		size *= inner
	}
	return size
}

// Size gives the count of programmes in the space, an upper bound where different plans can mean the same programme.
func (s Space) Size() float64 { return newCoder(s).size() }

// normalise brings a plan, in place, to the canonical form of the programme that it stands for: genes within range, cuts in order, layers
// without width dropped, the genes of what is not bought at 0.
func (c *coder) normalise(p plan) plan {
	for i, g := range c.genes {
		p[i] = min(max(p[i], 0), g.count-1)
	}
	for _, v := range c.varies {
		if v.bought >= 0 && p[v.bought] == 0 {
			for _, place := range []int{v.retention, v.limit, v.share, v.cession, v.deductible, v.amount} {
				if place >= 0 {
					p[place] = 0
				}
			}
		}
	}
	for _, t := range c.towers {
		t.normalise(p)
	}
	return p
}

func (t towerGenes) normalise(p plan) {
	layers := t.t.Layers
	cuts, shares := p[t.cuts:t.cuts+layers+1], p[t.shares:t.shares+layers]
	amounts := make([]int, layers)
	if t.amounts >= 0 {
		amounts = p[t.amounts : t.amounts+layers]
	}
	if p[t.bought] == 0 {
		clear(cuts)
		clear(shares)
		clear(amounts)
		return
	}
	slices.Sort(cuts)
	cuts[0] = min(cuts[0], t.lowest)
	cuts[layers] = max(cuts[layers], t.topFirst, cuts[0]+1)
	kept := 0
	for i := range layers {
		low, high := min(max(cuts[i], cuts[0]), cuts[layers]), min(max(cuts[i+1], cuts[0]), cuts[layers])
		if low == high {
			continue
		}
		if t.t.Share.at(shares[i]) == 0 {
			amounts[i] = 0
		}
		cuts[kept], shares[kept], amounts[kept] = low, shares[i], amounts[i]
		kept++
	}
	top := cuts[layers]
	for i := kept; i <= layers; i++ {
		cuts[i] = top
	}
	for i := kept; i < layers; i++ {
		shares[i], amounts[i] = 0, 0
	}
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

// layers gives the treaties of a tower, bottom first; those of share 0 are left out.
func (t towerGenes) layers(p plan) []treaty.Treaty {
	if p[t.bought] == 0 {
		return nil
	}
	var list []treaty.Treaty
	for i := range t.t.Layers {
		low, high := p[t.cuts+i], p[t.cuts+i+1]
		share := t.t.Share.at(p[t.shares+i])
		if high <= low || share == 0 {
			continue
		}
		layer := t.t.Template
		layer.Name = fmt.Sprintf("%s %d", t.t.Name, len(list)+1)
		layer.Retention = t.grid.at(low)
		layer.Limit = neat(t.grid.at(high) - layer.Retention)
		layer.Share = share
		if t.amounts >= 0 {
			layer.Reinstatements = t.t.Reinstatements.at(p[t.amounts+i])
		}
		list = append(list, layer)
	}
	return list
}
