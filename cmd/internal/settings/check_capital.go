package settings

import (
	"fmt"
	"math"
	"slices"
	"strings"

	"cedewright/market"
	"cedewright/portfolio/capital"
	"cedewright/portfolio/fault"
	"cedewright/portfolio/treaty"
)

func (c *checker) capital() {
	k := c.s.Capital
	switch {
	case k.Cost == nil && k.Owners == nil:
		c.add("capital.cost", "the key is missing", "a rate per year, such as 9%, or owners, the price of risk of the owners' own")
	case k.Cost != nil && k.Owners != nil:
		c.add("capital.owners", "given beside cost", "one of the two")
	}
	if k.Cost != nil {
		c.fraction("capital.cost", *k.Cost)
	}
	if k.Owners != nil {
		c.owners(*k.Owners)
	}
	if k.OwnFunds != nil {
		c.moneyAbove("capital.own_funds", *k.OwnFunds)
	}
	if len(k.Standards) == 0 {
		c.add("capital.standards", "no standard", "at least one")
	}
	seen := map[string]bool{}
	for i, name := range k.Drive {
		key := fmt.Sprintf("capital.drive[%d]", i)
		c.known(key, "standard", name, c.standards)
		c.once(key, name, seen)
	}
	for i, s := range k.Standards {
		c.standard(fmt.Sprintf("capital.standards[%d]", i), s)
	}
	if k.Rest != nil {
		c.rest(*k.Rest)
	}
}

func (c *checker) owners(o Owners) {
	const key = "capital.owners"
	switch {
	case (o.Curve == "") == (o.Family == ""):
		c.add(key, "curve and family: "+map[bool]string{true: "neither", false: "both"}[o.Curve == ""], "a curve of the market section, or a family with its parameter")
	case o.Curve != "":
		c.known(key+".curve", "curve", o.Curve, c.curves)
		if o.Parameter != nil {
			c.add(key+".parameter", "given beside a curve", "only beside a family")
		}
	case o.Parameter == nil:
		c.word(key+".family", "family of distortions", o.Family, market.FamilyNames())
		c.add(key+".parameter", "the key is missing", "the family's parameter")
	default:
		_, err := o.Distortion()
		for _, f := range fault.All(err) {
			c.take(placed(*f, key+"."+f.Key))
		}
	}
}

// Distortion gives the owners' price of risk, for one that is not taken from a curve.
func (o Owners) Distortion() (market.Distortion, error) {
	return market.NewFamily(o.Family, float64(*o.Parameter))
}

// standard checks that a standard is one thing, and that.
func (c *checker) standard(key string, s Standard) {
	var presets []string
	for _, p := range capital.Presets() {
		presets = append(presets, p.Name)
	}
	plain := s.Preset != "" || s.Measure != "" || s.Level != nil || s.Basis != "" || s.Ratio != nil
	var given []string
	for _, part := range []struct {
		name string
		is   bool
	}{{"a preset or a measure", plain}, {"criteria", len(s.Criteria) > 0}, {"formula", s.Formula != nil}, {"covariance", s.Covariance != nil}} {
		if part.is {
			given = append(given, part.name)
		}
	}
	if len(given) != 1 {
		found := "neither preset, measure, criteria, formula nor covariance"
		if len(given) > 1 {
			found = fmt.Sprintf("%q together", given)
		}
		c.add(key, found, fmt.Sprintf("exactly one: one of the presets %q, measure and level, criteria, formula, or covariance", presets))
		return
	}
	if s.Combine != "" {
		c.word(key+".combine", "combination", s.Combine, capital.CombinationNames())
		if len(s.Criteria) == 0 {
			c.add(key+".combine", "given without criteria", "only beside criteria")
		}
	}
	switch {
	case s.Formula != nil:
		c.formula(key+".formula", *s.Formula)
		return
	case s.Covariance != nil:
		for _, f := range fault.All(s.Covariance.Rule().Validate()) {
			if !strings.HasPrefix(f.Key, "perils[") { // a peril twice: perils reports it
				c.take(placed(*f, key+".covariance."+f.Key))
			}
		}
		c.perils(key+".covariance", s.Covariance.Perils)
		return
	}
	c.word(key+".preset", "preset", s.Preset, presets)
	if plain && s.Preset == "" && (s.Measure == "" || s.Level == nil) {
		c.add(key, "no preset, and measure or level missing", fmt.Sprintf("one of the presets %q, or measure and level", presets))
	}
	c.word(key+".measure", "measure", s.Measure, capital.MeasureNames())
	c.word(key+".basis", "basis", s.Basis, capital.BasisNames())
	c.ratio(key+".ratio", s.Ratio)
	sum, sound := 0.0, true // wrong weights make a wrong sum
	weighted := s.Combine == "weighted" && len(s.Criteria) > 0
	for i, k := range s.Criteria {
		at := fmt.Sprintf("%s.criteria[%d]", key, i)
		c.word(at+".measure", "measure", k.Measure, capital.MeasureNames())
		c.word(at+".basis", "basis", k.Basis, capital.BasisNames())
		c.ratio(at+".ratio", k.Ratio)
		switch {
		case weighted && k.Weight == nil:
			sound = false
			c.add(at+".weight", "the key is missing", "a fraction above 0; the weights come to 100 %")
		case weighted:
			c.within(at+".weight", float64(*k.Weight), 0, 1, true, false, "a fraction above 0, at most 1")
			sound = sound && *k.Weight > 0 && *k.Weight <= 1
			sum += float64(*k.Weight)
		case k.Weight != nil:
			c.add(at+".weight", "given where the worst counts", "only with combine: weighted")
		}
	}
	if weighted && math.Abs(sum-1) > 1e-9 && sound { // rounding of decimals
		c.add(key+".criteria", fmt.Sprintf("weights of %.6g %% together", 100*sum), "weights that come to 100 %")
	}
}

