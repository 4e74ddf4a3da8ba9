package market

import (
	"fmt"
	"math"
	"slices"
	"strconv"
	"strings"
	"testing"

	"cedewright/portfolio/portfoliotest"

	"gonum.org/v1/gonum/stat/distuv"
	"pgregory.net/rapid"
)

// distortionOf gives the distortion that a published case names.
func distortionOf(t testing.TB, name string) Distortion {
	t.Helper()
	family, x := strings.Fields(name)[0], portfoliotest.Numbers(name)
	if family == "two" {
		return twoFactor{x[0], x[1]}
	}
	d, err := NewFamily(family, x[0])
	if err != nil {
		t.Fatal(err)
	}
	return d
}

// TestPointValues: testdata/published, table distortion.
func TestPointValues(t *testing.T) {
	for _, p := range portfoliotest.PublishedValues(t, "..", "distortion") {
		s, err := strconv.ParseFloat(p.Quantity, 64)
		if err != nil {
			continue // not a point
		}
		d := distortionOf(t, p.Case)
		if got := d.At(s); math.Abs(got-p.Value) > 1e-9 { // printed with ten digits
			t.Errorf("%s at %v: %.12g, want %.12g", p.Case, s, got, p.Value)
		}
	}
	for _, family := range FamilyNames() {
		for _, x := range []float64{1.5, 3} {
			if family == FamilyTailValueAtRisk {
				x /= 10
			}
			d, err := NewFamily(family, x)
			if err != nil {
				t.Fatal(err)
			}
			if d.At(0) != 0 || d.At(1) != 1 {
				t.Errorf("%v: g(0) = %v, g(1) = %v", d, d.At(0), d.At(1))
			}
			if err := Check(d); err != nil {
				t.Errorf("%v: %v", d, err)
			}
		}
	}
}

// twoFactor is Q_k(Φ⁻¹(s) + λ) with Student's t distribution of k degrees of freedom (Wang 2004): not concave over all of 0 to 1.
type twoFactor struct{ lambda, k float64 }

func (d twoFactor) At(s float64) float64 {
	if s <= 0 || s >= 1 {
		return clamp(s)
	}
	return distuv.StudentsT{Mu: 0, Sigma: 1, Nu: d.k}.CDF(distuv.UnitNormal.Quantile(s) + d.lambda)
}
func (d twoFactor) String() string { return "two factors" }

type squareDistortion struct{}

func (squareDistortion) At(s float64) float64 { return s * s }
func (squareDistortion) String() string       { return "square" }

func TestCheckRefuses(t *testing.T) {
	d := twoFactor{0.453, 5}
	end := portfoliotest.Find(t, portfoliotest.PublishedValues(t, "..", "distortion"), "two factors 0.453 5", "concave below").Value
	err := Check(d)
	if err == nil {
		t.Fatal("the two-factor curve was accepted")
	}
	var at float64
	if _, scan := fmt.Sscanf(err.Error()[strings.Index(err.Error(), "probability")+len("probability "):], "%f", &at); scan != nil {
		t.Fatalf("%v names no probability", err)
	}
	// The grid of the check has steps of 0.0004 there.
	if math.Abs(at-end) > 2e-3 || !strings.Contains(err.Error(), "not concave") {
		t.Errorf("%v, want: not concave from %v", err, end)
	}
	if err := Check(squareDistortion{}); err == nil {
		t.Error("a convex curve was accepted")
	}
	if err := Check(Mixture{Supremum: 0.5, Knots: []Knot{{1, 0.4}}}); err == nil {
		t.Errorf("weights that add up to .9: %v", err)
	}
	for family, parameters := range map[string][]float64{
		FamilyWang: {-0.1, math.NaN()}, FamilyProportionalHazard: {0.9}, FamilyDualPower: {0.5, math.Inf(1)}, FamilyTailValueAtRisk: {1}, FamilyCostOfCapital: {-1}, "wangg": {0.5},
	} {
		for _, p := range parameters {
			if _, err := NewFamily(family, p); err == nil {
				t.Errorf("%s with %v was accepted", family, p)
			}
		}
	}
}

