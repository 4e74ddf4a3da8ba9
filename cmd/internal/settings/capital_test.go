package settings

import (
	"math"
	"reflect"
	"slices"
	"strings"
	"testing"

	"cedewright/portfolio/capital"
	"cedewright/portfolio/security"
	"cedewright/portfolio/treaty"
)

func factorsThatShip(t *testing.T) capital.Factors {
	t.Helper()
	data, ok := ShippedFactors(DefaultFactors)
	if !ok {
		t.Fatalf("no factors %q ship", DefaultFactors)
	}
	factors, err := ReadFactors(data, DefaultFactors)
	if err != nil {
		t.Fatal(err)
	}
	return factors
}

func TestStandardsTakeDefaults(t *testing.T) {
	s := load(t, good+".yaml")
	if got := s.Capital.Standards[1].Rule(); len(got.Criteria) != 1 || got.Criteria[0].Ratio != 1.2 || got.Criteria[0].Basis != capital.Deviation || got.Criteria[0].Level.ReturnPeriod() != 300 {
		t.Errorf("a measure: %+v", got)
	}
	table := s.Capital.Standards[2].Rule()
	if table.Combination != capital.Weighted || len(table.Criteria) != 2 || table.Criteria[0].Weight != 0.4 || table.Criteria[1].Weight != 0.6 {
		t.Errorf("criteria: %+v", table)
	}
	if c := table.Criteria[1]; c.Measure != capital.TailValueAtRisk || c.Level.Float() != 0.99 || c.Basis != capital.Result || c.Ratio != 1 {
		t.Errorf("basis and ratio left out: %+v", c)
	}
	if err := table.Validate(); err != nil {
		t.Error(err)
	}
	preset := Standard{Name: "a", Preset: "eu-one-year"}
	if preset.Rule().Source == "set in the study" {
		t.Error("a preset has lost its source")
	}
	ratio := Fraction(1.2)
	preset.Ratio = &ratio
	if got := preset.Rule(); got.Source != "set in the study, from the preset eu-one-year" || got.Criteria[0].Ratio != 1.2 || got.Criteria[0].Level.Float() != 0.995 {
		t.Errorf("a preset with a ratio: %+v", got)
	}
	if c := s.Capital.Standards[4].Covariance.Rule(); c.Uncorrelated != 10e6 || c.Charges != [5]float64{5e6, 8e6, 12e6, 40e6, 30e6} || c.Multiple != 0.5 || c.Level.ReturnPeriod() != 50 || c.ContingentCredit != 0.048 {
		t.Errorf("covariance: %+v", c)
	}
	if c := (Covariance{Perils: []string{"hail"}}).Rule(); c.Multiple != 1 || c.Level.ReturnPeriod() != 100 || c.Uncorrelated != 0 || c.Validate() != nil {
		t.Errorf("covariance with perils alone: %+v", c)
	}
}

// TestFormulaFollowsTheBook: the classes of a formula stand in the order of the book, its recoverables in that of the reinsurers, whatever their
// order in the file.
func TestFormulaFollowsTheBook(t *testing.T) {
	s, factors := load(t, good+".yaml"), factorsThatShip(t)
	reinsurers := s.Security.Register(factors, 1).Reinsurers
	f := s.Capital.Standards[3].Formula.Rule(factors, s.Book.Classes, reinsurers)
	if err := f.Validate([]string{"home", "motor", "7"}, len(reinsurers)); err != nil {
		t.Fatal(err)
	}
	var segments []int
	for _, c := range f.Classes {
		segments = append(segments, factors.Segments[c.Segment].Number)
	}
	if !slices.Equal(segments, []int{4, 2, 9}) {
		t.Errorf("segments %v of home, motor and 7", segments)
	}
	if c := f.Classes[1]; c.Reserves != 60e6 || c.LastPremium != 1.4e9 || c.FuturePremium != 20e6 || c.Diversification != 0.9 || f.Classes[0].Diversification != 1 {
		t.Errorf("motor %+v, home %+v", c, f.Classes[0])
	}
	if n := f.Scenarios[0]; n.Peril != "windstorm" || n.OneRisk || !slices.Equal(n.Losses, []float64{180e6, 90e6, 0}) {
		t.Errorf("a scenario without a peril takes its kind: %+v", n)
	}
	if n := f.Scenarios[2]; n.Peril != "fire" || !n.OneRisk || !slices.Equal(n.Losses, []float64{120e6, 0, 0}) {
		t.Errorf("%+v", n)
	}
	if want := []capital.ScenarioCorrelation{{A: 1, B: 0, Correlation: -0.5}}; !slices.Equal(f.ScenarioCorrelations, want) {
		t.Errorf("correlations %v", f.ScenarioCorrelations)
	}
	if f.NonProportional != capital.Always || f.Adjustment != -8e6 || f.Lapse != 5e6 || f.OtherCatastrophe != 1e6 || f.PropertyReinsurance != 2e6 ||
		f.Market != 30e6 || f.Life != 3e6 || f.Health != 4e6 || f.Intangible != 6e6 || f.Operational != 7e6 || f.TypeTwo != 9e6 {
		t.Errorf("%+v", f)
	}
	if !slices.Equal(f.Recoverables, []float64{0, 10e6, 0}) || !slices.Equal(f.Tied, []bool{false, true, false}) {
		t.Errorf("recoverables %v, tied %v", f.Recoverables, f.Tied)
	}
	plain := Formula{Classes: s.Capital.Standards[3].Formula.Classes}.Rule(factors, s.Book.Classes, nil)
	if plain.NonProportional != capital.ByTreaty || plain.Validate([]string{"home", "motor", "7"}, 0) != nil {
		t.Errorf("a formula of classes alone: %+v", plain)
	}
}

