package market

import (
	"encoding/json"
	"fmt"
	"math"
	"os"
	"slices"
	"strings"
	"testing"

	"cedewright/portfolio/portfoliotest"
	"cedewright/portfolio/treaty"
)

// TestOracleReinstatements: 24 premiums of layers with free and paid reinstatements, annual deductibles, steep charges and charges pro rata as to
// time, computed with scipy by bracketing (testdata/oracles/C1_reinstatement.json). The layers and years are applied here by plain sums;
// the premium with a time factor goes straight to the solver, as no treaty kind has it.
func TestOracleReinstatements(t *testing.T) {
	var o struct {
		E1, E2, T2 [][]float64
		Cases      []struct {
			Name              string
			Events            string
			Times             string
			Deductible, Limit float64
			Reinstatements    int
			Rates             []float64
			AAD               float64 `json:"annual_aggregate_deductible"`
			G                 string
			Expected          struct {
				Premium    float64 `json:"premium_net_basis"`
				ClosedForm bool    `json:"closed_form_valid"`
			}
		}
	}
	data, err := os.ReadFile("../testdata/oracles/C1_reinstatement.json")
	if err != nil {
		t.Fatal(err)
	}
	if err := json.Unmarshal(data, &o); err != nil {
		t.Fatal(err)
	}
	if len(o.Cases) != 24 {
		t.Fatalf("%d cases", len(o.Cases))
	}
	for _, c := range o.Cases {
		events := map[string][][]float64{"E1": o.E1, "E2": o.E2}[c.Events]
		d := map[string]Distortion{"wang06": Wang{0.6}, "ph07": ProportionalHazard{1 / 0.7}}[c.G]
		layer := treaty.Treaty{Kind: treaty.EventExcess, Retention: c.Deductible, Limit: c.Limit, Share: 1, AnnualDeductible: c.AAD, Reinstatements: append([]float64{}, c.Rates...)}
		tariff, err := NewTariff(Curve{Name: "c", Distortion: d}, len(events))
		if err != nil {
			t.Fatal(err)
		}
		var recoveries, timed []float64
		for y, year := range events {
			sum, due := 0.0, 0.0
			for e, x := range year {
				before := layer.AnnualRecovery(sum)
				sum += layer.LayerLoss(x)
				if c.Times == "T2" {
					due += (1 - o.T2[y][e]) * (layer.Reinstated(layer.AnnualRecovery(sum)) - layer.Reinstated(before))
				}
			}
			if r := layer.AnnualRecovery(sum); r > 0 {
				recoveries, timed = append(recoveries, r), append(timed, due)
			}
		}
		got := 0.0
		if c.Times == "T2" {
			order := slices.Clone(recoveries)
			slices.Sort(order)
			slices.Reverse(order)
			due := slices.Clone(timed)
			slices.Sort(due)
			slices.Reverse(due)
			got, err = tariff.solvePremium(recoveries, timed, 1, tariff.Price(order)/(1+tariff.Price(due)))
		} else {
			slices.Sort(recoveries)
			slices.Reverse(recoveries)
			var p Premium
			p, err = tariff.BasePremium(layer, recoveries)
			got = p.Base
		}
		if err != nil || math.Abs(got/c.Expected.Premium-1) > 1e-9 { // printed with twelve digits
			t.Errorf("%s, %s: %.12g, want %.12g (%v)", c.Name, c.G, got, c.Expected.Premium, err)
		}
	}
}

func TestBasePremium(t *testing.T) {
	tariff, err := NewTariff(Curve{Name: "c", Distortion: Wang{0.5}, Brokerage: 0.1, MinimumRateOnLine: 0.05}, 10)
	if err != nil {
		t.Fatal(err)
	}
	layer := treaty.Treaty{Kind: treaty.EventExcess, Limit: 100, Share: 1}
	recoveries := []float64{200, 150, 40}
	plain, err := tariff.BasePremium(layer, recoveries)
	if err != nil || math.Abs(plain.Base-tariff.Price(recoveries)/0.9) > 1e-12 || plain.Basis != "curve c" {
		t.Errorf("free: %+v, %v", plain, err)
	}
	layer.Reinstatements = []float64{1}
	paid, err := tariff.BasePremium(layer, recoveries)
	if want := tariff.Price(recoveries) / (0.9 + tariff.Price([]float64{1, 1, 0.4})); err != nil || math.Abs(paid.Base-want) > 1e-12 {
		t.Errorf("paid: %+v, want %v (%v)", paid, want, err)
	}
	low, err := tariff.BasePremium(layer, []float64{2})
	if err != nil || low.Base != 5 || low.Basis != "minimum rate on line of curve c" || low.Modelled() {
		t.Errorf("minimum: %+v, %v", low, err)
	}
	layer.Premium = treaty.Some(1)
	if quoted, err := tariff.BasePremium(layer, recoveries); err != nil || quoted.Base != 1 || quoted.Basis != "quoted" {
		t.Errorf("quoted: %+v, %v", quoted, err)
	}
	if _, err := tariff.BasePremium(treaty.Treaty{Limit: 1}, make([]float64, 11)); err == nil {
		t.Error("more recoveries than years were priced")
	}
	q := treaty.Treaty{Kind: treaty.QuotaShare, Cession: 0.2}
	if c, err := tariff.Commission(q, recoveries, 1000); err != nil || math.Abs(c.Rate-(0.9-tariff.Price(recoveries)/1000)) > 1e-12 {
		t.Errorf("commission %+v, %v", c, err)
	}
	q.Commission = treaty.Some(0.3)
	if c, err := tariff.Commission(q, nil, 0); err != nil || c.Rate != 0.3 {
		t.Errorf("commission in the study: %+v, %v", c, err)
	}
	if _, err := tariff.Commission(treaty.Treaty{}, nil, 0); err == nil {
		t.Error("a commission on no premium was priced")
	}
}

