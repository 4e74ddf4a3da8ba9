package capital

import "math"

// FormulaScratch is memory that Require reuses; its zero value is ready. One must not serve two calls at a time.
type FormulaScratch struct {
	segments  []segmentVolume
	net       []float64 // by scenario: the loss that counts, money, at least 0
	counts    []int     // by scenario: the alternative that counts; −1 when none is above or at 0
	kinds     []float64
	whole     []float64 // by reinsurer: existing recoverables and those of the programme
	losses    []float64 // by reinsurer: loss given default
	sum       float64   // of whole
	mitigated float64   // risk-mitigating effect
	risk      DefaultRisk
	modules   [5]float64
}

// segmentVolume is one segment of premium and reserve risk.
type segmentVolume struct {
	next, last, future float64 // net premium of next year and the last, and beyond, money
	premium, reserve   float64 // volumes, money
	spread             float64 // factor for geographical diversification
	sigma              float64 // of premium risk, excess cover allowed for
	own                float64 // √(σp²Vp² + …) before spread
	deviation          float64 // own · spread
	row                float64 // Σ correlation · deviation over all segments
	excess             bool
}

func resized[T any](list []T, n int) []T {
	if cap(list) < n {
		return make([]T, n)
	}
	list = list[:n]
	clear(list)
	return list
}

// Require gives what the formula asks for a position. grossNonLife is the non-life requirement without any cover, money: what NonLife falls short of
// it is the risk-mitigating effect, shared out to reinsurers by their recoverables. Formula and position must fit together: see Validate; the position
// has a premium for every class and, for every scenario, a net loss for every alternative of its pattern.
//
// A net premium below 0 counts as 0, as does a net loss. The whole requirement may rise although a net loss falls: the mitigating effect then grows,
// and with it the loss given default. It allocates nothing when s has served a formula of the same size.
func (f *Formula) Require(p FormulaPosition, grossNonLife float64, s *FormulaScratch) FormulaFigures {
	var r FormulaFigures
	f.volumes(p, s, &r)
	f.catastrophe(p, s, &r)
	c := &f.Factors
	r.NonLife = math.Sqrt(max(0, float64(r.PremiumReserve*r.PremiumReserve)+float64(r.Catastrophe*r.Catastrophe)+float64(f.Lapse*f.Lapse)+
		2*(float64(c.PremiumCat*r.PremiumReserve*r.Catastrophe)+float64(c.PremiumLapse*r.PremiumReserve*f.Lapse)+float64(c.CatLapse*r.Catastrophe*f.Lapse))))
	f.lossesGiven(p, grossNonLife, r.NonLife, s)
	s.risk = c.DefaultRequirement(s.losses, f.Default)
	r.TypeOne = s.risk.Requirement
	r.Default = math.Sqrt(float64(r.TypeOne*r.TypeOne) + float64(c.TypesCross*r.TypeOne*f.TypeTwo) + float64(f.TypeTwo*f.TypeTwo))
	s.modules = [5]float64{marketModule: f.Market, defaultModule: r.Default, lifeModule: f.Life, healthModule: f.Health, nonLifeModule: r.NonLife}
	square := 0.0
	for i, x := range s.modules {
		for j, y := range s.modules {
			square += float64(c.ModuleMatrix[i][j] * x * y)
		}
	}
	r.Basic = math.Sqrt(max(0, square)) + f.Intangible
	r.Total = max(r.Basic+f.Adjustment+f.Operational, 0)
	return r
}

// volumes works out premium and reserve risk (Art. 115 to 117). The larger of two years' premiums is taken for the segment as a whole.
func (f *Formula) volumes(p FormulaPosition, s *FormulaScratch, r *FormulaFigures) {
	c := &f.Factors
	s.segments = resized(s.segments, len(c.Segments))
	for i := range f.Classes {
		class := &f.Classes[i]
		v := &s.segments[class.Segment]
		v.next += max(p.Premium[i], 0)
		v.last += class.LastPremium
		v.future += class.FuturePremium
		v.reserve += class.Reserves
		v.spread = 1 - c.Diversification + float64(c.Diversification*class.Diversification)
		v.excess = v.excess || p.ExcessCover != nil && p.ExcessCover[i]
	}
	for i := range s.segments {
		v, segment := &s.segments[i], &c.Segments[i]
		v.premium = max(v.next, v.last) + v.future
		v.sigma = segment.Premium
		if f.NonProportional == Always || f.NonProportional == ByTreaty && v.excess {
			v.sigma *= segment.NonProportional
		}
		a, b := v.sigma*v.premium, segment.Reserve*v.reserve
		v.own = math.Sqrt(max(0, float64(a*a)+float64(2*c.PremiumReserve*a*b)+float64(b*b)))
		v.deviation = v.own * v.spread
		r.Volume += float64((v.premium + v.reserve) * v.spread)
	}
	square := 0.0
	for i := range s.segments {
		v := &s.segments[i]
		if v.deviation == 0 {
			continue
		}
		row := c.SegmentCorrelation[i]
		for j := range s.segments {
			v.row += float64(row[j] * s.segments[j].deviation)
		}
		square += float64(v.row * v.deviation)
	}
	root := math.Sqrt(max(0, square))
	if r.Volume > 0 {
		r.Sigma = root / r.Volume
	}
	r.PremiumReserve = c.Multiple * root
}

