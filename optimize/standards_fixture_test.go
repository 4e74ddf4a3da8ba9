package optimize

import (
	"cedewright/portfolio/capital"
	"cedewright/portfolio/security"
)

func smallRegister() *security.Register {
	return &security.Register{Correlation: 0.4, Seed: 1, Reinsurers: []security.Reinsurer{{Name: "north", Default: 0.001, LossGiven: 0.5}, {Name: "south", Default: 0.003, LossGiven: 0.9}}}
}

// stormFormula is a formula for the classes of stormCase, with scenarios of three perils.
func stormFormula() *capital.Formula {
	f := &capital.Formula{
		Factors: smallFactors(), Default: []float64{0.001, 0.003}, Tied: []bool{false, false}, Market: 40, Operational: 5, NonProportional: capital.Always,
		Scenarios: []capital.Scenario{
			{Name: "storm", Kind: "windstorm", Peril: "windstorm", Losses: []float64{180, 90, 20}}, {Name: "quake", Kind: "earthquake", Peril: "earthquake", Losses: []float64{60, 30, 0}},
			{Name: "blaze", Kind: "fire", Peril: "fire", OneRisk: true, Losses: []float64{0, 80, 0}}, {Name: "claims", Kind: "liability", Peril: "liability", Losses: []float64{0, 20, 10}},
		},
	}
	for i := range 3 {
		f.Classes = append(f.Classes, capital.FormulaClass{Segment: i % 2, Reserves: 40, Diversification: 1})
	}
	return f
}
