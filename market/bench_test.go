package market

import (
	"fmt"
	"math"
	"math/rand/v2"
	"testing"
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
