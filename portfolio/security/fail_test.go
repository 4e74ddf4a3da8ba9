package security

import (
	"fmt"
	"math"
	"math/rand/v2"
	"slices"
	"testing"

	"cedewright/portfolio/sample"

	"gonum.org/v1/gonum/integrate/quad"
	"gonum.org/v1/gonum/stat/distuv"
	"pgregory.net/rapid"
)

// pair is a register of two reinsurers.
func pair(p, q, loading float64, seed int) *Register {
	return &Register{Correlation: loading, Seed: uint64(seed), Reinsurers: []Reinsurer{{Name: "a", Default: p}, {Name: "b", Default: q}}}
}

// lognormal draws losses of n years.
func lognormal(n int) []float64 {
	r := rand.New(rand.NewPCG(13, 13))
	losses := make([]float64, n)
	for y := range losses {
		losses[y] = math.Exp(1.5 * r.NormFloat64())
	}
	return losses
}

// both counts the years in which both of the first two reinsurers fail.
func both(f *Failures) float64 {
	count := 0.0
	for _, y := range f.Years(0) {
		if _, found := slices.BinarySearch(f.Years(1), y); found {
			count++
		}
	}
	return count
}

// TestInclusion: over many seeds each year fails as often as its probability says, and both reinsurers in one year as often as independent
// ones; among the years are ties, good years, and bad ones in which default is the rule.
func TestInclusion(t *testing.T) {
	const seeds = 20_000
	badness := []float64{0, 7, 0, 3, 0, 12, 0, 5, 5, 0, 40, 5, 1, 0, 9, 0, 25, 2, 0, 5, 0, 0, 60, 8, 0, 5, 31, 0, 4, 0}
	counts := [3][]float64{}
	for k := range counts {
		counts[k] = make([]float64, len(badness))
	}
	var f *Failures
	for seed := range seeds {
		f = pair(0.2, 0.3, 0.8, seed).Fail(badness)
		for i := range 2 {
			for _, y := range f.Years(i) {
				counts[i][y]++
			}
		}
		for _, y := range f.Years(0) {
			if slices.Contains(f.Years(1), y) {
				counts[2][y]++
			}
		}
	}
	p, q := f.Probability(0), f.Probability(1)
	if slices.Max(q) < 0.9 || slices.Min(p) > 0.01 {
		t.Fatalf("probabilities from %v to %v: too narrow a test", slices.Min(p), slices.Max(q))
	}
	for y := range badness {
		for k, want := range []float64{p[y], q[y], p[y] * q[y]} {
			// 90 figures: one in three runs of a sound program would leave 2.9 errors, one in 1,600 would leave 4.5.
			closeTo(t, fmt.Sprintf("frequency %d of year %d", k, y), counts[k][y]/seeds, want, 4.5*math.Sqrt(want*(1-want)/seeds))
		}
	}
}

// bivariate gives P(X ≤ h, Y ≤ k) of standard normal variables with that correlation: the derivative by the correlation is the density
// (Plackett 1954), which knows nothing of a factor.
func bivariate(h, k, correlation float64) float64 {
	density := func(r float64) float64 {
		return math.Exp(-(h*h-2*r*h*k+k*k)/(2*(1-r*r))) / (2 * math.Pi * math.Sqrt(1-r*r))
	}
	return distuv.UnitNormal.CDF(h)*distuv.UnitNormal.CDF(k) + quad.Fixed(density, 0, correlation, 60, nil, 0)
}

