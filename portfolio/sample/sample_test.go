package sample

import (
	"encoding/json"
	"fmt"
	"math"
	"os"
	"slices"
	"strings"
	"testing"

	"cedewright/portfolio/portfoliotest"

	"gonum.org/v1/gonum/stat/distuv"
	"pgregory.net/rapid"
)

func level(t testing.TB, text string) Level {
	t.Helper()
	l, err := ParseLevel(text)
	if err != nil {
		t.Fatal(err)
	}
	return l
}

func sampleOf(t testing.TB, values ...float64) Sample {
	t.Helper()
	s, err := New(values)
	if err != nil {
		t.Fatal(err)
	}
	return s
}

func closeTo(t *testing.T, what string, got, want, tolerance float64) {
	t.Helper()
	if !(math.Abs(got-want) <= tolerance) {
		t.Errorf("%s is %.12g, want %.12g (± %.3g)", what, got, want, tolerance)
	}
}

func proportionalHazard(rho float64) func(float64) float64 {
	return func(s float64) float64 { return math.Pow(s, 1/rho) }
}

func tail(p float64) func(float64) float64 { return func(s float64) float64 { return min(s/(1-p), 1) } }

func wang(lambda float64) func(float64) float64 {
	return func(s float64) float64 {
		if s <= 0 || s >= 1 {
			return min(max(s, 0), 1)
		}
		return distuv.UnitNormal.CDF(distuv.UnitNormal.Quantile(s) + lambda)
	}
}

// TestOracleThinLayer: computed with numpy on 1,000 years (testdata/oracles/A1_thin_layer.json).
func TestOracleThinLayer(t *testing.T) {
	var o struct {
		X []float64
		G struct{ P, W []float64 }
		R float64
		E struct {
			EX, Rho, TVaR99, VaR99, VaR995 float64
		}
		Expected map[string]json.RawMessage
	}
	data, err := os.ReadFile("../../testdata/oracles/A1_thin_layer.json")
	if err != nil {
		t.Fatal(err)
	}
	if err := json.Unmarshal(data, &o); err != nil {
		t.Fatal(err)
	}
	expected := func(name string) float64 {
		var x float64
		if err := json.Unmarshal(o.Expected[name], &x); err != nil {
			t.Fatal(err)
		}
		return x
	}
	s := sampleOf(t, o.X...)
	g := func(u float64) float64 {
		sum := 0.0
		for i, p := range o.G.P {
			if p == 1 {
				if u > 0 {
					sum += o.G.W[i]
				}
				continue
			}
			sum += o.G.W[i] * min(u/(1-p), 1)
		}
		return sum
	}
	// 1e-9 relative: sums of 1,000 products.
	closeTo(t, "mean", s.Mean(), expected("EX"), 1e-7)
	closeTo(t, "distorted mean", s.Distorted(g), expected("rho_g_X"), 1e-7)
	closeTo(t, "TVaR 99 %", s.TVaR(level(t, "99%")), expected("tvar99"), 1e-7)
	closeTo(t, "VaR 99 %", s.VaR(level(t, "99%")), expected("var99"), 0)
	closeTo(t, "VaR 99.5 %", s.VaR(level(t, "99.5%")), expected("var995"), 0)
}

// distortionOf gives the distortion that a published case names.
func distortionOf(t testing.TB, name string) func(float64) float64 {
	t.Helper()
	x := append(portfoliotest.Numbers(name), 0)[0]
	switch strings.Fields(name)[0] {
	case "mean":
		return func(s float64) float64 { return s }
	case "proportional-hazard":
		return proportionalHazard(x)
	case "dual-power":
		return func(s float64) float64 { return 1 - math.Pow(1-s, x) }
	case "tail-value-at-risk":
		return tail(x)
	case "wang":
		return wang(x)
	case "constant-cost-of-capital":
		return func(s float64) float64 {
			if s <= 0 {
				return 0
			}
			return (s + x) / (1 + x)
		}
	}
	t.Fatalf("no distortion %q", name)
	return nil
}