func (c *checker) ratio(key string, r *Fraction) {
	if r != nil {
		c.within(key, float64(*r), 0, 100, true, false, "a multiple above 0, such as 120%")
	}
}

func (c *checker) rest(r Rest) {
	const key = "capital.rest"
	switch {
	case (r.Capital == nil) == (r.Family == ""):
		c.add(key, "capital and family: "+map[bool]string{true: "neither", false: "both"}[r.Capital == nil], "a capital figure with its correlation, or a family with mean and sd")
		return
	case r.Capital != nil:
		c.money(key+".capital", *r.Capital)
		if r.Correlation == nil {
			c.add(key+".correlation", "the key is missing", "the correlation of the rest with the book, from -1 to 1")
		}
		for name, given := range map[string]bool{"mean": r.Mean != nil, "sd": r.SD != nil, "rank_correlation": r.RankCorrelation != nil, "seed": r.Seed != nil} {
			if given {
				c.add(key+"."+name, "given beside capital", "only beside a family")
			}
		}
		if c.s.Capital.Owners != nil {
			c.add(key+".capital", "a capital figure beside the owners' own price of risk", "a family with mean and sd, so that the years are known, or a flat cost of capital")
		}
	default:
		if r.Correlation != nil {
			c.add(key+".correlation", "given beside a family", "rank_correlation")
		}
		c.word(key+".family", "family", r.Family, capital.RestFamilies())
		missing := false
		for _, m := range []struct {
			name  string
			given bool
		}{{"mean", r.Mean != nil}, {"sd", r.SD != nil}} {
			if !m.given {
				missing = true
				c.add(key+"."+m.name, "the key is missing", "")
			}
		}
		if !missing && slices.Contains(capital.RestFamilies(), r.Family) {
			_, err := capital.RestLaw(r.Family, float64(*r.Mean), float64(*r.SD))
			for _, f := range fault.All(err) {
				c.take(placed(*f, key+"."+f.Key))
			}
		}
	}
	for _, x := range []struct {
		name  string
		value *Fraction
	}{{"correlation", r.Correlation}, {"rank_correlation", r.RankCorrelation}} {
		if x.value != nil {
			c.within(key+"."+x.name, float64(*x.value), -1, 1, false, false, "a correlation from -1 to 1")
		}
	}
}

func (c *checker) security() {
	s := c.s.Security
	if s == nil {
		return
	}
	if len(s.Reinsurers) == 0 {
		c.add("security.reinsurers", "no reinsurer", "at least one")
	}
	c.within("security.correlation", float64(s.Correlation), 0, 1, false, true, "a correlation of at least 0 and below 1")
	for i, r := range s.Reinsurers {
		key := fmt.Sprintf("security.reinsurers[%d]", i)
		given := 0
		for _, is := range []bool{r.Step != nil, r.SolvencyRatio != nil, r.DefaultProbability != nil} {
			if is {
				given++
			}
		}
		if given != 1 {
			c.add(key, fmt.Sprintf("%d of step, solvency_ratio and default_probability", given), "exactly one")
		}
		if r.Step != nil && *r.Step > 6 {
			c.add(key+".step", fmt.Sprint(*r.Step), "a credit quality step from 0 to 6")
		}
		if r.SolvencyRatio != nil {
			c.within(key+".solvency_ratio", float64(*r.SolvencyRatio), 0, math.Inf(1), false, false, "a ratio of at least 0, such as 150%")
		}
		if r.DefaultProbability != nil {
			c.within(key+".default_probability", float64(*r.DefaultProbability), 0, 1, false, true, "a yearly probability of at least 0 and below 1, such as 0.05%")
		}
		if r.LossGivenDefault != nil {
			c.fraction(key+".loss_given_default", *r.LossGivenDefault)
		}
	}
	c.panel("security.panel", s.Panel)
	for _, f := range fault.All(treaty.Treaty{Name: "x", Kind: treaty.QuotaShare, Panel: panel(s.Panel)}.Validate()) {
		c.take(placed(*f, "security."+f.Key))
	}
}

// panel checks the names of a panel; its shares are checked with the treaty.
func (c *checker) panel(key string, lines []Line) {
	if len(lines) > 0 && c.s.Security == nil {
		c.add(key, "a panel in a study without the section security", "reinsurers in the section security")
		return
	}
	for i, l := range lines {
		c.known(fmt.Sprintf("%s[%d].reinsurer", key, i), "reinsurer", l.Reinsurer, c.reinsurers)
	}
}
