package loss

import (
	"fmt"
	"math"
	"math/rand/v2"
	"reflect"
	"slices"
	"strings"
	"testing"

	"cedewright/portfolio/portfoliotest"
	"cedewright/portfolio/sample"
)

func must[T any](value T, err error) func(t testing.TB) T {
	return func(t testing.TB) T {
		t.Helper()
		if err != nil {
			t.Fatal(err)
		}
		return value
	}
}

func models(t testing.TB) ([]Model, *Attritional) {
	t.Helper()
	return []Model{
			{Name: "wind", Peril: "wind", Frequency: Poisson{1.4}, Severity: must(NewPareto(4, 1.25, 1500))(t), Split: []Share{{"a", 0.7}, {"b", 0.3}}},
			{Name: "fire", Peril: "fire", Frequency: must(NewNegativeBinomial(3, 2))(t), Severity: must(NewLogNormalOf(5, 2))(t), Split: []Share{{"b", 1}}, PerRisk: true},
		}, &Attritional{Family: "lognormal", Losses: []AttritionalLoss{{"a", 100, 0.1}, {"b", 50, 0.2}},
			Correlation: [][]float64{{1, 0.5}, {0.5, 1}}}
}

// TestSimulateIsReproducible: same bits for any number of workers; a further model does not move the others; another seed moves all.
func TestSimulateIsReproducible(t *testing.T) {
	all, attritional := models(t)
	const years = 5000 // more than four blocks
	simulate := func(seed uint64, workers int, m []Model) *Table {
		t.Helper()
		return must(NewBuilder(years, []string{"a", "b"}).Simulate(seed, m, attritional, workers))(t)
	}
	one := simulate(7, 1, all)
	for _, workers := range []int{2, 3, 7} {
		if !reflect.DeepEqual(simulate(7, workers, all), one) {
			t.Errorf("%d workers give another table", workers)
		}
	}
	if !reflect.DeepEqual(simulate(7, 2, []Model{all[1], all[0]}), one) {
		t.Error("the order of models matters")
	}
	if reflect.DeepEqual(simulate(8, 1, all), one) {
		t.Error("another seed gives the same table")
	}
	alone := simulate(7, 1, all[:1])
	wind := slices.Index(one.Perils(), "wind")
	if !slices.Equal(one.Annual(-1, wind), alone.Annual(-1, slices.Index(alone.Perils(), "wind"))) {
		t.Error("a further model moves the losses of another")
	}
	longer := must(NewBuilder(2*block, []string{"a", "b"}).Simulate(7, all, attritional, 1))(t)
	shorter := must(NewBuilder(block, []string{"a", "b"}).Simulate(7, all, attritional, 1))(t)
	if !slices.Equal(longer.Annual(-1, -1)[:block], shorter.Annual(-1, -1)) {
		t.Error("more years move the first ones")
	}
}

func moments(x []float64) (mean, variance float64) {
	for _, v := range x {
		mean += v / float64(len(x))
	}
	for _, v := range x {
		variance += (v - mean) * (v - mean) / float64(len(x)-1)
	}
	return mean, variance
}

// TestAttritional: means, coefficients of variation and the correlation of the normal scores come out, for both families.
func TestAttritional(t *testing.T) {
	for _, family := range []string{"lognormal", "gamma"} {
		a := &Attritional{Family: family, Losses: []AttritionalLoss{{"a", 100, 0.3}, {"b", 50, 0.2}}, Correlation: [][]float64{{1, 0.6}, {0.6, 1}}}
		const years = 40_000
		table := must(NewBuilder(years, []string{"a", "b"}).Simulate(1, nil, a, 2))(t)
		x, y := table.Annual(0, -1), table.Annual(1, -1)
		mx, vx := moments(x)
		my, vy := moments(y)
		// Four standard errors: of a mean, cv/√N; of a standard deviation, about 1/√2N and somewhat more for skewed laws.
		if math.Abs(mx/100-1) > 4*0.3/200 || math.Abs(my/50-1) > 4*0.2/200 || math.Abs(math.Sqrt(vx)/30-1) > 0.025 || math.Abs(math.Sqrt(vy)/10-1) > 0.02 {
			t.Errorf("%s: means %v, %v, deviations %v, %v", family, mx, my, math.Sqrt(vx), math.Sqrt(vy))
		}
		covariance := 0.0
		for i := range x {
			covariance += (x[i] - mx) * (y[i] - my) / years
		}
		// The correlation of lognormals is (exp(ρστ)−1)/√((exp σ²−1)(exp τ²−1)): 0.593 here; a gamma's is within 0.005 of it. s.e. 0.003.
		if r := covariance / math.Sqrt(vx*vy); math.Abs(r-0.593) > 0.02 {
			t.Errorf("%s: correlation %v", family, r)
		}
	}
}

