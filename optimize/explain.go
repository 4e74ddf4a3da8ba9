package optimize

import (
	"errors"
	"fmt"
	"math"
	"slices"

	"cedewright/market"
	"cedewright/portfolio/treaty"
)

// ExplainedPrice is a treaty and how its price comes about.
type ExplainedPrice struct {
	Treaty string
	market.Explanation
	Allowed *market.Interval // rates on line that the quotes of its curve alone allow; nil without quotes, or with too many of them
}

// Explain takes the prices of a programme's placed excess treaties apart, each for 100 % of the treaty.
func (a *Appraiser) Explain(p treaty.Programme) ([]ExplainedPrice, error) {
	w := a.scratch.Get().(*workspace)
	defer a.scratch.Put(w)
	items, err := a.items(p, w)
	if err != nil {
		return nil, err
	}
	var list []ExplainedPrice
	for _, it := range items {
		if it.terms.Kind == treaty.QuotaShare {
			continue
		}
		f := a.flow(it, w)
		descending := slices.DeleteFunc(f.recovery, func(r float64) bool { return r <= 0 })
		slices.Sort(descending)
		slices.Reverse(descending)
		e := ExplainedPrice{Treaty: it.terms.Name, Explanation: market.Explain(a.tariffs[it.terms.Curve], it.terms, it.priced.base, descending, a.years)}
		if e.Allowed, err = a.allowed(it.terms, descending); err != nil {
			return nil, err
		}
		list = append(list, e)
	}
	return list, nil
}

// allowed gives the rates on line that the quotes of a treaty's curve alone allow for it.
func (a *Appraiser) allowed(terms treaty.Treaty, descending []float64) (*market.Interval, error) {
	curve := a.curve(terms.Curve)
	if curve.Fit == nil || terms.Premium.Given || math.IsInf(terms.Limit, 1) || len(descending) == 0 {
		return nil, nil
	}
	quotes := make([]market.Quote, len(curve.Fit.Quotes))
	for i, q := range curve.Fit.Quotes {
		quotes[i] = q.Quote
	}
	interval, err := market.RateInterval(quotes, curve.Brokerage, market.Quote{Curve: curve.Name, Name: terms.Name, Terms: &terms, Recoveries: descending, Years: a.years})
	if errors.Is(err, market.ErrTooManyQuotes) {
		return nil, nil
	}
	if err != nil {
		return nil, fmt.Errorf("rates that the quotes allow for %q: %w", terms.Name, err)
	}
	return &interval, nil
}
