package treaty_test

import (
	"math"
	"strings"
	"testing"

	"cedewright/portfolio/fault"
	"cedewright/portfolio/treaty"
)

// goodTerms gives sound terms of each kind with every term that the kind has.
func goodTerms() map[treaty.Kind]treaty.Treaty {
	event := treaty.Treaty{Name: "l", Kind: treaty.EventExcess, Retention: 50, Limit: 100, Share: 1, AnnualDeductible: 20, Reinstatements: []float64{1, 0}, Premium: treaty.Some(9)}
	risk := event
	risk.Kind, risk.EventLimit, risk.Reinstatements, risk.AnnualLimit = treaty.RiskExcess, 300, nil, 250
	return map[treaty.Kind]treaty.Treaty{
		treaty.QuotaShare:      {Name: "q", Kind: treaty.QuotaShare, Cession: 0.2, Commission: treaty.Some(0.27)},
		treaty.EventExcess:     event,
		treaty.RiskExcess:      risk,
		treaty.AggregateExcess: {Name: "a", Kind: treaty.AggregateExcess, Retention: 0, Limit: math.Inf(1), Share: 0, Premium: treaty.Some(0)},
	}
}

// TestValidate spoils sound terms one by one: each fault, and nothing else, is told in its words.
func TestValidate(t *testing.T) {
	for kind, good := range goodTerms() {
		if err := good.Validate(); err != nil {
			t.Errorf("%v: %v", kind, err)
		}
	}
	const fraction, money, unique = "a fraction from 0 to 1", "money of at least 0", "a name of its own in the programme"
	quota, event, risk, aggregate := treaty.QuotaShare, treaty.EventExcess, treaty.RiskExcess, treaty.AggregateExcess
	nan, inf := math.NaN(), math.Inf(1)
	for _, c := range []struct {
		kind    treaty.Kind
		message string
		spoil   func(u *treaty.Treaty)
	}{
		{event, "name: no name; allowed: " + unique, func(u *treaty.Treaty) { u.Name = "" }},
		{event, "kind: Kind(9); allowed: [quota-share event-excess risk-excess aggregate-excess]", func(u *treaty.Treaty) { u.Kind = 9 }},
		{event, "kind: Kind(0); allowed: [quota-share event-excess risk-excess aggregate-excess]", func(u *treaty.Treaty) { u.Kind = 0 }},

		{quota, "cession: 1.0001; allowed: " + fraction, func(u *treaty.Treaty) { u.Cession = 1.0001 }},
		{quota, "cession: -0.1; allowed: " + fraction, func(u *treaty.Treaty) { u.Cession = -0.1 }},
		{quota, "cession: NaN; allowed: " + fraction, func(u *treaty.Treaty) { u.Cession = nan }},
		{quota, "commission: 1; allowed: a fraction from 0 to below 1", func(u *treaty.Treaty) { u.Commission = treaty.Some(1) }},
		{quota, "commission: -0.2; allowed: a fraction from 0 to below 1", func(u *treaty.Treaty) { u.Commission = treaty.Some(-0.2) }},
		{quota, "commission: NaN; allowed: a fraction from 0 to below 1", func(u *treaty.Treaty) { u.Commission = treaty.Some(nan) }},

		{event, "retention: -1; allowed: " + money, func(u *treaty.Treaty) { u.Retention = -1 }},
		{event, "retention: NaN; allowed: " + money, func(u *treaty.Treaty) { u.Retention = nan }},
		{risk, "retention: +Inf; allowed: " + money, func(u *treaty.Treaty) { u.Retention = inf }},
		{event, "limit: 0; allowed: money above 0", func(u *treaty.Treaty) { u.Limit = 0 }},
		{risk, "limit: -5; allowed: money above 0", func(u *treaty.Treaty) { u.Limit = -5 }},
		{aggregate, "limit: NaN; allowed: money above 0", func(u *treaty.Treaty) { u.Limit = nan }},
		{event, "share: 1.2; allowed: " + fraction, func(u *treaty.Treaty) { u.Share = 1.2 }},
		{risk, "share: -0.2; allowed: " + fraction, func(u *treaty.Treaty) { u.Share = -0.2 }},
		{aggregate, "share: NaN; allowed: " + fraction, func(u *treaty.Treaty) { u.Share = nan }},
		{event, "premium: -3; allowed: money of at least 0 per year, for 100 % of the treaty", func(u *treaty.Treaty) { u.Premium = treaty.Some(-3) }},
		{aggregate, "premium: +Inf; allowed: money of at least 0 per year, for 100 % of the treaty", func(u *treaty.Treaty) { u.Premium = treaty.Some(inf) }},
		{event, "annual_deductible: -1; allowed: money of at least 0 per year", func(u *treaty.Treaty) { u.AnnualDeductible = -1 }},
		{risk, "annual_deductible: +Inf; allowed: money of at least 0 per year", func(u *treaty.Treaty) { u.AnnualDeductible = inf }},
		{risk, "annual_limit: -1; allowed: money above 0 per year", func(u *treaty.Treaty) { u.AnnualLimit = -1 }},
		{risk, "annual_limit: NaN; allowed: money above 0 per year", func(u *treaty.Treaty) { u.AnnualLimit = nan }},
		{risk, "event_limit: -1; allowed: money above 0 per event", func(u *treaty.Treaty) { u.EventLimit = -1 }},
		{risk, "event_limit: NaN; allowed: money above 0 per event", func(u *treaty.Treaty) { u.EventLimit = nan }},
		{event, "reinstatements: charge 2 is -1; allowed: fractions of the base premium of at least 0", func(u *treaty.Treaty) { u.Reinstatements = []float64{1, -1} }},
		{event, "reinstatements: charge 1 is NaN; allowed: fractions of the base premium of at least 0", func(u *treaty.Treaty) { u.Reinstatements = []float64{nan} }},
		{event, "reinstatements: charge 1 is +Inf; allowed: fractions of the base premium of at least 0", func(u *treaty.Treaty) { u.Reinstatements = []float64{inf} }},
		{event, "annual_limit: given together with reinstatements; allowed: one of the two: n reinstatements make the annual limit (n+1) limits", func(u *treaty.Treaty) { u.AnnualLimit = 200 }},
		{risk, "annual_limit: given together with reinstatements; allowed: one of the two: n reinstatements make the annual limit (n+1) limits", func(u *treaty.Treaty) { u.Reinstatements = []float64{} }},
		{event, "reinstatements: given for an unlimited layer; allowed: a limit to reinstate", func(u *treaty.Treaty) { u.Limit = inf }},
	} {
		bad := goodTerms()[c.kind]
		c.spoil(&bad)
		if err := bad.Validate(); err == nil || err.Error() != c.message {
			t.Errorf("%v: got  %v\nwant %s", c.kind, err, c.message)
		}
	}
}

