package study

import (
	"context"
	"fmt"
	"math"
	"os"
	"path/filepath"
	"reflect"
	"slices"
	"strings"
	"testing"

	"cedewright/cmd/internal/settings"
	"cedewright/market"
)

// base is a small study; %s takes the market section.
const base = `study: Test
currency: EUR
book:
  years: 3000
  seed: 5
  classes:
    - {name: home, premium: 60m, expenses: 25%%}
    - {name: motor, premium: 40m, expenses: 25%%}
  models:
    - name: storm
      peril: storm
      frequency: {family: poisson, mean: 0.8}
      severity: {family: pareto, threshold: 5m, alpha: 1.3, ceiling: 400m}
      split: [{class: home, share: 100%%}]
  attritional:
    family: gamma
    losses: [{class: home, mean: 25m, cv: 10%%}, {class: motor, mean: 26m, cv: 8%%}]
market:
%s
programmes:
  - name: expiring
    treaties:
      - {name: layer, kind: event-excess, retention: 20m, limit: 40m, reinstatements: [100%%], curve: wind}
capital:
  cost: 9%%
  own_funds: 150m
  standards:
    - {name: one-year, preset: eu-one-year}
search:
  vary:
    - {treaty: layer, retention: {from: 10m, to: 40m, step: 10m}, limit: {from: 20m, to: 120m, step: 20m}, optional: true}
`

const quotes = `curve,attachment_probability,exhaustion_probability,expected_loss,rate_on_line
wind,0.20,0.08,0.131,0.25
wind,0.10,0.04,0.065,0.14
wind,0.05,0.02,0.033,0.082
wind,0.02,0.008,0.013,0.038
wind,0.01,0.004,0.0065,0.022
`

// open writes a study with that market section beside its quotes and opens it.
func open(t *testing.T, section string, o Options) (*Study, error) {
	t.Helper()
	return openText(t, fmt.Sprintf(base, section), "", o)
}

// openText writes a study beside its quotes and, if there are any, factors of its own, and opens it.
func openText(t *testing.T, study, factors string, o Options) (*Study, error) {
	t.Helper()
	folder := t.TempDir()
	for name, text := range map[string]string{"study.yaml": study, "quotes.csv": quotes, "factors.yaml": factors} {
		if err := os.WriteFile(filepath.Join(folder, name), []byte(text), 0o600); err != nil {
			t.Fatal(err)
		}
	}
	return Open(context.Background(), filepath.Join(folder, "study.yaml"), o)
}

func curveNamed(t *testing.T, s *Study, name string) CurveFit {
	t.Helper()
	for _, c := range s.curves {
		if c.Curve.Name == name {
			return c
		}
	}
	t.Fatalf("no curve %q", name)
	return CurveFit{}
}

const wind = "  curves:\n    - {name: wind, quotes: quotes.csv, fit: wang, brokerage: 10%}\n"

