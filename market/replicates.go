package market

import (
	"cmp"
	"fmt"
	"math"
	"math/rand/v2"
	"slices"

	"cedewright/portfolio/treaty"

	"gonum.org/v1/gonum/stat"
)

// Replicates are the curves that would have been fitted to other quotes of the same kind: each is fitted to quotes drawn, with replacement, from those in
// hand (bootstrap, Efron 1979). Their spread is the error of every price that rests on so few quotes. All are mixtures on one grid of
// kinks, so that the price of a treaty under all of them is one set of products.
type Replicates struct {
	brokerage float64
	minimum   float64 // rate on line
	tails     []float64
	fitted    []float64   // weights of the curve itself on the same grid, the supremum first
	weights   [][]float64 // of each replicate
}

// fewestForReplicates is the count of quotes below which drawing among them says nothing.
const fewestForReplicates = 3

// Resample draws quotes and fits again, so many times, in the way in which a curve was fitted: same family, or the free curve with the same pull. The
// stream of random numbers depends on the seed and the curve's name alone. It gives nil for a curve set by hand or with fewer than three
// quotes of weight above 0.
func Resample(c Curve, count int, seed uint64) (*Replicates, error) {
	if c.Fit == nil || count < 2 {
		return nil, nil
	}
	var used []Quote
	for _, q := range c.Fit.Quotes {
		if q.Weight > 0 {
			used = append(used, q.Quote)
		}
	}
	if len(used) < fewestForReplicates {
		return nil, nil
	}
	inCanonicalOrder(used)
	refit, err := c.Fit.refitter(used)
	if err != nil {
		return nil, err
	}
	r := &Replicates{brokerage: c.Brokerage, minimum: c.MinimumRateOnLine, tails: knots(used)}
	r.fitted = onKnots(c.Distortion, r.tails)
	name := uint64(14695981039346656037) // FNV-1a of the name, so that curves draw apart
	for _, b := range []byte(c.Name) {
		name = (name ^ uint64(b)) * 1099511628211
	}
	random := rand.New(rand.NewPCG(seed, name))
	for range count {
		weights := make([]float64, len(used))
		for range used {
			j := random.IntN(len(used))
			weights[j] += used[j].Weight
		}
		d, err := refit(weights)
		if err != nil {
			return nil, fmt.Errorf("market: resampling of curve %q: %w", c.Name, err)
		}
		r.weights = append(r.weights, onKnots(d, r.tails))
	}
	return r, nil
}

// inCanonicalOrder sorts quotes by what they say, so that the order in which they were given draws no other replicates.
func inCanonicalOrder(quotes []Quote) {
	slices.SortStableFunc(quotes, func(a, b Quote) int {
		return cmp.Or(cmp.Compare(a.Attachment, b.Attachment), cmp.Compare(a.Exhaustion, b.Exhaustion), cmp.Compare(a.ExpectedLoss, b.ExpectedLoss),
			cmp.Compare(a.RateOnLine, b.RateOnLine), cmp.Compare(a.Weight, b.Weight), cmp.Compare(a.Name, b.Name))
	})
}

// refitter gives a function that fits the same kind of curve to the same quotes with other weights; the free curve keeps its pull, but what it is
// pulled towards is fitted again.
func (f *Fit) refitter(quotes []Quote) (func(weights []float64) (Distortion, error), error) {
	if f.Family != FamilyFree {
		table, err := newRateTable(f.Family, quotes, f.Brokerage)
		if err != nil {
			return nil, err
		}
		return func(weights []float64) (Distortion, error) {
			p, _, err := table.fit(weights)
			if err != nil {
				return nil, err
			}
			return NewFamily(f.Family, p)
		}, nil
	}
	m, err := newFreeModel(quotes, f.Brokerage, f.options)
	if err != nil {
		return nil, err
	}
	return func(weights []float64) (Distortion, error) {
		_, anchor, err := m.anchor(weights)
		if err != nil {
			return nil, err
		}
		x, err := m.fit(weights, anchor, f.Pull, nil)
		if err != nil {
			return nil, err
		}
		return mixtureOf(x, m.tails), nil
	}, nil
}

// onKnots writes a distortion as a mixture with kinks at the knots, by chords between them; a jump at 0 is the supremum's part.
func onKnots(d Distortion, tails []float64) []float64 {
	w := make([]float64, len(tails)+1)
	if m, ok := d.(Mixture); ok {
		w[0] = m.Supremum
	} else if c, ok := d.(ConstantCostOfCapital); ok {
		w[0] = c.Iota / (1 + c.Iota)
	}
	at, before := w[0], 0.0
	slopes := make([]float64, len(tails)+1) // slope of the chord that ends at each knot; 0 beyond the last
	for k, t := range tails {
		g := d.At(t)
		slopes[k] = max(g-at, 0) / (t - before)
		at, before = g, t
	}
	for k, t := range tails {
		w[k+1] = max(t*(slopes[k]-slopes[k+1]), 0)
	}
	return w
}

