package market

import (
	"math"
	"slices"

	"cedewright/portfolio/treaty"
)

// Settings of the free curve.
const (
	geometricKnots   = 120  // kinks on a geometric grid from lowestKnot to 1
	lowestKnot       = 1e-4 // probability
	rankKnots        = 50   // kinks at k/N for the largest k values of a book of N years
	pseudoQuotes     = 12   // points at which the curve is pulled towards a family
	lowestPseudo     = 0.001
	highestPseudo    = 0.6
	largestPseudoFit = 10
)

// pulls are the strengths of the pull that are tried, in quotes' worth of weight.
var pulls = []float64{0, 0.3, 1, 3, largestPseudoFit}

// FreeOptions are choices of the fit of a free curve.
type FreeOptions struct {
	Absolute bool       // least weighted sum of absolute relative errors instead of squares; for at most 60 quotes
	Toward   Distortion // pulls the curve where no quote speaks, instead of the better family; nil = that family
	Name     string     // what Toward is called
}

// FitFree fits the free concave curve to quotes: of all increasing concave distortions (with kinks on a fine grid) the one with the least weighted sum
// of squared (or absolute) relative errors, found to the global optimum. Quotes with a bid or an offer are priced between them, as far as one
// curve can. Where no quote speaks, pseudo-quotes pull it towards the better of two families (proportional hazard, Wang) or the distortion
// given; the strength of the pull is the one with the least leave-one-out error.
func FitFree(quotes []Quote, brokerage float64, o FreeOptions) (*Fit, error) {
	used, err := checkQuotes(quotes)
	if err != nil {
		return nil, err
	}
	if o.Absolute && len(used) > mostConsistent {
		return nil, ErrTooManyQuotes
	}
	m, err := newFreeModel(used, brokerage, o)
	if err != nil {
		return nil, err
	}
	toward, anchor, err := m.anchor(m.weights)
	if err != nil {
		return nil, err
	}
	anchors := make([]Distortion, len(used)) // of the fits that leave one quote out
	if len(used) >= 3 {
		for i := range used {
			if _, anchors[i], err = m.anchor(less(m.weights, i)); err != nil {
				return nil, err
			}
		}
	}
	best := &Fit{LeaveOneOut: math.NaN()}
	for _, pull := range pulls {
		if pull == 0 && len(used) < 3 {
			continue // nothing would hold the curve where no quote speaks
		}
		x, err := m.fit(m.weights, anchor, pull, nil)
		if err != nil {
			return nil, err
		}
		f := &Fit{Family: FamilyFree, Distortion: mixtureOf(x, m.tails), Brokerage: brokerage, Pull: pull, Toward: toward, options: o}
		f.describe(quotes)
		if err := f.leaveOneOut(func(left int) (Distortion, error) {
			y, err := m.fit(less(m.weights, left), anchors[left], pull, x)
			if err != nil {
				return nil, err
			}
			return mixtureOf(y, m.tails), nil
		}); err != nil {
			return nil, err
		}
		if best.Distortion == nil || f.LeaveOneOut < best.LeaveOneOut {
			best = f
		}
	}
	return best, nil
}

// freeModel is what does not change between fits of the free curve to the same quotes with other weights.
type freeModel struct {
	quotes  []Quote
	weights []float64
	options FreeOptions
	tails   []float64   // where the curve may have kinks
	rows    [][]float64 // of each quote: relative errors of the parts of a mixture: the supremum and the tail values at risk at the knots
	limits  []limitRow
	tables  []*rateTable // of the families towards which the curve may be pulled
}

// newFreeModel prices the dictionary and the two families that resemble real prices.
func newFreeModel(quotes []Quote, brokerage float64, o FreeOptions) (*freeModel, error) {
	m := &freeModel{quotes: quotes, weights: weightsOf(quotes), options: o, tails: knots(quotes)}
	for _, q := range quotes {
		row, target := q.columns(m.tails, brokerage)
		for k := range row {
			row[k] = row[k]/target - 1
		}
		m.rows = append(m.rows, row)
	}
	m.limits = bidAndOfferRows(quotes, m.rows)
	if o.Toward != nil {
		return m, nil
	}
	for _, family := range []string{FamilyProportionalHazard, FamilyWang} {
		table, err := newRateTable(family, quotes, brokerage)
		if err != nil {
			return nil, err
		}
		m.tables = append(m.tables, table)
	}
	return m, nil
}

