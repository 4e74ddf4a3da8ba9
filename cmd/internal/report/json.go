package report

import (
	"io"

	"cedewright/cmd/internal/study"
	"cedewright/market"
	"cedewright/optimize"
	"cedewright/portfolio/treaty"
)

// The names of these fields are a contract: scripts rely on them. Fields may be added, not renamed. Money is in the study's currency,
// amounts per year, fractions and probabilities of 1; "standard_errors" mirrors the figures beside it. A figure without a value is null.

// AppraisedJSON writes the answer of appraise.
func AppraisedJSON(w io.Writer, a study.Appraised) error {
	return write(w, append(head(a.Head), appraised(a)...))
}

// SearchedJSON writes the answer of search.
func SearchedJSON(w io.Writer, s study.Searched, run []Setting) error {
	r := s.Result
	o := append(head(s.Head), object{
		{"status", r.Status.String()}, {"feasible", r.Feasible}, {"polished", r.Polished}, {"seed", r.Seed}, {"evaluations", r.Evaluations},
		{"generations", r.Generations}, {"space", s.Space}, {"space_size", number(r.SpaceSize)}, {"keep", objects(s.Keep, keepJSON)},
		{"shortfalls", objects(r.Shortfalls, func(f optimize.Shortfall) object { return append(keepJSON(f.Keep), field{"value", number(f.Value)}) })},
		{"settings", objects(run, func(s Setting) object { return object{{"name", s.Name}, {"value", s.Value}, {"origin", s.Origin}} })},
		{"recommendation", Recommendation(s)}, {"bound", bound(s)}, {"best", programme(r.Best)},
	}...)
	o = append(o, appraised(s.Appraised)...)
	o = append(o, field{"frontier", objects(r.Frontier, programme)}, field{"exceedance", exceedance(s.Curve)})
	return write(w, o)
}

// bound gives the total cost that nothing can come below: that of the best when every programme was appraised, else that of thin layers if one is known and
// certified.
func bound(s study.Searched) object {
	if s.Result.Status == optimize.Proven && s.Result.Feasible {
		return object{{"total_cost", number(s.Result.Best.TotalCost.Value)}, {"certified", true}, {"reason", s.Result.Status.String()}}
	}
	least, certified := none, s.Bound.Known && s.Bound.Certified
	if certified {
		least = number(s.Bound.TotalCost)
	}
	return object{{"total_cost", least}, {"certified", certified}, {"reason", s.Bound.Reason}}
}

func keepJSON(k optimize.Keep) object {
	o := object{{"measure", k.Measure}}
	if k.Standard != "" {
		o = append(o, field{"standard", k.Standard})
	}
	if k.AtMost.Given {
		o = append(o, field{"at_most", number(k.AtMost.Value)})
	}
	if k.AtLeast.Given {
		o = append(o, field{"at_least", number(k.AtLeast.Value)})
	}
	return o
}

func exceedance(e study.ExceedanceCurves) object {
	net := make([]object, len(e.Net))
	for i, losses := range e.Net {
		net[i] = object{{"programme", e.Programmes[i]}, {"annual_loss", numbers(losses)}}
	}
	return object{{"return_periods", numbers(e.ReturnPeriods)}, {"gross", numbers(e.Gross)}, {"net", net}}
}

