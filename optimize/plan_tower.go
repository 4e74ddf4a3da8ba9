package optimize

import (
	"fmt"
	"slices"

	"cedewright/portfolio/treaty"
)

// towerGenes are the places of one tower: whether it is bought, its cuts (one more than layers), and each layer's share and count of
// reinstatements.
type towerGenes struct {
	t        Tower
	grid     Range
	bought   int
	cuts     int // first of Layers+1
	shares   int // first of Layers
	amounts  int // first of Layers; −1 = not varied
	lowest   int // highest place on the grid that may be the retention
	topFirst int // lowest place that may be the top
}

func (t towerGenes) absent(p plan) bool { return p[t.bought] == 0 }

func (t towerGenes) genes() []int {
	list := []int{t.bought}
	for i := range t.t.Layers + 1 {
		list = append(list, t.cuts+i)
	}
	for i := range t.t.Layers {
		list = append(list, t.shares+i)
		if t.amounts >= 0 {
			list = append(list, t.amounts+i)
		}
	}
	return list
}

// A segment is a layer of a tower in places on its grid, with its genes.
type segment struct{ low, high, share, amount int }

// segments lists the placed layers of a plan, bottom first, whatever the order of its cuts.
func (t towerGenes) segments(p plan) []segment {
	if p[t.bought] == 0 {
		return nil
	}
	n := t.t.Layers
	cuts := slices.Clone(p[t.cuts : t.cuts+n+1])
	slices.Sort(cuts)
	cuts[0] = min(cuts[0], t.lowest)
	cuts[n] = max(cuts[n], t.topFirst, cuts[0]+1)
	var list []segment
	for i := range n {
		s := segment{low: cuts[i], high: cuts[i+1], share: p[t.shares+i]}
		if t.amounts >= 0 {
			s.amount = p[t.amounts+i]
		}
		if s.low < s.high && t.t.Share.at(s.share) > 0 {
			list = append(list, s)
		}
	}
	return list
}

// normalise brings the genes of a tower to canonical form.
func (t towerGenes) normalise(p plan) { t.write(p, t.segments(p)) }

// write sets the genes of a tower to placed layers, bottom first and not overlapping, in canonical form. What lies open between them, or
// between them and the ranges of retention and top, becomes a layer of share 0. Where the range of shares does not have that, or there
// would be too many layers, the layer above is drawn down, the ends are drawn out, and layers beyond the count are dropped from the top.
// It tells whether it had to do any of this drawing and dropping.
func (t towerGenes) write(p plan, list []segment) (moved bool) {
	n := t.t.Layers
	full, moved := t.touching(list, t.t.Share.From == 0)
	if len(full) > n {
		full, _ = t.touching(list[:min(len(list), n)], false)
		moved = true
	}
	p[t.bought] = min(len(full), 1)
	top := 0
	for i := range n {
		s := segment{low: top, high: top}
		if i < len(full) {
			s = full[i]
			top = s.high
		}
		p[t.cuts+i], p[t.shares+i] = s.low, s.share
		if t.amounts >= 0 {
			p[t.amounts+i] = s.amount
		}
	}
	p[t.cuts+n] = top
	return moved
}

// touching makes layers touch, from the range of the retention to the range of the top: with open layers between them, or by drawing them out.
func (t towerGenes) touching(list []segment, open bool) (full []segment, moved bool) {
	if len(list) == 0 {
		return nil, false
	}
	reached := min(list[0].low, t.lowest)
	for _, s := range list {
		if s.low > reached && open {
			full = append(full, segment{low: reached, high: s.low})
		} else if s.low > reached {
			s.low, moved = reached, true
		}
		full = append(full, s)
		reached = s.high
	}
	if reached < t.topFirst && open {
		full = append(full, segment{low: reached, high: t.topFirst})
	} else if reached < t.topFirst {
		full[len(full)-1].high, moved = t.topFirst, true
	}
	return full, moved
}

// layers gives the treaties of a tower, bottom first; those of share 0 are left out.
func (t towerGenes) layers(p plan) []treaty.Treaty {
	var list []treaty.Treaty
	for i, s := range t.segments(p) {
		layer := t.t.Template
		layer.Name = fmt.Sprintf("%s %d", t.t.Name, i+1)
		layer.Retention = t.grid.at(s.low)
		layer.Limit = neat(t.grid.at(s.high) - layer.Retention)
		layer.Share = t.t.Share.at(s.share)
		if t.amounts >= 0 {
			layer.Reinstatements, layer.AnnualLimit = t.t.Reinstatements.at(s.amount), 0
		}
		list = append(list, layer)
	}
	return list
}
