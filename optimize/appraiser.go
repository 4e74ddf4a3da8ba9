package optimize

import (
	"cmp"
	"encoding/binary"
	"fmt"
	"math"
	"slices"
	"sync"

	"cedewright/market"
	"cedewright/portfolio/fault"
	"cedewright/portfolio/loss"
	"cedewright/portfolio/sample"
	"cedewright/portfolio/security"
	"cedewright/portfolio/treaty"
)

// subjectBudget bounds the memory of remembered subjects, in bytes. Beyond it all are forgotten; results never depend on it.
const subjectBudget = 512 << 20

// momentBudget bounds the count of remembered sums of products.
const momentBudget = 1 << 16

// pricedBudget bounds the count of remembered layers.
const pricedBudget = 1 << 20

// Appraiser appraises programmes of one case. It remembers what programmes have in common: the subject of a treaty, and price and
// expected recovery of a layer. It is safe for concurrent use; what it remembers never changes a figure.
type Appraiser struct {
	c           Case
	years       int
	tariffs     map[string]*market.Tariff
	rules       []rule         // by standard
	formulas    []*formulaRule // those of rules that are formulas
	covariances []*covarianceRule
	slots       []*perilYears  // perils that covariances take alone, each once
	levels      []sample.Level // at which the result is measured, rising
	means       int            // place of the lowest level at which a tail value at risk is asked
	premiums    []float64      // by class
	ungained    []float64      // −U of each year with no cover: gross loss + expenses − premium; years stand by falling gross loss
	centred     []float64      // ungained less its mean
	squares     float64        // sum of the squares of centred
	constant    float64        // expenses − premium, the part of −U that is certain
	meanLoss    float64        // mean annual gross loss
	gross       []grossCapital
	scratch     sync.Pool // of *workspace

	reinsurer  map[string]int     // place in the register
	failures   *security.Failures // years in which reinsurers fail; nil without a register
	rest       []float64          // yearly loss of the rest of the company; nil when no law is given for it
	restMean   float64
	restOrder  []int32   // years by rising loss of the rest
	ownerSteps []float64 // g((k+1)/N) − g(k/N) of the owners' price of risk; nil for a flat rate

	mu          sync.Mutex
	subjects    map[string]*subject
	subjectSize int
	nextSubject int
	priced      map[string]*priced
	moments     map[[2]int]float64
}

// grossCapital is required capital with no cover under one standard.
type grossCapital struct {
	figure         Estimate // of the company
	influence      []float64
	alone          Estimate // of the book before diversification
	aloneInfluence []float64
	parts          []CapitalPart
}

// NewAppraiser prepares a case. It fails, with every fault at once, when the case is not valid.
func NewAppraiser(c Case) (*Appraiser, error) {
	if err := c.Validate(); err != nil {
		return nil, err
	}
	t := c.Book.Table
	a := &Appraiser{c: c, years: t.Years(), tariffs: map[string]*market.Tariff{}, subjects: map[string]*subject{}, priced: map[string]*priced{}, moments: map[[2]int]float64{}}
	for _, curve := range c.Curves {
		tariff, err := market.NewTariff(curve, a.years)
		if err != nil {
			return nil, err
		}
		a.tariffs[curve.Name] = tariff
	}
	for _, class := range c.Book.Classes {
		a.premiums = append(a.premiums, class.Premium)
		a.constant -= class.Premium * (1 - class.Expenses)
	}
	a.c.Book.Table = byFallingLoss(t)
	a.ungained = annualLosses(a.c.Book.Table)
	a.meanLoss = sample.Sum(a.ungained) / float64(a.years)
	a.centred = make([]float64, a.years)
	for y, x := range a.ungained {
		a.centred[y] = x - a.meanLoss
		a.squares += float64(a.centred[y] * a.centred[y])
		a.ungained[y] += a.constant
	}
	if err := a.prepareStandards(); err != nil {
		return nil, err
	}
	return a, nil
}

