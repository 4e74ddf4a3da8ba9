package report

import (
	"cedewright/cmd/internal/study"
	"cedewright/optimize"
	"cedewright/portfolio/capital"
	"cedewright/portfolio/security"
)

// capitalJSON writes a capital figure; "alone" stands only where there is a rest of the company.
func capitalJSON(c optimize.CapitalFigure) object {
	o := object{
		{"standard", c.Standard}, {"gross", number(c.Gross.Value)}, {"net", number(c.Net.Value)}, {"relief", number(c.Relief.Value)},
		{"standard_error", number(c.Net.StandardError)}, {"standard_errors", capitalErrors(c.Gross, c.Net, c.Relief)}, {"binding", c.Binding},
	}
	if k := c.Alone; k != nil {
		o = append(o, field{"alone", object{
			{"gross", number(k.Gross.Value)}, {"net", number(k.Net.Value)}, {"relief", number(k.Relief.Value)}, {"standard_errors", capitalErrors(k.Gross, k.Net, k.Relief)},
		}})
	}
	return append(o, field{"parts", objects(c.Parts, func(p optimize.CapitalPart) object {
		return object{{"name", p.Name}, {"gross", number(p.Gross)}, {"net", number(p.Amount)}, {"sets", p.Sets}}
	})})
}

func capitalErrors(gross, net, relief optimize.Estimate) object {
	return object{{"gross", number(gross.StandardError)}, {"net", number(net.StandardError)}, {"relief", number(relief.StandardError)}}
}

// standardsJSON writes what each standard measures and where it is from.
func standardsJSON(a study.Appraised) []object {
	drives := map[string]bool{}
	for _, name := range a.Drive {
		drives[name] = true
	}
	return objects(a.Standards, func(k capital.Standard) object {
		kind := "simulated"
		switch {
		case k.Formula != nil:
			kind = "formula"
		case k.Covariance != nil:
			kind = "covariance"
		}
		return object{{"name", k.Name}, {"kind", kind}, {"rule", standardRule(k)}, {"source", k.Source}, {"drives", drives[k.Name]}}
	})
}

// costOfCapital gives the flat rate; null when the owners have a price of risk of their own.
func costOfCapital(a study.Appraised) number {
	if a.Owners != "" {
		return none
	}
	return number(a.CostOfCapital)
}

// ownersJSON gives the owners' distortion in words; null for a flat rate.
func ownersJSON(a study.Appraised) any {
	if a.Owners == "" {
		return nil
	}
	return a.Owners
}

// restJSON writes the rest of the company; null without any.
func restJSON(r *capital.Rest) any {
	switch {
	case r == nil:
		return nil
	case r.Quantile != nil || r.Law != "":
		return object{{"law", r.Law}, {"rank_correlation", number(r.RankCorrelation)}, {"seed", r.Seed}}
	}
	return object{{"capital", number(r.Capital)}, {"correlation", number(r.Correlation)}}
}

// securityJSON writes the reinsurers, with the recoveries expected from each; null without a register. The standard error of a sum of several treaties'
// recoveries is the sum of theirs, the most that it can be.
func securityJSON(a study.Appraised) any {
	if a.Security == nil {
		return nil
	}
	return object{
		{"correlation", number(a.Security.Correlation)}, {"seed", a.Security.Seed},
		{"reinsurers", objects(a.Security.Reinsurers, func(r security.Reinsurer) object {
			step := any(nil)
			if r.Step >= 0 {
				step = r.Step
			}
			return object{
				{"name", r.Name}, {"default_probability", number(r.Default)}, {"credit_quality_step", step}, {"rated_by", r.RatedBy},
				{"loss_given_default", number(r.LossGiven)}, {"tied_assets", r.Tied},
				{"expected_recoveries", objects(a.Programmes, func(p optimize.Appraisal) object {
					return append(object{{"programme", p.Programme.Name}}, estimate(recoverable(p, r.Name))...)
				})},
			}
		})},
	}
}
