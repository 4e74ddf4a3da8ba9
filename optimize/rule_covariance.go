package optimize

import (
	"cmp"
	"math"
	"slices"

	"cedewright/portfolio/capital"
	"cedewright/portfolio/sample"
	"cedewright/portfolio/treaty"
)

// covarianceRule measures the yearly loss of each peril alone, net of the programme, and puts it under one root with the given charges. Each peril is
// taken as if nothing else happened in the year: every treaty that covers it answers its losses, as a catastrophe model runs one peril through a
// programme; the treaties that inure to it are those that cover the peril too. Reinstatement premiums are taken off the recoveries.
type covarianceRule struct {
	a      *Appraiser
	number int // among the covariances of the case
	rule   *capital.Covariance
	perils []perilAtLevel
	none   []capital.PerilLoss // with no cover
}

// perilAtLevel is a peril of a covariance.
type perilAtLevel struct {
	*perilYears
	slot  int     // in workspace.slots
	gross float64 // loss at the level before reinsurance
}

// perilYears are the yearly losses of one peril before reinsurance.
type perilYears struct {
	name    string
	annual  []float64 // by year
	falling []float64 // the same, largest first
	order   []int32   // the years of falling; equal losses by year
}

// perilYears gives the yearly losses of a peril; all 0 for one that the book does not have.
func (a *Appraiser) perilYears(name string) *perilYears {
	y := &perilYears{name: name, annual: make([]float64, a.years), falling: make([]float64, a.years), order: make([]int32, a.years)}
	if i := slices.Index(a.c.Book.Table.Perils(), name); i >= 0 {
		y.annual = a.c.Book.Table.Annual(-1, i)
	}
	for i := range y.order {
		y.order[i] = int32(i)
	}
	slices.SortFunc(y.order, func(i, j int32) int {
		if o := cmp.Compare(y.annual[j], y.annual[i]); o != 0 {
			return o
		}
		return cmp.Compare(i, j)
	})
	for k, year := range y.order {
		y.falling[k] = y.annual[year]
	}
	return y
}

func (a *Appraiser) newCovarianceRule(c *capital.Covariance, number int) *covarianceRule {
	r := &covarianceRule{a: a, number: number, rule: c}
	for _, name := range c.Perils {
		slot := a.slotNamed(name)
		gross := a.slots[slot].falling[a.years-c.Level.Rank(a.years)]
		r.perils = append(r.perils, perilAtLevel{a.slots[slot], slot, gross})
		r.none = append(r.none, capital.PerilLoss{Net: gross})
	}
	return r
}

// slotNamed gives the slot of a peril; −1 for a peril that no covariance takes alone.
func (a *Appraiser) slotNamed(peril string) int {
	return slices.IndexFunc(a.slots, func(y *perilYears) bool { return y.name == peril })
}

// alone gives a programme as one peril sees it: the placed treaties that cover it, restricted to it.
func alone(p treaty.Programme, peril string) (restricted treaty.Programme) {
	covers := func(t treaty.Treaty) bool {
		return t.Placed() > 0 && mayAnswer(t, peril)
	}
	kept := map[string]bool{}
	for _, t := range p.Treaties {
		kept[t.Name] = covers(t)
	}
	for _, t := range p.Treaties {
		if !kept[t.Name] {
			continue
		}
		t.Perils = []string{peril}
		if len(t.After) > 0 {
			t.After = slices.DeleteFunc(slices.Clone(t.After), func(name string) bool { return !kept[name] })
		}
		restricted.Treaties = append(restricted.Treaties, t)
	}
	return restricted
}

// mayAnswer tells whether a treaty covers a peril.
func mayAnswer(t treaty.Treaty, peril string) bool {
	return len(t.Perils) == 0 || slices.Contains(t.Perils, peril)
}

func itemOf(items []item, name string) int {
	return slices.IndexFunc(items, func(it item) bool { return it.terms.Name == name })
}

