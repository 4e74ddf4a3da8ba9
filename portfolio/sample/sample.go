package sample

import (
	"errors"
	"fmt"
	"math"
	"slices"
	"sort"
)

// Sample is a finite sample of equally likely values, such as the annual losses of simulated years. It is sorted once, when made, and
// never changes.
type Sample struct {
	ascending []float64
	mean      float64
}

// New copies and sorts values. It refuses an empty sample, NaN and infinite values.
func New(values []float64) (Sample, error) {
	if len(values) == 0 {
		return Sample{}, errors.New("sample: new: no value")
	}
	for i, v := range values {
		if math.IsNaN(v) || math.IsInf(v, 0) {
			return Sample{}, fmt.Errorf("sample: new: value %d is %v", i+1, v)
		}
	}
	s := Sample{ascending: slices.Clone(values)}
	slices.Sort(s.ascending)
	s.mean = Sum(s.ascending) / float64(len(values))
	return s, nil
}

// Len counts the values.
func (s Sample) Len() int { return len(s.ascending) }

// OrderStatistic gives the k-th smallest value, k from 1 to Len.
func (s Sample) OrderStatistic(k int) float64 { return s.ascending[k-1] }

// Mean gives the arithmetic mean.
func (s Sample) Mean() float64 { return s.mean }

// StandardDeviation has divisor N − 1; it is 0 for a single value.
func (s Sample) StandardDeviation() float64 {
	if len(s.ascending) < 2 {
		return 0
	}
	squares := 0.0
	for _, v := range s.ascending {
		squares += float64((v - s.mean) * (v - s.mean))
	}
	return math.Sqrt(squares / float64(len(s.ascending)-1))
}

// VaR gives value at risk: the order statistic of rank ⌈p·N⌉, no interpolation.
func (s Sample) VaR(l Level) float64 { return s.ascending[l.Rank(len(s.ascending))-1] }

// TVaR gives tail value at risk, the mean of the worst 1 − p of the distribution, which takes the needed fraction of the atom at the
// quantile (Acerbi and Tasche 2002; Rockafellar and Uryasev 2002).
func (s Sample) TVaR(l Level) float64 {
	n := len(s.ascending)
	k := l.Rank(n)
	sum := Sum(s.ascending[k:]) + float64(l.Excess(n)*s.ascending[k-1])
	return sum / (l.Tail() * float64(n))
}

// Survival gives the share of values above x.
func (s Sample) Survival(x float64) float64 {
	above := len(s.ascending) - sort.Search(len(s.ascending), func(i int) bool { return s.ascending[i] > x })
	return float64(above) / float64(len(s.ascending))
}

// AtLeast gives the share of values of at least x.
func (s Sample) AtLeast(x float64) float64 {
	reaching := len(s.ascending) - sort.SearchFloat64s(s.ascending, x)
	return float64(reaching) / float64(len(s.ascending))
}

// Distorted gives the integral of the sample under a distortion g, ρ_g = Σ x_(k)·(g(k/N) − g((k−1)/N)) with x_(1) the largest value
// (Wang 1996; Denneberg 1994). g(0) = 0 and g(1) = 1. Negative values are allowed; equal values share their weight.
func (s Sample) Distorted(g func(float64) float64) float64 {
	n := len(s.ascending)
	terms := make([]float64, n)
	before := 0.0
	for k := 1; k <= n; k++ {
		at := g(float64(k) / float64(n))
		terms[k-1] = float64(s.ascending[n-k] * (at - before))
		before = at
	}
	return Sum(terms)
}

// Sum adds in a fixed order with Neumaier's compensation (1974): the result does not depend on how large the parts are, only on
// their order, and not much on that.
func Sum(values []float64) float64 {
	sum, lost := 0.0, 0.0
	for _, v := range values {
		t := sum + v
		if math.Abs(sum) >= math.Abs(v) {
			lost += (sum - t) + v
		} else {
			lost += (v - t) + sum
		}
		sum = t
	}
	if math.IsInf(sum, 0) {
		return sum
	}
	return sum + lost
}
