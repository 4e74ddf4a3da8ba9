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
	Standard string          // for measures of capital: name of the standard; "" = the first
	AtMost   treaty.Optional // in the measure's unit
	AtLeast  treaty.Optional
}

// measures are the figures that can be constrained, each read off an appraisal, given the place of the standard.
var measures = []struct {
	name       string
	byStandard bool // the figure is one per standard
	read       func(a Appraisal, standard int) float64
}{
	{"ceded premium", false, func(a Appraisal, _ int) float64 { return a.CededPremium.Value }},
	{"ceded margin", false, func(a Appraisal, _ int) float64 { return a.CededMargin.Value }},
	{"expected recoveries", false, func(a Appraisal, _ int) float64 { return a.ExpectedRecoveries.Value }},
	{"reinstatement premium", false, func(a Appraisal, _ int) float64 { return a.ReinstatementPremium.Value }},
	{"commission", false, func(a Appraisal, _ int) float64 { return a.Commission.Value }},
	{"required capital", true, func(a Appraisal, s int) float64 { return a.Capital[s].Net.Value }},
	{"capital relief", true, func(a Appraisal, s int) float64 { return a.Capital[s].Relief.Value }},
	{"own funds ratio", true, func(a Appraisal, s int) float64 {
		if s < len(a.OwnFundsRatio) {
			return a.OwnFundsRatio[s].Value
		}
		return math.NaN()
	}},
	{"capital cost", false, func(a Appraisal, _ int) float64 { return a.CapitalCost.Value }},
	{"total cost", false, func(a Appraisal, _ int) float64 { return a.TotalCost.Value }},
	{"mean result", false, func(a Appraisal, _ int) float64 { return a.NetResult.Mean.Value }},
	{"result standard deviation", false, func(a Appraisal, _ int) float64 { return a.NetResult.StandardDeviation }},
	{"one in 10 result", false, func(a Appraisal, _ int) float64 { return a.NetResult.OneIn10.Value }},
	{"one in 200 result", false, func(a Appraisal, _ int) float64 { return a.NetResult.OneIn200.Value }},
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
	if k.AtMost.Given && math.IsNaN(k.AtMost.Value) || k.AtLeast.Given && math.IsNaN(k.AtLeast.Value) {
		faults.Add(fault.Fault{Key: key, Found: "a bound that is not a number", Allowed: "numbers"})
	}
	if k.AtMost.Given && k.AtLeast.Given && k.AtMost.Value < k.AtLeast.Value {
		faults.Add(fault.Fault{Key: key, Found: fmt.Sprintf("at most %v and at least %v", k.AtMost.Value, k.AtLeast.Value), Allowed: "bounds that leave room"})
	}
}

// checkAgainst reports constraints that an appraisal cannot answer: on a standard that it does not have, or on the own funds ratio without
// own funds.
func (s Space) checkAgainst(a Appraisal) error {
	var faults fault.List
	names := make([]string, len(a.Capital))
	for i, c := range a.Capital {
		names[i] = c.Standard
	}
	for i, k := range s.Keep {
		key := fmt.Sprintf("keep[%d]", i)
		if k.Standard != "" && !slices.Contains(names, k.Standard) {
			faults.Add(fault.Fault{Key: key + ".standard", Found: fmt.Sprintf("no standard is named %q", k.Standard), Allowed: fmt.Sprintf("%q", names), Nearest: fault.Nearest(k.Standard, names)})
		} else if math.IsNaN(k.value(a)) {
			faults.Add(fault.Fault{Key: key + ".measure", Found: k.Measure + ", which an appraisal without own funds does not have", Allowed: "own funds, or another measure"})
		}
	}
	return faults.Err()
}

// value reads the measure; NaN when the appraisal does not have it (an own funds ratio without own funds).
func (k Keep) value(a Appraisal) float64 {
	standard := 0
	for i, c := range a.Capital {
		if c.Standard == k.Standard {
			standard = i
		}
	}
	for _, m := range measures {
		if m.name == k.Measure && (standard < len(a.Capital) || !m.byStandard) {
			return m.read(a, standard)
		}
	}
	return math.NaN()
}

// violation is how far the measure lies outside its bounds, as a fraction of the bound, or of the gross required capital where the bound
// is 0; 0 inside.
func (k Keep) violation(a Appraisal) float64 {
	value := k.value(a)
	if math.IsNaN(value) {
		return 1
	}
	beyond, bound := 0.0, 0.0
	switch {
	case k.AtMost.Given && value > k.AtMost.Value:
		beyond, bound = value-k.AtMost.Value, k.AtMost.Value
	case k.AtLeast.Given && value < k.AtLeast.Value:
		beyond, bound = k.AtLeast.Value-value, k.AtLeast.Value
	}
	scale := math.Abs(bound)
	if scale == 0 && len(a.Capital) > 0 {
		scale = a.Capital[0].Gross.Value
	}
	if scale == 0 {
		scale = 1
	}
	return min(beyond/scale, math.MaxFloat32) // finite, so that violations can be added up
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

// violation adds up how far all constraints are broken; 0 = feasible. A treaty without a taker counts as one whole constraint, and so does
// a layer that is placed twice over.
func (s Space) violation(a Appraisal) float64 {
	sum := float64(len(a.NoTaker)) + overplaced(a.Programme)
	for _, k := range s.Keep {
		sum += k.violation(a)
	}
	return sum
}