// TestOwnQuotes: a curve fitted to the cedant's own layers prices them again; a quota share speaks by its commission; a rate without brokerage is the
// same quote as one with it.
func TestOwnQuotes(t *testing.T) {
	s, err := open(t, wind+`  own_quotes:
    - {name: a, kind: event-excess, retention: 20m, limit: 40m, reinstatements: [100%], curve: own, rate_on_line: 10%}
    - {name: b, kind: event-excess, retention: 60m, limit: 60m, curve: own, rate_on_line: 3.6%, brokerage: excluded}
    - {name: c, kind: event-excess, retention: 60m, limit: 60m, curve: own, rate_on_line: 4%, weight: 0.5}
    - {name: d, kind: quota-share, classes: [motor], cession: 20%, commission: 24%, curve: own}
`, Options{})
	if err == nil || !strings.Contains(err.Error(), `no curve is named "own"`) {
		t.Fatalf("a quote for a curve that is not there: %v", err)
	}
	s, err = open(t, strings.Replace(wind, "brokerage: 10%}\n", "brokerage: 10%}\n    - {name: own, fit: wang, brokerage: 10%}\n", 1)+`  own_quotes:
    - {name: a, kind: event-excess, retention: 20m, limit: 40m, reinstatements: [100%], curve: own, rate_on_line: 10%}
    - {name: b, kind: event-excess, retention: 60m, limit: 60m, curve: own, rate_on_line: 3.6%, brokerage: excluded}
    - {name: c, kind: event-excess, retention: 60m, limit: 60m, curve: own, rate_on_line: 4%, weight: 0.5}
    - {name: d, kind: quota-share, classes: [motor], cession: 20%, commission: 24%, curve: own}
`, Options{Workers: 2})
	if err != nil {
		t.Fatal(err)
	}
	fit := curveNamed(t, s, "own").Chosen
	if len(fit.Quotes) != 4 {
		t.Fatalf("%d quotes", len(fit.Quotes))
	}
	if b, c := fit.Quotes[1], fit.Quotes[2]; math.Abs(b.RateOnLine-0.04) > 1e-12 || b.Fitted != c.Fitted || math.Abs(b.Residual-c.Residual) > 1e-12 {
		t.Errorf("3.6 %% before brokerage is %v, priced %v and %v", b.RateOnLine, b.Fitted, c.Fitted)
	}
	if d := fit.Quotes[3]; math.Abs(d.RateOnLine-0.76) > 1e-12 || d.Fitted < 0.65 || d.Fitted > 0.9 {
		t.Errorf("a commission of 24 %% is a rate of %v, priced %v", d.RateOnLine, d.Fitted)
	}
	if a := fit.Quotes[0]; a.Attachment <= a.Exhaustion || a.Fitted <= 0 {
		t.Errorf("%+v", a)
	}
}

// TestLeaningCurves: without quotes of its own a curve is the other, loaded; with some it follows them where they are.
func TestLeaningCurves(t *testing.T) {
	s, err := open(t, "  curves:\n    - {name: flood, like: wind, loading: 20%}\n    - {name: wind, quotes: quotes.csv, fit: free, brokerage: 10%, error: absolute}\n", Options{})
	if err != nil {
		t.Fatal(err)
	}
	flood, wind := curveNamed(t, s, "flood").Curve.Distortion, curveNamed(t, s, "wind").Curve.Distortion
	for _, p := range []float64{0.002, 0.02, 0.2} {
		if got, want := flood.At(p), min(1.2*wind.At(p), 1); math.Abs(got-want) > 1e-12 {
			t.Errorf("at %v: %v, want %v", p, got, want)
		}
	}
	if s.curves[0].Curve.Name != "flood" {
		t.Error("curves are out of the order of the study")
	}
}

// TestScenario: a scenario raises prices and says so; an unknown one is refused with the nearest.
func TestScenario(t *testing.T) {
	section := wind + "  scenarios:\n    - {name: hard, rate_change: 30%}\n"
	plain, err := open(t, section, Options{})
	if err != nil {
		t.Fatal(err)
	}
	hard, err := open(t, section, Options{Scenario: "hard"})
	if err != nil {
		t.Fatal(err)
	}
	a, err := plain.Appraise(context.Background())
	if err != nil {
		t.Fatal(err)
	}
	b, err := hard.Appraise(context.Background())
	if err != nil {
		t.Fatal(err)
	}
	// A premium with a paid reinstatement rises a little less than its curve.
	if ratio := b.Programmes[1].CededPremium.Value / a.Programmes[1].CededPremium.Value; ratio < 1.2 || ratio > 1.3 {
		t.Errorf("premiums rise by %v", ratio-1)
	}
	if len(b.Notes) != 1 || !strings.Contains(b.Notes[0], "hard: prices +30 %") {
		t.Errorf("notes %q", b.Notes)
	}
	if a.Programmes[1].CostPriceError <= 0 || b.Programmes[1].CostPriceError != 0 {
		t.Errorf("errors from quotes: %v, under a scenario %v", a.Programmes[1].CostPriceError, b.Programmes[1].CostPriceError)
	}
	scarce, err := open(t, wind+"  scenarios:\n    - {name: scarce, capacity_to: 1 in 20}\n", Options{Scenario: "scarce"})
	if err != nil {
		t.Fatal(err)
	}
	c, err := scarce.Appraise(context.Background())
	if err != nil || !slices.Equal(c.Programmes[1].NoTaker, []string{"layer"}) || !slices.ContainsFunc(c.Warnings, func(w string) bool { return strings.Contains(w, "no capacity for layer") }) {
		t.Errorf("a layer that is exhausted once in 31 years finds a taker up to 1 in 20: %v, %q (%v)", c.Programmes[1].NoTaker, c.Warnings, err)
	}
	found, err := scarce.Search(context.Background(), SearchOptions{})
	if err != nil || len(found.Result.Best.NoTaker) > 0 || !found.Result.Feasible {
		t.Errorf("the search buys what has no taker: %+v (%v)", found.Result.Best.NoTaker, err)
	}
	if _, err := open(t, section, Options{Scenario: "hrad"}); err == nil || !strings.Contains(err.Error(), `no scenario is named "hrad"; allowed: ["hard"]; did you mean "hard"?`) {
		t.Errorf("%v", err)
	}
}

