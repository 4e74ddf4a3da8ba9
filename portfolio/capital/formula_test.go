package capital

import (
	"fmt"
	"math"
	"math/rand/v2"
	"slices"
	"testing"

	"pgregory.net/rapid"
)

// drawn is a formula with a position.
type drawn struct {
	formula  Formula
	classes  []string
	position FormulaPosition
	gross    float64 // non-life requirement without cover, as given to Require
}

func (d *drawn) total() float64 {
	return d.formula.Require(d.position, d.gross, &FormulaScratch{}).Total
}

// source gives the numbers of a drawn formula: rapid's, which lean to the edges, or even ones, which lie away from kinks.
type source interface {
	number(low, high float64) float64
	count(low, high int) int // both ends included
}

type edges struct{ t *rapid.T }

func (e edges) number(low, high float64) float64 {
	return rapid.Float64Range(low, high).Draw(e.t, "number")
}
func (e edges) count(low, high int) int { return rapid.IntRange(low, high).Draw(e.t, "count") }

type even struct{ *rand.Rand }

func (e even) number(low, high float64) float64 { return low + (high-low)*e.Float64() }
func (e even) count(low, high int) int          { return low + e.IntN(high-low+1) }

// drawFormula draws a formula that is valid and a position. Correlations of scenarios are products of two loadings, which makes matrices that are
// positive semidefinite and entries of at least 0.
func drawFormula(from source, factors Factors) drawn {
	money := func() float64 { return float64(min(from.count(0, 3), 1)) * from.number(0.5, 200) } // none, one time in four
	d := drawn{formula: Formula{
		Factors: factors, NonProportional: NonProportional(from.count(0, 2)), Lapse: money(), OtherCatastrophe: money(), PropertyReinsurance: money(),
		Market: money(), Life: money(), Health: money(), Intangible: money(), Operational: money(), Adjustment: -money(), TypeTwo: money(),
	}}
	f, p := &d.formula, &d.position
	spread := map[int]float64{}
	for c := range from.count(1, 6) {
		d.classes = append(d.classes, fmt.Sprint("class ", c))
		segment := from.count(0, 11)
		if spread[segment] == 0 {
			spread[segment] = from.number(0.06, 1)
		}
		f.Classes = append(f.Classes, FormulaClass{segment, money(), money(), money(), spread[segment]})
		p.Premium = append(p.Premium, from.number(-20, 200))
		p.ExcessCover = append(p.ExcessCover, from.count(0, 1) == 1)
	}
	kinds := factors.Kinds()
	var loadings []float64
	for i := range from.count(0, 12) {
		s := Scenario{Name: fmt.Sprint("scenario ", i), Kind: kinds[from.count(0, len(kinds)-1)], Losses: make([]float64, len(d.classes))}
		f.Scenarios = append(f.Scenarios, s)
		loadings = append(loadings, from.number(0, 1))
		for j, other := range f.Scenarios[:i] {
			if other.Kind == s.Kind {
				f.ScenarioCorrelations = append(f.ScenarioCorrelations, ScenarioCorrelation{i, j, loadings[i] * loadings[j]})
			}
		}
		var net []float64
		for range factors.Alternatives(s.Kind) {
			net = append(net, from.number(-10, 100))
		}
		p.Scenario = append(p.Scenario, net)
	}
	for range from.count(0, 8) {
		f.Recoverables = append(f.Recoverables, from.number(0, 50))
		probability := from.number(1e-5, 0.3)
		if step := from.count(0, 13); step < 7 {
			probability = factors.Steps[step]
		}
		f.Default = append(f.Default, probability)
		f.Tied = append(f.Tied, from.count(0, 1) == 1)
		p.Recoverable = append(p.Recoverable, from.number(0.5, 50))
		p.Collateral = append(p.Collateral, from.number(0, 30))
	}
	d.gross = f.Require(*p, 0, &FormulaScratch{}).NonLife * from.number(0.5, 3)
	return d
}

func TestDrawnFormulasAreValid(t *testing.T) {
	factors := publishedFactors(t)
	rapid.Check(t, func(t *rapid.T) {
		d := drawFormula(edges{t}, factors)
		if err := d.formula.Validate(d.classes, len(d.formula.Default)); err != nil {
			t.Fatal(err)
		}
	})
}

