package settings

import (
	"fmt"
	"math"
	"slices"

	"cedewright/market"
	"cedewright/portfolio/capital"
	"cedewright/portfolio/fault"
	"cedewright/portfolio/treaty"
)

// checker collects what the keys of a study say against one another.
type checker struct {
	s       Study
	faults  *fault.List
	classes []string
	curves  []string
}

func (s Study) check(faults *fault.List) {
	c := &checker{s: s, faults: faults}
	for i, class := range s.Book.Classes {
		c.classes = append(c.classes, class.Name)
		key := fmt.Sprintf("book.classes[%d]", i)
		c.fraction(key+".expenses", float64(class.Expenses))
		c.money(key+".premium", float64(class.Premium))
	}
	c.distinct("book.classes", c.classes)
	for _, curve := range s.Market.Curves {
		c.curves = append(c.curves, curve.Name)
	}
	c.distinct("market.curves", c.curves)
	c.book()
	c.market()
	c.programmes()
	c.capital()
	if s.Search != nil {
		c.search(*s.Search)
	}
}

func (c *checker) add(key, found, allowed string) {
	c.faults.Add(c.s.At(fault.Fault{Key: key, Found: found, Allowed: allowed}))
}

func (c *checker) known(key, what, name string, known []string) {
	if !slices.Contains(known, name) {
		c.faults.Add(c.s.At(fault.Fault{Key: key, Found: fmt.Sprintf("no %s is named %q", what, name), Allowed: fmt.Sprintf("%q", known), Nearest: fault.Nearest(name, known)}))
	}
}

func (c *checker) distinct(key string, names []string) {
	for i, name := range names {
		at := fmt.Sprintf("%s[%d].name", key, i)
		if name == "" {
			c.add(at, "no name", "a name")
		}
		if slices.Contains(names[:i], name) {
			c.add(at, fmt.Sprintf("%q is the name of another", name), "names of their own")
		}
	}
}

func (c *checker) fraction(key string, x float64) {
	if !(x >= 0 && x <= 1) {
		c.add(key, fmt.Sprint(x), "a fraction from 0 to 1")
	}
}

func (c *checker) money(key string, x float64) {
	if !(x >= 0) || math.IsInf(x, 0) {
		c.add(key, fmt.Sprint(x), "money of at least 0")
	}
}

func (c *checker) book() {
	b := c.s.Book
	if b.Years < 1 || b.Years > 10_000_000 {
		c.add("book.years", fmt.Sprint(b.Years), "a whole number from 1 to 10,000,000")
	}
	if len(b.Classes) == 0 {
		c.add("book.classes", "no class", "at least one")
	}
	if len(b.Tables)+len(b.Models) == 0 && b.Attritional == nil {
		c.add("book", "no losses", "tables, models or attritional losses")
	}
	var models []string
	for i, m := range b.Models {
		models = append(models, m.Name)
		c.model(fmt.Sprintf("book.models[%d]", i), m)
	}
	c.distinct("book.models", models)
	if a := b.Attritional; a != nil {
		if a.Family != "lognormal" && a.Family != "gamma" {
			c.add("book.attritional.family", fmt.Sprintf("%q", a.Family), "lognormal or gamma")
		}
		for i, l := range a.Losses {
			c.known(fmt.Sprintf("book.attritional.losses[%d].class", i), "class", l.Class, c.classes)
		}
		for i, r := range a.Correlations {
			key := fmt.Sprintf("book.attritional.correlations[%d]", i)
			if len(r.Between) != 2 {
				c.add(key+".between", fmt.Sprintf("%d classes", len(r.Between)), "two classes")
				continue
			}
			for j, class := range r.Between {
				c.known(fmt.Sprintf("%s.between[%d]", key, j), "class", class, c.classes)
			}
		}
	}
}

func (c *checker) model(key string, m Model) {
	if m.History != nil {
		if m.Severity != nil || len(m.Split) > 0 {
			c.add(key+".history", "given beside severity or split", "a history, or severity and split")
		}
		for i, column := range m.History.Columns {
			c.known(fmt.Sprintf("%s.history.columns[%d].class", key, i), "class", column.Class, c.classes)
		}
		if m.Frequency.Family == "fitted" && m.History.DateColumn == "" {
			c.add(key+".history", "no date_column, but the frequency is fitted to yearly counts", "the name of the column of dates")
		}
	} else {
		if m.Severity == nil {
			c.add(key, "no severity", "severity and split, or a history")
		}
		if m.Frequency.Family == "fitted" {
			c.add(key+".frequency.family", "fitted, but the model has no history", "poisson, negative-binomial or binomial")
		}
		sum := 0.0
		for i, s := range m.Split {
			c.known(fmt.Sprintf("%s.split[%d].class", key, i), "class", s.Class, c.classes)
			sum += float64(s.Share)
		}
		if math.Abs(sum-1) > 1e-9 {
			c.add(key+".split", fmt.Sprintf("shares that add up to %.6g", sum), "shares that add up to 1")
		}
		if m.Severity != nil {
			if _, err := m.Severity.law(); err != nil {
				c.add(key+".severity", err.Error(), "")
			}
		}
	}
	if m.Frequency.Family != "fitted" {
		if _, err := m.Frequency.law(); err != nil {
			c.add(key+".frequency", err.Error(), "")
		}
	}
}

