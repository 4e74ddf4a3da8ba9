package market

import (
	"math"

	"cedewright/portfolio/treaty"
)

// Slice is a thin part of what a treaty pays in a year: all thin layers of the annual recovery between two amounts.
type Slice struct {
	From, To float64 // money of the year's recovery, for 100 % of the treaty
	Hit      float64 // yearly probability that the recovery exceeds From
	Expected float64 // expected recovery within, money per year
	Price    float64 // what the curve asks for it, money per year, before brokerage; NaN without a curve
}

// Explanation takes the price of a treaty apart, for 100 % of it, in money per year.
type Explanation struct {
	Expected        float64 // expected recovery: the area under the survival function S of the annual recovery
	Distorted       float64 // the area under g(S): what the curve asks for the recoveries; NaN without a curve
	Base            float64 // base premium
	Reinstatement   float64 // expected reinstatement premium
	Brokerage       float64 // part of the base premium that goes to the broker
	Multiple        float64 // base premium over expected recovery; NaN when nothing is expected
	RateOnLine      float64 // base premium over limit; NaN for an unlimited layer
	Slices          []Slice // from the bottom; their expected recoveries and prices add up to Expected and Distorted
	MostProbability float64 // yearly probability of any recovery
}

// mostSlices is how many parts a price is taken into.
const mostSlices = 8

// Explain takes the price of an excess treaty apart, given its annual recoveries at 100 %, the positive ones, largest first. The tariff may be nil for a
// treaty with a quoted premium and no curve.
func Explain(t *Tariff, terms treaty.Treaty, base float64, descending []float64, years int) Explanation {
	n := float64(years)
	e := Explanation{Base: base, Distorted: math.NaN(), Multiple: math.NaN(), RateOnLine: math.NaN(), MostProbability: float64(len(descending)) / n}
	for _, r := range descending {
		e.Expected += r / n
		e.Reinstatement += base * terms.Reinstated(r) / n
	}
	if e.Expected > 0 {
		e.Multiple = base / e.Expected
	}
	if !math.IsInf(terms.Limit, 1) {
		e.RateOnLine = base / terms.Limit
	}
	if t != nil {
		e.Distorted = t.Price(descending)
		if !terms.Premium.Given {
			e.Brokerage = base * t.curve.Brokerage
		}
	}
	if len(descending) == 0 {
		return e
	}
	step := sliceStep(descending[0])
	for from := 0.0; from < descending[0]; from += step {
		e.Slices = append(e.Slices, sliceOf(t, descending, n, from, min(from+step, descending[0])))
	}
	return e
}

// sliceStep gives a width of slices that reads well: 1, 2, 2.5 or 5 times a power of ten.
func sliceStep(largest float64) float64 {
	least := largest / mostSlices
	power := math.Pow(10, math.Floor(math.Log10(least)))
	for _, m := range []float64{1, 2, 2.5, 5} {
		if m*power >= least*(1-1e-9) {
			return m * power
		}
	}
	return 10 * power
}

// sliceOf prices what recoveries put between two amounts.
func sliceOf(t *Tariff, descending []float64, n, from, to float64) Slice {
	s := Slice{From: from, To: to, Price: math.NaN()}
	part := make([]float64, 0, len(descending))
	for _, r := range descending {
		if r <= from {
			break
		}
		part = append(part, min(r, to)-from)
		s.Expected += (min(r, to) - from) / n
	}
	s.Hit = float64(len(part)) / n
	if t != nil {
		s.Price = t.Price(part)
	}
	return s
}
