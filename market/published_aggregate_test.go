package market

import (
	"math"
	"strconv"
	"strings"
	"testing"

	"cedewright/portfolio/portfoliotest"
	"cedewright/portfolio/sample"
)

const poissonFour = "poisson 4 severity 1 2 3 with 1/4 1/2 1/4"

// compoundPoissonFour gives the distribution of that sum from powers of the severity's law, weighted by the number of events, and holds its first
// probabilities against those of Panjer's recursion (testdata/published, table panjer).
func compoundPoissonFour(t *testing.T) []float64 {
	t.Helper()
	f, power, weight := make([]float64, 64), make([]float64, 64), math.Exp(-4)
	power[0] = 1
	for events := range 64 {
		for s, p := range power {
			f[s] += weight * p
		}
		weight *= 4 / float64(events+1)
		next := make([]float64, len(power))
		for s := range next {
			for x, p := range []float64{0, .25, .5, .25} {
				if x <= s {
					next[s] += p * power[s-x]
				}
			}
		}
		power = next
	}
	for _, p := range portfoliotest.PublishedValues(t, "..", "panjer") {
		if p.Case != poissonFour {
			continue
		}
		if k, err := strconv.Atoi(p.Quantity[1:]); err != nil || math.Abs(f[k]-p.Value) > 0.6e-10 { // printed with ten decimals
			t.Fatalf("%s: %v, want %v (%v)", p.Quantity, f[k], p.Value, err)
		}
	}
	return f
}

// TestPublishedAggregateDistribution measures and prices the distribution as a sample that holds each value as often as its probability says
// (testdata/published, tables compound sum and distorted sum).
func TestPublishedAggregateDistribution(t *testing.T) {
	const n = 1_000_000
	var ascending, layer []float64
	cumulative := 0.0
	for s, p := range compoundPoissonFour(t) {
		// Cumulative probabilities are rounded, so that none is off by more than half a millionth.
		cumulative += p
		for len(ascending) < int(math.Round(cumulative*n)) {
			ascending = append(ascending, float64(s))
			layer = append(layer, min(max(float64(s)-5, 0), 10))
		}
	}
	if len(ascending) != n {
		t.Fatalf("%d values", len(ascending))
	}
	whole, err := sample.New(ascending)
	if err != nil {
		t.Fatal(err)
	}
	ceded, err := sample.New(layer)
	if err != nil {
		t.Fatal(err)
	}
	stopLoss := func(retention float64) float64 {
		sum := 0.0
		for _, x := range ascending {
			sum += max(x-retention, 0)
		}
		return sum / n
	}
	for _, p := range portfoliotest.PublishedValues(t, "..", "compound sum") {
		if p.Case != poissonFour {
			continue
		}
		// Half a millionth at each of some 20 steps that matter, of either sign.
		var got float64
		tolerance, at := 5e-6, append(portfoliotest.Numbers(p.Quantity), 0)[0]
		name, text, _ := strings.Cut(p.Quantity, " ")
		switch name {
		case "mean":
			got = whole.Mean()
		case "variance":
			got, tolerance = whole.StandardDeviation()*whole.StandardDeviation(), 1e-4 // steps count by their distance from the mean as well
		case "F":
			got, tolerance = 1-whole.Survival(at), 0.6e-6
		case "stop":
			got = stopLoss(at)
		default:
			l, err := sample.ParseLevel(text)
			if err != nil {
				t.Fatal(err)
			}
			got, tolerance = whole.VaR(l), 0
			if name == "TVaR" {
				got, tolerance = whole.TVaR(l), 2e-6/l.Tail() // about ten steps lie in the tail
			}
		}
		if !(math.Abs(got-p.Value) <= tolerance) {
			t.Errorf("%s: %.10g, want %.10g (± %.2g)", p.Quantity, got, p.Value, tolerance)
		}
	}
	descending := make([]float64, n)
	for i, x := range ascending {
		descending[n-1-i] = x
	}
	mixture := Mixture{Knots: []Knot{{0.5, 0.8}, {0.05, 0.2}}}
	for _, p := range portfoliotest.PublishedValues(t, "..", "distorted sum") {
		priced, values, distortion := whole, descending, Distortion(mixture)
		switch {
		case strings.HasSuffix(p.Quantity, "standard deviation"):
			if got := ceded.StandardDeviation(); math.Abs(got-p.Value) > 1e-5 { // as the variance, over twice the deviation
				t.Errorf("%s: %.10g, want %.10g", p.Quantity, got, p.Value)
			}
			continue
		case strings.Contains(p.Quantity, "mixture"):
			priced, values = ceded, make([]float64, n)
			for i := range values {
				values[i] = ceded.OrderStatistic(n - i)
			}
		default:
			distortion = distortionOf(t, p.Quantity)
		}
		tariff, err := NewTariff(Curve{Name: "c", Distortion: distortion}, n)
		if err != nil {
			t.Fatal(err)
		}
		// The slopes of the curves reach 10 where a step is 1 in 100,000: 1e-5 of the price.
		if got := tariff.Price(values); math.Abs(got/p.Value-1) > 1e-5 {
			t.Errorf("%s: priced %.10g, want %.10g", p.Quantity, got, p.Value)
		}
		if got := priced.Distorted(distortion.At); math.Abs(got/p.Value-1) > 1e-5 {
			t.Errorf("%s: measured %.10g, want %.10g", p.Quantity, got, p.Value)
		}
	}
}
