package optimize

import (
	"fmt"
	"math"
	"slices"

	"cedewright/portfolio/fault"
	"cedewright/portfolio/treaty"
)

// Validate reports every fault of the space at once.
func (s Space) Validate() error {
	var faults fault.List
	names := make([]string, len(s.Start.Treaties))
	kinds := map[string]treaty.Kind{}
	for i, t := range s.Start.Treaties {
		names[i], kinds[t.Name] = t.Name, t.Kind
	}
	unknown := func(key, name string) {
		faults.Add(fault.Fault{Key: key, Found: fmt.Sprintf("the start programme has no treaty named %q", name), Allowed: fmt.Sprintf("%q", names), Nearest: fault.Nearest(name, names)})
	}
	replaced := map[string]bool{}
	for i, t := range s.Towers {
		t.check(&faults, fmt.Sprintf("towers[%d]", i))
		for _, name := range t.Replaces {
			if _, ok := kinds[name]; !ok {
				unknown(fmt.Sprintf("towers[%d].replaces", i), name)
			}
			replaced[name] = true
		}
	}
	seen := map[string]bool{}
	for i, v := range s.Vary {
		key := fmt.Sprintf("vary[%d]", i)
		kind, ok := kinds[v.Treaty]
		switch {
		case !ok:
			unknown(key+".treaty", v.Treaty)
			continue
		case seen[v.Treaty]:
			faults.Add(fault.Fault{Key: key + ".treaty", Found: fmt.Sprintf("%q is varied twice", v.Treaty), Allowed: "each treaty once"})
		case replaced[v.Treaty]:
			faults.Add(fault.Fault{Key: key + ".treaty", Found: fmt.Sprintf("%q is replaced by a tower", v.Treaty), Allowed: "a treaty that stays"})
		}
		seen[v.Treaty] = true
		v.check(&faults, key, kind)
	}
	s.checkNames(&faults, replaced)
	for i, k := range s.Keep {
		k.check(&faults, fmt.Sprintf("keep[%d]", i))
	}
	if len(s.Vary)+len(s.Towers) == 0 {
		faults.Add(fault.Fault{Key: "search", Found: "nothing to vary", Allowed: "at least one entry of vary, or a tower"})
	}
	return faults.Err()
}

func (v Vary) check(faults *fault.List, key string, kind treaty.Kind) {
	share := kind == treaty.QuotaShare
	for _, r := range []struct {
		name      string
		value     *Range
		high      float64
		forShares bool
	}{
		{"retention", v.Retention, math.MaxFloat64, false}, {"limit", v.Limit, math.MaxFloat64, false}, {"share", v.Share, 1, false},
		{"annual_deductible", v.AnnualDeductible, math.MaxFloat64, false}, {"cession", v.Cession, 1, true},
	} {
		if r.value == nil {
			continue
		}
		if share != r.forShares {
			faults.Add(fault.Fault{Key: key + "." + r.name, Found: "given for the kind " + kind.String(), Allowed: "a term that the kind has"})
			continue
		}
		r.value.check(faults, key+"."+r.name, 0, r.high)
		if r.name == "limit" && r.value.From <= 0 {
			faults.Add(fault.Fault{Key: key + ".limit.from", Found: fmt.Sprint(r.value.From), Allowed: "money above 0; use optional: true for a treaty that may be left out"})
		}
	}
	if v.Reinstatements != nil {
		if kind != treaty.EventExcess && kind != treaty.RiskExcess {
			faults.Add(fault.Fault{Key: key + ".reinstatements", Found: "given for the kind " + kind.String(), Allowed: "event-excess and risk-excess only"})
		}
		v.Reinstatements.check(faults, key+".reinstatements")
	}
}

func (t Tower) check(faults *fault.List, key string) {
	if t.Template.Kind != treaty.EventExcess && t.Template.Kind != treaty.RiskExcess {
		faults.Add(fault.Fault{Key: key + ".kind", Found: t.Template.Kind.String(), Allowed: "event-excess or risk-excess"})
	}
	if t.Layers < 1 || t.Layers > largestTower {
		faults.Add(fault.Fault{Key: key + ".layers", Found: fmt.Sprint(t.Layers), Allowed: fmt.Sprintf("from 1 to %d", largestTower)})
	}
	if !(t.Step > 0) || math.IsInf(t.Step, 0) {
		faults.Add(fault.Fault{Key: key + ".step", Found: fmt.Sprint(t.Step), Allowed: "money above 0"})
		return
	}
	before := faults.Len()
	Range{t.Retention.From, t.Retention.To, t.Step}.check(faults, key+".retention", 0, math.MaxFloat64)
	Range{t.Top.From, t.Top.To, t.Step}.check(faults, key+".top", 0, math.MaxFloat64)
	if faults.Len() == before {
		t.checkGrid(faults, key)
	}
	t.Share.check(faults, key+".share", 0, 1)
	if t.Reinstatements != nil {
		t.Reinstatements.check(faults, key+".reinstatements")
	}
}

// checkGrid reports steps from the lowest retention that are too many up to the highest top, or of which none is a top.
func (t Tower) checkGrid(faults *fault.List, key string) {
	grid := t.grid()
	switch {
	case t.Top.To <= t.Retention.From:
		faults.Add(fault.Fault{Key: key + ".top", Found: fmt.Sprintf("%v, not above the lowest retention %v", t.Top.To, t.Retention.From), Allowed: "a top above the retention"})
	case (grid.To-grid.From)/grid.Step > largestRange:
		faults.Add(fault.Fault{Key: key + ".step", Found: fmt.Sprintf("%.0f steps from the lowest retention to the highest top", (grid.To-grid.From)/grid.Step), Allowed: "at most 10,000"})
	case grid.count() < 2 || grid.at(grid.count()-1) < t.Top.From-1e-9*t.Step:
		faults.Add(fault.Fault{
			Key: key + ".step", Found: fmt.Sprintf("%v: no step from the lowest retention %v ends within the tops from %v to %v", t.Step, t.Retention.From, t.Top.From, t.Top.To),
			Allowed: "a step that reaches a top",
		})
	}
}

// checkNames reports layers of a tower that would be named like a treaty that stays, and towers of one name.
func (s Space) checkNames(faults *fault.List, replaced map[string]bool) {
	for i, t := range s.Towers {
		key := fmt.Sprintf("towers[%d].name", i)
		if t.Name == "" || slices.ContainsFunc(s.Towers[:i], func(o Tower) bool { return o.Name == t.Name }) {
			faults.Add(fault.Fault{Key: key, Found: fmt.Sprintf("%q", t.Name), Allowed: "a name of its own for each tower"})
		}
		for _, u := range s.Start.Treaties {
			if n := t.layerNumber(u.Name); n > 0 && n <= t.Layers && !replaced[u.Name] {
				faults.Add(fault.Fault{Key: key, Found: fmt.Sprintf("%q, with a layer that would be named like the treaty %q that stays", t.Name, u.Name), Allowed: "another name, or the treaty in replaces"})
			}
		}
	}
}
