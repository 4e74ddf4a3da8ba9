package market

import (
	"fmt"
	"math"
)

// Change is what would have to happen to a quote for one curve to price all of them.
type Change struct {
	Quote    Quote
	Relative float64 // change of its rate on line as a fraction of it; 0 = none
	Rate     float64 // rate on line after the change
}

// Consistency says whether one increasing concave curve can price all quotes within their bid and offer, and if not, what it would take. It is
// no test of arbitrage: prices can be free of arbitrage without any one curve behind them, and different perils may rightly need
// different curves.
type Consistency struct {
	Consistent bool
	LeastTotal []Change // the changes with the least sum, in the order of the quotes
	Total      float64  // their sum, relative
	LeastWorst []Change // the changes with the least maximum
	Worst      float64  // their maximum, relative
}

// consistencyTolerance is the relative change that counts as none: kinks between the knots of the dictionary can miss a price by about 0.1 %.
const consistencyTolerance = 0.002

// mostConsistent bounds the quotes of one check; the simplex method of the library is dense, its cost cubic in them.
const mostConsistent = 60

// ErrTooManyQuotes says that a curve has more quotes than the check of consistency takes.
var ErrTooManyQuotes = fmt.Errorf("market: consistency: more than %d quotes", mostConsistent)

// CheckConsistency looks for the smallest relative changes of rates on line after which one curve prices all quotes of weight above 0 within their
// bid and offer (a quote without them stands for itself).
func CheckConsistency(quotes []Quote, brokerage float64) (Consistency, error) {
	used, err := checkQuotes(quotes)
	if err != nil {
		return Consistency{}, err
	}
	if len(used) > mostConsistent {
		return Consistency{}, ErrTooManyQuotes
	}
	b := boundsOf(used, brokerage)
	c := Consistency{}
	for _, least := range []struct {
		solve   func() ([]float64, error)
		changes *[]Change
		figure  *float64
		join    func(a, b float64) float64
	}{
		{b.leastTotal, &c.LeastTotal, &c.Total, func(x, y float64) float64 { return x + y }},
		{b.leastWorst, &c.LeastWorst, &c.Worst, math.Max},
	} {
		w, err := least.solve()
		if err != nil {
			return Consistency{}, err
		}
		for j, q := range used {
			change := b.change(j, w)
			if math.Abs(change) < consistencyTolerance {
				change = 0
			}
			*least.changes = append(*least.changes, Change{q, change, q.RateOnLine * (1 + change)})
			*least.figure = least.join(*least.figure, math.Abs(change))
		}
	}
	c.Consistent = c.Worst == 0
	return c, nil
}

// bounds is what quotes say of the weights of a mixture: row·w within low and high, in units of each quote.
type bounds struct {
	rows      [][]float64 // prices of the dictionary over quoted price
	low, high []float64   // 1 for a quote without bid and offer
	tails     []float64   // of the dictionary; its first column is the supremum
}

func boundsOf(quotes []Quote, brokerage float64) bounds {
	b := bounds{tails: knots(quotes)}
	for _, q := range quotes {
		row, target := q.columns(b.tails, brokerage)
		for k := range row {
			row[k] /= target
		}
		low, high := 1.0, 1.0
		if q.Bid > 0 {
			low = q.Bid / q.RateOnLine
		}
		if q.Offer > 0 {
			high = q.Offer / q.RateOnLine
		}
		b.rows, b.low, b.high = append(b.rows, row), append(b.low, low), append(b.high, high)
	}
	return b
}

// price gives the mixture's price of quote j in units of the quoted one.
func (b bounds) price(j int, w []float64) float64 {
	sum := 0.0
	for k, v := range b.rows[j] {
		sum += float64(v * w[k])
	}
	return sum
}

// change gives by how much the price lies outside the bounds of quote j, with its sign.
func (b bounds) change(j int, w []float64) float64 {
	p := b.price(j, w)
	return max(p-b.high[j], 0) - max(b.low[j]-p, 0)
}

// programme starts a linear programme in the weights, which add up to 1.
func (b bounds) programme() *linearProgramme {
	columns := len(b.rows[0])
	p := &linearProgramme{cost: make([]float64, columns)}
	ones := make([]float64, columns)
	for k := range ones {
		ones[k] = 1
	}
	p.addRow(ones, 1)
	return p
}

// within adds the rows low − under ≤ row·w ≤ high + over; under and over are the columns of the slack beyond the bounds, −1 for none.
func (b bounds) within(p *linearProgramme, j, under, over int) {
	if b.low[j] == b.high[j] && under >= 0 && under != over {
		row := p.addRow(b.rows[j], b.low[j])
		row[under], row[over] = 1, -1
		return
	}
	slack := p.addColumns(2)
	row := p.addRow(b.rows[j], b.low[j])
	row[slack] = -1
	if under >= 0 {
		row[under] = 1
	}
	row = p.addRow(b.rows[j], b.high[j])
	row[slack+1] = 1
	if over >= 0 {
		row[over] = -1
	}
}

// leastTotal gives weights that break the bounds by the least sum.
func (b bounds) leastTotal() ([]float64, error) {
	p := b.programme()
	beyond := p.addColumns(2 * len(b.rows))
	for j := range b.rows {
		p.cost[beyond+2*j], p.cost[beyond+2*j+1] = 1, 1
		b.within(p, j, beyond+2*j, beyond+2*j+1)
	}
	return b.solved(p)
}

