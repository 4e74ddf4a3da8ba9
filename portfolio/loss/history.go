package loss

import (
	"fmt"
	"io"
	"math"
	"math/rand/v2"
	"slices"
	"strings"
	"time"

	"cedewright/portfolio/csvfile"
	"cedewright/portfolio/fault"
)

// HistoryLoss is one loss of the past: its date and its parts by column, in money.
type HistoryLoss struct {
	Date  time.Time
	Total float64
	Parts []float64
}

// HistoryFormat says how a file of historical losses is laid out.
type HistoryFormat struct {
	Date    string   // name of the column of dates (2006-01-02); "" = none
	Parts   []string // names of the columns of the parts, at least one
	Total   string   // name of the column of the total; "" = the sum of the parts
	Scale   float64  // money per unit of the file, > 0
	Minimum float64  // losses whose total is not above it are left out, money
}

// ReadHistory reads historical losses from a CSV file. It fails with every fault, up to twenty, each with its place.
func ReadHistory(r io.Reader, file string, f HistoryFormat) ([]HistoryLoss, error) {
	wanted := slices.Clone(f.Parts)
	for _, name := range []string{f.Date, f.Total} {
		if name != "" && !slices.Contains(wanted, name) {
			wanted = append(wanted, name)
		}
	}
	t, err := csvfile.Open(r, file, wanted)
	if err != nil {
		return nil, err
	}
	var losses []HistoryLoss
	for t.Next() {
		if l, ok := historyLoss(t, f); ok && l.Total > f.Minimum {
			losses = append(losses, l)
		}
	}
	if len(losses) == 0 && t.Faults() == nil {
		t.Add(fault.Fault{File: file, Found: "no loss above " + fmt.Sprint(f.Minimum), Allowed: "at least one loss"})
	}
	return losses, t.Faults()
}

func historyLoss(t *csvfile.Table, f HistoryFormat) (HistoryLoss, bool) {
	l := HistoryLoss{Parts: make([]float64, len(f.Parts))}
	ok := true
	amount := func(column string) float64 {
		value, fine := t.Number(column)
		if fine && (!(value >= 0) || math.IsInf(value, 0)) {
			t.Bad(column, t.Text(column), "money of at least 0")
			fine = false
		}
		ok = ok && fine
		return value * f.Scale
	}
	for i, name := range f.Parts {
		l.Parts[i] = amount(name)
		l.Total += l.Parts[i]
	}
	if f.Total != "" {
		l.Total = amount(f.Total)
	}
	if f.Date != "" {
		date, err := time.Parse(time.DateOnly, t.Text(f.Date))
		if err != nil {
			t.Bad(f.Date, fmt.Sprintf("%q is not a date", t.Text(f.Date)), "a date such as 1985-07-31")
			ok = false
		}
		l.Date = date
	}
	return l, ok
}

// YearlyCounts counts losses by calendar year from the first to the last year that has one, years without a loss included.
func YearlyCounts(losses []HistoryLoss) []int {
	if len(losses) == 0 {
		return nil
	}
	first, last := math.MaxInt, math.MinInt
	for _, l := range losses {
		first, last = min(first, l.Date.Year()), max(last, l.Date.Year())
	}
	counts := make([]int, last-first+1)
	for _, l := range losses {
		counts[l.Date.Year()-first]++
	}
	return counts
}

// EventHistory draws events from a history: the total comes from the empirical body up to a threshold and from a generalised Pareto tail,
// fitted to the excesses, above it; its split over classes is that of a historical loss of similar size, so that the dependence
// between classes is kept, parts of 0 included.
type EventHistory struct {
	classes []string // of the parts
	losses  []HistoryLoss
	tail    GeneralisedPareto
	body    int // count of losses not above the threshold; losses are sorted by total
	fit     ParetoFit
}

// similar is the count of historical losses, nearest in rank, from which the split of a loss in the tail is drawn.
const similar = 20

