package market

import "gonum.org/v1/gonum/integrate/quad"

// panels cut the unit interval finely towards both ends, where a distorted survival function can be steep.
var panels = []float64{0, 1e-10, 1e-8, 1e-6, 1e-5, 1e-4, 1e-3, 0.01, 0.05, 0.2, 0.5, 0.8, 0.95, 0.99, 0.999, 1}

// node is a point and its weight in an integral over the unit interval.
type node struct{ x, weight float64 }

// unitNodes are Gauss–Legendre rules of 7 points on each panel.
var unitNodes = func() []node {
	var list []node
	x, weight := make([]float64, 7), make([]float64, 7)
	for i := 1; i < len(panels); i++ {
		quad.Legendre{}.FixedLocations(x, weight, panels[i-1], panels[i])
		for k := range x {
			list = append(list, node{x[k], weight[k]})
		}
	}
	return list
}()

// integrateUnit integrates a smooth function over 0 to 1; about eight digits for the powers and normal tails that occur here.
func integrateUnit(f func(float64) float64) float64 {
	sum := 0.0
	for _, n := range unitNodes {
		sum += float64(n.weight * f(n.x))
	}
	return sum
}