// TestTermsOfOtherKinds gives every kind every term: those that it does not use are refused, since a cover that reads as if it had them
// would mislead.
func TestTermsOfOtherKinds(t *testing.T) {
	const excess, annual = "[event-excess risk-excess aggregate-excess]", "[event-excess risk-excess]"
	for key, c := range map[string]struct {
		kinds string
		give  func(u *treaty.Treaty)
	}{
		"cession":           {"[quota-share]", func(u *treaty.Treaty) { u.Cession = 0.1 }},
		"commission":        {"[quota-share]", func(u *treaty.Treaty) { u.Commission = treaty.Some(0) }},
		"retention":         {excess, func(u *treaty.Treaty) { u.Retention = 10 }},
		"limit":             {excess, func(u *treaty.Treaty) { u.Limit = 10 }},
		"share":             {excess, func(u *treaty.Treaty) { u.Share = 1 }},
		"premium":           {excess, func(u *treaty.Treaty) { u.Premium = treaty.Some(0) }},
		"annual_deductible": {annual, func(u *treaty.Treaty) { u.AnnualDeductible = 10 }},
		"annual_limit":      {annual, func(u *treaty.Treaty) { u.AnnualLimit, u.Reinstatements = 10, nil }},
		"reinstatements":    {annual, func(u *treaty.Treaty) { u.AnnualLimit, u.Reinstatements = 0, []float64{} }},
		"event_limit":       {"[risk-excess]", func(u *treaty.Treaty) { u.EventLimit = 10 }},
	} {
		for kind, u := range goodTerms() {
			c.give(&u)
			want := ""
			if !strings.Contains(c.kinds, kind.String()) {
				want = key + ": given for the kind " + kind.String() + "; allowed: only for " + c.kinds
			}
			got := ""
			if err := u.Validate(); err != nil {
				got = err.Error()
			}
			if got != want {
				t.Errorf("%s for %v: got %q, want %q", key, kind, got, want)
			}
		}
	}
}

