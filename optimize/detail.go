package optimize

import (
	"math"
	"slices"

	"cedewright/market"
	"cedewright/portfolio/capital"
	"cedewright/portfolio/sample"
	"cedewright/portfolio/treaty"
)

// flow is what one treaty pays and charges year by year, at 100 %, and how its price moves with the simulated years. The influence
// of a year on a figure is the figure's derivative by the weight of that year; its standard deviation over √N is the standard error
// (Hampel 1974).
type flow struct {
	recovery   []float64 // money, by year
	reinstated []float64 // fraction of base premium, by year; nil when no reinstatement is paid
	premium    []float64 // influence of the base premium; nil when it does not depend on the simulated years
	commission []float64 // influence of the commission in money; nil likewise
}

// flow works out one treaty's flow.
func (a *Appraiser) flow(it item, w *workspace) flow {
	f := flow{recovery: make([]float64, a.years)}
	t, k := it.terms, it.priced
	if t.Kind == treaty.QuotaShare {
		copy(f.recovery, it.subject.annual)
		if k.modelled {
			f.commission = sample.DistortedInfluence(f.recovery, a.tariffs[t.Curve].Curve().Distortion.At, nil)
			for y := range f.commission {
				f.commission[y] = -f.commission[y]
			}
		}
		return f
	}
	w.recover(t, it.subject)
	for _, y := range w.touched {
		f.recovery[y] = w.annual[y]
	}
	w.reset()
	if k.reinstated > 0 {
		f.reinstated = make([]float64, a.years)
		for y, r := range f.recovery {
			if r > 0 {
				f.reinstated[y] = t.Reinstated(r)
			}
		}
	}
	if k.modelled {
		f.premium = premiumInfluence(f, k.base, a.tariffs[t.Curve].Curve())
	}
	return f
}

// premiumInfluence differentiates P·(1−b) = ρ_g(R − P·F) by the weight of a year: the influence of ρ_g at R − P·F, divided by
// 1 − b + the mean of F under the distorted weights (implicit differentiation).
func premiumInfluence(f flow, base float64, curve market.Curve) []float64 {
	paid := f.recovery
	slope := 1 - curve.Brokerage
	if f.reinstated != nil {
		paid = make([]float64, len(f.recovery))
		for y := range paid {
			paid[y] = f.recovery[y] - float64(base*f.reinstated[y])
		}
		weights := sample.AllocationWeights(paid, curve.Distortion.At)
		slope += meanProduct(weights, f.reinstated)
	}
	phi := sample.DistortedInfluence(paid, curve.Distortion.At, nil)
	for y := range phi {
		phi[y] /= slope
	}
	return phi
}

func meanProduct(a, b []float64) float64 {
	sum := 0.0
	for i := range a {
		sum += float64(a[i] * b[i])
	}
	return sum / float64(len(a))
}

// addScaled adds c·src to dst; a nil src adds nothing.
func addScaled(dst []float64, c float64, src []float64) {
	for i, x := range src {
		dst[i] += float64(c * x)
	}
}

// flows works out the flows of all items of a programme; those of known items are taken over.
func (a *Appraiser) flows(items []item, known map[*priced]flow, w *workspace) []flow {
	all := make([]flow, len(items))
	for i, it := range items {
		f, ok := known[it.priced]
		if !ok {
			f = a.flow(it, w)
			known[it.priced] = f
		}
		all[i] = f
	}
	return all
}

// detail adds standard errors, treaties' reliefs and the influence of the total cost.
func (a *Appraiser) detail(result *Appraisal, p *position, all []requirement, w *workspace) error {
	known := map[*priced]flow{}
	flows := a.flows(p.items, known, w)
	unpaid := a.unpaidErrors(result, p)
	margin := a.moneyErrors(result, p.items, flows)
	driver := a.driving(all)
	var driving moves
	for i := range a.rules {
		m := a.rules[i].moves(p, all[i], flows)
		phi := m.influence(flows)
		if i == driver {
			driving = m
		}
		figure := &result.Capital[i]
		a.capitalErrors(figure, a.gross[i].figure, a.gross[i].influence, phi)
		if figure.Alone != nil {
			a.aloneErrors(figure.Alone, i, p, all[i], flows)
		}
		if i < len(result.OwnFundsRatio) && figure.Net.Value > 0 {
			ratio := &result.OwnFundsRatio[i]
			ratio.StandardError = ratio.Value * figure.Net.StandardError / figure.Net.Value
		}
		figure.Parts = a.rules[i].parts(p, w)
		for k := range figure.Parts {
			figure.Parts[k].Gross = a.gross[i].parts[k].Amount
		}
	}
	figure := &result.Driving
	figure.Alone, figure.Parts = result.Capital[driver].Alone, result.Capital[driver].Parts
	phi := driving.influence(flows)
	gross := a.gross[a.grossDriver()]
	relief := a.capitalErrors(figure, gross.figure, gross.influence, phi)
	if result.RentDefined {
		addScaled(relief, -1/result.Rent.Value, margin)
		result.Rent.StandardError = math.Abs(result.Rent.Value/figure.Relief.Value) * sample.InfluenceError(relief)
		if result.Rent.Value == 0 {
			result.Rent.StandardError = sample.InfluenceError(margin) / figure.Relief.Value
		}
	}
	cost := a.capitalCostMoves(p, all, driver, driving, flows)
	kept := cost.influence(flows)
	result.CapitalCost.StandardError = sample.InfluenceError(kept)
	result.CostInfluence = margin
	addScaled(result.CostInfluence, 1, unpaid)
	addScaled(result.CostInfluence, 1, kept)
	result.TotalCost.StandardError = sample.InfluenceError(result.CostInfluence)
	a.resultErrors(&result.NetResult, p.losses, p.items, flows)
	a.priceErrors(result, p.items, flows, cost)
	return a.reliefs(result, phi, known, w)
}

