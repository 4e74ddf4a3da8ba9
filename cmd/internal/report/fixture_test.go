package report

import (
	"math"

	"cedewright/cmd/internal/study"
	"cedewright/market"
	"cedewright/optimize"
	"cedewright/portfolio/capital"
	"cedewright/portfolio/sample"
	"cedewright/portfolio/treaty"
)

// The results of an invented insurer, in the sizes that a real one has; no figure here was computed by the program.

func est(value, err float64) optimize.Estimate {
	return optimize.Estimate{Value: value, StandardError: err}
}

// sketch is a programme whose sums the fixture adds up.
type sketch struct {
	name             string
	treaties         []optimize.TreatyFigure
	net, tail        optimize.Estimate // required capital under the two standards
	oneIn10, sd      float64
	grossNet, grossT float64
}

const (
	grossOneYear, grossTail = 368e6, 549e6
	ownFunds                = 520e6
)

func (s sketch) appraisal() optimize.Appraisal {
	a := optimize.Appraisal{Programme: treaty.Programme{Name: s.name}, Treaties: s.treaties}
	add := func(to *optimize.Estimate, e optimize.Estimate) {
		*to = est(to.Value+e.Value, math.Hypot(to.StandardError, e.StandardError))
	}
	for _, f := range s.treaties {
		a.Programme.Treaties = append(a.Programme.Treaties, f.Terms)
		add(&a.CededPremium, f.Premium)
		add(&a.ReinstatementPremium, f.ReinstatementPremium)
		add(&a.ExpectedRecoveries, f.ExpectedRecovery)
		add(&a.CededMargin, f.Margin)
		a.Commission.Value += f.Commission
	}
	relief := func(gross float64, net optimize.Estimate) optimize.Estimate {
		if len(s.treaties) == 0 {
			return optimize.Estimate{}
		}
		return est(gross-net.Value, 0.8*net.StandardError)
	}
	a.Capital = []optimize.CapitalFigure{
		{Standard: "one-year", Gross: est(grossOneYear, 11e6), Net: s.net, Relief: relief(grossOneYear, s.net)},
		{Standard: "tail", Gross: est(grossTail, 11e6), Net: s.tail, Relief: relief(grossTail, s.tail), Binding: true},
	}
	a.Driving = a.Capital[0]
	a.OwnFundsRatio = []optimize.Estimate{est(ownFunds/s.net.Value, 0.04), est(ownFunds/s.tail.Value, 0.019)}
	a.CapitalCost = est(0.09*s.net.Value, 0.09*s.net.StandardError)
	a.TotalCost = est(a.CededMargin.Value+a.CapitalCost.Value, 0.6e6)
	if r := a.Driving.Relief.Value; r > 0 {
		a.Rent, a.RentDefined = est(a.CededMargin.Value/r, 0.005), true
	}
	a.MarginPriceError, a.CostPriceError = 0.031*a.CededMargin.Value, 0.033*a.CededMargin.Value
	a.NetResult = optimize.NetResult{Mean: est(81.2e6-a.CededMargin.Value, 0.3e6), StandardDeviation: s.sd, OneIn10: est(s.oneIn10, 0.7e6), OneIn200: est(-s.net.Value, s.net.StandardError)}
	return a
}

