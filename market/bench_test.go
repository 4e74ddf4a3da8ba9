package market

import (
	"math"
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

func BenchmarkFitFree(b *testing.B) {
	for _, n := range []int{15, 50} {
		quotes := syntheticQuotes(n, Wang{0.4})
		b.Run(map[int]string{15: "quotes=15", 50: "quotes=50"}[n], func(b *testing.B) {
			for b.Loop() {
				if _, err := FitFree(quotes, 0, FreeOptions{}); err != nil {
					b.Fatal(err)
				}
			}
		})
	}
}

func BenchmarkFitMixture(b *testing.B) {
	quotes := syntheticQuotes(200, Wang{0.4})
	for b.Loop() {
		if _, err := fitMixture(quotes, 0, Wang{0.3}, 1, false); err != nil {
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
