package optimize

import (
	"cedewright/portfolio/sample"
	"cedewright/portfolio/treaty"
)

// bookFlows are the yearly flows of the book by class, in money, losses positive: they add up to −U.
type bookFlows struct {
	gross    [][]float64 // by class: losses, expenses less premium
	net      [][]float64 // by class: after the programme
	treaties []treatyFlow
}

// grossMean and netMean give the expected result of a class, in money per year.
func (f *bookFlows) grossMean(c int) float64 {
	return -sample.Sum(f.gross[c]) / float64(len(f.gross[c]))
}
func (f *bookFlows) netMean(c int) float64 { return -sample.Sum(f.net[c]) / float64(len(f.net[c])) }

// treatyFlow is what one treaty costs the cedant year by year, as placed: premiums and unpaid recoveries less commission and recoveries.
type treatyFlow struct {
	place int // in the programme
	cost  []float64
	share []float64 // by class: expected recoveries
}

// cashFlows works the flows out. Recoveries fall on the classes whose rows they pay; premiums, commission, reinstatement premiums and unpaid recoveries on
// the same classes in proportion to the expected recoveries, on all alike when none is expected.
func (a *Appraiser) cashFlows(p *position, w *workspace) *bookFlows {
	f := &bookFlows{}
	for c, class := range a.c.Book.Classes {
		certain := class.Premium*class.Expenses - class.Premium
		annual := a.c.Book.Table.Annual(c, -1)
		for y := range annual {
			annual[y] += certain
		}
		f.gross, f.net = append(f.gross, annual), append(f.net, append([]float64(nil), annual...))
	}
	for _, it := range p.items {
		f.treaties = append(f.treaties, a.treatyFlow(p, it, f.net, w))
	}
	return f
}

// treatyFlow works out one treaty's flow and adds it to the classes' net flows.
func (a *Appraiser) treatyFlow(p *position, it item, net [][]float64, w *workspace) treatyFlow {
	t := treatyFlow{place: it.place, cost: make([]float64, a.years), share: make([]float64, len(net))}
	placed, f := it.terms.Placed(), a.flow(it, w)
	premium := placed * it.priced.base
	other := make([]float64, a.years) // all but the recoveries due
	for y := range other {
		other[y] = premium * (1 - it.priced.commission)
		if f.reinstated != nil {
			other[y] += float64(premium * f.reinstated[y])
		}
	}
	if len(it.terms.Panel) > 0 {
		a.unpaidYears(it.terms, f.recovery, other)
	}
	for y, r := range f.recovery {
		t.cost[y] = other[y] - float64(placed*r)
	}
	total := a.shareRecoveries(p.programme, it, t.share, net)
	for c := range t.share {
		if total > 0 {
			t.share[c] /= total
		} else {
			t.share[c] = 1 / float64(len(t.share))
		}
		addScaled(net[c], t.share[c], other)
	}
	return t
}

// shareRecoveries takes a treaty's placed recoveries off the classes whose rows they pay, adds up those of each class at 100 %, and gives their sum.
func (a *Appraiser) shareRecoveries(p treaty.Programme, it item, byClass []float64, net [][]float64) float64 {
	table := a.c.Book.Table
	rows := rowRecoveries(table, it.terms, newSelection(table, it.terms.Classes, it.terms.Perils), a.lossesNetOf(p, it.place))
	columns := table.Columns()
	placed, total := it.terms.Placed(), 0.0
	for y := range table.Years() {
		for row := columns.Offset[y]; row < columns.Offset[y+1]; row++ {
			if r := rows[row]; r > 0 {
				c := columns.Class[row]
				net[c][y] -= float64(placed * r)
				byClass[c] += r
				total += r
			}
		}
	}
	return total
}