// layer sketches an excess treaty as placed in full on windstorm, or on what else is said.
func layer(name string, kind treaty.Kind, retention, limit, share, premium, recovery, attaches, exhausts, relief float64) optimize.TreatyFigure {
	t := treaty.Treaty{Name: name, Kind: kind, Classes: []string{"household", "commercial"}, Perils: []string{"windstorm"}, Retention: retention, Limit: limit, Share: share, Curve: "property"}
	switch kind {
	case treaty.EventExcess:
		t.Reinstatements = []float64{1}
	case treaty.AggregateExcess:
		t.Classes, t.Perils, t.Curve = []string{"liability"}, nil, "casualty"
	}
	reinstated := 0.0
	if t.Reinstatements != nil {
		reinstated = 0.04 * premium
	}
	return optimize.TreatyFigure{
		Terms: t, Premium: est(premium, premium/60), BasePremium: premium / share, RateOnLine: premium / share / limit, ReinstatementPremium: est(reinstated, reinstated/50),
		ExpectedRecovery: est(recovery, recovery/40), Margin: est(premium+reinstated-recovery, (premium-recovery)/50), Relief: est(relief, 3e6),
		AttachmentProbability: est(attaches, math.Sqrt(attaches/1e5)), ExhaustionProbability: est(exhausts, math.Sqrt(exhausts/1e5)), PricedBy: "curve " + t.Curve, PriceError: 0.03 * premium, Reliance: relianceOf(t, exhausts),
	}
}

func relianceOf(t treaty.Treaty, exhausts float64) market.Reliance {
	switch {
	case t.Kind == treaty.AggregateExcess:
		return market.Assumed
	case exhausts < 0.0015:
		return market.Extrapolated
	}
	return market.Interpolated
}

func share(name string, cession, premium, commission, recovery float64) optimize.TreatyFigure {
	return optimize.TreatyFigure{
		Terms:   treaty.Treaty{Name: name, Kind: treaty.QuotaShare, Classes: []string{"motor"}, Cession: cession, Commission: treaty.Some(commission)},
		Premium: est(premium, 0), Commission: commission * premium, CommissionRate: commission, ExpectedRecovery: est(recovery, 9e3),
		Margin: est(premium*(1-commission)-recovery, 9e3), Relief: est(-1.2e6, 0.6e6), PricedBy: "commission",
	}
}

func marramProgrammes() (none, expiring, higher, best optimize.Appraisal) {
	none = sketch{name: "no cover", net: est(grossOneYear, 11e6), tail: est(grossTail, 11e6), oneIn10: -3.8e6, sd: 91.68e6}.appraisal()
	expiring = sketch{name: "expiring", net: est(309e6, 7e6), tail: est(458e6, 10e6), oneIn10: 1.2e6, sd: 75.39e6, treaties: []optimize.TreatyFigure{
		share("motor share", 0.2, 51e6, 0.29, 34.826e6),
		layer("wind 1", treaty.EventExcess, 40e6, 50e6, 1, 4.63e6, 2.25e6, 1/13.3, 1/37.3, 5e6),
		layer("wind 2", treaty.EventExcess, 90e6, 90e6, 1, 3.97e6, 1.52e6, 1/37.3, 1/94.6, 11e6),
		layer("wind 3", treaty.EventExcess, 180e6, 120e6, 1, 2.56e6, 0.88e6, 1/94.6, 1/204.0, 21e6),
		layer("liability stop", treaty.AggregateExcess, 80e6, 40e6, 1, 4.59e6, 2.7e6, 1/7.9, 1/26.9, 11e6),
	}}.appraisal()
	higher = sketch{name: "broker's proposal", net: est(296e6, 7e6), tail: est(441e6, 10e6), oneIn10: -1.1e6, sd: 77.9e6, treaties: []optimize.TreatyFigure{
		layer("wind low", treaty.EventExcess, 60e6, 90e6, 0.9, 4.9e6, 2.1e6, 1/22.0, 1/71.0, 9e6),
		layer("wind top", treaty.EventExcess, 150e6, 250e6, 1, 5.2e6, 1.7e6, 1/71.0, 1/330.0, 44e6),
	}}.appraisal()
	best = sketch{name: "best found", net: est(272e6, 6e6), tail: est(424e6, 9e6), oneIn10: -6.5e6, sd: 79.02e6, treaties: []optimize.TreatyFigure{
		layer("liability stop", treaty.AggregateExcess, 140e6, 160e6, 1, 3.31e6, 1.66e6, 1/39.1, 1/243.0, 31e6),
		layer("wind tower 1", treaty.EventExcess, 120e6, 40e6, 0.5, 0.817e6, 0.309e6, 1/53.6, 1/78.9, 6e6),
		layer("wind tower 2", treaty.EventExcess, 160e6, 60e6, 0.5, 0.84e6, 0.303e6, 1/78.9, 1/122.0, 7e6),
		layer("wind tower 3", treaty.EventExcess, 220e6, 80e6, 0.5, 0.75e6, 0.253e6, 1/122.0, 1/204.0, 7e6),
		layer("wind tower 4", treaty.EventExcess, 300e6, 300e6, 1, 2.96e6, 0.84e6, 1/204.0, 1/649.0, 48e6),
	}}.appraisal()
	return none, expiring, higher, best
}

