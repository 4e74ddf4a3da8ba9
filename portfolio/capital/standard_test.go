package capital

import (
	"fmt"
	"math"
	"math/rand/v2"
	"reflect"
	"slices"
	"strings"
	"testing"

	"cedewright/portfolio/sample"

	"pgregory.net/rapid"
)

func TestPresets(t *testing.T) {
	seen := map[string]bool{}
	for _, p := range Presets() {
		if err := p.Validate(); err != nil {
			t.Errorf("%s: %v", p.Name, err)
		}
		if seen[p.Name] {
			t.Errorf("two presets named %q", p.Name)
		}
		seen[p.Name] = true
		if len(p.Source) < 20 || !strings.Contains(p.Source, "read") && !strings.Contains(p.Source, "memory") {
			t.Errorf("%s does not say where its rule is from and how that is known: %q", p.Name, p.Source)
		}
		if again, ok := Preset(p.Name); !ok || !reflect.DeepEqual(again, p) {
			t.Errorf("Preset(%q) gives %+v", p.Name, again)
		}
	}
	// Directive 2009/138/EC, Art. 101(3), read in the consolidated text: 99.5 %, one year.
	if p, ok := Preset("eu-one-year"); !ok || p.Criteria[0].Measure != ValueAtRisk || p.Criteria[0].Level.String() != "99.5%" {
		t.Errorf("eu-one-year is %+v", p)
	}
	if _, ok := Preset("none"); ok {
		t.Error("an unknown preset was found")
	}
}

func TestNames(t *testing.T) {
	for _, name := range MeasureNames() {
		if m, err := ParseMeasure(name); err != nil || m.String() != name {
			t.Errorf("measure %q reads as %v, %v", name, m, err)
		}
	}
	for _, name := range BasisNames() {
		if b, err := ParseBasis(name); err != nil || b.String() != name {
			t.Errorf("basis %q reads as %v, %v", name, b, err)
		}
	}
	if _, err := ParseMeasure("variance"); err == nil {
		t.Error("an unknown measure was read")
	}
	if _, err := ParseBasis(""); err == nil {
		t.Error("an empty basis was read")
	}
	if err := (Standard{Name: "empty"}).Validate(); err == nil || strings.Count(err.Error(), "\n") != 0 {
		t.Errorf("an empty standard has the faults %v, want one", err)
	}
}

// TestAmount works the four kinds out by hand on ten years: losses 1 to 10, mean 5.5.
func TestAmount(t *testing.T) {
	for _, c := range []struct {
		measure Measure
		basis   Basis
		level   string
		want    float64
	}{
		{ValueAtRisk, Result, "90%", 9},
		{ValueAtRisk, Deviation, "90%", 3.5},
		{TailValueAtRisk, Result, "80%", 9.5},
		{TailValueAtRisk, Deviation, "80%", 4},
		{TailValueAtRisk, Result, "85%", (10 + 0.5*9) / 1.5},
	} {
		losses := []float64{4, 2, 10, 1, 9, 3, 8, 5, 7, 6}
		s := Criterion{Measure: c.measure, Basis: c.basis, Level: level(c.level), Ratio: 1}
		if got := s.Amount(losses, 5.5); math.Abs(got-c.want) > 1e-12 {
			t.Errorf("%v %v %v: %v, want %v", c.measure, c.level, c.basis, got, c.want)
		}
	}
	gains := []float64{-3, -2, -1}
	if got := (Criterion{Measure: ValueAtRisk, Basis: Result, Level: level("90%"), Ratio: 1}).Amount(gains, -2); got != 0 {
		t.Errorf("a company that cannot lose requires %v, want 0", got)
	}
	for _, x := range (Criterion{Measure: ValueAtRisk, Basis: Result, Level: level("90%"), Ratio: 1}).Influence(gains, nil) {
		if x != 0 {
			t.Error("capital held at 0 has an influence")
		}
	}
}

