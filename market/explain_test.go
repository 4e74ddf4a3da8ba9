package market

import (
	"fmt"
	"math"
	"testing"

	"cedewright/portfolio/treaty"

	"pgregory.net/rapid"
)

// TestExplainAddsUp: the slices' expected recoveries and prices add up to the whole, each costs at least what it expects, and higher slices cost a
// greater multiple.
func TestExplainAddsUp(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		n := rapid.IntRange(1, 60).Draw(t, "years")
		count := rapid.IntRange(0, n).Draw(t, "count")
		var recoveries []float64
		at := rapid.Float64Range(1, 1e9).Draw(t, "largest")
		for range count {
			recoveries = append(recoveries, at)
			at *= rapid.Float64Range(0.3, 1).Draw(t, "next")
		}
		tariff, err := NewTariff(Curve{Name: "c", Distortion: Wang{0.4}, Brokerage: 0.1}, n)
		if err != nil {
			t.Fatal(err)
		}
		terms := treaty.Treaty{Kind: treaty.EventExcess, Limit: 2e9, Share: 1, Reinstatements: []float64{1}}
		p, err := tariff.BasePremium(terms, recoveries)
		if err != nil {
			t.Fatal(err)
		}
		e := Explain(tariff, terms, p.Base, recoveries, n)
		expected, price := 0.0, 0.0
		for i, s := range e.Slices {
			expected += s.Expected
			price += s.Price
			if s.Price < s.Expected*(1-1e-9) || s.To <= s.From {
				t.Fatalf("slice %+v", s)
			}
			if i > 0 && (s.From != e.Slices[i-1].To || s.Price/s.Expected < e.Slices[i-1].Price/e.Slices[i-1].Expected*(1-1e-9)) {
				t.Fatalf("slices %+v", e.Slices)
			}
		}
		if math.Abs(expected-e.Expected) > 1e-9*(e.Expected+1) || math.Abs(price-e.Distorted) > 1e-9*(e.Distorted+1) {
			t.Fatalf("slices add up to %v and %v, whole %v and %v", expected, price, e.Expected, e.Distorted)
		}
		if len(e.Slices) > mostSlices {
			t.Fatalf("%d slices", len(e.Slices))
		}
		// What the cedant pays, less brokerage, is what the curve asks, less what the distortion makes of reinstatement premiums.
		if count > 0 && math.Abs(e.Base*0.9-(e.Distorted-e.Base*p.DistortedReinstated)) > 1e-9*e.Base {
			t.Fatalf("%+v", e)
		}
	})
}

func ExampleExplain() {
	tariff, _ := NewTariff(Curve{Name: "wind", Distortion: Wang{0.4}}, 1000)
	layer := treaty.Treaty{Kind: treaty.EventExcess, Limit: 60, Share: 1}
	e := Explain(tariff, layer, 0.6, []float64{60, 60, 45, 20, 8}, 1000)
	for _, s := range e.Slices[:2] {
		fmt.Printf("%v to %v: hit %.1f %%, expects %.3f, costs %.3f\n", s.From, s.To, 100*s.Hit, s.Expected, s.Price)
	}
	// Output:
	// 0 to 10: hit 0.5 %, expects 0.048, costs 0.143
	// 10 to 20: hit 0.4 %, expects 0.040, costs 0.122
}
