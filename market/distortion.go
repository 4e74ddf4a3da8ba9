package market

import (
	"fmt"
	"math"

	"cedewright/portfolio/fault"

	"gonum.org/v1/gonum/stat/distuv"
)

// Distortion is a market's pricing measure: At gives g(s) for a probability s from 0 to 1, increasing and concave with g(0) = 0 and
// g(1) = 1 (see Check). A layer so thin that it has no partial loss, hit with probability s, costs g(s) per unit of limit.
type Distortion interface {
	At(s float64) float64
	String() string // family and parameter
}

// Names of the families with one parameter, and of the free curve.
const (
	FamilyProportionalHazard = "proportional-hazard"
	FamilyWang               = "wang"
	FamilyDualPower          = "dual-power"
	FamilyTailValueAtRisk    = "tail-value-at-risk"
	FamilyCostOfCapital      = "constant-cost-of-capital"
	FamilyFree               = "free"
)

// FamilyNames lists the families with one parameter.
func FamilyNames() []string {
	return []string{FamilyProportionalHazard, FamilyWang, FamilyDualPower, FamilyTailValueAtRisk, FamilyCostOfCapital}
}

// ParameterRange gives the values that a family's parameter may take, and those for which the price is the mean (Low).
type ParameterRange struct{ Low, High float64 }

var parameterRanges = map[string]ParameterRange{
	FamilyProportionalHazard: {1, 100},
	FamilyWang:               {0, 10},
	FamilyDualPower:          {1, 10000},
	FamilyTailValueAtRisk:    {0, 0.999999},
	FamilyCostOfCapital:      {0, 100},
}

// NewFamily gives the member of a family with that parameter. It refuses an unknown family and a parameter outside its range.
func NewFamily(name string, parameter float64) (Distortion, error) {
	allowed, ok := parameterRanges[name]
	if !ok {
		return nil, &fault.Fault{Key: "family", Found: fmt.Sprintf("%q is no family of distortions", name), Allowed: fmt.Sprint(FamilyNames()), Nearest: fault.Nearest(name, FamilyNames())}
	}
	if !(parameter >= allowed.Low && parameter <= allowed.High) {
		return nil, &fault.Fault{Key: "parameter", Found: fmt.Sprint(parameter), Allowed: fmt.Sprintf("from %v to %v for the family %s", allowed.Low, allowed.High, name)}
	}
	switch name {
	case FamilyProportionalHazard:
		return ProportionalHazard{parameter}, nil
	case FamilyWang:
		return Wang{parameter}, nil
	case FamilyDualPower:
		return DualPower{parameter}, nil
	case FamilyTailValueAtRisk:
		return TailValueAtRisk{parameter}, nil
	default:
		return ConstantCostOfCapital{parameter}, nil
	}
}

// ProportionalHazard is g(s) = s^(1/Rho), Rho ≥ 1 (Wang 1995).
type ProportionalHazard struct{ Rho float64 }

// At gives g(s).
func (d ProportionalHazard) At(s float64) float64 { return math.Pow(clamp(s), 1/d.Rho) }

// String names family and parameter.
func (d ProportionalHazard) String() string {
	return fmt.Sprintf("proportional hazard, ρ %.4g", d.Rho)
}

// Wang is g(s) = Φ(Φ⁻¹(s) + Lambda), Lambda ≥ 0 (Wang 2000).
type Wang struct{ Lambda float64 }

// At gives g(s).
func (d Wang) At(s float64) float64 {
	if s <= 0 {
		return 0
	}
	if s >= 1 {
		return 1
	}
	return normalSurvival(-(distuv.UnitNormal.Quantile(s) + d.Lambda))
}

// String names family and parameter.
func (d Wang) String() string { return fmt.Sprintf("Wang, λ %.4g", d.Lambda) }

// normalSurvival is 1 − Φ(z), accurate in the tail (1 − erf is not).
func normalSurvival(z float64) float64 { return 0.5 * math.Erfc(z/math.Sqrt2) }

// DualPower is g(s) = 1 − (1−s)^N, N ≥ 1: the expected largest of N copies (Wang 1996).
type DualPower struct{ N float64 }

// At gives g(s).
func (d DualPower) At(s float64) float64 { return -math.Expm1(d.N * math.Log1p(-clamp(s))) }

// String names family and parameter.
func (d DualPower) String() string { return fmt.Sprintf("dual power, n %.4g", d.N) }

// TailValueAtRisk is g(s) = min(s/(1−P), 1), 0 ≤ P < 1 (Acerbi and Tasche 2002).
type TailValueAtRisk struct{ P float64 }

// At gives g(s).
func (d TailValueAtRisk) At(s float64) float64 { return min(clamp(s)/(1-d.P), 1) }