// prepareStandards makes the rules and measures the position without cover.
func (a *Appraiser) prepareStandards() error {
	a.prepareSecurity()
	a.levels, a.means = collectLevels(a.c.Standards)
	for _, s := range a.c.Standards {
		if s.Covariance != nil {
			for _, name := range s.Covariance.Perils {
				if a.slotNamed(name) < 0 {
					a.slots = append(a.slots, a.perilYears(name))
				}
			}
		}
	}
	if a.c.Rest != nil && a.c.Rest.Quantile != nil {
		gross := make([]float64, a.years)
		for y, x := range a.ungained {
			gross[y] = x - a.constant
		}
		a.rest = a.c.Rest.Years(gross)
		a.restMean = sample.Sum(a.rest) / float64(a.years)
		a.restOrder = make([]int32, a.years)
		for y := range a.restOrder {
			a.restOrder[y] = int32(y)
		}
		slices.SortFunc(a.restOrder, func(i, j int32) int { return cmp.Compare(a.rest[i], a.rest[j]) })
	}
	if g := a.c.Owners; g != nil {
		a.ownerSteps = make([]float64, a.years)
		for k := range a.ownerSteps {
			a.ownerSteps[k] = g.At(float64(k+1)/float64(a.years)) - g.At(float64(k)/float64(a.years))
		}
	}
	a.scratch.New = func() any { return a.newWorkspace() }
	w := a.newWorkspace()
	for _, s := range a.c.Standards {
		switch {
		case s.Formula != nil:
			r, err := a.newFormulaRule(s.Formula, len(a.formulas))
			if err != nil {
				return err
			}
			a.formulas = append(a.formulas, r)
			a.rules = append(a.rules, r)
		case s.Covariance != nil:
			r := a.newCovarianceRule(s.Covariance, len(a.covariances))
			a.covariances = append(a.covariances, r)
			a.rules = append(a.rules, r)
		default:
			a.rules = append(a.rules, a.newSimulatedRule(s))
		}
	}
	p := a.own(a.position(treaty.Programme{}, nil, a.meanLoss+a.constant, w))
	for i, q := range a.requirements(p, w) {
		influence := a.rules[i].moves(p, q, nil).years
		g := grossCapital{figure: Estimate{q.amount, sample.InfluenceError(influence)}, influence: influence, parts: a.rules[i].parts(p, w)}
		g.alone, g.aloneInfluence = a.aloneFigure(i, p, q, nil)
		a.gross = append(a.gross, g)
	}
	return nil
}

// byFallingLoss gives the table with its years by falling gross loss, equal ones in their order: a year that is mild before reinsurance can then be left out
// of a search for the worst years, and the years that treaties touch lie close together.
func byFallingLoss(t *loss.Table) *loss.Table {
	annual := annualLosses(t)
	order := make([]int32, len(annual))
	for y := range order {
		order[y] = int32(y)
	}
	falling := func(i, j int32) int {
		if c := cmp.Compare(annual[j], annual[i]); c != 0 {
			return c
		}
		return cmp.Compare(i, j)
	}
	if slices.IsSortedFunc(order, falling) {
		return t
	}
	slices.SortFunc(order, falling)
	return t.Reordered(order)
}

func annualLosses(t *loss.Table) []float64 {
	columns := t.Columns()
	annual := make([]float64, t.Years())
	for y := range annual {
		sum := 0.0
		for _, x := range columns.Loss[columns.Offset[y]:columns.Offset[y+1]] {
			sum += x
		}
		annual[y] = sum
	}
	return annual
}

// Case gives the case that is appraised.
func (a *Appraiser) Case() Case { return a.c }

// priced is what a layer costs and pays on average, for 100 % of the treaty.
type priced struct {
	base       float64 // base premium, money per year; quota share: ceded premium of the full subject
	by         string  // what set the price
	recovery   float64 // mean annual recovery
	reinstated float64 // mean fraction of base premium paid as reinstatement premium
	commission float64 // quota share: fraction of ceded premium
	attachment float64 // probability per year
	exhaustion float64
	noTaker    bool        // the market has no capacity for it
	modelled   bool        // base premium or commission follows the curve, so it carries simulation error
	scenarios  [][]float64 // by formula: recovery in each year of its scenarios
}

// item is one treaty of a programme, ready to be applied.
type item struct {
	terms   treaty.Treaty
	subject *subject
	priced  *priced
	place   int     // in the programme
	slot    int     // of the peril that it alone answers (see slotOf), or −1
	unpaid  float64 // money per year, as placed, that its reinsurers are expected to leave unpaid
}

// items resolves the placed treaties of a programme, in inuring order.
func (a *Appraiser) items(p treaty.Programme, w *workspace) ([]item, error) {
	order, err := p.Order()
	if err != nil {
		return nil, err
	}
	if err := a.checkPanels(p); err != nil {
		return nil, err
	}
	items := make([]item, 0, len(order))
	for _, i := range order {
		t := p.Treaties[i]
		if t.Placed() == 0 {
			continue
		}
		s := a.subjectOf(p, i, w)
		known, err := a.price(p, i, s, w)
		if err != nil {
			return nil, err
		}
		items = append(items, item{terms: t, subject: s, priced: known, place: i, slot: a.slotOf(p, i)})
	}
	return items, nil
}

// price gives premium, expected recovery and probabilities of treaty i of a programme, remembered for the next time.
func (a *Appraiser) price(p treaty.Programme, i int, s *subject, w *workspace) (*priced, error) {
	t := p.Treaties[i]
	subjectPremium := 0.0
	if t.Kind == treaty.QuotaShare {
		subjectPremium = p.SubjectPremium(i, a.c.Book.Table.Classes(), a.premiums)
	}
	w.key = pricedKey(w.key[:0], t, s, subjectPremium)
	a.mu.Lock()
	known, ok := a.priced[string(w.key)]
	a.mu.Unlock()
	if ok {
		return known, nil
	}
	key := string(w.key)
	var fresh *priced
	var err error
	if t.Kind == treaty.QuotaShare {
		fresh, err = a.priceQuotaShare(t, s, subjectPremium)
	} else {
		fresh, err = a.priceExcess(t, s, w)
	}
	if err != nil {
		return nil, err
	}
	for _, r := range a.formulas {
		paid, err := r.scenarioRecoveries(p, i)
		if err != nil {
			return nil, err
		}
		fresh.scenarios = append(fresh.scenarios, paid)
	}
	a.mu.Lock()
	if len(a.priced) >= pricedBudget {
		clear(a.priced)
	}
	a.priced[key] = fresh
	a.mu.Unlock()
	return fresh, nil
}