func TestSimulateRefuses(t *testing.T) {
	all, attritional := models(t)
	builder := func() *Builder { return NewBuilder(100, []string{"a", "b"}) }
	check := func(name string, models []Model, a *Attritional) {
		if _, err := builder().Simulate(1, models, a, 1); err == nil {
			t.Errorf("%s was accepted", name)
		}
	}
	spoiled := func(spoil func(m *Model)) []Model {
		m := all[0]
		m.Split = slices.Clone(m.Split)
		spoil(&m)
		return []Model{m}
	}
	check("two models of one name", []Model{all[0], all[0]}, nil)
	check("a split that does not add up", spoiled(func(m *Model) { m.Split[0].Fraction = 0.5 }), nil)
	check("a negative share", spoiled(func(m *Model) { m.Split[0].Fraction, m.Split[1].Fraction = -0.5, 1.5 }), nil)
	check("an unknown class", spoiled(func(m *Model) { m.Split[0].Class = "c" }), nil)
	check("no severity", spoiled(func(m *Model) { m.Severity = nil }), nil)
	check("no peril", spoiled(func(m *Model) { m.Peril = "" }), nil)
	check("a monstrous frequency", spoiled(func(m *Model) { m.Frequency = Poisson{1e9} }), nil)
	broken := func(spoil func(a *Attritional)) *Attritional {
		a := *attritional
		a.Losses = slices.Clone(a.Losses)
		spoil(&a)
		return &a
	}
	check("an unknown family", nil, broken(func(a *Attritional) { a.Family = "weibull" }))
	check("a class twice", nil, broken(func(a *Attritional) { a.Losses[1].Class = "a" }))
	check("cv of 0", nil, broken(func(a *Attritional) { a.Losses[0].CV = 0 }))
	check("a correlation above 1", nil, broken(func(a *Attritional) { a.Correlation = [][]float64{{1, 2}, {2, 1}} }))
	check("a lopsided matrix", nil, broken(func(a *Attritional) { a.Correlation = [][]float64{{1, 0.2}, {0.3, 1}} }))
	if _, err := NewBuilder(100, []string{"a", "b", "c"}).Simulate(1, nil, &Attritional{
		Family: "gamma", Losses: []AttritionalLoss{{"a", 1, 1}, {"b", 1, 1}, {"c", 1, 1}},
		Correlation: [][]float64{{1, 0.9, -0.9}, {0.9, 1, 0.9}, {-0.9, 0.9, 1}},
	}, 1); err == nil {
		t.Error("correlations that contradict one another were accepted")
	}
}

// TestCompoundPoisson: annual losses of Poisson(3) events, exponential with mean 1000 (testdata/published, tables exceedance and compound).
func TestCompoundPoisson(t *testing.T) {
	const years = 200_000
	table := must(NewBuilder(years, []string{"a"}).Simulate(11, []Model{{
		Name: "m", Peril: "p", Frequency: Poisson{3}, Severity: must(NewExponential(1000))(t), Split: []Share{{"a", 1}},
	}}, nil, 2))(t)
	annual, largest := table.Annual(-1, -1), table.Largest(-1, -1)
	mean, variance := moments(annual)
	// Four standard errors each: mean √(6e6/N); variance about its size times √(7/N); probabilities √(p(1−p)/N).
	if math.Abs(mean-3000) > 4*5.5 || math.Abs(variance/6e6-1) > 0.025 {
		t.Errorf("mean %v, variance %v, want 3000 and 6e6", mean, variance)
	}
	share := func(x []float64, over float64) float64 {
		n := 0
		for _, v := range x {
			if v > over {
				n++
			}
		}
		return float64(n) / years
	}
	for _, p := range portfoliotest.PublishedValues(t, "../..", "exceedance") {
		of := annual
		if strings.HasPrefix(p.Quantity, "occurrence") {
			of = largest
		}
		if got := share(of, portfoliotest.Numbers(p.Quantity)[0]); math.Abs(got-p.Value) > 4*math.Sqrt(p.Value*(1-p.Value)/years) {
			t.Errorf("%s: %v, want %v", p.Quantity, got, p.Value)
		}
	}
	checkQuantiles(t, annual, "poisson 3 exponential 1000")
	if events := float64(table.Events(-1, -1)) / years; math.Abs(events-3) > 4*math.Sqrt(3.0/years) {
		t.Errorf("%v events a year, want 3", events)
	}
}

// checkQuantiles compares value at risk and tail value at risk of a simulated sample with published ones, within four standard errors.
func checkQuantiles(t *testing.T, annual []float64, name string) {
	t.Helper()
	s := must(sample.New(annual))(t)
	for _, p := range portfoliotest.PublishedValues(t, "../..", "compound") {
		if p.Case != name {
			continue
		}
		measure, text, _ := strings.Cut(p.Quantity, " ")
		l := must(sample.ParseLevel(text))(t)
		got, err := s.VaR(l), s.VaRError(l)
		if measure == "TVaR" {
			got, err = s.TVaR(l), s.TVaRError(l)
		}
		if math.Abs(got-p.Value) > 4*err {
			t.Errorf("%s, %s: %v ± %v, want %v", name, p.Quantity, got, err, p.Value)
		}
	}
}