// perilSlot gathers what a programme adds to the yearly losses of one peril.
type perilSlot struct {
	peril  *perilYears
	offset []float64 // by year; zero where no treaty answers
	used   int       // offsets from here on are zero
	guess  float64   // see perilYears.largest
	rose   bool      // some offset may be above zero: a reinstatement may cost more than the treaty paid
}

// open makes ready for a treaty, premium as placed.
func (s *perilSlot) open(t treaty.Treaty, premium float64) {
	for _, charge := range t.Reinstatements {
		s.rose = s.rose || premium*charge > t.Placed()*t.Limit
	}
}

func (s *perilSlot) add(y int32, x float64) {
	s.offset[y] += x
	s.used = max(s.used, int(y)+1)
}

// addWithSlot does what add does, and adds the same to the slot of the one peril that the treaty answers.
func (w *workspace) addWithSlot(s *perilSlot, t treaty.Treaty, premium float64) {
	s.open(t, premium)
	w.add(t, premium)
	offset := s.offset
	for i, y := range w.touched {
		offset[y] += w.flow[i]
	}
	s.used = max(s.used, w.used)
}

func (s *perilSlot) clear() {
	clear(s.offset[:s.used])
	s.used, s.rose = 0, false
}

// slotOf gives the slot of the one peril that treaty i of a programme answers, with nothing inuring to it: then its recoveries are the same whether other
// perils strike or not, and netLosses fills the slot in passing. −1 for any other treaty: see others.
func (a *Appraiser) slotOf(p treaty.Programme, i int) int {
	t := p.Treaties[i]
	if len(a.slots) == 0 || len(t.Perils) != 1 || t.Kind == treaty.QuotaShare || len(a.inuringTo(p, i)) > 0 {
		return -1
	}
	return a.slotNamed(t.Perils[0])
}

// eachTreaty calls use for every treaty that answers a peril and is wanted, with its annual recoveries at 100 % for the peril alone: of all years for a quota
// share, else in the years touched.
func (r *covarianceRule) eachTreaty(p *position, peril string, w *workspace, wanted func(it item) bool, use func(k int, t treaty.Treaty, annual []float64, touched []int32)) {
	if !slices.ContainsFunc(p.items, wanted) {
		return
	}
	restricted := alone(p.programme, peril)
	for i, t := range restricted.Treaties {
		k := itemOf(p.items, t.Name)
		if !wanted(p.items[k]) {
			continue
		}
		s := r.a.subjectOf(restricted, i, w)
		if t.Kind == treaty.QuotaShare {
			use(k, t, s.annual, nil)
			continue
		}
		w.recover(t, s)
		use(k, t, w.annual, w.touched)
		w.reset()
	}
}

// netAt gives the net loss of a peril at the level, from what netLosses left in its slot and the treaties that it could not place there.
func (r *covarianceRule) netAt(p *position, y perilAtLevel, w *workspace) float64 {
	n := r.a.years
	slot := &w.slots[y.slot]
	r.eachTreaty(p, y.name, w, func(it item) bool { return it.slot < 0 && mayAnswer(it.terms, y.name) }, func(k int, t treaty.Treaty, annual []float64, touched []int32) {
		placed := t.Placed()
		if t.Kind == treaty.QuotaShare { // it pays a part of every loss: no offset rises
			slot.used = len(slot.offset)
			for i, x := range annual {
				slot.add(int32(i), -float64(placed*x))
			}
			return
		}
		premium := float64(placed * p.items[k].priced.base)
		slot.open(t, premium)
		for _, i := range touched {
			slot.add(i, float64(premium*t.Reinstated(annual[i]))-float64(placed*annual[i]))
		}
	})
	defer slot.clear()
	if slot.used == 0 {
		return y.gross
	}
	return y.largest(slot, n-r.rule.Level.Rank(n)+1, w)
}

