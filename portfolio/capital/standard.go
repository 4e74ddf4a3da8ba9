package capital

import (
	"fmt"

	"cedewright/portfolio/fault"
	"cedewright/portfolio/sample"
)

// Measure is the risk measure of a standard.
type Measure uint8

// The measures.
const (
	ValueAtRisk Measure = iota + 1
	TailValueAtRisk
)

var measureNames = [...]string{ValueAtRisk: "value-at-risk", TailValueAtRisk: "tail-value-at-risk"}

// MeasureNames lists the names that ParseMeasure accepts.
func MeasureNames() []string { return measureNames[1:] }

// String gives the name used in studies.
func (m Measure) String() string {
	if m >= ValueAtRisk && m <= TailValueAtRisk {
		return measureNames[m]
	}
	return fmt.Sprintf("Measure(%d)", uint8(m))
}

// ParseMeasure gives the measure of that name.
func ParseMeasure(name string) (Measure, error) {
	for m := ValueAtRisk; m <= TailValueAtRisk; m++ {
		if measureNames[m] == name {
			return m, nil
		}
	}
	return 0, fmt.Errorf("capital: measure %q is unknown", name)
}

// Basis says from where a loss is counted.
type Basis uint8

// The bases.
const (
	Result    Basis = iota + 1 // K = max(0, ρ(−U)): assets needed less premiums held
	Deviation                  // K = ρ(−U) − E[−U]: the loss beyond the expected result
)

var basisNames = [...]string{Result: "result", Deviation: "deviation"}

// BasisNames lists the names that ParseBasis accepts.
func BasisNames() []string { return basisNames[1:] }

// String gives the name used in studies.
func (b Basis) String() string {
	if b >= Result && b <= Deviation {
		return basisNames[b]
	}
	return fmt.Sprintf("Basis(%d)", uint8(b))
}

// ParseBasis gives the basis of that name.
func ParseBasis(name string) (Basis, error) {
	for b := Result; b <= Deviation; b++ {
		if basisNames[b] == name {
			return b, nil
		}
	}
	return 0, fmt.Errorf("capital: basis %q is unknown", name)
}

// Standard is a rule that turns the net result U of a year into required capital.
type Standard struct {
	Name    string // name in the study
	Measure Measure
	Level   sample.Level // of the measure, above 0
	Basis   Basis
	Source  string // legal source and how it is known, or "set in the study"
}

// Validate reports every fault of the standard.
func (s Standard) Validate() error {
	var faults fault.List
	key := "standard " + s.Name
	if s.Measure != ValueAtRisk && s.Measure != TailValueAtRisk {
		faults.Add(fault.Fault{Key: key + ".measure", Found: s.Measure.String(), Allowed: fmt.Sprint(MeasureNames())})
	}
	if s.Basis != Result && s.Basis != Deviation {
		faults.Add(fault.Fault{Key: key + ".basis", Found: s.Basis.String(), Allowed: fmt.Sprint(BasisNames())})
	}
	if s.Level.Float() <= 0 {
		faults.Add(fault.Fault{Key: key + ".level", Found: s.Level.String(), Allowed: "above 0 and below 1, such as 99.5%"})
	}
	return faults.Err()
}

// Amount gives required capital, in money, from −U of each year, which it reorders, and its mean. It allocates nothing. On basis result
// it is never below 0. The deviation of a value at risk may be negative at low levels.
func (s Standard) Amount(losses []float64, mean float64) float64 {
	var risk float64
	if s.Measure == TailValueAtRisk {
		_, risk = sample.Tail(losses, s.Level)
	} else {
		risk = sample.Select(losses, s.Level.Rank(len(losses)))
	}
	if s.Basis == Deviation {
		return risk - mean
	}
	return max(risk, 0)
}

// Influence gives the influence of each year on required capital, in order of years; zero where the capital is held at 0. Its standard
// deviation over √N is the standard error of Amount. Losses are left untouched; dst is reused when it is long enough.
func (s Standard) Influence(losses, dst []float64) []float64 {
	if s.Measure == TailValueAtRisk {
		dst = sample.TVaRInfluence(losses, s.Level, dst)
	} else {
		dst = sample.VaRInfluence(losses, s.Level, dst)
	}
	if s.Basis == Deviation {
		mean := sample.Sum(losses) / float64(len(losses))
		for i, x := range losses {
			dst[i] -= x - mean
		}
		return dst
	}
	scratch := append([]float64(nil), losses...)
	if s.Amount(scratch, 0) == 0 {
		clear(dst)
	}
	return dst
}
