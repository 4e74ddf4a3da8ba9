package report

import (
	"encoding/json"
	"io"
	"math"

	"cedewright/cmd/internal/study"
	"cedewright/market"
	"cedewright/optimize"
	"cedewright/portfolio/treaty"
)

// The names of these fields are a contract: scripts rely on them. Fields may be added, not renamed. Money is in the study's currency,
// amounts per year, fractions and probabilities of 1; "standard_errors" mirrors the figures beside it. A figure without a value is null.

// number writes null for what is no number: JSON has no NaN and no infinity.
type number float64

// MarshalJSON writes the number.
func (n number) MarshalJSON() ([]byte, error) {
	if math.IsNaN(float64(n)) || math.IsInf(float64(n), 0) {
		return []byte("null"), nil
	}
	return json.Marshal(float64(n))
}

// object is a group of keys; encoding/json writes them by alphabet, the same on every run.
type object = map[string]any

func head(h study.Head) object {
	inputs := make([]object, len(h.Inputs))
	for i, in := range h.Inputs {
		inputs[i] = object{"path": in.Path, "sha256": in.SHA256, "rows": in.Rows}
	}
	return object{
		"study": h.Title, "currency": h.Currency, "years": h.Years, "seed": h.Seed, "inputs": inputs,
		"notes": list(h.Notes), "warnings": list(h.Warnings), "caution": Caution, "program": Version(),
	}
}

// list gives an empty list, not null, for nil.
func list[T any](items []T) []T {
	if items == nil {
		return []T{}
	}
	return items
}

func estimate(e optimize.Estimate) object {
	return object{"value": number(e.Value), "standard_error": number(e.StandardError)}
}

func capitalJSON(figures []optimize.CapitalFigure) []object {
	all := make([]object, len(figures))
	for i, c := range figures {
		all[i] = object{
			"standard": c.Standard, "gross": number(c.Gross.Value), "net": number(c.Net.Value), "relief": number(c.Relief.Value),
			"standard_error":  number(c.Net.StandardError),
			"standard_errors": object{"gross": number(c.Gross.StandardError), "net": number(c.Net.StandardError), "relief": number(c.Relief.StandardError)},
		}
	}
	return all
}

func resultJSON(r optimize.NetResult) object {
	return object{
		"mean": number(r.Mean.Value), "sd": number(r.StandardDeviation), "one_in_10": number(r.OneIn10.Value), "one_in_200": number(r.OneIn200.Value),
		"standard_errors": object{"mean": number(r.Mean.StandardError), "one_in_10": number(r.OneIn10.StandardError), "one_in_200": number(r.OneIn200.StandardError)},
	}
}

// programme writes an appraisal.
func programme(a optimize.Appraisal) object {
	treaties := make([]object, len(a.Treaties))
	for i, t := range a.Treaties {
		treaties[i] = treatyJSON(t)
	}
	ratios := make([]object, len(a.OwnFundsRatio))
	for i, r := range a.OwnFundsRatio {
		ratios[i] = object{"standard": a.Capital[i].Standard, "value": number(r.Value), "standard_error": number(r.StandardError)}
	}
	rent := number(math.NaN())
	if a.RentDefined {
		rent = number(a.Rent.Value)
	}
	return object{
		"name": a.Programme.Name, "ceded_premium": number(a.CededPremium.Value), "expected_recoveries": number(a.ExpectedRecoveries.Value),
		"reinstatement_premium": number(a.ReinstatementPremium.Value), "commission": number(a.Commission.Value),
		"ceded_margin": number(a.CededMargin.Value), "capital": capitalJSON(a.Capital), "capital_cost": number(a.CapitalCost.Value),
		"total_cost": number(a.TotalCost.Value), "rent": rent, "own_funds_ratio": ratios, "net_result": resultJSON(a.NetResult), "treaties": treaties,
		"standard_errors": object{
			"ceded_premium": number(a.CededPremium.StandardError), "expected_recoveries": number(a.ExpectedRecoveries.StandardError),
			"reinstatement_premium": number(a.ReinstatementPremium.StandardError), "commission": number(a.Commission.StandardError),
			"ceded_margin": number(a.CededMargin.StandardError), "capital_cost": number(a.CapitalCost.StandardError),
			"total_cost": number(a.TotalCost.StandardError), "rent": number(a.Rent.StandardError),
		},
	}
}