// capitalErrors fills the errors of a capital figure from the influences of gross and net, and gives the influence of the relief.
func (a *Appraiser) capitalErrors(figure *CapitalFigure, gross Estimate, before, after []float64) []float64 {
	figure.Gross.StandardError = gross.StandardError
	figure.Net.StandardError = sample.InfluenceError(after)
	relief := slices.Clone(before)
	addScaled(relief, -1, after)
	figure.Relief.StandardError = sample.InfluenceError(relief)
	return relief
}

// aloneFigure gives a simulated standard's requirement of the book alone and its influence; nothing for other standards or without a rest of the company.
func (a *Appraiser) aloneFigure(i int, p *position, q requirement, flows []flow) (Estimate, []float64) {
	r, ok := a.rules[i].(*simulatedRule)
	if !ok || a.c.Rest == nil {
		return Estimate{}, nil
	}
	w := workspace{}
	_, setBy := r.of(view{p.losses, p.mean, p.tails}, &w)
	phi := r.movesOf(view{p.losses, p.mean, p.tails}, setBy, p.items, flows).influence(flows)
	return Estimate{q.alone, sample.InfluenceError(phi)}, phi
}

func (a *Appraiser) aloneErrors(figure *Alone, i int, p *position, q requirement, flows []flow) {
	net, phi := a.aloneFigure(i, p, q, flows)
	figure.Gross.StandardError = a.gross[i].alone.StandardError
	figure.Net.StandardError = net.StandardError
	relief := slices.Clone(a.gross[i].aloneInfluence)
	addScaled(relief, -1, phi)
	figure.Relief.StandardError = sample.InfluenceError(relief)
}

// unpaidErrors fills the errors of what reinsurers leave unpaid, and gives its influence in total.
func (a *Appraiser) unpaidErrors(result *Appraisal, p *position) []float64 {
	total := make([]float64, a.years)
	if a.failures == nil {
		return total
	}
	w := a.scratch.Get().(*workspace)
	defer a.scratch.Put(w)
	for _, it := range p.items {
		own := make([]float64, a.years)
		if it.terms.Kind == treaty.QuotaShare {
			a.unpaidYears(it.terms, it.subject.annual, own)
		} else {
			w.recover(it.terms, it.subject)
			a.unpaidYears(it.terms, w.annual, own)
			w.reset()
		}
		treatyFigure(result, it.terms.Name).ExpectedUnpaid.StandardError = sample.InfluenceError(own)
		addScaled(total, 1, own)
	}
	for y := range total {
		total[y] -= result.ExpectedUnpaid.Value
	}
	result.ExpectedUnpaid.StandardError = sample.InfluenceError(total)
	return total
}

// moneyErrors fills the errors of the money flows, in total and by treaty, and gives the influence of the ceded margin.
func (a *Appraiser) moneyErrors(result *Appraisal, items []item, flows []flow) []float64 {
	n := a.years
	premium, recovery, reinstatement, commission := make([]float64, n), make([]float64, n), make([]float64, n), make([]float64, n)
	margin, own := make([]float64, n), make([]float64, n)
	for i, it := range items {
		f, k, placed := flows[i], it.priced, it.terms.Placed()
		figure := treatyFigure(result, it.terms.Name)
		clear(own)
		for y, r := range f.recovery {
			x := float64(placed * (r - k.recovery))
			recovery[y] += x
			own[y] -= x
		}
		figure.ExpectedRecovery.StandardError = placed * sample.InfluenceError(f.recovery)
		if f.premium != nil {
			addScaled(premium, placed, f.premium)
			addScaled(own, placed, f.premium)
			figure.Premium.StandardError = placed * sample.InfluenceError(f.premium)
		}
		if f.reinstated != nil {
			paid := make([]float64, n)
			for y, share := range f.reinstated {
				paid[y] = float64(placed * k.base * (share - k.reinstated))
			}
			addScaled(paid, float64(placed*k.reinstated), f.premium)
			addScaled(reinstatement, 1, paid)
			addScaled(own, 1, paid)
			figure.ReinstatementPremium.StandardError = sample.InfluenceError(paid)
		}
		if f.commission != nil {
			addScaled(commission, placed, f.commission)
			addScaled(own, -placed, f.commission)
		}
		addScaled(margin, 1, own)
		figure.Margin.StandardError = sample.InfluenceError(own)
		figure.AttachmentProbability.StandardError = binomialError(k.attachment, n)
		figure.ExhaustionProbability.StandardError = binomialError(k.exhaustion, n)
	}
	result.CededPremium.StandardError = sample.InfluenceError(premium)
	result.ExpectedRecoveries.StandardError = sample.InfluenceError(recovery)
	result.ReinstatementPremium.StandardError = sample.InfluenceError(reinstatement)
	result.Commission.StandardError = sample.InfluenceError(commission)
	result.CededMargin.StandardError = sample.InfluenceError(margin)
	return margin
}

