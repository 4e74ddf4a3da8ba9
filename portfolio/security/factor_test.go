package security

import (
	"fmt"
	"math"
	"math/rand/v2"
	"slices"
	"strconv"
	"strings"
	"testing"

	"cedewright/portfolio/portfoliotest"
	"cedewright/portfolio/sample"

	"gonum.org/v1/gonum/stat/distuv"
	"pgregory.net/rapid"
)

func closeTo(t testing.TB, what string, got, want, tolerance float64) {
	t.Helper()
	if !(math.Abs(got-want) <= tolerance) {
		t.Errorf("%s is %.15g, want %.15g within %g", what, got, want, tolerance)
	}
}

// rising gives n years, each worse than the one before.
func rising(n int) []float64 {
	badness := make([]float64, n)
	for y := range badness {
		badness[y] = float64(y)
	}
	return badness
}

// conditional gives the probabilities of one reinsurer by year.
func conditional(p, loading float64, badness []float64) []float64 {
	r := &Register{Reinsurers: []Reinsurer{{Name: "a", Default: p}}, Correlation: loading}
	return r.Fail(badness).Probability(0)
}

// TestScores: ties share their mean rank (testdata/published, table normal score); the median year scores 0, and mirrored years mirror.
func TestScores(t *testing.T) {
	rows := portfoliotest.PublishedValues(t, ".", "normal score")
	got := rank([]float64{5, 1, 5, 0}).scores()
	for y, p := range []string{"0.75", "0.375", "0.75", "0.125"} {
		closeTo(t, "score at "+p, got[y], portfoliotest.Find(t, rows, p, "quantile").Value, 1e-10) // printed with ten digits
	}
	for _, n := range []int{1, 2, 7, 1000} {
		scores := rank(rising(n)).scores()
		if n%2 == 1 && scores[n/2] != 0 {
			t.Errorf("the median of %d years scores %v", n, scores[n/2])
		}
		for y := range scores {
			closeTo(t, "mirrored score", scores[y], -scores[n-1-y], 1e-13) // two ways of rounding a tail
		}
	}
	for _, s := range rank(make([]float64, 5)).scores() {
		if s != 0 {
			t.Errorf("one of five equal years scores %v", s)
		}
	}
}

// TestPublishedConditionalDefault: risk weights of the Basel framework from the probability of default in the year that is bad with
// probability 0.1 %, with the square root of its asset correlation as the loading.
func TestPublishedConditionalDefault(t *testing.T) {
	const n = 200_500 // an odd multiple of 500, so that one year stands exactly at 0.999
	badness := rising(n)
	for _, row := range portfoliotest.PublishedValues(t, ".", "risk weight") {
		p, err := strconv.ParseFloat(strings.TrimSuffix(strings.TrimPrefix(row.Case, "corporate "), "%"), 64)
		if err != nil {
			t.Fatal(err)
		}
		p /= 100
		weight := math.Expm1(-50*p) / math.Expm1(-50)
		correlation := 0.12*weight + 0.24*(1-weight)
		slope := 0.11852 - 0.05478*math.Log(p)
		maturity := 1 / (1 - 1.5*slope*slope)
		bad := conditional(p, math.Sqrt(correlation), badness)[n*999/1000]
		// Half a unit of the last digit printed, and what the threshold of that many years differs by.
		closeTo(t, row.Case, 12.5*100*0.45*(bad-p)*maturity, row.Value, 0.005+1e-4*row.Value)
	}
}

