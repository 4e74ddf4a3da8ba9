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
	folder := t.TempDir()
	for name, text := range map[string]string{"study.yaml": fmt.Sprintf(base, section), "quotes.csv": quotes} {
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
