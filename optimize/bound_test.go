package optimize

import (
	"encoding/json"
	"math"
	"os"
	"strings"
	"testing"

	"cedewright/market"
	"cedewright/portfolio/capital"
	"cedewright/portfolio/loss"
	"cedewright/portfolio/treaty"
)

// TestOracleThinLayerBound: the optimum over thin layers for two bases, two measures, with and without brokerage; the five tail values equal linear
// programmes over all contracts (testdata/oracles/A1_thin_layer.json, solved with HiGHS). There brokerage of 10 % comes on top of the premium.
func TestOracleThinLayerBound(t *testing.T) {
	var o struct {
		X        []float64
		G        struct{ P, W []float64 }
		R        float64
		Expected struct {
			Variants map[string]struct {
				Cost float64 `json:"optimal_cost"`
			}
		}
	}
	data, err := os.ReadFile("../testdata/oracles/A1_thin_layer.json")
	if err != nil {
		t.Fatal(err)
	}
	if err := json.Unmarshal(data, &o); err != nil {
		t.Fatal(err)
	}
	var g market.Mixture
	for i, p := range o.G.P {
		if p == 1 {
			g.Supremum += o.G.W[i]
		} else {
			g.Knots = append(g.Knots, market.Knot{Tail: 1 - p, Weight: o.G.W[i]})
		}
	}
	b := loss.NewBuilder(len(o.X), []string{"all"})
	for y, x := range o.X {
		if err := b.Add(loss.Row{Year: y + 1, Class: "all", Loss: x}); err != nil {
			t.Fatal(err)
		}
	}
	table, err := b.Build()
	if err != nil {
		t.Fatal(err)
	}
	checked := 0
	for name, want := range o.Expected.Variants {
		s := capital.Single("s", capital.TailValueAtRisk, mustLevel("99%"), capital.Deviation, "")
		if strings.HasPrefix(name, "var") {
			s.Criteria[0].Measure, s.Criteria[0].Level = capital.ValueAtRisk, mustLevel("99.5%")
		}
		switch {
		case strings.Contains(name, "K3"):
			continue // a basis that no standard here has
		case strings.Contains(name, "K2"):
			s.Criteria[0].Basis = capital.Result
		}
		curve := market.Curve{Name: "c", Distortion: g}
		if strings.HasSuffix(name, "b10") {
			curve.Brokerage = 1.0 / 11 // 1/(1−b) = 1.1
		}
		a, err := NewAppraiser(Case{Book: loss.Book{Classes: []loss.Class{{Name: "all"}}, Table: table}, Curves: []market.Curve{curve}, Standards: []capital.Standard{s}, CostOfCapital: o.R})
		if err != nil {
			t.Fatal(err)
		}
		got := a.ThinLayerBound(Space{Start: treaty.Programme{Treaties: []treaty.Treaty{{Name: "x", Kind: treaty.AggregateExcess, Limit: 1, Share: 1, Curve: "c"}}}})
		if math.Abs(got.TotalCost/want.Cost-1) > 1e-9 || got.Certified != strings.HasPrefix(name, "tvar") {
			t.Errorf("%s: %.12g (certified %v), want %.12g", name, got.TotalCost, got.Certified, want.Cost)
		}
		checked++
	}
	if checked < 8 {
		t.Errorf("%d variants", checked)
	}
}

// TestNothingBelowTheBound hunts, on random books and programmes with every kind of treaty and inuring, for a programme below its certified bound.
func TestNothingBelowTheBound(t *testing.T) {
	certified := 0
	for seed := range uint64(trials(600)) {
		r := newRand(seed)
		c := randomCase(t, r)
		c.Standards = c.Standards[1:2] // tail value at risk, deviation
		if seed%2 == 1 {
			c.Standards[0].Criteria[0].Basis = capital.Result
		}
		a, err := NewAppraiser(c)
		if err != nil {
			t.Fatal(err)
		}
		for range 6 {
			p := randomProgramme(r, c)
			for i := range p.Treaties { // prices of the curves alone
				p.Treaties[i].Premium, p.Treaties[i].Commission = treaty.Optional{}, treaty.Optional{}
			}
			bound := a.ThinLayerBound(Space{Start: p})
			if !bound.Certified {
				continue
			}
			certified++
			x, err := a.Appraise(p, false)
			if err != nil {
				t.Fatal(err)
			}
			if x.TotalCost.Value < bound.TotalCost-1e-9*100 {
				t.Fatalf("seed %d: a programme costs %v, the bound is %v\n%+v", seed, x.TotalCost.Value, bound.TotalCost, p)
			}
		}
	}
	if certified < trials(2000) {
		t.Errorf("only %d bounds were certified", certified)
	}
}

