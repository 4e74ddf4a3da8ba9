package optimize

import (
	"math"
	"slices"

	"cedewright/market"
	"cedewright/portfolio/treaty"
)

// priceErrors fills what the quotes, as against the simulated years, leave uncertain: each replicate of the curves moves the premiums of all treaties that
// they price, together, so that treaties on one curve err together; curves were resampled apart. What the owners ask for the risk kept moves with
// the premiums by its derivative at the programme in hand.
func (a *Appraiser) priceErrors(result *Appraisal, items []item, flows []flow, kept moves) {
	for i, it := range items {
		figure := treatyFigure(result, it.terms.Name)
		curve := a.curve(it.terms.Curve)
		figure.Reliance = curve.Reliance(it.terms, it.priced.attachment, it.priced.exhaustion)
		if curve.Replicates == nil || !it.priced.modelled {
			continue
		}
		descending := slices.DeleteFunc(slices.Clone(flows[i].recovery), func(r float64) bool { return r <= 0 })
		slices.Sort(descending)
		slices.Reverse(descending)
		placed := it.terms.Placed()
		if it.terms.Kind == treaty.QuotaShare {
			shifts := curve.Replicates.Commissions(it.terms, descending, a.years)
			figure.PriceError = placed * spread(shifts)
			result.addMoves(shifts, -placed, -placed+kept.commission[i])
			continue
		}
		shifts := curve.Replicates.BasePremiums(it.terms, descending, a.years)
		figure.PriceError = placed * spread(shifts)
		margin := placed * (1 + it.priced.reinstated)
		result.addMoves(shifts, margin, margin+kept.base[i])
	}
	result.MarginPriceError = spread(result.marginMoves)
	result.CostPriceError = spread(result.CostPriceMoves)
}

// addMoves adds the moves of one treaty's price to those of margin and total cost.
func (a *Appraisal) addMoves(moves []float64, margin, cost float64) {
	if a.CostPriceMoves == nil {
		a.CostPriceMoves, a.marginMoves = make([]float64, len(moves)), make([]float64, len(moves))
	}
	addScaled(a.marginMoves, margin, moves)
	addScaled(a.CostPriceMoves, cost, moves)
}

// spread is the standard deviation of moves; 0 for fewer than two.
func spread(moves []float64) float64 {
	if len(moves) < 2 {
		return 0
	}
	mean := 0.0
	for _, x := range moves {
		mean += x / float64(len(moves))
	}
	return standardDeviation(moves, mean)
}

// curve gives the curve of that name; an empty one when the treaty's price is quoted and it names none.
func (a *Appraiser) curve(name string) market.Curve {
	if t, ok := a.tariffs[name]; ok {
		return t.Curve()
	}
	return market.Curve{}
}

// ComparePrices gives the standard error of the difference in total cost of two programmes that comes from the quotes: both were appraised with detail by
// the same appraiser, so the same replicate moves both.
func ComparePrices(a, b Appraisal) float64 {
	if a.CostPriceMoves == nil && b.CostPriceMoves == nil {
		return 0
	}
	moves := make([]float64, max(len(a.CostPriceMoves), len(b.CostPriceMoves)))
	addScaled(moves, 1, a.CostPriceMoves)
	addScaled(moves, -1, b.CostPriceMoves)
	return math.Abs(spread(moves))
}