func marramHead() study.Head {
	return study.Head{
		Title: "Marram Coast Mutual, renewal 2027", Currency: "EUR", Years: 100000, Seed: 20270101,
		Notes:    []string{"Motor is quoted by one reinsurer only."},
		Warnings: []string{"Market curve property: prices below a probability of 0.15 % lie beyond every quote."},
		Inputs: []study.Input{
			{Path: "marram.yaml", SHA256: "9f86d081884c7d659a2feaa0c55ad015a3bf4f1b2b0b822cd15d6c15b0f00a08"},
			{Path: "quotes.csv", SHA256: "60303ae22b998861bce3b28f33eec1be758a213c86c93c076dbe9f558c11c752", Rows: 8},
		},
	}
}

func marramStandards() []capital.Standard {
	level := func(text string) sample.Level {
		l, err := sample.ParseLevel(text)
		if err != nil {
			panic(err)
		}
		return l
	}
	return []capital.Standard{
		capital.Single("one-year", capital.ValueAtRisk, level("99.5%"), capital.Result, "Directive 2009/138/EC, Art. 101(3)"),
		capital.Single("tail", capital.TailValueAtRisk, level("99%"), capital.Deviation, "set in the study"),
	}
}

func marramAppraised() study.Appraised {
	none, expiring, higher, _ := marramProgrammes()
	return study.Appraised{
		Head: marramHead(), CostOfCapital: 0.09, OwnFunds: ownFunds, Standards: marramStandards(), Drive: []string{"one-year"},
		Gross:      study.GrossFigures{Premium: 900e6, Expenses: 265e6, Loss: est(553.8e6, 0.3e6), Capital: none.Capital, Result: none.NetResult},
		Programmes: []optimize.Appraisal{none, expiring, higher},
		Differences: []study.Difference{
			{Programme: "no cover", Against: "expiring", TotalCost: est(none.TotalCost.Value-expiring.TotalCost.Value, 0.6e6)},
			{Programme: "broker's proposal", Against: "expiring", TotalCost: est(higher.TotalCost.Value-expiring.TotalCost.Value, 0.5e6), Prices: 0.2e6},
		},
	}
}

