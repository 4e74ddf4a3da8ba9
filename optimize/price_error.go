package optimize

import (
	"math"
	"slices"

	"cedewright/market"
	"cedewright/portfolio/capital"
	"cedewright/portfolio/treaty"
)

// priceErrors fills what the quotes, as against the simulated years, leave uncertain: each replicate of the curves moves the premiums of all treaties that
// they price, together, so that treaties on one curve err together; curves were resampled apart. Required capital moves with the premiums by
// its derivative at the programme in hand.
func (a *Appraiser) priceErrors(result *Appraisal, items []item, flows []flow, losses []float64) {
	s := a.c.Standards[0]
	var weights []float64
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
			moves := curve.Replicates.Commissions(it.terms, descending, a.years)
			figure.PriceError = placed * spread(moves)
			slope := 1.0
			if s.Basis == capital.Result && result.Capital[0].Net.Value > 0 {
				slope += a.c.CostOfCapital
			}
			result.addMoves(moves, -placed, -placed*slope)
			continue
		}
		moves := curve.Replicates.BasePremiums(it.terms, descending, a.years)
		figure.PriceError = placed * spread(moves)
		if weights == nil && flows[i].reinstated != nil {
			weights = tailWeights(losses, s.Measure, s.Level)
		}
		margin := placed * (1 + it.priced.reinstated)
		result.addMoves(moves, margin, margin+a.c.CostOfCapital*placed*capitalSlope(s, result.Capital[0].Net.Value, weights, flows[i], it.priced))
	}
	result.MarginPriceError = spread(result.marginMoves)
	result.CostPriceError = spread(result.CostPriceMoves)
}

// capitalSlope is by how much required capital rises when the base premium of a full treaty rises by one.
func capitalSlope(s capital.Standard, amount float64, weights []float64, f flow, k *priced) float64 {
	if amount == 0 {
		return 0
	}
	slope := 1.0
	if s.Basis == capital.Deviation {
		slope = 0
	}
	if f.reinstated != nil {
		slope += meanProduct(weights, f.reinstated)
		if s.Basis == capital.Deviation {
			slope -= k.reinstated
		}
	}
	return slope
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
