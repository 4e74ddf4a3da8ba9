package optimize

import (
	"fmt"
	"math"
	"slices"

	"cedewright/portfolio/sample"
	"cedewright/portfolio/treaty"
)

// Levels at which the net result is always reported.
var (
	oneIn10  = mustLevel("1 in 10")
	oneIn200 = mustLevel("1 in 200")
)

func mustLevel(text string) sample.Level {
	l, err := sample.ParseLevel(text)
	if err != nil {
		panic(fmt.Sprintf("optimize: level %q of this package is wrong: %v", text, err))
	}
	return l
}

// Appraise says everything about one programme. It is a pure function of the case and the programme: search, frontier, stress,
// report and workbench all call it. Without detail the standard errors, the treaties' reliefs and CostInfluence are left at zero;
// the other figures are the same bits with and without. A programme without treaties is no cover. It fails when the programme is
// not valid for the book or a treaty has no price.
func (a *Appraiser) Appraise(p treaty.Programme, detail bool) (Appraisal, error) {
	w := a.scratch.Get().(*workspace)
	defer a.scratch.Put(w)
	items, err := a.items(p, w)
	if err != nil {
		return Appraisal{}, fmt.Errorf("appraise %q: %w", p.Name, err)
	}
	result := Appraisal{Programme: p, Treaties: make([]TreatyFigure, len(p.Treaties))}
	totals := a.totals(items)
	totals.unpaid = a.netLosses(items, w)
	result.CededPremium.Value = totals.premium
	result.ExpectedRecoveries.Value = totals.recovery
	result.ReinstatementPremium.Value = totals.reinstatement
	result.Commission.Value = totals.commission
	result.CededMargin.Value = totals.margin()
	result.ExpectedUnpaid.Value = totals.unpaid
	pos := a.position(p, items, a.meanNet(totals), w)
	all := a.requirements(pos, w)
	a.measure(&result, pos, all, w)
	for _, it := range items {
		if it.priced.noTaker {
			result.NoTaker = append(result.NoTaker, it.terms.Name)
		}
	}
	for i, t := range p.Treaties {
		result.Treaties[i] = TreatyFigure{Terms: t}
		for _, it := range items {
			if it.terms.Name == t.Name {
				result.Treaties[i] = it.figure()
			}
		}
	}
	if detail {
		if err := a.detail(&result, a.own(pos), all, w); err != nil {
			return Appraisal{}, fmt.Errorf("appraise %q: %w", p.Name, err)
		}
	}
	return result, nil
}

// totals are the expected money flows of a programme, per year, as placed.
type totals struct{ premium, recovery, reinstatement, commission, unpaid float64 }

func (t totals) margin() float64 { return t.premium + t.reinstatement - t.commission - t.recovery }

func (a *Appraiser) totals(items []item) totals {
	var sum totals
	for _, it := range items {
		placed := it.terms.Placed()
		premium := float64(placed * it.priced.base)
		sum.premium += premium
		sum.recovery += float64(placed * it.priced.recovery)
		sum.reinstatement += float64(premium * it.priced.reinstated)
		sum.commission += float64(premium * it.priced.commission)
	}
	return sum
}

// netLosses gathers in w what a programme adds to the loss of each year beyond what is certain and what its quota shares take, and gives what reinsurers are
// expected to leave unpaid, money per year; it notes each treaty's part.
func (a *Appraiser) netLosses(items []item, w *workspace) float64 {
	w.clearFlows()
	total := 0.0
	for k, it := range items {
		annual := w.annual
		if it.terms.Kind == treaty.QuotaShare {
			annual = it.subject.annual
		} else {
			premium := float64(it.terms.Placed() * it.priced.base)
			w.recover(it.terms, it.subject)
			w.rose = w.rose || a.mayRise(it.terms, premium)
			if it.slot >= 0 {
				w.addWithSlot(&w.slots[it.slot], it.terms, premium)
			} else {
				w.add(it.terms, premium)
			}
		}
		if len(it.terms.Panel) > 0 {
			items[k].unpaid = a.unpaid(it.terms, annual, w.addOne) / float64(a.years)
			total += items[k].unpaid
		}
		w.reset()
	}
	return total
}

