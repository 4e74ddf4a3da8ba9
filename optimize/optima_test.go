package optimize

import (
	"context"
	"math"
	"testing"

	"cedewright/market"
	"cedewright/portfolio/capital"
	"cedewright/portfolio/loss"
	"cedewright/portfolio/sample"
	"cedewright/portfolio/treaty"
)

// exponentialCase is one class whose annual loss is exponential with mean 1000, as n equally likely quantiles, priced by a curve and held
// against a standard on basis deviation, with no premium and no expenses.
func exponentialCase(t testing.TB, n int, d market.Distortion, m capital.Measure, level string, cost float64) *Appraiser {
	t.Helper()
	b := loss.NewBuilder(n, []string{"all"})
	for y := range n {
		u := (float64(y) + 0.5) / float64(n)
		if err := b.Add(loss.Row{Year: y + 1, Class: "all", Loss: -1000 * math.Log1p(-u)}); err != nil {
			t.Fatal(err)
		}
	}
	table, err := b.Build()
	if err != nil {
		t.Fatal(err)
	}
	l, err := sample.ParseLevel(level)
	if err != nil {
		t.Fatal(err)
	}
	a, err := NewAppraiser(Case{
		Book:          loss.Book{Classes: []loss.Class{{Name: "all"}}, Table: table},
		Curves:        []market.Curve{{Name: "c", Distortion: d}},
		Standards:     []capital.Standard{{Name: "s", Measure: m, Level: l, Basis: capital.Deviation}},
		CostOfCapital: cost,
	})
	if err != nil {
		t.Fatal(err)
	}
	return a
}

// TestSearchFindsMarginalOptima: the optimum of ceded margin plus 10 % of the capital held beyond the mean, over all contracts on an annual
// loss that is exponential with mean 1000, is one layer in closed form (marginal rule: cede at x where g(s) − s < r·(h(s) − s); the
// values below were computed from it and confirmed by a second integration). The search must find attachment, top and objective.
func TestSearchFindsMarginalOptima(t *testing.T) {
	const n = 20000
	for _, want := range []struct {
		name                       string
		d                          market.Distortion
		measure                    capital.Measure
		level                      string
		attachment, top, objective float64
	}{
		// A rate load of 50 % is g(s) = 1.5·s, which within the probabilities that matter here is the tail value at risk at 1/3.
		{"1.5·EL, VaR", market.TailValueAtRisk{P: 1.0 / 3}, capital.ValueAtRisk, "99.5%", 1791.7595, 5298.3174, 176.1759},
		{"1.5·EL, TVaR", market.TailValueAtRisk{P: 1.0 / 3}, capital.TailValueAtRisk, "99%", 1791.7595, math.Inf(1), 179.1759},
		{"Wang .3, VaR", market.Wang{Lambda: 0.3}, capital.ValueAtRisk, "99.5%", 1827.7176, 5298.3174, 210.8996},
		{"Wang .3, TVaR", market.Wang{Lambda: 0.3}, capital.TailValueAtRisk, "99%", 1827.7176, math.Inf(1), 218.9118},
		{"PH 1.25, VaR", market.ProportionalHazard{Rho: 1.25}, capital.ValueAtRisk, "99.5%", 1509.3856, 5298.3174, 212.1401},
		{"PH 1.25, TVaR", market.ProportionalHazard{Rho: 1.25}, capital.TailValueAtRisk, "99%", 1509.3856, 11943.814, 225.6561},
	} {
		t.Run(want.name, func(t *testing.T) {
			a := exponentialCase(t, n, want.d, want.measure, want.level, 0.1)
			const step = 20.0
			space := Space{
				Start: treaty.Programme{Treaties: []treaty.Treaty{{Name: "stop", Kind: treaty.AggregateExcess, Retention: 1000, Limit: 1000, Share: 1, Curve: "c"}}},
				Vary: []Vary{{
					Treaty: "stop", Optional: true,
					Retention: &Range{0, 8000, step}, Limit: &Range{step, 14000, step},
				}},
			}
			result, err := Search(context.Background(), a, space, SearchSettings{Seed: 1, Workers: 2, Patience: 20})
			if err != nil {
				t.Fatal(err)
			}
			best := result.Best.Programme.Treaties[0]
			if !result.Polished {
				t.Error("the best was not polished to the end")
			}
			// The step, and the sample's grid, whose neighbours lie 1000/(n·s) apart, limit what can be found; the objective is flat at
			// its optimum, so it is met far closer than the cuts.
			if math.Abs(best.Retention-want.attachment) > 2*step {
				t.Errorf("attachment %v, want %v", best.Retention, want.attachment)
			}
			top := best.Retention + best.Limit
			largest := -1000 * math.Log(0.5/n) // of the sample: an unlimited cover must reach nearly so far
			switch {
			case math.IsInf(want.top, 1) && top < largest-1000:
				t.Errorf("top %v, want unlimited (the largest loss is %v)", top, largest)
			case !math.IsInf(want.top, 1) && want.top < largest && math.Abs(top-want.top) > 2*step:
				t.Errorf("top %v, want %v", top, want.top)
			}
			// 0.2 %: the midpoint sample of 20,000 years misses about 1e-4 of the tail beyond its last quantile, times the loads.
			if math.Abs(result.Best.TotalCost.Value/want.objective-1) > 2e-3 {
				t.Errorf("objective %v, want %v", result.Best.TotalCost.Value, want.objective)
			}
		})
	}
}
