package market

import (
	"fmt"
	"math"
	"slices"
	"strings"

	"cedewright/portfolio/fault"
)

// Scenario is a turn of the market: it changes what curves ask.
type Scenario struct {
	Name              string
	Curves            []string // names of the curves that it turns; none = all
	RateChange        float64  // change of prices as a fraction, above −1: 0.2 hardens by a fifth
	From, To          float64  // yearly probabilities between which prices change; both 0 = all
	MinimumRateOnLine float64  // raises the curves' own where it is higher; 0 = leaves them
	CapacityTo        float64  // return period in years above which there is no capacity: a layer whose top is reached more rarely finds no taker; 0 = leaves it
}

// Validate reports every fault of the scenario.
func (s Scenario) Validate(curves []string) error {
	var faults fault.List
	if s.Name == "" {
		faults.Add(fault.Fault{Key: "name", Found: "no name", Allowed: "a name of its own"})
	}
	if !(s.RateChange > -1) || math.IsInf(s.RateChange, 0) {
		faults.Add(fault.Fault{Key: "rate_change", Found: fmt.Sprint(s.RateChange), Allowed: "a fraction above −1, such as 20% or −10%"})
	}
	if s.To != 0 || s.From != 0 {
		if !(s.From >= 0 && s.From < s.To && s.To <= 1) {
			faults.Add(fault.Fault{Key: "from", Found: fmt.Sprintf("from %v to %v", s.From, s.To), Allowed: "probabilities from 0 to 1, from below to"})
		}
	}
	if !(s.MinimumRateOnLine >= 0 && s.MinimumRateOnLine <= 1) {
		faults.Add(fault.Fault{Key: "minimum_rate_on_line", Found: fmt.Sprint(s.MinimumRateOnLine), Allowed: "a fraction from 0 to 1"})
	}
	if s.CapacityTo != 0 && !(s.CapacityTo > 1 && !math.IsInf(s.CapacityTo, 0)) {
		faults.Add(fault.Fault{Key: "capacity_to", Found: fmt.Sprint(s.CapacityTo), Allowed: "a return period of more than 1 year, such as 1 in 250"})
	}
	for _, name := range s.Curves {
		if !slices.Contains(curves, name) {
			faults.Add(fault.Fault{Key: "curves", Found: fmt.Sprintf("no curve is named %q", name), Allowed: fmt.Sprintf("%q", curves), Nearest: fault.Nearest(name, curves)})
		}
	}
	return faults.Err()
}

// String says the scenario in words.
func (s Scenario) String() string {
	var parts []string
	if s.RateChange != 0 {
		text := fmt.Sprintf("prices %+.4g %%", 100*s.RateChange)
		if s.To > 0 {
			text += fmt.Sprintf(" between the probabilities %.4g %% and %.4g %%", 100*s.From, 100*s.To)
		}
		parts = append(parts, text)
	}
	if s.MinimumRateOnLine > 0 {
		parts = append(parts, fmt.Sprintf("minimum rate on line %.4g %%", 100*s.MinimumRateOnLine))
	}
	if s.CapacityTo > 0 {
		parts = append(parts, fmt.Sprintf("no capacity above 1 in %.4g", s.CapacityTo))
	}
	if len(s.Curves) > 0 {
		parts = append(parts, "on "+strings.Join(s.Curves, ", "))
	}
	return s.Name + ": " + strings.Join(parts, ", ")
}

// Turn gives a curve under the scenario; a curve that it does not name stays as it is. Prices of thin layers within the range are changed by the
// fraction, not below the probability itself nor above 1; the turned curve is the least concave one that asks at least as much, so that where
// a range ends abruptly prices beside it move too. Replicates are dropped: the scenario is taken as given.
func (s Scenario) Turn(c Curve) (Curve, error) {
	if len(s.Curves) > 0 && !slices.Contains(s.Curves, c.Name) {
		return c, nil
	}
	c.MinimumRateOnLine = max(c.MinimumRateOnLine, s.MinimumRateOnLine)
	if s.CapacityTo > 0 {
		c.Capacity = max(c.Capacity, 1/s.CapacityTo)
	}
	if s.RateChange == 0 {
		return c, nil
	}
	low, high := s.From, s.To
	if high == 0 {
		high = 1
	}
	turned := func(p float64) float64 {
		g := c.Distortion.At(p)
		if p >= low && p <= high {
			g = min(max(g*(1+s.RateChange), p), 1)
		}
		return g
	}
	c.Distortion = leastConcave(turned, []float64{low, high})
	c.Replicates = nil
	return c, c.Validate()
}

// scenarioKnots is the count of kinks of a turned curve, geometric from lowestScenarioKnot to 1: neighbours lie 5 % apart, so chords miss a price by at
// most 1.2 %, and far less where the curve is smooth.
const (
	scenarioKnots      = 240
	lowestScenarioKnot = 1e-5
)

// leastConcave gives the least concave distortion that lies above a function on a fine grid: the upper hull of its points (Andrew 1979).
func leastConcave(g func(float64) float64, kinks []float64) Mixture {
	grid := []float64{1}
	for i := range scenarioKnots {
		grid = append(grid, math.Pow(lowestScenarioKnot, float64(i)/(scenarioKnots-1)))
	}
	for _, k := range kinks {
		if k > 0 && k < 1 {
			grid = append(grid, k, k*(1-1e-6), min(k*(1+1e-6), 1))
		}
	}
	slices.Sort(grid)
	grid = slices.Compact(grid)
	type point struct{ s, g float64 }
	// A jump at 0 shows as a value that does not fall with the probability.
	start := point{0, max(2*g(lowestScenarioKnot/2)-g(lowestScenarioKnot), 0)}
	hull := []point{start}
	for _, s := range grid {
		p := point{s, g(s)}
		if s == 1 {
			p.g = 1
		}
		for len(hull) > 1 {
			a, b := hull[len(hull)-2], hull[len(hull)-1]
			if (b.g-a.g)*(p.s-a.s) > (p.g-a.g)*(b.s-a.s) {
				break
			}
			hull = hull[:len(hull)-1]
		}
		hull = append(hull, p)
	}
	m := Mixture{Supremum: hull[0].g}
	slope := func(i int) float64 { // of the chord that ends at point i
		if i >= len(hull) {
			return 0
		}
		return (hull[i].g - hull[i-1].g) / (hull[i].s - hull[i-1].s)
	}
	for i := 1; i < len(hull); i++ {
		if w := hull[i].s * (slope(i) - slope(i+1)); w > 0 {
			m.Knots = append(m.Knots, Knot{Tail: hull[i].s, Weight: w})
		}
	}
	return m
}
