package optimize

import (
	"cedewright/portfolio/capital"
	"cedewright/portfolio/sample"
)

// criteriaMix is a sum of weight times measure that a standard never falls below.
type criteriaMix []weightedCriterion

type weightedCriterion struct {
	weight    float64 // ratio included
	criterion capital.Criterion
}

// mixes gives the mixes of a standard: one of all its criteria by weight, or each of them alone where the worst counts.
func mixes(s capital.Standard) []criteriaMix {
	if s.Combination == capital.Weighted {
		var all criteriaMix
		for _, c := range s.Criteria {
			all = append(all, weightedCriterion{c.Weight * c.Ratio, c})
		}
		return []criteriaMix{all}
	}
	var list []criteriaMix
	for _, c := range s.Criteria {
		list = append(list, criteriaMix{{c.Ratio, c}})
	}
	return list
}

// tailOnly tells whether every measure is tail value at risk, whose distortion is concave.
func (m criteriaMix) tailOnly() bool {
	for _, w := range m {
		if w.criterion.Measure != capital.TailValueAtRisk {
			return false
		}
	}
	return true
}

// distortion gives the mix of the measures' distortions at the survival probability k/n.
func (m criteriaMix) distortion(n int) func(k int) float64 {
	return func(k int) float64 {
		sum := 0.0
		for _, w := range m {
			if w.criterion.Measure == capital.TailValueAtRisk {
				sum += w.weight * min(float64(k)/float64(n)/w.criterion.Level.Tail(), 1)
			} else if k > n-w.criterion.Level.Rank(n) { // the quantile is exceeded by at most n − rank years
				sum += w.weight
			}
		}
		return sum
	}
}

// bases gives the weights of the measures on basis result and on basis deviation.
func (m criteriaMix) bases() (result, deviation float64) {
	for _, w := range m {
		if w.criterion.Basis == capital.Result {
			result += w.weight
		} else {
			deviation += w.weight
		}
	}
	return result, deviation
}

// of gives the mix for losses of that certain part on top.
func (m criteriaMix) of(losses []float64, constant float64) float64 {
	moved := make([]float64, len(losses))
	for y, x := range losses {
		moved[y] = x + constant
	}
	mean := sample.Sum(moved) / float64(len(moved))
	sum := 0.0
	for _, w := range m {
		c := w.criterion
		c.Ratio = 1
		sum += w.weight * c.Amount(moved, mean)
	}
	return max(sum, 0)
}
