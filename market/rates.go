package market

import (
	"fmt"
	"math"

	"cedewright/portfolio/treaty"
)

// pricer asks one distortion for the rates on line of quotes; layers of one book share its weights.
type pricer struct {
	distortion Distortion
	brokerage  float64
	tariffs    map[int]*Tariff // by years
}

func newPricer(d Distortion, brokerage float64) *pricer {
	return &pricer{distortion: d, brokerage: brokerage, tariffs: map[int]*Tariff{}}
}

// rate gives the rate on line that the distortion asks for the quoted layer, brokerage included, no minimum; NaN when there is none.
func (p *pricer) rate(q Quote) float64 {
	if !q.Own() {
		return distortedShape(p.distortion, q.Attachment, q.Exhaustion, q.ExpectedLoss) / (1 - p.brokerage)
	}
	t := p.tariffs[q.Years]
	if t == nil || len(t.weights) < len(q.Recoveries) {
		t = unchecked(Curve{Name: q.Curve, Distortion: p.distortion, Brokerage: p.brokerage}, q.Years, len(q.Recoveries))
		p.tariffs[q.Years] = t
	}
	terms := q.quoted()
	if terms.Kind == treaty.QuotaShare {
		return t.Price(q.Recoveries)/terms.Limit + p.brokerage
	}
	premium, err := t.BasePremium(terms, q.Recoveries)
	if err != nil {
		return math.NaN()
	}
	return premium.Base / terms.Limit
}

// rate is that of a single quote.
func (q Quote) rate(d Distortion, brokerage float64) float64 { return newPricer(d, brokerage).rate(q) }

// A parameter is searched over z in 0 to 1, even in the logarithm of its distance from the neutral parameter.
const leastDistance = 1e-4

func (r ParameterRange) at(z float64) float64 {
	return min(r.Low+(r.High-r.Low)*(math.Pow(1/leastDistance, z)-1)/(1/leastDistance-1), r.High)
}

const (
	parameterSteps = 32 // grid steps on which the neighbourhood of the best parameter is looked for
	cellNodes      = 16 // of the interpolation within a step, over which a parameter moves by a third: exact to about 1e-12
)

// rateTable holds what a family asks for each of a list of quotes, as a function of z, so that fits to any weights of the same quotes (one left out,
// drawn again) price no layer anew: exact on the grid, and within a grid step interpolated at Chebyshev's points.
type rateTable struct {
	family    string
	bounds    ParameterRange
	quotes    []Quote
	brokerage float64
	grid      [][]float64                // at each end of a step, for each quote
	cells     [parameterSteps]*[]float64 // node after node; nil = not yet needed
	exact     [parameterSteps]bool       // cells on which rates are not smooth
}

// newRateTable refuses an unknown family.
func newRateTable(family string, quotes []Quote, brokerage float64) (*rateTable, error) {
	bounds, ok := parameterRanges[family]
	if !ok {
		_, err := NewFamily(family, 0)
		return nil, err
	}
	t := &rateTable{family: family, bounds: bounds, quotes: quotes, brokerage: brokerage}
	for i := range parameterSteps + 1 {
		t.grid = append(t.grid, t.price(float64(i)/parameterSteps))
	}
	for i := range t.exact {
		t.exact[i] = family == FamilyTailValueAtRisk || t.steep(i) // the former has kinks
	}
	return t, nil
}

// steep tells whether within a step some layer costs so much that its reinstatement premium exceeds its limit, where its price has a kink.
func (t *rateTable) steep(step int) bool {
	for j, q := range t.quotes {
		if q.Own() {
			for _, c := range q.Terms.Reinstatements {
				if rate := max(t.grid[step][j], t.grid[step+1][j]); !(c*rate <= 1) {
					return true
				}
			}
		}
	}
	return false
}

// price asks the member at z for every rate; NaN where there is none.
func (t *rateTable) price(z float64) []float64 {
	rates := make([]float64, len(t.quotes))
	d, err := NewFamily(t.family, t.bounds.at(z))
	if err != nil {
		for j := range rates {
			rates[j] = math.NaN()
		}
		return rates
	}
	p := newPricer(d, t.brokerage)
	for j, q := range t.quotes {
		rates[j] = p.rate(q)
	}
	return rates
}