// TestRegister rates by each of the three ways, with the factors' tables.
func TestRegister(t *testing.T) {
	s, factors := load(t, good+".yaml"), factorsThatShip(t)
	r := s.Security.Register(factors, 99)
	want := []security.Reinsurer{
		{Name: "Harbour Re", Default: factors.Steps[2], Step: 2, LossGiven: 0.5, RatedBy: "credit quality step 2"},
		{Name: "Dune Re", Default: 0.0005, Step: -1, LossGiven: 0.6, Tied: true, RatedBy: "set in the study"},
		{Name: "Gannet Re", Default: factors.UnratedProbability(1.5), Step: -1, LossGiven: 0.5, RatedBy: "solvency ratio of 150 %"},
	}
	if !reflect.DeepEqual(r.Reinsurers, want) || r.Correlation != 0.3 || r.Seed != 7 || r.Validate() != nil {
		t.Errorf("%+v", r)
	}
	s.Security.Seed = nil
	if seed := s.Security.Register(factors, 99).Seed; seed != 99 {
		t.Errorf("without a seed of its own it takes %d, not that of the book", seed)
	}
}

// TestPanels: treaties and towers have their own panel, or that of the study; an empty list is nobody.
func TestPanels(t *testing.T) {
	s := load(t, good+".yaml")
	study := []treaty.Line{{Reinsurer: "Harbour Re", Share: 0.6, Collateral: 5e6}, {Reinsurer: "Dune Re", Share: 0.4}}
	own := []treaty.Line{{Reinsurer: "Gannet Re", Share: 1, Collateral: 2e6}}
	space, err := s.Space()
	if err != nil {
		t.Fatal(err)
	}
	for _, p := range []treaty.Programme{s.Terms(s.Programmes[0]), space.Start} {
		for i, want := range [][]treaty.Line{study, own, nil, study, study} {
			if got := p.Treaties[i]; !slices.Equal(got.Panel, want) {
				t.Errorf("%s: panel %v, want %v", got.Name, got.Panel, want)
			}
		}
	}
	for i, want := range [][]treaty.Line{study, {{Reinsurer: "Dune Re", Share: 0.5}}} {
		if got := space.Towers[i].Template.Panel; !slices.Equal(got, want) {
			t.Errorf("tower %d: panel %v, want %v", i, got, want)
		}
	}
	s.Security.Panel = nil
	if p := s.Terms(s.Programmes[0]); p.Treaties[0].Panel != nil || !slices.Equal(p.Treaties[1].Panel, own) {
		t.Errorf("without a panel of the study: %v and %v", p.Treaties[0].Panel, p.Treaties[1].Panel)
	}
}

func TestRest(t *testing.T) {
	rest, err := load(t, good+".yaml").Capital.Rest.Rule()
	if err != nil || rest.Capital != 300e6 || rest.Correlation != -0.25 || rest.Quantile != nil || rest.Validate() != nil {
		t.Errorf("a capital figure: %+v, %v", rest, err)
	}
	company := load(t, goods[1]+".yaml")
	rest, err = company.Capital.Rest.Rule()
	if err != nil || rest.Law != "lognormal, mean 20m, standard deviation 60m" || rest.RankCorrelation != -0.3 || rest.Seed != 5 || rest.Validate() != nil {
		t.Fatalf("a law: %+v, %v", rest, err)
	}
	// The median of a lognormal of mean m and coefficient of variation v is m/√(1+v²).
	if got, want := rest.Quantile(0.5), 20e6/math.Sqrt(10); math.Abs(got/want-1) > 1e-12 { // rounding
		t.Errorf("median %v, want %v", got, want)
	}
	g, err := company.Capital.Owners.Distortion()
	if err != nil || !strings.Contains(strings.ToLower(g.String()), "wang") {
		t.Errorf("owners: %v, %v", g, err)
	}
}
