package treaty_test

import (
	"fmt"
	"math"
	"strings"
	"testing"

	"cedewright/portfolio/treaty"

	"pgregory.net/rapid"
)

// TestPanel: each fault of a panel, and nothing else, is told in its words, on a treaty of every kind.
func TestPanel(t *testing.T) {
	const share, collateral = "; allowed: a fraction of what is placed, above 0 and at most 1", "; allowed: money of at least 0"
	const all = "; allowed: at most 100 % of what is placed"
	nan, inf := math.NaN(), math.Inf(1)
	for name, c := range map[string]struct {
		panel []treaty.Line
		want  string
	}{
		"none":                {nil, ""},
		"empty":               {[]treaty.Line{}, ""},
		"one":                 {[]treaty.Line{{"a", 1, 0}}, ""},
		"part":                {[]treaty.Line{{"a", 0.3, 5}, {"b", 0.1, 0}}, ""},
		"tenths":              {[]treaty.Line{{"a", 0.7, 0}, {"b", 0.1, 0}, {"c", 0.1, 0}, {"d", 0.1, 0}}, ""},
		"within the slack":    {[]treaty.Line{{"a", 0.5, 0}, {"b", 0.5 + 0.9e-9, 0}}, ""},
		"beyond the slack":    {[]treaty.Line{{"a", 0.5, 0}, {"b", 0.5 + 1.1e-9, 0}}, "panel: its lines come to 100 %" + all},
		"too much":            {[]treaty.Line{{"a", 0.6, 0}, {"b", 0.3, 0}, {"c", 0.2, 0}}, "panel: its lines come to 110 %" + all},
		"no share":            {[]treaty.Line{{"a", 0.5, 0}, {"b", 0, 0}}, "panel[1].share: 0" + share},
		"negative share":      {[]treaty.Line{{"a", -0.5, 0}}, "panel[0].share: -0.5" + share},
		"share above 1":       {[]treaty.Line{{"a", 0.5, 0}, {"b", 1.2, 0}}, "panel[1].share: 1.2" + share},
		"share no number":     {[]treaty.Line{{"a", nan, 0}}, "panel[0].share: NaN" + share},
		"negative collateral": {[]treaty.Line{{"a", 0.5, -1}}, "panel[0].collateral: -1" + collateral},
		"endless collateral":  {[]treaty.Line{{"a", 0.5, inf}}, "panel[0].collateral: +Inf" + collateral},
		"collateral no sum":   {[]treaty.Line{{"a", 0.5, nan}}, "panel[0].collateral: NaN" + collateral},
		"no name":             {[]treaty.Line{{"", 0.5, 0}, {"", 0.5, 0}}, "panel[0].reinsurer: no name; allowed: the name of a reinsurer\npanel[1].reinsurer: no name; allowed: the name of a reinsurer"},
		"twice":               {[]treaty.Line{{"a", 0.1, 0}, {"b", 0.1, 0}, {"a", 0.1, 0}}, `panel[2].reinsurer: "a" twice; allowed: one line for each reinsurer of a treaty`},
		"everything": {[]treaty.Line{{"a", 0.6, 0}, {"a", 7, -1}, {"b", 0.6, 0}},
			"panel[1].reinsurer: \"a\" twice; allowed: one line for each reinsurer of a treaty\npanel[1].share: 7" + share +
				"\npanel[1].collateral: -1" + collateral + "\npanel: its lines come to 120 %" + all},
	} {
		for kind, u := range goodTerms() {
			u.Panel = c.panel
			got := ""
			if err := u.Validate(); err != nil {
				got = err.Error()
			}
			if got != c.want {
				t.Errorf("%s, %v: got  %s\nwant %s", name, kind, got, c.want)
			}
		}
	}
	bad := goodTerms()[treaty.EventExcess]
	bad.Panel = []treaty.Line{{"a", 2, 0}}
	err := (treaty.Programme{Treaties: []treaty.Treaty{bad}}).Validate(nil, nil)
	if want := "l.panel[0].share: 2" + share; err == nil || err.Error() != want {
		t.Errorf("programme: got %v, want %s", err, want)
	}
	bad.Kind = 9
	if err := bad.Validate(); err == nil || !strings.Contains(err.Error(), "kind: ") || !strings.Contains(err.Error(), "panel[0].share: ") {
		t.Errorf("an unknown kind hides the panel's faults: %v", err)
	}
}

// TestUnnamed: the lines and the unnamed part make 100 %, also where the lines make it only to rounding.
func TestUnnamed(t *testing.T) {
	thirds := treaty.Treaty{Panel: []treaty.Line{{"a", 1. / 3, 0}, {"b", 1. / 3, 0}, {"c", 1. / 3, 0}}}
	tenths := treaty.Treaty{Panel: []treaty.Line{{"a", 0.7, 0}, {"b", 0.1, 0}, {"c", 0.1, 0}, {"d", 0.1, 0}}}
	over := treaty.Treaty{Panel: []treaty.Line{{"a", 0.5, 0}, {"b", 0.5 + 0.9e-9, 0}}}
	for name, u := range map[string]treaty.Treaty{"thirds": thirds, "tenths": tenths, "within the slack": over} {
		if got := u.Unnamed(); got != 0 {
			t.Errorf("%s: %v unnamed", name, got)
		}
	}
	rapid.Check(t, func(t *rapid.T) {
		left, u := 1.0, treaty.Treaty{Name: "q", Kind: treaty.QuotaShare}
		for i := range rapid.IntRange(0, 8).Draw(t, "lines") {
			share := left * rapid.Float64Range(0.01, 0.99).Draw(t, "share")
			left -= share
			u.Panel = append(u.Panel, treaty.Line{Reinsurer: fmt.Sprint(i), Share: share, Collateral: rapid.Float64Range(0, 1e9).Draw(t, "collateral")})
		}
		if err := u.Validate(); err != nil {
			t.Fatal(err)
		}
		if got := u.Unnamed(); got < 0 || math.Abs(got-left) > 1e-9 { // the slack that counts as nothing
			t.Fatalf("%v unnamed, want %v", got, left)
		}
	})
}
