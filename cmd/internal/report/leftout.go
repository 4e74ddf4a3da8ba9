package report

import (
	"slices"

	"cedewright/cmd/internal/study"
	"cedewright/portfolio/capital"
)

// leftOut says what the figures do not contain.
func leftOut(a study.Appraised) []string {
	var list []string
	const notIn = "taxes, investment results, the run-off of old reserves and the rules of a full regulatory formula are not in it."
	simulated := len(a.Standards) == 0 || slices.ContainsFunc(a.Standards, capital.Standard.Simulated)
	switch {
	case simulated && a.Rest != nil:
		list = append(list, "Required capital under a simulated standard is a measure of one year's simulated net result and of what is said of the rest "+
			"of the company: "+notIn)
	case simulated && givenRules(a):
		list = append(list, "Required capital under a simulated standard is a measure of one year's simulated net result: other risks, "+notIn)
	case simulated:
		list = append(list, "Required capital is a measure of one year's simulated net result: other risks, "+notIn)
	}
	if givenRules(a) {
		list = append(list, "Under a formula or a covariance, only what the programme changes is worked out: volumes, scenarios, perils and recoverables. "+
			"All else is as given, and stays the same under every programme.")
	}
	if a.Security == nil {
		list = append(list, "Reinsurers are taken to pay in full and at once: neither default nor dispute nor delay is priced.")
	} else {
		list = append(list, "Reinsurers fail or pay in full and at once: dispute and delay are not priced, nor is what it would cost to replace a treaty "+
			"whose reinsurer has failed. What no panel names never fails.")
	}
	return append(list,
		"Market prices come from a curve fitted to quotes, or from quotes in the study; capacity, relationships and the wordings behind them are not modelled.",
		"Reinstatement premiums are pro rata as to amount, without brokerage and without a time factor.",
		"Standard errors (±) are those of the simulation alone; what few quotes leave open is shown beside them where it is known. "+
			"Whether the models of loss and the kind of market curve are right neither says.",
		"The best programme was chosen on the same simulated years on which its figures are shown, which flatters it a little.",
	)
}
