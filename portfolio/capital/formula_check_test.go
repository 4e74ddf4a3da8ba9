package capital

import (
	"math"
	"slices"
	"strings"
	"testing"

	"cedewright/portfolio/fault"
)

// oneFault wants err to hold one fault, with this key and these words.
func oneFault(t *testing.T, name string, err error, key, words string) {
	t.Helper()
	all := fault.All(err)
	if len(all) != 1 || all[0].Key != key || !strings.Contains(all[0].Error(), words) {
		t.Errorf("%s: %v, want one fault with the key %q and %q", name, err, key, words)
	}
}

func TestBadFactors(t *testing.T) {
	nan := math.NaN()
	for _, c := range []struct {
		key, words string
		change     func(f *Factors)
	}{
		{"name", "no name", func(f *Factors) { f.Name = "" }},
		{"version", "no version", func(f *Factors) { f.Version = "" }},
		{"segments[2].number", "13", func(f *Factors) { f.Segments[2].Number = 13 }},
		{"segments[2].number", "2 is the number of another", func(f *Factors) { f.Segments[2].Number = 2 }},
		{"segments[2].name", "no name", func(f *Factors) { f.Segments[2].Name = "" }},
		{"segments[2].name", `"segment 1"`, func(f *Factors) { f.Segments[2].Name = "segment 1" }},
		{"segments[0].premium", "0; allowed", func(f *Factors) { f.Segments[0].Premium = 0 }},
		{"segments[0].premium", "NaN", func(f *Factors) { f.Segments[0].Premium = nan }},
		{"segments[11].reserve", "1.5", func(f *Factors) { f.Segments[11].Reserve = 1.5 }},
		{"segments[3].non_proportional", "80", func(f *Factors) { f.Segments[3].NonProportional = 80 }},
		{"segment_correlation", "11 rows", func(f *Factors) { f.SegmentCorrelation = f.SegmentCorrelation[:11] }},
		{"segment_correlation[4]", "3 correlations", func(f *Factors) { f.SegmentCorrelation[4] = f.SegmentCorrelation[4][:3] }},
		{"segment_correlation[1][0]", "0.25, but 0.5 the other way round", func(f *Factors) { f.SegmentCorrelation[1][0] = 0.25 }},
		{"segment_correlation[5][5]", "1 on the diagonal", func(f *Factors) { f.SegmentCorrelation[5][5] = 0.9 }},
		{"module_matrix[4][1]", "NaN", func(f *Factors) { f.ModuleMatrix[4][1] = nan }},
		{"module_matrix", "smallest eigenvalue is -0.8", func(f *Factors) { // 1 − 2·0.9 of three modules, the others apart
			f.ModuleMatrix = [][]float64{{1, 0.9, 0, 0, 0.9}, {0.9, 1, 0, 0, -0.9}, {0, 0, 1, 0, 0}, {0, 0, 0, 1, 0}, {0.9, -0.9, 0, 0, 1}}
		}},
		{"premium_reserve", "2;", func(f *Factors) { f.PremiumReserve = 2 }},
		{"multiple", "0;", func(f *Factors) { f.Multiple = 0 }},
		{"diversification", "1;", func(f *Factors) { f.Diversification = 1 }},
		{"patterns[0].kind", `did you mean "windstorm"?`, func(f *Factors) { f.Patterns[0].Kind = "windstrom" }},
		{"patterns[1].kind", `"windstorm" twice`, func(f *Factors) { f.Patterns[1].Kind = "windstorm" }},
		{"patterns[1].alternatives", "no alternative", func(f *Factors) { f.Patterns[1].Alternatives = nil }},
		{"patterns[1].alternatives[0]", "no event", func(f *Factors) { f.Patterns[1].Alternatives = [][]float64{{}} }},
		{"patterns[0].alternatives[1][0]", "-1", func(f *Factors) { f.Patterns[0].Alternatives[1][0] = -1 }},
		{"patterns[0].alternatives[1][1]", "+Inf", func(f *Factors) { f.Patterns[0].Alternatives[1][1] = math.Inf(1) }},
		{"man_made[0]", `"flood"`, func(f *Factors) { f.ManMade = []string{"flood"} }},
		{"man_made[1]", "twice", func(f *Factors) { f.ManMade = []string{"fire", "fire"} }},
		{"premium_lapse", "-2", func(f *Factors) { f.PremiumLapse = -2 }},
		{"premium_catastrophe", "eigenvalue", func(f *Factors) { f.PremiumCat, f.PremiumLapse, f.CatLapse = 0.9, 0.9, -0.9 }},
		{"modules", "in this order", func(f *Factors) { f.Modules = []string{"default", "market", "life", "health", "non-life"} }},
		{"steps", "6 probabilities", func(f *Factors) { f.Steps = f.Steps[:6] }},
		{"steps[6]", "0.01 after 0.042", func(f *Factors) { f.Steps[6] = 0.01 }},
		{"solvency", "no rows", func(f *Factors) { f.Solvency = nil }},
		{"solvency[0].ratio", "NaN", func(f *Factors) { f.Solvency[0].Ratio = nan }},
		{"solvency[7].probability", "4.2", func(f *Factors) { f.Solvency[7].Probability = 4.2 }},
		{"solvency[1].ratio", "1.96 after 1.96", func(f *Factors) { f.Solvency[1].Ratio = 1.96 }},
		{"solvency[1].probability", "0 after 0.0001", func(f *Factors) { f.Solvency[1].Probability = 0 }},
		{"loss_given", "-0.5", func(f *Factors) { f.LossGiven = -0.5 }},
		{"loss_given_tied", "90", func(f *Factors) { f.LossGivenTied = 90 }},
		{"mitigating", "NaN", func(f *Factors) { f.Mitigating = nan }},
		{"collateral_used", "2", func(f *Factors) { f.CollateralUsed = 2 }},
		{"low", "-0.1", func(f *Factors) { f.Low = -0.1 }},
		{"high", "more than low", func(f *Factors) { f.High = f.Low }},
		{"low_multiple", "0;", func(f *Factors) { f.LowMultiple = 0 }},
		{"high_multiple", "2, with 3", func(f *Factors) { f.HighMultiple = 2 }},
		{"types_cross", "3", func(f *Factors) { f.TypesCross = 3 }},
	} {
		f := publishedFactors(t)
		c.change(&f)
		oneFault(t, c.key, f.Validate(), c.key, c.words)
	}
	if got := len(fault.All((&Factors{}).Validate())); got < 10 {
		t.Errorf("factors of nothing have %d faults", got)
	}
}