func binomialError(p float64, n int) float64 { return math.Sqrt(p * (1 - p) / float64(n)) }

func treatyFigure(result *Appraisal, name string) *TreatyFigure {
	i := slices.IndexFunc(result.Treaties, func(f TreatyFigure) bool { return f.Terms.Name == name })
	return &result.Treaties[i]
}

// tailWeights gives the weight of each year in a risk measure, mean 1. Value at risk sits on a single year; its weights are spread
// evenly over the years whose rank is within one standard error of the quantile's, √(N·p·(1−p)), as its density estimate is.
func tailWeights(losses []float64, m capital.Measure, l sample.Level) []float64 {
	tail := 1 - l.Float()
	if m == capital.TailValueAtRisk {
		return sample.AllocationWeights(losses, func(s float64) float64 { return min(s/tail, 1) })
	}
	n := len(losses)
	spread := int(math.Ceil(math.Sqrt(float64(n) * tail * (1 - tail))))
	sorted := slices.Clone(losses)
	slices.Sort(sorted)
	rank := l.Rank(n)
	low, high := sorted[max(rank-spread, 1)-1], sorted[min(rank+spread, n)-1]
	weights := make([]float64, n)
	count := 0
	for y, x := range losses {
		if x >= low && x <= high {
			weights[y] = 1
			count++
		}
	}
	for y := range weights {
		weights[y] *= float64(n) / float64(count)
	}
	return weights
}

// resultErrors fills the errors of the net result.
func (a *Appraiser) resultErrors(result *NetResult, losses []float64, items []item, flows []flow) {
	mean := slices.Clone(losses)
	for i, it := range items {
		addScaled(mean, it.terms.Placed()*(1+it.priced.reinstated), flows[i].premium)
		addScaled(mean, -it.terms.Placed(), flows[i].commission)
	}
	result.Mean.StandardError = sample.InfluenceError(mean)
	for _, q := range []struct {
		figure *Estimate
		level  sample.Level
	}{{&result.OneIn10, oneIn10}, {&result.OneIn200, oneIn200}} {
		phi := sample.VaRInfluence(losses, q.level, nil)
		var weights []float64
		for i, it := range items {
			f, slope := flows[i], 1.0
			if f.premium != nil && f.reinstated != nil {
				if weights == nil {
					weights = tailWeights(losses, capital.ValueAtRisk, q.level)
				}
				slope += meanProduct(weights, f.reinstated)
			}
			addScaled(phi, it.terms.Placed()*slope, f.premium)
			addScaled(phi, -it.terms.Placed(), f.commission)
		}
		q.figure.StandardError = sample.InfluenceError(phi)
	}
}

// reliefs fills each treaty's last-in relief: driving capital without it less driving capital with the whole programme.
func (a *Appraiser) reliefs(result *Appraisal, driving []float64, known map[*priced]flow, w *workspace) error {
	for i := range result.Treaties {
		figure := &result.Treaties[i]
		if figure.Terms.Placed() == 0 {
			continue
		}
		others, _, err := a.positionOf(without(result.Programme, figure.Terms.Name), w)
		if err != nil {
			return err
		}
		all := a.requirements(others, w)
		driver := a.driving(all)
		figure.Relief.Value = all[driver].amount - result.Driving.Net.Value
		others = a.own(others)
		flows := a.flows(others.items, known, w)
		phi := a.rules[driver].moves(others, all[driver], flows).influence(flows)
		addScaled(phi, -1, driving)
		figure.Relief.StandardError = sample.InfluenceError(phi)
	}
	return nil
}

// without gives the programme less one treaty; what came after it no longer does.
func without(p treaty.Programme, name string) treaty.Programme {
	rest := treaty.Programme{Name: p.Name + " without " + name}
	for _, t := range p.Treaties {
		if t.Name == name {
			continue
		}
		if slices.Contains(t.After, name) {
			t.After = slices.DeleteFunc(slices.Clone(t.After), func(n string) bool { return n == name })
		}
		rest.Treaties = append(rest.Treaties, t)
	}
	return rest
}

// CompareCost gives the total cost of a less that of b, with the error of the difference on common years. Both must have been
// appraised with detail by the same appraiser.
func CompareCost(a, b Appraisal) Estimate {
	difference := slices.Clone(a.CostInfluence)
	addScaled(difference, -1, b.CostInfluence)
	return Estimate{a.TotalCost.Value - b.TotalCost.Value, sample.InfluenceError(difference)}
}