func treatyJSON(f optimize.TreatyFigure) object {
	t := f.Terms
	o := object{
		"name": t.Name, "kind": t.Kind.String(), "premium": number(f.Premium.Value), "base_premium": number(f.BasePremium), "rate_on_line": number(f.RateOnLine),
		"reinstatement_premium": number(f.ReinstatementPremium.Value), "commission": number(f.Commission), "expected_recovery": number(f.ExpectedRecovery.Value),
		"attachment_probability": number(f.AttachmentProbability.Value), "exhaustion_probability": number(f.ExhaustionProbability.Value),
		"margin": number(f.Margin.Value), "relief": number(f.Relief.Value), "priced_by": f.PricedBy,
		"classes": list(t.Classes), "perils": list(t.Perils), "after": list(t.After),
		"standard_errors": object{
			"premium": number(f.Premium.StandardError), "reinstatement_premium": number(f.ReinstatementPremium.StandardError),
			"expected_recovery": number(f.ExpectedRecovery.StandardError), "margin": number(f.Margin.StandardError), "relief": number(f.Relief.StandardError),
			"attachment_probability": number(f.AttachmentProbability.StandardError), "exhaustion_probability": number(f.ExhaustionProbability.StandardError),
		},
	}
	if t.Kind == treaty.QuotaShare {
		o["cession"], o["commission_rate"] = t.Cession, number(f.CommissionRate)
		return o
	}
	o["retention"], o["limit"], o["share"] = number(t.Retention), number(t.Limit), number(t.Share)
	o["annual_deductible"], o["annual_limit"], o["event_limit"] = number(t.AnnualDeductible), number(t.AnnualRecoveryLimit()), number(t.EventLimit)
	if t.Reinstatements != nil {
		o["reinstatements"] = t.Reinstatements
	}
	return o
}

func programmes(all []optimize.Appraisal) []object {
	list := make([]object, len(all))
	for i, a := range all {
		list[i] = programme(a)
	}
	return list
}

func appraised(a study.Appraised) object {
	o := head(a.Head)
	o["cost_of_capital"], o["own_funds"] = number(a.CostOfCapital), number(a.OwnFunds)
	o["gross"] = object{
		"premium": number(a.Gross.Premium), "expenses": number(a.Gross.Expenses), "expected_loss": number(a.Gross.Loss.Value),
		"standard_errors": object{"expected_loss": number(a.Gross.Loss.StandardError)},
		"capital":         capitalJSON(a.Gross.Capital), "net_result": resultJSON(a.Gross.Result),
	}
	o["programmes"] = programmes(a.Programmes)
	differences := make([]object, len(a.Differences))
	for i, d := range a.Differences {
		differences[i] = object{"programme": d.Programme, "against": d.Against, "total_cost": number(d.TotalCost.Value), "standard_error": number(d.TotalCost.StandardError)}
	}
	o["differences"] = differences
	return o
}

// AppraisedJSON writes the answer of appraise.
func AppraisedJSON(w io.Writer, a study.Appraised) error { return write(w, appraised(a)) }

// SearchedJSON writes the answer of search.
func SearchedJSON(w io.Writer, s study.Searched) error {
	o := appraised(s.Appraised)
	o["best"] = programme(s.Result.Best)
	o["frontier"] = programmes(s.Result.Frontier)
	o["evaluations"], o["generations"], o["seed"] = s.Result.Evaluations, s.Result.Generations, s.Result.Seed
	o["book_seed"] = s.Head.Seed
	o["status"], o["feasible"], o["polished"] = s.Result.Status.String(), s.Result.Feasible, s.Result.Polished
	o["space"], o["keep"] = s.Space, list(keepWords(s.Keep))
	shortfalls := make([]object, len(s.Result.Shortfalls))
	for i, f := range s.Result.Shortfalls {
		shortfalls[i] = object{"measure": f.Keep.Measure, "value": number(f.Value)}
		if f.Keep.AtMost.Given {
			shortfalls[i]["at_most"] = number(f.Keep.AtMost.Value)
		}
		if f.Keep.AtLeast.Given {
			shortfalls[i]["at_least"] = number(f.Keep.AtLeast.Value)
		}
	}
	o["shortfalls"] = shortfalls
	return write(w, o)
}