// TestWorkedFormula works one formula out by hand: two classes in one segment, three windstorm scenarios and two fires, two reinsurers.
func TestWorkedFormula(t *testing.T) {
	f := Formula{
		Factors: publishedFactors(t), OtherCatastrophe: 5, PropertyReinsurance: 10, Market: 40, TypeTwo: 6, Operational: 7, Adjustment: -3,
		Classes: []FormulaClass{
			{Segment: 3, Reserves: 50, LastPremium: 90, FuturePremium: 10, Diversification: 0.6}, {Segment: 3, LastPremium: 50, Diversification: 0.6},
		},
		Scenarios: []Scenario{
			{Name: "north", Kind: "windstorm", Losses: []float64{100, 0}}, {Name: "south", Kind: "windstorm", Losses: []float64{60, 0}},
			{Name: "hall", Kind: "fire", Losses: []float64{0, 30}}, {Name: "dock", Kind: "fire", Losses: []float64{0, 40}},
			{Name: "hail", Kind: "hail", Losses: []float64{1, 1}},
		},
		ScenarioCorrelations: []ScenarioCorrelation{{0, 1, 0.25}, {3, 2, 0.5}},
		Recoverables:         []float64{10, 0}, Default: []float64{0.0005, 0.0024}, Tied: []bool{false, true},
	}
	if err := f.Validate([]string{"household", "commercial"}, 2); err != nil {
		t.Fatal(err)
	}
	p := FormulaPosition{
		Premium: []float64{120, -5}, ExcessCover: []bool{false, true},
		Scenario:    [][]float64{{30, 28}, {10, 24}, {12}, {5}, {-3, -1}},
		Recoverable: []float64{20, 30}, Collateral: []float64{4, 0},
	}
	// By hand: next year 120 + 0 is below last year's 90 + 50.
	volume := (140.0 + 10 + 50) * (0.75 + 0.25*0.6)
	a, b := 0.08*0.8*150.0, 0.10*50.0
	premium := 3 * math.Sqrt(a*a+a*b+b*b) * 0.9
	windstorm, fire := math.Sqrt(30*30+24*24+2*0.25*30*24), math.Sqrt(12*12+5*5+2*0.5*12*5)
	catastrophe := math.Sqrt((windstorm+10)*(windstorm+10) + fire*fire + 25)
	nonLife := math.Sqrt(premium*premium + catastrophe*catastrophe + 0.5*premium*catastrophe)
	const gross = 150.0
	effect := gross - nonLife
	first, second := 0.5*(30+0.5*effect*30/60)-4, 0.9*(30+0.5*effect*30/60)
	between, within := byClasses([]float64{first, second}, f.Default)
	typeOne := 3 * math.Sqrt(between+within)
	counterparties := math.Sqrt(typeOne*typeOne + 1.5*typeOne*6 + 36)
	basic := math.Sqrt(1600 + counterparties*counterparties + nonLife*nonLife + 0.5*40*counterparties + 0.5*40*nonLife + counterparties*nonLife)
	r := f.Require(p, gross, &FormulaScratch{})
	for _, c := range []struct {
		name      string
		got, want float64
	}{
		{"volume", r.Volume, volume}, {"premium and reserve", r.PremiumReserve, premium}, {"σ", r.Sigma, premium / 3 / volume}, {"natural", r.Natural, windstorm},
		{"man-made", r.ManMade, fire}, {"catastrophe", r.Catastrophe, catastrophe}, {"non-life", r.NonLife, nonLife}, {"type 1", r.TypeOne, typeOne},
		{"default", r.Default, counterparties}, {"basic", r.Basic, basic}, {"total", r.Total, basic + 4},
	} {
		if !(math.Abs(c.got-c.want) <= 1e-12*c.want) { // a few dozen roundings
			t.Errorf("%s: %v, want %v", c.name, c.got, c.want)
		}
	}
	kinds := f.Factors.Kinds()
	for kind, want := range map[string]float64{"windstorm": r.Natural, "fire": r.ManMade, "hail": 0, "motor": 0} {
		if got := r.Kinds[slices.Index(kinds, kind)]; got != want {
			t.Errorf("%s: %v, want %v", kind, got, want)
		}
	}
	// Excess cover counts for its whole segment by treaty; without it, and never, premium risk keeps its gross deviation.
	a = 0.08 * 150
	uncovered := 3 * math.Sqrt(a*a+a*b+b*b) * 0.9
	p.ExcessCover[1] = false
	for way, want := range map[NonProportional]float64{ByTreaty: uncovered, Always: premium, Never: uncovered} {
		f.NonProportional = way
		if got := f.Require(p, gross, &FormulaScratch{}).PremiumReserve; math.Abs(got-want) > 1e-12*want {
			t.Errorf("way %d: %v, want %v", way, got, want)
		}
	}
}

// TestScaledMoneyScalesTheRequirement checks that the formula is homogeneous of degree one in money: a power of two leaves no rounding.
func TestScaledMoneyScalesTheRequirement(t *testing.T) {
	factors := publishedFactors(t)
	rapid.Check(t, func(t *rapid.T) {
		d := drawFormula(edges{t}, factors)
		before := d.total()
		const k = 8
		f := &d.formula
		for _, x := range []*float64{
			&f.Lapse, &f.OtherCatastrophe, &f.PropertyReinsurance, &f.Market, &f.Life, &f.Health, &f.Intangible, &f.Operational, &f.Adjustment, &f.TypeTwo, &d.gross,
		} {
			*x *= k
		}
		for i := range f.Classes {
			f.Classes[i].Reserves *= k
			f.Classes[i].LastPremium *= k
			f.Classes[i].FuturePremium *= k
		}
		for _, list := range append([][]float64{f.Recoverables, d.position.Premium, d.position.Recoverable, d.position.Collateral}, d.position.Scenario...) {
			for i := range list {
				list[i] *= k
			}
		}
		if after := d.total(); after != k*before {
			t.Fatalf("%v, and %v with all money times %d", before, after, k)
		}
	})
}

