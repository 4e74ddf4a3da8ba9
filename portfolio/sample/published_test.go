package sample

import (
	"math"
	"strings"
	"testing"

	"cedewright/portfolio/portfoliotest"

	"gonum.org/v1/gonum/stat/distuv"
)

// quantileGrid gives the quantiles of a law at the middles of n equal strata: the law without chance, but for what lies beyond the last stratum.
func quantileGrid(n int, quantile func(u float64) float64) []float64 {
	values := make([]float64, n)
	for i := range values {
		values[i] = quantile((float64(i) + 0.5) / float64(n))
	}
	return values
}

// TestPublishedErrorsOnAFineGrid measures laws and their sampling errors on a million of their quantiles; an error goes with one over the root of
// the number of values, so that of 10,000 values is ten times that of the grid (testdata/published, table sampling error).
func TestPublishedErrorsOnAFineGrid(t *testing.T) {
	const n = 1_000_000
	for _, law := range []struct {
		name     string
		quantile func(u float64) float64
		// The grid has one value for the last stratum, 1 in 1,000,000, and so misses part of what the law has there. Of the tail's mean that is
		// about 1e-6/0.005 of its depth for an exponential tail, more for heavier ones. Of the tail's variance it is most for the index 3: the last
		// stratum holds 3·(1e-6)^(1/3) of ∫ u^(-2/3) du, its middle sees 1.59 of the 3, which is 8 % of the variance beyond 99.5 %, 4 % of the error.
		meanTolerance, errorTolerance float64
	}{
		{"normal 0 1", distuv.UnitNormal.Quantile, 2e-5, 5e-4},
		{"exponential 1000", func(u float64) float64 { return -1000 * math.Log1p(-u) }, 2e-5, 5e-4},
		{"lognormal 0 1", distuv.LogNormal{Mu: 0, Sigma: 1}.Quantile, 2e-4, 6e-3},
		{"lomax 3 2000", func(u float64) float64 { return 2000 * math.Expm1(-math.Log1p(-u)/3) }, 1e-3, 5e-2},
	} {
		s, checked := sampleOf(t, quantileGrid(n, law.quantile)...), 0
		for _, p := range portfoliotest.PublishedValues(t, ".", "sampling error") {
			if p.Case != law.name {
				continue
			}
			checked++
			quantity, isError := strings.CutSuffix(p.Quantity, " error")
			name, text, _ := strings.Cut(quantity, " ")
			l, tail, got := level(t, text), name == "TVaR", 0.0
			tolerance := 5e-5 * p.Value // of value at risk: half a stratum of 1 in 1,000,000, at the density of the tail
			switch {
			case tail && isError:
				got, tolerance = s.TVaRError(l)*math.Sqrt(n/10_000), law.errorTolerance*p.Value
			case isError:
				// The density is that of a window of 70 to 100 ranks to either side, of 5,000 and 10,000 in the tail: a ratio of 1/70 or less, which
				// enters by its square.
				got, tolerance = s.VaRError(l)*math.Sqrt(n/10_000), 2e-4*p.Value
			case tail:
				got, tolerance = s.TVaR(l), law.meanTolerance*p.Value
			default:
				got = s.VaR(l)
			}
			closeTo(t, law.name+" "+p.Quantity, got, p.Value, tolerance)
		}
		if checked != 8 {
			t.Errorf("%s: %d published values", law.name, checked)
		}
	}
}

// TestPublishedComonotoneAllocation: three normal lines that always move together do not diversify: each is given its own tail value at risk, and
// the sum is the published one of the lines standing alone (testdata/published, table comonotone allocation).
func TestPublishedComonotoneAllocation(t *testing.T) {
	const n = 200_000
	want := portfoliotest.Find(t, portfoliotest.PublishedValues(t, "../..", "comonotone allocation"), "normal", "TVaR 99%").Value
	var lines [][]float64
	for _, line := range []distuv.Normal{{Mu: 100, Sigma: 20}, {Mu: 200, Sigma: 50}, {Mu: 50, Sigma: 30}} {
		lines = append(lines, quantileGrid(n, line.Quantile))
	}
	l := level(t, "99%")
	parts := allocate(lines, tail(l.Float()))
	for k, line := range lines {
		closeTo(t, "part of a line", parts[k], sampleOf(t, line...).TVaR(l), 1e-9*parts[k]) // rounding of a weighted sum
	}
	closeTo(t, "sum of the parts", parts[3], want, 1e-5*want) // the last of 2,000 strata of the tail has one value, its middle
}
