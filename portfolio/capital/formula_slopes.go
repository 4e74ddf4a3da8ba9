package capital

// gradient is by how much the whole requirement rises per unit of each input.
type gradient struct {
	premium, reserve []float64 // by segment: of its volumes
	scenario         []float64 // by scenario: of its net loss
	recoverable      []float64 // by reinsurer
	collateral       []float64 // by reinsurer
	gross            float64   // of the non-life requirement without cover

	lapse, otherCatastrophe, propertyReinsurance float64
	market, life, health, typeTwo                float64
	whole                                        float64 // of intangible, operational and adjustment: 1, or 0 where the requirement is held at 0
}

// over is x/y, and 0 at the apex of a root, where y is 0.
func over(x, y float64) float64 {
	if y == 0 {
		return 0
	}
	return x / y
}

// gradient differentiates Require by the chain rule, from the whole requirement back to each input. s and r are those of Require at the same point.
func (f *Formula) gradient(p FormulaPosition, s *FormulaScratch, r FormulaFigures) gradient {
	c := &f.Factors
	g := gradient{
		premium: make([]float64, len(c.Segments)), reserve: make([]float64, len(c.Segments)), scenario: make([]float64, len(f.Scenarios)),
		recoverable: make([]float64, len(f.Default)), collateral: make([]float64, len(f.Default)),
	}
	if r.Total > 0 {
		g.whole = 1
	}
	var module [5]float64
	for i := range module {
		for j, y := range s.modules {
			module[i] += float64(c.ModuleMatrix[i][j] * y)
		}
		module[i] = g.whole * over(module[i], r.Basic-f.Intangible)
	}
	g.market, g.life, g.health = module[marketModule], module[lifeModule], module[healthModule]
	typeOne := module[defaultModule] * over(r.TypeOne+c.TypesCross/2*f.TypeTwo, r.Default)
	g.typeTwo = module[defaultModule] * over(f.TypeTwo+c.TypesCross/2*r.TypeOne, r.Default)
	f.differentiateDefault(p, typeOne, s, &g)

	nonLife := module[nonLifeModule] - g.gross // what NonLife falls, the mitigating effect rises
	premiumReserve := nonLife * over(r.PremiumReserve+c.PremiumCat*r.Catastrophe+c.PremiumLapse*f.Lapse, r.NonLife)
	catastrophe := nonLife * over(r.Catastrophe+c.PremiumCat*r.PremiumReserve+c.CatLapse*f.Lapse, r.NonLife)
	g.lapse = nonLife * over(f.Lapse+c.PremiumLapse*r.PremiumReserve+c.CatLapse*r.Catastrophe, r.NonLife)
	f.differentiateCatastrophe(catastrophe, s, r, &g)
	for i := range s.segments {
		v := &s.segments[i]
		sigma := c.Segments[i].Reserve
		a, b := v.sigma*v.premium, sigma*v.reserve
		own := premiumReserve * c.Multiple * over(v.row, r.PremiumReserve/c.Multiple) * v.spread
		g.premium[i] = own * over(a+c.PremiumReserve*b, v.own) * v.sigma
		g.reserve[i] = own * over(b+c.PremiumReserve*a, v.own) * sigma
	}
	return g
}

// differentiateDefault follows type 1 default risk back to recoverables, collateral and mitigating effect; slope is that of the type 1 requirement.
func (f *Formula) differentiateDefault(p FormulaPosition, slope float64, s *FormulaScratch, g *gradient) {
	c := &f.Factors
	losses := make([]float64, len(f.Default))
	c.defaultSlopes(s.risk, s.losses, f.Default, slope, losses)
	mean := 0.0 // of the slopes of what is owed, weighted by recoverables
	for i := range losses {
		if f.lossGiven(p, i, s) < 0 {
			losses[i] = 0
		}
		g.collateral[i] = -losses[i] * c.CollateralUsed
		losses[i] *= f.lossFraction(i) // now the slope of what is owed
		g.recoverable[i] = losses[i]
		mean += over(losses[i]*s.whole[i], s.sum)
	}
	for i, x := range losses {
		g.recoverable[i] += over(c.Mitigating*s.mitigated*(x-mean), s.sum) // a larger part of the effect for one is a smaller one for the others
	}
	if s.mitigated > 0 {
		g.gross = c.Mitigating * mean
	}
}

// differentiateCatastrophe follows catastrophe risk back to scenarios.
func (f *Formula) differentiateCatastrophe(slope float64, s *FormulaScratch, r FormulaFigures, g *gradient) {
	c := &f.Factors
	natural := slope * over(r.Natural+f.PropertyReinsurance, r.Catastrophe)
	manMade := slope * over(r.ManMade, r.Catastrophe)
	g.propertyReinsurance = natural
	g.otherCatastrophe = slope * over(f.OtherCatastrophe, r.Catastrophe)
	for i, x := range s.net {
		g.scenario[i] = x
	}
	for _, pair := range f.ScenarioCorrelations {
		g.scenario[pair.A] += pair.Correlation * s.net[pair.B]
		g.scenario[pair.B] += pair.Correlation * s.net[pair.A]
	}
	for i := range g.scenario {
		k := c.kind(f.Scenarios[i].Kind)
		kind := manMade * over(s.kinds[k], r.ManMade)
		if k < len(c.Patterns) {
			kind = natural * over(s.kinds[k], r.Natural)
		}
		g.scenario[i] *= over(kind, s.kinds[k])
		if s.counts[i] < 0 {
			g.scenario[i] = 0
		}
	}
}

// Slopes gives by how much the whole requirement rises per unit of each input of a position, the mitigating effect included; grossNonLife, as in
// Require, is held.
//
// At a kink: of two premiums of equal size next year's counts; of alternatives of equal size the first; a premium, net loss or loss given default of
// exactly 0 has the slope of its rise, one below 0 has none; a mitigating effect of exactly 0 has none; at the limits of type 1 default risk the
// smaller multiple counts. At the apex of a root (no catastrophe at all, say) its slopes are 0. Reinsurers bear no mitigating effect where there are
// no recoverables at all, so that the first recoverable makes a jump which a slope does not show.
func (f *Formula) Slopes(p FormulaPosition, grossNonLife float64) FormulaSlopes {
	var s FormulaScratch
	r := f.Require(p, grossNonLife, &s)
	g := f.gradient(p, &s, r)
	slopes := FormulaSlopes{
		Premium: make([]float64, len(f.Classes)), Reserves: make([]float64, len(f.Classes)), Scenario: make([][]float64, len(f.Scenarios)),
		Recoverable: g.recoverable,
	}
	for i, class := range f.Classes {
		if v := s.segments[class.Segment]; v.next >= v.last && p.Premium[i] >= 0 {
			slopes.Premium[i] = g.premium[class.Segment]
		}
		slopes.Reserves[i] = g.reserve[class.Segment]
	}
	for i := range slopes.Scenario {
		slopes.Scenario[i] = make([]float64, len(p.Scenario[i]))
		if k := s.counts[i]; k >= 0 {
			slopes.Scenario[i][k] = g.scenario[i]
		}
	}
	return slopes
}
