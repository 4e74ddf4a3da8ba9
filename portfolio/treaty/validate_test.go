package treaty_test

import (
	"math"
	"strings"
	"testing"

	"cedewright/portfolio/fault"
	"cedewright/portfolio/treaty"
)

func TestValidate(t *testing.T) {
	good := treaty.Treaty{Name: "l", Kind: treaty.EventExcess, Retention: 50, Limit: 100, Share: 1}
	if err := good.Validate(); err != nil {
		t.Fatal(err)
	}
	share := treaty.Treaty{Name: "q", Kind: treaty.QuotaShare, Cession: 0.2}
	if err := share.Validate(); err != nil {
		t.Fatal(err)
	}
	for message, spoil := range map[string]func(u *treaty.Treaty){
		"share: 1.2; allowed: a fraction from 0 to 1":                                          func(u *treaty.Treaty) { u.Share = 1.2 },
		"share: NaN; allowed: a fraction from 0 to 1":                                          func(u *treaty.Treaty) { u.Share = math.NaN() },
		"limit: 0; allowed: money above 0":                                                     func(u *treaty.Treaty) { u.Limit = 0 },
		"retention: -1; allowed: money of at least 0":                                          func(u *treaty.Treaty) { u.Retention = -1 },
		"retention: +Inf; allowed: money of at least 0":                                        func(u *treaty.Treaty) { u.Retention = math.Inf(1) },
		"reinstatements: charge 2 is -1; allowed: fractions of the base premium of at least 0": func(u *treaty.Treaty) { u.Reinstatements = []float64{1, -1} },
		"annual_limit: given together with reinstatements":                                     func(u *treaty.Treaty) { u.Reinstatements, u.AnnualLimit = []float64{1}, 200 },
		"reinstatements: given for an unlimited layer":                                         func(u *treaty.Treaty) { u.Reinstatements, u.Limit = []float64{1}, math.Inf(1) },
		"event_limit: given for the kind event-excess; allowed: only for [risk-excess]":        func(u *treaty.Treaty) { u.EventLimit = 10 },
		"cession: given for the kind event-excess; allowed: only for [quota-share]":            func(u *treaty.Treaty) { u.Cession = 0.1 },
		"name: no name": func(u *treaty.Treaty) { u.Name = "" },
		"annual_deductible: given for the kind aggregate-excess; allowed: only for [event-excess": func(u *treaty.Treaty) { u.Kind, u.AnnualDeductible = treaty.AggregateExcess, 5 },
		"kind: Kind(9); allowed: [quota-share event-excess risk-excess aggregate-excess]":         func(u *treaty.Treaty) { u.Kind = 9 },
		"premium: -3; allowed: money of at least 0 per year":                                      func(u *treaty.Treaty) { u.Premium = treaty.Some(-3) },
	} {
		bad := good
		spoil(&bad)
		if err := bad.Validate(); err == nil || !strings.Contains(err.Error(), message) {
			t.Errorf("got %q, want %q", err, message)
		}
	}
	share.Commission = treaty.Some(1)
	if err := share.Validate(); err == nil || !strings.Contains(err.Error(), "commission: 1; allowed: a fraction from 0 to below 1") {
		t.Errorf("commission of 1: %v", err)
	}
}

func TestProgrammeValidate(t *testing.T) {
	layer := func(name string, retention, limit, share float64, after ...string) treaty.Treaty {
		return treaty.Treaty{Name: name, Kind: treaty.EventExcess, Classes: []string{"home"}, Retention: retention, Limit: limit, Share: share, After: after}
	}
	classes, perils := []string{"home", "motor"}, []string{"wind"}
	if err := (treaty.Programme{Treaties: []treaty.Treaty{layer("a", 10, 10, 1), layer("b", 20, 10, 1, "a")}}).Validate(classes, perils); err != nil {
		t.Fatal(err)
	}
	half := treaty.Programme{Treaties: []treaty.Treaty{layer("a", 10, 10, 0.5), layer("b", 15, 10, 0.5)}}
	if err := half.Validate(classes, perils); err != nil {
		t.Errorf("two halves of a layer: %v", err)
	}
	wrong := layer("a", 10, 10, 1)
	wrong.Classes, wrong.Perils = []string{"hme", "motor", "motor"}, []string{"wnd"}
	for message, p := range map[string]treaty.Programme{
		`a.classes: no class of the book is named "hme"; allowed: ["home" "motor"]; did you mean "home"?`: {Treaties: []treaty.Treaty{wrong}},
		`a.classes: "motor" twice`: {Treaties: []treaty.Treaty{wrong}},
		`a.perils: no peril of the book is named "wnd"; allowed: ["wind"]; did you mean "wind"?`: {Treaties: []treaty.Treaty{wrong}},
		`a.name: two treaties of this name`:                                    {Treaties: []treaty.Treaty{layer("a", 1, 1, 1), layer("a", 2, 1, 1)}},
		`a.after: the treaty itself`:                                           {Treaties: []treaty.Treaty{layer("a", 1, 1, 1, "a")}},
		`a.after: no treaty of the programme is named "bb"; did you mean "b"?`: {Treaties: []treaty.Treaty{layer("a", 1, 1, 1, "bb"), layer("b", 2, 1, 1)}},
		`after: a cycle: a after c after b after a; allowed: treaties that inure to one another in one direction`:            {Treaties: []treaty.Treaty{layer("a", 1, 1, 1, "c"), layer("b", 2, 1, 1, "a"), layer("c", 3, 1, 1, "b")}},
		`b: overlaps "a" between 15 and 20, where 150 % would be placed; allowed: at most 100 % of any layer on one subject`: {Treaties: []treaty.Treaty{layer("a", 10, 10, 1), layer("b", 15, 10, 0.5)}},
	} {
		if err := p.Validate(classes, perils); err == nil || !strings.Contains(err.Error(), message) {
			t.Errorf("got %q, want %q", err, message)
		}
	}
	all := fault.All((treaty.Programme{Treaties: []treaty.Treaty{wrong, layer("b", -1, 0, 2)}}).Validate(classes, perils))
	if len(all) != 6 {
		t.Errorf("%d faults, want all six at once: %v", len(all), all)
	}
}

func TestKinds(t *testing.T) {
	for _, name := range treaty.KindNames() {
		if k, err := treaty.ParseKind(name); err != nil || k.String() != name {
			t.Errorf("kind %q reads as %v, %v", name, k, err)
		}
	}
	if _, err := treaty.ParseKind("stop-loss"); err == nil {
		t.Error("an unknown kind was read")
	}
}
