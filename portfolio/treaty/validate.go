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
	t.validatePanel(add)
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
	if t.Kind == AggregateExcess || t.Reinstatements == nil {
		return // for an aggregate-excess, validateUnused says that it has none
	}
	if t.AnnualLimit > 0 {
		add("annual_limit", "given together with reinstatements", "one of the two: n reinstatements make the annual limit (n+1) limits")
	}
	if math.IsInf(t.Limit, 1) {
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
	ordered := true // the names in After make sense, so that a cycle can be looked for
	for _, t := range p.Treaties {
		for _, f := range fault.All(t.Validate()) {
			f.Key = t.Name + "." + f.Key
			faults.Add(*f)
		}
		if seen[t.Name] {
			faults.Add(fault.Fault{Key: t.Name + ".name", Found: "two treaties of this name", Allowed: "one treaty of a name"})
			ordered = false
		}
		seen[t.Name] = true
		checkNames(&faults, t.Name+".classes", "class", t.Classes, classes)
		checkNames(&faults, t.Name+".perils", "peril", t.Perils, perils)
		ordered = p.checkAfter(&faults, t) && ordered
	}
	sound := faults.Len() == 0
	if ordered {
		_, err := p.Order()
		faults.AddError(err)
	}
	if sound {
		p.overlaps(&faults)
		p.cessions(&faults)
	}
	return faults.Err()
}

// checkAfter checks the names of the treaties that inure to t, and tells whether they are all of other treaties.
func (p Programme) checkAfter(faults *fault.List, t Treaty) bool {
	before := faults.Len()
	for i, name := range t.After {
		switch {
		case name == t.Name:
			faults.Add(fault.Fault{Key: t.Name + ".after", Found: "the treaty itself", Allowed: "other treaties of the programme"})
		case !slices.Contains(p.names(), name):
			faults.Add(p.unknown(t, name))
		case slices.Contains(t.After[:i], name):
			faults.Add(fault.Fault{Key: t.Name + ".after", Found: fmt.Sprintf("%q twice", name), Allowed: "each name once"})
		}
	}
	return faults.Len() == before
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

// sameSubject tells whether two treaties of one kind look at the same losses, as far as their terms alone can say.
func sameSubject(t, u Treaty) bool {
	return t.Kind == u.Kind && sameSet(t.Classes, u.Classes) && sameSet(t.Perils, u.Perils) && sameSet(t.After, u.After)
}

// overlaps reports excess treaties of one kind on the same subject whose layers overlap while together more than 100 % of the overlap
// is placed: the cedant would recover more than it lost. Each treaty is held against those above it in the list, and blamed once.
func (p Programme) overlaps(faults *fault.List) {
	for i, t := range p.Treaties {
		if t.Kind == QuotaShare {
			continue
		}
		bottoms := []float64{t.Retention} // what is placed can only rise where a layer starts
		for _, u := range p.Treaties[:i] {
			if sameSubject(t, u) && u.Retention > t.Retention && u.Retention < t.Retention+t.Limit {
				bottoms = append(bottoms, u.Retention)
			}
		}
		slices.Sort(bottoms)
		for _, low := range bottoms {
			placed, high, others := t.Share, t.Retention+t.Limit, ""
			for _, u := range p.Treaties[:i] {
				if sameSubject(t, u) && u.Share > 0 && u.Retention <= low && low < u.Retention+u.Limit {
					placed, high, others = placed+u.Share, min(high, u.Retention+u.Limit), others+fmt.Sprintf(" %q", u.Name)
				}
			}
			if t.Share > 0 && placed > 1+shareRounding {
				faults.Add(fault.Fault{
					Key:     t.Name,
					Found:   fmt.Sprintf("overlaps%s between %v and %v, where %.6g %% would be placed", others, low, high, 100*placed),
					Allowed: "at most 100 % of any layer on one subject",
				})
				break
			}
		}
	}
}

// shareRounding is by how much shares that make 100 % may exceed it: some additions of numbers up to 1 err by 1e-16 each.
const shareRounding = 1e-9

// cessions reports quota shares on the same subject that cede more than all of it.
func (p Programme) cessions(faults *fault.List) {
	for i, t := range p.Treaties {
		ceded, others := t.Cession, ""
		for _, u := range p.Treaties[:i] {
			if sameSubject(t, u) && u.Cession > 0 {
				ceded, others = ceded+u.Cession, others+fmt.Sprintf(" %q", u.Name)
			}
		}
		if t.Kind == QuotaShare && t.Cession > 0 && ceded > 1+shareRounding {
			faults.Add(fault.Fault{
				Key:     t.Name + ".cession",
				Found:   fmt.Sprintf("%.6g %% of one subject is ceded together with%s", 100*ceded, others),
				Allowed: "at most 100 %, or treaties that come after one another",
			})
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