// layerPrice is ∫ g(S(x)) dx over a layer, by the midpoint rule.
func layerPrice(d Distortion, survival func(float64) float64, attachment, limit float64) float64 {
	const n = 40_000
	sum := 0.0
	for i := range n {
		sum += d.At(survival(attachment + (float64(i)+0.5)*limit/n))
	}
	return sum * limit / n
}

// TestLayerPrices: testdata/published, table layer price.
func TestLayerPrices(t *testing.T) {
	for _, p := range portfoliotest.PublishedValues(t, "..", "layer price") {
		x, q := portfoliotest.Numbers(p.Case), portfoliotest.Numbers(p.Quantity)
		survival := map[string]func(float64) float64{
			"exponential": func(v float64) float64 { return math.Exp(-v / x[0]) },
			"lomax":       func(v float64) float64 { return math.Pow(x[1]/(x[1]+v), x[0]) },
			"lognormal":   func(v float64) float64 { return normalSurvival((math.Log(v) - x[0]) / x[1]) },
		}[strings.Fields(p.Case)[0]]
		d := distortionOf(t, strings.Join(strings.Fields(p.Quantity)[3:], " "))
		// 2e-5: the midpoint rule at the infinite slope of g at s = 1, where the loss is near 0.
		if got := layerPrice(d, survival, q[1], q[0]); math.Abs(got/p.Value-1) > 2e-5 {
			t.Errorf("%s %s: %.6f, want %.6f", p.Case, p.Quantity, got, p.Value)
		}
	}
}

// TestPriceOfSample: the aggregate layer 10 xs 5 of the compound Poisson(4) distribution with severities 1, 2, 3 (testdata/published, tables panjer and
// aggregate layer), on a sample that holds every value as often as its probability says.
func TestPriceOfSample(t *testing.T) {
	const n = 1_000_000
	severity := map[int]float64{1: .25, 2: .5, 3: .25}
	f := make([]float64, 60)
	f[0] = math.Exp(-4)
	for s := 1; s < len(f); s++ {
		for x, p := range severity {
			if x <= s {
				f[s] += 4 / float64(s) * float64(x) * p * f[s-x] // Panjer's recursion
			}
		}
	}
	for _, p := range portfoliotest.PublishedValues(t, "..", "panjer") {
		if strings.HasPrefix(p.Case, "poisson 4") {
			k, err := strconv.Atoi(p.Quantity[1:])
			if err != nil || math.Abs(f[k]-p.Value) > 1e-10 {
				t.Errorf("%s: %v, want %v (%v)", p.Quantity, f[k], p.Value, err)
			}
		}
	}
	var layer []float64
	for s, p := range f {
		for range int(math.Round(p * n)) {
			if r := min(max(float64(s)-5, 0), 10); r > 0 {
				layer = append(layer, r)
			}
		}
	}
	slices.Sort(layer)
	slices.Reverse(layer)
	for _, p := range portfoliotest.PublishedValues(t, "..", "aggregate layer 10 xs 5") {
		tariff, err := NewTariff(Curve{Name: "c", Distortion: distortionOf(t, p.Quantity)}, n)
		if err != nil {
			t.Fatal(err)
		}
		if got := tariff.Price(layer); math.Abs(got/p.Value-1) > 1e-5 { // counts are rounded to a millionth
			t.Errorf("%s: %.8f, want %.8f", p.Quantity, got, p.Value)
		}
	}
	// A mixture is priced as the mixture of its parts (computed on the same distribution).
	tariff, err := NewTariff(Curve{Name: "c", Distortion: Mixture{Knots: []Knot{{0.5, 0.8}, {0.05, 0.2}}}}, n)
	if err != nil {
		t.Fatal(err)
	}
	if got := tariff.Price(layer); math.Abs(got/6.8485302794-1) > 1e-5 {
		t.Errorf("mixture: %v", got)
	}
}

