package capital

import "slices"

// The kinds of scenario that the text knows: Art. 120(1) and Art. 128 (the latter's six kinds read in a published validation rule).
var (
	naturalKinds = []string{"windstorm", "earthquake", "flood", "hail", "subsidence"}
	manMadeKinds = []string{"fire", "motor", "marine", "aviation", "liability", "credit"}
)

// The places of the modules in Factors.Modules.
const (
	marketModule = iota
	defaultModule
	lifeModule
	healthModule
	nonLifeModule
)

var moduleNames = []string{"market", "default", "life", "health", "non-life"}

// atOnce is the pattern of a man-made scenario: one event of the whole specified loss.
var atOnce = [][]float64{{1}}

// Alternatives gives the events of each alternative of a kind of scenario, as fractions of its specified loss; a man-made scenario has one alternative
// of one event. Nil for a kind that the factors do not have. The lists are not to be changed.
func (f *Factors) Alternatives(kind string) [][]float64 {
	k := f.kind(kind)
	switch {
	case k < 0:
		return nil
	case k < len(f.Patterns):
		return f.Patterns[k].Alternatives
	}
	return atOnce
}

// kind gives the place of a kind of scenario in FormulaFigures.Kinds; −1 for an unknown one.
func (f *Factors) kind(name string) int {
	for i := range f.Patterns {
		if f.Patterns[i].Kind == name {
			return i
		}
	}
	if i := slices.Index(f.ManMade, name); i >= 0 {
		return len(f.Patterns) + i
	}
	return -1
}

// Kinds lists the kinds of scenario, natural ones first, in the order of FormulaFigures.Kinds.
func (f *Factors) Kinds() []string {
	var kinds []string
	for _, p := range f.Patterns {
		kinds = append(kinds, p.Kind)
	}
	return append(kinds, f.ManMade...)
}

// UnratedProbability gives the yearly probability of default of an insurer without a rating that covers its capital requirement by ratio, a fraction
// of 1: linear between the rows of the table, that of the first or the last row beyond its ends (Art. 199(3), read). NaN gives the last row's, the
// dearest. One that misses its minimum capital requirement has the last row's whatever its ratio; whoever calls has to know.
func (f *Factors) UnratedProbability(ratio float64) float64 {
	table := f.Solvency
	if ratio >= table[0].Ratio {
		return table[0].Probability
	}
	for i := 1; i < len(table); i++ {
		if low, high := table[i], table[i-1]; ratio >= low.Ratio {
			t := (ratio - low.Ratio) / (high.Ratio - low.Ratio)
			return low.Probability + t*(high.Probability-low.Probability)
		}
	}
	return table[len(table)-1].Probability
}
