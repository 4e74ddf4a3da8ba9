package portfoliotest

import (
	"math"
	"math/big"
	"slices"
)

// Cell is where a row of a book stands, as far as a loss table tells it: rows that agree in all of it are summed.
type Cell struct {
	Year         int // from 1
	Class, Peril string
	Loss         float64 // the gross loss of the row
}

// Answer is what a programme does to a book, worked out by Recoveries.
type Answer struct {
	Gross, Net []float64 // money per year
	Treaties   []TreatyAnswer
}

// TreatyAnswer is what one treaty pays, for 100 % of it.
type TreatyAnswer struct {
	Subject, Recovery []float64        // money per year
	Reinstated        []float64        // fraction of base premium per year
	Cells             map[Cell]float64 // Recovery by the rows that caused it
	Attachment        float64          // share of years in which a unit of loss exceeds the retention
	Exhaustion        float64          // share of years in which one reaches retention + limit
}

// Recoveries works out by brute force, in fractions without any rounding, what treaties pay. Nothing is remembered, sorted or summed
// ahead: each treaty asks each treaty that inures to it again for every row; each layer loss is a difference of two minima; annual terms
// are used up event by event. The names in After must be those of treaties of the list, without a cycle.
func Recoveries(b Book, programme []Terms) Answer {
	o := oracle{b, programme}
	var answer Answer
	gross, net := fractions(b.Years), fractions(b.Years)
	for _, r := range b.Rows {
		add(gross[r.Year-1], exact(r.Loss))
		add(net[r.Year-1], exact(r.Loss))
	}
	for _, u := range programme {
		for i, x := range o.paid(u) {
			add(net[b.Rows[i].Year-1], times(x, exact(-u.placed())))
		}
		answer.Treaties = append(answer.Treaties, o.answer(u))
	}
	answer.Gross, answer.Net = floats(gross), floats(net)
	return answer
}

// answer works out one treaty.
func (o oracle) answer(u Terms) TreatyAnswer {
	subject, recovery := fractions(o.book.Years), fractions(o.book.Years)
	losses, cells := o.subject(u), map[Cell]*big.Rat{}
	for i, paid := range o.paid(u) {
		r := o.book.Rows[i]
		add(subject[r.Year-1], losses[i])
		add(recovery[r.Year-1], paid)
		c := Cell{r.Year, r.Class, r.Peril, r.Loss}
		if cells[c] == nil {
			cells[c] = new(big.Rat)
		}
		add(cells[c], paid)
	}
	a := TreatyAnswer{Subject: floats(subject), Recovery: floats(recovery), Reinstated: make([]float64, o.book.Years), Cells: map[Cell]float64{}}
	for c, x := range cells {
		a.Cells[c] = float(x)
	}
	if u.Kind == "quota-share" {
		return a
	}
	attached, exhausted := 0, 0
	for y := range o.book.Years {
		units := o.units(u, y+1, losses)
		_, a.Reinstated[y] = o.annual(u, units)
		if slices.ContainsFunc(units, func(x *unitOf) bool { return x.loss.Cmp(exact(u.Retention)) > 0 }) {
			attached++
		}
		if !math.IsInf(u.Limit, 1) && slices.ContainsFunc(units, func(x *unitOf) bool { return x.loss.Cmp(exact(u.top())) >= 0 }) {
			exhausted++
		}
	}
	a.Attachment, a.Exhaustion = float64(attached)/float64(o.book.Years), float64(exhausted)/float64(o.book.Years)
	return a
}

type oracle struct {
	book      Book
	programme []Terms
}

// subject gives what a treaty looks at, row by row of the book.
func (o oracle) subject(u Terms) []*big.Rat {
	rows := fractions(len(o.book.Rows))
	for i, r := range o.book.Rows {
		if (len(u.Classes) == 0 || slices.Contains(u.Classes, r.Class)) && (len(u.Perils) == 0 || slices.Contains(u.Perils, r.Peril)) {
			add(rows[i], exact(r.Loss))
		}
	}
	for _, v := range o.programme {
		if slices.Contains(u.After, v.Name) {
			for i, x := range o.paid(v) {
				add(rows[i], times(x, exact(-v.placed())))
			}
		}
	}
	for i := range rows {
		if rows[i].Sign() < 0 {
			rows[i] = new(big.Rat)
		}
	}
	return rows
}

// unitOf is one thing that a treaty answers, with its rows.
type unitOf struct {
	event       string
	loss, layer *big.Rat
	rows        []int
}