// TestLessRiskAsksLess lowers one net loss or one net premium, with everything else fixed, loss given default included: without a requirement before
// cover there is no mitigating effect.
func TestLessRiskAsksLess(t *testing.T) {
	factors := publishedFactors(t)
	rapid.Check(t, func(t *rapid.T) {
		d := drawFormula(edges{t}, factors)
		d.gross = 0
		before := d.total()
		lists := append([][]float64{d.position.Premium}, d.position.Scenario...)
		list := lists[rapid.IntRange(0, len(lists)-1).Draw(t, "list")]
		list[rapid.IntRange(0, len(list)-1).Draw(t, "entry")] -= rapid.Float64Range(0, 50).Draw(t, "less")
		if after := d.total(); after > before*(1+1e-14) { // rounding of the roots
			t.Fatalf("%v, and %v with less risk", before, after)
		}
	})
}

// TestScratchIsReused works different formulas out on the same memory.
func TestScratchIsReused(t *testing.T) {
	factors := publishedFactors(t)
	var s FormulaScratch
	rapid.Check(t, func(t *rapid.T) {
		d := drawFormula(edges{t}, factors)
		if got, want := d.formula.Require(d.position, d.gross, &s).Total, d.total(); got != want {
			t.Fatalf("%v on used memory, %v on new", got, want)
		}
	})
}

// usual is a formula of usual size: 12 segments, 12 scenarios, 8 reinsurers.
func usual(t testing.TB) drawn {
	d := drawn{formula: Formula{Factors: publishedFactors(t), Market: 100, TypeTwo: 10, Operational: 20}, gross: 500}
	f, p := &d.formula, &d.position
	for i := range 12 {
		f.Classes = append(f.Classes, FormulaClass{i, 40 + float64(i), 80, 5, 1})
		p.Premium, p.ExcessCover = append(p.Premium, 100-float64(i)), append(p.ExcessCover, i%2 == 0)
		kind := f.Factors.Kinds()[i%6]
		f.Scenarios = append(f.Scenarios, Scenario{Kind: kind})
		net := []float64{20 + float64(i), 25}
		p.Scenario = append(p.Scenario, net[:len(f.Factors.Alternatives(kind))])
		if i >= 6 {
			f.ScenarioCorrelations = append(f.ScenarioCorrelations, ScenarioCorrelation{i - 6, i, 0.25})
		}
	}
	for i := range 8 {
		f.Default, p.Recoverable, p.Collateral = append(f.Default, f.Factors.Steps[i%5]), append(p.Recoverable, 10+float64(i)), append(p.Collateral, float64(i))
	}
	return d
}

func TestRequireAllocatesNothing(t *testing.T) {
	d := usual(t)
	var s FormulaScratch
	d.formula.Require(d.position, d.gross, &s)
	if n := testing.AllocsPerRun(100, func() { d.formula.Require(d.position, d.gross, &s) }); n != 0 {
		t.Errorf("%v allocations", n)
	}
}

// BenchmarkRequire has a budget of 5 µs.
func BenchmarkRequire(b *testing.B) {
	d := usual(b)
	var s FormulaScratch
	b.ReportAllocs()
	for b.Loop() {
		d.formula.Require(d.position, d.gross, &s)
	}
}

func BenchmarkSlopes(b *testing.B) {
	d := usual(b)
	b.ReportAllocs()
	for b.Loop() {
		d.formula.Slopes(d.position, d.gross)
	}
}

// TestMoreCoverMayAskMore holds Require to its comment: beside a large life module, which non-life risk does not correlate with but default risk does, a
// smaller net loss raises the loss given default by more than it lowers the rest.
func TestMoreCoverMayAskMore(t *testing.T) {
	f := Formula{
		Factors: publishedFactors(t), Life: 1000, Scenarios: []Scenario{{Kind: "fire"}}, Default: []float64{0.042}, // lost in full: beyond the last limit
	}
	p := FormulaPosition{Scenario: [][]float64{{20}}, Recoverable: []float64{1}}
	before := f.Require(p, 100, &FormulaScratch{})
	p.Scenario[0][0] = 10
	after := f.Require(p, 100, &FormulaScratch{})
	if after.NonLife != before.NonLife-10 || math.Abs(after.TypeOne-before.TypeOne-2.5) > 1e-12 || !(after.Total > before.Total) { // one rounding
		t.Errorf("a net loss of 20 asks %+v, one of 10 %+v", before, after)
	}
	if slope := f.Slopes(p, 100).Scenario[0][0]; slope >= 0 {
		t.Errorf("slope %v", slope)
	}
}

// ExampleFactors_DefaultRequirement asks what two reinsurers of different strength call for.
func ExampleFactors_DefaultRequirement() {
	f := Factors{Low: 0.07, High: 0.20, LowMultiple: 3, HighMultiple: 5}
	r := f.DefaultRequirement([]float64{100, 100}, []float64{0.0001, 0.0005})
	fmt.Printf("deviation %.4f of %.0f, requirement %.4f\n", r.Deviation, r.Exposure, r.Requirement)
	// Output: deviation 2.7074 of 200, requirement 8.1222
}
