package treaty

import (
	"fmt"
	"math"
	"slices"

	"cedewright/portfolio/fault"
)

// Validate reports every fault of the terms at once. The key of a fault is the key of the term in a study, such as "share".
func (t Treaty) Validate() error {
	var faults fault.List
	add := func(key string, found any, allowed string) {
		faults.Add(fault.Fault{Key: key, Found: fmt.Sprint(found), Allowed: allowed})
	}
	if t.Name == "" {
		add("name", "no name", "a name of its own in the programme")
	}
	if t.Kind < QuotaShare || t.Kind > AggregateExcess {
		faults.Add(fault.Fault{Key: "kind", Found: t.Kind.String(), Allowed: fmt.Sprint(KindNames())})
		return faults.Err()
	}
	if t.Kind == QuotaShare {
		if !fraction(t.Cession) {
			add("cession", t.Cession, "a fraction from 0 to 1")
		}
		if c := t.Commission; c.Given && !(c.Value >= 0 && c.Value < 1) {
			add("commission", c.Value, "a fraction from 0 to below 1")
		}
	} else {
		t.validateExcess(add)
	}
	t.validateUnused(&faults)
	return faults.Err()
}

func fraction(x float64) bool { return x >= 0 && x <= 1 }
func money(x float64) bool    { return x >= 0 && !math.IsInf(x, 0) }

func (t Treaty) validateExcess(add func(key string, found any, allowed string)) {
	if !money(t.Retention) {
		add("retention", t.Retention, "money of at least 0")
	}
	if !(t.Limit > 0) {
		add("limit", t.Limit, "money above 0")
	}
	if !fraction(t.Share) {
		add("share", t.Share, "a fraction from 0 to 1")
	}
	if p := t.Premium; p.Given && !money(p.Value) {
		add("premium", p.Value, "money of at least 0 per year, for 100 % of the treaty")
	}
	if !money(t.AnnualDeductible) {
		add("annual_deductible", t.AnnualDeductible, "money of at least 0 per year")
	}
	if !money(t.AnnualLimit) {
		add("annual_limit", t.AnnualLimit, "money above 0 per year")
	}
	if !money(t.EventLimit) {
		add("event_limit", t.EventLimit, "money above 0 per event")
	}
	for k, charge := range t.Reinstatements {
		if !money(charge) {
			add("reinstatements", fmt.Sprintf("charge %d is %v", k+1, charge), "fractions of the base premium of at least 0")
		}
	}
	if t.Reinstatements != nil && t.AnnualLimit > 0 {
		add("annual_limit", "given together with reinstatements", "one of the two: n reinstatements make the annual limit (n+1) limits")
	}
	if t.Reinstatements != nil && math.IsInf(t.Limit, 1) {
		add("reinstatements", "given for an unlimited layer", "a limit to reinstate")
	}
}

// validateUnused reports terms that the treaty's kind does not use: a cover that reads as if it had them would mislead.
func (t Treaty) validateUnused(faults *fault.List) {
	annual := []Kind{EventExcess, RiskExcess}
	excess := []Kind{EventExcess, RiskExcess, AggregateExcess}
	for _, term := range []struct {
		key   string
		given bool
		kinds []Kind
	}{
		{"cession", t.Cession != 0, []Kind{QuotaShare}},
		{"commission", t.Commission.Given, []Kind{QuotaShare}},
		{"retention", t.Retention != 0, excess},
		{"limit", t.Limit != 0, excess},
		{"share", t.Share != 0, excess},
		{"premium", t.Premium.Given, excess},
		{"annual_deductible", t.AnnualDeductible != 0, annual},
		{"annual_limit", t.AnnualLimit != 0, annual},
		{"reinstatements", t.Reinstatements != nil, annual},
		{"event_limit", t.EventLimit != 0, []Kind{RiskExcess}},
	} {
		if term.given && !slices.Contains(term.kinds, t.Kind) {
			faults.Add(fault.Fault{Key: term.key, Found: "given for the kind " + t.Kind.String(), Allowed: fmt.Sprintf("only for %v", term.kinds)})
		}
	}
}

// Validate reports every fault of the programme at once, given the names of the book's classes and perils. The key of a fault starts
// with the name of the treaty.
func (p Programme) Validate(classes, perils []string) error {
	var faults fault.List
	seen := map[string]bool{}
	for _, t := range p.Treaties {
		for _, f := range fault.All(t.Validate()) {
			f.Key = t.Name + "." + f.Key
			faults.Add(*f)
		}
		if seen[t.Name] {
			faults.Add(fault.Fault{Key: t.Name + ".name", Found: "two treaties of this name", Allowed: "one treaty of a name"})
		}
		seen[t.Name] = true
		checkNames(&faults, t.Name+".classes", "class", t.Classes, classes)
		checkNames(&faults, t.Name+".perils", "peril", t.Perils, perils)
		if slices.Contains(t.After, t.Name) {
			faults.Add(fault.Fault{Key: t.Name + ".after", Found: "the treaty itself", Allowed: "other treaties of the programme"})
		}
	}
	if faults.Len() == 0 {
		if _, err := p.Order(); err != nil {
			faults.AddError(err)
		}
		p.overlaps(&faults)
	}
	return faults.Err()
}

func checkNames(faults *fault.List, key, what string, names, known []string) {
	for i, name := range names {
		if !slices.Contains(known, name) {
			faults.Add(fault.Fault{Key: key, Found: fmt.Sprintf("no %s of the book is named %q", what, name), Allowed: fmt.Sprintf("%q", known), Nearest: fault.Nearest(name, known)})
		}
		if slices.Contains(names[:i], name) {
			faults.Add(fault.Fault{Key: key, Found: fmt.Sprintf("%q twice", name), Allowed: "each name once"})
		}
	}
}

// overlaps reports two excess treaties of one kind on the same subject whose layers overlap while together more than 100 % of the
// overlap is placed: the cedant would recover more than it lost.
func (p Programme) overlaps(faults *fault.List) {
	for i, t := range p.Treaties {
		for _, u := range p.Treaties[:i] {
			if t.Kind != u.Kind || t.Kind == QuotaShare || !sameSet(t.Classes, u.Classes) || !sameSet(t.Perils, u.Perils) || !sameSet(t.After, u.After) {
				continue
			}
			low, high := max(t.Retention, u.Retention), min(t.Retention+t.Limit, u.Retention+u.Limit)
			if low < high && t.Share+u.Share > 1+1e-9 {
				faults.Add(fault.Fault{
					Key:     t.Name,
					Found:   fmt.Sprintf("overlaps %q between %v and %v, where %.6g %% would be placed", u.Name, low, high, 100*(t.Share+u.Share)),
					Allowed: "at most 100 % of any layer on one subject",
				})
			}
		}
	}
}

func sameSet(a, b []string) bool {
	if len(a) != len(b) {
		return false
	}
	for _, name := range a {
		if !slices.Contains(b, name) {
			return false
		}
	}
	return true
}
