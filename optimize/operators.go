package optimize

import "math/rand"

// The operators of the genetic search. They change the plan that they are given and nothing else, and leave it in canonical form.

// random draws a plan: every gene evenly, towers with a random number of layers.
func (c *coder) random(r *rand.Rand) plan {
	p := make(plan, len(c.genes))
	for i, g := range c.genes {
		p[i] = r.Intn(g.count)
	}
	for _, v := range c.varies {
		if v.bought >= 0 && r.Intn(4) > 0 {
			p[v.bought] = 1
		}
	}
	for _, t := range c.towers {
		if r.Intn(8) > 0 {
			p[t.bought] = 1
		}
		p[t.cuts] = r.Intn(t.lowest + 1)
		top := max(t.topFirst, p[t.cuts]+1)
		top += r.Intn(t.grid.count() - top)
		layers := 1 + r.Intn(t.t.Layers)
		for i := 1; i <= t.t.Layers; i++ {
			p[t.cuts+i] = top
			if i < layers {
				p[t.cuts+i] = p[t.cuts] + r.Intn(top-p[t.cuts]+1)
			}
		}
	}
	return c.normalise(p)
}

// cross takes parts of the mate into the receiver: the terms of a varied treaty as a whole or one by one, and of a tower everything above
// or below a height, so that good layers stay together.
func (c *coder) cross(receiver, mate plan, r *rand.Rand) {
	for _, v := range c.varies {
		whole := r.Intn(2) == 0
		take := r.Intn(2) == 0
		for _, place := range []int{v.bought, v.retention, v.limit, v.share, v.cession, v.deductible, v.amount} {
			if !whole {
				take = r.Intn(2) == 0
			}
			if place >= 0 && take {
				receiver[place] = mate[place]
			}
		}
	}
	for _, t := range c.towers {
		t.cross(receiver, mate, r)
	}
	c.normalise(receiver)
}

func (t towerGenes) cross(receiver, mate plan, r *rand.Rand) {
	switch {
	case receiver[t.bought] == 0 || mate[t.bought] == 0 || r.Intn(4) == 0:
		if r.Intn(2) == 0 {
			t.copy(receiver, mate)
		}
	default: // the lower part of the receiver, the upper part of the mate
		height := r.Intn(t.grid.count())
		var cuts, shares, amounts []int
		add := func(p plan, i, low, high int) {
			if low >= high || len(shares) == t.t.Layers {
				return
			}
			if len(cuts) == 0 {
				cuts = append(cuts, low)
			}
			cuts = append(cuts, high)
			shares = append(shares, p[t.shares+i])
			if t.amounts >= 0 {
				amounts = append(amounts, p[t.amounts+i])
			}
		}
		for i := range t.t.Layers {
			add(receiver, i, receiver[t.cuts+i], min(receiver[t.cuts+i+1], height))
		}
		for i := range t.t.Layers {
			add(mate, i, max(mate[t.cuts+i], height), mate[t.cuts+i+1])
		}
		if len(shares) == 0 {
			return
		}
		top := cuts[len(cuts)-1]
		for i := range t.t.Layers + 1 {
			receiver[t.cuts+i] = top
			if i < len(cuts) {
				receiver[t.cuts+i] = cuts[i]
			}
		}
		for i := range shares {
			receiver[t.shares+i] = shares[i]
			if t.amounts >= 0 {
				receiver[t.amounts+i] = amounts[i]
			}
		}
	}
}

func (t towerGenes) copy(receiver, mate plan) {
	receiver[t.bought] = mate[t.bought]
	copy(receiver[t.cuts:t.cuts+t.t.Layers+1], mate[t.cuts:])
	copy(receiver[t.shares:t.shares+t.t.Layers], mate[t.shares:])
	if t.amounts >= 0 {
		copy(receiver[t.amounts:t.amounts+t.t.Layers], mate[t.amounts:])
	}
}

// mutate makes one to three moves.
func (c *coder) mutate(p plan, r *rand.Rand) {
	parts := len(c.varies) + 3*len(c.towers) // towers have more to move
	for range 1 + r.Intn(3) {
		if k := r.Intn(parts); k < len(c.varies) {
			c.mutateVary(c.varies[k], p, r)
		} else {
			c.towers[(k-len(c.varies))/3].mutate(c, p, r)
		}
		c.normalise(p)
	}
}