// TestFitSaysMore: the answer of fit has a recommendation, the consistency of the quotes, and bands that hold the curve.
func TestFitSaysMore(t *testing.T) {
	s, err := open(t, wind, Options{Workers: 2})
	if err != nil {
		t.Fatal(err)
	}
	f, err := s.Fit(context.Background())
	if err != nil {
		t.Fatal(err)
	}
	c := f.Curves[0]
	if c.Recommended == nil || c.Reason == "" || c.Consistency == nil || len(c.Band) != len(c.BandAt) || len(c.Resampled) != len(c.BandAt) {
		t.Fatalf("%+v", c)
	}
	for i, p := range c.BandAt {
		if g := c.Curve.Distortion.At(p); g < c.Resampled[i].Low*0.9 || g > c.Resampled[i].High*1.1 || c.Band[i].Low > c.Band[i].High+1e-9 {
			t.Errorf("at %v: %v, resampled %+v, allowed %+v", p, g, c.Resampled[i], c.Band[i])
		}
	}
	if len(c.Candidates) != len(market.FamilyNames())+1 {
		t.Errorf("%d candidates", len(c.Candidates))
	}
}

// TestSameFigures: any number of workers gives the same bits; another seed of the book other ones.
func TestSameFigures(t *testing.T) {
	appraise := func(o Options) Appraised {
		s, err := open(t, wind, o)
		if err != nil {
			t.Fatal(err)
		}
		a, err := s.Appraise(context.Background())
		if err != nil {
			t.Fatal(err)
		}
		a.Inputs = nil // the folders differ
		return a
	}
	one := appraise(Options{Workers: 1})
	if three := appraise(Options{Workers: 3}); !reflect.DeepEqual(one, three) {
		t.Error("three workers give other figures")
	}
	seed := uint64(6)
	if other := appraise(Options{Seed: &seed}); other.Programmes[0].TotalCost == one.Programmes[0].TotalCost {
		t.Error("another seed gives the same figures")
	}
	if len(one.Prices) != 2 || len(one.Prices[1]) != 1 || one.Prices[1][0].Treaty != "layer" {
		t.Errorf("prices %+v", one.Prices)
	}
}

// TestSearch: a small space is enumerated; the best is no dearer than any programme of the study.
func TestSearch(t *testing.T) {
	s, err := open(t, wind, Options{Workers: 2})
	if err != nil {
		t.Fatal(err)
	}
	found, err := s.Search(context.Background(), SearchOptions{})
	if err != nil {
		t.Fatal(err)
	}
	for _, p := range found.Programmes {
		if p.TotalCost.Value < found.Result.Best.TotalCost.Value {
			t.Errorf("%s costs %v, the best %v", p.Programme.Name, p.TotalCost.Value, found.Result.Best.TotalCost.Value)
		}
	}
	if found.Start.Programme.Name != "expiring" || len(found.Scales) != 2 || len(found.Curve.Net) != 2 || found.Curve.Gross[0] <= 0 {
		t.Errorf("start %q, scales %v", found.Start.Programme.Name, found.Scales)
	}
	look, err := s.Look(context.Background())
	if err != nil || len(look.Classes) != 2 || len(look.Perils) != 2 || math.Abs(look.Total.Premium-100e6) > 1 {
		t.Errorf("%+v, %v", look, err)
	}
}