// TestInfluenceAgainstBatches: the standard error from influence values agrees with the spread over independent samples.
func TestInfluenceAgainstBatches(t *testing.T) {
	const runs, n = 300, 2000
	for _, s := range []Criterion{
		{Measure: ValueAtRisk, Basis: Result, Level: level("95%"), Ratio: 1}, {Measure: ValueAtRisk, Basis: Deviation, Level: level("95%"), Ratio: 1},
		{Measure: TailValueAtRisk, Basis: Result, Level: level("95%"), Ratio: 1}, {Measure: TailValueAtRisk, Basis: Deviation, Level: level("95%"), Ratio: 1},
	} {
		r := rand.New(rand.NewPCG(5, 5))
		sum, squares, stated := 0.0, 0.0, 0.0
		for range runs {
			losses := make([]float64, n)
			for i := range losses {
				losses[i] = 100 * math.Exp(0.8*r.NormFloat64())
			}
			stated += sample.InfluenceError(s.Influence(losses, nil)) / runs
			amount := s.Amount(losses, sample.Sum(losses)/n)
			sum += amount
			squares += amount * amount
		}
		spread := math.Sqrt((squares - sum*sum/runs) / (runs - 1))
		// 300 runs know their spread to 4 %; four times that.
		if ratio := stated / spread; math.Abs(ratio-1) > 0.16 {
			t.Errorf("%v %v: stated %.4g, spread %.4g", s.Measure, s.Basis, stated, spread)
		}
	}
}

func TestStandardByProperty(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		money := rapid.Custom(func(t *rapid.T) float64 { return float64(rapid.IntRange(-50, 150).Draw(t, "money")) })
		losses := rapid.SliceOfN(money, 2, 50).Draw(t, "losses")
		l, err := sample.LevelOf(float64(rapid.IntRange(1, 99).Draw(t, "level")) / 100)
		if err != nil {
			t.Fatal(err)
		}
		s, err := sample.New(losses)
		if err != nil {
			t.Fatal(err)
		}
		backwards := append([]float64(nil), losses...)
		slices.Reverse(backwards)
		mean := func(x []float64) float64 { return sample.Sum(x) / float64(len(x)) }
		amount := func(s Criterion, x []float64) float64 {
			return s.Amount(append([]float64(nil), x...), mean(x))
		}
		for _, m := range []Measure{ValueAtRisk, TailValueAtRisk} {
			deviation, result := Criterion{Measure: m, Basis: Deviation, Level: l, Ratio: 1}, Criterion{Measure: m, Basis: Result, Level: l, Ratio: 1}
			plain := s.VaR(l)
			if m == TailValueAtRisk {
				plain = s.TVaR(l)
			}
			// 1e-9: sums of 50 numbers below 150, in different orders.
			if got := amount(result, losses); math.Abs(got-max(plain, 0)) > 1e-9 || math.Abs(got-amount(result, backwards)) > 1e-9 {
				t.Fatalf("%v is %v, and %v with the years reversed; the sample says %v", m, got, amount(result, backwards), plain)
			}
			if got := amount(deviation, losses); math.Abs(got-plain+s.Mean()) > 1e-9 {
				t.Fatalf("deviation of %v is %v, want %v", m, got, plain-s.Mean())
			}
			if m == TailValueAtRisk && amount(deviation, losses) < -1e-9 {
				t.Fatalf("a tail mean below the mean: %v", amount(deviation, losses))
			}
			moved, doubled, worse := make([]float64, len(losses)), make([]float64, len(losses)), make([]float64, len(losses))
			for i, x := range losses {
				moved[i], doubled[i], worse[i] = x+20, 2*x, x+float64(i%3)
			}
			if a, b := amount(deviation, moved), amount(deviation, losses); math.Abs(a-b) > 1e-9 {
				t.Fatalf("a certain loss moves the deviation from %v to %v", b, a)
			}
			if a, b := amount(result, doubled), 2*amount(result, losses); math.Abs(a-b) > 1e-9 {
				t.Fatalf("doubling gives %v, want %v", a, b)
			}
			if a, b := amount(result, worse), amount(result, losses); a < b-1e-9 {
				t.Fatalf("greater losses require less: %v against %v", a, b)
			}
		}
	})
}

