package market

import (
	"fmt"
	"math"

	"cedewright/portfolio/fault"
)

// Curve is what the market charges for one kind of risk.
type Curve struct {
	Name              string
	Distortion        Distortion
	Brokerage         float64     // fraction of the premium paid, 0 to below 1; none on reinstatement premiums (common practice, no source)
	MinimumRateOnLine float64     // least base premium as a fraction of limit, 0 to 1
	Fit               *Fit        // how the distortion was fitted; nil when it was set by hand
	Capacity          float64     // yearly probability of a full loss below which nobody writes a layer; 0 = there is no such end
	Replicates        *Replicates // what other quotes would have given; nil = not drawn
}

// Validate reports every fault of the curve.
func (c Curve) Validate() error {
	var faults fault.List
	if c.Name == "" {
		faults.Add(fault.Fault{Key: "name", Found: "no name", Allowed: "a name of its own"})
	}
	if !(c.Brokerage >= 0 && c.Brokerage < 1) {
		faults.Add(fault.Fault{Key: c.Name + ".brokerage", Found: fmt.Sprint(c.Brokerage), Allowed: "a fraction from 0 to below 1"})
	}
	if !(c.MinimumRateOnLine >= 0 && c.MinimumRateOnLine <= 1) {
		faults.Add(fault.Fault{Key: c.Name + ".minimum_rate_on_line", Found: fmt.Sprint(c.MinimumRateOnLine), Allowed: "a fraction from 0 to 1"})
	}
	if !(c.Capacity >= 0 && c.Capacity < 1) {
		faults.Add(fault.Fault{Key: c.Name + ".capacity", Found: fmt.Sprint(c.Capacity), Allowed: "a probability from 0 to below 1"})
	}
	if c.Distortion == nil {
		faults.Add(fault.Fault{Key: c.Name, Found: "no distortion", Allowed: "a family with its parameter, or a fit to quotes"})
		return faults.Err()
	}
	if err := Check(c.Distortion); err != nil {
		for _, f := range fault.All(err) {
			f.Key = c.Name + "." + f.Key
			faults.Add(*f)
		}
	}
	return faults.Err()
}

// Tariff is a curve ready to price samples of a given number of years: the weights with which the distortion enters a sorted sample.
// It is immutable and safe for concurrent use.
type Tariff struct {
	curve   Curve
	years   int
	weights []float64 // weights[k] = g((k+1)/N) − g(k/N) for the (k+1)-th largest value; of all years but in fits
}

// NewTariff prepares a valid curve for samples of that many years, at least 1.
func NewTariff(c Curve, years int) (*Tariff, error) {
	if err := c.Validate(); err != nil {
		return nil, err
	}
	if years < 1 {
		return nil, fmt.Errorf("market: tariff of curve %q: %d years", c.Name, years)
	}
	return unchecked(c, years, years), nil
}

// unchecked prepares the weights of the largest values only, as many as are asked for, and trusts the curve: fits try many.
func unchecked(c Curve, years, largest int) *Tariff {
	t := &Tariff{curve: c, years: years, weights: make([]float64, largest)}
	before := 0.0
	for k := range t.weights {
		at := c.Distortion.At(float64(k+1) / float64(years))
		t.weights[k] = at - before
		before = at
	}
	return t
}

// weight gives the weight of any rank from 0.
func (t *Tariff) weight(rank int) float64 {
	if rank < len(t.weights) {
		return t.weights[rank]
	}
	return t.curve.Distortion.At(float64(rank+1)/float64(t.years)) - t.curve.Distortion.At(float64(rank)/float64(t.years))
}

// Curve gives the curve.
func (t *Tariff) Curve() Curve { return t.curve }

// Years counts the years of the samples that it prices.
func (t *Tariff) Years() int { return t.years }

// Price gives the distorted expectation of a sample of Years values of at least 0, of which the positive ones are given, largest first:
// Σ r_(k)·(g(k/N) − g((k−1)/N)) (Wang 1996). Not more values may be given than there are years.
func (t *Tariff) Price(descending []float64) float64 {
	sum := 0.0
	for k, r := range descending {
		sum += float64(r * t.weights[k])
	}
	return sum
}

// finite tells whether x is a finite number.
func finite(x float64) bool { return !math.IsNaN(x) && !math.IsInf(x, 0) }