// leastWorst gives weights that break the bounds by the least maximum.
func (b bounds) leastWorst() ([]float64, error) {
	p := b.programme()
	worst := p.addColumns(1)
	p.cost[worst] = 1
	for j := range b.rows {
		b.within(p, j, worst, worst)
	}
	return b.solved(p)
}

func (b bounds) solved(p *linearProgramme) ([]float64, error) {
	_, x, err := p.solve()
	if err != nil {
		return nil, err
	}
	return x[:len(b.rows[0])], nil
}

// extremes gives the least and the greatest value of target·w over all weights within the bounds; errInfeasible when there are none.
func (b bounds) extremes(target []float64) (low, high float64, err error) {
	if low, _, err = b.extreme(target, 1); err != nil {
		return 0, 0, err
	}
	high, _, err = b.extreme(target, -1)
	return low, high, err
}

// extreme gives the least (sign 1) or the greatest (sign −1) value of target·w, and weights that have it.
func (b bounds) extreme(target []float64, sign float64) (float64, []float64, error) {
	p := b.programme()
	for j := range b.rows {
		b.within(p, j, -1, -1)
	}
	for k, v := range target {
		p.cost[k] = sign * v
	}
	value, x, err := p.solve()
	if err != nil {
		return 0, nil, err
	}
	return sign * value, x[:len(target)], nil
}

// Interval is a range of values.
type Interval struct{ Low, High float64 }

// widened gives the bounds opened by the least change that makes them consistent, so that intervals exist for inconsistent quotes too.
func (b bounds) widened() (bounds, float64, error) {
	w, err := b.leastWorst()
	if err != nil {
		return b, 0, err
	}
	worst := 0.0
	for j := range b.rows {
		worst = max(worst, math.Abs(b.change(j, w)))
	}
	if worst == 0 {
		return b, 0, nil
	}
	open := b
	open.low, open.high = append([]float64(nil), b.low...), append([]float64(nil), b.high...)
	for j := range open.low {
		open.low[j] -= worst * (1 + 1e-6)
		open.high[j] += worst * (1 + 1e-6)
	}
	if worst <= lpMissed { // rounding
		worst = 0
	}
	return open, worst, nil
}

// Band gives, for each probability, the least and greatest price of a thin layer that a curve may ask which prices all quotes within their bid and
// offer, or, when none does, within the least change that lets one. It is wide where no quote sits. The second result is that change,
// relative, 0 for consistent quotes.
func Band(quotes []Quote, brokerage float64, probabilities []float64) ([]Interval, float64, error) {
	b, opened, err := openBounds(quotes, brokerage)
	if err != nil {
		return nil, 0, err
	}
	band := make([]Interval, len(probabilities))
	for i, s := range probabilities {
		target := []float64{1}
		for _, t := range b.tails {
			target = append(target, min(s/t, 1))
		}
		low, high, err := b.extremes(target)
		if err != nil {
			return nil, 0, err
		}
		band[i] = Interval{max(low, s), min(high, 1)} // no distortion lies below the diagonal
	}
	return band, opened, nil
}

// RateInterval gives the least and greatest rate on line, brokerage included, that the quotes alone allow for a layer that is described like a quote (its
// own RateOnLine is not looked at).
func RateInterval(quotes []Quote, brokerage float64, layer Quote) (Interval, error) {
	b, _, err := openBounds(quotes, brokerage)
	if err != nil {
		return Interval{}, err
	}
	low, err := b.extremeRate(layer, brokerage, 1)
	if err != nil {
		return Interval{}, err
	}
	high, err := b.extremeRate(layer, brokerage, -1)
	return Interval{low, high}, err
}

// extremeRate gives the least (sign 1) or greatest (sign −1) rate of a layer. With paid reinstatements the rate is no linear function of the weights, but
// ρ(R − P·F) at a fixed P is: the curve that is extreme at one P gives the next, which only moves outward until it stays (Dinkelbach 1967).
func (b bounds) extremeRate(layer Quote, brokerage, sign float64) (float64, error) {
	layer.RateOnLine = 0
	for range newtonSteps {
		row, _ := layer.columns(b.tails, brokerage)
		_, w, err := b.extreme(row, sign)
		if err != nil {
			return 0, err
		}
		rate := layer.rate(mixtureOf(w, b.tails), brokerage)
		if math.IsNaN(rate) {
			return 0, fmt.Errorf("market: interval of rates: layer %q has no price", layer.Name)
		}
		if math.Abs(rate-layer.RateOnLine) <= lpMissed*rate {
			return rate, nil
		}
		layer.RateOnLine = rate
	}
	return 0, fmt.Errorf("market: interval of rates: layer %q: no end after %d steps", layer.Name, newtonSteps)
}

func openBounds(quotes []Quote, brokerage float64) (bounds, float64, error) {
	used, err := checkQuotes(quotes)
	if err != nil {
		return bounds{}, 0, err
	}
	if len(used) > mostConsistent {
		return bounds{}, 0, ErrTooManyQuotes
	}
	return boundsOf(used, brokerage).widened()
}