func appraised(a study.Appraised) object {
	return object{
		{"cost_of_capital", costOfCapital(a)}, {"own_funds", number(a.OwnFunds)},
		{"gross", object{
			{"premium", number(a.Gross.Premium)}, {"expenses", number(a.Gross.Expenses)}, {"expected_loss", number(a.Gross.Loss.Value)},
			{"standard_errors", object{{"expected_loss", number(a.Gross.Loss.StandardError)}}},
			{"capital", objects(a.Gross.Capital, capitalJSON)}, {"net_result", resultJSON(a.Gross.Result)},
		}},
		{"programmes", objects(a.Programmes, programme)},
		{"prices", pricesJSON(a)},
		{"allocations", allocationsJSON(a)},
		{"differences", objects(a.Differences, func(d study.Difference) object {
			return object{{"programme", d.Programme}, {"against", d.Against}, {"total_cost", number(d.TotalCost.Value)}, {"standard_error", number(d.TotalCost.StandardError)}, {"error_from_quotes", number(d.Prices)}}
		})},
		{"standards", standardsJSON(a)}, {"drive", texts(a.Drive)}, {"owners", ownersJSON(a)}, {"rest", restJSON(a.Rest)}, {"security", securityJSON(a)},
	}
}

func resultJSON(r optimize.NetResult) object {
	return object{
		{"mean", number(r.Mean.Value)}, {"sd", number(r.StandardDeviation)}, {"one_in_10", number(r.OneIn10.Value)}, {"one_in_200", number(r.OneIn200.Value)},
		{"standard_errors", object{{"mean", number(r.Mean.StandardError)}, {"one_in_10", number(r.OneIn10.StandardError)}, {"one_in_200", number(r.OneIn200.StandardError)}}},
	}
}

// programme writes an appraisal.
func programme(a optimize.Appraisal) object {
	rent, rentError := none, none
	if a.RentDefined {
		rent, rentError = number(a.Rent.Value), number(a.Rent.StandardError)
	}
	ratios := make([]object, len(a.OwnFundsRatio))
	for i, r := range a.OwnFundsRatio {
		ratios[i] = append(object{{"standard", a.Capital[i].Standard}}, estimate(r)...)
	}
	return object{
		{"name", a.Programme.Name}, {"ceded_premium", number(a.CededPremium.Value)}, {"expected_recoveries", number(a.ExpectedRecoveries.Value)},
		{"reinstatement_premium", number(a.ReinstatementPremium.Value)}, {"commission", number(a.Commission.Value)},
		{"ceded_margin", number(a.CededMargin.Value)}, {"expected_unpaid", number(a.ExpectedUnpaid.Value)},
		{"capital", objects(a.Capital, capitalJSON)}, {"driving", capitalJSON(a.Driving)}, {"capital_cost", number(a.CapitalCost.Value)},
		{"capital_cost_rate", number(a.CapitalCost.Value / a.Driving.Net.Value)},
		{"total_cost", number(a.TotalCost.Value)}, {"rent", rent}, {"own_funds_ratio", ratios}, {"net_result", resultJSON(a.NetResult)},
		{"standard_errors", object{
			{"ceded_premium", number(a.CededPremium.StandardError)}, {"expected_recoveries", number(a.ExpectedRecoveries.StandardError)},
			{"reinstatement_premium", number(a.ReinstatementPremium.StandardError)}, {"commission", number(a.Commission.StandardError)},
			{"ceded_margin", number(a.CededMargin.StandardError)}, {"expected_unpaid", number(a.ExpectedUnpaid.StandardError)}, {"capital_cost", number(a.CapitalCost.StandardError)},
			{"total_cost", number(a.TotalCost.StandardError)}, {"rent", rentError},
		}},
		{"errors_from_quotes", object{{"ceded_margin", number(a.MarginPriceError)}, {"total_cost", number(a.CostPriceError)}}},
		{"treaties", objects(a.Treaties, treatyJSON)},
	}
}