// TestSingularMatrixIsTaken takes the matrix of two things that are one; rounding leaves an eigenvalue a hair below 0.
func TestSingularMatrixIsTaken(t *testing.T) {
	for _, x := range []float64{1, -1} {
		var faults fault.List
		checkCorrelations(&faults, "m", [][]float64{{1, x, 0.3}, {x, 1, 0.3 * x}, {0.3, 0.3 * x, 1}}, []string{"a", "b", "c"})
		if err := faults.Err(); err != nil {
			t.Error(err)
		}
	}
}

func TestBadFormulas(t *testing.T) {
	classes := []string{"household", "motor"}
	good := func() Formula {
		return Formula{
			Factors: publishedFactors(t),
			Classes: []FormulaClass{{Segment: 3, Diversification: 1}, {Segment: 3, Diversification: 1}},
			Scenarios: []Scenario{
				{Name: "north", Kind: "windstorm", Losses: []float64{10, 0}}, {Name: "south", Kind: "windstorm", Losses: []float64{10, 0}},
				{Name: "east", Kind: "windstorm", Losses: []float64{10, 0}}, {Name: "hall", Kind: "fire", Losses: []float64{10, 0}},
			},
			ScenarioCorrelations: []ScenarioCorrelation{{0, 1, 0.5}, {2, 1, 0.5}, {0, 2, 0.5}},
			Default:              []float64{0.01, 0}, Recoverables: []float64{1, 2}, Tied: []bool{true, false},
		}
	}
	f := good()
	if err := f.Validate(classes, 2); err != nil {
		t.Fatal(err)
	}
	for _, c := range []struct {
		key, words string
		change     func(f *Formula)
	}{
		{"factors.multiple", "0;", func(f *Formula) { f.Factors.Multiple = 0 }},
		{"non_proportional", "by treaty", func(f *Formula) { f.NonProportional = 3 }},
		{"classes", "1 classes", func(f *Formula) { f.Classes = f.Classes[:1] }},
		{"classes[1].segment", `"motor" has no segment`, func(f *Formula) { f.Classes[1].Segment = -1 }},
		{"classes[0].segment", `"household" has no segment`, func(f *Formula) { f.Classes[0].Segment = 12 }},
		{"classes[0].reserves", "-1", func(f *Formula) { f.Classes[0].Reserves = -1 }},
		{"classes[0].last_premium", "NaN", func(f *Formula) { f.Classes[0].LastPremium = math.NaN() }},
		{"classes[0].future_premium", "+Inf", func(f *Formula) { f.Classes[0].FuturePremium = math.Inf(1) }},
		{"classes[1].diversification", "0.5 for \"motor\", but 1", func(f *Formula) { f.Classes[1].Diversification = 0.5 }},
		{"classes[1].diversification", "above 0", func(f *Formula) { f.Classes[1] = FormulaClass{Segment: 4} }},
		{"scenarios[1].name", "no name", func(f *Formula) { f.Scenarios[1].Name = "" }},
		{"scenarios[1].name", `"north" is the name of another`, func(f *Formula) { f.Scenarios[1].Name = "north" }},
		{"scenarios[3].kind", `did you mean "fire"?`, func(f *Formula) { f.Scenarios[3].Kind = "fires" }},
		{"scenarios[3].losses", "3 losses", func(f *Formula) { f.Scenarios[3].Losses = []float64{1, 2, 3} }},
		{"scenarios[3].losses[1]", "-2", func(f *Formula) { f.Scenarios[3].Losses[1] = -2 }},
		{"scenario_correlations[1].correlation", "1.1", func(f *Formula) { f.ScenarioCorrelations[1].Correlation = 1.1 }},
		{"scenario_correlations[3].between", "scenarios 0 and 4", func(f *Formula) { f.add(0, 4) }},
		{"scenario_correlations[3].between", "scenarios 1 and 1", func(f *Formula) { f.add(1, 1) }},
		{"scenario_correlations[3].between", "two kinds", func(f *Formula) { f.add(1, 3) }},
		{"scenario_correlations[3].between", "twice", func(f *Formula) { f.add(1, 0) }},
		{"scenario_correlations", `none of "south" with "east"`, func(f *Formula) { f.ScenarioCorrelations = slices.Delete(f.ScenarioCorrelations, 1, 2) }},
		{"scenario_correlations", "among scenarios of windstorm, no matrix of correlations: its smallest eigenvalue is -0.8", func(f *Formula) {
			for i := range f.ScenarioCorrelations {
				f.ScenarioCorrelations[i].Correlation = -0.9
			}
		}},
		{"lapse", "-1", func(f *Formula) { f.Lapse = -1 }},
		{"other_catastrophe", "-1", func(f *Formula) { f.OtherCatastrophe = -1 }},
		{"property_reinsurance", "-1", func(f *Formula) { f.PropertyReinsurance = -1 }},
		{"market", "-1", func(f *Formula) { f.Market = -1 }},
		{"life", "-1", func(f *Formula) { f.Life = -1 }},
		{"health", "NaN", func(f *Formula) { f.Health = math.NaN() }},
		{"intangible", "-1", func(f *Formula) { f.Intangible = -1 }},
		{"operational", "-1", func(f *Formula) { f.Operational = -1 }},
		{"type_two", "-1", func(f *Formula) { f.TypeTwo = -1 }},
		{"adjustment", "at most 0", func(f *Formula) { f.Adjustment = 1 }},
		{"adjustment", "-Inf", func(f *Formula) { f.Adjustment = math.Inf(-1) }},
		{"recoverables", "1 amounts", func(f *Formula) { f.Recoverables = f.Recoverables[:1] }},
		{"recoverables[1]", "-2", func(f *Formula) { f.Recoverables[1] = -2 }},
		{"default", "0 probabilities", func(f *Formula) { f.Default = nil }},
		{"default[1]", "1.2", func(f *Formula) { f.Default[1] = 1.2 }},
		{"tied", "1 marks", func(f *Formula) { f.Tied = f.Tied[:1] }},
	} {
		f := good()
		c.change(&f)
		oneFault(t, c.key, f.Validate(classes, 2), c.key, c.words)
	}
	f = good()
	f.Recoverables, f.Tied = nil, nil
	if err := f.Validate(classes, 2); err != nil {
		t.Errorf("without existing recoverables and tied reinsurers: %v", err)
	}
}

func (f *Formula) add(a, b int) {
	f.ScenarioCorrelations = append(f.ScenarioCorrelations, ScenarioCorrelation{a, b, 0.5})
}

func TestAlternatives(t *testing.T) {
	f := publishedFactors(t)
	for kind, want := range map[string]int{"windstorm": 2, "flood": 2, "hail": 2, "earthquake": 1, "subsidence": 1, "fire": 1, "credit": 1, "drought": 0} {
		if got := len(f.Alternatives(kind)); got != want {
			t.Errorf("%s has %d alternatives, want %d", kind, got, want)
		}
	}
	if got := f.Alternatives("windstorm"); !slices.Equal(got[0], []float64{0.8, 0.4}) || !slices.Equal(got[1], []float64{1, 0.2}) {
		t.Errorf("windstorm: %v", got)
	}
	if got := f.Alternatives("motor"); !slices.Equal(got[0], []float64{1}) {
		t.Errorf("motor: %v", got)
	}
}