// TestJointDefault: two reinsurers fail in the same year as often as a normal copula with the correlation a² says, seen at any factor.
func TestJointDefault(t *testing.T) {
	closeTo(t, "quarter law of Sheppard 1899", bivariate(0, 0, 0.36), 0.25+math.Asin(0.36)/(2*math.Pi), 1e-14) // the oracle itself
	const n, seeds, p, q = 2500, 300, 0.05, 0.02
	for _, a := range []float64{0.3, 0.6, 0.9} {
		want := bivariate(distuv.UnitNormal.Quantile(p), distuv.UnitNormal.Quantile(q), a*a)
		figures := make([]float64, seeds)
		expected := 0.0
		for seed := range seeds {
			f := pair(p, q, a, seed).Fail(lognormalYears)
			figures[seed] = both(f) / n
			if seed == 0 {
				second := f.Probability(1)
				for y, x := range f.Probability(0) {
					expected += x * second[y] / n
				}
			}
		}
		s, _ := sample.New(figures)
		closeTo(t, fmt.Sprintf("loading %v: expected joint default", a), expected, want, 0.01*want) // scores end at 1 in 5,000
		closeTo(t, fmt.Sprintf("loading %v: joint default", a), s.Mean(), expected, 4*s.MeanError())
		if unlike := bivariate(distuv.UnitNormal.Quantile(p), distuv.UnitNormal.Quantile(q), a); unlike-want < 4*s.MeanError()+0.01*want {
			t.Errorf("loading %v: the test cannot tell a correlation of a², %v, from one of a, %v", a, want, unlike)
		}
	}
}

var lognormalYears = lognormal(2500)

// TestJointScatter: under each single seed, too, the number of years in which both fail is near what the model says: it scatters no more than
// under independent draws. Unshuffled systematic samples fail it more than a hundredfold.
func TestJointScatter(t *testing.T) {
	const seeds = 300
	for _, c := range []struct{ p, q, loading float64 }{{0.05, 0.05, 0}, {0.05, 0.05, 0.5}, {0.02, 0.04, 0.5}, {0.05, 0.05, 0.9}} {
		counts, variance := make([]float64, seeds), 0.0
		for seed := range seeds {
			f := pair(c.p, c.q, c.loading, seed).Fail(lognormalYears)
			counts[seed] = both(f)
			if seed == 0 {
				second := f.Probability(1)
				for y, x := range f.Probability(0) {
					variance += x * second[y] * (1 - x*second[y])
				}
			}
		}
		s, _ := sample.New(counts)
		// 300 seeds know a variance to 8 %: four times that.
		if ratio := math.Pow(s.StandardDeviation(), 2) / variance; ratio > 1.33 {
			t.Errorf("%+v: the variance is %.3g times that of independent draws", c, ratio)
		}
	}
}

// TestUnpaidRecovery: what reinsurers leave unpaid of a layer of the year's loss is unbiased, and scatters far less over seeds than under
// independent draws, whose variance is Σ R²·p·(1−p)/N².
//
// Where the recovery follows the year's badness, neighbours in the order have near recoveries, and only what differs inside a run of one
// failing year is left to chance. A recovery that the badness tells in part only, as of one class among several, keeps the part that it
// does not tell.
func TestUnpaidRecovery(t *testing.T) {
	const seeds, collateral = 300, 0.5
	n := float64(len(lognormalYears))
	r := rand.New(rand.NewPCG(14, 14))
	class := make([]float64, len(lognormalYears))
	for y, x := range lognormalYears {
		class[y] = x * r.Float64()
	}
	for _, c := range []struct {
		name    string
		losses  []float64
		loading float64
		ratio   float64 // at most; measured 0.020, 0.008, 0.28 and 0.28
	}{
		{"year's loss", lognormalYears, 0.3, 0.04}, {"year's loss", lognormalYears, 0.6, 0.04},
		{"loss of a class", class, 0.3, 0.5}, {"loss of a class", class, 0.6, 0.5},
	} {
		unpaid := make([]float64, len(c.losses))
		for y, x := range c.losses {
			unpaid[y] = Reinsurer{LossGiven: 0.5}.Unpaid(0.4*min(max(x-3, 0), 20), collateral)
		}
		figures, want, variance := make([]float64, seeds), 0.0, 0.0
		for seed := range seeds {
			f := pair(0.02, 0.01, c.loading, seed).Fail(lognormalYears)
			if seed == 0 {
				for y, p := range f.Probability(0) {
					want += unpaid[y] * p / n
					variance += unpaid[y] * unpaid[y] * p * (1 - p) / (n * n)
				}
			}
			for _, y := range f.Years(0) {
				figures[seed] += unpaid[y] / n
			}
		}
		s, _ := sample.New(figures)
		closeTo(t, fmt.Sprintf("%s, loading %v: unpaid", c.name, c.loading), s.Mean(), want, 4*s.MeanError())
		if ratio := math.Pow(s.StandardDeviation(), 2) / variance; ratio > c.ratio {
			t.Errorf("%s, loading %v: the variance is %.3g times that of independent draws", c.name, c.loading, ratio)
		}
	}
}

