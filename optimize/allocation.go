package optimize

import (
	"fmt"
	"math"
	"slices"

	"cedewright/portfolio/capital"
	"cedewright/portfolio/sample"
	"cedewright/portfolio/treaty"
)

// Allocation says where the required capital of one standard comes from, by natural allocation. Under a simulated standard each part is averaged with the
// weights that the standard gives to the years of the position as a whole, ties shared, so that the parts add up (Tasche 1999; Denault 2001). Value
// at risk sits on a single year; its weights are spread over the years whose rank is within one standard error of the quantile's and scaled so
// that the parts add up all the same. Under a formula or a covariance the parts follow from its slopes (Euler's theorem).
type Allocation struct {
	Standard string
	Drives   bool           // the standard drives at this programme
	Classes  []ClassCapital // none under a covariance, whose charges are not by class
	Perils   []PerilCapital // losses alone; of a covariance its perils' parts; none under a formula
	Others   []OtherCapital // what belongs to no class: the rest of the company, other modules, given charges
	Certain  float64        // simulated standards: expenses less premiums, what the perils' parts lack to the gross capital; 0 on basis deviation
	Treaties []TreatyCapital
	Gross    float64 // required capital with no cover: the sum of the gross parts
	Net      float64 // with the programme: the sum of the net parts
}