func marramSearched() study.Searched {
	none, expiring, _, best := marramProgrammes()
	s := study.Searched{Appraised: marramAppraised(), Start: expiring, NoCover: none, Curves: marramCurves(), Space: "one tower cut by the search and 2 treaties varied, about 6.9e+16 programmes"}
	s.Programmes = append(s.Programmes, best)
	s.Differences = append(s.Differences, study.Difference{Programme: "best found", Against: "expiring", TotalCost: est(best.TotalCost.Value-expiring.TotalCost.Value, 0.3e6)})
	s.Result = optimize.Result{Best: best, Feasible: true, Evaluations: 12951, Generations: 136, Seed: 1, Status: optimize.Settled, Polished: true, SpaceSize: 6.9e16}
	s.Bound = optimize.Bound{Known: true, TotalCost: 21.4e6, Certified: true, Reason: "no contract priced at the curves or above can come"}
	for i := range 14 {
		scale := 0.3 + 0.07*float64(i)
		p := sketch{name: "frontier", net: est(grossOneYear-96e6*math.Sqrt(scale), 7e6), tail: est(grossTail-120e6*scale, 9e6), oneIn10: -5e6, sd: 80e6, treaties: []optimize.TreatyFigure{
			layer("wind tower 1", treaty.EventExcess, math.Round(30/scale)*10e6, math.Round(30*scale)*10e6, 1, 5.6e6*scale*scale, 1.2e6*scale, 0.005, 0.002, 60e6*scale),
		}}
		s.Result.Frontier = append(s.Result.Frontier, p.appraisal())
	}
	s.Keep = []optimize.Keep{{Measure: "ceded premium", AtMost: treaty.Some(130e6)}, {Measure: "own funds ratio", Standard: "tail", AtLeast: treaty.Some(1.05)}}
	wind := []float64{12e6, 22e6, 34e6, 58e6, 113e6, 187e6, 293e6, 520e6, 734e6}
	liability := []float64{58e6, 71e6, 85e6, 102e6, 150e6, 205e6, 277e6, 400e6, 560e6}
	s.Scales = [][][]float64{{nil, wind, wind, wind, liability}, {liability, wind, wind, wind, wind}}
	s.Curve = study.ExceedanceCurves{
		ReturnPeriods: study.ReturnPeriods, Programmes: []string{"expiring", "best found"},
		Gross: []float64{536e6, 590e6, 639e6, 695e6, 791e6, 882e6, 1003e6, 1205e6, 1432e6},
		Net: [][]float64{
			{495e6, 537e6, 570e6, 611e6, 690e6, 771e6, 874e6, 1040e6, 1195e6}, {535e6, 588e6, 634e6, 684e6, 755e6, 816e6, 897e6, 1045e6, 1168e6},
		},
	}
	return s
}

func marramCurves() []study.CurveFit {
	var quotes []market.FittedQuote
	for i, q := range [][5]float64{ // attachment, exhaustion, expected loss, quoted and fitted rate on line
		{0.25, 0.12, 0.177, 0.312, 0.316}, {0.12, 0.06, 0.0866, 0.173, 0.1728}, {0.06, 0.025, 0.04, 0.0903, 0.0914}, {0.03, 0.011, 0.0189, 0.0513, 0.0506},
		{0.018, 0.006, 0.0109, 0.0314, 0.0309}, {0.008, 0.003, 0.0051, 0.0151, 0.0164}, {0.005, 0.002, 0.00327, 0.0117, 0.0113}, {0.0035, 0.0015, 0.00236, 0.0087, 0.00865},
	} {
		f := market.FittedQuote{
			Quote:  market.Quote{Curve: "property", Name: "row " + string(rune('2'+i)), Attachment: q[0], Exhaustion: q[1], ExpectedLoss: q[2], RateOnLine: q[3], Weight: 1},
			Fitted: q[4], Residual: q[4]/q[3] - 1, LeftOut: q[3] * (1 + 1.6*(q[4]/q[3]-1)), Multiple: q[3] / q[2], BelowRange: i == 7,
		}
		quotes = append(quotes, f)
	}
	quotes[3].Weight = 0
	free := &market.Fit{
		Curve: "property", Family: market.FamilyFree, Quotes: quotes, Objective: 0.004, InSample: 0.0257, LeaveOneOut: 0.0407, Pull: 0.3, Toward: market.FamilyWang,
		Distortion: market.Mixture{Supremum: 0.003, Knots: []market.Knot{{Tail: 1, Weight: 0.5}, {Tail: 0.5, Weight: 0.34}, {Tail: 0.2, Weight: 0.12}, {Tail: 0.05, Weight: 0.025}, {Tail: 0.012, Weight: 0.008}, {Tail: 0.003, Weight: 0.004}}},
		LowestTail: 0.0015, HighestTail: 0.25, Warnings: []string{"prices below a probability of 0.15 % lie beyond every quote"},
	}
	wang := &market.Fit{
		Curve: "property", Family: market.FamilyWang, Parameter: 0.3812, StandardError: 0.0061, Distortion: market.Wang{Lambda: 0.3812}, Quotes: quotes, Objective: 0.012,
		InSample: 0.047, LeaveOneOut: math.NaN(), LowestTail: 0.0015, HighestTail: 0.25,
	}
	property := study.CurveFit{
		Curve:  market.Curve{Name: "property", Distortion: free.Distortion, Brokerage: 0.1, MinimumRateOnLine: 0.008, Fit: free},
		Chosen: free, Candidates: []*market.Fit{wang, free}, Recommended: free, Reason: "it prices quotes that it did not see to 4.1 %, the best family (wang) to 4.7 %",
		Consistency: &market.Consistency{
			LeastTotal: []market.Change{{Quote: quotes[1].Quote}, {Quote: quotes[5].Quote, Relative: 0.099, Rate: 0.0166}, {Quote: quotes[6].Quote, Relative: -0.012, Rate: 0.01156}}, Total: 0.111,
			LeastWorst: []market.Change{{Quote: quotes[5].Quote, Relative: 0.044, Rate: 0.0158}}, Worst: 0.044,
		},
		Opened: 0.044,
	}
	for i := range 33 {
		s := 0.0004 * math.Pow(1/0.0004, float64(i)/32)
		g, wide := free.Distortion.At(s), 0.03+0.25*math.Abs(math.Log10(s)+2)/2
		property.BandAt = append(property.BandAt, s)
		property.Resampled = append(property.Resampled, market.Interval{Low: g * (1 - wide/2), High: min(g*(1+wide/2), 1)})
		property.Band = append(property.Band, market.Interval{Low: g * (1 - wide), High: min(g*(1+wide), 1)})
	}
	return []study.CurveFit{
		property,
		{Curve: market.Curve{Name: "casualty", Distortion: market.Wang{Lambda: 0.2354}, Brokerage: 0.1, MinimumRateOnLine: 0.02}},
	}
}

