package capital

// FormulaParts is the whole requirement shared out: each input gets its size times the requirement's slope by it (Euler's theorem; the requirement is
// homogeneous of degree one in money). A part may be below 0. Premium, Reserves, Scenario, Reinsurer and Other add up to the whole requirement. Money.
type FormulaParts struct {
	Premium       []float64   // by class: its premium volume
	Reserves      []float64   // by class: its reserves
	Scenario      []float64   // by scenario: its net loss
	ClassScenario [][]float64 // by class and scenario: what of Scenario falls on the class; nil when the losses by class were not given
	Reinsurer     []float64   // its recoverables less its collateral
	Other         []NamedPart // the rest
}

// NamedPart is the part of a module or amount that the formula was given, money.
type NamedPart struct {
	Name   string
	Amount float64
}

// Sum gives the whole requirement.
func (p FormulaParts) Sum() float64 {
	sum := 0.0
	for _, list := range [][]float64{p.Premium, p.Reserves, p.Scenario, p.Reinsurer} {
		for _, x := range list {
			sum += x
		}
	}
	for _, other := range p.Other {
		sum += other.Amount
	}
	return sum
}

// Class gives what falls on a class: its premiums, its reserves and, where known, its part of the scenarios.
func (p FormulaParts) Class(c int) float64 {
	sum := p.Premium[c] + p.Reserves[c]
	if p.ClassScenario != nil {
		for _, x := range p.ClassScenario[c] {
			sum += x
		}
	}
	return sum
}

// Parts shares the whole requirement out (natural allocation). classScenario, which may be nil, gives the net loss of each scenario and alternative by
// class; where a scenario's do not add up to its net loss, as when reinstatement premiums are left out, the difference stays with the scenario.
//
// The mitigating effect is the non-life requirement without cover less that with it. The first is an input like others, with the part "mitigating
// effect"; the second makes the parts of classes and scenarios smaller by what they take from the effect. Kinks are those of Slopes.
func (f *Formula) Parts(p FormulaPosition, grossNonLife float64, classScenario [][][]float64) FormulaParts {
	var s FormulaScratch
	r := f.Require(p, grossNonLife, &s)
	g := f.gradient(p, &s, r)
	parts := FormulaParts{
		Premium: make([]float64, len(f.Classes)), Reserves: make([]float64, len(f.Classes)),
		Scenario: make([]float64, len(f.Scenarios)), Reinsurer: make([]float64, len(f.Default)),
	}
	for i, class := range f.Classes {
		premium := class.LastPremium
		if v := s.segments[class.Segment]; v.next >= v.last {
			premium = max(p.Premium[i], 0)
		}
		parts.Premium[i] = g.premium[class.Segment] * (premium + class.FuturePremium)
		parts.Reserves[i] = g.reserve[class.Segment] * class.Reserves
	}
	for i, x := range s.net {
		parts.Scenario[i] = g.scenario[i] * x
	}
	if classScenario != nil {
		parts.ClassScenario = make([][]float64, len(f.Classes))
		for c := range parts.ClassScenario {
			parts.ClassScenario[c] = make([]float64, len(f.Scenarios))
			for i, k := range s.counts {
				if k >= 0 {
					parts.ClassScenario[c][i] = g.scenario[i] * classScenario[i][k][c]
				}
			}
		}
	}
	for i := range parts.Reinsurer {
		parts.Reinsurer[i] = float64(g.recoverable[i]*s.whole[i]) + float64(g.collateral[i]*entry(p.Collateral, i))
	}
	parts.Other = []NamedPart{
		{"mitigating effect", g.gross * grossNonLife},
		{"lapse", g.lapse * f.Lapse},
		{"other catastrophes", g.otherCatastrophe * f.OtherCatastrophe},
		{"property reinsurance written", g.propertyReinsurance * f.PropertyReinsurance},
		{"market", g.market * f.Market},
		{"type 2 default", g.typeTwo * f.TypeTwo},
		{"life", g.life * f.Life},
		{"health", g.health * f.Health},
		{"intangible", g.whole * f.Intangible},
		{"operational", g.whole * f.Operational},
		{"adjustment", g.whole * f.Adjustment},
	}
	return parts
}