func treatyJSON(f optimize.TreatyFigure) object {
	t := f.Terms
	o := object{{"name", t.Name}, {"kind", t.Kind.String()}, {"classes", texts(t.Classes)}, {"perils", texts(t.Perils)}, {"after", texts(t.After)}}
	if t.Kind == treaty.QuotaShare {
		o = append(o, field{"cession", number(t.Cession)}, field{"commission_rate", number(f.CommissionRate)})
	} else {
		o = append(o, field{"retention", number(t.Retention)}, field{"limit", number(t.Limit)}, field{"share", number(t.Share)})
	}
	if t.Kind == treaty.EventExcess || t.Kind == treaty.RiskExcess {
		o = append(o, field{"annual_deductible", number(t.AnnualDeductible)}, field{"annual_limit", number(t.AnnualRecoveryLimit())})
		if t.Reinstatements != nil {
			o = append(o, field{"reinstatements", numbers(t.Reinstatements)})
		}
	}
	if t.Kind == treaty.RiskExcess && t.EventLimit > 0 {
		o = append(o, field{"event_limit", number(t.EventLimit)})
	}
	reliance := any(nil)
	if f.Reliance != 0 {
		reliance = f.Reliance.String()
	}
	return append(o, object{
		{"priced_by", f.PricedBy}, {"reliance", reliance}, {"error_from_quotes", number(f.PriceError)}, {"premium", number(f.Premium.Value)}, {"base_premium", number(f.BasePremium)}, {"rate_on_line", number(f.RateOnLine)},
		{"reinstatement_premium", number(f.ReinstatementPremium.Value)}, {"commission", number(f.Commission)}, {"expected_recovery", number(f.ExpectedRecovery.Value)},
		{"attachment_probability", number(f.AttachmentProbability.Value)}, {"exhaustion_probability", number(f.ExhaustionProbability.Value)},
		{"margin", number(f.Margin.Value)}, {"relief", number(f.Relief.Value)}, {"expected_unpaid", number(f.ExpectedUnpaid.Value)},
		{"panel", objects(t.Panel, func(l treaty.Line) object {
			return object{{"reinsurer", l.Reinsurer}, {"share", number(l.Share)}, {"collateral", number(l.Collateral)}}
		})},
		{"standard_errors", object{
			{"premium", number(f.Premium.StandardError)}, {"reinstatement_premium", number(f.ReinstatementPremium.StandardError)},
			{"expected_recovery", number(f.ExpectedRecovery.StandardError)}, {"attachment_probability", number(f.AttachmentProbability.StandardError)},
			{"exhaustion_probability", number(f.ExhaustionProbability.StandardError)}, {"margin", number(f.Margin.StandardError)}, {"relief", number(f.Relief.StandardError)},
			{"expected_unpaid", number(f.ExpectedUnpaid.StandardError)},
		}},
	}...)
}

// LookJSON writes the answer of look.
func LookJSON(w io.Writer, l study.Look) error {
	class := func(c study.ClassLook) object {
		return object{
			{"name", c.Name}, {"premium", number(c.Premium)}, {"expenses", number(c.Expenses)}, {"expected_loss", estimate(c.Loss)}, {"sd", number(c.SD)},
			{"one_in_10", number(c.OneIn10)}, {"one_in_200", number(c.OneIn200)}, {"events", number(c.Events)},
		}
	}
	peril := func(p study.PerilLook) object {
		return object{
			{"name", p.Name}, {"events", number(p.Events)}, {"expected_loss", estimate(p.Loss)}, {"return_periods", numbers(study.ReturnPeriods)},
			{"largest_event", numbers(p.LargestOneIn)}, {"annual_loss", numbers(p.AnnualOneIn)}, {"largest_simulated", number(p.LargestOfBook)},
		}
	}
	history := func(f study.HistoryFit) object {
		return object{
			{"model", f.Model}, {"file", f.File}, {"losses", f.Losses}, {"years", f.Years}, {"threshold", number(f.Threshold)}, {"exceedances", f.Exceedances},
			{"xi", number(f.Xi)}, {"beta", number(f.Beta)}, {"standard_errors", object{{"xi", number(f.XiError)}, {"beta", number(f.BetaError)}}},
			{"frequency", f.Frequency}, {"largest_loss", number(f.LargestLoss)}, {"extrapolation", f.Extrapolation},
		}
	}
	return write(w, append(head(l.Head), object{
		{"classes", objects(l.Classes, class)}, {"total", class(l.Total)}, {"perils", objects(l.Perils, peril)}, {"fits", objects(l.Fits, history)},
		{"gross", object{{"capital", objects(l.Gross.Capital, capitalJSON)}, {"net_result", resultJSON(l.Gross.NetResult)}}},
	}...))
}