// TestProgrammeValidate: each fault of a programme, and nothing else, is told in its words.
func TestProgrammeValidate(t *testing.T) {
	layer := func(name string, retention, limit, share float64, after ...string) treaty.Treaty {
		return treaty.Treaty{Name: name, Kind: treaty.EventExcess, Classes: []string{"home"}, Retention: retention, Limit: limit, Share: share, After: after}
	}
	on := func(u treaty.Treaty, change func(u *treaty.Treaty)) treaty.Treaty {
		change(&u)
		return u
	}
	quota := func(name string, cession float64, after ...string) treaty.Treaty {
		return treaty.Treaty{Name: name, Kind: treaty.QuotaShare, Cession: cession, After: after}
	}
	list := func(treaties ...treaty.Treaty) []treaty.Treaty { return treaties }
	classes, perils := []string{"home", "motor"}, []string{"wind"}
	const once, band = "; allowed: each name once", "; allowed: at most 100 % of any layer on one subject"
	for name, c := range map[string]struct {
		treaties []treaty.Treaty
		want     string
	}{
		"no treaty":                   {nil, ""},
		"a tower":                     {list(layer("c", 30, math.Inf(1), 1), layer("a", 10, 10, 1), layer("b", 20, 10, 1)), ""},
		"two halves of one layer":     {list(layer("a", 10, 10, 0.5), layer("b", 10, 10, 0.5)), ""},
		"two halves that overlap":     {list(layer("a", 10, 10, 0.5), layer("b", 15, 10, 0.5)), ""},
		"thirds":                      {list(layer("a", 10, 10, 1./3), layer("b", 10, 10, 1./3), layer("c", 10, 10, 1./3)), ""},
		"one after the other":         {list(layer("a", 10, 10, 1), layer("b", 15, 10, 1, "a")), ""},
		"other classes":               {list(layer("a", 10, 10, 1), on(layer("b", 10, 10, 1), func(u *treaty.Treaty) { u.Classes = []string{"motor"} })), ""},
		"other perils":                {list(layer("a", 10, 10, 1), on(layer("b", 10, 10, 1), func(u *treaty.Treaty) { u.Perils = perils })), ""},
		"other kinds":                 {list(layer("a", 10, 10, 1), on(layer("b", 10, 10, 1), func(u *treaty.Treaty) { u.Kind = treaty.RiskExcess })), ""},
		"nothing placed of the other": {list(layer("a", 10, 10, 1), layer("b", 10, 10, 0)), ""},
		"quota shares of all":         {list(quota("a", 0.5), quota("b", 0.5), quota("c", 1, "a", "b")), ""},

		"unknown class":     {list(on(layer("a", 1, 1, 1), func(u *treaty.Treaty) { u.Classes = []string{"hme"} })), `a.classes: no class of the book is named "hme"; allowed: ["home" "motor"]; did you mean "home"?`},
		"class twice":       {list(on(layer("a", 1, 1, 1), func(u *treaty.Treaty) { u.Classes = []string{"home", "home"} })), `a.classes: "home" twice` + once},
		"unknown peril":     {list(on(layer("a", 1, 1, 1), func(u *treaty.Treaty) { u.Perils = []string{"wnd"} })), `a.perils: no peril of the book is named "wnd"; allowed: ["wind"]; did you mean "wind"?`},
		"peril twice":       {list(on(layer("a", 1, 1, 1), func(u *treaty.Treaty) { u.Perils = []string{"wind", "wind"} })), `a.perils: "wind" twice` + once},
		"same name":         {list(layer("a", 1, 1, 1), layer("a", 2, 1, 1)), `a.name: two treaties of this name; allowed: one treaty of a name`},
		"after itself":      {list(layer("a", 1, 1, 1, "a")), `a.after: the treaty itself; allowed: other treaties of the programme`},
		"after twice":       {list(layer("lower", 1, 1, 1), layer("upper", 2, 1, 1, "lower", "lower")), `upper.after: "lower" twice` + once},
		"unknown after":     {list(layer("upper", 2, 1, 1, "lowr"), layer("lower", 1, 1, 1)), `upper.after: no treaty of the programme is named "lowr"; did you mean "lower"?`},
		"two unknown after": {list(layer("a", 2, 1, 1, "xyzzy"), layer("b", 1, 1, 1, "plugh")), "a.after: no treaty of the programme is named \"xyzzy\"\nb.after: no treaty of the programme is named \"plugh\""},
		"a cycle": {list(layer("a", 1, 1, 1, "c"), layer("b", 2, 1, 1, "a"), layer("c", 3, 1, 1, "b")),
			"a.after: a cycle: a after c after b after a; allowed: treaties that inure to one another in one direction"},
		"a way into a cycle": {list(layer("in", 0, 1, 1, "a"), layer("a", 1, 1, 1, "b"), layer("b", 2, 1, 1, "a")),
			"a.after: a cycle: a after b after a; allowed: treaties that inure to one another in one direction"},
		"overlap":       {list(layer("a", 10, 10, 1), layer("b", 15, 10, 0.5)), `b: overlaps "a" between 15 and 20, where 150 % would be placed` + band},
		"overlap below": {list(layer("a", 15, 10, 1), layer("b", 10, 10, 0.5)), `b: overlaps "a" between 15 and 20, where 150 % would be placed` + band},
		"same layer":    {list(layer("a", 10, 10, 1), layer("b", 10, 10, 0.1)), `b: overlaps "a" between 10 and 20, where 110 % would be placed` + band},
		"overlap of three": {list(layer("a", 10, 10, 0.5), layer("b", 15, 10, 0.5), layer("c", 12, 40, 0.4)),
			`c: overlaps "a" "b" between 15 and 20, where 140 % would be placed` + band},
		"only who overlaps": {list(layer("a", 10, 10, 1), layer("z", 10, 10, 0), layer("b", 10, 10, 0.1), layer("c", 10, 10, 0)), `b: overlaps "a" between 10 and 20, where 110 % would be placed` + band},
		"only who cedes":    {list(quota("a", 0.6), quota("z", 0), quota("b", 0.5), quota("c", 0)), `b.cession: 110 % of one subject is ceded together with "a"; allowed: at most 100 %, or treaties that come after one another`},
		"lowest overlap":    {list(layer("a", 30, 10, 1), layer("b", 10, 10, 1), layer("c", 0, math.Inf(1), 0.2)), `c: overlaps "b" between 10 and 20, where 120 % would be placed` + band},
		"quota shares":      {list(quota("a", 0.6), quota("b", 0.3), quota("c", 0.2)), `c.cession: 110 % of one subject is ceded together with "a" "b"; allowed: at most 100 %, or treaties that come after one another`},
	} {
		got := ""
		if err := (treaty.Programme{Treaties: c.treaties}).Validate(classes, perils); err != nil {
			got = err.Error()
		}
		if got != c.want {
			t.Errorf("%s: got  %s\nwant %s", name, got, c.want)
		}
	}
	wrong := layer("a", -10, 10, 2, "b")
	wrong.Classes, wrong.Perils = []string{"hme", "motor", "motor"}, []string{"wnd"}
	all := fault.All((treaty.Programme{Treaties: []treaty.Treaty{wrong, layer("b", -1, 0, 2, "a")}}).Validate(classes, perils))
	if len(all) != 9 {
		t.Errorf("%d faults, want five of a, three of b and the cycle at once: %v", len(all), all)
	}
}

// TestApplyRefuses: the engine tells of names and cycles that it cannot follow.
func TestApplyRefuses(t *testing.T) {
	table := tableOf(t, 1, []string{"home"})
	for after, want := range map[string]string{
		"b": `a.after: no treaty of the programme is named "b"`,
		"a": "a.after: a cycle: a after a; allowed: treaties that inure to one another in one direction",
	} {
		_, err := treaty.Apply(table, treaty.Programme{Treaties: []treaty.Treaty{{Name: "a", Kind: treaty.QuotaShare, After: []string{after}}}})
		if err == nil || err.Error() != want {
			t.Errorf("got %v, want %s", err, want)
		}
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
