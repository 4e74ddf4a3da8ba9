package settings

import (
	"fmt"
	"math"
	"slices"
	"strings"

	"cedewright/portfolio/capital"
	"cedewright/portfolio/fault"
)

// formula checks a formula. What its factors have a say in is checked here when they ship, else when they are read.
func (c *checker) formula(key string, f Formula) {
	before := c.d.faults.Len()
	factors, known := readShipped(f.Factors)
	c.word(key+".non_proportional", "way", f.NonProportional, nonProportional)
	seen, first := map[string]bool{}, map[Count]FormulaClass{} // classes seen, and the first of each segment
	for i, k := range f.Classes {
		at := fmt.Sprintf("%s.classes[%d]", key, i)
		c.known(at+".class", "class", k.Class, c.classes)
		c.once(at+".class", k.Class, seen)
		for _, m := range []struct {
			name string
			x    Money
		}{{"reserves", k.Reserves}, {"last_premium", k.LastPremium}, {"future_premium", k.FuturePremium}} {
			c.money(at+"."+m.name, m.x)
		}
		if k.Diversification != nil {
			c.within(at+".diversification", float64(*k.Diversification), 0, 1, true, false, "a fraction above 0, at most 100 %, which is one region")
		}
		if known && !slices.ContainsFunc(factors.Segments, func(s capital.Segment) bool { return s.Number == int(k.Segment) }) {
			c.add(at+".segment", fmt.Sprintf("no segment %d", k.Segment), segmentWords(factors))
		}
		other, twice := first[k.Segment]
		switch {
		case !twice:
			first[k.Segment] = k
		case other.diversification() != k.diversification():
			found := fmt.Sprintf("%.6g %% for %s, but %.6g %% for %s of the same segment", 100*k.diversification(), quoted(k.Class), 100*other.diversification(), quoted(other.Class))
			c.add(at+".diversification", found, "one for all classes of a segment")
		}
	}
	if !c.classes.broken && !c.broken(key+".classes") {
		for _, name := range c.classes.list {
			if name != "" && !seen[name] {
				c.add(key+".classes", "a class without segment under the standard formula: "+quoted(name), "every class of the book with its segment"+segmentList(factors, known))
			}
		}
	}
	scenarios := c.names(key+".scenarios", len(f.Scenarios), func(i int) string { return f.Scenarios[i].Name })
	for i, s := range f.Scenarios {
		at := fmt.Sprintf("%s.scenarios[%d]", key, i)
		if known {
			c.word(at+".kind", "kind of scenario", s.Kind, factors.Kinds())
		}
		if s.Peril != "" { // the kind, which serves without it, need not be a peril that the book simulates
			c.known(at+".peril", "peril of the book", s.Peril, c.perilsOf)
		}
		hit := map[string]bool{}
		for j, l := range s.Losses {
			c.known(fmt.Sprintf("%s.losses[%d].class", at, j), "class", l.Class, c.classes)
			c.once(fmt.Sprintf("%s.losses[%d].class", at, j), l.Class, hit)
			c.money(fmt.Sprintf("%s.losses[%d].loss", at, j), l.Loss)
		}
	}
	for i, k := range f.Correlations {
		at := fmt.Sprintf("%s.correlations[%d]", key, i)
		if len(k.Between) != 2 || k.Between[0] == k.Between[1] {
			c.add(at+".between", fmt.Sprintf("%q", k.Between), "two different scenarios")
			continue
		}
		for j, name := range k.Between {
			c.known(fmt.Sprintf("%s.between[%d]", at, j), "scenario", name, scenarios)
		}
		c.within(at+".correlation", float64(k.Correlation), -1, 1, false, false, "a correlation from -1 to 1")
	}
	for _, m := range []struct {
		name string
		x    Money
	}{
		{"lapse", f.Lapse}, {"other_catastrophe", f.OtherCatastrophe}, {"property_reinsurance", f.PropertyReinsurance}, {"market", f.Market}, {"life", f.Life},
		{"health", f.Health}, {"intangible", f.Intangible}, {"operational", f.Operational}, {"type_two", f.TypeTwo},
	} {
		c.money(key+"."+m.name, m.x)
	}
	c.within(key+".adjustment", float64(f.Adjustment), math.Inf(-1), 0, false, false, "money of at most 0")
	for i, r := range f.Recoverables {
		at := fmt.Sprintf("%s.recoverables[%d]", key, i)
		c.known(at+".reinsurer", "reinsurer", r.Reinsurer, c.reinsurers)
		c.money(at+".amount", r.Amount)
	}
	if known && c.d.faults.Len() == before && !c.broken(key) && !c.classes.broken { // names are sound: pairs of scenarios can be matched
		rule := f.Rule(factors, c.s.Book.Classes, nil)
		for _, wrong := range fault.All(rule.Validate(c.classes.list, 0)) {
			if rest, ok := strings.CutPrefix(wrong.Key, "scenario_correlations"); ok {
				c.take(placed(*wrong, key+".correlations"+rest))
			}
		}
	}
}

// diversification gives DIV, 1 when it is left out.
func (k FormulaClass) diversification() float64 {
	if k.Diversification == nil {
		return 1
	}
	return float64(*k.Diversification)
}

// readShipped gives the factors of that name, and whether they ship. A test reads every file that ships.
func readShipped(name string) (capital.Factors, bool) {
	data, ok := ShippedFactors(name)
	if !ok {
		return capital.Factors{}, false
	}
	factors, err := ReadFactors(data, name)
	return factors, err == nil
}

// segmentWords lists the segments of factors: "1 motor liability, 2 …".
func segmentWords(f capital.Factors) string {
	var list []string
	for _, s := range f.Segments {
		list = append(list, fmt.Sprintf("%d %s", s.Number, s.Name))
	}
	return strings.Join(list, ", ")
}

func segmentList(f capital.Factors, known bool) string {
	if !known {
		return " in the factors"
	}
	return ": " + segmentWords(f)
}
