package settings

import (
	"fmt"
	"math"

	"cedewright/market"
	"cedewright/optimize"
	"cedewright/portfolio/fault"
	"cedewright/portfolio/loss"
	"cedewright/portfolio/treaty"
)

// Terms gives the treaty that the keys describe. Share is 1 when the study leaves it out.
func (t Treaty) Terms() treaty.Treaty {
	kind, _ := treaty.ParseKind(t.Kind) // checked on loading
	terms := treaty.Treaty{Name: t.Name, Kind: kind, Classes: t.Classes, Perils: t.Perils, After: t.After, Curve: t.Curve}
	if kind != treaty.QuotaShare {
		terms.Share = 1
	}
	set := func(to *float64, from *Money) {
		if from != nil {
			*to = float64(*from)
		}
	}
	set(&terms.Retention, t.Retention)
	set(&terms.AnnualDeductible, t.AnnualDeductible)
	set(&terms.AnnualLimit, t.AnnualLimit)
	set(&terms.EventLimit, t.EventLimit)
	if t.Limit != nil {
		terms.Limit = float64(t.Limit.Money)
		if t.Limit.Unlimited {
			terms.Limit = math.Inf(1)
		}
	}
	if t.Share != nil {
		terms.Share = float64(*t.Share)
	}
	if t.Cession != nil {
		terms.Cession = float64(*t.Cession)
	}
	if t.Commission != nil {
		terms.Commission = treaty.Some(float64(*t.Commission))
	}
	if t.Premium != nil {
		terms.Premium = treaty.Some(float64(*t.Premium))
	}
	terms.Panel = panel(t.Panel)
	if t.Reinstatements != nil {
		terms.Reinstatements = make([]float64, len(t.Reinstatements))
		for i, charge := range t.Reinstatements {
			terms.Reinstatements[i] = float64(charge)
		}
	}
	return terms
}

// Terms gives the programme that the keys describe.
func (p Programme) Terms() treaty.Programme {
	programme := treaty.Programme{Name: p.Name}
	for _, t := range p.Treaties {
		programme.Treaties = append(programme.Treaties, t.Terms())
	}
	return programme
}

// value gives a parameter, or an error that names it when it is missing.
func value[T ~float64 | ~int](family, name string, p *T) (float64, error) {
	if p == nil {
		return 0, fmt.Errorf("the family %s needs the key %s", family, name)
	}
	return float64(*p), nil
}

func pair[A, B ~float64 | ~int](family, nameA string, a *A, nameB string, b *B) (x, y float64, err error) {
	if x, err = value(family, nameA, a); err == nil {
		y, err = value(family, nameB, b)
	}
	return x, y, err
}

// FrequencyFamilies lists the families of frequency; fitted takes the law from a history.
func FrequencyFamilies() []string {
	return []string{"poisson", "negative-binomial", "binomial", "fitted"}
}

// Law gives the frequency that the keys describe; a fitted one has none of its own.
func (f Frequency) Law() (loss.Frequency, error) { return f.law() }

func (f Frequency) law() (loss.Frequency, error) {
	switch f.Family {
	case "poisson":
		mean, err := value(f.Family, "mean", f.Mean)
		if err != nil {
			return nil, err
		}
		return loss.NewPoisson(mean)
	case "negative-binomial":
		mean, ratio, err := pair(f.Family, "mean", f.Mean, "variance_to_mean", f.VarianceToMean)
		if err != nil {
			return nil, err
		}
		return loss.NewNegativeBinomial(mean, ratio)
	case "binomial":
		trials, probability, err := pair(f.Family, "trials", f.Trials, "probability", f.Probability)
		if err != nil {
			return nil, err
		}
		return loss.NewBinomial(int(trials), probability)
	}
	return nil, unknownFamily(f.Family, FrequencyFamilies())
}

func unknownFamily(name string, known []string) error {
	return &fault.Fault{Found: fmt.Sprintf("no family is named %q", name), Allowed: fmt.Sprintf("%q", known), Nearest: fault.Nearest(name, known)}
}

// SeverityFamilies lists the families of severity.
func SeverityFamilies() []string {
	return []string{"lognormal", "pareto", "generalised-pareto", "gamma", "weibull", "exponential"}
}

// Law gives the severity that the keys describe.
func (s Severity) Law() (loss.Severity, error) { return s.law() }