// TestSteepReinstatements: where the charges are so steep that R − P·F does not rise with R, the premium is the root of its equation, found
// here by bisection on the plain sum.
func TestSteepReinstatements(t *testing.T) {
	steep := 0
	for _, charge := range []float64{0.5, 1, 3, 8, 20} {
		for _, n := range []int{4, 12, 40} {
			tariff, err := NewTariff(Curve{Name: "c", Distortion: Wang{0.8}, Brokerage: 0.05}, n)
			if err != nil {
				t.Fatal(err)
			}
			layer := treaty.Treaty{Kind: treaty.EventExcess, Limit: 10, Share: 1, Reinstatements: []float64{charge, charge / 2}}
			var recoveries []float64
			for i := range n * 3 / 4 {
				recoveries = append(recoveries, 30-float64(i*37%29))
			}
			slices.Sort(recoveries)
			slices.Reverse(recoveries)
			value := func(p float64) float64 { // ρ_g(R − P·F) − P·(1−b)
				net := make([]float64, n)
				for i, r := range recoveries {
					net[i] = r - p*layer.Reinstated(r)
				}
				slices.Sort(net)
				sum, before := 0.0, 0.0
				for k := range net {
					at := tariff.curve.Distortion.At(float64(k+1) / float64(n))
					sum += net[n-1-k] * (at - before)
					before = at
				}
				return sum - p*0.95
			}
			low, high := 0.0, 1000.0
			for range 200 {
				if m := (low + high) / 2; value(m) > 0 {
					low = m
				} else {
					high = m
				}
			}
			got, err := tariff.BasePremium(layer, recoveries)
			if err != nil || math.Abs(got.Base-low) > 1e-9*low {
				t.Errorf("charge %v, %d years: %v, %v, want %v", charge, n, got.Base, err, low)
			}
			if got.Base*charge > layer.Limit {
				steep++
			}
		}
	}
	if steep == 0 {
		t.Error("no case was steep")
	}
}

// TestTotalLossesOnly: total losses of a layer of 1, Poisson in number, no loading (testdata/published, table reinstatement premium; formula of Sundt
// 1991), on a sample that holds every count as often as its probability says.
func TestTotalLossesOnly(t *testing.T) {
	const n = 1_000_000
	tariff, err := NewTariff(Curve{Name: "c", Distortion: ProportionalHazard{1}}, n)
	if err != nil {
		t.Fatal(err)
	}
	for _, v := range portfoliotest.PublishedValues(t, "..", "reinstatement premium") {
		rate := portfoliotest.Numbers(v.Case)[0]
		terms := portfoliotest.Numbers(v.Quantity) // count, charge in per cent
		layer := treaty.Treaty{Kind: treaty.EventExcess, Limit: 1, Share: 1, Reinstatements: make([]float64, int(terms[0]))}
		for i := range layer.Reinstatements {
			layer.Reinstatements[i] = terms[1] / 100
		}
		var recoveries []float64
		p := math.Exp(-rate)
		for count := 1; count < 12; count++ {
			p *= rate / float64(count)
			for range int(math.Round(p * n)) {
				recoveries = append(recoveries, layer.AnnualRecovery(float64(count)))
			}
		}
		slices.Sort(recoveries)
		slices.Reverse(recoveries)
		got, err := tariff.BasePremium(layer, recoveries)
		if err != nil || math.Abs(got.Base-v.Value) > 5e-6 { // counts are rounded to a millionth each
			t.Errorf("%s, %s: %.8f, want %.8f (%v)", v.Case, v.Quantity, got.Base, v.Value, err)
		}
	}
}

func TestCurveValidate(t *testing.T) {
	for message, c := range map[string]Curve{
		"brokerage: 1; allowed":                {Name: "c", Distortion: Wang{0.1}, Brokerage: 1},
		"minimum_rate_on_line: -0.1; allowed":  {Name: "c", Distortion: Wang{0.1}, MinimumRateOnLine: -0.1},
		"no distortion":                        {Name: "c"},
		"no name":                              {Distortion: Wang{0.1}},
		"square: g lies below the probability": {Name: "c", Distortion: squareDistortion{}},
	} {
		if err := c.Validate(); err == nil || !strings.Contains(err.Error(), message) && message != "square: g lies below the probability" {
			t.Errorf("%v, want %q", err, message)
		}
	}
	if _, err := NewTariff(Curve{Name: "c", Distortion: Wang{0.1}}, 0); err == nil {
		t.Error("a tariff for no year was made")
	}
}

func ExampleTariff_BasePremium() {
	tariff, _ := NewTariff(Curve{Name: "wind", Distortion: Wang{0.4}, Brokerage: 0.1}, 1000)
	layer := treaty.Treaty{Kind: treaty.EventExcess, Limit: 60e6, Share: 1, Reinstatements: []float64{1}}
	p, _ := tariff.BasePremium(layer, []float64{60e6, 60e6, 45e6, 20e6, 8e6})
	fmt.Printf("%.0f, rate on line %.2f %%\n", p.Base, 100*p.Base/layer.Limit)
	// Output: 658575, rate on line 1.10 %
}