// anchor gives what the curve is pulled towards: the distortion of the options, else the better of the two families at its best parameter.
func (m *freeModel) anchor(weights []float64) (name string, d Distortion, err error) {
	if m.options.Toward != nil {
		return m.options.Name, m.options.Toward, nil
	}
	best := math.Inf(1)
	for _, table := range m.tables {
		parameter, least, err := table.fit(weights)
		if err != nil {
			return "", nil, err
		}
		if least < best {
			best, name = least, table.family
			if d, err = NewFamily(table.family, parameter); err != nil {
				return "", nil, err
			}
		}
	}
	return name, d, nil
}

// fit solves the least squares over mixtures: the prices of the parts are columns, the quotes rows, and the weights of the mixture are at least 0 and
// add up to 1. Rows are homogeneous, the quote being taken from every column, so that one plain non-negative least squares with the row Σw = 1
// appended gives the optimum up to a factor (exact, not a penalty). Bids and offers are rows with a slack of at least 0 and a large weight.
// Quotes of weight 0 do not count. The solution, slacks last, may start from that to other weights.
func (m *freeModel) fit(weights []float64, anchor Distortion, pull float64, start []float64) ([]float64, error) {
	var rows, limits [][]float64
	var counts []float64
	for j, row := range m.rows {
		if weights[j] > 0 {
			rows, counts = append(rows, row), append(counts, weights[j])
		}
	}
	for i := 0; pull > 0 && i < pseudoQuotes; i++ {
		s := lowestPseudo * math.Pow(highestPseudo/lowestPseudo, float64(i)/(pseudoQuotes-1))
		at := anchor.At(s)
		row := []float64{1/at - 1}
		for _, t := range m.tails {
			row = append(row, min(s/t, 1)/at-1)
		}
		rows, counts = append(rows, row), append(counts, pull/pseudoQuotes)
	}
	columns := len(m.tails) + 1
	if m.options.Absolute {
		for _, l := range m.limits {
			if weights[l.quote] > 0 {
				limits = append(limits, l.row)
			}
		}
		return leastAbsolute(rows, counts, limits)
	}
	wide := make([][]float64, 0, len(rows)+len(m.limits))
	for i, row := range rows {
		wide = append(wide, scaled(row, math.Sqrt(counts[i]), columns+len(m.limits)))
	}
	for i, l := range m.limits {
		if weights[l.quote] > 0 {
			row := scaled(l.row, limitWeight, columns+len(m.limits))
			row[columns+i] = -limitWeight // row·w ≥ 0
			wide = append(wide, row)
		}
	}
	return solveMixture(wide, columns, start)
}

// scaled gives the entries times a factor, followed by zeros.
func scaled(row []float64, factor float64, columns int) []float64 {
	out := make([]float64, columns)
	for k, v := range row {
		out[k] = v * factor
	}
	return out
}

// limitWeight makes a bid or an offer all but a hard constraint: it is missed by about 1e-8 of the rate.
const limitWeight = 1e4

// limitRow is the bid or the offer of a quote: row·w must not be negative.
type limitRow struct {
	quote int
	row   []float64
}

// bidAndOfferRows gives price over bid less 1, and 1 less price over offer, from rows of price over quote less 1; in units of the quote.
func bidAndOfferRows(quotes []Quote, rows [][]float64) []limitRow {
	var limits []limitRow
	for j, q := range quotes {
		for _, limit := range []struct{ rate, sign float64 }{{q.Bid, 1}, {q.Offer, -1}} {
			if limit.rate == 0 {
				continue
			}
			row := make([]float64, len(rows[j]))
			for k, v := range rows[j] {
				row[k] = limit.sign * (1 + v - limit.rate/q.RateOnLine)
			}
			limits = append(limits, limitRow{j, row})
		}
	}
	return limits
}

// leastAbsolute gives the weights with the least weighted sum of absolute errors that keep the limits as far as they can.
func leastAbsolute(rows [][]float64, weights []float64, limits [][]float64) ([]float64, error) {
	columns := len(rows[0])
	b := bounds{rows: rows}
	p := b.programme()
	beyond := p.addColumns(2*len(rows) + 2*len(limits))
	for j, row := range rows {
		entries := p.addRow(row, 0)
		entries[beyond+2*j], entries[beyond+2*j+1] = 1, -1
		p.cost[beyond+2*j], p.cost[beyond+2*j+1] = weights[j], weights[j]
	}
	for j, row := range limits {
		entries := p.addRow(row, 0)
		slack, broken := beyond+2*len(rows)+2*j, beyond+2*len(rows)+2*j+1
		entries[slack], entries[broken] = -1, 1
		p.cost[broken] = limitWeight
	}
	_, x, err := p.solve()
	if err != nil {
		return nil, err
	}
	return x[:columns], nil
}

