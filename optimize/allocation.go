package optimize

import (
	"fmt"
	"math"
	"slices"

	"cedewright/portfolio/capital"
	"cedewright/portfolio/sample"
	"cedewright/portfolio/treaty"
)

// Allocation says where the required capital of the first standard comes from, by natural allocation: each part is averaged with the weights that the
// standard gives to the years of the position as a whole, ties shared, so that the parts add up (Tasche 1999; Denault 2001). Value at risk
// sits on a single year; its weights are spread over the years whose rank is within one standard error of the quantile's and scaled so
// that the parts add up all the same.
type Allocation struct {
	Standard string
	Classes  []ClassCapital
	Perils   []PerilCapital  // losses alone
	Certain  float64         // expenses less premiums: what the perils' parts lack to the gross capital, money; 0 on basis deviation
	Treaties []TreatyCapital // in the order of the programme
	Gross    float64         // required capital with no cover, the sum of the classes' gross parts
	Net      float64         // with the programme, the sum of the classes' net parts
}

// ClassCapital is one class's part, in money, and what it earns on it.
type ClassCapital struct {
	Name       string
	Gross, Net Estimate // part of required capital before and after the programme; a class that hedges the others has a negative one
	GrossMean  float64  // expected result of a year before the programme
	NetMean    float64  // after it: less the class's part of the treaties' margins
}

// Return gives expected result over allocated capital per year; NaN when no capital is allocated.
func Return(mean, capital float64) float64 {
	if !(capital > 0) {
		return math.NaN()
	}
	return mean / capital
}

// PerilCapital is one peril's part of the gross capital, and of the losses in the years that set the net capital, in money.
type PerilCapital struct {
	Name       string
	Gross, Net Estimate
}

// TreatyCapital is the capital that one treaty frees, in money, seen in three ways.
type TreatyCapital struct {
	Name       string
	StandAlone float64  // the treaty alone, against no cover
	LastIn     float64  // with it, against the programme without it
	Natural    Estimate // its part of the programme's relief in the years that set the net capital
}

// parts are the cash flows of a treaty by class: expected recoveries, and recoveries averaged with the capital weights.
type parts struct{ mean, weighted []float64 }

// Allocate allocates the required capital of a programme under the first standard.
func (a *Appraiser) Allocate(p treaty.Programme) (Allocation, error) {
	w := a.scratch.Get().(*workspace)
	defer a.scratch.Put(w)
	items, err := a.items(p, w)
	if err != nil {
		return Allocation{}, fmt.Errorf("allocate %q: %w", p.Name, err)
	}
	a.netLosses(items, w)
	losses := slices.Clone(w.loss)
	s := a.c.Standards[0]
	net := s.Amount(slices.Clone(losses), a.meanNet(a.totals(items)))
	gross := a.gross[0].figure.Value
	result := Allocation{Standard: s.Name, Gross: gross, Net: net}
	grossWeights := capitalWeights(s, a.ungained, gross)
	netWeights := capitalWeights(s, losses, net)

	table := a.c.Book.Table
	count := len(a.c.Book.Classes)
	netPart, premiums := make([]Estimate, count), make([]float64, count) // of each class, premiums as margins
	for c, class := range a.c.Book.Classes {
		annual := table.Annual(c, -1)
		certain := class.Premium*class.Expenses - class.Premium
		mean := sample.Sum(annual) / float64(a.years)
		row := ClassCapital{Name: class.Name, Gross: part(s, annual, certain, mean, grossWeights), GrossMean: -certain - mean}
		row.NetMean = row.GrossMean
		netPart[c] = part(s, annual, certain, mean, netWeights)
		result.Classes = append(result.Classes, row)
		result.Certain += certain * weightMean(grossWeights)
		if s.Basis == capital.Deviation {
			result.Certain -= certain
		}
	}
	for i, name := range table.Perils() {
		annual := table.Annual(-1, i)
		mean := sample.Sum(annual) / float64(a.years)
		result.Perils = append(result.Perils, PerilCapital{name, part(s, annual, 0, mean, grossWeights), part(s, annual, 0, mean, netWeights)})
	}
	for _, t := range p.Treaties {
		row := TreatyCapital{Name: t.Name}
		if i := slices.IndexFunc(items, func(it item) bool { return it.terms.Name == t.Name }); i >= 0 {
			row, err = a.allocateTreaty(p, items[i], s, netWeights, net, netPart, premiums, w)
			if err != nil {
				return Allocation{}, err
			}
		}
		result.Treaties = append(result.Treaties, row)
	}
	for c := range result.Classes {
		result.Classes[c].Net = netPart[c]
		result.Classes[c].NetMean -= premiums[c]
	}
	return result, nil
}

