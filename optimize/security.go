package optimize

import (
	"cedewright/portfolio/security"
	"cedewright/portfolio/treaty"
)

// reinsurers gives the reinsurers of the case; none without a register.
func (a *Appraiser) reinsurers() []security.Reinsurer {
	if a.c.Security == nil {
		return nil
	}
	return a.c.Security.Reinsurers
}

// prepareSecurity draws the years in which reinsurers fail: the worse the cedant's year, the likelier.
func (a *Appraiser) prepareSecurity() {
	a.reinsurer = map[string]int{}
	for j, r := range a.reinsurers() {
		a.reinsurer[r.Name] = j
	}
	if len(a.reinsurers()) > 0 {
		a.failures = a.c.Security.Fail(a.ungained)
	}
}

// unpaid calls take with what a treaty's reinsurers leave unpaid in each year in which they fail, given its annual recoveries at 100 %, and gives the sum over
// all years.
func (a *Appraiser) unpaid(t treaty.Treaty, annual []float64, take func(y int32, lost float64)) float64 {
	sum := 0.0
	for _, line := range t.Panel {
		j := a.reinsurer[line.Reinsurer]
		r := a.reinsurers()[j]
		for _, y := range a.failures.Years(j) {
			if annual[y] > 0 {
				lost := r.Unpaid(t.Placed()*line.Share*annual[y], line.Collateral)
				take(y, lost)
				sum += lost
			}
		}
	}
	return sum
}

// unpaidYears adds what a treaty's reinsurers leave unpaid to yearly losses.
func (a *Appraiser) unpaidYears(t treaty.Treaty, annual, losses []float64) {
	a.unpaid(t, annual, func(y int32, lost float64) { losses[y] += lost })
}

// FailureWarnings says which reinsurers fail in too few simulated years for a figure of theirs; none without a register.
func (a *Appraiser) FailureWarnings() []string {
	if a.failures == nil {
		return nil
	}
	return a.failures.Warnings()
}