// TestCompoundGeometric: a negative binomial of size 1 is geometric (testdata/published, table compound).
func TestCompoundGeometric(t *testing.T) {
	table := must(NewBuilder(200_000, []string{"a"}).Simulate(12, []Model{{
		Name: "m", Peril: "p", Frequency: NegativeBinomial{Expected: 2, Size: 1}, Severity: must(NewExponential(1000))(t), Split: []Share{{"a", 1}},
	}}, nil, 2))(t)
	checkQuantiles(t, table.Annual(-1, -1), "geometric 2 exponential 1000")
}

// dice draws 1, 2 or 3 with given probabilities.
type dice [3]float64

func (d dice) Mean() float64                        { return d[0] + 2*d[1] + 3*d[2] }
func (d dice) Survival(float64) float64             { return math.NaN() } // not asked for
func (d dice) LimitedExpectedValue(float64) float64 { return math.NaN() } // not asked for
func (d dice) String() string                       { return "dice" }
func (d dice) Draw(r *rand.Rand) float64 {
	u := r.Float64()
	switch {
	case u < d[0]:
		return 1
	case u < d[0]+d[1]:
		return 2
	}
	return 3
}

// TestPanjer: distributions of annual sums by Panjer's recursion (testdata/published, table panjer) against simulation.
func TestPanjer(t *testing.T) {
	const years = 200_000
	for name, m := range map[string]Model{
		"poisson 4 severity 1 2 3 with 1/4 1/2 1/4":          {Frequency: Poisson{4}, Severity: dice{.25, .5, .25}},
		"negative binomial 2 1 severity 1 2 3 with .5 .3 .2": {Frequency: NegativeBinomial{Expected: 2, Size: 2}, Severity: dice{.5, .3, .2}},
		"binomial 5 .2 severity 1 2 3 with .5 .3 .2":         {Frequency: Binomial{5, .2}, Severity: dice{.5, .3, .2}},
	} {
		m.Name, m.Peril, m.Split = "m", "p", []Share{{"a", 1}}
		counts := map[string]float64{}
		for _, x := range must(NewBuilder(years, []string{"a"}).Simulate(3, []Model{m}, nil, 2))(t).Annual(-1, -1) {
			counts[fmt.Sprintf("f%.0f", x)] += 1.0 / years
		}
		checked := 0
		for _, p := range portfoliotest.PublishedValues(t, "../..", "panjer") {
			if p.Case != name {
				continue
			}
			checked++
			if got := counts[p.Quantity]; math.Abs(got-p.Value) > 4*math.Sqrt(p.Value*(1-p.Value)/years) {
				t.Errorf("%s, %s: %v, want %v", name, p.Quantity, got, p.Value)
			}
		}
		if checked == 0 {
			t.Errorf("no published value of %q", name)
		}
	}
}

// TestFrequencies: means and variances.
func TestFrequencies(t *testing.T) {
	r := rand.New(rand.NewPCG(9, 9))
	for _, f := range []Frequency{
		Poisson{0}, Poisson{0.4}, Poisson{35}, must(NewNegativeBinomial(2, 2))(t), must(NewNegativeBinomial(197, 4.9))(t), must(NewBinomial(5, 0.2))(t), must(NewBinomial(40, 0.9))(t),
	} {
		const n = 100_000
		counts := make([]float64, n)
		for i := range counts {
			counts[i] = float64(f.Draw(r))
		}
		mean, variance := moments(counts)
		// Four standard errors; a variance is known to about √(3/N) of itself for these laws.
		if math.Abs(mean-f.Mean()) > 4*math.Sqrt(f.Variance()/n) || math.Abs(variance-f.Variance()) > 4*math.Sqrt(3.0/n)*f.Variance() {
			t.Errorf("%v: mean %v, variance %v, want %v and %v", f, mean, variance, f.Mean(), f.Variance())
		}
	}
	for _, err := range []error{
		second(NewPoisson(-1)), second(NewPoisson(math.NaN())), second(NewNegativeBinomial(2, 1)), second(NewNegativeBinomial(0, 2)), second(NewBinomial(0, 0.5)), second(NewBinomial(3, 1.5)),
	} {
		if err == nil {
			t.Error("a wrong parameter was accepted")
		}
	}
}

func second[T any](_ T, err error) error { return err }

func ExampleBuilder_Simulate() {
	severity, _ := NewPareto(4e6, 1.25, 1.5e9)
	b := NewBuilder(1000, []string{"household", "commercial"})
	table, err := b.Simulate(1, []Model{{
		Name: "windstorm", Peril: "windstorm", Frequency: Poisson{1.4}, Severity: severity,
		Split: []Share{{"household", 0.7}, {"commercial", 0.3}},
	}}, nil, 2)
	fmt.Println(table.Years(), "years,", table.Events(-1, -1), "events,", err)
	// Output: 1000 years, 1346 events, <nil>
}

func BenchmarkSimulate(b *testing.B) {
	all, attritional := models(b)
	for b.Loop() {
		if _, err := NewBuilder(100_000, []string{"a", "b"}).Simulate(1, all, attritional, 2); err != nil {
			b.Fatal(err)
		}
	}
}
