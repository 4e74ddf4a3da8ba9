package capital

import (
	"fmt"
	"math"
	"math/rand/v2"
	"slices"
	"strings"
	"testing"

	"cedewright/portfolio/sample"

	"gonum.org/v1/gonum/stat"
	"pgregory.net/rapid"
)

// TestRestAsAFigure: a square root of squares by hand, its slope against differences, and tangents below it.
func TestRestAsAFigure(t *testing.T) {
	r := &Rest{Capital: 80, Correlation: 0.25}
	if got := r.Combine(60); math.Abs(got-math.Sqrt(3600+0.5*60*80+6400)) > 1e-12 {
		t.Errorf("company %v", got)
	}
	rapid.Check(t, func(t *rapid.T) {
		r := &Rest{Capital: rapid.Float64Range(1, 100).Draw(t, "capital"), Correlation: rapid.Float64Range(-0.99, 1).Draw(t, "correlation")}
		at, k := rapid.Float64Range(-50, 200).Draw(t, "at"), rapid.Float64Range(-50, 200).Draw(t, "k")
		if r.Combine(at) < 1e-3 {
			return // at the apex
		}
		if tangent := r.Combine(at) + r.Slope(at)*(k-at); r.Combine(k) < tangent-1e-9*max(1, math.Abs(tangent)) {
			t.Fatalf("%v at %v is below its tangent at %v, %v", r.Combine(k), k, at, tangent)
		}
		const step = 1e-4
		got := (r.Combine(at+step) - r.Combine(at-step)) / (2 * step)
		// The third derivative is of the order of 1/K².
		if math.Abs(got-r.Slope(at)) > 1e-6+step*step/(r.Combine(at)*r.Combine(at)) {
			t.Fatalf("slope %v, the difference says %v", r.Slope(at), got)
		}
	})
	if got := (&Rest{}).Slope(0); got != 1 {
		t.Errorf("slope of nothing %v", got)
	}
}

func spearman(x, y []float64) float64 {
	ranks := func(v []float64) []float64 {
		order := make([]int, len(v))
		for i := range order {
			order[i] = i
		}
		slices.SortFunc(order, func(i, j int) int {
			if v[i] < v[j] {
				return -1
			}
			return 1
		})
		r := make([]float64, len(v))
		for k, i := range order {
			r[i] = float64(k)
		}
		return r
	}
	return stat.Correlation(ranks(x), ranks(y), nil)
}

// TestRestYearByYear: the law is met stratum by stratum, and the rank correlation is the one asked for.
func TestRestYearByYear(t *testing.T) {
	const n = 20_000
	random := rand.New(rand.NewPCG(1, 2))
	gross := make([]float64, n)
	for i := range gross {
		gross[i] = random.ExpFloat64()
	}
	law, err := RestLaw("lognormal", 20, 30)
	if err != nil {
		t.Fatal(err)
	}
	for _, want := range []float64{-1, -0.5, 0, 0.3, 0.8, 1} {
		r := &Rest{Quantile: law, RankCorrelation: want, Seed: 7}
		years := r.Years(gross)
		// Spearman's correlation of 20,000 pairs is known to (1 − ρ²)/√n or a little more; at ±1 it is exact.
		if got := spearman(gross, years); math.Abs(got-want) > 5*(1-want*want)/math.Sqrt(n)+1e-12 {
			t.Errorf("rank correlation %v, want %v", got, want)
		}
		sorted := slices.Clone(years)
		slices.Sort(sorted)
		for _, k := range []int{0, 17, n / 2, n - 1} {
			if sorted[k] != law((float64(k)+0.5)/n) {
				t.Errorf("the %d-th loss is %v, the law says %v", k, sorted[k], law((float64(k)+0.5)/n))
			}
		}
		// Midpoints leave out half of what lies beyond the last stratum: 2e-3 of the mean for this law.
		if got := sample.Sum(years) / n; math.Abs(got-20) > 2e-3*20 {
			t.Errorf("mean %v", got)
		}
		if !slices.Equal(years, r.Years(gross)) {
			t.Error("not the same twice")
		}
	}
}

// TestRestOfEqualYears: years of equal gross loss come in random order, not in that of their numbers.
func TestRestOfEqualYears(t *testing.T) {
	law, err := RestLaw("normal", 0, 1)
	if err != nil {
		t.Fatal(err)
	}
	years := (&Rest{Quantile: law, RankCorrelation: 1}).Years(make([]float64, 1000))
	index := make([]float64, 1000)
	for i := range index {
		index[i] = float64(i)
	}
	// 1/√1000 is one standard error.
	if got := spearman(index, years); math.Abs(got) > 4/math.Sqrt(1000) {
		t.Errorf("equal years correlate %v with their numbers", got)
	}
}

func TestBadRests(t *testing.T) {
	for want, r := range map[string]*Rest{
		"capital.rest.capital: -1":          {Capital: -1},
		"capital.rest.correlation: 1.5":     {Capital: 1, Correlation: 1.5},
		"capital.rest.rank_correlation: -2": {RankCorrelation: -2},
	} {
		if err := r.Validate(); err == nil || !strings.Contains(err.Error(), want) {
			t.Errorf("%v, want %s", err, want)
		}
	}
	for _, c := range []struct {
		family   string
		mean, sd float64
		want     string
	}{{"normal", 0, 0, "sd: 0"}, {"lognormal", 0, 1, "mean: 0"}, {"norml", 0, 1, `did you mean "normal"`}, {"normal", math.NaN(), 1, "sd"}} {
		if _, err := RestLaw(c.family, c.mean, c.sd); err == nil || !strings.Contains(err.Error(), c.want) {
			t.Errorf("%v, want %s", err, c.want)
		}
	}
}

func ExampleRest_Combine() {
	rest := Rest{Capital: 80, Correlation: 0.25}
	fmt.Printf("%.1f\n", rest.Combine(60)-rest.Combine(40)) // what 20 of relief are worth to the company
	// Output: 13.4
}
