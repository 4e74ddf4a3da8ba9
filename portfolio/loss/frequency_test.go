package loss

import (
	"math"
	"math/rand/v2"
	"testing"
)

// TestPoissonYearsWithoutEvents: at a rate of 10 one year in 22,026 has no event, and the law around it keeps its mean and variance.
func TestPoissonYearsWithoutEvents(t *testing.T) {
	const n, rate = 2_000_000, 10.0
	r := rand.New(rand.NewPCG(3, 3))
	zeros, sum, squares := 0.0, 0.0, 0.0
	for range n {
		k := float64((Poisson{Rate: rate}).Draw(r))
		if k == 0 {
			zeros++
		}
		sum += k
		squares += k * k
	}
	want := n * math.Exp(-rate)
	if math.Abs(zeros-want) > 4*math.Sqrt(want) { // four standard errors of a count
		t.Errorf("%v years without an event, want %v", zeros, want)
	}
	mean := sum / n
	if math.Abs(mean-rate) > 4*math.Sqrt(rate/n) { // four standard errors
		t.Errorf("mean %v", mean)
	}
	// The variance of a Poisson sample's variance is about (2λ² + λ)/n.
	if variance := squares/n - mean*mean; math.Abs(variance-rate) > 4*math.Sqrt((2*rate*rate+rate)/n) {
		t.Errorf("variance %v", variance)
	}
}
