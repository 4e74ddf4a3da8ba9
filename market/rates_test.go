package market

import (
	"math"
	"math/rand/v2"
	"slices"
	"testing"

	"cedewright/portfolio/treaty"
)

// mixedQuotes are market-wide layers and own ones, free, with paid reinstatements, and a quota share, on a book of 400 years.
func mixedQuotes() []Quote {
	quotes := syntheticQuotes(4, Wang{0.4})
	r := rand.New(rand.NewPCG(5, 6))
	var losses []float64
	for range 90 {
		losses = append(losses, 300*r.Float64()*r.Float64())
	}
	slices.Sort(losses)
	slices.Reverse(losses)
	for i, terms := range []treaty.Treaty{
		{Kind: treaty.EventExcess, Limit: 100, Share: 1},
		{Kind: treaty.EventExcess, Retention: 20, Limit: 60, Share: 1, Reinstatements: []float64{1}},
		{Kind: treaty.EventExcess, Limit: 40, Share: 1, Reinstatements: []float64{6, 3}}, // so dear that its price has kinks
		{Kind: treaty.QuotaShare, Limit: 60, Cession: 0.2},
	} {
		q := Quote{Curve: "c", Weight: 1 + float64(i), RateOnLine: 0.3 + 0.1*float64(i), Terms: &terms, Years: 400}
		for _, x := range losses {
			if terms.Kind == treaty.QuotaShare {
				q.Recoveries = append(q.Recoveries, x)
			} else if x > terms.Retention {
				q.Recoveries = append(q.Recoveries, terms.AnnualRecovery(x-terms.Retention))
			}
		}
		quotes = append(quotes, q)
	}
	return quotes
}

// TestRateTable: what the table says between its nodes is what the member of the family asks, from a tariff on all years.
func TestRateTable(t *testing.T) {
	quotes, r := mixedQuotes(), rand.New(rand.NewPCG(1, 2))
	for _, family := range FamilyNames() {
		table, err := newRateTable(family, quotes, 0.1)
		if err != nil {
			t.Fatal(err)
		}
		for range 60 {
			z := r.Float64()
			d, err := NewFamily(family, table.bounds.at(z))
			if err != nil {
				t.Fatal(err)
			}
			for j, rate := range table.rates(z) {
				if want := plainRate(t, quotes[j], d, 0.1); math.Abs(rate/want-1) > 1e-9 {
					t.Errorf("%s at %v, quote %d: %.12g, want %.12g", family, z, j, rate, want)
				}
			}
		}
	}
	if _, err := newRateTable("wangg", quotes, 0); err == nil {
		t.Error("an unknown family has a table")
	}
}

// plainRate prices a quote with nothing shared and nothing left out.
func plainRate(t *testing.T, q Quote, d Distortion, brokerage float64) float64 {
	t.Helper()
	if !q.Own() {
		return distortedShape(d, q.Attachment, q.Exhaustion, q.ExpectedLoss) / (1 - brokerage)
	}
	tariff, err := NewTariff(Curve{Name: "c", Distortion: d, Brokerage: brokerage}, q.Years)
	if err != nil {
		t.Fatal(err)
	}
	if q.Terms.Kind == treaty.QuotaShare {
		c, err := tariff.Commission(*q.Terms, q.Recoveries, q.Terms.Limit)
		if err != nil {
			t.Fatal(err)
		}
		return 1 - c.Rate
	}
	p, err := tariff.BasePremium(*q.Terms, q.Recoveries)
	if err != nil {
		t.Fatal(err)
	}
	return p.Base / q.Terms.Limit
}

// TestFitByTable: leaving a quote out by its weight, or drawing it twice, is fitting to the list without it, or with it twice.
func TestFitByTable(t *testing.T) {
	quotes := mixedQuotes()
	for _, family := range FamilyNames() {
		table, err := newRateTable(family, quotes, 0.1)
		if err != nil {
			t.Fatal(err)
		}
		weights := weightsOf(quotes)
		weights[1], weights[2] = 0, 2*weights[2]
		_, got, err := table.fit(weights)
		if err != nil {
			t.Fatal(err)
		}
		other := append(slices.Clone(quotes[:1]), quotes[2:]...)
		other = append(other, quotes[2])
		p, err := fitParameter(family, other, 0.1)
		if err != nil {
			t.Fatal(err)
		}
		d, err := NewFamily(family, p)
		if err != nil {
			t.Fatal(err)
		}
		if want := objective(d, other, 0.1); math.Abs(got/want-1) > 1e-8 { // flat at the minimum
			t.Errorf("%s: objective %.12g, want %.12g", family, got, want)
		}
	}
}

// TestFitScale: money in another unit changes no fit.
func TestFitScale(t *testing.T) {
	quotes := mixedQuotes()
	large := slices.Clone(quotes)
	for i, q := range large {
		if !q.Own() {
			continue
		}
		terms := *q.Terms
		terms.Retention, terms.Limit = terms.Retention*1024, terms.Limit*1024 // a power of two: exact
		large[i].Terms, large[i].Recoveries = &terms, slices.Clone(q.Recoveries)
		for k := range large[i].Recoveries {
			large[i].Recoveries[k] *= 1024
		}
	}
	for _, fit := range []func(q []Quote) (*Fit, error){
		func(q []Quote) (*Fit, error) { return FitFamily(FamilyWang, q, 0.1) },
		func(q []Quote) (*Fit, error) { return FitFree(q, 0.1, FreeOptions{}) },
	} {
		small, err := fit(quotes)
		if err != nil {
			t.Fatal(err)
		}
		scaled, err := fit(large)
		if err != nil {
			t.Fatal(err)
		}
		for _, s := range []float64{0.001, 0.02, 0.3} {
			if a, b := small.Distortion.At(s), scaled.Distortion.At(s); math.Abs(a/b-1) > 1e-12 {
				t.Errorf("%v: g(%v) is %v or, in other money, %v", small.Distortion, s, a, b)
			}
		}
	}
}