// rates gives what the member at z asks for every quote.
func (t *rateTable) rates(z float64) []float64 {
	step := min(int(z*parameterSteps), parameterSteps-1)
	if t.exact[step] {
		return t.price(z)
	}
	if t.cells[step] == nil {
		cell := make([]float64, 0, cellNodes*len(t.quotes))
		for i := range cellNodes {
			node, _ := cellNode(step, i)
			cell = append(cell, t.price(node)...)
		}
		t.cells[step] = &cell
	}
	cell := *t.cells[step]
	rates, total := make([]float64, len(t.quotes)), 0.0
	for i := range cellNodes { // barycentric form (Berrut and Trefethen 2004)
		node, weight := cellNode(step, i)
		values := cell[i*len(rates) : (i+1)*len(rates)]
		if z == node {
			return append(rates[:0], values...)
		}
		weight /= z - node
		total += weight
		for j, v := range values {
			rates[j] += float64(weight * v)
		}
	}
	for j := range rates {
		rates[j] /= total
	}
	return rates
}

var chebyshevNode, chebyshevWeight = func() (node, weight [cellNodes]float64) {
	for i := range node {
		angle := math.Pi * (2*float64(i) + 1) / (2 * cellNodes)
		node[i], weight[i] = math.Cos(angle), math.Sin(angle)
		if i%2 == 1 {
			weight[i] = -weight[i]
		}
	}
	return node, weight
}()

func cellNode(step, i int) (z, weight float64) {
	return (float64(step) + 0.5 + 0.5*chebyshevNode[i]) / parameterSteps, chebyshevWeight[i]
}

// squares is the weighted sum of squared relative errors; infinite where a layer has no price.
func (t *rateTable) squares(rates, weights []float64) float64 {
	sum := 0.0
	for j, rate := range rates {
		if weights[j] > 0 {
			e := rate/t.quotes[j].RateOnLine - 1
			sum += float64(weights[j] * e * e)
		}
	}
	if math.IsNaN(sum) {
		return math.Inf(1)
	}
	return sum
}

// fit gives the member with the least weighted sum of squared relative errors, and that sum: the best place of the grid, refined by golden section.
func (t *rateTable) fit(weights []float64) (parameter, least float64, err error) {
	best := 0
	least = math.Inf(1)
	for i, rates := range t.grid {
		if v := t.squares(rates, weights); v < least {
			best, least = i, v
		}
	}
	if math.IsInf(least, 1) {
		return 0, 0, fmt.Errorf("market: fit of the family %s: no parameter prices the quotes", t.family)
	}
	value := func(z float64) float64 { return t.squares(t.rates(z), weights) }
	z := goldenSection(value, max(float64(best-1)/parameterSteps, 0), min(float64(best+1)/parameterSteps, 1))
	if v := value(z); v > least {
		z = float64(best) / parameterSteps
	} else {
		least = v
	}
	return t.bounds.at(z), least, nil
}

// goldenSection narrows a bracket of one minimum (Kiefer 1953) until its ends differ by 1e-9, near where rounding of values hides the rest.
func goldenSection(f func(float64) float64, low, high float64) float64 {
	const ratio = 0.6180339887498949
	a, b := high-ratio*(high-low), low+ratio*(high-low)
	fa, fb := f(a), f(b)
	for high-low > 1e-9 {
		if fa <= fb {
			high, b, fb = b, a, fa
			a = high - ratio*(high-low)
			fa = f(a)
		} else {
			low, a, fa = a, b, fb
			b = low + ratio*(high-low)
			fb = f(b)
		}
	}
	return (low + high) / 2
}

// weightsOf gives the weights of quotes.
func weightsOf(quotes []Quote) []float64 {
	weights := make([]float64, len(quotes))
	for j, q := range quotes {
		weights[j] = q.Weight
	}
	return weights
}

// less gives the weights with one of them 0.
func less(weights []float64, i int) []float64 {
	rest := append([]float64(nil), weights...)
	rest[i] = 0
	return rest
}