// TestInfluenceIsADerivative: one more year like year i, given to many copies of the years, moves required capital by its influence.
func TestInfluenceIsADerivative(t *testing.T) {
	const n, copies = 50, 200
	r := rand.New(rand.NewPCG(6, 6))
	losses := make([]float64, 0, n)
	for range n {
		losses = append(losses, math.Round(100*r.ExpFloat64())-60)
	}
	repeated := slices.Repeat(losses, copies)
	before := slices.Clone(repeated)
	for _, basis := range []Basis{Result, Deviation} {
		s := Criterion{Measure: TailValueAtRisk, Level: level("93%"), Basis: basis, Ratio: 1}
		amount := func(x []float64) float64 { return s.Amount(slices.Clone(x), sample.Sum(x)/float64(len(x))) }
		influence := s.Influence(repeated, make([]float64, n*copies))
		if got := sample.Sum(influence) / n / copies; math.Abs(got) > 1e-9 { // rounding of 10,000 terms
			t.Errorf("%v: mean influence %v", basis, got)
		}
		for i, x := range losses {
			moved := (amount(append(slices.Clone(repeated), x)) - amount(repeated)) * (n*copies + 1)
			// The new year weighs 1/10,001: the quotient is off by that times the curvature.
			if math.Abs(influence[i]-moved) > 2e-3*(1+math.Abs(moved)) {
				t.Errorf("%v: influence of year %d is %v, it moves capital by %v", basis, i, influence[i], moved)
			}
		}
	}
	if !slices.Equal(repeated, before) {
		t.Error("Influence reordered the losses")
	}
}

// TestInfluenceOfAClippedAmount: capital held at 0 has none, whatever the measure; the deviation is never clipped.
func TestInfluenceOfAClippedAmount(t *testing.T) {
	losses := []float64{-9, -5, -4, -8, -7, -6, -3, -2, -10, -1}
	dst := []float64{1, 1, 1, 1, 1, 1, 1, 1, 1, 1, 1, 1}
	for _, m := range []Measure{ValueAtRisk, TailValueAtRisk} {
		got := Criterion{Measure: m, Level: level("80%"), Basis: Result, Ratio: 1}.Influence(losses, dst)
		if len(got) != 10 || &got[0] != &dst[0] || sample.InfluenceError(got) != 0 || got[0] != 0 {
			t.Errorf("%v: %v", m, got)
		}
		if got := (Criterion{Measure: m, Level: level("80%"), Basis: Deviation, Ratio: 1}).Influence(losses, nil); sample.InfluenceError(got) == 0 {
			t.Errorf("%v: a deviation without error", m)
		}
	}
}

// TestPresetsOnAnExponentialLaw: mean 1000, premium equal to the mean, against the closed forms VaR = −θ·ln(1−p) and TVaR = VaR + θ.
func TestPresetsOnAnExponentialLaw(t *testing.T) {
	const n = 200_000
	losses := make([]float64, n)
	for name, want := range map[string]float64{"eu-one-year": 1000*math.Log(200) - 1000, "swiss-one-year": 1000 * math.Log(100), "bermuda-one-year": 1000 * math.Log(100)} {
		for i := range losses {
			losses[i] = -1000*math.Log1p(-(float64(i)+0.5)/n) - 1000
		}
		s, ok := Preset(name)
		if !ok {
			t.Fatalf("no preset %q", name)
		}
		// The grid of midpoints leaves out what lies beyond its last quantile, 1 in 400,000: under 1e-3 of the tail's mean.
		if got := s.Amount(losses, 0); math.Abs(got-want) > 1e-3*want {
			t.Errorf("%s requires %v, want %v", name, got, want)
		}
	}
}

func TestAmountAllocatesNothing(t *testing.T) {
	losses := make([]float64, 5000)
	for i := range losses {
		losses[i] = float64(i * 7919 % 5000)
	}
	for _, p := range Presets() {
		s := p.Criteria[0]
		if n := testing.AllocsPerRun(10, func() { s.Amount(losses, 0) }); n != 0 {
			t.Errorf("%s: %v allocations a run", p.Name, n)
		}
	}
}

func ExampleStandard_Amount() {
	s, _ := Preset("eu-one-year")
	losses := make([]float64, 1000)
	for i := range losses {
		losses[i] = float64(i) - 700 // results from a gain of 700 to a loss of 299
	}
	fmt.Println(s.Amount(losses, -200.5))
	// Output: 294
}
