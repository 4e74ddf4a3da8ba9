package security

import (
	"math"
	"testing"

	"cedewright/portfolio/fault"

	"pgregory.net/rapid"
)

// TestValidate spoils a sound register one fault at a time: each, and nothing else, is told in its words; then all at once.
func TestValidate(t *testing.T) {
	good := func() *Register {
		return &Register{Correlation: 0.5, Reinsurers: []Reinsurer{
			{Name: "a", Default: 0, Step: -1, LossGiven: 0}, {Name: "b", Default: 0.999, Step: 6, LossGiven: 1}, {Name: "c", Default: 0.01, LossGiven: 0.5},
		}}
	}
	if err := good().Validate(); err != nil {
		t.Error(err)
	}
	if err := (&Register{}).Validate(); err != nil {
		t.Error(err)
	}
	const probability, fraction = "; allowed: a probability from 0 to below 1", "; allowed: a fraction from 0 to 1"
	const step, correlation = "; allowed: a step from 0 to 6, or -1 for none", "; allowed: a correlation from 0 to below 1"
	nan := math.NaN()
	for want, spoil := range map[string]func(r *Register){
		`reinsurers[1].name: no name; allowed: a name of its own among the reinsurers`:   func(r *Register) { r.Reinsurers[1].Name = "" },
		`reinsurers[2].name: two reinsurers named "a"; allowed: one reinsurer of a name`: func(r *Register) { r.Reinsurers[2].Name = "a" },
		"reinsurers[1].default_probability: 1" + probability:                             func(r *Register) { r.Reinsurers[1].Default = 1 },
		"reinsurers[0].default_probability: -0.1" + probability:                          func(r *Register) { r.Reinsurers[0].Default = -0.1 },
		"reinsurers[0].default_probability: NaN" + probability:                           func(r *Register) { r.Reinsurers[0].Default = nan },
		"reinsurers[0].default_probability: +Inf" + probability:                          func(r *Register) { r.Reinsurers[0].Default = math.Inf(1) },
		"reinsurers[2].credit_quality_step: 7" + step:                                    func(r *Register) { r.Reinsurers[2].Step = 7 },
		"reinsurers[2].credit_quality_step: -2" + step:                                   func(r *Register) { r.Reinsurers[2].Step = -2 },
		"reinsurers[2].loss_given_default: 1.01" + fraction:                              func(r *Register) { r.Reinsurers[2].LossGiven = 1.01 },
		"reinsurers[2].loss_given_default: -0.01" + fraction:                             func(r *Register) { r.Reinsurers[2].LossGiven = -0.01 },
		"reinsurers[2].loss_given_default: NaN" + fraction:                               func(r *Register) { r.Reinsurers[2].LossGiven = nan },
		"correlation: 1" + correlation:                                                   func(r *Register) { r.Correlation = 1 },
		"correlation: -0.2" + correlation:                                                func(r *Register) { r.Correlation = -0.2 },
		"correlation: NaN" + correlation:                                                 func(r *Register) { r.Correlation = nan },
	} {
		bad := good()
		spoil(bad)
		if err := bad.Validate(); err == nil || err.Error() != want {
			t.Errorf("got  %v\nwant %s", err, want)
		}
	}
	bad := &Register{Correlation: 2, Reinsurers: []Reinsurer{{Default: 3, Step: 9, LossGiven: 4}, {}, {Name: "x"}, {Name: "x", Default: -1}}}
	if all := fault.All(bad.Validate()); len(all) != 8 {
		t.Errorf("%d faults at once, want four of the first, one of the second, two of the fourth and the correlation: %v", len(all), all)
	}
}

// TestUnpaid: worked by hand, then its properties: nothing beyond what is due is lost, and collateral only helps.
func TestUnpaid(t *testing.T) {
	r := Reinsurer{LossGiven: 0.5}
	for _, c := range []struct{ due, collateral, want float64 }{{100, 0, 50}, {100, 40, 30}, {100, 100, 0}, {100, 101, 0}, {0, 0, 0}} {
		if got := r.Unpaid(c.due, c.collateral); got != c.want {
			t.Errorf("due %v with collateral %v: %v unpaid, want %v", c.due, c.collateral, got, c.want)
		}
	}
	if got := (Reinsurer{}).Unpaid(100, 0); got != 0 {
		t.Errorf("%v lost where nothing is lost on default", got)
	}
	rapid.Check(t, func(t *rapid.T) {
		r := Reinsurer{LossGiven: rapid.Float64Range(0, 1).Draw(t, "loss given default")}
		due, collateral := rapid.Float64Range(0, 1e9).Draw(t, "due"), rapid.Float64Range(0, 1e9).Draw(t, "collateral")
		more := rapid.Float64Range(0, 1e9).Draw(t, "more")
		lost := r.Unpaid(due, collateral)
		if lost < 0 || lost > r.LossGiven*due || r.Unpaid(due, collateral+more) > lost || r.Unpaid(due+more, collateral) < lost {
			t.Fatalf("%v lost of %v with collateral %v", lost, due, collateral)
		}
	})
}