func TestBoundIsNotCertified(t *testing.T) {
	c := randomCase(t, newRand(5))
	c.Standards = c.Standards[1:2]
	a, err := NewAppraiser(c)
	if err != nil {
		t.Fatal(err)
	}
	layer := treaty.Treaty{Name: "l", Kind: treaty.EventExcess, Limit: 10, Share: 1, Curve: "w"}
	for reason, spoil := range map[string]func(u *treaty.Treaty){
		"the premium of \"l\" is quoted":        func(u *treaty.Treaty) { u.Premium = treaty.Some(1) },
		"the reinstatements of \"l\" cost more": func(u *treaty.Treaty) { u.Reinstatements = []float64{1.5} },
		"no treaty is priced by a curve":        func(u *treaty.Treaty) { u.Curve = "" },
		"the commission of \"l\" may leave": func(u *treaty.Treaty) {
			*u = treaty.Treaty{Name: "l", Kind: treaty.QuotaShare, Cession: 0.1, Curve: "w", Commission: treaty.Some(0.99)}
		},
	} {
		u := layer
		spoil(&u)
		if b := a.ThinLayerBound(Space{Start: treaty.Programme{Treaties: []treaty.Treaty{u}}}); b.Certified || !strings.Contains(b.Reason, reason) {
			t.Errorf("%+v, want %s", b, reason)
		}
	}
	early := treaty.Treaty{Name: "early", Kind: treaty.EventExcess, Limit: 10, Share: 1, Curve: "w"}
	late := treaty.Treaty{Name: "late", Kind: treaty.QuotaShare, Cession: 0.1, Curve: "w", Commission: treaty.Some(-9), After: []string{"early"}}
	spaces := map[string]Space{
		"the reinstatements of \"early\" cost more": {Start: treaty.Programme{Treaties: []treaty.Treaty{early}}, Vary: []Vary{{Treaty: "early", Reinstatements: &ReinstatementRange{Charge: 1.5}}}},
		"the commission of \"late\" may leave":      {Start: treaty.Programme{Treaties: []treaty.Treaty{early, late}}, Vary: []Vary{{Treaty: "early", Optional: true}}},
	}
	for reason, space := range spaces {
		if b := a.ThinLayerBound(space); b.Certified || !strings.Contains(b.Reason, reason) {
			t.Errorf("%+v, want %s", b, reason)
		}
	}
}

// TestNothingOfACompanyBelowItsBound hunts for a programme below its certified bound where several standards drive, criteria are mixed, the company has other
// risks and reinsurers fail.
func TestNothingOfACompanyBelowItsBound(t *testing.T) {
	certified, withRest := 0, 0
	for seed := range uint64(trials(500)) {
		r := newRand(seed)
		c := enlarge(r, randomCase(t, r))
		c.Owners = nil
		c.Standards[4].Criteria[0].Measure, c.Standards[5].Criteria[0].Measure = capital.TailValueAtRisk, capital.TailValueAtRisk
		c.Drive = [][]int{{1}, {3}, {4}, {5}, {1, 4}, {7, 3}, {6, 5}}[r.IntN(7)]
		a, err := NewAppraiser(c)
		if err != nil {
			t.Fatal(err)
		}
		for range 4 {
			p := withPanels(r, randomProgramme(r, c))
			for i := range p.Treaties { // prices of the curves alone
				p.Treaties[i].Premium, p.Treaties[i].Commission = treaty.Optional{}, treaty.Optional{}
			}
			bound := a.ThinLayerBound(Space{Start: p})
			if !bound.Known {
				t.Fatalf("seed %d: no bound under %v", seed, c.Drive)
			}
			if !bound.Certified {
				continue
			}
			certified++
			if c.Rest != nil {
				withRest++
			}
			x, err := a.Appraise(p, false)
			if err != nil {
				t.Fatal(err)
			}
			if x.TotalCost.Value < bound.TotalCost-1e-9*100 {
				t.Fatalf("seed %d: a programme costs %v, the bound is %v\n%+v", seed, x.TotalCost.Value, bound.TotalCost, p)
			}
		}
	}
	if certified < trials(500) || withRest < trials(200) {
		t.Errorf("%d bounds were certified, %d of them with a rest of the company", certified, withRest)
	}
}

// TestNoBoundIsKnown: a formula, a covariance and the owners' own price have none.
func TestNoBoundIsKnown(t *testing.T) {
	r := newRand(3)
	c := enlarge(r, randomCase(t, r))
	p := Space{Start: randomProgramme(r, c)}
	for _, drive := range []int{6, 7} {
		c.Owners, c.Drive = nil, []int{drive}
		a, err := NewAppraiser(c)
		if err != nil {
			t.Fatal(err)
		}
		if b := a.ThinLayerBound(p); b.Known || b.Certified || b.Reason == "" {
			t.Errorf("%s: %+v", c.Standards[drive].Name, b)
		}
	}
	c.Owners, c.Rest, c.Drive = market.Wang{Lambda: 0.2}, nil, []int{1}
	a, err := NewAppraiser(c)
	if err != nil {
		t.Fatal(err)
	}
	if b := a.ThinLayerBound(p); b.Known || b.Certified {
		t.Errorf("owners with a price of risk: %+v", b)
	}
}