// Count counts the replicates.
func (r *Replicates) Count() int { return len(r.weights) }

// Curve gives the distortion of one replicate, from 0 to Count − 1.
func (r *Replicates) Curve(i int) Distortion { return mixtureOf(r.weights[i], r.tails) }

// At gives g(s) under every replicate.
func (r *Replicates) At(s float64) []float64 {
	parts := make([]float64, len(r.tails)+1)
	if s > 0 {
		parts[0] = 1
	}
	for k, t := range r.tails {
		parts[k+1] = min(max(s, 0)/t, 1)
	}
	values := make([]float64, len(r.weights))
	for i, w := range r.weights {
		values[i] = dot(w, parts)
	}
	return values
}

// Band gives, for each probability, the range that holds the middle share (0–1, such as 0.9) of the replicates of g.
func (r *Replicates) Band(probabilities []float64, share float64) []Interval {
	band := make([]Interval, len(probabilities))
	for i, s := range probabilities {
		values := r.At(s)
		slices.Sort(values)
		cut := int(math.Round((1 - share) / 2 * float64(len(values)-1)))
		band[i] = Interval{values[cut], values[len(values)-1-cut]}
	}
	return band
}

// StandardErrors gives the standard deviation of g over the replicates at each probability.
func (r *Replicates) StandardErrors(probabilities []float64) []float64 {
	list := make([]float64, len(probabilities))
	for i, s := range probabilities {
		list[i] = stat.StdDev(r.At(s), nil)
	}
	return list
}

func dot(a, b []float64) float64 {
	sum := 0.0
	for i := range a {
		sum += float64(a[i] * b[i])
	}
	return sum
}

// BasePremiums gives by how much each replicate moves the base premium of an excess treaty, in money per year for 100 %, from its annual recoveries at
// 100 %, the positive ones, largest first. A quoted premium is not moved, nor is one that the minimum rate on line sets.
func (r *Replicates) BasePremiums(terms treaty.Treaty, descending []float64, years int) []float64 {
	moves := make([]float64, len(r.weights))
	if terms.Premium.Given {
		return moves
	}
	paid := tailMeans(descending, years, r.tails)
	reinstated := make([]float64, len(descending))
	for i, x := range descending {
		reinstated[i] = terms.Reinstated(x)
	}
	due := tailMeans(reinstated, years, r.tails)
	premium := func(w []float64) float64 {
		p := dot(w, paid) / (1 - r.brokerage + dot(w, due))
		if !math.IsInf(terms.Limit, 1) {
			p = max(p, r.minimum*terms.Limit)
		}
		return p
	}
	centre := premium(r.fitted)
	for i, w := range r.weights {
		moves[i] = premium(w) - centre
	}
	return moves
}

// Commissions gives by how much each replicate moves the commission of a full quota share, in money per year, from its subject losses, largest first.
func (r *Replicates) Commissions(terms treaty.Treaty, descending []float64, years int) []float64 {
	moves := make([]float64, len(r.weights))
	if terms.Commission.Given {
		return moves
	}
	asked := tailMeans(descending, years, r.tails)
	centre := dot(r.fitted, asked)
	for i, w := range r.weights {
		moves[i] = centre - dot(w, asked)
	}
	return moves
}

// Reliance says how far the price of a treaty rests on quotes.
type Reliance uint8

// The marks of a price.
const (
	Quoted       Reliance = iota + 1 // given in the study, or of a layer that a quote describes
	Interpolated                     // between the probabilities for which quotes speak
	Extrapolated                     // partly beyond them
	Assumed                          // from a curve set by hand
)

// String gives the mark as a word.
func (r Reliance) String() string {
	switch r {
	case Quoted:
		return "quoted"
	case Interpolated:
		return "interpolated"
	case Extrapolated:
		return "extrapolated"
	case Assumed:
		return "assumed"
	}
	return fmt.Sprintf("Reliance(%d)", uint8(r))
}

// relianceTolerance is how far, relatively, a layer may reach beyond the quotes' probabilities and still count as between them.
const relianceTolerance = 0.1

// Reliance marks the price of an excess treaty by the yearly probabilities at which it attaches and exhausts.
func (c Curve) Reliance(terms treaty.Treaty, attachment, exhaustion float64) Reliance {
	switch {
	case terms.Premium.Given || terms.Commission.Given:
		return Quoted
	case c.Fit == nil:
		return Assumed
	}
	for _, q := range c.Fit.Quotes {
		if q.Own() && q.Terms.Kind == terms.Kind && q.Terms.Retention == terms.Retention && q.Terms.Limit == terms.Limit && slices.Equal(q.Terms.Reinstatements, terms.Reinstatements) {
			return Quoted
		}
	}
	if terms.Kind == treaty.QuotaShare || exhaustion < c.Fit.LowestTail*(1-relianceTolerance) || attachment > c.Fit.HighestTail*(1+relianceTolerance) {
		return Extrapolated
	}
	return Interpolated
}