func marramLook() study.Look {
	none, _, _, _ := marramProgrammes()
	class := func(name string, premium, expenses float64, loss optimize.Estimate, sd, ten, twoHundred, events float64) study.ClassLook {
		return study.ClassLook{Name: name, Premium: premium, Expenses: expenses, Loss: loss, SD: sd, OneIn10: ten, OneIn200: twoHundred, Events: events}
	}
	return study.Look{
		Head: marramHead(), Gross: none,
		Classes: []study.ClassLook{
			class("household", 275e6, 0.31, est(164.47e6, 0.14e6), 44.84e6, 199.1e6, 419.3e6, 2.7), class("motor", 255e6, 0.27, est(174.13e6, 0.04e6), 13.83e6, 191.9e6, 218e6, 0.801),
			class("liability", 12_345_678, 0.29, est(63.58e6, 0.14e6), 45.82e6, 85.51e6, 277.1e6, 1.49),
		},
		Total: class("all classes", 900e6, 0.294, est(553.8e6, 0.3e6), 91.68e6, 638.8e6, 1003e6, 11.2),
		Perils: []study.PerilLook{
			{Name: "attritional", Loss: est(460e6, 0.08e6), AnnualOneIn: []float64{460e6, 475e6, 493.9e6, 505e6, 516e6, 524.1e6, 531.4e6, 540e6, 546.1e6}, LargestOneIn: make([]float64, 9)},
			{Name: "windstorm", Events: 1.4, Loss: est(21.24e6, 0.17e6), LargestOneIn: []float64{8e6, 18e6, 31.72e6, 56e6, 113.5e6, 187.6e6, 293e6, 520e6, 733.8e6}, AnnualOneIn: make([]float64, 9), LargestOfBook: 1.497e9},
		},
		Fits: []study.HistoryFit{{Model: "fires", File: "fires.csv", Losses: 2167, Years: 11, Threshold: 10e6, Exceedances: 109, Xi: 0.4969, XiError: 0.1363, Beta: 6.975e6, BetaError: 1.11e6,
			Frequency: "negative binomial, mean 197, size 55.47", LargestLoss: 263.25e6, Extrapolation: "11 years of history stand behind 100,000 simulated ones"}},
	}
}
