package optimize

import (
	"math"
	"slices"

	"cedewright/portfolio/capital"
	"cedewright/portfolio/sample"
	"cedewright/portfolio/treaty"
)

// position is what a programme leaves to the company, as far as standards look at it. Years stand by falling gross loss.
type position struct {
	programme    treaty.Programme
	items        []item
	certain      float64               // premiums less commissions
	shares       []share               // its quota shares
	offset       []float64             // what its other treaties and failing reinsurers add to each year; zero from its end on
	sum, squares float64               // of the offsets, see workspace
	mean         float64               // of −U
	tails        []sample.TailFigures  // of −U, at Appraiser.levels
	perils       [][]capital.PerilLoss // by covariance
	losses       []float64             // −U by year; nil until they are asked for (own)
	company      view                  // the same of the whole company; of the book alone when nothing is known of the rest year by year
}

// share is a quota share: of each year it takes placed times annual.
type share struct {
	placed float64
	s      *subject
}

// net gives −U of one year.
func (a *Appraiser) net(p *position, y int) float64 {
	x := a.ungained[y] + p.certain
	for _, q := range p.shares {
		x -= float64(q.placed * q.s.annual[y])
	}
	if y < len(p.offset) {
		x += p.offset[y]
	}
	return x
}

// fill writes −U of every year.
func (a *Appraiser) fill(p *position, losses []float64) {
	for y, x := range a.ungained {
		losses[y] = x + p.certain
	}
	for _, q := range p.shares {
		placed := q.placed
		for y, x := range q.s.annual {
			losses[y] -= float64(placed * x)
		}
	}
	for y, x := range p.offset {
		losses[y] += x
	}
}

// view is a sample of yearly losses and its tail figures.
type view struct {
	losses []float64
	mean   float64
	tails  []sample.TailFigures
}

// rule measures positions under one standard.
type rule interface {
	// require gives the requirement; w is scratch. It allocates little, since the search calls it for every programme.
	require(p *position, w *workspace) requirement
	// moves says how the requirement answers to what is uncertain; flows are those of the items.
	moves(p *position, r requirement, flows []flow) moves
	// parts says what the requirement is made of.
	parts(p *position, w *workspace) []CapitalPart
}

// requirement is what one standard asks.
type requirement struct {
	amount float64 // required capital of the company, money
	alone  float64 // of the book before diversification with the rest of the company; the same without a rest
	setBy  int     // the criterion that sets it, for a simulated standard
}

// moves is how required capital answers to what is uncertain: the weight of each simulated year, and the price of each treaty. Prices enter twice: they
// are themselves uncertain, and they follow the simulated years.
type moves struct {
	years      []float64 // influence of each year, prices held
	base       []float64 // by item: rise per unit of base premium of the full treaty
	commission []float64 // by item: rise per unit of commission of the full treaty, in money
}

// influence is the influence of each year through losses and prices.
func (m moves) influence(flows []flow) []float64 {
	phi := slices.Clone(m.years)
	for i, f := range flows {
		if f.premium != nil && m.base[i] != 0 {
			addScaled(phi, m.base[i], f.premium)
		}
		if f.commission != nil && m.commission[i] != 0 {
			addScaled(phi, m.commission[i], f.commission)
		}
	}
	return phi
}

// scaled multiplies all moves.
func (m moves) scaled(c float64) moves {
	if c == 1 {
		return m
	}
	for _, list := range [][]float64{m.years, m.base, m.commission} {
		for i := range list {
			list[i] *= c
		}
	}
	return m
}

// add adds c times other moves.
func (m moves) add(c float64, o moves) {
	addScaled(m.years, c, o.years)
	addScaled(m.base, c, o.base)
	addScaled(m.commission, c, o.commission)
}

func (a *Appraiser) noMoves(items int) moves {
	return moves{make([]float64, a.years), make([]float64, items), make([]float64, items)}
}

// position gathers what standards look at, from what netLosses has just left in w.
func (a *Appraiser) position(p treaty.Programme, items []item, mean float64, w *workspace) *position {
	pos := &position{programme: p, items: items, certain: certain(items), offset: w.offset[:w.used], sum: w.sum, squares: w.squares, mean: mean, tails: w.tails}
	for _, it := range items {
		if it.terms.Kind == treaty.QuotaShare {
			pos.shares = append(pos.shares, share{it.terms.Placed(), it.subject})
		}
	}
	for _, r := range a.covariances {
		pos.perils = append(pos.perils, r.losses(pos, w))
	}
	if a.rest == nil && a.c.Owners == nil && !w.rose {
		w.few = a.largest(pos, a.levels[0].Beyond(a.years), w.few)
		sample.TailsOfLargest(w.few, a.years, a.levels, a.means, pos.tails)
		pos.company = view{nil, pos.mean, pos.tails}
		return pos
	}
	a.fill(pos, w.loss)
	pos.losses = w.loss
	copy(w.sorted, w.loss)
	sample.Tails(w.sorted, a.levels, a.means, pos.tails)
	pos.company = view{pos.losses, pos.mean, pos.tails}
	if a.rest != nil {
		for y, x := range w.loss {
			w.company[y] = x + a.rest[y]
		}
		copy(w.sorted, w.company)
		sample.Tails(w.sorted, a.levels, a.means, w.companyTails)
		pos.company = view{w.company, mean + a.restMean, w.companyTails}
	}
	return pos
}

