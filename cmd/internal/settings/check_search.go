package settings

import (
	"fmt"
	"slices"

	"cedewright/portfolio/fault"
	"cedewright/portfolio/treaty"
)

func (c *checker) search(s Search) {
	c.budget(s)
	var list []string
	for _, p := range c.s.Programmes {
		list = append(list, p.Name)
	}
	programmes := names{list: list, has: set(list), broken: c.namesBroken("programmes")}
	c.known("search.from", "programme", s.From, programmes)
	if len(list) == 0 && len(s.Vary) > 0 {
		c.add("search.vary", "no programme whose treaties could be varied", "at least one programme")
		return
	}
	if s.Tower != nil && len(s.Towers) > 0 {
		c.add("search.towers", "given beside tower", "tower for one, towers for a list")
	}
	for i, k := range s.Keep {
		key := fmt.Sprintf("search.keep[%d]", i)
		c.known(key+".standard", "standard", k.Standard, c.standards)
		if k.Measure == "own funds ratio" && c.s.Capital.OwnFunds == nil && !c.broken("capital.own_funds") {
			c.add(key+".measure", "own funds ratio, but capital.own_funds is not given", "own funds")
		}
	}
	start, ok := c.start(s)
	for i, v := range s.Vary {
		c.ranges(fmt.Sprintf("search.vary[%d]", i), v)
	}
	towers := s.towers()
	c.names("search.towers", len(s.Towers), func(i int) string { return s.Towers[i].Name })
	for _, t := range towers {
		c.tower(t.key, t.tower, start)
	}
	if !ok || c.broken("programmes") || slices.ContainsFunc(towers, func(t keyedTower) bool { return c.broken(t.key) }) || c.broken("search.vary") {
		return // the space would be another one
	}
	said := map[string]bool{}
	for _, f := range fault.All(c.d.faults.Err()) {
		said[f.Key] = true
	}
	_, err := c.s.Space()
	for _, f := range fault.All(err) {
		if !said[f.Key] {
			c.take(*f)
		}
	}
}

// ranges reports ranges that stand upside down or need a step.
func (c *checker) ranges(key string, v Vary) {
	for _, r := range []struct {
		name  string
		money *MoneyRange
		share *FractionRange
	}{
		{"retention", v.Retention, nil}, {"limit", v.Limit, nil}, {"annual_deductible", v.AnnualDeductible, nil},
		{"share", nil, v.Share}, {"cession", nil, v.Cession},
	} {
		if r.money != nil {
			c.extent(key+"."+r.name, moneyText(float64(r.money.From)), moneyText(float64(r.money.To)), r.money.From < r.money.To, r.money.From > r.money.To, r.money.Step != nil)
		}
		if r.share != nil {
			c.shares(key+"."+r.name, *r.share)
		}
	}
}

func (c *checker) shares(key string, r FractionRange) {
	c.extent(key, plain(float64(r.From)), plain(float64(r.To)), r.From < r.To, r.From > r.To, r.Step != nil)
}

func (c *checker) extent(key, from, to string, rises, falls, step bool) {
	if falls {
		c.add(key, "from "+from+" to "+to, "from at most to")
	}
	if rises && !step {
		c.add(key+".step", "the key is missing", "the distance between values that may be chosen")
	}
}

// start gives the programme that the search starts from; ok is false when the study has none of that name, or two.
func (c *checker) start(s Search) (start Programme, ok bool) {
	start, ok = Programme{Name: NoCover}, s.From == ""
	if ok && len(c.s.Programmes) > 0 {
		return c.s.Programmes[0], true
	}
	found := 0
	for _, p := range c.s.Programmes {
		if p.Name == s.From {
			start, found = p, found+1
		}
	}
	return start, ok || found == 1
}

// budget checks the bounds that ReadRun asks for as well, so that they are reported with the other faults.
func (c *checker) budget(s Search) {
	for _, b := range runSettings() {
		given := map[string]*Count{"population": s.Population, "generations": s.Generations, "evaluations": s.Evaluations, "patience": s.Patience}[b.name]
		if given != nil && (int(*given) < b.least || int(*given) > b.most) {
			c.add("search."+b.name, fmt.Sprint(*given), fmt.Sprintf("a whole number from %d to %d", b.least, b.most))
		}
	}
}

// tower checks what a tower names; start is the programme whose treaties it can replace.
func (c *checker) tower(key string, t Tower, start Programme) {
	terms := Treaty{Name: t.Name, Kind: t.Kind, Classes: t.Classes, Perils: t.Perils}
	c.subject(key, terms)
	c.known(key+".curve", "curve", t.Curve, c.curves)
	for name, r := range map[string]MoneyRange{"retention": t.Retention, "top": t.Top} { // faults are put in the order of the file
		c.extent(key+"."+name, moneyText(float64(r.From)), moneyText(float64(r.To)), false, r.From > r.To, true)
	}
	if t.Share != nil {
		c.shares(key+".share", *t.Share)
	}
	kinds := []string{treaty.EventExcess.String(), treaty.RiskExcess.String()}
	c.word(key+".kind", "kind of a tower", t.Kind, kinds)
	c.panel(key+".panel", t.Panel)
	for _, f := range fault.All(treaty.Treaty{Name: "x", Kind: treaty.QuotaShare, Panel: panel(t.Panel)}.Validate()) {
		c.take(placed(*f, key+"."+f.Key))
	}
	if t.AnnualDeductible != nil {
		c.money(key+".annual_deductible", *t.AnnualDeductible)
	}
	if t.EventLimit != nil {
		c.moneyAbove(key+".event_limit", *t.EventLimit)
		if t.Kind != treaty.RiskExcess.String() {
			c.add(key+".event_limit", "given for a tower per event", "only for the kind risk-excess")
		}
	}
	kept := names{has: map[string]bool{}, broken: c.broken("programmes")}
	for _, u := range start.Treaties {
		if !slices.Contains(t.Replaces, u.Name) {
			kept.list, kept.has[u.Name] = append(kept.list, u.Name), true
		}
	}
	for i, name := range t.After {
		c.known(fmt.Sprintf("%s.after[%d]", key, i), "treaty that stays", name, kept)
	}
	for i := range min(int(t.Layers), 20) {
		if name := fmt.Sprintf("%s %d", t.Name, i+1); kept.has[name] {
			c.add(key+".name", fmt.Sprintf("%s, whose layer %d would be named like the treaty %s that stays", quoted(t.Name), i+1, quoted(name)), "another name, or the treaty in replaces")
		}
	}
}

// keyedTower is a tower with its key in the study.
type keyedTower struct {
	key   string
	tower Tower
}

func (s Search) towers() []keyedTower {
	var list []keyedTower
	if s.Tower != nil {
		list = append(list, keyedTower{"search.tower", *s.Tower})
	}
	for i, t := range s.Towers {
		list = append(list, keyedTower{fmt.Sprintf("search.towers[%d]", i), t})
	}
	return list
}
