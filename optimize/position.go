package optimize

import (
	"slices"

	"cedewright/portfolio/capital"
	"cedewright/portfolio/sample"
	"cedewright/portfolio/treaty"
)

// position is what a programme leaves to the company, as far as standards look at it.
type position struct {
	programme treaty.Programme
	items     []item
	losses    []float64             // −U by year, in order of years
	mean      float64               // of losses
	tails     []sample.TailFigures  // of losses, at Appraiser.levels
	perils    [][]capital.PerilLoss // by covariance
	company   view                  // the same of the whole company; of the book alone when nothing is known of the rest year by year
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

// position gathers what standards look at, from the net losses in w.loss.
func (a *Appraiser) position(p treaty.Programme, items []item, mean float64, w *workspace) *position {
	pos := &position{programme: p, items: items, losses: w.loss, mean: mean, tails: w.tails}
	copy(w.sorted, w.loss)
	sample.Tails(w.sorted, a.levels, a.means, pos.tails)
	for _, r := range a.covariances {
		pos.perils = append(pos.perils, r.losses(pos, w))
	}
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

// own gives a position that scratch memory no longer moves.
func (p *position) own() *position {
	q := *p
	q.losses, q.tails = slices.Clone(p.losses), slices.Clone(p.tails)
	q.company = view{q.losses, p.company.mean, q.tails}
	if &p.company.losses[0] != &p.losses[0] {
		q.company.losses, q.company.tails = slices.Clone(p.company.losses), slices.Clone(p.company.tails)
	}
	return &q
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