// company is a study with standards of every kind, whose classes stand in another order than the book's.
func company() string {
	text := fmt.Sprintf(base, wind)
	head, rest, _ := strings.Cut(text, "capital:\n")
	_, search, _ := strings.Cut(rest, "search:\n")
	return head + `capital:
  owners: {curve: wind}
  own_funds: 400m
  drive: [one-year, standard formula]
  standards:
    - {name: one-year, preset: eu-one-year}
    - name: stress table
      criteria:
        - {measure: value-at-risk, level: 99.8%, ratio: 120%}
        - {measure: tail-value-at-risk, level: 99%, basis: deviation}
    - name: standard formula
      formula:
        factors: factors.yaml
        classes:
          - {class: motor, segment: 1, reserves: 30m}
          - {class: home, segment: 4, reserves: 20m}
        scenarios:
          - {name: north, kind: windstorm, peril: storm, losses: [{class: home, loss: 90m}]}
          - {name: south, kind: windstorm, peril: storm, losses: [{class: home, loss: 60m}]}
          - {name: pile-up, kind: motor, losses: [{class: motor, loss: 20m}]}
        correlations: [{between: [north, south], correlation: 25%}]
        recoverables: [{reinsurer: Dune Re, amount: 10m}]
    - name: shipped
      formula: {factors: eu-2015-35, classes: [{class: home, segment: 4}, {class: motor, segment: 1}]}
    - name: covariance
      covariance: {charges: {r1: 5m}, perils: [storm], level: 1 in 500, contingent_credit: 4.8%}
  rest: {family: lognormal, mean: 2m, sd: 10m, rank_correlation: 20%}
security:
  correlation: 30%
  reinsurers:
    - {name: Harbour Re, step: 4}
    - {name: Dune Re, default_probability: 0.1%, tied_assets: true}
    - {name: Gannet Re, solvency_ratio: 100%}
  panel: [{reinsurer: Harbour Re, share: 60%, collateral: 1m}, {reinsurer: Dune Re, share: 40%}]
search:
` + search
}

// ownFactors are the shipped factors with another probability for step 4.
func ownFactors(t *testing.T) string {
	t.Helper()
	shipped, ok := settings.ShippedFactors(settings.DefaultFactors)
	text := strings.Replace(string(shipped), "0.24%, 1.2%, 4.2%, 4.2%]", "0.24%, 2%, 4.2%, 4.2%]", 1)
	if !ok || text == string(shipped) {
		t.Fatal("the shipped factors have other steps")
	}
	return text
}