// ClassCapital is one class's part, in money, and what it earns on it.
type ClassCapital struct {
	Name       string
	Gross, Net Estimate // part of required capital before and after the programme; a class that hedges the others has a negative one
	GrossMean  float64  // expected result of a year before the programme
	NetMean    float64  // after it: less the class's part of the treaties' margins
	GrossCost  float64  // part of what the owners ask for the risk kept, money per year, before and
	NetCost    float64  // after the programme; both 0 but for the standard that drives
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

// OtherCapital is the part of something that belongs to no class, in money.
type OtherCapital struct {
	Name       string
	Gross, Net float64
	GrossCost  float64 // part of what the owners ask, as of a class
	NetCost    float64
}

// TreatyCapital is the capital that one treaty frees, in money, seen in three ways.
type TreatyCapital struct {
	Name       string
	StandAlone float64  // the treaty alone, against no cover
	LastIn     float64  // with it, against the programme without it
	Natural    Estimate // its part of the programme's relief, by the weights or slopes at the net position
	Cost       float64  // by how much it lowers what the owners ask for the risk kept, by natural allocation, money per year; 0 but for the standard that drives
}

// Allocate allocates the required capital of a programme under every standard, in their order.
func (a *Appraiser) Allocate(p treaty.Programme) ([]Allocation, error) {
	w := a.scratch.Get().(*workspace)
	defer a.scratch.Put(w)
	net, _, err := a.positionOf(p, w)
	if err != nil {
		return nil, fmt.Errorf("allocate %q: %w", p.Name, err)
	}
	after := a.requirements(net, w)
	net = a.own(net)
	w.clearFlows()
	gross := a.position(treaty.Programme{}, nil, a.meanLoss+a.constant, w)
	before := a.requirements(gross, w)
	gross = a.own(gross)
	flows := a.cashFlows(net, w)
	others, err := a.otherProgrammes(p, net, w)
	if err != nil {
		return nil, fmt.Errorf("allocate %q: %w", p.Name, err)
	}
	list := make([]Allocation, len(a.rules))
	for i, r := range a.rules {
		k := Allocation{Standard: a.c.Standards[i].Name, Drives: i == a.driving(after), Gross: before[i].amount, Net: after[i].amount}
		for _, t := range p.Treaties {
			k.Treaties = append(k.Treaties, TreatyCapital{Name: t.Name})
		}
		switch r := r.(type) {
		case *simulatedRule:
			r.allocate(&k, gross, net, before[i], after[i], flows)
		case *formulaRule:
			if err := r.allocate(&k, gross, net, flows); err != nil {
				return nil, fmt.Errorf("allocate %q: %w", p.Name, err)
			}
		case *covarianceRule:
			r.allocate(&k, gross, net)
		}
		for j, t := range p.Treaties {
			if t.Placed() > 0 {
				k.Treaties[j].StandAlone = before[i].amount - others.alone[j][i].amount
				k.Treaties[j].LastIn = others.without[j][i].amount - after[i].amount
			}
		}
		if k.Drives {
			a.allocateCost(&k, gross, net, before, after, flows)
		}
		list[i] = k
	}
	return list, nil
}

// otherRequirements are what every standard asks of each treaty alone and of the programme without it, by treaty; nil for one that is not placed.
type otherRequirements struct{ alone, without [][]requirement }

func (a *Appraiser) otherProgrammes(p treaty.Programme, net *position, w *workspace) (otherRequirements, error) {
	o := otherRequirements{make([][]requirement, len(p.Treaties)), make([][]requirement, len(p.Treaties))}
	for _, it := range net.items {
		single := it.terms
		single.After = nil // nothing inures to a treaty alone
		for _, c := range []struct {
			to        *[]requirement
			programme treaty.Programme
		}{
			{&o.alone[it.place], treaty.Programme{Treaties: []treaty.Treaty{single}}},
			{&o.without[it.place], without(p, it.terms.Name)},
		} {
			q, _, err := a.positionOf(c.programme, w)
			if err != nil {
				return o, err
			}
			*c.to = a.requirements(q, w)
		}
	}
	return o, nil
}

// yearWeights are the weights of the years in a required capital: the part of a yearly flow is the mean of weight times flow, less deviation times its mean.
type yearWeights struct {
	years     []float64
	deviation float64 // 1 on basis deviation, 0 on basis result, between them for mixed criteria
}

// weights gives the weights of the years in the requirement of a view: those of its criteria, by their share in it.
func (r *simulatedRule) weights(v view, setBy int) yearWeights {
	w := yearWeights{years: make([]float64, len(v.losses))}
	for i, share := range r.standard.Shares(setBy) {
		c := r.standard.Criteria[i]
		held := c.From(v.tails[r.level[i]], v.mean) / c.Ratio
		if share == 0 || held == 0 && c.Basis == capital.Result {
			continue
		}
		addScaled(w.years, share*c.Ratio, capitalWeights(c, v.losses, held))
		if c.Basis == capital.Deviation {
			w.deviation += share * c.Ratio
		}
	}
	return w
}

// capitalWeights gives the weights of the years in one measure, such that the mean of weight times loss is the measure: held, and the mean of the losses on
// top on basis deviation.
func capitalWeights(c capital.Criterion, losses []float64, held float64) []float64 {
	weights := tailWeights(losses, c.Measure, c.Level)
	want := held
	if c.Basis == capital.Deviation {
		want += sample.Sum(losses) / float64(len(losses))
	}
	if got := meanProduct(weights, losses); c.Measure == capital.ValueAtRisk && got != 0 {
		for y := range weights {
			weights[y] *= want / got
		}
	}
	return weights
}

// part averages a yearly flow with the weights. Its standard error is that of a weighted mean, the weights taken as given.
func (w yearWeights) part(flow []float64) Estimate {
	value := meanProduct(w.years, flow)
	scale := sample.Sum(w.years) / float64(len(w.years))
	squares := 0.0
	if scale > 0 {
		centre := value / scale
		for y, x := range flow {
			d := w.years[y] * (x - centre)
			squares += float64(d * d)
		}
	}
	n := float64(len(flow))
	return Estimate{value - w.deviation*sample.Sum(flow)/n, math.Sqrt(squares) / n}
}

func (w yearWeights) scaled(c float64) yearWeights {
	if c != 1 {
		for y := range w.years {
			w.years[y] *= c
		}
		w.deviation *= c
	}
	return w
}

// allocate fills an allocation under a simulated standard. With the rest of the company as a capital figure B, K of the company is homogeneous in K and B, so
// the book's part is the slope by K times K and the rest's is what remains; with a law of the rest its part is averaged like any other.
func (r *simulatedRule) allocate(k *Allocation, gross, net *position, before, after requirement, flows *bookFlows) {
	a := r.a
	grossWeights, netWeights := r.weights(gross.company, before.setBy), r.weights(net.company, after.setBy)
	if rest := a.c.Rest; rest != nil {
		other := OtherCapital{Name: "rest of the company"}
		if rest.Quantile == nil {
			grossWeights, netWeights = grossWeights.scaled(rest.Slope(before.alone)), netWeights.scaled(rest.Slope(after.alone))
			other.Gross, other.Net = before.amount-rest.Slope(before.alone)*before.alone, after.amount-rest.Slope(after.alone)*after.alone
		} else {
			other.Gross, other.Net = grossWeights.part(a.rest).Value, netWeights.part(a.rest).Value
		}
		k.Others = append(k.Others, other)
	}
	for c, class := range a.c.Book.Classes {
		k.Classes = append(k.Classes, ClassCapital{
			Name: class.Name, Gross: grossWeights.part(flows.gross[c]), Net: netWeights.part(flows.net[c]),
			GrossMean: flows.grossMean(c), NetMean: flows.netMean(c),
		})
	}
	table := a.c.Book.Table
	for i, name := range table.Perils() {
		annual := table.Annual(-1, i)
		k.Perils = append(k.Perils, PerilCapital{name, grossWeights.part(annual), netWeights.part(annual)})
	}
	k.Certain = a.constant * (sample.Sum(grossWeights.years)/float64(a.years) - grossWeights.deviation)
	for _, t := range flows.treaties {
		taken := netWeights.part(t.cost) // what the treaty adds to required capital: negative = it frees
		k.Treaties[t.place].Natural = Estimate{-taken.Value, taken.StandardError}
	}
}

// allocateCost fills the parts of what the owners ask for the risk kept. At a flat rate they are the rate times the parts of required capital. With a
// price of risk of their own a year's loss counts with the weight that the distortion gives it beyond its own; in years beyond the assets, what the
// company can lose falls on the classes in proportion to their loss (equal priority: Phillips, Cummins and Allen 1998).
func (a *Appraiser) allocateCost(k *Allocation, gross, net *position, before, after []requirement, flows *bookFlows) {
	if a.c.Owners == nil {
		for c := range k.Classes {
			k.Classes[c].GrossCost, k.Classes[c].NetCost = a.c.CostOfCapital*k.Classes[c].Gross.Value, a.c.CostOfCapital*k.Classes[c].Net.Value
		}
		for i := range k.Others {
			k.Others[i].GrossCost, k.Others[i].NetCost = a.c.CostOfCapital*k.Others[i].Gross, a.c.CostOfCapital*k.Others[i].Net
		}
		for j := range k.Treaties {
			k.Treaties[j].Cost = a.c.CostOfCapital * k.Treaties[j].Natural.Value
		}
		return
	}
	grossWeights := a.ownerWeights(gross, before, a.driving(before))
	netWeights := a.ownerWeights(net, after, a.driving(after))
	for c := range k.Classes {
		k.Classes[c].GrossCost, k.Classes[c].NetCost = meanProduct(grossWeights, flows.gross[c]), meanProduct(netWeights, flows.net[c])
	}
	if a.rest != nil && len(k.Others) > 0 {
		k.Others[0].GrossCost, k.Others[0].NetCost = meanProduct(grossWeights, a.rest), meanProduct(netWeights, a.rest)
	}
	for _, t := range flows.treaties {
		k.Treaties[t.place].Cost = -meanProduct(netWeights, t.cost)
	}
}

// ownerWeights gives weights of the years such that the mean of weight times loss is what the owners ask for the risk kept.
func (a *Appraiser) ownerWeights(p *position, all []requirement, driver int) []float64 {
	assets := a.assets(p, all, driver)
	z := slices.Clone(p.company.losses)
	for y, x := range z {
		z[y] = min(x, assets)
	}
	weights := sample.AllocationWeights(z, a.c.Owners.At)
	for y, x := range p.company.losses {
		weights[y]--
		if x > assets && x != 0 {
			weights[y] *= assets / x
		}
	}
	return weights
}
