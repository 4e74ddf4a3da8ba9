package portfoliotest

import (
	"fmt"
	"math"
	"slices"

	"pgregory.net/rapid"
)

// Terms is what a drawn treaty says, with the fields of treaty.Treaty that bear on recoveries.
type Terms struct {
	Name, Kind             string // kind as in a study: "quota-share", "event-excess", "risk-excess" or "aggregate-excess"
	Classes, Perils, After []string
	Cession                float64   // quota share only
	Retention, Limit       float64   // money per event, risk or year; a limit may be +Inf
	Share                  float64   // fraction placed
	AnnualDeductible       float64   // money per year
	AnnualLimit            float64   // money per year, 0 = not given
	Reinstatements         []float64 // nil = not given
	EventLimit             float64   // risk-excess only, 0 = none
}

// Kinds lists the kinds of treaty that RandomTreaty draws.
var Kinds = []string{"quota-share", "event-excess", "risk-excess", "aggregate-excess"}

// placed gives the fraction of the contract that is placed.
func (u Terms) placed() float64 { return u.Cession + u.Share }

// top gives where the layer ends.
func (u Terms) top() float64 { return u.Retention + u.Limit }

// sameSubject tells whether two treaties of one kind name the same classes and perils.
func (u Terms) sameSubject(v Terms) bool {
	return u.Kind == v.Kind && slices.Equal(u.Classes, v.Classes) && slices.Equal(u.Perils, v.Perils)
}

// RandomTreaty draws valid terms of one kind on a book: all or some classes and perils, nothing placed to all placed, limits to no limit,
// every annual term that the kind has.
func RandomTreaty(t *rapid.T, b Book, name, kind string) Terms {
	number := func(what string, low, high int) int { return rapid.IntRange(low, high).Draw(t, what+" of "+name) }
	sometimes := func(what string) bool { return number(what, 0, 2) == 0 }
	u := Terms{Name: name, Kind: kind}
	if sometimes("some classes") {
		u.Classes = slices.Clone(b.Classes[number("first class", 0, len(b.Classes)-1):])
	}
	if sometimes("one peril") {
		u.Perils = []string{b.Perils[number("peril", 0, len(b.Perils)-1)]}
	}
	fraction := float64(rapid.SampledFrom([]int{0, 25, 33, 50, 80, 100, 100}).Draw(t, "placed of "+name)) / 100
	if kind == "quota-share" {
		u.Cession = fraction
		return u
	}
	u.Share = fraction
	u.Retention = Money(t, "retention of "+name, 0, 50)
	if u.Limit = Money(t, "limit of "+name, 1, 60); number("unlimited", 0, 9) == 0 {
		u.Limit = math.Inf(1)
	}
	if kind == "aggregate-excess" {
		return u
	}
	if sometimes("annual deductible") {
		u.AnnualDeductible = Money(t, "annual deductible of "+name, 0, 30)
	}
	switch number("annual terms", 0, 3) {
	case 0:
		u.AnnualLimit = Money(t, "annual limit of "+name, 1, 90)
	case 1, 2:
		if !math.IsInf(u.Limit, 1) {
			u.Reinstatements = make([]float64, number("reinstatements", 0, 3))
			for k := range u.Reinstatements {
				u.Reinstatements[k] = float64(number(fmt.Sprint("charge ", k), 0, 6)) / 4
			}
		}
	}
	if kind == "risk-excess" && sometimes("event limit") {
		u.EventLimit = Money(t, "event limit of "+name, 1, 80)
	}
	return u
}

// RandomProgramme draws up to five treaties that make a valid programme, in any order: chains and fans of inuring, towers of layers that
// touch, and treaties that do not look at each other.
func RandomProgramme(t *rapid.T, b Book) []Terms {
	var list []Terms
	for i := range rapid.IntRange(0, 5).Draw(t, "treaties") {
		name := fmt.Sprint("treaty ", i+1)
		u := RandomTreaty(t, b, name, rapid.SampledFrom(Kinds).Draw(t, "kind of "+name))
		for _, earlier := range list {
			if rapid.IntRange(0, 2).Draw(t, name+" after "+earlier.Name) == 0 {
				u.After = append(u.After, earlier.Name)
			}
		}
		list = append(list, fitted(u, list))
	}
	return rapid.Permutation(list).Draw(t, "order")
}

// fitted changes a treaty so that it may stand with earlier ones on its subject: on top of them as a further layer, or else after them.
func fitted(u Terms, earlier []Terms) Terms {
	for _, v := range earlier {
		if u.sameSubject(v) && !slices.Contains(u.After, v.Name) {
			if u.Kind != "quota-share" && len(u.After) == 0 && len(v.After) == 0 && !math.IsInf(v.top(), 1) {
				u.Retention = max(u.Retention, v.top())
				continue
			}
			u.After = append(u.After, v.Name)
		}
	}
	return u
}
