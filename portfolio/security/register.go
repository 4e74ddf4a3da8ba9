package security

import (
	"fmt"

	"cedewright/portfolio/fault"
)

// Reinsurer is a counterparty of treaties.
type Reinsurer struct {
	Name      string  // of its own in the register; the stream of random numbers hangs on it
	Default   float64 // probability of default within the year, from 0 to below 1; 0 = never fails
	Step      int     // credit quality step, 0–6; −1 when none was given (a probability or a solvency ratio was)
	LossGiven float64 // fraction of an unpaid recovery that is lost on default, 0–1
	Tied      bool    // 60 % or more of its assets are tied as collateral
	RatedBy   string  // where the probability is from, in words: "step 2", "solvency ratio 150 %", "set in the study"
}

// Register is the reinsurers of a study.
//
// Correlation is the loading a of every reinsurer's fortune on the year's factor: the correlation of the latent variable that decides
// whether it fails with the normal score of how bad the year is for the cedant. The fortunes of two reinsurers correlate by a², through
// that factor alone. It is neither the correlation of the events of default, which is smaller, nor the asset correlation of credit risk
// models, which is a².
type Register struct {
	Reinsurers  []Reinsurer
	Correlation float64 // from 0 (defaults fall on good and bad years alike) to below 1
	Seed        uint64
}

// Validate reports every fault of the register at once. The key of a fault is that of a study, such as
// "reinsurers[1].default_probability", counted from 0, or "correlation".
func (r *Register) Validate() error {
	var faults fault.List
	seen := map[string]bool{}
	for i, u := range r.Reinsurers {
		add := func(key string, found any, allowed string) {
			faults.Add(fault.Fault{Key: fmt.Sprintf("reinsurers[%d].%s", i, key), Found: fmt.Sprint(found), Allowed: allowed})
		}
		switch {
		case u.Name == "":
			add("name", "no name", "a name of its own among the reinsurers")
		case seen[u.Name]:
			add("name", fmt.Sprintf("two reinsurers named %q", u.Name), "one reinsurer of a name")
		}
		seen[u.Name] = true
		if !belowOne(u.Default) {
			add("default_probability", u.Default, "a probability from 0 to below 1")
		}
		if u.Step < -1 || u.Step > 6 {
			add("credit_quality_step", u.Step, "a step from 0 to 6, or -1 for none")
		}
		if !(u.LossGiven >= 0 && u.LossGiven <= 1) {
			add("loss_given_default", u.LossGiven, "a fraction from 0 to 1")
		}
	}
	if !belowOne(r.Correlation) {
		faults.Add(fault.Fault{Key: "correlation", Found: fmt.Sprint(r.Correlation), Allowed: "a correlation from 0 to below 1"})
	}
	return faults.Err()
}

func belowOne(x float64) bool { return x >= 0 && x < 1 }

// Unpaid gives what the cedant loses on one line of a treaty in a year in which the reinsurer fails, in money: LossGiven of what is due
// beyond the collateral. due is the line's part of the year's recovery, its share of what is placed, in money of at least 0; collateral
// is held against this line alone and pays first, in full. It is 0 when the collateral covers what is due.
func (r Reinsurer) Unpaid(due, collateral float64) float64 {
	return r.LossGiven * max(due-collateral, 0)
}