// TestClosedForms: an exponential law on a fine grid of quantiles (testdata/published, tables risk measure and distorted mean).
func TestClosedForms(t *testing.T) {
	const n = 400_000
	values := make([]float64, n)
	for i := range values {
		values[i] = -1000 * math.Log1p(-(float64(i)+0.5)/n)
	}
	s := sampleOf(t, values...)
	// The grid of midpoints misses the tail beyond its last quantile; relative to the figures that is 5e-4 at worst.
	for _, p := range portfoliotest.PublishedValues(t, "../..", "risk measure") {
		if p.Case == "exponential 1000" {
			closeTo(t, p.Quantity, measured(t, s, p.Quantity), p.Value, 5e-4*p.Value)
		}
	}
	for _, p := range portfoliotest.PublishedValues(t, "../..", "distorted mean") {
		closeTo(t, p.Quantity, s.Distorted(distortionOf(t, p.Quantity)), p.Value, 5e-4*p.Value)
	}
	for i := range values {
		values[i] = distuv.UnitNormal.Quantile((float64(i) + 0.5) / n)
	}
	s = sampleOf(t, values...)
	for _, p := range portfoliotest.PublishedValues(t, "../..", "risk measure") {
		if p.Case == "normal 0 1" {
			closeTo(t, p.Quantity, measured(t, s, p.Quantity), p.Value, 1e-4*p.Value)
		}
	}
}

// measured gives the measure that a quantity such as "TVaR 99%" names.
func measured(t testing.TB, s Sample, quantity string) float64 {
	t.Helper()
	name, text, _ := strings.Cut(quantity, " ")
	if name == "TVaR" {
		return s.TVaR(level(t, text))
	}
	return s.VaR(level(t, text))
}

// TestMeasuresByProperty draws samples full of ties.
func TestMeasuresByProperty(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		money := rapid.Custom(func(t *rapid.T) float64 { return float64(rapid.IntRange(-40, 120).Draw(t, "money")) * 2.5 })
		n := rapid.IntRange(1, 60).Draw(t, "n")
		x := rapid.SliceOfN(money, n, n).Draw(t, "x")
		y := rapid.SliceOfN(money, n, n).Draw(t, "y")
		l, err := LevelOf(float64(rapid.IntRange(1, 199).Draw(t, "level")) / 200)
		if err != nil {
			t.Fatal(err)
		}
		of := func(v []float64) Sample {
			s, err := New(v)
			if err != nil {
				t.Fatal(err)
			}
			return s
		}
		sx, sy := of(x), of(y)
		check := func(what string, ok bool) {
			if !ok {
				t.Fatalf("%s fails at %v for %v and %v", what, l, x, y)
			}
		}
		const rounding = 1e-9 // of sums of 60 numbers below 300
		check("TVaR ≥ VaR", sx.TVaR(l) >= sx.VaR(l)-rounding)
		check("TVaR ≥ mean", sx.TVaR(l) >= sx.Mean()-rounding)
		check("TVaR by minimising", math.Abs(sx.TVaR(l)-minimised(x, l.Float())) < rounding)
		both, moved, scaled := make([]float64, n), make([]float64, n), make([]float64, n)
		for i := range x {
			both[i], moved[i], scaled[i] = x[i]+y[i], x[i]+17, 3*x[i]
		}
		check("sub-additivity of TVaR", of(both).TVaR(l) <= sx.TVaR(l)+sy.TVaR(l)+rounding)
		check("translation", math.Abs(of(moved).TVaR(l)-sx.TVaR(l)-17) < rounding && of(moved).VaR(l) == sx.VaR(l)+17)
		check("homogeneity", math.Abs(of(scaled).TVaR(l)-3*sx.TVaR(l)) < rounding && of(scaled).VaR(l) == 3*sx.VaR(l))
		check("TVaR is its distortion", math.Abs(sx.TVaR(l)-sx.Distorted(tail(l.Float()))) < rounding)
		for _, g := range []func(float64) float64{wang(0.4), proportionalHazard(1.5), step(l.Float())} {
			check("the sum is the integral", math.Abs(sx.Distorted(g)-integrated(x, g)) < rounding)
			terms := AllocationWeights(x, g)
			for i := range terms {
				terms[i] *= x[i]
			}
			check("weights give the integral", math.Abs(Sum(terms)/float64(n)-sx.Distorted(g)) < rounding)
		}
		check("sub-additivity of a concave distortion", of(both).Distorted(wang(0.4)) <= sx.Distorted(wang(0.4))+sy.Distorted(wang(0.4))+rounding)
		greater := make([]float64, n)
		for i := range x {
			greater[i] = max(x[i], y[i])
		}
		sg := of(greater)
		check("monotonicity", sg.TVaR(l) >= sx.TVaR(l)-rounding && sg.VaR(l) >= sx.VaR(l) && sg.Distorted(wang(0.4)) >= sx.Distorted(wang(0.4))-rounding)
		reordered := slices.Clone(x)
		slices.Reverse(reordered)
		sr := of(reordered)
		check("order of years, bit by bit", sr.TVaR(l) == sx.TVaR(l) && sr.Mean() == sx.Mean() && sr.Distorted(wang(0.4)) == sx.Distorted(wang(0.4)))
		value, mean := Tail(reordered, l)
		check("Tail agrees", value == sx.VaR(l) && math.Abs(mean-sx.TVaR(l)) < rounding)
		check("weights have mean 1", math.Abs(Sum(AllocationWeights(x, wang(0.4)))/float64(n)-1) < rounding)
		check("order of years does not matter", func() bool {
			a, b := AllocationWeights(x, wang(0.4)), AllocationWeights(reversed(x), wang(0.4))
			slices.Reverse(b)
			for i := range a {
				if math.Abs(a[i]-b[i]) > rounding {
					return false
				}
			}
			return true
		}())
	})
}