func (s Severity) law() (loss.Severity, error) {
	ceiling := math.Inf(1)
	if s.Ceiling != nil {
		ceiling = float64(*s.Ceiling)
		if s.Family != "pareto" && s.Family != "generalised-pareto" {
			return nil, fmt.Errorf("the family %s takes no ceiling", s.Family)
		}
	}
	switch s.Family {
	case "lognormal":
		if s.Mu != nil || s.Sigma != nil {
			mu, sigma, err := pair(s.Family, "mu", s.Mu, "sigma", s.Sigma)
			if err != nil {
				return nil, err
			}
			return loss.NewLogNormal(mu, sigma)
		}
		mean, cv, err := pair(s.Family, "mean", s.Mean, "cv", s.CV)
		if err != nil {
			return nil, err
		}
		return loss.NewLogNormalOf(mean, cv)
	case "gamma":
		if s.Shape != nil || s.Scale != nil {
			shape, scale, err := pair(s.Family, "shape", s.Shape, "scale", s.Scale)
			if err != nil {
				return nil, err
			}
			return loss.NewGamma(shape, scale)
		}
		mean, cv, err := pair(s.Family, "mean", s.Mean, "cv", s.CV)
		if err != nil {
			return nil, err
		}
		return loss.NewGammaOf(mean, cv)
	case "weibull":
		shape, scale, err := pair(s.Family, "shape", s.Shape, "scale", s.Scale)
		if err != nil {
			return nil, err
		}
		return loss.NewWeibull(shape, scale)
	case "exponential":
		mean, err := value(s.Family, "mean", s.Mean)
		if err != nil {
			return nil, err
		}
		return loss.NewExponential(mean)
	case "pareto":
		threshold, alpha, err := pair(s.Family, "threshold", s.Threshold, "alpha", s.Alpha)
		if err != nil {
			return nil, err
		}
		return loss.NewPareto(threshold, alpha, ceiling)
	case "generalised-pareto":
		xi, beta, err := pair(s.Family, "xi", s.Xi, "beta", s.Beta)
		if err != nil {
			return nil, err
		}
		threshold, err := value(s.Family, "threshold", s.Threshold)
		if err != nil {
			return nil, err
		}
		return loss.NewGeneralisedPareto(threshold, xi, beta, ceiling)
	}
	return nil, unknownFamily(s.Family, SeverityFamilies())
}

// Matrix gives the correlation matrix of the attritional losses, in their order.
func (a Attritional) Matrix() [][]float64 {
	n := len(a.Losses)
	m := make([][]float64, n)
	for i := range m {
		m[i] = make([]float64, n)
		for j := range m[i] {
			if a.Correlation != nil {
				m[i][j] = float64(*a.Correlation)
			}
			if i == j {
				m[i][j] = 1
			}
		}
	}
	for _, c := range a.Correlations {
		for i, x := range a.Losses {
			for j, y := range a.Losses {
				if i != j && (x.Class == c.Between[0] && y.Class == c.Between[1] || x.Class == c.Between[1] && y.Class == c.Between[0]) {
					m[i][j] = float64(c.Correlation)
				}
			}
		}
	}
	return m
}

func (r *MoneyRange) values() *optimize.Range {
	if r == nil {
		return nil
	}
	v := &optimize.Range{From: float64(r.From), To: float64(r.To)}
	if r.Step != nil {
		v.Step = float64(*r.Step)
	}
	return v
}

func (r *FractionRange) values() *optimize.Range {
	if r == nil {
		return nil
	}
	v := &optimize.Range{From: float64(r.From), To: float64(r.To)}
	if r.Step != nil {
		v.Step = float64(*r.Step)
	}
	return v
}

func (r *CountRange) values() *optimize.ReinstatementRange {
	if r == nil {
		return nil
	}
	return &optimize.ReinstatementRange{From: int(r.From), To: int(r.To), Charge: float64(r.Charge)}
}

