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

// detail adds standard errors, treaties' reliefs and the influence of the total cost. w.loss holds the net losses of the programme.
func (a *Appraiser) detail(result *Appraisal, items []item, t totals, w *workspace) error {
	known := map[*priced]flow{}
	flows := a.flows(items, known, w)
	losses := slices.Clone(w.loss)

	margin := a.moneyErrors(result, items, flows)
	var driving []float64 // influence of required capital under the first standard
	for i, s := range a.c.Standards {
		phi := a.capitalInfluence(s, losses, items, flows, result.Capital[i].Net.Value)
		if i == 0 {
			driving = phi
		}
		figure := &result.Capital[i]
		figure.Gross.StandardError = a.gross[i].figure.StandardError
		figure.Net.StandardError = sample.InfluenceError(phi)
		relief := slices.Clone(a.gross[i].influence)
		addScaled(relief, -1, phi)
		figure.Relief.StandardError = sample.InfluenceError(relief)
		if i < len(result.OwnFundsRatio) && figure.Net.Value > 0 {
			ratio := &result.OwnFundsRatio[i]
			ratio.StandardError = ratio.Value * figure.Net.StandardError / figure.Net.Value
		}
		if i == 0 && result.RentDefined {
			addScaled(relief, -1/result.Rent.Value, margin)
			result.Rent.StandardError = math.Abs(result.Rent.Value/figure.Relief.Value) * sample.InfluenceError(relief)
			if result.Rent.Value == 0 {
				result.Rent.StandardError = sample.InfluenceError(margin) / figure.Relief.Value
			}
		}
	}
	result.CapitalCost.StandardError = a.c.CostOfCapital * result.Capital[0].Net.StandardError
	result.CostInfluence = margin
	addScaled(result.CostInfluence, a.c.CostOfCapital, driving)
	result.TotalCost.StandardError = sample.InfluenceError(result.CostInfluence)
	a.resultErrors(&result.NetResult, losses, items, flows)
	a.priceErrors(result, items, flows, losses)
	return a.reliefs(result, driving, known, w)
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

// capitalInfluence is the influence of required capital: through the net losses, and through prices that follow the simulated years.
func (a *Appraiser) capitalInfluence(s capital.Standard, losses []float64, items []item, flows []flow, amount float64) []float64 {
	phi := s.Influence(losses, nil)
	if amount == 0 {
		return phi
	}
	var weights []float64
	for i, it := range items {
		f, placed := flows[i], it.terms.Placed()
		if f.premium != nil {
			if f.reinstated != nil && weights == nil {
				weights = tailWeights(losses, s.Measure, s.Level)
			}
			addScaled(phi, placed*capitalSlope(s, amount, weights, f, it.priced), f.premium)
		}
		if f.commission != nil && s.Basis == capital.Result {
			addScaled(phi, -placed, f.commission)
		}
	}
	return phi
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

// reliefs fills each treaty's last-in relief under the first standard: capital without it less capital with the whole programme.
func (a *Appraiser) reliefs(result *Appraisal, driving []float64, known map[*priced]flow, w *workspace) error {
	s := a.c.Standards[0]
	for i := range result.Treaties {
		figure := &result.Treaties[i]
		if figure.Terms.Placed() == 0 {
			continue
		}
		others, err := a.items(without(result.Programme, figure.Terms.Name), w)
		if err != nil {
			return err
		}
		a.netLosses(others, w)
		copy(w.sorted, w.loss)
		amount := s.Amount(w.sorted, a.meanNet(a.totals(others)))
		figure.Relief.Value = amount - result.Capital[0].Net.Value
		losses := slices.Clone(w.loss)
		phi := a.capitalInfluence(s, losses, others, a.flows(others, known, w), amount)
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
