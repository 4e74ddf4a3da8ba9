package optimize

import (
	"fmt"
	"testing"

	"cedewright/market"
	"cedewright/portfolio/capital"
	"cedewright/portfolio/loss"
	"cedewright/portfolio/treaty"
)

// stormCase is a book of three classes under windstorm, flood and fire, 100,000 years of about five events, and a programme of wind layers whose retention
// moves with i, so that the layers differ from one appraisal to the next while their subject stays.
func stormCase(b testing.TB, years int) (Case, func(i int) treaty.Programme) {
	b.Helper()
	names := []string{"household", "commercial", "marine"}
	var models []loss.Model
	for _, m := range []struct {
		peril      string
		mean       float64
		low, alpha float64
	}{{"windstorm", 1.4, 4, 1.25}, {"flood", 0.5, 6, 1.6}, {"fire", 3, 2, 1.35}} {
		frequency, err := loss.NewPoisson(m.mean)
		if err != nil {
			b.Fatal(err)
		}
		severity, err := loss.NewPareto(m.low, m.alpha, 1500)
		if err != nil {
			b.Fatal(err)
		}
		models = append(models, loss.Model{Name: m.peril, Peril: m.peril, Frequency: frequency, Severity: severity, PerRisk: m.peril == "fire",
			Split: []loss.Share{{Class: "household", Fraction: 0.6}, {Class: "commercial", Fraction: 0.34}, {Class: "marine", Fraction: 0.06}}})
	}
	table, err := loss.NewBuilder(years, names).Simulate(1, models, nil, 2)
	if err != nil {
		b.Fatal(err)
	}
	c := Case{
		Book:          loss.Book{Table: table},
		Curves:        []market.Curve{{Name: "c", Distortion: market.Wang{Lambda: 0.4}, Brokerage: 0.1}},
		Standards:     []capital.Standard{capital.Single("one-year", capital.ValueAtRisk, mustLevel("99.5%"), capital.Result, "")},
		CostOfCapital: 0.09,
	}
	for i, name := range names {
		c.Book.Classes = append(c.Book.Classes, loss.Class{Name: name, Premium: []float64{50, 30, 6}[i], Expenses: 0.3})
	}
	programme := func(i int) treaty.Programme {
		p := treaty.Programme{Name: "p"}
		at := 20 + float64(i%50) + float64(i/50)/1024
		for k, limit := range []float64{30, 50, 100, 200} {
			p.Treaties = append(p.Treaties, treaty.Treaty{Name: fmt.Sprint("wind ", k), Kind: treaty.EventExcess, Classes: names, Perils: []string{"windstorm"},
				Retention: at, Limit: limit, Share: 1, Reinstatements: []float64{1}, Curve: "c", Panel: []treaty.Line{{Reinsurer: "north", Share: 0.5}, {Reinsurer: "south", Share: 0.5}}})
			at += limit
		}
		p.Treaties = append(p.Treaties, treaty.Treaty{Name: "fire", Kind: treaty.RiskExcess, Perils: []string{"fire"}, Retention: 20, Limit: 100, Share: 1, Curve: "c"})
		return p
	}
	return c, programme
}

// BenchmarkStandards holds an appraisal under one simulated standard against one under six of every kind: the presets, a stress table, a formula and a
// covariance of two perils. "new" asks for layers that were never priced, "again" for the same fifty programmes over and over.
func BenchmarkStandards(b *testing.B) {
	one, programme := stormCase(b, 100_000)
	one.Security = smallRegister()
	all := one
	for _, name := range []string{"swiss-one-year", "bermuda-one-year"} {
		preset, ok := capital.Preset(name)
		if !ok {
			b.Fatal(name)
		}
		all.Standards = append(all.Standards, preset)
	}
	all.Standards = append(all.Standards, capital.Standard{Name: "stress", Criteria: []capital.Criterion{
		{Measure: capital.ValueAtRisk, Level: mustLevel("99.6%"), Basis: capital.Result, Ratio: 1.2}, {Measure: capital.TailValueAtRisk, Level: mustLevel("98%"), Basis: capital.Deviation, Ratio: 1},
	}})
	simulated := all
	all.Standards = append(all.Standards, capital.Standard{Name: "formula", Formula: stormFormula()}, capital.Standard{Name: "covariance", Covariance: &capital.Covariance{
		Charges: [5]float64{1, 2, 3, 20, 15}, Perils: []string{"windstorm", "flood"}, Level: mustLevel("99%"), ContingentCredit: 0.048, Multiple: 1,
	}})
	for _, c := range []struct {
		name string
		c    Case
	}{{"one", one}, {"simulated", simulated}, {"all", all}} {
		a, err := NewAppraiser(c.c)
		if err != nil {
			b.Fatal(err)
		}
		b.Run(c.name+"/new", func(b *testing.B) {
			for i := 0; b.Loop(); i++ {
				if _, err := a.Appraise(programme(i), false); err != nil {
					b.Fatal(err)
				}
			}
		})
		b.Run(c.name+"/again", func(b *testing.B) {
			b.ReportAllocs()
			for i := 0; b.Loop(); i++ {
				if _, err := a.Appraise(programme(i%50), false); err != nil {
					b.Fatal(err)
				}
			}
		})
	}
	a, err := NewAppraiser(all)
	if err != nil {
		b.Fatal(err)
	}
	w := a.newWorkspace()
	p, _, err := a.positionOf(programme(7), w)
	if err != nil {
		b.Fatal(err)
	}
	for i, r := range a.rules[len(a.rules)-2:] {
		b.Run([]string{"formula alone", "covariance alone"}[i], func(b *testing.B) {
			b.ReportAllocs()
			for b.Loop() {
				r.require(p, w)
			}
		})
	}
}
