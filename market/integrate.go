package market

import "gonum.org/v1/gonum/integrate/quad"

// panels cut the unit interval finely towards both ends, where a distorted survival function can be steep.
var panels = []float64{0, 1e-10, 1e-8, 1e-6, 1e-5, 1e-4, 1e-3, 0.01, 0.05, 0.2, 0.5, 0.8, 0.95, 0.99, 0.999, 1}

// integrateUnit integrates a smooth function over 0 to 1 by Gauss–Legendre rules of 24 points on panels; about ten digits for the powers
// and normal tails that occur here.
func integrateUnit(f func(float64) float64) float64 {
	sum := 0.0
	for i := 1; i < len(panels); i++ {
		sum += quad.Fixed(f, panels[i-1], panels[i], 24, quad.Legendre{}, 0)
	}
	return sum
}