// catastrophe works out catastrophe risk (Art. 119, 120(2) and 128): the dearest alternative of each scenario, scenarios of one kind by their
// correlations, then the kinds. That natural perils are independent (Art. 120(2)) is from memory.
func (f *Formula) catastrophe(p FormulaPosition, s *FormulaScratch, r *FormulaFigures) {
	c := &f.Factors
	s.net, s.counts = resized(s.net, len(f.Scenarios)), resized(s.counts, len(f.Scenarios))
	s.kinds = resized(s.kinds, len(c.Patterns)+len(c.ManMade))
	for i := range f.Scenarios {
		s.counts[i] = -1
		for k, x := range p.Scenario[i] {
			if x > s.net[i] || x == 0 && s.counts[i] < 0 {
				s.net[i], s.counts[i] = x, k
			}
		}
		s.kinds[c.kind(f.Scenarios[i].Kind)] += float64(s.net[i] * s.net[i])
	}
	for _, pair := range f.ScenarioCorrelations {
		s.kinds[c.kind(f.Scenarios[pair.A].Kind)] += float64(2 * pair.Correlation * s.net[pair.A] * s.net[pair.B])
	}
	natural, manMade := 0.0, 0.0
	for k, square := range s.kinds {
		square = max(square, 0) // rounding, where correlations are below 0
		if k < len(c.Patterns) {
			natural += square
		} else {
			manMade += square
		}
		s.kinds[k] = math.Sqrt(square)
	}
	r.Kinds, r.Natural, r.ManMade = s.kinds, math.Sqrt(natural), math.Sqrt(manMade)
	property := r.Natural + f.PropertyReinsurance
	r.Catastrophe = math.Sqrt(float64(property*property) + manMade + float64(f.OtherCatastrophe*f.OtherCatastrophe))
}

// lossesGiven works out the loss given the default of each reinsurer (Art. 192(2), from memory): LossGiven of what it owes and of Mitigating of its
// part of the mitigating effect, less collateral. That the effect is shared out in proportion to recoverables is the simplification of Art. 107, from
// memory; without recoverables nobody bears it.
func (f *Formula) lossesGiven(p FormulaPosition, gross, net float64, s *FormulaScratch) {
	n := len(f.Default)
	s.whole, s.losses = resized(s.whole, n), resized(s.losses, n)
	s.mitigated, s.sum = max(gross-net, 0), 0
	for i := range n {
		s.whole[i] = entry(f.Recoverables, i) + entry(p.Recoverable, i)
		s.sum += s.whole[i]
	}
	for i := range n {
		s.losses[i] = max(f.lossGiven(p, i, s), 0)
	}
}

// lossGiven is the loss given default of one reinsurer before it is held at 0.
func (f *Formula) lossGiven(p FormulaPosition, i int, s *FormulaScratch) float64 {
	owed := s.whole[i]
	if s.sum > 0 {
		owed += f.Factors.Mitigating * s.mitigated * s.whole[i] / s.sum
	}
	return float64(f.lossFraction(i)*owed) - float64(f.Factors.CollateralUsed*entry(p.Collateral, i))
}

// lossFraction is what of a recoverable is lost on the default of a reinsurer.
func (f *Formula) lossFraction(i int) float64 {
	if f.Tied != nil && f.Tied[i] {
		return f.Factors.LossGivenTied
	}
	return f.Factors.LossGiven
}

// entry gives an entry of a list; 0 when there is no list.
func entry(list []float64, i int) float64 {
	if list == nil {
		return 0
	}
	return list[i]
}