// FittedJSON writes the answer of fit.
func FittedJSON(w io.Writer, f study.Fitted) error {
	return write(w, append(head(f.Head), field{"curves", objects(f.Curves, curveJSON)}))
}

func curveJSON(c study.CurveFit) object {
	o := object{
		{"name", c.Curve.Name}, {"distortion", c.Curve.Distortion.String()}, {"brokerage", number(c.Curve.Brokerage)},
		{"minimum_rate_on_line", number(c.Curve.MinimumRateOnLine)},
	}
	if c.Chosen != nil {
		o = append(o, field{"chosen", fitJSON(c.Chosen)})
	}
	if c.Recommended != nil {
		o = append(o, field{"recommended", c.Recommended.Distortion.String()}, field{"reason", c.Reason})
		if c.Consistency != nil {
			o = append(o, field{"consistency", consistencyJSON(*c.Consistency)})
		}
		o = append(o, field{"band", object{{"probabilities", numbers(c.BandAt)}, {"resampled", intervals(c.Resampled)}, {"allowed_by_quotes", intervals(c.Band)}, {"opened", number(c.Opened)}}})
	}
	return append(o, field{"candidates", objects(c.Candidates, fitJSON)})
}

// consistencyJSON writes whether one curve can price all quotes, and the changes that would let one.
func consistencyJSON(k market.Consistency) object {
	change := func(c market.Change) object {
		return object{{"quote", c.Quote.Name}, {"relative", number(c.Relative)}, {"rate_on_line", number(c.Rate)}}
	}
	return object{
		{"consistent", k.Consistent}, {"least_total", number(k.Total)}, {"least_total_changes", objects(k.LeastTotal, change)},
		{"least_worst", number(k.Worst)}, {"least_worst_changes", objects(k.LeastWorst, change)},
	}
}

func intervals(list []market.Interval) []object {
	return objects(list, func(i market.Interval) object { return object{{"low", number(i.Low)}, {"high", number(i.High)}} })
}

func fitJSON(f *market.Fit) object {
	o := object{{"family", f.Family}, {"distortion", f.Distortion.String()}}
	if m, ok := f.Distortion.(market.Mixture); ok {
		knots := objects(m.Knots, func(k market.Knot) object {
			return object{{"probability", number(k.Tail)}, {"weight", number(k.Weight)}}
		})
		o = append(o, field{"supremum", number(m.Supremum)}, field{"kinks", knots}, field{"pull", number(f.Pull)}, field{"pulled_towards", f.Toward})
	} else {
		o = append(o, field{"parameter", number(f.Parameter)}, field{"standard_error", number(f.StandardError)})
	}
	return append(o, object{
		{"objective", number(f.Objective)}, {"in_sample_error", number(f.InSample)}, {"leave_one_out_error", number(f.LeaveOneOut)},
		{"lowest_probability", number(f.LowestTail)}, {"highest_probability", number(f.HighestTail)}, {"warnings", texts(f.Warnings)},
		{"quotes", objects(f.Quotes, func(q market.FittedQuote) object {
			return object{
				{"name", q.Name}, {"attachment_probability", number(q.Attachment)}, {"exhaustion_probability", number(q.Exhaustion)}, {"weight", number(q.Weight)},
				{"rate_on_line", number(q.RateOnLine)}, {"fitted", number(q.Fitted)}, {"residual", number(q.Residual)}, {"left_out", number(q.LeftOut)}, {"pull", number(q.Fitted/q.LeftOut - 1)},
				{"multiple", number(q.Multiple)}, {"mark", quoteMark(f, q)},
			}
		})},
	}...)
}
