package optimize

import (
	"encoding/binary"
	"math"
	"slices"

	"cedewright/portfolio/loss"
	"cedewright/portfolio/treaty"
)

// subjectOf gives the subject of treaty i of a programme, remembered by everything on which it depends: what it covers and the
// terms of the treaties that inure to it.
func (a *Appraiser) subjectOf(p treaty.Programme, i int, w *workspace) *subject {
	w.key = a.subjectKey(w.key[:0], p, i)
	a.mu.Lock()
	s, ok := a.subjects[string(w.key)]
	a.mu.Unlock()
	if ok {
		return s
	}
	key := string(w.key)
	t := p.Treaties[i]
	table := a.c.Book.Table
	covered := newSelection(table, t.Classes, t.Perils)
	s = newSubject(table, basisOf(t.Kind), covered, a.lossesNetOf(p, i))
	a.mu.Lock()
	defer a.mu.Unlock()
	if twin, ok := a.subjects[key]; ok { // another worker was quicker
		return twin
	}
	if a.subjectSize += s.bytes(); a.subjectSize > subjectBudget {
		clear(a.subjects)
		a.subjectSize = s.bytes()
	}
	a.nextSubject++
	s.number = a.nextSubject
	a.subjects[key] = s
	return s
}

// inuringTo lists the placed treaties that reduce the subject loss of treaty i: those named in its After that share a row with it.
func (a *Appraiser) inuringTo(p treaty.Programme, i int) []int {
	t := p.Treaties[i]
	if len(t.After) == 0 {
		return nil
	}
	table := a.c.Book.Table
	covered := newSelection(table, t.Classes, t.Perils)
	var list []int
	for j, u := range p.Treaties {
		if u.Placed() > 0 && slices.Contains(t.After, u.Name) && covered.overlaps(newSelection(table, u.Classes, u.Perils)) {
			list = append(list, j)
		}
	}
	return list
}

// subjectKey writes what the subject of treaty i depends on.
func (a *Appraiser) subjectKey(key []byte, p treaty.Programme, i int) []byte {
	t := p.Treaties[i]
	key = append(key, byte(basisOf(t.Kind)))
	key = appendNames(key, t.Classes)
	key = appendNames(key, t.Perils)
	for _, j := range a.inuringTo(p, i) {
		u := p.Treaties[j]
		key = append(key, '(', byte(u.Kind))
		for _, x := range []float64{u.Placed(), u.Retention, u.Limit, u.AnnualDeductible, u.AnnualRecoveryLimit(), u.EventLimit} {
			key = binary.LittleEndian.AppendUint64(key, math.Float64bits(x))
		}
		key = a.subjectKey(key, p, j)
		key = append(key, ')')
	}
	return key
}

// appendNames writes a list of names so that no two lists look the same.
func appendNames(key []byte, names []string) []byte {
	key = binary.LittleEndian.AppendUint32(key, uint32(len(names)))
	for _, name := range names {
		key = binary.LittleEndian.AppendUint32(key, uint32(len(name)))
		key = append(key, name...)
	}
	return key
}

// lossesNetOf gives the loss of every row of the table net of the placed recoveries of the treaties that inure to treaty i, never
// below zero.
func (a *Appraiser) lossesNetOf(p treaty.Programme, i int) []float64 {
	table := a.c.Book.Table
	losses := table.Columns().Loss
	inuring := a.inuringTo(p, i)
	if len(inuring) == 0 {
		return losses
	}
	recovered := make([]float64, len(losses))
	for _, j := range inuring {
		u := p.Treaties[j]
		for row, r := range rowRecoveries(table, u, newSelection(table, u.Classes, u.Perils), a.lossesNetOf(p, j)) {
			recovered[row] += float64(u.Placed() * r)
		}
	}
	net := recovered
	for row, r := range recovered {
		net[row] = treaty.NetOf(losses[row], r)
	}
	return net
}

// rowRecoveries shares the annual recoveries of a treaty at 100 % back to the rows of its subject: a quota share pays every row; an
// excess pays a row in proportion to what its unit (event, risk, year) contributed to the year's layer loss and, within the unit,
// in proportion to its loss.
func rowRecoveries(table *loss.Table, t treaty.Treaty, covered selection, losses []float64) []float64 {
	c := table.Columns()
	recovered := make([]float64, len(losses))
	in := func(row int) bool { return covered.class[c.Class[row]] && covered.peril[c.Peril[row]] }
	if t.Kind == treaty.QuotaShare {
		for row, x := range losses {
			if in(row) {
				recovered[row] = x
			}
		}
		return recovered
	}
	for y := range table.Years() {
		first, end := c.Offset[y], c.Offset[y+1]
		annual := 0.0 // recovered[row] holds the row's part of its unit's layer loss until the year's terms are known
		switch basisOf(t.Kind) {
		case perYear:
			annual = shareUnit(t, losses, recovered, first, end, in)
		default:
			for row := first; row < end; {
				next := row
				for next < end && c.Event[next] == c.Event[row] {
					next++
				}
				if c.Event[row] != loss.NoEvent {
					if t.Kind == treaty.EventExcess {
						annual += shareUnit(t, losses, recovered, row, next, in)
					} else {
						annual += shareRisks(t, c.Risk, losses, recovered, row, next, in)
					}
				}
				row = next
			}
		}
		if annual > 0 {
			if paid := annualTerms(t, annual); paid != annual {
				for row := first; row < end; row++ {
					recovered[row] *= paid / annual
				}
			}
		}
	}
	return recovered
}

// annualTerms applies annual deductible and limit; an aggregate-excess has none beyond its layer.
func annualTerms(t treaty.Treaty, layerLosses float64) float64 {
	if t.Kind == treaty.AggregateExcess {
		return layerLosses
	}
	return t.AnnualRecovery(layerLosses)
}

// shareUnit shares the layer loss of one unit, rows first to end−1, to its rows, and gives the layer loss.
func shareUnit(t treaty.Treaty, losses, recovered []float64, first, end int, in func(int) bool) float64 {
	sum := 0.0
	for row := first; row < end; row++ {
		if in(row) {
			sum += losses[row]
		}
	}
	layer := t.LayerLoss(sum)
	if layer == 0 {
		return 0
	}
	for row := first; row < end; row++ {
		if in(row) {
			recovered[row] = layer * (losses[row] / sum)
		}
	}
	return layer
}

// shareRisks does the same for the risks of one event, capped together by the event limit.
func shareRisks(t treaty.Treaty, risk []int32, losses, recovered []float64, first, end int, in func(int) bool) float64 {
	total := 0.0
	for row := first; row < end; row++ {
		if risk[row] == loss.NoRisk || slices.Contains(risk[first:row], risk[row]) {
			continue // no risk, or one that was dealt with at its first row
		}
		total += shareUnit(t, losses, recovered, row, end, func(r int) bool { return risk[r] == risk[row] && in(r) })
	}
	if t.EventLimit > 0 && total > t.EventLimit {
		for row := first; row < end; row++ {
			recovered[row] *= t.EventLimit / total
		}
		return t.EventLimit
	}
	return total
}
