package market

import (
	"fmt"
	"math"
	"slices"

	"cedewright/portfolio/treaty"
)

// Premium is the price of an excess treaty, for 100 % of it, in money per year.
type Premium struct {
	Base                float64 // base premium, brokerage included
	By                  PricedBy
	Basis               string  // By in words, with the curve's name
	DistortedRecovery   float64 // ρ_g(R); 0 when the price is quoted
	DistortedReinstated float64 // ρ_g(F); 0 likewise
}

// PricedBy says what set a price.
type PricedBy uint8

// What can set a price.
const (
	ByQuote PricedBy = iota + 1
	ByCurve
	ByMinimum
)

// Modelled tells whether the price follows the simulated years, so that it carries their sampling error.
func (p Premium) Modelled() bool { return p.By == ByCurve }

// BasePremium prices an excess treaty from its annual recoveries at 100 %, of which the positive ones are given, largest first.
//
// A quoted premium overrides the curve. Else the base premium P with brokerage b is the one root of P·(1−b) = ρ_g(R − P·F), with F the
// fraction of P paid as reinstatement premium: P = ρ_g(R)/(1−b+ρ_g(F)) while P·max c ≤ limit, since R − P·F and F then rise together;
// beyond, Newton's method from there (the right side is convex and falling in P). It is never below the minimum rate on line.
func (t *Tariff) BasePremium(terms treaty.Treaty, descending []float64) (Premium, error) {
	if terms.Premium.Given {
		return Premium{Base: terms.Premium.Value, By: ByQuote, Basis: "quoted"}, nil
	}
	if len(descending) > t.years {
		return Premium{}, fmt.Errorf("market: base premium: %d recoveries for %d years", len(descending), t.years)
	}
	p := Premium{By: ByCurve, Basis: "curve " + t.curve.Name, DistortedRecovery: t.Price(descending)}
	keep := 1 - t.curve.Brokerage
	reinstated := make([]float64, 0, len(descending))
	steepest := 0.0
	for _, c := range terms.Reinstatements {
		steepest = max(steepest, c)
	}
	if steepest > 0 {
		for _, r := range descending { // F rises with R, so its order is that of R
			reinstated = append(reinstated, terms.Reinstated(r))
		}
		p.DistortedReinstated = t.Price(reinstated)
	}
	p.Base = p.DistortedRecovery / (keep + p.DistortedReinstated)
	if p.Base*steepest > terms.Limit {
		base, err := t.solvePremium(descending, reinstated, keep, p.Base)
		if err != nil {
			return Premium{}, err
		}
		p.Base = base
	}
	if math.IsInf(p.Base, 0) || math.IsNaN(p.Base) {
		return Premium{}, fmt.Errorf("market: base premium: the price is %v", p.Base)
	}
	if !math.IsInf(terms.Limit, 1) {
		if least := t.curve.MinimumRateOnLine * terms.Limit; p.Base < least {
			p.Base, p.By, p.Basis = least, ByMinimum, "minimum rate on line of curve "+t.curve.Name
		}
	}
	return p, nil
}

// newtonSteps is ample: on a finite sample Newton's method on a convex piecewise linear function ends after a few pieces.
const newtonSteps = 200

// rootTolerance is a step, relative to the premium, that rounding of sums over a hundred thousand years can explain.
const rootTolerance = 1e-12

// solvePremium finds the root of P·keep = ρ_g(R − P·F) by Newton's method from a start at or below it.
func (t *Tariff) solvePremium(recoveries, reinstated []float64, keep, start float64) (float64, error) {
	n := len(recoveries)
	order := make([]int, n)
	net := make([]float64, n)
	p := start
	for range newtonSteps {
		for i := range net {
			net[i] = recoveries[i] - float64(p*reinstated[i])
			order[i] = i
		}
		slices.SortStableFunc(order, func(a, b int) int {
			switch {
			case net[a] > net[b]:
				return -1
			case net[a] < net[b]:
				return 1
			}
			return 0
		})
		// The years without a recovery have net 0: values above 0 come before them, values below after them.
		value, slope, k := 0.0, -keep, 0
		for _, i := range order {
			if net[i] < 0 {
				break
			}
			value += float64(net[i] * t.weights[k])
			slope -= float64(reinstated[i] * t.weights[k])
			k++
		}
		for rank, j := t.years-1, n-1; j >= k; rank, j = rank-1, j-1 {
			weight := t.weight(rank)
			value += float64(net[order[j]] * weight)
			slope -= float64(reinstated[order[j]] * weight)
		}
		step := (value - float64(p*keep)) / -slope
		if !finite(step) {
			return 0, fmt.Errorf("market: base premium: no root near %v", p)
		}
		p += step
		if math.Abs(step) <= rootTolerance*math.Abs(p) { // on the last piece: the step itself is exact but for rounding
			return p, nil
		}
	}
	return 0, fmt.Errorf("market: base premium: no root after %d steps", newtonSteps)
}

// CommissionRate is the commission of a quota share.
type CommissionRate struct {
	Rate  float64 // fraction of ceded premium; may be below 0 when the market asks for more than the premium
	Basis string  // what set it
}

// Commission gives the commission of a quota share from its subject losses, largest first, and its subject premium in money per year:
// 1 − b − ρ_g(subject loss)/subject premium. A commission in the terms overrides it.
func (t *Tariff) Commission(terms treaty.Treaty, descending []float64, subjectPremium float64) (CommissionRate, error) {
	if terms.Commission.Given {
		return CommissionRate{terms.Commission.Value, "commission in the study"}, nil
	}
	if !(subjectPremium > 0) {
		return CommissionRate{}, fmt.Errorf("market: commission: the subject premium is %v", subjectPremium)
	}
	return CommissionRate{1 - t.curve.Brokerage - t.Price(descending)/subjectPremium, "curve " + t.curve.Name}, nil
}
