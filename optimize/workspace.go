package optimize

import (
	"math"

	"cedewright/portfolio/sample"
	"cedewright/portfolio/treaty"
)

// workspace is the scratch memory of one appraisal.
type workspace struct {
	offset       []float64 // what treaties and failing reinsurers add to the loss of each year; zero from used on
	used         int
	centred      []float64 // gross result of each year less its mean: Appraiser.centred
	sum, squares float64   // of the offsets: their sum, and what they add to the sum of squares of the centred result
	rose         bool      // some offset may be above zero
	loss         []float64 // −U by year, where it is wanted
	sorted       []float64 // copy that selection may reorder
	annual       []float64 // sum of layer losses by year; zero between uses
	touched      []int32   // years in which annual is not zero
	flow         []float64 // of the touched years, see add
	slopes       []float64 // of reinstatements, see flowsOf
	event        []float64 // sum of layer losses by event, for an event limit; zero between uses
	hit          []int32   // events in which event is not zero
	recovery     []float64 // positive annual recoveries, to be sorted
	key          []byte

	tails, companyTails []sample.TailFigures // at Appraiser.levels
	company             []float64            // −U of the whole company by year; nil unless it is known year by year
	amounts             []float64            // of criteria
	formulas            []*formulaWork

	slots []perilSlot // of Appraiser.slots
	few   []float64   // candidates for a quantile
}

func (a *Appraiser) newWorkspace() *workspace {
	n := a.years
	w := &workspace{centred: a.centred, offset: make([]float64, n), loss: make([]float64, n), sorted: make([]float64, n), annual: make([]float64, n)}
	for _, peril := range a.slots {
		w.slots = append(w.slots, perilSlot{peril: peril, offset: make([]float64, n), guess: math.Inf(-1)})
	}
	w.tails, w.companyTails = make([]sample.TailFigures, len(a.levels)), make([]sample.TailFigures, len(a.levels))
	if a.rest != nil {
		w.company = make([]float64, n)
	}
	return w
}

// clearFlows makes offsets and slots ready for another programme.
func (w *workspace) clearFlows() {
	clear(w.offset[:w.used])
	w.used, w.rose, w.sum, w.squares = 0, false, 0, 0
	for k := range w.slots {
		w.slots[k].clear()
	}
}

// recover fills w.annual with the annual recoveries at 100 % of a treaty other than a quota share, after all its annual terms, and
// lists in w.touched the years in which layer losses arise. The caller must call w.reset afterwards.
func (w *workspace) recover(t treaty.Treaty, s *subject) {
	reached := s.above(t.Retention)
	if t.Kind == treaty.RiskExcess && t.EventLimit > 0 {
		w.recoverWithEventLimit(t, s, reached)
	} else {
		for i, x := range s.loss[:reached] {
			y := s.year[i]
			if w.annual[y] == 0 {
				w.touched = append(w.touched, y)
			}
			w.annual[y] += min(x-t.Retention, t.Limit)
		}
	}
	if t.Kind == treaty.AggregateExcess {
		return
	}
	limit := t.AnnualRecoveryLimit()
	if t.AnnualDeductible == 0 && math.IsInf(limit, 1) {
		return
	}
	for _, y := range w.touched {
		w.annual[y] = min(max(w.annual[y]-t.AnnualDeductible, 0), limit)
	}
}

func (w *workspace) recoverWithEventLimit(t treaty.Treaty, s *subject, reached int) {
	if len(w.event) < s.events {
		w.event = make([]float64, s.events)
	}
	firstYear := w.hit[:0]
	for i, x := range s.loss[:reached] {
		e := s.event[i]
		if w.event[e] == 0 {
			firstYear = append(firstYear, int32(i))
		}
		w.event[e] += min(x-t.Retention, t.Limit)
	}
	for _, i := range firstYear {
		e, y := s.event[i], s.year[i]
		if w.annual[y] == 0 {
			w.touched = append(w.touched, y)
		}
		w.annual[y] += min(w.event[e], t.EventLimit)
		w.event[e] = 0
	}
	w.hit = firstYear[:0]
}

// reset clears what recover left.
func (w *workspace) reset() {
	for _, y := range w.touched {
		w.annual[y] = 0
	}
	w.touched = w.touched[:0]
}
