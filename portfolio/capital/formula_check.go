package capital

import (
	"fmt"
	"math"

	"cedewright/portfolio/fault"
)

// Validate reports every fault of the formula at once, for a book with these classes and a register of that many reinsurers. Keys are relative
// to the formula, such as "classes[0].segment", "scenarios[2].kind" or "scenario_correlations[1].correlation", counted from 0; faults of the
// factors have keys that start with "factors.".
func (f *Formula) Validate(classes []string, reinsurers int) error {
	var c factorCheck
	for _, inner := range fault.All(f.Factors.Validate()) {
		inner.Key = "factors." + inner.Key
		c.faults.Add(*inner)
	}
	c.classes(f, classes)
	c.losses(f, classes)
	c.correlations(f)
	c.amounts(f, reinsurers)
	if f.NonProportional > Never {
		c.add("non_proportional", f.NonProportional, "by treaty, always or never")
	}
	return c.faults.Err()
}

// money reports an amount that is not finite and at least 0.
func (c *factorCheck) money(key string, x float64) {
	if !(x >= 0) || math.IsInf(x, 0) {
		c.add(key, x, "money of at least 0")
	}
}

func (c *factorCheck) classes(f *Formula, classes []string) {
	if len(f.Classes) != len(classes) {
		c.add("classes", fmt.Sprintf("%d classes", len(f.Classes)), fmt.Sprintf("one for each class of the book: %q", classes))
	}
	first := map[int]int{} // class that was the first of its segment
	for i, class := range f.Classes {
		key := fmt.Sprintf("classes[%d].", i)
		name := fmt.Sprintf("class %d", i)
		if i < len(classes) {
			name = fmt.Sprintf("%q", classes[i])
		}
		c.money(key+"reserves", class.Reserves)
		c.money(key+"last_premium", class.LastPremium)
		c.money(key+"future_premium", class.FuturePremium)
		c.above(key+"diversification", class.Diversification, 1, "a number above 0 and at most 1; 1 = one region")
		if class.Segment < 0 || class.Segment >= len(f.Factors.Segments) {
			c.add(key+"segment", name+" has no segment", fmt.Sprintf("a segment of the factors, %d in number", len(f.Factors.Segments)))
			continue
		}
		other, seen := first[class.Segment]
		switch {
		case !seen:
			first[class.Segment] = i
		case f.Classes[other].Diversification != class.Diversification:
			found := fmt.Sprintf("%g for %s, but %g for another class of its segment", class.Diversification, name, f.Classes[other].Diversification)
			c.add(key+"diversification", found, "one for all classes of a segment")
		}
	}
}

func (c *factorCheck) losses(f *Formula, classes []string) {
	kinds, names := f.Factors.Kinds(), map[string]bool{}
	for i, s := range f.Scenarios {
		key := fmt.Sprintf("scenarios[%d].", i)
		switch {
		case s.Name == "":
			c.add(key+"name", "no name", "a name of its own")
		case names[s.Name]:
			c.add(key+"name", fmt.Sprintf("%q is the name of another scenario", s.Name), "a name of its own")
		}
		names[s.Name] = true
		if f.Factors.kind(s.Kind) < 0 {
			c.unknownKind(key+"kind", s.Kind, kinds)
		}
		if len(s.Losses) != len(classes) {
			c.add(key+"losses", fmt.Sprintf("%d losses", len(s.Losses)), fmt.Sprintf("one for each class of the book: %q", classes))
		}
		for j, x := range s.Losses {
			c.money(fmt.Sprintf("%slosses[%d]", key, j), x)
		}
	}
}