// largest gives the k-th largest net loss, as Appraiser.largest does: the worst years before reinsurance bound it from below, but for the odd programme
// whose reinsurance may make a year worse. The bound starts from a guess, a little below the figure of the last programme; where fewer than k losses are
// above it, it was too high, and the work is done again without. An order statistic does not depend on how it was found, so the guess moves time alone.
func (y *perilYears) largest(slot *perilSlot, k int, w *workspace) float64 {
	w.few = w.few[:0]
	if slot.rose {
		for i, x := range y.annual {
			w.few = append(w.few, x+slot.offset[i])
		}
	} else if w.few = y.above(slot, k, slot.guess, w.few); len(w.few) < k {
		w.few = y.above(slot, k, math.Inf(-1), w.few[:0])
	}
	x := sample.Select(w.few, len(w.few)-k+1)
	slot.guess = x - 0.02*math.Abs(x)
	return x
}

// above gives the net losses above a bound that rises as they are found: k of them at least, if so many are above the bound given.
func (y *perilYears) above(slot *perilSlot, k int, least float64, few []float64) []float64 {
	for i, x := range y.falling {
		if x <= least {
			break
		}
		if net := x + slot.offset[y.order[i]]; net > least {
			if few = append(few, net); len(few) >= 3*k {
				least = sample.Select(few, len(few)-k+1)
				few = append(few[:0], few[len(few)-k:]...)
			}
		}
	}
	return few
}

// losses gives the perils' losses of a position that netLosses has just left in w.
func (r *covarianceRule) losses(p *position, w *workspace) []capital.PerilLoss {
	if len(p.items) == 0 {
		return r.none
	}
	list := make([]capital.PerilLoss, len(r.perils))
	for i, y := range r.perils {
		list[i].Net = r.netAt(p, y, w)
		list[i].Recoverable = y.gross - list[i].Net
	}
	return list
}

func (r *covarianceRule) require(p *position, _ *workspace) requirement {
	amount := r.rule.Require(p.perils[r.number]).Total
	return requirement{amount, amount, 0}
}

func (r *covarianceRule) moves(p *position, _ requirement, flows []flow) moves {
	w := r.a.scratch.Get().(*workspace)
	defer r.a.scratch.Put(w)
	m := r.a.noMoves(len(p.items))
	slopes := r.rule.Slopes(p.perils[r.number])
	for i, y := range r.perils {
		net := slices.Clone(y.annual)
		reinstated := make([][]float64, len(p.items))
		r.eachTreaty(p, y.name, w, func(item) bool { return true }, func(k int, t treaty.Treaty, annual []float64, touched []int32) {
			placed := t.Placed()
			if t.Kind == treaty.QuotaShare {
				addScaled(net, -placed, annual)
				return
			}
			premium := float64(placed * p.items[k].priced.base)
			due := make([]float64, r.a.years)
			for _, year := range touched {
				due[year] = t.Reinstated(annual[year])
				net[year] += float64(premium*due[year]) - float64(placed*annual[year])
			}
			if len(t.Reinstatements) > 0 {
				reinstated[k] = due
			}
		})
		byNet := slopes[i].Net - slopes[i].Recoverable
		addScaled(m.years, byNet, sample.VaRInfluence(net, r.rule.Level, nil))
		addScaled(m.years, slopes[i].Recoverable, sample.VaRInfluence(y.annual, r.rule.Level, nil))
		var weights []float64
		for k, due := range reinstated {
			if due != nil {
				if weights == nil {
					weights = tailWeights(net, capital.ValueAtRisk, r.rule.Level)
				}
				m.base[k] += byNet * p.items[k].terms.Placed() * meanProduct(weights, due)
			}
		}
	}
	return m
}

func (r *covarianceRule) parts(p *position, _ *workspace) []CapitalPart {
	losses := p.perils[r.number]
	figures := r.rule.Require(losses)
	var list []CapitalPart
	for i, y := range r.perils {
		list = append(list, CapitalPart{Name: "net loss of " + y.name, Amount: losses[i].Net})
	}
	return append(list, CapitalPart{Name: "catastrophe charge", Amount: figures.Catastrophe}, CapitalPart{Name: "all charges", Amount: figures.Total})
}
