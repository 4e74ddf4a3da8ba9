package optimize

import (
	"slices"

	"cedewright/portfolio/capital"
	"cedewright/portfolio/sample"
)

// What the owners ask for the risk that they keep. With a flat rate it is the rate times required capital. With a price of risk of their own, a distortion
// g, the retained result is backed by assets A that the regulator's measure sets: Z = min(−U, A) is what the company can lose, and the owners ask
//
//	ρ_g(Z) − E[Z]
//
// beyond the expected result: premium by one measure, assets by the other. With the constant cost of capital g(s) = (s + ι)/(1 + ι) this is ι times the
// capital A − ρ_g(Z), assets less premium: the flat rate is the special case in which every unit of capital earns the same (premium by distortion: Wang
// 1996).

// assets gives how much the company can lose, as a loss of the result: required capital, counted from the expected result where the standard does.
func (a *Appraiser) assets(p *position, all []requirement, driver int) float64 {
	q := all[driver]
	if s := a.c.Standards[driver]; s.Simulated() && s.Criteria[max(q.setBy, 0)].Basis == capital.Deviation {
		return q.amount + p.company.mean
	}
	return q.amount
}

// capitalCost gives what the owners ask for the risk kept, money per year.
func (a *Appraiser) capitalCost(p *position, all []requirement, driver int, w *workspace) float64 {
	if a.c.Owners == nil {
		return a.c.CostOfCapital * all[driver].amount
	}
	assets := a.assets(p, all, driver)
	sum := 0.0
	for y, x := range p.company.losses {
		z := min(x, assets)
		w.sorted[y] = z
		sum += z
	}
	slices.Sort(w.sorted)
	return distorted(w.sorted, a.ownerSteps) - sum/float64(a.years)
}

// distorted gives ρ_g of ascending values from the steps g((k+1)/N) − g(k/N), k = 0 for the largest.
func distorted(ascending, steps []float64) float64 {
	n := len(ascending)
	sum := 0.0
	for k, step := range steps {
		sum += float64(step * ascending[n-1-k])
	}
	return sum
}

// capitalCostMoves gives how the owners' cost answers to what is uncertain.
func (a *Appraiser) capitalCostMoves(p *position, all []requirement, driver int, driving moves, flows []flow) moves {
	m := a.noMoves(len(p.items))
	if a.c.Owners == nil {
		m.add(a.c.CostOfCapital, driving)
		return m
	}
	assets := a.assets(p, all, driver)
	z := make([]float64, a.years)
	beyond := 0
	for y, x := range p.company.losses {
		z[y] = min(x, assets)
		if x >= assets {
			beyond++
		}
	}
	mean := sample.Sum(z) / float64(a.years)
	m.years = sample.DistortedInfluence(z, a.c.Owners.At, m.years)
	for y, x := range z {
		m.years[y] -= x - mean
	}
	a.withinStrata(m.years)
	// A year's price of risk, prices of treaties held: the weight that the owners give it beyond its own, in the years short of the assets.
	weights := sample.AllocationWeights(z, a.c.Owners.At)
	for y, x := range p.company.losses {
		if x >= assets {
			weights[y] = 0
		} else {
			weights[y]--
		}
	}
	certain := sample.Sum(weights) / float64(a.years)
	for k, it := range p.items {
		placed := it.terms.Placed()
		m.base[k] = placed * certain
		if flows[k].reinstated != nil {
			m.base[k] += placed * meanProduct(weights, flows[k].reinstated)
		}
		m.commission[k] = -placed * certain
	}
	share := float64(beyond) / float64(a.years)
	slope := a.c.Owners.At(share) - share // of the cost by the assets
	if s := a.c.Standards[driver]; s.Simulated() && s.Criteria[max(all[driver].setBy, 0)].Basis == capital.Deviation {
		for y, x := range p.company.losses {
			m.years[y] += float64(slope * (x - p.company.mean))
		}
		for k, it := range p.items {
			m.base[k] += slope * it.terms.Placed() * (1 + it.priced.reinstated)
			m.commission[k] -= slope * it.terms.Placed()
		}
	}
	m.add(slope, driving)
	return m
}