func (c *checker) market() {
	for i, curve := range c.s.Market.Curves {
		key := fmt.Sprintf("market.curves[%d]", i)
		if !(curve.Brokerage >= 0 && curve.Brokerage < 1) {
			c.add(key+".brokerage", fmt.Sprint(float64(curve.Brokerage)), "a fraction from 0 to below 1")
		}
		if m := curve.MinimumRateOnLine; m != nil {
			c.fraction(key+".minimum_rate_on_line", float64(*m))
		}
		own := slices.ContainsFunc(c.s.Market.OwnQuotes, func(q OwnQuote) bool { return q.Curve == curve.Name })
		switch fitted := curve.Quotes != "" || own; {
		case curve.Family != "" && (fitted || curve.Fit != ""):
			c.add(key, "both a family with its parameter and a fit to quotes", "family and parameter, or quotes and fit")
		case curve.Family != "":
			if curve.Parameter == nil {
				c.add(key+".parameter", "the key is missing", "the family's parameter")
			} else if _, err := market.NewFamily(curve.Family, float64(*curve.Parameter)); err != nil {
				for _, f := range fault.All(err) {
					f.Key = key + "." + f.Key
					c.faults.Add(c.s.At(*f))
				}
			}
		case !fitted:
			c.add(key, "neither a family nor quotes", "family and parameter, or quotes and fit")
		case curve.Parameter != nil:
			c.add(key+".parameter", "given for a curve that is fitted", "no parameter, or a family")
		default:
			c.known(key+".fit", "way to fit", fitName(curve.Fit), FitNames())
		}
	}
	for i, q := range c.s.Market.OwnQuotes {
		key := fmt.Sprintf("market.own_quotes[%d]", i)
		c.treaty(key, q.Treaty)
		c.known(key+".curve", "curve", q.Curve, c.curves)
		if !(q.RateOnLine > 0 && q.RateOnLine <= 1) {
			c.add(key+".rate_on_line", fmt.Sprint(float64(q.RateOnLine)), "a fraction above 0 and at most 1")
		}
		if q.Limit != nil && q.Limit.Unlimited {
			c.add(key+".limit", "unlimited", "a limit, to which the rate on line refers")
		}
		if q.Weight != nil && !(*q.Weight >= 0) {
			c.add(key+".weight", fmt.Sprint(float64(*q.Weight)), "a number of at least 0")
		}
	}
}

// FitNames lists the ways in which a curve can be fitted: the free curve, the best family by leave-one-out error, or one family.
func FitNames() []string {
	return append([]string{market.FamilyFree, "best"}, market.FamilyNames()...)
}

// fitName gives the way to fit, free when the study names none.
func fitName(name string) string {
	if name == "" {
		return market.FamilyFree
	}
	return name
}

func (c *checker) programmes() {
	var names []string
	for i, p := range c.s.Programmes {
		names = append(names, p.Name)
		if p.Name == NoCover || p.Name == BestFound {
			c.add(fmt.Sprintf("programmes[%d].name", i), fmt.Sprintf("%q", p.Name), "a name that the program does not use itself")
		}
		before := c.faults.Len()
		for j, t := range p.Treaties {
			key := fmt.Sprintf("programmes[%d].treaties[%d]", i, j)
			c.treaty(key, t)
			if t.Curve != "" {
				c.known(key+".curve", "curve", t.Curve, c.curves)
			} else if t.Premium == nil && t.Commission == nil {
				c.add(key, "the treaty has no price", "a curve, or a quoted premium (a commission for a quota share)")
			}
		}
		if c.faults.Len() == before {
			c.programme(i, p)
		}
	}
	c.distinct("programmes", names)
}

// Names that the program gives to programmes of its own.
const (
	NoCover   = "no cover"
	BestFound = "best found"
)

