package optimize

import (
	"fmt"
	"math"
	"slices"

	"cedewright/portfolio/treaty"
)

// overplaced adds up how far excess treaties of one kind on one subject overlap while together more than 100 % of the overlap is placed:
// the share beyond 100 %, times the part of the lower of the two limits that overlaps. The cedant would recover more than it lost, so
// such a programme is not valid (treaty.Programme.Validate).
func overplaced(p treaty.Programme) float64 {
	sum := 0.0
	for i, t := range p.Treaties {
		for _, u := range p.Treaties[:i] {
			beyond := t.Share + u.Share - 1
			if t.Kind != u.Kind || t.Kind == treaty.QuotaShare || beyond <= 1e-9 {
				continue
			}
			low, high := max(t.Retention, u.Retention), min(t.Retention+t.Limit, u.Retention+u.Limit)
			least := min(t.Limit, u.Limit)
			if high-low <= 1e-9*least || !sameNames(t.Classes, u.Classes) || !sameNames(t.Perils, u.Perils) || !sameNames(t.After, u.After) {
				continue
			}
			overlap := 1.0
			if !math.IsInf(least, 1) {
				overlap = (high - low) / least
			}
			sum += beyond * overlap
		}
	}
	return sum
}

// sameNames tells whether two lists hold the same names in any order.
func sameNames(a, b []string) bool {
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

// unplaceable says, in words, why a programme cannot be placed, apart from the constraints.
func unplaceable(a Appraisal) []string {
	var notes []string
	if len(a.NoTaker) > 0 {
		notes = append(notes, fmt.Sprintf("the market has no capacity for %q of the best found", a.NoTaker))
	}
	if overplaced(a.Programme) > 0 {
		notes = append(notes, "the best found places more than 100 % of a layer, in treaties that overlap on one subject")
	}
	return notes
}

// competing notes towers that look at the same subject as an excess treaty that stays beside them: programmes in which the two overlap
// beyond 100 % are not valid, which is rarely what was meant.
func (s Space) competing() []string {
	var notes []string
	for _, t := range s.Towers {
		for _, u := range s.Start.Treaties {
			v := t.Template
			if u.Kind == v.Kind && u.Share > 0 && sameNames(u.Classes, v.Classes) && sameNames(u.Perils, v.Perils) && sameNames(u.After, v.After) &&
				!slices.ContainsFunc(s.Towers, func(o Tower) bool { return slices.Contains(o.Replaces, u.Name) }) &&
				u.Retention < t.Top.To && u.Retention+u.Limit > t.Retention.From {
				notes = append(notes, fmt.Sprintf("tower %q looks at the same losses as the treaty %q that stays; where the two overlap they may place 100 %% together; name the treaty in replaces if the tower takes its place", t.Name, u.Name))
			}
		}
	}
	return notes
}
