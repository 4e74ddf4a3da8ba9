package optimize

import (
	"fmt"
	"math"
	"slices"

	"cedewright/market"
	"cedewright/portfolio/capital"
	"cedewright/portfolio/treaty"
)

// Bound is a total cost below which no programme can come on the loaded years.
type Bound struct {
	TotalCost float64 // money per year
	Certified bool    // it holds for every contract whatever, not for ordinary layers on the whole account alone
	Reason    string  // why it is certified, or which condition fails
}

// ThinLayerBound gives the total cost of the best conceivable contract on the whole account, from thin layers of the annual gross loss X: each is ceded or
// kept, whichever is cheaper, ∫ min(g(S)/(1−b) − S, r·(h(S) − S)) dx on basis deviation and ∫ min((1+r)·g(S)/(1−b) − S, r·h(S)) dx less r times
// the premiums held on basis result, with S the survival function of X, h the capital measure's distortion, r the cost of capital, and
// g/(1−b) the lowest of the curves at hand.
//
// For tail value at risk h is concave, and so is the integrand's minimum m; then I_m(X) ≤ I_m(R) + I_m(X − R) for every recovery R ≥ 0, so no contract
// priced at ρ_g or above, nor any sum of such contracts, costs less: the bound is certified. For value at risk it is the optimum of contracts that rise
// with the annual loss, and some contrived contract may cost less: it is not certified. It speaks of the loaded years, not of the law behind them.
func (a *Appraiser) ThinLayerBound(space Space) Bound {
	curves, obstacle := a.boundCurves(space)
	s := a.c.Standards[0]
	level, tail := s.Level, s.Level.Tail()
	n := a.years
	rank := level.Rank(n)
	h := func(k int) float64 { // at the survival probability k/n
		if s.Measure == capital.TailValueAtRisk {
			return min(float64(k)/float64(n)/tail, 1)
		}
		if k > n-rank { // the quantile is exceeded by at most n − rank years
			return 1
		}
		return 0
	}
	price := func(p float64) float64 {
		least := math.Inf(1)
		for _, c := range curves {
			least = min(least, c.Distortion.At(p)/(1-c.Brokerage))
		}
		return least
	}
	losses := make([]float64, n)
	for y, x := range a.ungained {
		losses[y] = x - a.constant
	}
	slices.Sort(losses)
	slices.Reverse(losses)
	r := a.c.CostOfCapital
	sum := 0.0
	for k := 1; k <= n; k++ {
		step := losses[k-1]
		if k < n {
			step -= losses[k]
		}
		if step == 0 {
			continue
		}
		p := float64(k) / float64(n)
		cede, keep := price(p)-p, r*(h(k)-p)
		if s.Basis == capital.Result {
			cede, keep = (1+r)*price(p)-p, r*h(k)
		}
		sum += float64(step * min(cede, keep))
	}
	if s.Basis == capital.Result {
		sum += r * a.constant
	}
	b := Bound{TotalCost: sum}
	switch {
	case s.Measure != capital.TailValueAtRisk:
		b.Reason = "a contract that pays nothing in the very worst years could beat every sum of layers under value at risk"
	case obstacle != "":
		b.Reason = obstacle
	default:
		b.Certified, b.Reason = true, "no contract priced at the curves or above can come"
	}
	return b
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