// TestTiesAreShuffled: with all years alike the failing ones are any of them, whatever their index: how many fall among the first hundred of
// a thousand follows the hypergeometric law.
func TestTiesAreShuffled(t *testing.T) {
	const n, first, failing, seeds = 1000, 100, 20, 1000
	counts := make([]float64, seeds)
	for seed := range seeds {
		f := pair(failing/(n+0.), 0, 0.5, seed).Fail(make([]float64, n))
		for _, y := range f.Years(0) {
			if y < first {
				counts[seed]++
			}
		}
	}
	s, _ := sample.New(counts)
	closeTo(t, "mean", s.Mean(), first*failing/n, 4*s.MeanError())
	// 1000 seeds know a variance to 4.5 %: four times that. Along the index it would be a third of it.
	want := failing * 0.1 * 0.9 * (n - failing) / (n - 1)
	closeTo(t, "variance", math.Pow(s.StandardDeviation(), 2), want, 0.18*want)
}

// TestFailProperties: the number of failing years is N·p up or down; above any badness their number is near what the probabilities add up to;
// years ascend; nothing given is changed; the same seed draws the same; what else is in the register moves nothing.
func TestFailProperties(t *testing.T) {
	checkYears(t, func(t *rapid.T, badness []float64) {
		before := slices.Clone(badness)
		p, q := rapid.Float64Range(1e-4, 0.95).Draw(t, "probability"), rapid.Float64Range(0, 0.5).Draw(t, "other")
		r := pair(p, q, rapid.Float64Range(0, 0.99).Draw(t, "loading"), rapid.IntRange(0, 1<<30).Draw(t, "seed"))
		f := r.Fail(badness)
		if !slices.Equal(badness, before) {
			t.Fatal("the badness was changed")
		}
		for i := range 2 {
			years, p := f.Years(i), f.Probability(i)
			if f.Count(i) != len(years) || !slices.IsSorted(years) || len(slices.Compact(slices.Clone(years))) != len(years) {
				t.Fatalf("%d years %v", f.Count(i), years)
			}
			if math.Abs(float64(len(years))-float64(len(badness))*r.Reinsurers[i].Default) > 1+1e-9 { // rounding
				t.Fatalf("%d years fail of %d with probability %v", len(years), len(badness), r.Reinsurers[i].Default)
			}
			for _, least := range badness {
				expected, count := 0.0, 0.0
				for y, x := range badness {
					if x >= least {
						expected += p[y]
					}
				}
				for _, y := range years {
					if badness[y] >= least {
						count++
					}
				}
				// Before a run the sample is within 1; inside one, up to 2.5 failures are expected where they are the exception, and as
				// many survivals where they are the rule, each within 1 of what comes.
				if math.Abs(count-expected) > 5 {
					t.Fatalf("%v years of badness %v and more fail, %v expected", count, least, expected)
				}
			}
		}
		more := &Register{Correlation: r.Correlation, Seed: r.Seed, Reinsurers: []Reinsurer{{Name: "c", Default: 0.3}, r.Reinsurers[1], r.Reinsurers[0]}}
		again := more.Fail(badness)
		if !slices.Equal(f.Years(0), again.Years(2)) || !slices.Equal(f.Years(1), again.Years(1)) || !slices.Equal(f.Probability(0), again.Probability(2)) {
			t.Fatal("another reinsurer, or another order, moves the failing years")
		}
	})
}

// TestStreams: another seed and another name draw otherwise; what the reinsurer loses on default does not matter.
func TestStreams(t *testing.T) {
	badness := rising(2000)
	base := pair(0.03, 0.03, 0.4, 1)
	f := base.Fail(badness)
	if slices.Equal(f.Years(0), f.Years(1)) || slices.Equal(f.Years(0), pair(0.03, 0.03, 0.4, 2).Fail(badness).Years(0)) {
		t.Error("another name or seed draws the same years")
	}
	base.Reinsurers[0].LossGiven, base.Reinsurers[0].Step = 1, 3
	if !slices.Equal(f.Years(0), base.Fail(badness).Years(0)) {
		t.Error("the loss given default moves the failing years")
	}
}

