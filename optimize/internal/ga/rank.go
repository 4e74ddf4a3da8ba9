package ga

import (
	"cmp"
	"math"
	"math/rand"
	"slices"
	"sort"
)

// place is the place of a plan among others: the front on which it lies, from 0, and how far its neighbours on that front are.
type place struct {
	front    int
	crowding float64
}

// dominates tells whether a is better than b: feasible before infeasible, less violation before more, else not worse in both objectives
// and better in one (Deb, Pratap, Agarwal and Meyarivan 2002).
func dominates(a, b Score) bool {
	switch {
	case a.Violation != b.Violation:
		return a.Violation < b.Violation
	case a.Violation > 0:
		return false
	}
	return a.Objectives[0] <= b.Objectives[0] && a.Objectives[1] <= b.Objectives[1] && a.Objectives != b.Objectives
}

// rank sorts into fronts that do not dominate one another and measures crowding within each (the same paper). With two objectives one sweep
// by the first objective does: a plan belongs to the first front whose latest member, the smallest in the second objective so far, does
// not dominate it; and every front before that one has a member that does, so the place is found by halving.
func rank(list []*genome) []place {
	order := make([]int, len(list))
	for i := range order {
		order[i] = i
	}
	slices.SortStableFunc(order, func(i, j int) int {
		a, b := list[i].score, list[j].score
		if c := cmp.Compare(a.Violation, b.Violation); c != 0 || a.Violation > 0 {
			return c
		}
		return cmp.Or(cmp.Compare(a.Objectives[0], b.Objectives[0]), cmp.Compare(a.Objectives[1], b.Objectives[1]))
	})
	var fronts [][]int
	for _, i := range order {
		k := sort.Search(len(fronts), func(k int) bool { return !dominates(list[fronts[k][len(fronts[k])-1]].score, list[i].score) })
		if k == len(fronts) {
			fronts = append(fronts, nil)
		}
		fronts[k] = append(fronts[k], i)
	}
	places := make([]place, len(list))
	for k, front := range fronts {
		for _, i := range front {
			places[i].front = k
		}
		slices.Sort(front) // ties of crowding go by place in the list
		crowd(list, front, places)
	}
	return places
}

// crowd gives each plan of a front the sum over objectives of the distance between its neighbours; the ends get infinity.
func crowd(list []*genome, front []int, places []place) {
	for k := range 2 {
		slices.SortStableFunc(front, func(a, b int) int {
			return cmp.Compare(list[a].score.Objectives[k], list[b].score.Objectives[k])
		})
		first, last := front[0], front[len(front)-1]
		width := list[last].score.Objectives[k] - list[first].score.Objectives[k]
		places[first].crowding, places[last].crowding = math.Inf(1), math.Inf(1)
		if width <= 0 {
			continue
		}
		for i := 1; i < len(front)-1; i++ {
			gap := list[front[i+1]].score.Objectives[k] - list[front[i-1]].score.Objectives[k]
			places[front[i]].crowding += gap / width
		}
	}
}

// better compares by front, then by crowding.
func better(a, b place) bool {
	if a.front != b.front {
		return a.front < b.front
	}
	return a.crowding > b.crowding
}

// cheaper compares by violation, then by the scalar.
func cheaper(a, b Score) bool {
	if a.Violation != b.Violation {
		return a.Violation < b.Violation
	}
	return a.Scalar < b.Scalar
}

// tournament draws two and gives the better.
func tournament(list []*genome, places []place, scalar bool, r *rand.Rand) int {
	a, b := r.Intn(len(list)), r.Intn(len(list))
	if scalar && cheaper(list[b].score, list[a].score) || !scalar && better(places[b], places[a]) {
		return b
	}
	return a
}

// survive keeps size plans: first different ones, a share of them by the scalar, the rest by front and crowding; equal plans fill up
// only when there are not enough different ones, so that the population does not collapse onto one plan.
func survive(list []*genome, size int) []*genome {
	distinct, twins := split(list)
	places := rank(distinct)
	order := make([]int, len(distinct))
	for i := range order {
		order[i] = i
	}
	kept := make([]*genome, 0, size)
	taken := make([]bool, len(distinct))
	take := func(i int) {
		if !taken[i] && len(kept) < size {
			taken[i] = true
			kept = append(kept, distinct[i])
		}
	}
	slices.SortStableFunc(order, func(a, b int) int {
		switch {
		case cheaper(distinct[a].score, distinct[b].score):
			return -1
		case cheaper(distinct[b].score, distinct[a].score):
			return 1
		}
		return 0
	})
	for _, i := range order[:min(len(order), int(math.Ceil(eliteShare*float64(size))))] {
		take(i)
	}
	slices.SortStableFunc(order, func(a, b int) int {
		switch {
		case better(places[a], places[b]):
			return -1
		case better(places[b], places[a]):
			return 1
		}
		return 0
	})
	for _, i := range order {
		take(i)
	}
	for _, g := range twins {
		if len(kept) < size {
			kept = append(kept, g)
		}
	}
	return kept
}

// split separates the first of each plan from its repetitions.
func split(list []*genome) (distinct, twins []*genome) {
	seen := make(map[string]bool, len(list))
	key := make([]byte, 0, 128)
	for _, g := range list {
		key = key[:0]
		for _, x := range g.plan {
			key = append(key, byte(x), byte(x>>8), byte(x>>16))
		}
		if seen[string(key)] {
			twins = append(twins, g)
			continue
		}
		seen[string(key)] = true
		distinct = append(distinct, g)
	}
	return distinct, twins
}
