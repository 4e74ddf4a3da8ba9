package sample

import (
	"encoding/json"
	"fmt"
	"math"
	"math/rand/v2"
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

// TestOracleAllocation: 40 years full of ties, computed with numpy (testdata/oracles/F1_allocation_ties.json); the values that depend on the
// order of storage must not come out.
func TestOracleAllocation(t *testing.T) {
	var o struct {
		Lines  [][]float64
		A1, A2 []float64
		Cases  []struct {
			H        string
			Expected struct {
				RhoNet  float64 `json:"rho_net"`
				Weights []float64
				Lines   []float64
				Ceded   []float64
				Forward []float64 `json:"order_dependent_lines_forward"`
			}
		}
	}
	data, err := os.ReadFile("../../testdata/oracles/F1_allocation_ties.json")
	if err != nil {
		t.Fatal(err)
	}
	if err := json.Unmarshal(data, &o); err != nil {
		t.Fatal(err)
	}
	net := make([]float64, 40)
	for i := range net {
		net[i] = o.Lines[0][i] + o.Lines[1][i] + o.Lines[2][i] - o.A1[i] - o.A2[i]
	}
	known := map[string]func(float64) float64{"tvar80": tail(0.8), "tvar90": tail(0.9), "ph06": func(s float64) float64 { return math.Pow(s, 0.6) },
		"wang05": wang(0.5), "var90": func(s float64) float64 {
			if s > 0.1+1e-12 {
				return 1
			}
			return 0
		}}
	checked := 0
	for _, c := range o.Cases {
		h, ok := known[c.H]
		if !ok {
			t.Logf("distortion %q is not one of those written here", c.H)
			continue
		}
		checked++
		xi := AllocationWeights(net, h)
		for i := range xi {
			closeTo(t, fmt.Sprintf("%s: weight of year %d", c.H, i), xi[i], c.Expected.Weights[i], 1e-9)
		}
		mean := func(x []float64) float64 {
			sum := 0.0
			for i := range x {
				sum += xi[i] * x[i]
			}
			return sum / 40
		}
		total := 0.0
		for k, line := range o.Lines {
			closeTo(t, fmt.Sprintf("%s: line %d", c.H, k), mean(line), c.Expected.Lines[k], 1e-9)
			total += mean(line)
		}
		closeTo(t, c.H+": ceded 1", -mean(o.A1), c.Expected.Ceded[0], 1e-9)
		closeTo(t, c.H+": ceded 2", -mean(o.A2), c.Expected.Ceded[1], 1e-9)
		closeTo(t, c.H+": sum of the parts", total-mean(o.A1)-mean(o.A2), c.Expected.RhoNet, 1e-9)
		if c.H == "tvar80" && math.Abs(mean(o.Lines[0])-c.Expected.Forward[0]) < 1e-6 {
			t.Error("the allocation depends on the order of storage")
		}
	}
	if checked < 3 {
		t.Errorf("only %d of %d cases were checked", checked, len(o.Cases))
	}
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

// TestPublishedAllocationWithTie: ten equally likely pairs with a tie at total 3 (testdata/published, table allocation).
func TestPublishedAllocationWithTie(t *testing.T) {
	x := []float64{0, 1, 2, 4, 3, 0, 7, 2, 10, 5}
	y := []float64{0, 2, 1, 0, 3, 8, 3, 12, 10, 25}
	sum := make([]float64, 10)
	for i := range sum {
		sum[i] = x[i] + y[i]
	}
	for _, p := range portfoliotest.PublishedValues(t, "../..", "allocation") {
		part := x
		if strings.HasSuffix(p.Quantity, "second") {
			part = y
		}
		xi := AllocationWeights(sum, distortionOf(t, p.Quantity))
		got := 0.0
		for i := range xi {
			got += xi[i] * part[i] / 10
		}
		closeTo(t, p.Quantity, got, p.Value, 1e-8) // printed with ten digits at most
	}
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

// TestStandardErrors compares with the asymptotic errors of n = 10,000 (testdata/published, table standard error) on the exact quantiles of the laws,
// where no chance is left but in the density estimate of value at risk.
func TestStandardErrors(t *testing.T) {
	const n = 10_000
	laws := map[string]func(u float64) float64{
		"lomax 3 2000":     func(u float64) float64 { return 2000 * (math.Pow(1-u, -1.0/3) - 1) },
		"exponential 1000": func(u float64) float64 { return -1000 * math.Log1p(-u) },
		"normal 0 1":       distuv.UnitNormal.Quantile,
	}
	for _, p := range portfoliotest.PublishedValues(t, "../..", "standard error") {
		values := make([]float64, n)
		for i := range values {
			values[i] = laws[p.Case]((float64(i) + 0.5) / n)
		}
		s := sampleOf(t, values...)
		name, text, _ := strings.Cut(p.Quantity, " ")
		got, tolerance := s.VaRError(level(t, text)), 0.03
		if name == "TVaR" { // the sample's tail ends at its last quantile, which tells the more the heavier the tail
			got, tolerance = s.TVaRError(level(t, text)), map[string]float64{"normal 0 1": 0.04, "exponential 1000": 0.06, "lomax 3 2000": 0.35}[p.Case]
		}
		closeTo(t, p.Case+" "+p.Quantity, got, p.Value, tolerance*p.Value)
	}
}

// TestInfluenceOfDistortion: the influence of a distorted mean is that of its known cases.
func TestInfluenceOfDistortion(t *testing.T) {
	r := rand.New(rand.NewPCG(1, 2))
	values := make([]float64, 2000)
	for i := range values {
		values[i] = math.Exp(1.5 * r.NormFloat64())
	}
	mean := DistortedInfluence(values, func(s float64) float64 { return s }, nil)
	want := MeanInfluence(values, nil)
	for i := range mean {
		closeTo(t, "influence on the mean", mean[i], want[i], 1e-9*values[i]+1e-9)
	}
	// TVaR's distortion has a kink, where the slope over one step is neither side's: one step of 2,000 may differ.
	p := level(t, "95%")
	got := InfluenceError(DistortedInfluence(values, tail(0.95), nil))
	closeTo(t, "error of TVaR", got, InfluenceError(TVaRInfluence(values, p, nil)), 0.02*got)
}

func TestSelect(t *testing.T) {
	r := rand.New(rand.NewPCG(3, 4))
	shapes := map[string]func(n int) []float64{
		"random": func(n int) []float64 {
			v := make([]float64, n)
			for i := range v {
				v[i] = r.NormFloat64()
			}
			return v
		},
		"ties": func(n int) []float64 {
			v := make([]float64, n)
			for i := range v {
				v[i] = float64(r.IntN(4))
			}
			return v
		},
		"equal": func(n int) []float64 { return make([]float64, n) },
		"rising": func(n int) []float64 {
			v := make([]float64, n)
			fill(v, func(i int) float64 { return float64(i) })
			return v
		},
		"falling": func(n int) []float64 {
			v := make([]float64, n)
			fill(v, func(i int) float64 { return float64(-i) })
			return v
		},
		"organ pipe": func(n int) []float64 {
			v := make([]float64, n)
			fill(v, func(i int) float64 { return float64(min(i, n-i)) })
			return v
		},
		"zeros and a tail": func(n int) []float64 {
			v := make([]float64, n)
			fill(v, func(i int) float64 {
				if r.IntN(20) == 0 {
					return r.ExpFloat64()
				}
				return 0
			})
			return v
		},
	}
	for name, make := range shapes {
		for _, n := range []int{1, 2, 3, 10, 599, 601, 5000, 50000} {
			v := make(n)
			sorted := slices.Clone(v)
			slices.Sort(sorted)
			for _, k := range []int{1, (n + 1) / 2, n - n/200, n} {
				w := slices.Clone(v)
				if got := Select(w, k); got != sorted[k-1] {
					t.Fatalf("%s, n %d: %d-th smallest is %v, want %v", name, n, k, got, sorted[k-1])
				}
				for i, x := range w {
					if i < k-1 && x > w[k-1] || i > k-1 && x < w[k-1] {
						t.Fatalf("%s, n %d: value %d stands on the wrong side of rank %d", name, n, i, k)
					}
				}
			}
		}
	}
}

func fill(v []float64, f func(i int) float64) {
	for i := range v {
		v[i] = f(i)
	}
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
		both, moved, scaled := make([]float64, n), make([]float64, n), make([]float64, n)
		for i := range x {
			both[i], moved[i], scaled[i] = x[i]+y[i], x[i]+17, 3*x[i]
		}
		check("sub-additivity of TVaR", of(both).TVaR(l) <= sx.TVaR(l)+sy.TVaR(l)+rounding)
		check("translation", math.Abs(of(moved).TVaR(l)-sx.TVaR(l)-17) < rounding && of(moved).VaR(l) == sx.VaR(l)+17)
		check("homogeneity", math.Abs(of(scaled).TVaR(l)-3*sx.TVaR(l)) < rounding && of(scaled).VaR(l) == 3*sx.VaR(l))
		check("TVaR is its distortion", math.Abs(sx.TVaR(l)-sx.Distorted(tail(l.Float()))) < rounding)
		reordered := slices.Clone(x)
		slices.Reverse(reordered)
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
	s := sampleOf(t, 3, 1, 2, 2)
	if s.Survival(2) != 0.25 || s.AtLeast(2) != 0.75 || s.OrderStatistic(1) != 1 || s.Len() != 4 {
		t.Errorf("survival %v, at least %v", s.Survival(2), s.AtLeast(2))
	}
}

func BenchmarkTail(b *testing.B) {
	r := rand.New(rand.NewPCG(1, 1))
	values, scratch := make([]float64, 100_000), make([]float64, 100_000)
	for i := range values {
		values[i] = math.Exp(r.NormFloat64())
	}
	l := level(b, "99.5%")
	b.ReportAllocs()
	for b.Loop() {
		copy(scratch, values)
		Tail(scratch, l)
	}
}

func ExampleSample_TVaR() {
	s, _ := New([]float64{0, 0, 0, 0, 0, 0, 0, 10, 20, 60})
	l, _ := ParseLevel("85%")
	fmt.Printf("VaR %.0f, TVaR %.4g\n", s.VaR(l), s.TVaR(l)) // (60 + half of 20) / 1.5
	// Output: VaR 20, TVaR 46.67
}