// TestEdges: reinsurers that never fail, no year, one year, and no reinsurer.
func TestEdges(t *testing.T) {
	f := pair(0, 1e-12, 0.5, 1).Fail(rising(1000))
	if f.Count(0) != 0 || slices.Max(f.Probability(0)) != 0 {
		t.Errorf("probability 0 fails in %v, with probabilities up to %v", f.Years(0), slices.Max(f.Probability(0)))
	}
	if f.Count(1) != 0 { // one seed in 10⁹ would
		t.Errorf("probability 1e-12 fails in %v", f.Years(1))
	}
	if f := pair(0.5, 0, 0.5, 1).Fail(nil); f.Count(0) != 0 || len(f.Probability(0)) != 0 {
		t.Error("failures without years")
	}
	closeTo(t, "probability in the one year", pair(0.3, 0, 0.9, 1).Fail([]float64{7}).Probability(0)[0], 0.3, 1e-14)
	if f := (&Register{}).Fail(rising(3)); f.Warnings() != nil {
		t.Error("warnings without reinsurers")
	}
	always := pair(0.999, 0, 0.5, 1).Fail(rising(1000))
	if always.Count(0) != 999 && always.Count(0) != 998 && always.Count(0) != 1000 { // within one of N·p
		t.Errorf("%d of 1000 years fail at a probability of 0.999", always.Count(0))
	}
}

// TestWarnings: who fails in fewer than ten expected years is named, with the years that there are; who never fails is not.
func TestWarnings(t *testing.T) {
	r := &Register{Seed: 3, Reinsurers: []Reinsurer{
		{Name: "never", Default: 0}, {Name: "often", Default: 0.0100001}, {Name: "nine", Default: 0.009}, {Name: "one", Default: 0.001}, {Name: "hardly", Default: 1e-9},
	}}
	f := r.Fail(rising(1000))
	// Rounding may add or take a year where N·p is whole.
	want := []string{
		fmt.Sprintf(`only %d simulated years see reinsurer "nine" fail`, f.Count(2)),
		`only 1 simulated year sees reinsurer "one" fail`,
		`no simulated year sees reinsurer "hardly" fail`,
	}
	if got := f.Warnings(); !slices.Equal(got, want) {
		t.Errorf("got  %q\nwant %q", got, want)
	}
}

func ExampleRegister_Fail() {
	r := &Register{Correlation: 0.5, Seed: 1, Reinsurers: []Reinsurer{{Name: "Gannet Re", Default: 0.02, LossGiven: 0.5}, {Name: "Dunlin Re", Default: 0.0024, LossGiven: 0.5}}}
	if err := r.Validate(); err != nil {
		fmt.Println(err)
		return
	}
	losses := make([]float64, 1000) // gross loss of each simulated year
	for y := range losses {
		losses[y] = float64(y * y % 997)
	}
	f := r.Fail(losses)
	unpaid := 0.0
	for _, y := range f.Years(0) {
		recovery := max(losses[y]-500, 0)
		unpaid += r.Reinsurers[0].Unpaid(0.3*recovery, 20) // 30 % of the layer, collateral of 20
	}
	fmt.Printf("%d years, %.2f unpaid a year\n", f.Count(0), unpaid/1000)
	fmt.Println(f.Warnings())
	// Output:
	// 20 years, 0.84 unpaid a year
	// [only 2 simulated years see reinsurer "Dunlin Re" fail]
}

func BenchmarkFail(b *testing.B) {
	badness := lognormal(100_000)
	r := &Register{Correlation: 0.5}
	for i := range 10 {
		r.Reinsurers = append(r.Reinsurers, Reinsurer{Name: fmt.Sprint(i), Default: 0.001 * float64(i+1)})
	}
	b.ReportAllocs()
	for b.Loop() {
		r.Fail(badness)
	}
}