// capitalWeights gives the weights of the years in a required capital, such that the mean of weight times loss is the capital (the amount beyond the mean
// on basis deviation); all 0 when no capital is required.
func capitalWeights(s capital.Standard, losses []float64, amount float64) []float64 {
	if amount == 0 && s.Basis == capital.Result {
		return make([]float64, len(losses))
	}
	weights := tailWeights(losses, s.Measure, s.Level)
	want := amount
	if s.Basis == capital.Deviation {
		want += sample.Sum(losses) / float64(len(losses))
	}
	if got := meanProduct(weights, losses); s.Measure == capital.ValueAtRisk && got != 0 {
		for y := range weights {
			weights[y] *= want / got
		}
	}
	return weights
}

func weightMean(weights []float64) float64 { return sample.Sum(weights) / float64(len(weights)) }

// part averages a yearly flow and a certain amount with the weights; on basis deviation its mean is taken off. Its standard error is that of a weighted
// mean, the weights taken as given.
func part(s capital.Standard, annual []float64, certain, mean float64, weights []float64) Estimate {
	value := meanProduct(weights, annual)
	scale := weightMean(weights)
	squares := 0.0
	if scale > 0 {
		centre := value / scale
		for y, x := range annual {
			d := weights[y] * (x - centre)
			squares += float64(d * d)
		}
	}
	e := Estimate{value + certain*scale, math.Sqrt(squares) / float64(len(annual))}
	if s.Basis == capital.Deviation {
		e.Value -= mean + certain
	}
	return e
}

// allocateTreaty gives a treaty's capital and takes its flows off the classes' net parts: recoveries fall on the classes whose rows they pay, premiums,
// commission and reinstatement premiums on the same classes in proportion to the expected recoveries.
func (a *Appraiser) allocateTreaty(p treaty.Programme, it item, s capital.Standard, weights []float64, net float64, netPart []Estimate, margins []float64, w *workspace) (TreatyCapital, error) {
	row := TreatyCapital{Name: it.terms.Name}
	flow := a.cashFlow(it, w)
	mean := sample.Sum(flow) / float64(a.years)
	taken := part(s, flow, 0, mean, weights) // what the treaty adds to required capital: negative = it frees
	row.Natural = Estimate{-taken.Value, taken.StandardError}
	for _, alone := range []struct {
		to        *float64
		programme treaty.Programme
	}{
		{&row.StandAlone, treaty.Programme{Treaties: []treaty.Treaty{standAlone(it.terms)}}},
		{&row.LastIn, without(p, it.terms.Name)},
	} {
		others, err := a.items(alone.programme, w)
		if err != nil {
			return row, err
		}
		a.netLosses(others, w)
		copy(w.sorted, w.loss)
		*alone.to = s.Amount(w.sorted, a.meanNet(a.totals(others)))
	}
	row.StandAlone = a.gross[0].figure.Value - row.StandAlone
	row.LastIn -= net

	shares := a.recoveriesByClass(p, it, weights)
	expected := sample.Sum(shares.mean)
	other := taken.Value // of the flows that are no recoveries
	for c := range netPart {
		recovered := shares.weighted[c]
		if s.Basis == capital.Deviation {
			recovered -= shares.mean[c]
		}
		netPart[c].Value -= it.terms.Placed() * recovered
		other += it.terms.Placed() * recovered
	}
	for c := range netPart {
		share := 1 / float64(len(netPart))
		if expected > 0 {
			share = shares.mean[c] / expected
		}
		netPart[c].Value += share * other
		margins[c] += share * mean
	}
	return row, nil
}

// standAlone gives a treaty that nothing inures to.
func standAlone(t treaty.Treaty) treaty.Treaty {
	t.After = nil
	return t
}

// cashFlow gives what a treaty costs in each year, as placed: premiums less commission and recoveries.
func (a *Appraiser) cashFlow(it item, w *workspace) []float64 {
	f := a.flow(it, w)
	placed := it.terms.Placed()
	premium := placed * it.priced.base
	out := make([]float64, a.years)
	for y, r := range f.recovery {
		out[y] = premium*(1-it.priced.commission) - float64(placed*r)
		if f.reinstated != nil {
			out[y] += float64(premium * f.reinstated[y])
		}
	}
	return out
}

// recoveriesByClass shares a treaty's recoveries at 100 % back to the classes whose rows they pay.
func (a *Appraiser) recoveriesByClass(p treaty.Programme, it item, weights []float64) parts {
	table := a.c.Book.Table
	i := slices.IndexFunc(p.Treaties, func(t treaty.Treaty) bool { return t.Name == it.terms.Name })
	rows := rowRecoveries(table, it.terms, newSelection(table, it.terms.Classes, it.terms.Perils), a.lossesNetOf(p, i))
	columns := table.Columns()
	shares := parts{make([]float64, len(a.c.Book.Classes)), make([]float64, len(a.c.Book.Classes))}
	for y := range table.Years() {
		for row := columns.Offset[y]; row < columns.Offset[y+1]; row++ {
			if r := rows[row]; r > 0 {
				shares.mean[columns.Class[row]] += r / float64(a.years)
				shares.weighted[columns.Class[row]] += float64(weights[y]*r) / float64(a.years)
			}
		}
	}
	return shares
}