// TestCompany opens a study of every kind of standard with a panel and a rest of the company, and appraises it.
func TestCompany(t *testing.T) {
	factors := ownFactors(t)
	s, err := openText(t, company(), factors, Options{Workers: 2})
	if err != nil {
		t.Fatal(err)
	}
	c := s.appraiser.Case()
	if c.Owners == nil || c.Owners != s.curves[0].Curve.Distortion || c.CostOfCapital != 0 {
		t.Errorf("owners %v, not the curve's", c.Owners)
	}
	if want := []int{0, 2}; !slices.Equal(c.Drive, want) {
		t.Errorf("standards %v drive, want %v", c.Drive, want)
	}
	if c.Rest == nil || c.Rest.Quantile == nil || c.Rest.Seed != 5 {
		t.Errorf("rest %+v; its seed is that of the book", c.Rest)
	}
	// The first formula of the study rates reinsurers: its own factors, not those that ship.
	if r := c.Security; len(r.Reinsurers) != 3 || r.Reinsurers[0].Default != 0.02 || r.Reinsurers[2].Default != 0.005 || r.Seed != 5 {
		t.Errorf("register %+v", c.Security)
	}
	f := c.Standards[2].Formula
	if f.Factors.Segments[f.Classes[0].Segment].Number != 4 || f.Factors.Segments[f.Classes[1].Segment].Number != 1 || f.Classes[0].Reserves != 20e6 {
		t.Errorf("classes %+v are out of the order of the book", f.Classes)
	}
	if !slices.Equal(f.Default, []float64{0.02, 0.001, 0.005}) || !slices.Equal(f.Tied, []bool{false, true, false}) || !slices.Equal(f.Recoverables, []float64{0, 10e6, 0}) {
		t.Errorf("probabilities %v, tied %v, recoverables %v", f.Default, f.Tied, f.Recoverables)
	}
	if i := slices.IndexFunc(s.head.Inputs, func(in Input) bool { return filepath.Base(in.Path) == "factors.yaml" }); i < 0 || s.head.Inputs[i].SHA256 != hash([]byte(factors)) {
		t.Errorf("the factor file is not among the inputs with its hash: %+v", s.head.Inputs)
	}
	a, err := s.Appraise(context.Background())
	if err != nil {
		t.Fatal(err)
	}
	gross, net := a.Programmes[0], a.Programmes[1]
	for i, k := range a.Standards {
		if g, n := gross.Capital[i].Net.Value, net.Capital[i].Net.Value; !(g > 0 && n > 0 && n < g) {
			t.Errorf("%s asks %v without cover, %v with", k.Name, g, n)
		}
	}
	if net.ExpectedUnpaid.Value <= 0 || gross.ExpectedUnpaid.Value != 0 {
		t.Errorf("unpaid %v with cover, %v without", net.ExpectedUnpaid.Value, gross.ExpectedUnpaid.Value)
	}
	if a.Owners == "" || !slices.Equal(a.Drive, []string{"one-year", "standard formula"}) {
		t.Errorf("owners %q, drive %q", a.Owners, a.Drive)
	}
	for _, want := range []string{
		"Standard stress table: only 6 simulated years lie beyond its level of 99.8%",
		"Standard covariance: only 6 simulated years lie beyond its level of 99.8%",
		`3 simulated years see reinsurer "Dune Re" fail`,
	} {
		if n := len(slices.DeleteFunc(slices.Clone(a.Warnings), func(w string) bool { return !strings.Contains(w, want) })); n != 1 {
			t.Errorf("%d warnings with %q in %q", n, want, a.Warnings)
		}
	}
	found, err := s.Search(context.Background(), SearchOptions{})
	if err != nil {
		t.Fatal(err)
	}
	for _, one := range found.Result.Best.Programme.Treaties {
		if len(one.Panel) != 2 {
			t.Errorf("the search drops the panel of %s: %+v", one.Name, one.Panel)
		}
	}
}

// TestCompanyFaults: what only the files that a study names can show is told with its place.
func TestCompanyFaults(t *testing.T) {
	for name, test := range map[string]struct{ from, to, factors, want string }{
		"segment":     {"segment: 1, res", "segment: 13, res", "", "study.yaml:40:37: capital.standards[2].formula.classes[0].segment: no segment 13; allowed: 1 motor liability, 2 other motor, "},
		"kind":        {"kind: motor", "kind: motro", "", `study.yaml:45:35: capital.standards[2].formula.scenarios[2].kind: no kind of scenario here is named "motro"; allowed: ["windstorm" "earthquake" "flood" "hail" "subsidence" "fire" "motor" "marine" "aviation" "liability" "credit"]; did you mean "motor"?`},
		"correlation": {"correlation: 25%}]", "correlation: 25%}, {between: [south, north], correlation: 25%}]", "", `study.yaml:46:79: capital.standards[2].formula.correlations[1].between: "north" and "south" twice; allowed: each pair once`},
		"factors":     {"", "", "name: mine\n", "factors.yaml:1:1: segments: the key is missing"},
		"file":        {"factors: factors.yaml", "factors: factors.yml", "", `capital.standards[2].formula.factors: no file "`},
		"folder":      {"factors: factors.yaml", "factors: .", "", `study.yaml:38:18: capital.standards[2].formula.factors: "`},
	} {
		factors := ownFactors(t)
		if test.factors != "" {
			factors = test.factors
		}
		text := company()
		if test.from != "" {
			if text = strings.Replace(text, test.from, test.to, 1); text == company() {
				t.Fatalf("%s: the study has no %q", name, test.from)
			}
		}
		if _, err := openText(t, text, factors, Options{}); err == nil || !strings.Contains(err.Error(), test.want) {
			t.Errorf("%s: got\n%v\nwant\n%s", name, err, test.want)
		}
	}
}
