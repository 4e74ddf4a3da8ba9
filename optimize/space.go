package optimize

import (
	"fmt"
	"math"

	"cedewright/portfolio/fault"
	"cedewright/portfolio/treaty"
)

// Range is a set of values: From, From+Step, … up to To.
type Range struct{ From, To, Step float64 }

// count is the number of values; a step that does not divide the range leaves a rest above the last value (see rest).
func (r Range) count() int {
	if r.To == r.From {
		return 1
	}
	return int(math.Floor((r.To-r.From)/r.Step+1e-9)) + 1
}

// at gives value i, from 0. It is rounded to twelve digits, so that 0.05·3 is 0.15 and plans read as they were meant.
func (r Range) at(i int) float64 { return neat(r.From + float64(i)*r.Step) }

func neat(x float64) float64 {
	if x == 0 || math.IsInf(x, 0) {
		return x
	}
	scale := math.Pow(10, 11-math.Floor(math.Log10(math.Abs(x))))
	return math.Round(x*scale) / scale
}

// nearest gives the place of the value closest to x, and whether x is that value.
func (r Range) nearest(x float64) (i int, exact bool) {
	if r.count() > 1 {
		i = min(max(int(math.Round((x-r.From)/r.Step)), 0), r.count()-1)
	}
	return i, math.Abs(r.at(i)-x) <= 1e-9*max(math.Abs(x), math.Abs(r.Step))
}

// rest tells whether the step leaves a rest below To.
func (r Range) rest() bool {
	last := r.at(r.count() - 1)
	return math.Abs(last-r.To) > 1e-9*max(math.Abs(r.To), r.Step)
}

func (r Range) check(faults *fault.List, key string, low, high float64) {
	switch {
	case !(r.From >= low && r.To <= high && r.From <= r.To) || math.IsInf(r.To, 0):
		faults.Add(fault.Fault{Key: key, Found: fmt.Sprintf("from %v to %v", r.From, r.To), Allowed: fmt.Sprintf("from ≤ to, within %v and %v", low, high)})
	case r.To > r.From && !(r.Step > 0 && !math.IsInf(r.Step, 0)):
		faults.Add(fault.Fault{Key: key + ".step", Found: fmt.Sprint(r.Step), Allowed: "above 0"})
	case r.To > r.From && (r.To-r.From)/r.Step > largestRange:
		faults.Add(fault.Fault{Key: key + ".step", Found: fmt.Sprintf("%.0f values", (r.To-r.From)/r.Step), Allowed: "at most 10,000 values in a range"})
	}
}

// ReinstatementRange is a count of reinstatements, From to To, all at one charge.
type ReinstatementRange struct {
	From, To int
	Charge   float64 // fraction of base premium
}

func (r ReinstatementRange) count() int { return r.To - r.From + 1 }

func (r ReinstatementRange) at(i int) []float64 {
	list := make([]float64, r.From+i)
	for k := range list {
		list[k] = r.Charge
	}
	return list
}

func (r ReinstatementRange) check(faults *fault.List, key string) {
	if r.From < 0 || r.To < r.From || r.To > 20 {
		faults.Add(fault.Fault{Key: key, Found: fmt.Sprintf("from %d to %d", r.From, r.To), Allowed: "counts from 0 to 20, from ≤ to"})
	}
	if !(r.Charge >= 0) || math.IsInf(r.Charge, 0) {
		faults.Add(fault.Fault{Key: key + ".charge", Found: fmt.Sprint(r.Charge), Allowed: "a fraction of the base premium of at least 0"})
	}
}

// Vary lets the search choose terms of one treaty of the start programme; a nil range leaves the term as it is.
type Vary struct {
	Treaty           string
	Retention        *Range // money
	Limit            *Range // money
	Share            *Range // fraction placed
	Cession          *Range // fraction ceded
	AnnualDeductible *Range // money
	Reinstatements   *ReinstatementRange
	Optional         bool // may be left out
}

// Tower lets the search cut a tower of touching layers itself.
type Tower struct {
	Name           string        // layers are named "NAME 1", "NAME 2", … from the bottom
	Template       treaty.Treaty // kind (event- or risk-excess), subject, curve and annual terms of every layer
	Replaces       []string      // treaties of the start programme that the tower takes the place of
	Layers         int           // at most
	Retention      Range         // money; stepped by Step, whatever its own step is
	Top            Range         // money; likewise
	Step           float64       // money between possible cuts
	Share          Range         // of each layer; where it begins at 0, layers may be left open, at the ends of the tower too
	Reinstatements *ReinstatementRange
}

// Space is the set of programmes that a search looks through.
type Space struct {
	Start  treaty.Programme // treaties that are not varied stay as they are
	Vary   []Vary
	Towers []Tower
	Keep   []Keep
}

// largestTower bounds the layers of one tower, largestRange the values of one range.
const (
	largestTower = 20
	largestRange = 10000
)

// Rounded lists, in words, the ranges whose step does not divide them, so that their last value is below what was asked.
func (s Space) Rounded() []string {
	var notes []string
	note := func(what string, r *Range) {
		if r != nil && r.Step > 0 && r.rest() {
			notes = append(notes, fmt.Sprintf("%s: steps of %v from %v end at %v, not at %v", what, r.Step, r.From, r.at(r.count()-1), r.To))
		}
	}
	for _, v := range s.Vary {
		note(v.Treaty+" retention", v.Retention)
		note(v.Treaty+" limit", v.Limit)
		note(v.Treaty+" share", v.Share)
		note(v.Treaty+" cession", v.Cession)
		note(v.Treaty+" annual deductible", v.AnnualDeductible)
	}
	for _, t := range s.Towers {
		cuts := t.grid()
		note(t.Name+" retention", &Range{t.Retention.From, t.Retention.To, t.Step})
		note(t.Name+" top", &cuts)
		note(t.Name+" share", &t.Share)
	}
	return notes
}

// grid gives the possible cuts of a tower.
func (t Tower) grid() Range { return Range{t.Retention.From, t.Top.To, t.Step} }
