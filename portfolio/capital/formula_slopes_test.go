package capital

import (
	"math"
	"math/rand/v2"
	"slices"
	"testing"

	"pgregory.net/rapid"
)

// kink tells whether a drawn formula is so near a kink or an apex that differences across it say nothing of the slope.
func (d *drawn) kink() bool {
	const near = 0.01
	var s FormulaScratch
	f, p := &d.formula, d.position
	r := f.Require(p, d.gross, &s)
	close := func(x float64) bool { return math.Abs(x) < near }
	if close(r.Total) || close(d.gross-r.NonLife) {
		return true
	}
	for _, v := range s.segments {
		if close(v.next-v.last) && v.next+v.last > 0 {
			return true
		}
	}
	if slices.ContainsFunc(p.Premium, close) {
		return true
	}
	for _, list := range p.Scenario {
		if slices.ContainsFunc(list, close) || len(list) == 2 && close(list[0]-list[1]) {
			return true
		}
	}
	for i := range f.Default {
		if close(f.lossGiven(p, i, &s)) {
			return true
		}
	}
	ratio := s.risk.Deviation / s.risk.Exposure
	return s.risk.Exposure > 0 && (math.Abs(ratio-f.Factors.Low) < 1e-4 || math.Abs(ratio-f.Factors.High) < 1e-4)
}

// difference gives the central difference of the whole requirement by one input.
func (d *drawn) difference(input *float64) float64 {
	const h = 1e-4
	old := *input
	*input = old + h
	above := d.total()
	*input = old - h
	below := d.total()
	*input = old
	return (above - below) / (2 * h)
}

// differing gives drawn formulas away from kinks.
func differing(t *testing.T, n int) []drawn {
	t.Helper()
	factors := publishedFactors(t)
	factors.PremiumLapse, factors.CatLapse, factors.PremiumReserve = 0.3, 0.1, 0.4 // none 0 and no two alike, so that every one shows
	from := even{rand.New(rand.NewPCG(2015, 35))}
	var list []drawn
	for range n {
		if d := drawFormula(from, factors); !d.kink() {
			list = append(list, d)
		}
	}
	if len(list) < n/2 {
		t.Fatalf("only %d of %d formulas are away from kinks", len(list), n)
	}
	return list
}

// tolerance of a central difference: rounding is 1e-13 over 2e-4; curvature, of roots that are at least about 0.1 beside a step of 1e-4, leaves 1e-6.
const tolerance = 3e-6

// TestSlopesAreDifferences compares the gradient with central differences.
func TestSlopesAreDifferences(t *testing.T) {
	pieces := map[float64]int{} // of type 1 default risk
	for n, d := range differing(t, 400) {
		var s FormulaScratch
		d.formula.Require(d.position, d.gross, &s)
		pieces[d.formula.Factors.defaultMultiple(s.risk)]++
		slopes := d.formula.Slopes(d.position, d.gross)
		check := func(name string, i int, slope float64, input *float64) {
			t.Helper()
			if got := d.difference(input); math.Abs(got-slope) > tolerance {
				t.Errorf("formula %d, %s %d: slope %v, difference %v", n, name, i, slope, got)
			}
		}
		for i := range d.formula.Classes {
			check("premium of class", i, slopes.Premium[i], &d.position.Premium[i])
			if d.formula.Classes[i].Reserves > 0 { // below 0 reserves have no meaning
				check("reserves of class", i, slopes.Reserves[i], &d.formula.Classes[i].Reserves)
			}
		}
		for i, list := range d.position.Scenario {
			for k := range list {
				check("scenario", i, slopes.Scenario[i][k], &list[k])
			}
		}
		for i := range d.position.Recoverable {
			check("recoverable of reinsurer", i, slopes.Recoverable[i], &d.position.Recoverable[i])
		}
	}
	if len(pieces) != 3 {
		t.Errorf("not all pieces of type 1 default risk were met: %v", pieces)
	}
}

// TestPartsAddUp checks that parts add up and that a scenario's is its loss times its slope.
func TestPartsAddUp(t *testing.T) {
	factors := publishedFactors(t)
	rapid.Check(t, func(t *rapid.T) {
		d := drawFormula(edges{t}, factors)
		parts := d.formula.Parts(d.position, d.gross, nil)
		if got, total := parts.Sum(), d.total(); math.Abs(got-total) > 1e-9*total {
			t.Fatalf("parts of %v add up to %v: %+v", total, got, parts)
		}
		slopes := d.formula.Slopes(d.position, d.gross)
		for i, list := range d.position.Scenario {
			want := 0.0
			for k, x := range list {
				want += x * slopes.Scenario[i][k]
			}
			if math.Abs(parts.Scenario[i]-want) > 1e-12*(1+math.Abs(want)) { // the same product
				t.Fatalf("scenario %d: part %v, slope times loss %v", i, parts.Scenario[i], want)
			}
		}
	})
}