// TestConditionalProbability: without correlation every year has the same; with it the closed form of Vasicek comes out where years are many.
func TestConditionalProbability(t *testing.T) {
	for _, p := range []float64{1e-9, 0.0002, 0.01, 0.5, 0.97} {
		for _, got := range conditional(p, 0, []float64{3, 1, 4, 1, 5, 9, 2, 6}) {
			closeTo(t, "probability without correlation", got, p, 1e-13*p) // rounding of the quantile, times its slope
		}
	}
	const n = 100_001
	for _, a := range []float64{0.2, 0.5, 0.8} {
		for _, p := range []float64{0.001, 0.02, 0.3} {
			got := conditional(p, a, rising(n))
			for _, u := range []float64{0.001, 0.25, 0.5, 0.9, 0.999} {
				y := int(u * n)
				z := distuv.UnitNormal.Quantile((float64(y) + 0.5) / n)
				want := distuv.UnitNormal.CDF((a*z + distuv.UnitNormal.Quantile(p)) / math.Sqrt(1-a*a))
				// The scores lack the law's tail beyond 1 in 200,000: a loading of 0.8 finds part of the defaults of 1 in 1,000 there.
				closeTo(t, fmt.Sprintf("loading %v, probability %v, year at %v", a, p, u), got[y], want, 1e-3*want)
			}
		}
	}
}

// TestLoadingNearOne: the failing years become the worst N·p.
func TestLoadingNearOne(t *testing.T) {
	const n, p = 5000, 0.02
	before := 0.0
	for _, a := range []float64{0, 0.5, 0.9, 0.99, 0.9999, 1 - 1e-12} {
		list := conditional(p, a, rising(n))
		worst := sample.Sum(list[n-n*p:]) / (n * p)
		if worst <= before {
			t.Errorf("loading %v: %v of the defaults fall on the worst years, %v with a lower loading", a, worst, before)
		}
		before = worst
		closeTo(t, "mean", sample.Sum(list)/n, p, 1e-9*p) // 1e-16/√(1−a²) with a slope of at most N
	}
	closeTo(t, "part of the defaults in the worst years", before, 1, 1e-4) // the own part of the latent variable has deviation 1.4e-6, a step of scores 2e-4
}

// checkYears checks a property for each of these numbers of years, with few or many ties: lengths that rapid draws come out short.
func checkYears(t *testing.T, property func(t *rapid.T, badness []float64)) {
	for _, n := range []int{1, 2, 7, 40, 300} {
		for _, kinds := range []int{1, 3, 20, 1000} {
			t.Run(fmt.Sprintf("%d years, %d values", n, kinds), func(t *testing.T) {
				rapid.Check(t, func(t *rapid.T) { property(t, badnessOf(t, n, kinds)) })
			})
		}
	}
}

func badnessOf(t *rapid.T, n, kinds int) []float64 {
	r := rand.New(rand.NewPCG(rapid.Uint64().Draw(t, "badness"), 0))
	badness := make([]float64, n)
	for y := range badness {
		k := r.IntN(kinds)
		badness[y] = float64(k*k) - 50
	}
	return badness
}

// TestProbabilityProperties: the mean is the probability of default whatever ties; worse years are no better; equal years are equal; only the
// order counts.
func TestProbabilityProperties(t *testing.T) {
	checkYears(t, func(t *rapid.T, badness []float64) {
		a := rapid.SampledFrom([]float64{0, 0.1, 0.5, 0.9, 0.999}).Draw(t, "loading")
		p := rapid.OneOf(rapid.Float64Range(1e-6, 0.01), rapid.Float64Range(0.01, 0.99)).Draw(t, "probability")
		list := conditional(p, a, badness)
		// Rounding of the threshold, 1e-16 times up to 5, over √(1−a²) ≥ 0.04, times the relative slope of the probability, up to 100.
		if mean := sample.Sum(list) / float64(len(list)); math.Abs(mean/p-1) > 1e-11 {
			t.Fatalf("mean %v, want %v", mean, p)
		}
		for i := range list {
			if !(list[i] >= 0 && list[i] <= 1) {
				t.Fatalf("probability %v", list[i])
			}
			for j := range list {
				if badness[i] > badness[j] && list[i] < list[j] || badness[i] == badness[j] && list[i] != list[j] {
					t.Fatalf("years of badness %v and %v have probabilities %v and %v", badness[i], badness[j], list[i], list[j])
				}
			}
		}
		other := make([]float64, len(badness))
		for y, x := range badness {
			other[y] = math.Cbrt(x) / 7
		}
		if !slices.Equal(list, conditional(p, a, other)) {
			t.Fatal("another scale of badness gives other probabilities")
		}
	})
}
