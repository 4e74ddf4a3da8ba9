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
	case r.To > r.From && (r.To-r.From)/r.Step > 10000:
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
	Share          Range         // of each layer
	Reinstatements *ReinstatementRange
}

// Space is the set of programmes that a search looks through.
type Space struct {
	Start  treaty.Programme // treaties that are not varied stay as they are
	Vary   []Vary
	Towers []Tower
	Keep   []Keep
}

// largestTower bounds the layers of one tower.
const largestTower = 20

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
	Range{t.Retention.From, t.Retention.To, t.Step}.check(faults, key+".retention", 0, math.MaxFloat64)
	Range{t.Top.From, t.Top.To, t.Step}.check(faults, key+".top", 0, math.MaxFloat64)
	t.Share.check(faults, key+".share", 0, 1)
	if t.Top.From <= t.Retention.To-t.Step*1e-9 && t.Top.To <= t.Retention.From {
		faults.Add(fault.Fault{Key: key + ".top", Found: fmt.Sprintf("%v, not above the lowest retention %v", t.Top.To, t.Retention.From), Allowed: "a top above the retention"})
	}
	if t.Reinstatements != nil {
		t.Reinstatements.check(faults, key+".reinstatements")
	}
}

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