// largest gives the k largest losses of a position in scratch memory, and at times some others, when no year is made worse: so the losses of the worst years
// before reinsurance bound the k-th largest from below, and a year that is not above that bound before reinsurance cannot be among them.
func (a *Appraiser) largest(p *position, k int, few []float64) []float64 {
	few = few[:0]
	least := math.Inf(-1)
	for y := 0; y < a.years && a.ungained[y]+p.certain > least; y++ {
		if x := a.net(p, y); x > least {
			if few = append(few, x); len(few) >= 2*k {
				least = sample.Select(few, len(few)-k+1)
				few = append(few[:0], few[len(few)-k:]...)
			}
		}
	}
	return few
}

// own gives a position that scratch memory no longer moves, its losses filled.
func (a *Appraiser) own(p *position) *position {
	q := *p
	q.offset, q.tails = slices.Clone(p.offset), slices.Clone(p.tails)
	q.losses = make([]float64, a.years)
	a.fill(p, q.losses)
	q.company = view{q.losses, p.company.mean, q.tails}
	if a.rest != nil {
		q.company.losses, q.company.tails = slices.Clone(p.company.losses), slices.Clone(p.company.tails)
	}
	return &q
}

// deviation is the standard deviation of −U, divisor N − 1, from sums over what differs from the position without cover.
func (a *Appraiser) deviation(p *position) float64 {
	if a.years < 2 {
		return 0
	}
	sum, squares := 0.0, a.squares // of the gross result less its mean, less the shares, plus the offset
	for i, q := range p.shares {
		sum -= float64(q.placed * q.s.mean * float64(a.years))
		squares -= float64(2 * q.placed * a.moment(q.s, nil))
		for j, r := range p.shares {
			if j <= i {
				twice := 2.0
				if j == i {
					twice = 1
				}
				squares += float64(twice * q.placed * r.placed * a.moment(q.s, r.s))
			}
		}
	}
	sum += p.sum
	squares += p.squares
	for _, q := range p.shares {
		annual, cross := q.s.annual[:len(p.offset)], 0.0
		for y, o := range p.offset {
			cross += float64(annual[y] * o)
		}
		squares -= float64(2 * q.placed * cross)
	}
	n := float64(a.years)
	return math.Sqrt(max(squares-float64(sum*sum/n), 0) / (n - 1))
}

// moment gives the sum over years of the product of two annual subjects, or of one and the gross result less its mean; remembered.
func (a *Appraiser) moment(s, other *subject) float64 {
	key := [2]int{s.number, 0}
	if other != nil {
		key = [2]int{min(s.number, other.number), max(s.number, other.number)}
	}
	a.mu.Lock()
	known, ok := a.moments[key]
	a.mu.Unlock()
	if ok {
		return known
	}
	sum := 0.0
	with := a.centred
	if other != nil {
		with = other.annual
	}
	for y, x := range s.annual {
		sum += float64(x * with[y])
	}
	a.mu.Lock()
	defer a.mu.Unlock()
	if len(a.moments) >= momentBudget {
		clear(a.moments)
	}
	a.moments[key] = sum
	return sum
}

// withinStrata takes off influence values what the rest of the company explains: its losses are the fixed quantiles of their law, not drawn, so that only
// the spread among years of like losses of the rest makes an error (stratified sampling: Cochran 1977, chapter 5). Without a law of the rest it does
// nothing.
func (a *Appraiser) withinStrata(phi []float64) {
	const strata = 50 // few enough that each holds many years, many enough that a law hardly moves within one
	for k := range strata {
		block := a.restOrder[len(a.restOrder)*k/strata : len(a.restOrder)*(k+1)/strata]
		sum := 0.0
		for _, y := range block {
			sum += phi[y]
		}
		for _, y := range block {
			phi[y] -= sum / float64(len(block))
		}
	}
}

// requirements gives what every standard asks, in their order.
func (a *Appraiser) requirements(p *position, w *workspace) []requirement {
	all := make([]requirement, len(a.rules))
	for i, r := range a.rules {
		all[i] = r.require(p, w)
	}
	return all
}

// driving gives, of the standards that drive, the place of the one that asks the most.
func (a *Appraiser) driving(all []requirement) int {
	worst := a.c.Drivers()[0]
	for _, i := range a.c.Drivers()[1:] {
		if all[i].amount > all[worst].amount {
			worst = i
		}
	}
	return worst
}

// positionOf works out the position of a programme from nothing.
func (a *Appraiser) positionOf(p treaty.Programme, w *workspace) (*position, totals, error) {
	items, err := a.items(p, w)
	if err != nil {
		return nil, totals{}, err
	}
	t := a.totals(items)
	t.unpaid = a.netLosses(items, w)
	return a.position(p, items, a.meanNet(t), w), t, nil
}
