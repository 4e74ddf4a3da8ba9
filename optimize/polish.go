package optimize

// polish moves the best plan along the steps until no single move improves it: each gene one or two steps up or down or, where it has few
// values, to any of them; a layer's two cuts together; two neighbouring cuts in opposite directions. When no single move helps, moves of
// two genes at once are tried, and singles again after a gain. It tells whether it ended where no single move improves, as against
// running out of budget.
func (r *run) polish() (bool, error) {
	limit := len(r.archive.records) + r.settings.Evaluations/2
	for round := 1; ; round++ {
		r.report("polish", round, 0)
		improved, err := r.tryMoves(r.singles(r.archive.records[r.archive.best].plan))
		if err != nil {
			return false, err
		}
		if improved {
			if len(r.archive.records) >= limit {
				return false, nil
			}
			continue
		}
		if len(r.archive.records) >= limit {
			return true, nil
		}
		improved, err = r.tryMoves(r.pairs(r.archive.records[r.archive.best].plan))
		if err != nil {
			return false, err
		}
		if !improved {
			return true, nil
		}
	}
}

// tryMoves appraises plans and tells whether the best of all has changed for the better.
func (r *run) tryMoves(plans []plan) (bool, error) {
	before := r.archive.best
	if _, err := r.archive.evaluate(plans); err != nil {
		return false, err
	}
	return r.archive.best != before, nil
}

// fewValues is the count of values up to which polish tries all of a gene's.
const fewValues = 12

// singles gives the neighbours of a plan.
func (r *run) singles(p plan) []plan {
	var list []plan
	add := func(changes map[int]int) {
		q := append(plan(nil), p...)
		for place, value := range changes {
			q[place] = value
		}
		list = append(list, r.coder.normalise(q))
	}
	for place, g := range r.coder.genes {
		if g.count <= fewValues {
			for value := range g.count {
				add(map[int]int{place: value})
			}
			continue
		}
		for _, by := range []int{-2, -1, 1, 2} {
			add(map[int]int{place: p[place] + by})
		}
	}
	for _, t := range r.coder.towers {
		for _, by := range []int{-2, -1, 1, 2} { // the top, with the cuts of layers not in use
			changes := map[int]int{}
			for i := t.count(p); i <= t.t.Layers; i++ {
				changes[t.cuts+i] = p[t.cuts+i] + by
			}
			add(changes)
		}
		for i := range t.t.Layers {
			low, high := t.cuts+i, t.cuts+i+1
			for _, by := range [][2]int{{1, 1}, {-1, -1}, {1, -1}, {-1, 1}} {
				add(map[int]int{low: p[low] + by[0], high: p[high] + by[1]})
			}
			for _, v := range r.coder.split(p, t, i) {
				list = append(list, r.coder.normalise(v))
			}
		}
	}
	return list
}

// split gives the plans in which layer i of a tower is cut in two, at the middle and one step from either end.
func (c *coder) split(p plan, t towerGenes, i int) []plan {
	low, high := p[t.cuts+i], p[t.cuts+i+1]
	if p[t.bought] == 0 || t.count(p) >= t.t.Layers || high-low < 2 {
		return nil
	}
	var list []plan
	for _, cut := range []int{low + 1, (low + high) / 2, high - 1} {
		q := append(plan(nil), p...)
		copy(q[t.cuts+i+2:t.cuts+t.t.Layers+1], p[t.cuts+i+1:t.cuts+t.t.Layers])
		q[t.cuts+i+1] = cut
		t.shift(q, i, 1)
		list = append(list, q)
	}
	return list
}

// pairs gives the plans that differ from a plan by one step in two genes.
func (r *run) pairs(p plan) []plan {
	var list []plan
	for a := range r.coder.genes {
		for b := range a {
			for _, by := range [][2]int{{1, 1}, {1, -1}, {-1, 1}, {-1, -1}} {
				q := append(plan(nil), p...)
				q[a] += by[0]
				q[b] += by[1]
				list = append(list, r.coder.normalise(q))
			}
		}
	}
	return list
}
