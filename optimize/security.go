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

// unpaid adds to the losses what a treaty's reinsurers leave unpaid in the years in which they fail, given its annual recoveries at 100 %, and gives the sum
// over all years.
func (a *Appraiser) unpaid(t treaty.Treaty, annual, losses []float64) float64 {
	sum := 0.0
	for _, line := range t.Panel {
		j := a.reinsurer[line.Reinsurer]
		r := a.reinsurers()[j]
		for _, y := range a.failures.Years(j) {
			if annual[y] > 0 {
				lost := r.Unpaid(t.Placed()*line.Share*annual[y], line.Collateral)
				losses[y] += lost
				sum += lost
			}
		}
	}
	return sum
}

// FailureWarnings says which reinsurers fail in too few simulated years for a figure of theirs; none without a register.
func (a *Appraiser) FailureWarnings() []string {
	if a.failures == nil {
		return nil
	}
	return a.failures.Warnings()
}
