package report

import (
	"math"

	"cedewright/cmd/internal/study"
	"cedewright/optimize"
)

// capitalCostName names what the owners ask for the risk kept.
func capitalCostName(a study.Appraised) string {
	if a.Owners != "" {
		return "owners' price of the risk kept"
	}
	return "capital cost at " + Percent(a.CostOfCapital)
}

// totalCostName names the group of the total cost; the owners' distortion stands here, where it is not in the way of the columns.
func totalCostName(a study.Appraised) string {
	if a.Owners != "" {
		return "Total cost, a year (owners' price of risk: " + a.Owners + ")"
	}
	return "Total cost, a year"
}

// roughRate gives a rate no finer than its error can be: bound is the most that the error of a ratio comes to, the sum of the relative errors of both.
func roughRate(over, under optimize.Estimate) string {
	rate := over.Value / under.Value
	if !finite(rate) || !(under.Value > 0) {
		return "–"
	}
	bound := (over.StandardError + math.Abs(rate)*under.StandardError) / under.Value
	if !(bound > 0) || !finite(bound) {
		return Percent(rate)
	}
	return percentTo(rate, min(decimals(100*bound), 2), false)
}

// ownersRate gives what the owners' price comes to on the capital that drives.
func ownersRate(p optimize.Appraisal) string { return roughRate(p.CapitalCost, p.Driving.Net) }

// freedAt gives the rate a year that the capital freed by a programme would cost the owners: the flat rate, or what their price of the risk falls by, over
// the relief. Rent is to be compared with it.
func freedAt(s study.Searched, p optimize.Appraisal) string {
	if s.Owners == "" {
		return Percent(s.CostOfCapital)
	}
	none := s.NoCover.CapitalCost
	return roughRate(optimize.Estimate{Value: none.Value - p.CapitalCost.Value, StandardError: none.StandardError + p.CapitalCost.StandardError}, p.Driving.Relief)
}

// rentAgainst says what rent is to be compared with.
func rentAgainst(s study.Searched, p optimize.Appraisal) string {
	if s.Owners == "" {
		return "a cost of capital of " + freedAt(s, p)
	}
	return "about " + freedAt(s, p) + " that the owners would ask for that risk"
}

// ownCapitalCosts says so in a tile.
func ownCapitalCosts(s study.Searched) string {
	if s.Owners == "" {
		return "own capital costs " + freedAt(s, s.Result.Best)
	}
	return "the owners would ask about " + freedAt(s, s.Result.Best)
}

// costSetting tells on what the cost of risk kept rests.
func costSetting(a study.Appraised) [2]string {
	if a.Owners != "" {
		return [2]string{"Price of the risk kept", "the owners' own, " + clean(a.Owners) + ", on the result kept, backed by the capital required under " +
			driving(a, true) + ", which drives the search"}
	}
	return [2]string{"Cost of capital", Percent(a.CostOfCapital) + " a year on required capital under " + driving(a, true) + ", which drives the search"}
}
