package optimize

import (
	"cmp"
	"slices"

	"cedewright/portfolio/loss"
	"cedewright/portfolio/treaty"
)

// basis is the unit of loss that a treaty answers.
type basis uint8

const (
	perYear  basis = iota // the year's sum: aggregate-excess and quota share
	perEvent              // one event
	perRisk               // one risk within one event
)

func basisOf(k treaty.Kind) basis {
	switch k {
	case treaty.EventExcess:
		return perEvent
	case treaty.RiskExcess:
		return perRisk
	default:
		return perYear
	}
}

// subject is what a treaty looks at, laid out so that a layer touches only the units of loss above its retention: the units
// (events, risks or years) by falling loss. It is immutable and shared by all treaties that look at the same thing.
type subject struct {
	number  int       // distinct for every subject of an appraiser
	years   int       // simulated years
	loss    []float64 // loss of each unit, falling, > 0
	year    []int32   // year of each unit
	event   []int32   // perRisk only: number of the event over the whole book
	events  int       // perRisk only: count of events
	annual  []float64 // perYear only: sum of each year, in order of years
	mean    float64   // perYear only: mean of annual
	byClass []float64 // what part of the subject loss falls on each class; all 0 without a loss
}

// bytes is the memory that a subject holds, for the cache's budget.
func (s *subject) bytes() int {
	return 8*len(s.loss) + 4*len(s.year) + 4*len(s.event) + 8*len(s.annual)
}

// selection says which rows of a table a treaty covers.
type selection struct{ class, peril []bool } // by index; true = covered

func newSelection(t *loss.Table, classes, perils []string) selection {
	return selection{class: chosen(t.Classes(), classes), peril: chosen(t.Perils(), perils)}
}

// chosen marks the wanted names; none wanted = all.
func chosen(names, wanted []string) []bool {
	marks := make([]bool, len(names))
	for i, name := range names {
		marks[i] = len(wanted) == 0 || slices.Contains(wanted, name)
	}
	return marks
}

// overlaps tells whether some row could be covered by both.
func (s selection) overlaps(o selection) bool {
	return anyBoth(s.class, o.class) && anyBoth(s.peril, o.peril)
}

func anyBoth(a, b []bool) bool {
	for i := range a {
		if a[i] && b[i] {
			return true
		}
	}
	return false
}

// newSubject collects the units of one basis from the selected rows, whose losses (net of inuring treaties) are given row by row.
func newSubject(t *loss.Table, b basis, chosen selection, losses []float64) *subject {
	var s *subject
	switch b {
	case perEvent:
		s = eventSubject(t, chosen, losses)
	case perRisk:
		s = riskSubject(t, chosen, losses)
	default:
		s = yearSubject(t, chosen, losses)
	}
	s.byClass = classParts(t, b, chosen, losses)
	return s
}

// classParts gives the part of the subject loss that falls on each class.
func classParts(t *loss.Table, b basis, chosen selection, losses []float64) []float64 {
	c := t.Columns()
	parts := make([]float64, len(t.Classes()))
	total := 0.0
	for row, x := range losses {
		if !chosen.class[c.Class[row]] || !chosen.peril[c.Peril[row]] || b != perYear && c.Event[row] == loss.NoEvent || b == perRisk && c.Risk[row] == loss.NoRisk {
			continue
		}
		parts[c.Class[row]] += x
		total += x
	}
	for i := range parts {
		if total > 0 {
			parts[i] /= total
		}
	}
	return parts
}

func yearSubject(t *loss.Table, chosen selection, losses []float64) *subject {
	c, n := t.Columns(), t.Years()
	s := &subject{years: n, annual: make([]float64, n)}
	total := 0.0
	for y := range n {
		sum := 0.0
		for i := c.Offset[y]; i < c.Offset[y+1]; i++ {
			if chosen.class[c.Class[i]] && chosen.peril[c.Peril[i]] {
				sum += losses[i]
			}
		}
		s.annual[y] = sum
		if sum > 0 {
			s.loss, s.year = append(s.loss, sum), append(s.year, int32(y))
		}
		total += sum
	}
	s.mean = total / float64(n)
	s.sort()
	return s
}

