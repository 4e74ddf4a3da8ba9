package optimize

import "slices"

// size gives the number of plans before those that mean the same are told apart: an upper bound of the count of programmes.
func (c *coder) size() float64 {
	size := 1.0
	for _, v := range c.varies {
		inner := 1.0
		for _, place := range v.places() {
			inner *= float64(c.genes[place].count)
		}
		if v.bought >= 0 {
			inner++
		}
		size *= inner
	}
	for _, t := range c.towers {
		size *= t.size()
	}
	return size
}

func (t towerGenes) size() float64 {
	layer := float64(t.t.Share.count())
	if t.amounts >= 0 {
		layer *= float64(t.t.Reinstatements.count())
	}
	size := 1.0 // not bought
	last := t.grid.count() - 1
	for width := 1; width <= last; width++ {
		bottoms := min(t.lowest, last-width) - max(0, t.topFirst-width) + 1
		if bottoms <= 0 {
			continue
		}
		ways, between := layer, float64(width-1)
		for layers := 1; layers <= t.t.Layers; layers++ {
			size += float64(bottoms) * ways
			ways *= layer * (between - float64(layers-1)) / float64(layers)
			if ways <= 0 {
				break
			}
		}
	}
	return size
}

// Size gives the count of programmes in the space, an upper bound where different plans can mean the same programme.
func (s Space) Size() float64 { return newCoder(s).size() }

// all lists every distinct plan. It is for spaces whose size is small.
func (c *coder) all() []plan {
	plans := []plan{make(plan, len(c.genes))}
	for _, v := range c.varies {
		var next []plan
		for _, p := range plans {
			next = append(next, v.all(c, p)...)
		}
		plans = next
	}
	for _, t := range c.towers {
		var next []plan
		for _, p := range plans {
			next = append(next, t.all(p)...)
		}
		plans = next
	}
	seen := map[string]bool{}
	var distinct []plan
	for _, p := range plans {
		if key := c.normalise(p).key(); !seen[key] {
			seen[key] = true
			distinct = append(distinct, p)
		}
	}
	return distinct
}

// all lists the plans that differ from one in the genes of a varied treaty.
func (v varyGenes) all(c *coder, p plan) []plan {
	bought := slices.Clone(p)
	var list []plan
	if v.bought >= 0 {
		list = append(list, slices.Clone(p))
		bought[v.bought] = 1
	}
	placed := []plan{bought}
	for _, place := range v.places() {
		placed = eachValue(placed, place, c.genes[place].count)
	}
	return append(list, placed...)
}

// eachValue lists plans with each value of one gene.
func eachValue(plans []plan, place, count int) []plan {
	list := make([]plan, 0, len(plans)*count)
	for _, p := range plans {
		for value := range count {
			q := slices.Clone(p)
			q[place] = value
			list = append(list, q)
		}
	}
	return list
}

// all lists the plans that differ from one in the genes of a tower: none, and every set of cuts with every share and count of reinstatements
// of every layer.
func (t towerGenes) all(p plan) []plan {
	list := []plan{slices.Clone(p)}
	bought := slices.Clone(p)
	bought[t.bought] = 1
	for bottom := 0; bottom <= t.lowest; bottom++ {
		for top := max(t.topFirst, bottom+1); top < t.grid.count(); top++ {
			for _, cuts := range choices(bottom+1, top, t.t.Layers-1) {
				q := slices.Clone(bought)
				cuts = append(append([]int{bottom}, cuts...), top)
				for i := range t.t.Layers + 1 {
					q[t.cuts+i] = cuts[min(i, len(cuts)-1)]
				}
				layers := []plan{q}
				for i := range len(cuts) - 1 {
					layers = eachValue(layers, t.shares+i, t.t.Share.count())
					if t.amounts >= 0 {
						layers = eachValue(layers, t.amounts+i, t.t.Reinstatements.count())
					}
				}
				list = append(list, layers...)
			}
		}
	}
	return list
}

// choices lists the ways to choose at most count numbers from first up to, but without, end, in rising order.
func choices(first, end, count int) [][]int {
	list := [][]int{nil}
	if count == 0 {
		return list
	}
	for x := first; x < end; x++ {
		for _, rest := range choices(x+1, end, count-1) {
			list = append(list, append([]int{x}, rest...))
		}
	}
	return list
}