// pricedKey writes everything on which price and recovery of a treaty at 100 % depend.
func pricedKey(key []byte, t treaty.Treaty, s *subject, subjectPremium float64) []byte {
	number := func(x float64) { key = binary.LittleEndian.AppendUint64(key, math.Float64bits(x)) }
	optional := func(o treaty.Optional) {
		if o.Given {
			key = append(key, 1)
			number(o.Value)
		} else {
			key = append(key, 0)
		}
	}
	key = binary.LittleEndian.AppendUint32(key, uint32(s.number))
	key = append(key, byte(t.Kind))
	number(t.Retention)
	number(t.Limit)
	number(t.AnnualDeductible)
	number(t.AnnualLimit)
	number(t.EventLimit)
	number(subjectPremium)
	if t.Reinstatements == nil {
		key = append(key, 0xff)
	} else {
		key = append(key, byte(len(t.Reinstatements)))
		for _, c := range t.Reinstatements {
			number(c)
		}
	}
	optional(t.Premium)
	optional(t.Commission)
	return append(key, t.Curve...)
}

// tariff gives the price table of a treaty's curve; nil without error when its price is quoted and it names none.
func (a *Appraiser) tariff(t treaty.Treaty, quoted bool) (*market.Tariff, error) {
	tariff, ok := a.tariffs[t.Curve]
	if ok || (quoted && t.Curve == "") {
		return tariff, nil
	}
	if t.Curve == "" {
		return nil, &fault.Fault{Key: t.Name, Found: "the treaty has no price", Allowed: "a curve, or a quoted premium or commission"}
	}
	names := make([]string, 0, len(a.c.Curves))
	for _, c := range a.c.Curves {
		names = append(names, c.Name)
	}
	return nil, &fault.Fault{Key: t.Name + ".curve", Found: fmt.Sprintf("no market curve is named %q", t.Curve), Nearest: fault.Nearest(t.Curve, names)}
}

func (a *Appraiser) priceExcess(t treaty.Treaty, s *subject, w *workspace) (*priced, error) {
	w.recover(t, s)
	defer w.reset()
	known := &priced{modelled: !t.Premium.Given}
	w.recovery = w.recovery[:0]
	reinstated := 0.0
	for _, y := range w.touched {
		if r := w.annual[y]; r > 0 {
			w.recovery = append(w.recovery, r)
			reinstated += t.Reinstated(r)
		}
	}
	n := float64(a.years)
	known.recovery = sample.Sum(w.recovery) / n
	known.reinstated = reinstated / n
	known.attachment = a.yearsAmong(s.year[:s.above(t.AttachmentPoint())]) / n
	if !math.IsInf(t.Limit, 1) {
		known.exhaustion = a.yearsAmong(s.year[:s.reaching(t.ExhaustionPoint())]) / n
	}
	tariff, err := a.tariff(t, t.Premium.Given)
	if err != nil {
		return nil, err
	}
	if tariff == nil {
		known.base, known.by = t.Premium.Value, "quoted"
		return known, nil
	}
	slices.SortFunc(w.recovery, func(x, y float64) int {
		if x > y {
			return -1
		}
		if x < y {
			return 1
		}
		return 0
	})
	premium, err := tariff.BasePremium(t, w.recovery)
	if err != nil {
		return nil, fmt.Errorf("price of treaty %q: %w", t.Name, err)
	}
	known.base, known.by = premium.Base, premium.Basis
	known.noTaker = !t.Premium.Given && known.exhaustion < tariff.Curve().Capacity
	known.modelled = known.modelled && premium.Modelled()
	return known, nil
}

// yearsAmong counts the distinct years of a list.
func (a *Appraiser) yearsAmong(years []int32) float64 {
	seen := make([]uint64, (a.years+63)/64)
	count := 0
	for _, y := range years {
		if bit := uint64(1) << (y & 63); seen[y>>6]&bit == 0 {
			seen[y>>6] |= bit
			count++
		}
	}
	return float64(count)
}

func (a *Appraiser) priceQuotaShare(t treaty.Treaty, s *subject, subjectPremium float64) (*priced, error) {
	known := &priced{base: subjectPremium, by: "commission", recovery: s.mean}
	tariff, err := a.tariff(t, t.Commission.Given)
	if err != nil {
		return nil, err
	}
	if t.Commission.Given {
		known.commission = t.Commission.Value
		return known, nil
	}
	commission, err := tariff.Commission(t, s.loss, subjectPremium)
	if err != nil {
		return nil, fmt.Errorf("price of treaty %q: %w", t.Name, err)
	}
	known.commission, known.modelled = commission.Rate, true
	known.by = commission.Basis
	return known, nil
}
