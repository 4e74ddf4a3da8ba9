package market

import (
	"fmt"
	"math"
	"math/rand/v2"
	"testing"

	"cedewright/portfolio/treaty"
)

// syntheticQuotes are market-wide quotes priced by a known curve, without noise.
func syntheticQuotes(n int, d Distortion) []Quote {
	var quotes []Quote
	for i := range n {
		a := 0.3 * math.Pow(0.01, float64(i)/float64(max(n-1, 1)))
		q := Quote{Curve: "c", Name: "q", Weight: 1, Attachment: a, Exhaustion: a * 0.4, ExpectedLoss: a * 0.6 / math.Log(2.5)}
		q.RateOnLine = q.rate(d, 0)
		quotes = append(quotes, q)
	}
	return quotes
}

// noisyQuotes are such quotes with 10 % lognormal noise.
func noisyQuotes(n int, d Distortion, seed uint64) []Quote {
	quotes, r := syntheticQuotes(n, d), rand.New(rand.NewPCG(seed, 3))
	for k := range quotes {
		quotes[k].RateOnLine *= math.Exp(0.1 * r.NormFloat64())
	}
	return quotes
}

// fitMixture fits the free curve with a given pull.
func fitMixture(quotes []Quote, brokerage float64, anchor Distortion, pull float64, absolute bool) (Mixture, error) {
	m, err := newFreeModel(quotes, brokerage, FreeOptions{Absolute: absolute, Toward: anchor})
	if err != nil {
		return Mixture{}, err
	}
	x, err := m.fit(m.weights, anchor, pull, nil)
	if err != nil {
		return Mixture{}, err
	}
	return mixtureOf(x, m.tails), nil
}

// BenchmarkResample is 500 replicates: budget 10 s.
func BenchmarkResample(b *testing.B) {
	for _, n := range []int{15, 200} {
		quotes := noisyQuotes(n, Wang{0.4}, 1)
		f := &Fit{Family: FamilyFree, Pull: 1}
		for _, q := range quotes {
			f.Quotes = append(f.Quotes, FittedQuote{Quote: q})
		}
		b.Run(fmt.Sprintf("quotes=%d", n), func(b *testing.B) {
			for b.Loop() {
				if r, err := Resample(Curve{Name: "c", Distortion: Wang{0.4}, Fit: f}, 500, 1); err != nil || r.Count() != 500 {
					b.Fatal(err)
				}
			}
		})
	}
}

// BenchmarkBasePremium prices a treaty on 100,000 years from its recoveries: budget 2 ms.
func BenchmarkBasePremium(b *testing.B) {
	const years = 100_000
	tariff, err := NewTariff(Curve{Name: "c", Distortion: Wang{0.4}, Brokerage: 0.1}, years)
	if err != nil {
		b.Fatal(err)
	}
	for _, share := range []int{10, 1} { // years with a recovery: one in ten, all
		layer := treaty.Treaty{Kind: treaty.EventExcess, Limit: 100, Share: 1, Reinstatements: []float64{1, 1}}
		recoveries := make([]float64, years/share)
		for i := range recoveries {
			recoveries[i] = 300 * float64(len(recoveries)-i) / float64(len(recoveries))
		}
		b.Run(fmt.Sprintf("recoveries=%d", len(recoveries)), func(b *testing.B) {
			for b.Loop() {
				if p, err := tariff.BasePremium(layer, recoveries); err != nil || !(p.Base > 0) {
					b.Fatal(p, err)
				}
			}
		})
	}
}

func BenchmarkFitFree(b *testing.B) {
	for _, n := range []int{15, 50, 200} {
		quotes := noisyQuotes(n, Wang{0.4}, 1)
		b.Run(fmt.Sprintf("quotes=%d", n), func(b *testing.B) {
			for b.Loop() {
				if _, err := FitFree(quotes, 0, FreeOptions{}); err != nil {
					b.Fatal(err)
				}
			}
		})
	}
}

// BenchmarkFitMixture is one fit of the free curve with the pull given: budget 0.2 s at 200 quotes.
func BenchmarkFitMixture(b *testing.B) {
	m, err := newFreeModel(syntheticQuotes(200, Wang{0.4}), 0, FreeOptions{})
	if err != nil {
		b.Fatal(err)
	}
	for b.Loop() {
		if _, err := m.fit(m.weights, Wang{0.3}, 1, nil); err != nil {
			b.Fatal(err)
		}
	}
}

func BenchmarkFitFamily(b *testing.B) {
	quotes := syntheticQuotes(15, Wang{0.4})
	for b.Loop() {
		if _, err := fitParameter(FamilyWang, quotes, 0); err != nil {
			b.Fatal(err)
		}
	}
}
