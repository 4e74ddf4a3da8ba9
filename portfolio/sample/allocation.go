package sample

import (
	"cmp"
	"math"
	"slices"
)

// tie is the relative difference below which two values count as one atom when weights are shared: nets of layers tie by
// construction, but not to the last bit.
const tie = 1e-9

// ascendingOrder gives the indices of values by rising value, equal values by index.
func ascendingOrder(values []float64) []int32 {
	order := make([]int32, len(values))
	for i := range order {
		order[i] = int32(i)
	}
	slices.SortFunc(order, func(a, b int32) int {
		if c := cmp.Compare(values[a], values[b]); c != 0 {
			return c
		}
		return cmp.Compare(a, b)
	})
	return order
}

// AllocationWeights gives to each value the weight ξ with which it enters the integral under the distortion g: mean 1, and the mean of
// ξ·values is Distorted. Values that tie share their weight evenly, so the order of storage never matters. The mean of ξ·X_i allocates
// the integral of a sum X to its parts X_i, adding up exactly (Tasche 1999; Denault 2001).
func AllocationWeights(values []float64, g func(float64) float64) []float64 {
	n := len(values)
	order := ascendingOrder(values)
	weights := make([]float64, n)
	scale := 0.0
	for _, v := range values {
		scale = max(scale, math.Abs(v))
	}
	above := 0.0 // g at the share of values above the atom
	for end := n; end > 0; {
		start := end - 1
		for start > 0 && values[order[end-1]]-values[order[start-1]] <= tie*scale {
			start--
		}
		at := g(float64(n-start) / float64(n))
		share := (at - above) * float64(n) / float64(end-start)
		for _, i := range order[start:end] {
			weights[i] = share
		}
		above, end = at, start
	}
	return weights
}