// add adds what an excess treaty, premium as placed, adds to the loss of each touched year: reinstatement premium less what it pays. It leaves these flows in
// w.flow.
func (w *workspace) add(t treaty.Treaty, premium float64) {
	w.flowsOf(t, premium)
	offset, gross := w.offset, w.centred
	last := int32(w.used - 1)
	sum, squares := w.sum, w.squares
	for i, y := range w.touched {
		x, o := w.flow[i], offset[y]
		squares += float64((2*(gross[y]+o) + x) * x)
		sum += x
		offset[y] = o + x
		last = max(last, y)
	}
	w.used, w.sum, w.squares = int(last)+1, sum, squares
}

// flowsOf works the flows of the touched years out: Treaty.Reinstated, its constants taken out of the loop.
func (w *workspace) flowsOf(t treaty.Treaty, premium float64) {
	w.flow, w.slopes = w.flow[:0], w.slopes[:0]
	for _, charge := range t.Reinstatements {
		w.slopes = append(w.slopes, premium*charge/t.Limit)
	}
	placed, limit := t.Placed(), t.Limit
	for _, y := range w.touched {
		r := w.annual[y]
		x := -float64(placed * r)
		for _, slope := range w.slopes {
			if r <= 0 {
				break
			}
			x += float64(slope * min(r, limit))
			r -= limit
		}
		w.flow = append(w.flow, x)
	}
}

// addOne adds to the loss of one year.
func (w *workspace) addOne(y int32, x float64) {
	o := w.offset[y]
	w.squares += float64((2*(w.centred[y]+o) + x) * x)
	w.sum += x
	w.offset[y] = o + x
	w.used = max(w.used, int(y)+1)
}

// mayRise tells whether a treaty may make a year worse: where the reinstatement of what it paid, and what failing reinsurers leave unpaid of it, cost more.
func (a *Appraiser) mayRise(t treaty.Treaty, premium float64) bool {
	paid := 1.0 // the least part of a recovery that arrives
	for _, line := range t.Panel {
		paid -= line.Share * a.reinsurers()[a.reinsurer[line.Reinsurer]].LossGiven
	}
	for _, charge := range t.Reinstatements {
		if premium*charge > paid*t.Placed()*t.Limit {
			return true
		}
	}
	return false
}

// certain is what a programme costs in every year alike: premiums less commissions.
func certain(items []item) float64 {
	sum := 0.0
	for _, it := range items {
		premium := float64(it.terms.Placed() * it.priced.base)
		sum += premium - float64(premium*it.priced.commission)
	}
	return sum
}

// meanNet is the mean of −U, from the parts.
func (a *Appraiser) meanNet(t totals) float64 { return a.meanLoss + a.constant + t.margin() + t.unpaid }

// measure fills capital, its cost, rent and the net result.
func (a *Appraiser) measure(result *Appraisal, p *position, all []requirement, w *workspace) {
	result.NetResult.Mean.Value = -p.mean
	result.NetResult.OneIn10.Value = -p.tails[slices.Index(a.levels, oneIn10)].VaR
	result.NetResult.OneIn200.Value = -p.tails[slices.Index(a.levels, oneIn200)].VaR
	result.NetResult.StandardDeviation = a.deviation(p)
	result.Capital = make([]CapitalFigure, len(a.rules))
	binding := 0
	for i, q := range all {
		gross := a.gross[i].figure.Value
		figure := CapitalFigure{Standard: a.c.Standards[i].Name, Gross: Estimate{Value: gross}, Net: Estimate{Value: q.amount}, Relief: Estimate{Value: gross - q.amount}}
		if a.c.Rest != nil && a.c.Standards[i].Simulated() {
			before := a.gross[i].alone.Value
			figure.Alone = &Alone{Estimate{Value: before}, Estimate{Value: q.alone}, Estimate{Value: before - q.alone}}
		}
		result.Capital[i] = figure
		if q.amount > all[binding].amount {
			binding = i
		}
		if a.c.OwnFunds > 0 {
			ratio := math.Inf(1)
			if q.amount > 0 {
				ratio = a.c.OwnFunds / q.amount
			}
			result.OwnFundsRatio = append(result.OwnFundsRatio, Estimate{Value: ratio})
		}
	}
	result.Capital[binding].Binding = true
	driver := a.driving(all)
	result.Driving = result.Capital[driver]
	result.Driving.Gross.Value = a.gross[a.grossDriver()].figure.Value
	result.Driving.Relief.Value = result.Driving.Gross.Value - result.Driving.Net.Value
	result.CapitalCost.Value = a.capitalCost(p, all, driver, w)
	result.TotalCost.Value = result.CededMargin.Value + result.ExpectedUnpaid.Value + result.CapitalCost.Value
	if relief := result.Driving.Relief.Value; relief > 0 {
		result.Rent.Value, result.RentDefined = result.CededMargin.Value/relief, true
	}
}

