package capital

import (
	"fmt"
	"math"
	"math/rand/v2"
	"slices"
	"strings"
	"testing"

	"cedewright/portfolio/fault"
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
		all := r.Combine(at)
		second := r.Capital * r.Capital * (1 - r.Correlation*r.Correlation) / (all * all * all)
		small := 1e-4 * all // so that the third derivatives, of the order of second/all, count for 1e-8, and rounding over the step for 1e-12/all
		if got := (r.Slope(at+small) - r.Slope(at-small)) / (2 * small); math.Abs(got-second) > 1e-6*second+1e-10/all {
			t.Fatalf("second derivative %v, the difference says %v", second, got)
		}
		if math.Abs(r.Slope(at)) > 1+1e-15 {
			t.Fatalf("slope %v", r.Slope(at))
		}
	})
	if got := (&Rest{}).Slope(0); got != 1 {
		t.Errorf("slope of nothing %v", got)
	}
}

// TestRestThatCancels: at a correlation of −1 the company's capital is the distance of the two figures, to the last digit however near they are; at 1 it is
// their sum, and for a k below 0 what the square says.
func TestRestThatCancels(t *testing.T) {
	const b = 80.0
	for _, k := range []float64{0, 40, 79, 80 - 1e-9, 80, 80 + 1e-12, 81, 500, -3} {
		if got := (&Rest{Capital: b, Correlation: -1}).Combine(k); got != math.Abs(k-b) {
			t.Errorf("correlation -1, %v: company %v, want %v", k, got, math.Abs(k-b))
		}
		if got := (&Rest{Capital: b, Correlation: 1}).Combine(k); got != math.Abs(k+b) {
			t.Errorf("correlation 1, %v: company %v, want %v", k, got, math.Abs(k+b))
		}
		if got := (&Rest{}).Combine(k); got != math.Abs(k) {
			t.Errorf("no rest, %v: company %v", k, got)
		}
	}
	apart := &Rest{Capital: b, Correlation: -1}
	if below, at, above := apart.Slope(79), apart.Slope(80), apart.Slope(81); below != -1 || at != 1 || above != 1 {
		t.Errorf("slopes around the kink: %v, %v, %v", below, at, above)
	}
	// Short of −1 it is √(k² + 2ckB + B²) to all digits: at k = B that is B·√(2(1+c)).
	near := &Rest{Capital: b, Correlation: -1 + 0x1p-30}
	if got, want := near.Combine(b), b*math.Sqrt(2*0x1p-30); math.Abs(got-want) > 1e-14*want { // a few roundings; the sum has seven digits left
		t.Errorf("company %.17g, want %.17g", got, want)
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

// TestRestCorrelationIsSpearman: over many pairings the rank correlation comes to the one asked for, not to that of the normal scores, which would leave
// (6/π)·arcsin(ρ/2), 0.483 for 0.5 and 0.786 for 0.8.
func TestRestCorrelationIsSpearman(t *testing.T) {
	const n, runs = 2000, 100
	gross := make([]float64, n)
	for i := range gross {
		gross[i] = float64(i * 7919 % n)
	}
	for _, want := range []float64{-0.5, 0.5, 0.8} {
		var found []float64
		for seed := range uint64(runs) {
			found = append(found, spearman(gross, (&Rest{Quantile: func(p float64) float64 { return p }, RankCorrelation: want, Seed: seed}).Years(gross)))
		}
		mean, deviation := stat.MeanStdDev(found, nil)
		if math.Abs(mean-want) > 4*deviation/math.Sqrt(runs)+1.0/n { // four standard errors, and a bias of the order of 1/n
			t.Errorf("rank correlation %.4f ± %.4f, want %v", mean, deviation/math.Sqrt(runs), want)
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
	}{
		{"normal", 0, 0, "sd: 0; allowed: money above 0"},
		{"normal", -5, math.Inf(1), "sd: +Inf; allowed: money above 0"},
		{"normal", math.NaN(), 1, "mean: NaN; allowed: money"},
		{"normal", math.Inf(-1), math.NaN(), "mean: -Inf; allowed: money\nsd: NaN; allowed: money above 0"},
		{"lognormal", 0, 1, "mean: 0; allowed: money above 0, for a lognormal law"},
		{"lognormal", -1, -1, "sd: -1; allowed: money above 0\nmean: -1; allowed: money above 0, for a lognormal law"},
		{"lognormal", math.NaN(), 1, "mean: NaN; allowed: money"},
		{"lognormal", 1e-200, 1, "sd: 1; allowed: at most 1e150 times the mean, for a lognormal law"},
		{"norml", 0, 1, `family: no family is named "norml"; allowed: ["normal" "lognormal"]; did you mean "normal"?`},
	} {
		if law, err := RestLaw(c.family, c.mean, c.sd); err == nil || err.Error() != c.want || law != nil {
			t.Errorf("%s, %v, %v: %v, want %s", c.family, c.mean, c.sd, err, c.want)
		}
	}
	faults := fault.All((&Rest{Capital: math.NaN(), Correlation: math.NaN(), RankCorrelation: 1.0001}).Validate())
	if len(faults) != 3 {
		t.Errorf("faults %v, want three", faults)
	}
}

// TestRestLaws: the moments and the median of both families, by their quantiles.
func TestRestLaws(t *testing.T) {
	for _, c := range []struct {
		family           string
		mean, sd, median float64
	}{
		{"normal", -20, 60, -20}, {"lognormal", 20, 60, 20 / math.Sqrt(10)}, {"lognormal", 3e6, 3e4, 3e6 / math.Sqrt(1.0001)}, // median = mean/√(1 + cv²)
	} {
		law, err := RestLaw(c.family, c.mean, c.sd)
		if err != nil {
			t.Fatal(err)
		}
		if got := law(0.5); math.Abs(got-c.median) > 1e-12*math.Abs(c.median) { // roundings of log and exp
			t.Errorf("%s: median %v, want %v", c.family, got, c.median)
		}
		// The variance of the logarithm, or of the law itself, from the spread between the quantiles at Φ(±1).
		high, low := law(0.8413447460685429), law(0.15865525393145707)
		spread, want := (high-low)/2, c.sd
		if c.family == "lognormal" {
			spread, want = math.Log(high/low)/2, math.Sqrt(math.Log1p(c.sd*c.sd/c.mean/c.mean))
		}
		if math.Abs(spread-want) > 1e-9*want { // the quantiles of the normal law are good to about 1e-12, the logarithm of their ratio divides by 0.01
			t.Errorf("%s: spread %v, want %v", c.family, spread, want)
		}
	}
	for _, family := range RestFamilies() {
		if _, err := RestLaw(family, 1, 1); err != nil {
			t.Errorf("%s: %v", family, err)
		}
	}
}

// TestRestOfFewYears: no year, one and two, and a seed of its own: another seed gives other years, the same years in the same order of the law.
func TestRestOfFewYears(t *testing.T) {
	law := func(p float64) float64 { return p }
	r := &Rest{Quantile: law, RankCorrelation: 1}
	if got := r.Years(nil); len(got) != 0 {
		t.Errorf("no year: %v", got)
	}
	if got := r.Years([]float64{7}); !slices.Equal(got, []float64{0.5}) {
		t.Errorf("one year: %v", got)
	}
	if got := r.Years([]float64{7, -3, 5}); !slices.Equal(got, []float64{2.5 / 3, 0.5 / 3, 0.5}) {
		t.Errorf("three years: %v", got)
	}
	r.RankCorrelation = -1
	if got := r.Years([]float64{7, -3, 5}); !slices.Equal(got, []float64{0.5 / 3, 2.5 / 3, 0.5}) {
		t.Errorf("three years the other way round: %v", got)
	}
	gross := make([]float64, 1000)
	for i := range gross {
		gross[i] = float64(i)
	}
	one, other := (&Rest{Quantile: law, RankCorrelation: 0.5, Seed: 1}).Years(gross), (&Rest{Quantile: law, RankCorrelation: 0.5, Seed: 2}).Years(gross)
	if slices.Equal(one, other) {
		t.Error("another seed gives the same years")
	}
	slices.Sort(one)
	slices.Sort(other)
	if !slices.Equal(one, other) {
		t.Error("another seed gives another law")
	}
}

func ExampleRest_Combine() {
	rest := Rest{Capital: 80, Correlation: 0.25}
	fmt.Printf("%.1f\n", rest.Combine(60)-rest.Combine(40)) // what 20 of relief are worth to the company
	// Output: 13.4
}
