package optimize

import (
	"fmt"
	"math"
	"slices"

	"cedewright/portfolio/fault"
	"cedewright/portfolio/treaty"
)

// Keep is a constraint: a measure of the appraisal must lie within bounds.
type Keep struct {
	Measure  string          // one of MeasureNames
	Standard string          // for measures of capital: name of the standard; "" = the one that drives
	AtMost   treaty.Optional // in the measure's unit
	AtLeast  treaty.Optional
}

// measures are the figures that can be constrained, each read off an appraisal, given the place of the standard.
var measures = []struct {
	name string
	read func(a Appraisal, standard int) float64
}{
	{"ceded premium", func(a Appraisal, _ int) float64 { return a.CededPremium.Value }},
	{"ceded margin", func(a Appraisal, _ int) float64 { return a.CededMargin.Value }},
	{"expected recoveries", func(a Appraisal, _ int) float64 { return a.ExpectedRecoveries.Value }},
	{"reinstatement premium", func(a Appraisal, _ int) float64 { return a.ReinstatementPremium.Value }},
	{"commission", func(a Appraisal, _ int) float64 { return a.Commission.Value }},
	{"required capital", func(a Appraisal, s int) float64 { return a.Capital[s].Net.Value }},
	{"capital relief", func(a Appraisal, s int) float64 { return a.Capital[s].Relief.Value }},
	{"own funds ratio", func(a Appraisal, s int) float64 {
		if s < len(a.OwnFundsRatio) {
			return a.OwnFundsRatio[s].Value
		}
		return math.NaN()
	}},
	{"capital cost", func(a Appraisal, _ int) float64 { return a.CapitalCost.Value }},
	{"total cost", func(a Appraisal, _ int) float64 { return a.TotalCost.Value }},
	{"mean result", func(a Appraisal, _ int) float64 { return a.NetResult.Mean.Value }},
	{"result standard deviation", func(a Appraisal, _ int) float64 { return a.NetResult.StandardDeviation }},
	{"one in 10 result", func(a Appraisal, _ int) float64 { return a.NetResult.OneIn10.Value }},
	{"one in 200 result", func(a Appraisal, _ int) float64 { return a.NetResult.OneIn200.Value }},
}

// MeasureNames lists the measures that Keep knows.
func MeasureNames() []string {
	names := make([]string, len(measures))
	for i, m := range measures {
		names[i] = m.name
	}
	return names
}

func (k Keep) check(faults *fault.List, key string) {
	if !slices.Contains(MeasureNames(), k.Measure) {
		faults.Add(fault.Fault{Key: key + ".measure", Found: fmt.Sprintf("%q is not a measure of an appraisal", k.Measure), Allowed: fmt.Sprintf("%q", MeasureNames()), Nearest: fault.Nearest(k.Measure, MeasureNames())})
	}
	if !k.AtMost.Given && !k.AtLeast.Given {
		faults.Add(fault.Fault{Key: key, Found: "no bound", Allowed: "at_most, at_least or both"})
	}
	if k.AtMost.Given && k.AtLeast.Given && k.AtMost.Value < k.AtLeast.Value {
		faults.Add(fault.Fault{Key: key, Found: fmt.Sprintf("at most %v and at least %v", k.AtMost.Value, k.AtLeast.Value), Allowed: "bounds that leave room"})
	}
}

// value reads the measure; NaN when the appraisal does not have it (an own funds ratio without own funds).
func (k Keep) value(a Appraisal) float64 {
	standard := 0
	wanted := k.Standard
	if wanted == "" {
		wanted = a.Driving.Standard
	}
	for i, c := range a.Capital {
		if c.Standard == wanted {
			standard = i
		}
	}
	for _, m := range measures {
		if m.name == k.Measure {
			return m.read(a, standard)
		}
	}
	return math.NaN()
}

// violation is how far the measure lies outside its bounds, as a fraction of the bound; 0 inside.
func (k Keep) violation(a Appraisal) float64 {
	value := k.value(a)
	if math.IsNaN(value) {
		return 1
	}
	worst := 0.0
	if k.AtMost.Given && value > k.AtMost.Value {
		worst = (value - k.AtMost.Value) / max(math.Abs(k.AtMost.Value), 1e-9)
	}
	if k.AtLeast.Given && value < k.AtLeast.Value {
		worst = (k.AtLeast.Value - value) / max(math.Abs(k.AtLeast.Value), 1e-9)
	}
	return min(worst, math.MaxFloat32)
}

// Shortfall is a constraint that a programme breaks, and by how much.
type Shortfall struct {
	Keep  Keep
	Value float64 // of the measure, in its unit
}

// shortfalls lists the constraints that an appraisal breaks.
func (s Space) shortfalls(a Appraisal) []Shortfall {
	var list []Shortfall
	for _, k := range s.Keep {
		if k.violation(a) > 0 {
			list = append(list, Shortfall{k, k.value(a)})
		}
	}
	return list
}

// violation adds up how far all constraints are broken; 0 = feasible. A treaty without a taker counts as one whole constraint.
func (s Space) violation(a Appraisal) float64 {
	sum := float64(len(a.NoTaker))
	for _, k := range s.Keep {
		sum += k.violation(a)
	}
	return sum
}