func (c *coder) mutateVary(v varyGenes, p plan, r *rand.Rand) {
	var places []int
	for _, place := range []int{v.retention, v.limit, v.share, v.cession, v.deductible, v.amount} {
		if place >= 0 {
			places = append(places, place)
		}
	}
	if v.bought >= 0 && (len(places) == 0 || r.Intn(6) == 0 || p[v.bought] == 0) {
		if p[v.bought] = 1 - p[v.bought]; p[v.bought] == 1 {
			for _, place := range places {
				p[place] = r.Intn(c.genes[place].count)
			}
		}
		return
	}
	if len(places) > 0 {
		c.step(p, places[r.Intn(len(places))], r)
	}
}

// step moves one gene: mostly to a neighbour, sometimes anywhere.
func (c *coder) step(p plan, place int, r *rand.Rand) {
	switch r.Intn(5) {
	case 0:
		p[place] = r.Intn(c.genes[place].count)
	case 1, 2:
		p[place] += 1 + r.Intn(2)
	default:
		p[place] -= 1 + r.Intn(2)
	}
}

// mutate moves a cut, merges two layers, splits one, or changes a layer's share or reinstatements.
func (t towerGenes) mutate(c *coder, p plan, r *rand.Rand) {
	if p[t.bought] == 0 || r.Intn(30) == 0 {
		fresh := c.random(r)
		p[t.bought] = 1 - p[t.bought]
		if p[t.bought] == 1 {
			fresh[t.bought] = 1
			t.copy(p, fresh)
		}
		return
	}
	layers := t.count(p)
	switch layer := r.Intn(layers); r.Intn(6) {
	case 0, 1:
		c.step(p, t.cuts+r.Intn(layers+1), r)
		t.close(p, layers)
	case 2:
		if layers > 1 { // merge with the layer above
			copy(p[t.cuts+1+layer:t.cuts+t.t.Layers+1], append(plan(nil), p[t.cuts+min(2+layer, t.t.Layers):t.cuts+t.t.Layers+1]...))
			t.shift(p, layer, -1)
			t.close(p, layers-1)
		}
	case 3:
		if width := p[t.cuts+layer+1] - p[t.cuts+layer]; layers < t.t.Layers && width > 1 {
			cut := p[t.cuts+layer] + 1 + r.Intn(width-1)
			copy(p[t.cuts+layer+2:t.cuts+t.t.Layers+1], append(plan(nil), p[t.cuts+layer+1:t.cuts+t.t.Layers]...))
			p[t.cuts+layer+1] = cut
			t.shift(p, layer, 1)
		}
	case 4:
		c.step(p, t.shares+layer, r)
	default:
		if t.amounts >= 0 {
			c.step(p, t.amounts+layer, r)
		} else {
			c.step(p, t.shares+layer, r)
		}
	}
}

// count gives the layers in use.
func (t towerGenes) count(p plan) int {
	n := 0
	for i := range t.t.Layers {
		if p[t.cuts+i+1] > p[t.cuts+i] {
			n++
		}
	}
	return max(n, 1)
}

// close sets the cuts above the last layer in use to its top.
func (t towerGenes) close(p plan, layers int) {
	for i := layers + 1; i <= t.t.Layers; i++ {
		p[t.cuts+i] = p[t.cuts+layers]
	}
}

// shift moves shares and reinstatements of the layers above one: up to make room for its double, or down over its upper neighbour.
func (t towerGenes) shift(p plan, layer, by int) {
	for _, first := range []int{t.shares, t.amounts} {
		if first < 0 {
			continue
		}
		genes := p[first : first+t.t.Layers]
		if by > 0 {
			copy(genes[layer+1:], append(plan(nil), genes[layer:t.t.Layers-1]...))
		} else if layer+2 <= t.t.Layers {
			copy(genes[layer+1:], append(plan(nil), genes[layer+2:]...))
		}
	}
}