// LookJSON writes the answer of look.
func LookJSON(w io.Writer, l study.Look) error {
	o := head(l.Head)
	class := func(c study.ClassLook) object {
		return object{
			"name": c.Name, "premium": number(c.Premium), "expenses": number(c.Expenses), "expected_loss": estimate(c.Loss), "sd": number(c.SD),
			"one_in_10": number(c.OneIn10), "one_in_200": number(c.OneIn200), "events": number(c.Events),
		}
	}
	classes := make([]object, len(l.Classes))
	for i, c := range l.Classes {
		classes[i] = class(c)
	}
	perils := make([]object, len(l.Perils))
	for i, p := range l.Perils {
		perils[i] = object{
			"name": p.Name, "events": number(p.Events), "expected_loss": estimate(p.Loss), "return_periods": study.ReturnPeriods,
			"largest_event": p.LargestOneIn, "annual_loss": p.AnnualOneIn, "largest_simulated": number(p.LargestOfBook),
		}
	}
	fits := make([]object, len(l.Fits))
	for i, f := range l.Fits {
		fits[i] = object{
			"model": f.Model, "file": f.File, "losses": f.Losses, "years": f.Years, "threshold": f.Threshold, "exceedances": f.Exceedances,
			"xi": f.Xi, "beta": f.Beta, "standard_errors": object{"xi": f.XiError, "beta": f.BetaError}, "frequency": f.Frequency,
			"largest_loss": f.LargestLoss, "extrapolation": f.Extrapolation,
		}
	}
	o["classes"], o["total"], o["perils"], o["fits"] = classes, class(l.Total), perils, fits
	o["gross"] = object{"capital": capitalJSON(l.Gross.Capital), "net_result": resultJSON(l.Gross.NetResult)}
	return write(w, o)
}

// FittedJSON writes the answer of fit.
func FittedJSON(w io.Writer, f study.Fitted) error {
	o := head(f.Head)
	curves := make([]object, len(f.Curves))
	for i, c := range f.Curves {
		candidates := make([]object, len(c.Candidates))
		for k, fit := range c.Candidates {
			candidates[k] = fitJSON(fit)
		}
		curves[i] = object{
			"name": c.Curve.Name, "distortion": c.Curve.Distortion.String(), "brokerage": number(c.Curve.Brokerage),
			"minimum_rate_on_line": number(c.Curve.MinimumRateOnLine), "candidates": candidates,
		}
		if c.Chosen != nil {
			curves[i]["chosen"] = fitJSON(c.Chosen)
		}
	}
	o["curves"] = curves
	return write(w, o)
}

func fitJSON(f *market.Fit) object {
	quotes := make([]object, len(f.Quotes))
	for i, q := range f.Quotes {
		quotes[i] = object{
			"name": q.Name, "rate_on_line": number(q.RateOnLine), "fitted": number(q.Fitted), "residual": number(q.Residual), "left_out": number(q.LeftOut),
			"attachment_probability": number(q.Attachment), "exhaustion_probability": number(q.Exhaustion), "multiple": number(q.Multiple), "weight": number(q.Weight),
		}
	}
	o := object{
		"family": f.Family, "distortion": f.Distortion.String(), "objective": number(f.Objective), "in_sample_error": number(f.InSample),
		"leave_one_out_error": number(f.LeaveOneOut), "quotes": quotes, "warnings": list(f.Warnings),
	}
	if m, ok := f.Distortion.(market.Mixture); ok {
		knots := make([]object, len(m.Knots))
		for i, k := range m.Knots {
			knots[i] = object{"probability": k.Tail, "weight": k.Weight}
		}
		o["supremum"], o["kinks"], o["pull"], o["pulled_towards"] = m.Supremum, knots, f.Pull, f.Toward
	} else {
		o["parameter"], o["standard_error"] = number(f.Parameter), number(f.StandardError)
	}
	return o
}

func write(w io.Writer, o object) error {
	e := json.NewEncoder(w)
	e.SetIndent("", "  ")
	e.SetEscapeHTML(false)
	return e.Encode(o)
}