// programme checks a programme as a whole; perils are left to the data.
func (c *checker) programme(i int, p Programme) {
	terms := p.Terms()
	var perils []string
	for _, t := range terms.Treaties {
		perils = append(perils, t.Perils...)
	}
	for _, f := range fault.All(terms.Validate(c.classes, perils)) {
		for j, t := range p.Treaties {
			if rest, ok := cutName(f.Key, t.Name); ok {
				f.Key = fmt.Sprintf("programmes[%d].treaties[%d]%s", i, j, rest)
				break
			}
		}
		c.faults.Add(c.s.At(*f))
	}
}

// cutName takes the name of a treaty off the front of a fault's key.
func cutName(key, name string) (rest string, ok bool) {
	if key == name {
		return "", true
	}
	if len(key) > len(name) && key[:len(name)] == name && key[len(name)] == '.' {
		return key[len(name):], true
	}
	return "", false
}

// treaty checks the terms of one treaty by themselves.
func (c *checker) treaty(key string, t Treaty) {
	if _, err := treaty.ParseKind(t.Kind); err != nil {
		c.known(key+".kind", "kind of treaty", t.Kind, treaty.KindNames())
		return
	}
	excess := t.Kind != treaty.QuotaShare.String()
	for _, need := range []struct {
		key    string
		given  bool
		wanted bool
	}{
		{"cession", t.Cession != nil, !excess}, {"retention", t.Retention != nil, excess}, {"limit", t.Limit != nil, excess},
	} {
		if need.wanted && !need.given {
			c.add(key+"."+need.key, "the key is missing", "")
		}
	}
	for _, f := range fault.All(t.Terms().Validate()) {
		if f.Key == "limit" && t.Limit == nil || f.Key == "cession" && t.Cession == nil {
			continue // said already
		}
		f.Key = key + "." + f.Key
		c.faults.Add(c.s.At(*f))
	}
}

func (c *checker) capital() {
	k := c.s.Capital
	c.fraction("capital.cost", float64(k.Cost))
	if k.OwnFunds != nil && !(*k.OwnFunds > 0) {
		c.add("capital.own_funds", fmt.Sprint(float64(*k.OwnFunds)), "money above 0")
	}
	if len(k.Standards) == 0 {
		c.add("capital.standards", "no standard", "at least one")
	}
	var names, presets []string
	for _, p := range capital.Presets() {
		presets = append(presets, p.Name)
	}
	for i, s := range k.Standards {
		names = append(names, s.Name)
		key := fmt.Sprintf("capital.standards[%d]", i)
		if s.Preset != "" {
			c.known(key+".preset", "preset", s.Preset, presets)
		} else if s.Measure == "" || s.Level == nil {
			c.add(key, "no preset, and measure or level missing", fmt.Sprintf("one of the presets %q, or measure and level", presets))
		}
		if s.Measure != "" {
			c.known(key+".measure", "measure", s.Measure, capital.MeasureNames())
		}
		if s.Basis != "" {
			c.known(key+".basis", "basis", s.Basis, capital.BasisNames())
		}
	}
	c.distinct("capital.standards", names)
}

func (c *checker) search(s Search) {
	var programmes []string
	for _, p := range c.s.Programmes {
		programmes = append(programmes, p.Name)
	}
	switch {
	case s.From != "":
		c.known("search.from", "programme", s.From, programmes)
	case len(programmes) == 0 && len(s.Vary) > 0:
		c.add("search.vary", "no programme whose treaties could be varied", "at least one programme")
	}
	if s.Tower != nil && len(s.Towers) > 0 {
		c.add("search.towers", "given beside tower", "tower for one, towers for a list")
	}
	var standards []string
	for _, k := range c.s.Capital.Standards {
		standards = append(standards, k.Name)
	}
	for i, k := range s.Keep {
		key := fmt.Sprintf("search.keep[%d]", i)
		if k.Standard != "" {
			c.known(key+".standard", "standard", k.Standard, standards)
		}
		if k.Measure == "own funds ratio" && c.s.Capital.OwnFunds == nil {
			c.add(key+".measure", "own funds ratio, but capital.own_funds is not given", "own funds")
		}
	}
	for _, t := range s.towers() {
		for j, class := range t.tower.Classes {
			c.known(fmt.Sprintf("%s.classes[%d]", t.key, j), "class", class, c.classes)
		}
		c.known(t.key+".curve", "curve", t.tower.Curve, c.curves)
		if t.tower.Kind != "" {
			c.known(t.key+".kind", "kind of treaty", t.tower.Kind, []string{treaty.EventExcess.String(), treaty.RiskExcess.String()})
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