// units gives the units of one year: an event, a risk of an event, or the year itself.
func (o oracle) units(u Terms, year int, losses []*big.Rat) []*unitOf {
	byKey := map[[2]string]*unitOf{}
	for i, r := range o.book.Rows {
		key := [2]string{}
		switch u.Kind {
		case "event-excess":
			key[0] = r.Event
		case "risk-excess":
			key = [2]string{r.Event, r.Risk}
		}
		noUnit := u.Kind != "aggregate-excess" && r.Event == "" || u.Kind == "risk-excess" && r.Risk == ""
		if r.Year != year || noUnit {
			continue
		}
		if byKey[key] == nil {
			byKey[key] = &unitOf{event: r.Event, loss: new(big.Rat)}
		}
		add(byKey[key].loss, losses[i])
		byKey[key].rows = append(byKey[key].rows, i)
	}
	var units []*unitOf
	byEvent := map[string]*big.Rat{}
	for _, x := range byKey {
		x.layer = plus(x.loss, negative(least(x.loss, exact(u.Retention))))
		if !math.IsInf(u.Limit, 1) {
			x.layer = plus(least(x.loss, plus(exact(u.Retention), exact(u.Limit))), negative(least(x.loss, exact(u.Retention))))
		}
		if byEvent[x.event] == nil {
			byEvent[x.event] = new(big.Rat)
		}
		add(byEvent[x.event], x.layer)
		units = append(units, x)
	}
	for _, x := range units {
		if sum := byEvent[x.event]; u.EventLimit > 0 && sum.Cmp(exact(u.EventLimit)) > 0 {
			x.layer = times(x.layer, new(big.Rat).Quo(exact(u.EventLimit), sum))
		}
	}
	return units
}

// annual lets the units of a year use up first the deductible, then the cover, limit by limit, each but the last paid for again when it
// is used; it gives the recovery of the year and the fraction of the premium that is due again.
func (o oracle) annual(u Terms, units []*unitOf) (*big.Rat, float64) {
	deductible := exact(u.AnnualDeductible)
	type part struct {
		left   *big.Rat // nil = without end
		charge float64
	}
	var cover []*part
	switch {
	case u.AnnualLimit > 0:
		cover = []*part{{exact(u.AnnualLimit), 0}}
	case u.Reinstatements != nil:
		for _, charge := range u.Reinstatements {
			cover = append(cover, &part{exact(u.Limit), charge})
		}
		cover = append(cover, &part{exact(u.Limit), 0})
	default:
		cover = []*part{{nil, 0}}
	}
	recovery, again := new(big.Rat), new(big.Rat)
	for _, x := range units {
		eaten := least(x.layer, deductible)
		deductible = plus(deductible, negative(eaten))
		due := plus(x.layer, negative(eaten))
		for _, c := range cover {
			use := due
			if c.left != nil {
				use = least(due, c.left)
				c.left = plus(c.left, negative(use))
			}
			due = plus(due, negative(use))
			add(recovery, use)
			if c.charge > 0 {
				add(again, times(exact(c.charge), new(big.Rat).Quo(use, exact(u.Limit))))
			}
		}
	}
	return recovery, float(again)
}

// paid gives what 100 % of a treaty pays, row by row of the book.
func (o oracle) paid(u Terms) []*big.Rat {
	losses := o.subject(u)
	if u.Kind == "quota-share" {
		return losses
	}
	rows := fractions(len(losses))
	for year := 1; year <= o.book.Years; year++ {
		units := o.units(u, year, losses)
		layers := new(big.Rat)
		for _, x := range units {
			add(layers, x.layer)
		}
		recovery, _ := o.annual(u, units)
		for _, x := range units {
			for _, i := range x.rows {
				if x.layer.Sign() > 0 {
					rows[i] = times(times(recovery, new(big.Rat).Quo(x.layer, layers)), new(big.Rat).Quo(losses[i], x.loss))
				}
			}
		}
	}
	return rows
}

func fractions(n int) []*big.Rat {
	list := make([]*big.Rat, n)
	for i := range list {
		list[i] = new(big.Rat)
	}
	return list
}

func floats(list []*big.Rat) []float64 {
	x := make([]float64, len(list))
	for i := range x {
		x[i] = float(list[i])
	}
	return x
}

func exact(x float64) *big.Rat     { return new(big.Rat).SetFloat64(x) }
func add(sum, x *big.Rat)          { sum.Add(sum, x) }
func plus(a, b *big.Rat) *big.Rat  { return new(big.Rat).Add(a, b) }
func times(a, b *big.Rat) *big.Rat { return new(big.Rat).Mul(a, b) }
func negative(a *big.Rat) *big.Rat { return new(big.Rat).Neg(a) }
func float(x *big.Rat) float64     { f, _ := x.Float64(); return f }
func least(a, b *big.Rat) *big.Rat {
	if a.Cmp(b) < 0 {
		return a
	}
	return b
}