// grossDriver gives, of the standards that drive, the place of the one that asks the most without cover.
func (a *Appraiser) grossDriver() int {
	worst := a.c.Drivers()[0]
	for _, i := range a.c.Drivers()[1:] {
		if a.gross[i].figure.Value > a.gross[worst].figure.Value {
			worst = i
		}
	}
	return worst
}

// standardDeviation has divisor N − 1; 0 for a single year.
func standardDeviation(values []float64, mean float64) float64 {
	if len(values) < 2 {
		return 0
	}
	sum := 0.0
	for _, v := range values {
		sum += float64((v - mean) * (v - mean))
	}
	return math.Sqrt(sum / float64(len(values)-1))
}

// figure gives the plain figures of one treaty, as placed.
func (it item) figure() TreatyFigure {
	placed, k := it.terms.Placed(), it.priced
	premium := float64(placed * k.base)
	f := TreatyFigure{
		Terms:                 it.terms,
		Premium:               Estimate{Value: premium},
		BasePremium:           k.base,
		ReinstatementPremium:  Estimate{Value: premium * k.reinstated},
		Commission:            premium * k.commission,
		CommissionRate:        k.commission,
		ExpectedRecovery:      Estimate{Value: placed * k.recovery},
		ExpectedUnpaid:        Estimate{Value: it.unpaid},
		AttachmentProbability: Estimate{Value: k.attachment},
		ExhaustionProbability: Estimate{Value: k.exhaustion},
		PricedBy:              k.by,
	}
	f.Margin.Value = f.Premium.Value + f.ReinstatementPremium.Value - f.Commission - f.ExpectedRecovery.Value
	if it.terms.Kind != treaty.QuotaShare && !math.IsInf(it.terms.Limit, 1) {
		f.RateOnLine = k.base / it.terms.Limit
	}
	return f
}

// NetLosses gives the losses of each year less the placed recoveries of a programme, in money; premiums are left out.
func (a *Appraiser) NetLosses(p treaty.Programme) ([]float64, error) {
	w := a.scratch.Get().(*workspace)
	defer a.scratch.Put(w)
	items, err := a.items(p, w)
	if err != nil {
		return nil, fmt.Errorf("net losses of %q: %w", p.Name, err)
	}
	net := make([]float64, a.years)
	for y, x := range a.ungained {
		net[y] = x - a.constant
	}
	for _, it := range items {
		f := a.flow(it, w)
		addScaled(net, -it.terms.Placed(), f.recovery)
	}
	return net, nil
}

// SubjectReturnPeriods gives, for each treaty of a programme, the loss of its unit (event, risk, year) that is exceeded once in each of the return
// periods, in years. A treaty that is not placed has none.
func (a *Appraiser) SubjectReturnPeriods(p treaty.Programme, periods []float64) ([][]float64, error) {
	w := a.scratch.Get().(*workspace)
	defer a.scratch.Put(w)
	if _, err := p.Order(); err != nil {
		return nil, err
	}
	all := make([][]float64, len(p.Treaties))
	for i, t := range p.Treaties {
		if t.Placed() > 0 {
			all[i] = a.subjectOf(p, i, w).exceededOnceIn(periods)
		}
	}
	return all, nil
}