// solveMixture gives the weights, at least 0, in sum 1, that minimise the sum of squares of homogeneous rows. The first so many columns are weights, the
// rest slacks.
func solveMixture(rows [][]float64, weights int, start []float64) ([]float64, error) {
	ones := make([]float64, len(rows[0]))
	for k := range weights {
		ones[k] = 1
	}
	right := make([]float64, len(rows)+1)
	right[len(rows)] = 1
	x, err := newLeastSquares(append(rows[:len(rows):len(rows)], ones), right).solve(start)
	if err != nil {
		return nil, err
	}
	total := 0.0
	for _, w := range x[:weights] {
		total += w
	}
	return scaled(x, 1/total, len(x)), nil
}

// mixtureOf drops weights of 0.
func mixtureOf(x, tails []float64) Mixture {
	m := Mixture{Supremum: x[0]}
	for k, t := range tails {
		if w := x[k+1]; w > 0 {
			m.Knots = append(m.Knots, Knot{Tail: t, Weight: w})
		}
	}
	return m
}

// knots gives the probabilities at which the curve may have kinks, rising: a geometric grid, where quotes attach and exhaust, and the
// first ranks of the books on which own layers are priced.
func knots(quotes []Quote) []float64 {
	tails := []float64{1}
	for i := range geometricKnots {
		tails = append(tails, math.Pow(lowestKnot, float64(i)/(geometricKnots-1)))
	}
	for _, q := range quotes {
		if q.Own() {
			low, high := q.tails()
			tails = append(tails, low, high)
			for k := 1; k <= rankKnots; k++ {
				tails = append(tails, float64(k)/float64(q.Years))
			}
		} else {
			tails = append(tails, q.Attachment, q.Exhaustion)
		}
	}
	slices.Sort(tails)
	var distinct []float64
	for _, t := range tails {
		if t > 0 && t <= 1 && (len(distinct) == 0 || t > distinct[len(distinct)-1]*(1+1e-9)) {
			distinct = append(distinct, t)
		}
	}
	return distinct
}

// columns gives what the supremum and the tail values at risk at the knots ask for the quoted layer, as a fraction of its limit, and what
// the quote pays for it after brokerage. A layer with paid reinstatements is priced at the quoted premium: the price of R − P·F, which
// is linear in the weights for given P, must be P·(1−b).
func (q Quote) columns(tails []float64, brokerage float64) ([]float64, float64) {
	target := q.RateOnLine * (1 - brokerage)
	row := make([]float64, len(tails)+1)
	if !q.Own() {
		row[0] = 1
		for k, t := range tails {
			row[k+1] = tailShape(t, q.Attachment, q.Exhaustion, q.ExpectedLoss)
		}
		return row, target
	}
	if q.Terms.Kind == treaty.QuotaShare { // brokerage is a part of the premium, not of what the market asks for the loss
		target = q.RateOnLine - brokerage
	}
	net := make([]float64, len(q.Recoveries))
	for i, r := range q.Recoveries {
		net[i] = r/q.Terms.Limit - q.RateOnLine*q.Terms.Reinstated(r)
	}
	slices.SortFunc(net, func(a, b float64) int {
		if a > b {
			return -1
		}
		if a < b {
			return 1
		}
		return 0
	})
	return tailMeans(net, q.Years, tails), target
}

// tailMeans gives the supremum and the tail values at risk at the knots of a sample of so many years, of which the values that are not 0 are given,
// largest first.
func tailMeans(net []float64, years int, tails []float64) []float64 {
	row := make([]float64, len(tails)+1)
	if len(net) > 0 {
		row[0] = max(net[0], 0)
	}
	sums := make([]float64, len(net)+1)
	for i, x := range net {
		sums[i+1] = sums[i] + x
	}
	for k, t := range tails {
		row[k+1] = tailMean(net, sums, t*float64(years), years)
	}
	return row
}

// tailMean gives the mean of the largest count (not whole) of years values, of which those that are not 0 are given, largest first, with
// their running sums. Negative values come last, after the zeros.
func tailMean(net, sums []float64, count float64, years int) float64 {
	positive := len(net)
	for positive > 0 && net[positive-1] < 0 {
		positive--
	}
	zeros := years - len(net)
	whole := int(count)
	part := count - float64(whole)
	at := func(rank int) float64 { // value of rank from 0
		switch {
		case rank < positive:
			return net[rank]
		case rank < positive+zeros:
			return 0
		case rank < years:
			return net[rank-zeros]
		}
		return 0
	}
	sum := sums[min(whole, positive)]
	if whole > positive+zeros {
		sum += sums[whole-zeros] - sums[positive]
	}
	if part > 0 {
		sum += part * at(whole)
	}
	return sum / count
}

// quoted gives the terms without a price of their own, as the curve would price them.
func (q Quote) quoted() treaty.Treaty {
	terms := *q.Terms
	terms.Premium = treaty.Optional{}
	return terms
}