// TestPartsAreInputTimesDifference holds the parts that are no slope of FormulaSlopes against differences.
func TestPartsAreInputTimesDifference(t *testing.T) {
	for n, d := range differing(t, 300) {
		f := &d.formula
		parts := f.Parts(d.position, d.gross, nil)
		inputs := map[string]*float64{
			"mitigating effect": &d.gross, "lapse": &f.Lapse, "other catastrophes": &f.OtherCatastrophe, "property reinsurance written": &f.PropertyReinsurance,
			"market": &f.Market, "type 2 default": &f.TypeTwo, "life": &f.Life, "health": &f.Health, "intangible": &f.Intangible,
			"operational": &f.Operational, "adjustment": &f.Adjustment,
		}
		if len(parts.Other) != len(inputs) {
			t.Fatalf("%d other parts", len(parts.Other))
		}
		for _, part := range parts.Other {
			input := inputs[part.Name]
			if *input == 0 { // maybe at an apex, but its part is 0 whatever its slope
				if part.Amount != 0 {
					t.Errorf("formula %d, %s: part %v of nothing", n, part.Name, part.Amount)
				}
				continue
			}
			if want := d.difference(input) * *input; math.Abs(part.Amount-want) > tolerance*math.Abs(*input) {
				t.Errorf("formula %d, %s: part %v, difference times input %v", n, part.Name, part.Amount, want)
			}
		}
		for i := range d.position.Collateral {
			owed, held := f.Recoverables[i]+d.position.Recoverable[i], d.position.Collateral[i]
			want := d.difference(&d.position.Recoverable[i])*owed + d.difference(&d.position.Collateral[i])*held
			if math.Abs(parts.Reinsurer[i]-want) > tolerance*(owed+held) {
				t.Errorf("formula %d, reinsurer %d: part %v, differences times inputs %v", n, i, parts.Reinsurer[i], want)
			}
		}
		for i := range f.Classes {
			class := &f.Classes[i]
			want := d.difference(&d.position.Premium[i]) * d.position.Premium[i]
			for _, input := range []*float64{&class.LastPremium, &class.FuturePremium} {
				if *input > 0 {
					want += d.difference(input) * *input
				}
			}
			if math.Abs(parts.Premium[i]-want) > tolerance*(20+math.Abs(d.position.Premium[i])+class.LastPremium+class.FuturePremium) {
				t.Errorf("formula %d, class %d: premium part %v, differences times inputs %v", n, i, parts.Premium[i], want)
			}
		}
	}
}

// TestPartsByClass splits each scenario's part by class.
func TestPartsByClass(t *testing.T) {
	d := usual(t)
	byClass := make([][][]float64, len(d.formula.Scenarios))
	for i, list := range d.position.Scenario {
		for _, x := range list {
			losses := make([]float64, len(d.formula.Classes))
			losses[i], losses[(i+1)%12] = 0.75*x, 0.25*x
			byClass[i] = append(byClass[i], losses)
		}
	}
	parts := d.formula.Parts(d.position, d.gross, byClass)
	sum := 0.0
	for c := range d.formula.Classes {
		sum += parts.Class(c)
	}
	for _, x := range parts.Reinsurer {
		sum += x
	}
	for _, other := range parts.Other {
		sum += other.Amount
	}
	if total := d.total(); math.Abs(sum-total) > 1e-9*total || math.Abs(parts.Sum()-total) > 1e-9*total {
		t.Errorf("parts of %v add up to %v by class, %v by scenario", total, sum, parts.Sum())
	}
	for i, x := range parts.Scenario {
		if a, b := parts.ClassScenario[i][i], parts.ClassScenario[(i+1)%12][i]; math.Abs(a-0.75*x) > 1e-12 || math.Abs(b-0.25*x) > 1e-12 { // one rounding
			t.Errorf("scenario %d of %v: %v and %v", i, x, a, b)
		}
	}
	if parts := d.formula.Parts(d.position, d.gross, nil); parts.ClassScenario != nil {
		t.Error("parts by class without losses by class")
	}
}

// TestSidesOfKinks holds the slopes at kinks to what their comment says.
func TestSidesOfKinks(t *testing.T) {
	f := Formula{
		Factors: publishedFactors(t), Default: []float64{0.002, 0.002},
		Classes: []FormulaClass{
			{Segment: 0, Reserves: 10, LastPremium: 100, Diversification: 1}, {Segment: 1, Reserves: 10, Diversification: 1},
			{Segment: 2, Reserves: 10, Diversification: 1},
		},
		Scenarios:            []Scenario{{Kind: "hail"}, {Kind: "flood"}, {Kind: "fire"}, {Kind: "fire"}},
		ScenarioCorrelations: []ScenarioCorrelation{{2, 3, 0.5}},
	}
	p := FormulaPosition{
		Premium: []float64{100, 0, -1}, Scenario: [][]float64{{20, 20}, {-1, -2}, {0}, {7}},
		Recoverable: []float64{50, 8}, Collateral: []float64{0, 4},
	}
	gross := f.Require(p, 0, &FormulaScratch{}).NonLife // no mitigating effect, by the breadth of a hair
	s := f.Slopes(p, gross)
	if !(s.Premium[0] > 0 && s.Premium[1] > 0 && s.Premium[2] == 0) {
		t.Errorf("premiums equal to last year's, of 0, below 0: %v", s.Premium)
	}
	if !(s.Scenario[0][0] > 0 && s.Scenario[0][1] == 0) || s.Scenario[1][0] != 0 || s.Scenario[1][1] != 0 || !(s.Scenario[2][0] > 0 && s.Scenario[3][0] > 0) {
		t.Errorf("scenarios: %v", s.Scenario)
	}
	if !(s.Recoverable[0] > 0 && s.Recoverable[1] > 0) {
		t.Errorf("recoverables, the second covered by collateral to the cent: %v", s.Recoverable)
	}
	p.Collateral[1] = 5
	if s := f.Slopes(p, gross); s.Recoverable[1] != 0 {
		t.Errorf("a recoverable covered by more collateral: %v", s.Recoverable)
	}
	empty := Formula{Factors: f.Factors, Classes: f.Classes[1:2], Scenarios: f.Scenarios[:1], Default: []float64{0.01}}
	empty.Classes[0].Reserves = 0
	none := empty.Slopes(FormulaPosition{Premium: []float64{0}, Scenario: [][]float64{{0, 0}}}, 0)
	for _, x := range []float64{none.Premium[0], none.Reserves[0], none.Scenario[0][0], none.Recoverable[0]} {
		if x != 0 {
			t.Errorf("slopes at the apex: %+v", none)
		}
	}
}
