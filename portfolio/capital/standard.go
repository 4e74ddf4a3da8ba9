package capital

import (
	"fmt"
	"math"

	"cedewright/portfolio/fault"
	"cedewright/portfolio/sample"
)

// Combination says how several criteria make one requirement.
type Combination uint8

// The combinations.
const (
	Worst    Combination = iota // the criterion that asks the most; also a single criterion
	Weighted                    // the sum of weight times criterion
)

var combinationNames = [...]string{Worst: "worst", Weighted: "weighted"}

// CombinationNames lists the names that ParseCombination accepts.
func CombinationNames() []string { return combinationNames[:] }

// ParseCombination gives the combination of that name.
func ParseCombination(name string) (Combination, error) {
	for i, known := range combinationNames {
		if known == name {
			return Combination(i), nil
		}
	}
	return 0, fmt.Errorf("capital: combination %q is unknown", name)
}

// Standard is a rule that turns the net position into required capital: criteria on the simulated result of a year, or a formula on volumes and
// scenarios, or a covariance of charges. Exactly one of the three is given.
type Standard struct {
	Name        string // name in the study
	Source      string // legal source and how it is known, or "set in the study"
	Criteria    []Criterion
	Combination Combination
	Formula     *Formula
	Covariance  *Covariance
}

// Single gives a standard of one criterion, held as measured.
func Single(name string, m Measure, l sample.Level, b Basis, source string) Standard {
	return Standard{Name: name, Source: source, Criteria: []Criterion{{Measure: m, Level: l, Basis: b, Ratio: 1}}}
}

// Simulated tells whether the standard looks at the simulated result of a year.
func (s Standard) Simulated() bool { return len(s.Criteria) > 0 }

// Validate reports every fault of the standard's criteria or covariance, and of its having more than one part or none. The classes and reinsurers that a
// formula is checked against it does not know: see Formula.Validate.
func (s Standard) Validate() error {
	var faults fault.List
	key := "standard " + s.Name
	parts := 0
	for _, given := range []bool{len(s.Criteria) > 0, s.Formula != nil, s.Covariance != nil} {
		if given {
			parts++
		}
	}
	if parts != 1 {
		faults.Add(fault.Fault{Key: key, Found: fmt.Sprintf("%d of criteria, formula and covariance", parts), Allowed: "exactly one"})
	}
	sum := 0.0
	for i, c := range s.Criteria {
		at := key
		if len(s.Criteria) > 1 {
			at = fmt.Sprintf("%s.criteria[%d]", key, i)
		}
		c.check(&faults, at)
		if s.Combination == Weighted && !(c.Weight > 0 && c.Weight <= 1) {
			faults.Add(fault.Fault{Key: at + ".weight", Found: fmt.Sprint(c.Weight), Allowed: "a fraction above 0, at most 1"})
		}
		sum += c.Weight
	}
	if s.Combination == Weighted && math.Abs(sum-1) > 1e-9 { // rounding of decimals
		faults.Add(fault.Fault{Key: key + ".criteria", Found: fmt.Sprintf("weights of %.6g %% together", 100*sum), Allowed: "weights that come to 100 %"})
	}
	return faults.Err()
}

// Combine gives required capital from the amounts of the criteria, and the criterion that sets it; −1 when several share in it by weight.
func (s Standard) Combine(amounts []float64) (amount float64, setBy int) {
	if s.Combination == Weighted {
		for i, x := range amounts {
			amount += float64(s.Criteria[i].Weight * x)
		}
		return amount, -1
	}
	for i, x := range amounts {
		if x > amounts[setBy] {
			setBy = i
		}
	}
	return amounts[setBy], setBy
}

// Shares gives the weight with which each criterion enters required capital, given the criterion that sets it (see Combine): its slope.
func (s Standard) Shares(setBy int) []float64 {
	shares := make([]float64, len(s.Criteria))
	for i, c := range s.Criteria {
		switch {
		case s.Combination == Weighted:
			shares[i] = c.Weight
		case i == setBy:
			shares[i] = 1
		}
	}
	return shares
}

// Amount gives required capital of a simulated standard, in money, from −U of each year, which it reorders, and its mean.
func (s Standard) Amount(losses []float64, mean float64) float64 {
	amounts := make([]float64, len(s.Criteria))
	for i, c := range s.Criteria {
		amounts[i] = c.Amount(losses, mean)
	}
	amount, _ := s.Combine(amounts)
	return amount
}