// String names family and parameter.
func (d TailValueAtRisk) String() string { return fmt.Sprintf("tail value at risk, p %.4g", d.P) }

// ConstantCostOfCapital is g(s) = (s + Iota)/(1 + Iota) for s > 0: expected loss plus the return Iota ≥ 0 on the rest of the limit, which
// is held as capital. It jumps at 0 to Iota/(1+Iota), a minimum rate on line.
type ConstantCostOfCapital struct{ Iota float64 }

// At gives g(s).
func (d ConstantCostOfCapital) At(s float64) float64 {
	if s <= 0 {
		return 0
	}
	return (clamp(s) + d.Iota) / (1 + d.Iota)
}

// String names family and parameter.
func (d ConstantCostOfCapital) String() string {
	return fmt.Sprintf("constant cost of capital, ι %.4g", d.Iota)
}

// Mixture is the free concave curve: a mixture of tail values at risk and of the supremum, g(s) = Supremum·1{s>0} +
// Σ Weight·min(s/(1−P), 1). Every increasing concave g with g(0) = 0 and g(1) = 1 is one (Kusuoka 2001). Weights are at least 0 and
// add up to 1 with Supremum.
type Mixture struct {
	Supremum float64
	Knots    []Knot // by falling P
}

// Knot is one part of a mixture: the curve has its kink at s = 1 − P, which is stored as Tail to stay exact near 0.
type Knot struct{ Tail, Weight float64 }

// At gives g(s).
func (d Mixture) At(s float64) float64 {
	if s <= 0 {
		return 0
	}
	if s >= 1 {
		return 1
	}
	sum := d.Supremum
	for _, k := range d.Knots {
		sum += float64(k.Weight * min(s/k.Tail, 1))
	}
	return sum
}

// String counts the parts.
func (d Mixture) String() string { return fmt.Sprintf("free concave curve, %d kinks", len(d.Knots)) }

func clamp(s float64) float64 { return min(max(s, 0), 1) }

// concavityTolerance is the rounding that Check forgives, in units of g: sums of a hundred weights round to about 1e-14.
const concavityTolerance = 1e-12

// Check says whether a distortion is increasing and concave with g(0) = 0 and g(1) = 1, and hence not below the diagonal. It looks at
// a grid of 4,001 probabilities, geometric towards 0 and towards 1; the error names the probability at which the condition fails.
func Check(d Distortion) error {
	fail := func(s float64, what string) error {
		return &fault.Fault{Key: "distortion", Found: fmt.Sprintf("%s: %s at probability %.6g", d, what, s), Allowed: "increasing and concave from g(0) = 0 to g(1) = 1"}
	}
	if at := d.At(0); at != 0 {
		return fail(0, fmt.Sprintf("g is %v", at))
	}
	if at := d.At(1); math.Abs(at-1) > concavityTolerance {
		return fail(1, fmt.Sprintf("g is %v", at))
	}
	grid := checkGrid()
	values := make([]float64, len(grid))
	for i, s := range grid {
		values[i] = d.At(s)
		if math.IsNaN(values[i]) {
			return fail(s, "g is not a number")
		}
		if i > 0 && values[i] < values[i-1]-concavityTolerance {
			return fail(s, "g falls")
		}
		if i > 1 {
			between := values[i-2] + (values[i]-values[i-2])*(grid[i-1]-grid[i-2])/(grid[i]-grid[i-2])
			if values[i-1] < between-concavityTolerance {
				return fail(grid[i-1], "g is not concave")
			}
		}
		if values[i] < s-concavityTolerance {
			return fail(s, "g lies below the probability itself")
		}
	}
	return nil
}

// checkGrid runs from 1e-9 to 1 − 1e-6, geometric at both ends and linear between, without 0, where g may jump.
func checkGrid() []float64 {
	var grid []float64
	for i := range 1501 {
		grid = append(grid, 1e-9*math.Pow(1e8, float64(i)/1500))
	}
	for i := 1; i <= 2000; i++ {
		grid = append(grid, 0.1+0.8*float64(i)/2000)
	}
	for i := 1; i <= 500; i++ {
		grid = append(grid, 1-0.1*math.Pow(1e-5, float64(i)/500))
	}
	return grid
}

// Loaded is another distortion with its prices raised: min((1 + Loading)·g(s), 1), Loading ≥ 0, concave like the other.
type Loaded struct {
	Of      Distortion
	Loading float64
}

// At gives g(s).
func (d Loaded) At(s float64) float64 { return min((1+d.Loading)*d.Of.At(s), 1) }

// String names the other and the loading.
func (d Loaded) String() string { return fmt.Sprintf("%v, loaded by %.4g %%", d.Of, 100*d.Loading) }