func anyDistortion(t *rapid.T) Distortion {
	switch rapid.IntRange(0, 5).Draw(t, "family") {
	case 0:
		return ProportionalHazard{rapid.Float64Range(1, 3).Draw(t, "rho")}
	case 1:
		return Wang{rapid.Float64Range(0, 1.5).Draw(t, "lambda")}
	case 2:
		return DualPower{rapid.Float64Range(1, 5).Draw(t, "n")}
	case 3:
		return TailValueAtRisk{rapid.Float64Range(0, 0.99).Draw(t, "p")}
	case 4:
		return ConstantCostOfCapital{rapid.Float64Range(0, 0.5).Draw(t, "iota")}
	}
	w := rapid.Float64Range(0, 0.5).Draw(t, "w")
	return Mixture{Supremum: w / 10, Knots: []Knot{{0.03, w}, {1, 1 - w - w/10}}}
}

// TestPriceByProperty: what holds for every concave distortion.
func TestPriceByProperty(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		d := anyDistortion(t)
		if err := Check(d); err != nil {
			t.Fatal(err)
		}
		n := rapid.IntRange(1, 40).Draw(t, "n")
		tariff, err := NewTariff(Curve{Name: "c", Distortion: d}, n)
		if err != nil {
			t.Fatal(err)
		}
		money := rapid.Custom(func(t *rapid.T) float64 { return float64(rapid.IntRange(0, 200).Draw(t, "money")) })
		x, y := rapid.SliceOfN(money, n, n).Draw(t, "x"), rapid.SliceOfN(money, n, n).Draw(t, "y")
		price := func(v []float64) float64 {
			v = slices.Clone(v)
			slices.Sort(v)
			slices.Reverse(v)
			return tariff.Price(v)
		}
		each := func(f func(i int) float64) []float64 {
			v := make([]float64, n)
			for i := range v {
				v[i] = f(i)
			}
			return v
		}
		mean := 0.0
		for _, v := range x {
			mean += v / float64(n)
		}
		const rounding = 1e-9 // of sums of 40 numbers up to 400
		if price(x) < mean-rounding {
			t.Fatalf("%v: price %v below the mean %v", d, price(x), mean)
		}
		if a, b := price(each(func(i int) float64 { return x[i] + y[i] })), price(x)+price(y); a > b+rounding {
			t.Fatalf("%v: not sub-additive: %v > %v", d, a, b)
		}
		if a, b := price(each(func(i int) float64 { return 3 * x[i] })), 3*price(x); math.Abs(a-b) > rounding {
			t.Fatalf("%v: threefold money is priced %v, not %v", d, a, b)
		}
		low, high := price(each(func(i int) float64 { return min(x[i], 70) })), price(each(func(i int) float64 { return max(x[i]-70, 0) }))
		if math.Abs(low+high-price(x)) > rounding {
			t.Fatalf("%v: adjacent layers of one annual loss cost %v, together %v", d, low+high, price(x))
		}
		if a, b := price(each(func(i int) float64 { return x[i] + 1 })), price(x)+1; math.Abs(a-b) > rounding {
			t.Fatalf("%v: a certain 1 costs %v", d, a-b+1)
		}
	})
}

// TestDearerCurve: of two curves of which one nowhere lies below the other, it prices no sample lower.
func TestDearerCurve(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		family := rapid.SampledFrom(FamilyNames()).Draw(t, "family")
		bounds := parameterRanges[family]
		low := rapid.Float64Range(0, 0.9).Draw(t, "low") // even in z, where every family rises
		high := rapid.Float64Range(low, 1).Draw(t, "high")
		n := rapid.IntRange(1, 50).Draw(t, "n")
		sample := rapid.SliceOfN(rapid.Float64Range(0, 1e9), 0, n).Draw(t, "sample")
		slices.Sort(sample)
		slices.Reverse(sample)
		prices := [2]float64{}
		for i, z := range []float64{low, high} {
			d, err := NewFamily(family, bounds.at(z))
			if err != nil {
				t.Fatal(err)
			}
			tariff, err := NewTariff(Curve{Name: "c", Distortion: d}, n)
			if err != nil {
				t.Fatal(err)
			}
			prices[i] = tariff.Price(sample)
		}
		if prices[0] > prices[1]*(1+1e-12) { // rounding of 50 products
			t.Fatalf("%s: %v at %v, %v at %v", family, prices[0], bounds.at(low), prices[1], bounds.at(high))
		}
	})
}

func ExampleCheck() {
	fmt.Println(Check(Wang{0.4}))
	// Output: <nil>
}
