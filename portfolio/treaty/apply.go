package treaty

import (
	"slices"

	"cedewright/portfolio/loss"
)

// Outcome is what a programme does to a loss table, year by year, in money.
type Outcome struct {
	Gross    []float64       // losses of the year, all classes
	Net      []float64       // Gross less the placed recoveries of all treaties
	Treaties []TreatyOutcome // in the order of Programme.Treaties
}

// TreatyOutcome is what one treaty pays, for 100 % of it: what is ceded is Placed() times that.
type TreatyOutcome struct {
	SubjectLoss           []float64 // per year, net of the treaties that inure to this one
	Recovery              []float64 // per year, after all annual terms; for a quota share the subject loss itself
	Reinstated            []float64 // per year, fraction of base premium due as reinstatement premium
	RowRecovery           []float64 // per row of the table: Recovery shared back to the rows that caused it
	AttachmentProbability float64   // share of years in which a unit of loss exceeds the retention; 0 for a quota share
	ExhaustionProbability float64   // share of years in which one reaches retention + limit
}

// Apply applies a programme to a table. It is the plain engine, which loops over all rows and is the reference for every faster one.
// The programme must be valid for the table (see Validate).
//
// A treaty looks at the rows of its classes and perils, net of the placed recoveries of the treaties in After, never below zero. A
// year's recovery is shared back to its units of loss in proportion to what each put into the layer, and within a unit to its rows
// in proportion to their loss, so the order of rows never matters.
func Apply(table *loss.Table, p Programme) (*Outcome, error) {
	order, err := p.Order()
	if err != nil {
		return nil, err
	}
	columns := table.Columns()
	outcome := &Outcome{
		Gross:    make([]float64, table.Years()),
		Net:      make([]float64, table.Years()),
		Treaties: make([]TreatyOutcome, len(p.Treaties)),
	}
	for y := range table.Years() {
		for row := columns.Offset[y]; row < columns.Offset[y+1]; row++ {
			outcome.Gross[y] += columns.Loss[row]
		}
		outcome.Net[y] = outcome.Gross[y]
	}
	for _, i := range order {
		t := p.Treaties[i]
		subject := subjectRows(table, t)
		recovered := make([]float64, len(subject))
		for _, name := range t.After {
			j := slices.IndexFunc(p.Treaties, func(u Treaty) bool { return u.Name == name })
			for row, r := range outcome.Treaties[j].RowRecovery {
				recovered[row] += float64(p.Treaties[j].Placed() * r)
			}
		}
		for row, x := range subject {
			subject[row] = NetOf(x, recovered[row])
		}
		outcome.Treaties[i] = applyOne(table, t, subject)
		for y, r := range outcome.Treaties[i].Recovery {
			outcome.Net[y] -= float64(t.Placed() * r)
		}
	}
	return outcome, nil
}

// subjectRows gives the loss of each row that the treaty covers, zero for the others.
func subjectRows(table *loss.Table, t Treaty) []float64 {
	columns := table.Columns()
	rows := make([]float64, table.Len())
	for row, x := range columns.Loss {
		class, peril := table.Classes()[columns.Class[row]], table.Perils()[columns.Peril[row]]
		if t.covers(class) && (len(t.Perils) == 0 || slices.Contains(t.Perils, peril)) {
			rows[row] = x
		}
	}
	return rows
}

// unit is one thing that a treaty answers (an event, a risk within an event, a year): its rows, their loss and what of it falls into
// the layer.
type unit struct {
	event int32
	risk  int32
	rows  []int
	loss  float64
	layer float64
}

// applyOne applies one treaty to its subject, given row by row.
func applyOne(table *loss.Table, t Treaty, subject []float64) TreatyOutcome {
	columns, years := table.Columns(), table.Years()
	o := TreatyOutcome{
		SubjectLoss: make([]float64, years),
		Recovery:    make([]float64, years),
		Reinstated:  make([]float64, years),
		RowRecovery: make([]float64, table.Len()),
	}
	attached, exhausted := 0, 0
	for y := range years {
		units := unitsOf(columns, t.Kind, subject, columns.Offset[y], columns.Offset[y+1])
		for row := columns.Offset[y]; row < columns.Offset[y+1]; row++ {
			o.SubjectLoss[y] += subject[row]
		}
		if t.Kind == QuotaShare {
			o.Recovery[y] = o.SubjectLoss[y]
			for row := columns.Offset[y]; row < columns.Offset[y+1]; row++ {
				o.RowRecovery[row] = subject[row]
			}
			continue
		}
		exceeds, reaches := false, false
		for u := range units {
			units[u].layer = t.LayerLoss(units[u].loss)
			exceeds = exceeds || units[u].loss > t.AttachmentPoint()
			reaches = reaches || units[u].loss >= t.ExhaustionPoint()
		}
		if exceeds {
			attached++
		}
		if reaches {
			exhausted++
		}
		if t.Kind == RiskExcess && t.EventLimit > 0 {
			capEvents(units, t.EventLimit)
		}
		layers := 0.0
		for _, u := range units {
			layers += u.layer
		}
		o.Recovery[y] = t.AnnualRecovery(layers)
		o.Reinstated[y] = t.Reinstated(o.Recovery[y])
		if o.Recovery[y] == 0 {
			continue
		}
		for _, u := range units {
			for _, row := range u.rows {
				if u.layer > 0 {
					o.RowRecovery[row] += o.Recovery[y] * (u.layer / layers) * (subject[row] / u.loss)
				}
			}
		}
	}
	o.AttachmentProbability = float64(attached) / float64(years)
	o.ExhaustionProbability = float64(exhausted) / float64(years)
	return o
}

// unitsOf collects the units of one year's rows, first to end − 1, with a loss.
func unitsOf(columns loss.Columns, k Kind, subject []float64, first, end int) []unit {
	var units []unit
	for row := first; row < end; row++ {
		event, risk := columns.Event[row], columns.Risk[row]
		switch {
		case subject[row] == 0:
			continue
		case k == EventExcess && event == loss.NoEvent:
			continue
		case k == RiskExcess && (event == loss.NoEvent || risk == loss.NoRisk):
			continue
		case k == AggregateExcess:
			event, risk = 0, 0
		case k == EventExcess:
			risk = 0
		}
		i := slices.IndexFunc(units, func(u unit) bool { return u.event == event && u.risk == risk })
		if i < 0 {
			i = len(units)
			units = append(units, unit{event: event, risk: risk})
		}
		units[i].rows = append(units[i].rows, row)
		units[i].loss += subject[row]
	}
	return units
}

// capEvents scales the layer losses of the risks of an event down to the event limit where they exceed it together.
func capEvents(units []unit, limit float64) {
	for i, first := range units {
		if slices.ContainsFunc(units[:i], func(u unit) bool { return u.event == first.event }) {
			continue
		}
		sum := 0.0
		for _, u := range units {
			if u.event == first.event {
				sum += u.layer
			}
		}
		for j := range units {
			if units[j].event == first.event && sum > limit {
				units[j].layer *= limit / sum
			}
		}
	}
}
