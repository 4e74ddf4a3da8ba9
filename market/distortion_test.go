package market

import (
	"fmt"
	"math"
	"slices"
	"strings"
	"testing"

	"gonum.org/v1/gonum/stat/distuv"
	"pgregory.net/rapid"
)

// TestPointValues: published values of this project, section 3, computed from the formulas.
func TestPointValues(t *testing.T) {
	for _, c := range []struct {
		d    Distortion
		want [4]float64 // at .001, .01, .1, .5
	}{
		{Wang{0.25}, [4]float64{.0022540346, .0189308943, .1511411200, .5987063257}},
		{Wang{0.5}, [4]float64{.0047955592, .0338989391, .2172390804, .6914624613}},
		{ProportionalHazard{1.5}, [4]float64{.01, .0464158883, .2154434690, .6299605249}},
		{DualPower{3}, [4]float64{.002997001, .029701, .271, .875}},
		{TailValueAtRisk{0.9}, [4]float64{.01, .1, 1, 1}},
		{ConstantCostOfCapital{0.1}, [4]float64{.101 / 1.1, .11 / 1.1, .2 / 1.1, .6 / 1.1}},
	} {
		for i, s := range []float64{.001, .01, .1, .5} {
			if got := c.d.At(s); math.Abs(got-c.want[i]) > 1e-10 { // printed with ten digits
				t.Errorf("%v at %v: %.12g, want %.12g", c.d, s, got, c.want[i])
			}
		}
		if c.d.At(0) != 0 || c.d.At(1) != 1 {
			t.Errorf("%v: g(0) = %v, g(1) = %v", c.d, c.d.At(0), c.d.At(1))
		}
		if err := Check(c.d); err != nil {
			t.Errorf("%v: %v", c.d, err)
		}
	}
	if r := (ConstantCostOfCapital{0.1}).At(0.05); math.Abs(r-.1363636364) > 1e-10 {
		t.Errorf("loss on line 5 %% at 10 %%: %v", r)
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
	// Point values of section 3, computed.
	for _, c := range [][2]float64{{.001, .0230648169}, {.01, .0599483722}, {.05, .1433994041}, {.1, .2225473095}} {
		if got := d.At(c[0]); math.Abs(got-c[1]) > 1e-8 {
			t.Errorf("two-factor curve at %v: %v, want %v", c[0], got, c[1])
		}
	}
	err := Check(d)
	if err == nil {
		t.Fatal("the two-factor curve was accepted")
	}
	var at float64
	if _, scan := fmt.Sscanf(err.Error()[strings.Index(err.Error(), "probability")+len("probability "):], "%f", &at); scan != nil {
		t.Fatalf("%v names no probability", err)
	}
	// It is concave only for s < .9037934 (computed); the grid of the check has steps of 0.0004 there.
	if math.Abs(at-.9037934) > 2e-3 || !strings.Contains(err.Error(), "not concave") {
		t.Errorf("%v, want: not concave from .9037934", err)
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

// TestLayerPrices: published values of this project, section 3, computed by closed form and by quadrature.
func TestLayerPrices(t *testing.T) {
	exponential := func(x float64) float64 { return math.Exp(-x / 1000) }
	lomax := func(x float64) float64 { return math.Pow(2000/(2000+x), 3) }
	for _, c := range []struct {
		name                string
		survival            func(float64) float64
		limit, attachment   float64
		el, ph, dual, wangp float64
	}{
		{"exponential", exponential, 1000, 0, 632.120559, 678.482150, 831.908759, 782.01546},
		{"exponential", exponential, 1000, 1000, 232.544158, 294.867127, 406.578494, 404.270917},
		{"exponential", exponential, 1000, 2000, 85.548215, 128.148725, 163.177986, 190.843094},
		{"exponential", exponential, 5000, 5000, 6.692547, 18.316181, 13.362395, 28.191204},
		{"Lomax", lomax, 1000, 0, 555.555556, 607.558595, 763.786008, 718.261530},
		{"Lomax", lomax, 3000, 2000, 168.367347, 267.776908, 324.996281, 405.402297},
		{"Lomax", lomax, 10000, 10000, 19.513315, 54.175013, 38.977673, 83.644794},
	} {
		for _, v := range []struct {
			d    Distortion
			want float64
		}{{ProportionalHazard{1}, c.el}, {ProportionalHazard{1.2}, c.ph}, {DualPower{2}, c.dual}, {Wang{0.5}, c.wangp}} {
			// 2e-5: the midpoint rule at the infinite slope of g at s = 1, where x is near 0.
			if got := layerPrice(v.d, c.survival, c.attachment, c.limit); math.Abs(got/v.want-1) > 2e-5 {
				t.Errorf("%s %v xs %v, %v: %.6f, want %.6f", c.name, c.limit, c.attachment, v.d, got, v.want)
			}
		}
	}
	// Lognormal with mean 1000 and cv .5: Wang's transform shifts μ by λσ.
	mu, sigma := 6.7961835033, 0.4723807271
	survival := func(x float64) float64 { return normalSurvival((math.Log(x) - mu) / sigma) }
	for _, c := range [][3]float64{{500, 1000, 175.447867}, {500, 1500, 68.186989}, {1000, 2000, 35.400121}} {
		if got := layerPrice(Wang{0.3}, survival, c[1], c[0]); math.Abs(got/c[2]-1) > 1e-6 {
			t.Errorf("lognormal %v xs %v: %v, want %v", c[0], c[1], got, c[2])
		}
	}
}

// TestPriceOfSample: the aggregate layer 10 xs 5 of the compound Poisson(4) distribution with severities 1, 2, 3 (published values of this
// project, section 5, after the example of Kaas et al.), on a sample that holds every value as often as its probability says.
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
	for _, c := range []struct {
		d    Distortion
		want float64
	}{
		{ProportionalHazard{1.25}, 4.0259157261}, {Wang{0.3}, 4.2911555425}, {DualPower{2}, 5.1423639135}, {TailValueAtRisk{0.9}, 9.7499234295},
		{ConstantCostOfCapital{0.1}, 3.9445429404}, {Mixture{Knots: []Knot{{0.5, 0.8}, {0.05, 0.2}}}, 6.8485302794},
	} {
		tariff, err := NewTariff(Curve{Name: "c", Distortion: c.d}, n)
		if err != nil {
			t.Fatal(err)
		}
		if got := tariff.Price(layer); math.Abs(got/c.want-1) > 1e-5 { // counts are rounded to a millionth
			t.Errorf("%v: %.8f, want %.8f", c.d, got, c.want)
		}
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

func ExampleCheck() {
	fmt.Println(Check(Wang{0.4}))
	// Output: <nil>
}
