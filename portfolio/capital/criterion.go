package capital

import (
	"fmt"

	"cedewright/portfolio/fault"
	"cedewright/portfolio/sample"
)

// Measure is the risk measure of a criterion.
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

// Criterion is one risk measure of the net result U of a year, and how much of it must be held.
type Criterion struct {
	Measure Measure
	Level   sample.Level // of the measure, above 0
	Basis   Basis
	Ratio   float64 // capital to hold as a multiple of the measure, > 0; 1 = as measured
	Weight  float64 // in a weighted combination, > 0; elsewhere it has no meaning
}

// String gives the criterion in words, such as "120 % of tail-value-at-risk 99%".
func (c Criterion) String() string {
	text := c.Measure.String() + " " + c.Level.String()
	if c.Ratio != 1 {
		text = fmt.Sprintf("%.4g %% of %s", 100*c.Ratio, text)
	}
	return text
}

func (c Criterion) check(faults *fault.List, key string) {
	if c.Measure != ValueAtRisk && c.Measure != TailValueAtRisk {
		faults.Add(fault.Fault{Key: key + ".measure", Found: c.Measure.String(), Allowed: fmt.Sprintf("%q", MeasureNames())})
	}
	if c.Basis != Result && c.Basis != Deviation {
		faults.Add(fault.Fault{Key: key + ".basis", Found: c.Basis.String(), Allowed: fmt.Sprintf("%q", BasisNames())})
	}
	if c.Level.Float() <= 0 {
		faults.Add(fault.Fault{Key: key + ".level", Found: c.Level.String(), Allowed: "above 0 and below 1, such as 99.5%"})
	}
	if !(c.Ratio > 0) || c.Ratio > 100 {
		faults.Add(fault.Fault{Key: key + ".ratio", Found: fmt.Sprint(c.Ratio), Allowed: "a multiple above 0, such as 120%, at most 100"})
	}
}

// From gives the capital to hold, in money, from the tail figures of −U at the criterion's level and the mean of −U. On basis result it is never below
// 0. The deviation of a value at risk may be negative at low levels.
func (c Criterion) From(tail sample.TailFigures, mean float64) float64 {
	risk := tail.VaR
	if c.Measure == TailValueAtRisk {
		risk = tail.TVaR
	}
	if c.Basis == Deviation {
		return c.Ratio * (risk - mean)
	}
	return c.Ratio * max(risk, 0)
}

// Amount gives the capital to hold, in money, from −U of each year, which it reorders, and its mean. It allocates nothing.
func (c Criterion) Amount(losses []float64, mean float64) float64 {
	var f sample.TailFigures
	if c.Measure == TailValueAtRisk {
		f.VaR, f.TVaR = sample.Tail(losses, c.Level)
	} else {
		f.VaR = sample.Select(losses, c.Level.Rank(len(losses)))
	}
	return c.From(f, mean)
}

// Influence gives the influence of each year on the capital to hold, in order of years; zero where it is held at 0. Its standard
// deviation over √N is the standard error of Amount. Losses are left untouched; dst is reused when it is long enough.
func (c Criterion) Influence(losses, dst []float64) []float64 {
	if c.Measure == TailValueAtRisk {
		dst = sample.TVaRInfluence(losses, c.Level, dst)
	} else {
		dst = sample.VaRInfluence(losses, c.Level, dst)
	}
	switch {
	case c.Basis == Deviation:
		mean := sample.Sum(losses) / float64(len(losses))
		for i, x := range losses {
			dst[i] -= x - mean
		}
	case c.Amount(append([]float64(nil), losses...), 0) == 0:
		clear(dst)
	}
	if c.Ratio != 1 {
		for i := range dst {
			dst[i] *= c.Ratio
		}
	}
	return dst
}