// NewEventHistory fits the tail above the threshold, strictly greater, cut off at the ceiling (+Inf = none). Classes name the parts.
func NewEventHistory(losses []HistoryLoss, classes []string, threshold, ceiling float64) (*EventHistory, error) {
	h := &EventHistory{classes: classes, losses: slices.Clone(losses)}
	slices.SortStableFunc(h.losses, func(a, b HistoryLoss) int {
		switch {
		case a.Total < b.Total:
			return -1
		case a.Total > b.Total:
			return 1
		}
		return a.Date.Compare(b.Date)
	})
	var excesses []float64
	for _, l := range h.losses {
		if len(l.Parts) != len(classes) {
			return nil, fmt.Errorf("loss: history: a loss has %d parts for %d classes", len(l.Parts), len(classes))
		}
		if l.Total > threshold {
			excesses = append(excesses, l.Total-threshold)
		} else {
			h.body++
		}
	}
	fit, err := FitGeneralisedPareto(excesses)
	if err != nil {
		return nil, fmt.Errorf("tail above %v: %w", threshold, err)
	}
	h.fit = fit
	if math.IsInf(ceiling, 1) && fit.Xi >= 1 {
		return nil, fmt.Errorf("loss: history: the tail above %v has ξ %.3g: its mean does not exist; give a ceiling or another threshold", threshold, fit.Xi)
	}
	h.tail, err = NewGeneralisedPareto(threshold, fit.Xi, fit.Beta, ceiling)
	return h, err
}

// Fit gives the fit of the tail.
func (h *EventHistory) Fit() ParetoFit { return h.fit }

// Losses counts the historical losses.
func (h *EventHistory) Losses() int { return len(h.losses) }

// Largest gives the largest historical loss, money.
func (h *EventHistory) Largest() float64 { return h.losses[len(h.losses)-1].Total }

// tailProbability is the share of losses above the threshold.
func (h *EventHistory) tailProbability() float64 {
	return float64(len(h.losses)-h.body) / float64(len(h.losses))
}

// Mean gives the expected total of one event.
func (h *EventHistory) Mean() float64 { return h.LimitedExpectedValue(math.Inf(1)) }

// Survival gives the probability that the total of one event exceeds x.
func (h *EventHistory) Survival(x float64) float64 {
	if x >= h.tail.Threshold {
		return h.tailProbability() * h.tail.Survival(x)
	}
	above := 0
	for _, l := range h.losses[:h.body] {
		if l.Total > x {
			above++
		}
	}
	return h.tailProbability() + float64(above)/float64(len(h.losses))
}

// LimitedExpectedValue gives E[min(total, d)].
func (h *EventHistory) LimitedExpectedValue(d float64) float64 {
	sum := h.tailProbability() * h.tail.LimitedExpectedValue(d)
	for _, l := range h.losses[:h.body] {
		sum += min(l.Total, d) / float64(len(h.losses))
	}
	return sum
}

// Draw gives the total of one event.
func (h *EventHistory) Draw(r *rand.Rand) float64 {
	total, _ := h.draw(r)
	return total
}

// draw gives the total of one event and the historical loss whose split it takes.
func (h *EventHistory) draw(r *rand.Rand) (float64, HistoryLoss) {
	i := r.IntN(len(h.losses))
	if i < h.body {
		return h.losses[i].Total, h.losses[i]
	}
	total := h.tail.Draw(r)
	rank, _ := slices.BinarySearchFunc(h.losses, total, func(l HistoryLoss, x float64) int {
		if l.Total < x {
			return -1
		}
		return 1
	})
	width := min(similar, len(h.losses)-h.body)
	first := min(max(rank-width/2, h.body), len(h.losses)-width)
	return total, h.losses[first+r.IntN(width)]
}

// String names body and tail.
func (h *EventHistory) String() string {
	return fmt.Sprintf("%d historical losses, %s", len(h.losses), h.tail)
}

// appendEvent draws one event and appends a row for each class that it hits.
func (h *EventHistory) appendEvent(rows []canonical, row canonical, class map[string]uint16, r *rand.Rand) []canonical {
	total, like := h.draw(r)
	sum := 0.0
	for _, part := range like.Parts {
		sum += part
	}
	for i, part := range like.Parts {
		if part > 0 {
			row.class, row.loss = class[h.classes[i]], total*(part/sum)
			rows = append(rows, row)
		}
	}
	return rows
}

func (h *EventHistory) validate(model string, classes []string) error {
	var unknown []string
	for _, name := range h.classes {
		if !slices.Contains(classes, name) {
			unknown = append(unknown, name)
		}
	}
	if len(unknown) > 0 {
		return fmt.Errorf("loss: model %q: no class of the book is named %s", model, strings.Join(unknown, ", "))
	}
	return nil
}