func eventSubject(t *loss.Table, chosen selection, losses []float64) *subject {
	c, n := t.Columns(), t.Years()
	s := &subject{years: n}
	for y := range n {
		end := c.Offset[y+1]
		for i := c.Offset[y]; i < end; {
			event, sum := c.Event[i], 0.0
			for ; i < end && c.Event[i] == event; i++ {
				if chosen.class[c.Class[i]] && chosen.peril[c.Peril[i]] {
					sum += losses[i]
				}
			}
			if event != loss.NoEvent && sum > 0 {
				s.loss, s.year = append(s.loss, sum), append(s.year, int32(y))
			}
		}
	}
	s.sort()
	return s
}

func riskSubject(t *loss.Table, chosen selection, losses []float64) *subject {
	c, n := t.Columns(), t.Years()
	s := &subject{years: n}
	var risks []int32
	var sums []float64
	for y := range n {
		end := c.Offset[y+1]
		for i := c.Offset[y]; i < end; {
			event := c.Event[i]
			risks, sums = risks[:0], sums[:0]
			for ; i < end && c.Event[i] == event; i++ {
				if event == loss.NoEvent || c.Risk[i] == loss.NoRisk || !chosen.class[c.Class[i]] || !chosen.peril[c.Peril[i]] {
					continue
				}
				k := slices.Index(risks, c.Risk[i])
				if k < 0 {
					risks, sums, k = append(risks, c.Risk[i]), append(sums, 0), len(risks)
				}
				sums[k] += losses[i]
			}
			for _, sum := range sums {
				if sum > 0 {
					s.loss, s.year, s.event = append(s.loss, sum), append(s.year, int32(y)), append(s.event, int32(s.events))
				}
			}
			if len(sums) > 0 {
				s.events++
			}
		}
	}
	s.sort()
	return s
}

// sort orders the units by falling loss; equal losses keep the order of years, so that the order is unique.
func (s *subject) sort() {
	order := make([]int32, len(s.loss))
	for i := range order {
		order[i] = int32(i)
	}
	slices.SortFunc(order, func(a, b int32) int {
		if c := cmp.Compare(s.loss[b], s.loss[a]); c != 0 {
			return c
		}
		return cmp.Compare(a, b)
	})
	losses, year := make([]float64, len(order)), make([]int32, len(order))
	for i, o := range order {
		losses[i], year[i] = s.loss[o], s.year[o]
	}
	if s.event != nil {
		event := make([]int32, len(order))
		for i, o := range order {
			event[i] = s.event[o]
		}
		s.event = event
	}
	s.loss, s.year = losses, year
}

// above counts the units whose loss exceeds x: they are the first ones.
func (s *subject) above(x float64) int {
	lo, hi := 0, len(s.loss)
	for lo < hi {
		if m := (lo + hi) / 2; s.loss[m] > x {
			lo = m + 1
		} else {
			hi = m
		}
	}
	return lo
}

// reaching counts the units whose loss is at least x.
func (s *subject) reaching(x float64) int {
	lo, hi := 0, len(s.loss)
	for lo < hi {
		if m := (lo + hi) / 2; s.loss[m] >= x {
			lo = m + 1
		} else {
			hi = m
		}
	}
	return lo
}

// exceededOnceIn gives the loss of a unit that is exceeded in one year of so many, for each return period, in years: the largest loss x such
// that at least 1/period of the years have a unit above x, read off the years by their largest unit; 0 where fewer years have a loss.
func (s *subject) exceededOnceIn(periods []float64) []float64 {
	seen := make([]uint64, (s.years+63)/64)
	var largest []float64 // of each year with a loss, falling
	for i, y := range s.year {
		if bit := uint64(1) << (y & 63); seen[y>>6]&bit == 0 {
			seen[y>>6] |= bit
			largest = append(largest, s.loss[i])
		}
	}
	at := make([]float64, len(periods))
	for k, period := range periods {
		if rank := int(float64(s.years) / period); rank < len(largest) {
			at[k] = largest[rank]
		}
	}
	return at
}
