package optimize

import (
	"fmt"
	"math"
	"slices"

	"cedewright/market"
	"cedewright/portfolio/treaty"
)

// Bound is a total cost below which no programme can come on the loaded years.
type Bound struct {
	Known     bool    // false: nothing is known under what drives the search
	TotalCost float64 // money per year
	Certified bool    // it holds for every contract whatever, not for ordinary layers on the whole account alone
	Reason    string  // why it is certified, or which condition fails
}

// ThinLayerBound gives the total cost of the best conceivable contract on the whole account, from thin layers of the annual gross loss X: each is ceded or
// kept, whichever is cheaper, ∫ min(g(S)/(1−b) − S, r·(h(S) − S)) dx on basis deviation and ∫ min((1+r)·g(S)/(1−b) − S, r·h(S)) dx less r times
// the premiums held on basis result, with S the survival function of X, h the capital measure's distortion, r the cost of capital, and
// g/(1−b) the lowest of the curves at hand. A mix of criteria has the mix of their distortions; of criteria or standards of which the worst counts,
// each gives a bound, and the highest is taken.
//
// For tail value at risk h is concave, and so is the integrand's minimum m; then I_m(X) ≤ I_m(R) + I_m(X − R) for every recovery R ≥ 0, so no contract
// priced at ρ_g or above, nor any sum of such contracts, costs less: the bound is certified. For value at risk it is the optimum of contracts that rise
// with the annual loss, and some contrived contract may cost less: it is not certified. It speaks of the loaded years, not of the law behind them.
//
// Of the rest of the company, a law joins X year by year, and a capital figure leaves the whole requirement convex in the book's own, so that every
// tangent bounds it from below. Recoveries that reinsurers leave unpaid only add to the cost.
func (a *Appraiser) ThinLayerBound(space Space) Bound {
	if a.c.Owners != nil {
		return Bound{Reason: "the owners price the risk they keep by a distortion"}
	}
	curves, obstacle := a.boundCurves(space)
	best := Bound{Reason: "a formula or a covariance of charges has none"}
	for _, i := range a.c.Drivers() {
		r, ok := a.rules[i].(*simulatedRule)
		if !ok {
			continue
		}
		for _, mix := range mixes(r.standard) {
			b := a.mixBound(mix, curves)
			if tail := mix.tailOnly(); !tail {
				b.Reason = "a contract that pays nothing in the very worst years could beat every sum of layers under value at risk"
			} else if obstacle != "" {
				b.Reason = obstacle
			} else {
				b.Certified, b.Reason = true, "no contract priced at the curves or above can come"
			}
			if !best.Known || b.Certified && !best.Certified || b.Certified == best.Certified && b.TotalCost > best.TotalCost {
				best = b
			}
		}
	}
	return best
}

// mixBound gives the bound under one mix of criteria.
func (a *Appraiser) mixBound(mix criteriaMix, curves []market.Curve) Bound {
	losses := make([]float64, a.years) // X, with the rest of the company above its best year
	constant := a.constant
	lowest := 0.0
	if a.rest != nil {
		lowest = slices.Min(a.rest)
		constant += lowest
	}
	for y, x := range a.ungained {
		losses[y] = x - a.constant
		if a.rest != nil {
			losses[y] += a.rest[y] - lowest
		}
	}
	slices.Sort(losses)
	slices.Reverse(losses)
	rest := a.c.Rest
	if rest == nil || rest.Quantile != nil {
		return Bound{Known: true, TotalCost: a.thinLayers(mix, curves, losses, constant, a.c.CostOfCapital)}
	}
	// No requirement of the company is below the root's least value, whatever the book asks.
	bound := Bound{Known: true, TotalCost: a.c.CostOfCapital * rest.Capital * math.Sqrt(max(1-rest.Correlation*rest.Correlation, 0))}
	const tangents = 16 // each is a bound; a few find nearly the best
	most := mix.of(losses, constant)
	for i := range tangents + 1 {
		at := most * float64(i) / tangents
		r := a.c.CostOfCapital * rest.Slope(at)
		if r < 0 {
			continue // the requirement rises with the book's own above here alone
		}
		bound.TotalCost = max(bound.TotalCost, a.thinLayers(mix, curves, losses, constant, r)+a.c.CostOfCapital*rest.Combine(at)-r*at)
	}
	return bound
}