// minimised gives tail value at risk by its other definition, the least t + E(X−t)⁺/(1−p) over t, which is attained at a value of the sample
// (Rockafellar and Uryasev 2000): no rank and no atom in it.
func minimised(x []float64, p float64) float64 {
	least := math.Inf(1)
	for _, t := range x {
		beyond := 0.0
		for _, v := range x {
			beyond += max(v-t, 0)
		}
		least = min(least, t+beyond/float64(len(x))/(1-p))
	}
	return least
}

// integrated gives ∫₀^∞ g(S) dx + ∫₋∞⁰ (g(S)−1) dx step by step over every pair of neighbouring values and 0, counting survival anew.
func integrated(x []float64, g func(float64) float64) float64 {
	points := append(slices.Clone(x), 0)
	slices.Sort(points)
	sum := 0.0
	for i := 1; i < len(points); i++ {
		above := 0
		for _, v := range x {
			if v > points[i-1] {
				above++
			}
		}
		height := g(float64(above) / float64(len(x)))
		if points[i] <= 0 {
			height--
		}
		sum += height * (points[i] - points[i-1])
	}
	return sum
}

// TestSum: exact rational sums of numbers that cancel.
func TestSum(t *testing.T) {
	for _, c := range []struct {
		values []float64
		want   float64
	}{
		{nil, 0}, {[]float64{1, 1e100, 1, -1e100}, 2}, {[]float64{0.1, 0.2, -0.3}, 0x1p-55}, // the exact sum of the three doubles, 2.776e-17
		{[]float64{math.Inf(1), 1}, math.Inf(1)}, {slices.Repeat([]float64{0.1}, 1_000_000), 100_000},
	} {
		// Neumaier's bound is one rounding of the sum; 0.1 itself is 5.6e-18 too large, a million times.
		if got := Sum(c.values); got != c.want && !(math.Abs(got-c.want) <= 2e-16*math.Abs(c.want)) {
			t.Errorf("sum of %d values is %v, want %v", len(c.values), got, c.want)
		}
	}
}

func reversed(x []float64) []float64 {
	r := slices.Clone(x)
	slices.Reverse(r)
	return r
}

func TestNewRefuses(t *testing.T) {
	for name, values := range map[string][]float64{"nothing": nil, "NaN": {1, math.NaN()}, "infinity": {math.Inf(-1)}} {
		if _, err := New(values); err == nil {
			t.Errorf("%s was accepted", name)
		}
	}
	if s := sampleOf(t, 1, 3); s.StandardDeviation() != math.Sqrt2 || s.MeanError() != 1 { // divisor N − 1
		t.Errorf("standard deviation %v, error of the mean %v", s.StandardDeviation(), s.MeanError())
	}
	if s := sampleOf(t, 5); s.StandardDeviation() != 0 || s.VaR(level(t, "99%")) != 5 || s.TVaR(level(t, "99%")) != 5 {
		t.Error("a single value is not its own measure")
	}
	s := sampleOf(t, 3, 1, 2, 2)
	if s.Survival(2) != 0.25 || s.AtLeast(2) != 0.75 || s.OrderStatistic(1) != 1 || s.Len() != 4 {
		t.Errorf("survival %v, at least %v", s.Survival(2), s.AtLeast(2))
	}
}

func ExampleSample_TVaR() {
	s, _ := New([]float64{0, 0, 0, 0, 0, 0, 0, 10, 20, 60})
	l, _ := ParseLevel("85%")
	fmt.Printf("VaR %.0f, TVaR %.4g\n", s.VaR(l), s.TVaR(l)) // (60 + half of 20) / 1.5
	// Output: VaR 20, TVaR 46.67
}
