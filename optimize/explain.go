package optimize

import (
	"slices"

	"cedewright/market"
	"cedewright/portfolio/treaty"
)

// ExplainedPrice is a treaty and how its price comes about.
type ExplainedPrice struct {
	Treaty string
	market.Explanation
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
		list = append(list, ExplainedPrice{it.terms.Name, market.Explain(a.tariffs[it.terms.Curve], it.terms, it.priced.base, descending, a.years)})
	}
	return list, nil
}