// correlations checks that every pair of scenarios of one kind is given once, and that those of each kind make a matrix of correlations.
func (c *factorCheck) correlations(f *Formula) {
	const key = "scenario_correlations"
	n := len(f.Scenarios)
	given := map[[2]int]float64{}
	before := c.faults.Len()
	for i, pair := range f.ScenarioCorrelations {
		at := fmt.Sprintf("%s[%d]", key, i)
		c.within(at+".correlation", pair.Correlation, -1, 1, "a correlation from -1 to 1")
		a, b := min(pair.A, pair.B), max(pair.A, pair.B)
		if a < 0 || b >= n || a == b {
			c.add(at+".between", fmt.Sprintf("scenarios %d and %d", pair.A, pair.B), fmt.Sprintf("two of the %d scenarios", n))
			continue
		}
		if f.Scenarios[a].Kind != f.Scenarios[b].Kind {
			found := fmt.Sprintf("%q and %q are of two kinds", f.Scenarios[a].Name, f.Scenarios[b].Name)
			c.add(at+".between", found, "two scenarios of one kind; the text fixes the rest")
			continue
		}
		if _, twice := given[[2]int{a, b}]; twice {
			c.add(at+".between", fmt.Sprintf("%q and %q twice", f.Scenarios[a].Name, f.Scenarios[b].Name), "each pair once")
		}
		given[[2]int{a, b}] = pair.Correlation
	}
	for a := range n {
		for b := a + 1; b < n; b++ {
			if _, ok := given[[2]int{a, b}]; !ok && f.Scenarios[a].Kind == f.Scenarios[b].Kind {
				found := fmt.Sprintf("none of %q with %q", f.Scenarios[a].Name, f.Scenarios[b].Name)
				c.add(key, found, "one for every pair of scenarios of one kind: "+f.Scenarios[a].Kind)
			}
		}
	}
	if c.faults.Len() > before {
		return
	}
	for _, kind := range f.Factors.Kinds() {
		var members []int
		for i, s := range f.Scenarios {
			if s.Kind == kind {
				members = append(members, i)
			}
		}
		if len(members) < 2 {
			continue
		}
		matrix := make([][]float64, len(members))
		for i, a := range members {
			matrix[i] = make([]float64, len(members))
			for j, b := range members {
				matrix[i][j] = given[[2]int{min(a, b), max(a, b)}]
			}
			matrix[i][i] = 1
		}
		if smallest := eigenvalues(matrix)[0]; !(smallest >= smallestEigenvalue) {
			wrong := notSemidefinite(key, smallest)
			wrong.Found = "among scenarios of " + kind + ", " + wrong.Found
			c.faults.Add(wrong)
		}
	}
}

func (c *factorCheck) amounts(f *Formula, reinsurers int) {
	for _, amount := range []struct {
		key string
		x   float64
	}{
		{"lapse", f.Lapse}, {"other_catastrophe", f.OtherCatastrophe}, {"property_reinsurance", f.PropertyReinsurance}, {"market", f.Market}, {"life", f.Life},
		{"health", f.Health}, {"intangible", f.Intangible}, {"operational", f.Operational}, {"type_two", f.TypeTwo},
	} {
		c.money(amount.key, amount.x)
	}
	if !(f.Adjustment <= 0) || math.IsInf(f.Adjustment, 0) {
		c.add("adjustment", f.Adjustment, "money of at most 0: it lowers the requirement")
	}
	if f.Recoverables != nil && len(f.Recoverables) != reinsurers {
		c.add("recoverables", fmt.Sprintf("%d amounts", len(f.Recoverables)), fmt.Sprintf("one for each of the %d reinsurers", reinsurers))
	}
	for i, x := range f.Recoverables {
		c.money(fmt.Sprintf("recoverables[%d]", i), x)
	}
	if len(f.Default) != reinsurers {
		c.add("default", fmt.Sprintf("%d probabilities", len(f.Default)), fmt.Sprintf("one for each of the %d reinsurers", reinsurers))
	}
	for i, p := range f.Default {
		c.within(fmt.Sprintf("default[%d]", i), p, 0, 1, "a probability from 0 to 1")
	}
	if f.Tied != nil && len(f.Tied) != reinsurers {
		c.add("tied", fmt.Sprintf("%d marks", len(f.Tied)), fmt.Sprintf("one for each of the %d reinsurers", reinsurers))
	}
}