// thinLayers sums the cheaper of ceding and keeping over the layers between falling annual losses; constant is the certain part of −U, r the cost of capital.
func (a *Appraiser) thinLayers(mix criteriaMix, curves []market.Curve, losses []float64, constant, r float64) float64 {
	n := len(losses)
	price := func(p float64) float64 {
		least := math.Inf(1)
		for _, c := range curves {
			least = min(least, c.Distortion.At(p)/(1-c.Brokerage))
		}
		return least
	}
	h := mix.distortion(n)
	result, deviation := mix.bases()
	sum := r * result * constant
	for k := 1; k <= n; k++ {
		step := losses[k-1]
		if k < n {
			step -= losses[k]
		}
		if step == 0 {
			continue
		}
		p := float64(k) / float64(n)
		sum += float64(step * min((1+r*result)*price(p)-p, r*(h(k)-deviation*p)))
	}
	return sum
}

// boundCurves gives the curves that treaties of the space can be priced by, and what keeps the bound from being certified, if anything.
func (a *Appraiser) boundCurves(space Space) (curves []market.Curve, obstacle string) {
	use := func(name string) {
		if t, ok := a.tariffs[name]; ok && !slices.ContainsFunc(curves, func(c market.Curve) bool { return c.Name == name }) {
			curves = append(curves, t.Curve())
		}
	}
	replaced := map[string]bool{}
	for _, t := range space.Towers {
		use(t.Template.Curve)
		for _, name := range t.Replaces {
			replaced[name] = true
		}
		if t.Reinstatements != nil && t.Reinstatements.Charge > 1 {
			obstacle = fmt.Sprintf("the reinstatements of %q cost more than the premium", t.Name)
		}
	}
	for _, v := range space.Vary {
		if v.Reinstatements != nil && v.Reinstatements.Charge > 1 {
			obstacle = fmt.Sprintf("the reinstatements of %q cost more than the premium", v.Treaty)
		}
	}
	varied := len(space.Vary)+len(space.Towers) > 0
	for _, t := range space.Start.Treaties {
		if replaced[t.Name] {
			continue
		}
		use(t.Curve)
		switch {
		case t.Premium.Given:
			obstacle = fmt.Sprintf("the premium of %q is quoted and may lie below the curves", t.Name)
		case t.Commission.Given && (varied && len(t.After) > 0 || !a.dearShare(space.Start, t)): // what it follows may be varied
			obstacle = fmt.Sprintf("the commission of %q may leave the reinsurer less than the curves ask", t.Name)
		case slices.ContainsFunc(t.Reinstatements, func(c float64) bool { return c > 1 }):
			obstacle = fmt.Sprintf("the reinstatements of %q cost more than the premium", t.Name)
		}
	}
	if len(curves) == 0 {
		return nil, "no treaty is priced by a curve"
	}
	return curves, obstacle
}

// dearShare tells whether a quota share at a given commission costs at least what every curve asks for its subject loss, brokerage included.
func (a *Appraiser) dearShare(p treaty.Programme, t treaty.Treaty) bool {
	w := a.scratch.Get().(*workspace)
	defer a.scratch.Put(w)
	i := slices.IndexFunc(p.Treaties, func(u treaty.Treaty) bool { return u.Name == t.Name })
	premium := p.SubjectPremium(i, a.c.Book.Table.Classes(), a.premiums)
	s := a.subjectOf(p, i, w)
	for _, tariff := range a.tariffs {
		if premium*(1-t.Commission.Value) < tariff.Price(s.loss)/(1-tariff.Curve().Brokerage) {
			return false
		}
	}
	return true
}