// Space gives the decision space that the search section describes, for a study that has one, and checks it: every fault with its place.
func (s Study) Space() (optimize.Space, error) {
	space := optimize.Space{Start: treaty.Programme{Name: NoCover}}
	for _, p := range s.Programmes {
		if p.Name == s.Search.From || s.Search.From == "" && space.Start.Name == NoCover {
			space.Start = s.Terms(p)
		}
	}
	for _, v := range s.Search.Vary {
		space.Vary = append(space.Vary, optimize.Vary{
			Treaty: v.Treaty, Retention: v.Retention.values(), Limit: v.Limit.values(), Share: v.Share.values(), Cession: v.Cession.values(),
			AnnualDeductible: v.AnnualDeductible.values(), Reinstatements: v.Reinstatements.values(), Optional: v.Optional,
		})
	}
	for _, t := range s.Search.towers() {
		tower := t.tower.space()
		tower.Template.Panel = s.panelOr(t.tower.Panel)
		space.Towers = append(space.Towers, tower)
	}
	for _, k := range s.Search.Keep {
		keep := optimize.Keep{Measure: k.Measure, Standard: k.Standard}
		if k.AtMost != nil {
			keep.AtMost = treaty.Some(float64(*k.AtMost))
		}
		if k.AtLeast != nil {
			keep.AtLeast = treaty.Some(float64(*k.AtLeast))
		}
		space.Keep = append(space.Keep, keep)
	}
	var faults fault.List
	for _, f := range fault.All(space.Validate()) {
		if f.Key != "search" {
			f.Key = "search." + f.Key
		}
		if s.Search.Tower != nil && len(f.Key) > len("search.towers[0]") && f.Key[:len("search.towers[0]")] == "search.towers[0]" {
			f.Key = "search.tower" + f.Key[len("search.towers[0]"):]
		}
		faults.Add(s.At(*f))
	}
	return space, faults.Err()
}

func (t Tower) space() optimize.Tower {
	kind, err := treaty.ParseKind(t.Kind)
	if err != nil {
		kind = treaty.EventExcess
	}
	tower := optimize.Tower{
		Name: t.Name, Replaces: t.Replaces, Layers: int(t.Layers), Step: float64(t.Step),
		Template:       treaty.Treaty{Kind: kind, Classes: t.Classes, Perils: t.Perils, After: t.After, Curve: t.Curve, Share: 1},
		Retention:      *t.Retention.values(),
		Top:            *t.Top.values(),
		Share:          optimize.Range{From: 1, To: 1},
		Reinstatements: t.Reinstatements.values(),
	}
	tower.Retention.Step, tower.Top.Step = tower.Step, tower.Step
	if t.Share != nil {
		tower.Share = *t.Share.values()
	}
	if t.AnnualDeductible != nil {
		tower.Template.AnnualDeductible = float64(*t.AnnualDeductible)
	}
	if t.EventLimit != nil {
		tower.Template.EventLimit = float64(*t.EventLimit)
	}
	return tower
}

// Turn gives the scenario that the keys describe.
func (s Scenario) Turn() market.Scenario {
	turn := market.Scenario{Name: s.Name, Curves: s.Curves}
	for _, f := range []struct {
		to   *float64
		from *Fraction
	}{{&turn.RateChange, s.RateChange}, {&turn.From, s.From}, {&turn.To, s.To}, {&turn.MinimumRateOnLine, s.MinimumRateOnLine}} {
		if f.from != nil {
			*f.to = float64(*f.from)
		}
	}
	if s.From != nil && s.To == nil {
		turn.To = 1
	}
	if s.CapacityTo != nil {
		turn.CapacityTo = s.CapacityTo.ReturnPeriod()
	}
	return turn
}

// Quote gives what the keys say of a quote as it came in, its place and recoveries aside.
func (q OwnQuote) Quote() market.Quote {
	quote := market.Quote{Curve: q.Curve, Name: q.Name, Weight: 1}
	for _, f := range []struct {
		to   *float64
		from *Fraction
	}{{&quote.RateOnLine, q.RateOnLine}, {&quote.Bid, q.Bid}, {&quote.Offer, q.Offer}, {&quote.RateChange, q.RateChange}} {
		if f.from != nil {
			*f.to = float64(*f.from)
		}
	}
	if q.Commission != nil {
		quote.RateOnLine = 1 - float64(*q.Commission)
	}
	if q.Weight != nil {
		quote.Weight = float64(*q.Weight)
	}
	if q.Date != nil {
		quote.Date = q.Date.Time
	}
	quote.BeforeBrokerage = q.Brokerage == "excluded"
	quote.Following = q.Line == "following"
	return quote
}
