package sample

import (
	"math"
	"math/rand/v2"
	"slices"
	"strings"
	"testing"

	"cedewright/portfolio/portfoliotest"

	"gonum.org/v1/gonum/stat/distuv"
)

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

// TestSimulatedErrors draws samples of n = 10,000 from four laws: their figures scatter around the published values as the published standard
// errors say, and so does on average what the package states from one sample (testdata/published, table sampling error).
func TestSimulatedErrors(t *testing.T) {
	const n, runs = 10_000, 200
	rows := portfoliotest.PublishedValues(t, ".", "sampling error")
	for _, law := range []struct {
		name string
		draw func(r *rand.Rand) float64
		// How well 200 runs know the scatter: four times 1/√400 for tails with moments enough; more where the fourth moment of the tail
		// is large (lognormal) or infinite (index 3).
		tolerance float64
	}{
		{"normal 0 1", func(r *rand.Rand) float64 { return r.NormFloat64() }, 0.2},
		{"exponential 1000", func(r *rand.Rand) float64 { return 1000 * r.ExpFloat64() }, 0.2},
		{"lognormal 0 1", func(r *rand.Rand) float64 { return math.Exp(r.NormFloat64()) }, 0.25},
		{"lomax 3 2000", func(r *rand.Rand) float64 { return 2000 * math.Expm1(r.ExpFloat64()/3) }, 0.4},
	} {
		r := rand.New(rand.NewPCG(9, 9))
		values, scratch := make([]float64, n), make([]float64, n)
		quantities := []string{"VaR 99%", "TVaR 99%", "VaR 99.5%", "TVaR 99.5%"}
		figures, stated := make([][]float64, 4), make([]float64, 4)
		for range runs {
			for i := range values {
				values[i] = law.draw(r)
			}
			for q, text := range []string{"99%", "99.5%"} {
				l := level(t, text)
				copy(scratch, values)
				value, mean := Tail(scratch, l)
				figures[2*q], figures[2*q+1] = append(figures[2*q], value), append(figures[2*q+1], mean)
				stated[2*q] += InfluenceError(VaRInfluence(values, l, scratch)) / runs
				stated[2*q+1] += InfluenceError(TVaRInfluence(values, l, scratch)) / runs
			}
		}
		for q, quantity := range quantities {
			value, published := portfoliotest.Find(t, rows, law.name, quantity).Value, portfoliotest.Find(t, rows, law.name, quantity+" error").Value
			scatter := sampleOf(t, figures[q]...)
			what := law.name + " " + quantity
			// Four errors of the mean of the runs, and the bias of a quantile taken at rank ⌈pn⌉, which is below one twentieth of the error.
			closeTo(t, what, scatter.Mean(), value, 4*published/math.Sqrt(runs)+published/20)
			closeTo(t, "scatter of "+what, scatter.StandardDeviation(), published, law.tolerance*published)
			closeTo(t, "stated error of "+what, stated[q], published, law.tolerance/2*published) // a mean over runs scatters less
		}
	}
}

// TestDistortedInfluenceAgainstSamples: the stated error of a distorted mean is its scatter over samples.
func TestDistortedInfluenceAgainstSamples(t *testing.T) {
	const n, runs = 2000, 200
	for name, g := range map[string]func(float64) float64{
		"proportional hazard": proportionalHazard(1.25), "wang": wang(0.3), "tail value at risk": tail(0.9),
		"dual power": func(s float64) float64 { return 1 - (1-s)*(1-s) },
	} {
		r := rand.New(rand.NewPCG(11, 11))
		values, figures, stated := make([]float64, n), make([]float64, 0, runs), 0.0
		for range runs {
			for i := range values {
				values[i] = 100*math.Exp(0.8*r.NormFloat64()) - 120 // both signs
			}
			figures = append(figures, sampleOf(t, values...).Distorted(g))
			stated += InfluenceError(DistortedInfluence(values, g, nil)) / runs
		}
		// 200 runs know their scatter to 5 %: four times that.
		closeTo(t, name, stated, sampleOf(t, figures...).StandardDeviation(), 0.2*stated)
	}
}

// TestInfluenceIsADerivative: one more year like year i, given to many copies of the sample, moves the figure by its influence value.
func TestInfluenceIsADerivative(t *testing.T) {
	const n, copies = 60, 200
	r := rand.New(rand.NewPCG(12, 12))
	values := make([]float64, n)
	for i := range values {
		values[i] = math.Round(40*r.ExpFloat64()) - 10 // with ties
	}
	l := level(t, "91%")
	repeated := slices.Repeat(values, copies)
	for name, f := range map[string]struct {
		figure    func(s Sample) float64
		influence []float64
	}{
		"mean":                {Sample.Mean, MeanInfluence(repeated, nil)},
		"tail value at risk":  {func(s Sample) float64 { return s.TVaR(l) }, TVaRInfluence(repeated, l, nil)},
		"wang":                {func(s Sample) float64 { return s.Distorted(wang(0.4)) }, DistortedInfluence(repeated, wang(0.4), nil)},
		"proportional hazard": {func(s Sample) float64 { return s.Distorted(proportionalHazard(1.3)) }, DistortedInfluence(repeated, proportionalHazard(1.3), nil)},
	} {
		before := f.figure(sampleOf(t, repeated...))
		closeTo(t, "mean influence on the "+name, Sum(f.influence)/n/copies, 0, 1e-9)
		for i, x := range values {
			after := f.figure(sampleOf(t, append(slices.Clone(repeated), x)...))
			// The weight of the new year is 1/12,001: the difference quotient is off by that times the curvature.
			closeTo(t, "influence on the "+name, f.influence[i], (after-before)*(n*copies+1), 2e-3*(1+math.Abs(f.influence[i])))
		}
	}
}

// TestInfluenceWithAJump: a constant cost of capital ι is (s+ι)/(1+ι) above 0: beyond its jump it is the mean over 1+ι, and the jump's
// weight on the largest value is left out, as documented.
func TestInfluenceWithAJump(t *testing.T) {
	values := []float64{5, -2, 0, 0, 31, 7, 7, 12}
	g := distortionOf(t, "constant-cost-of-capital 0.25")
	got, mean := DistortedInfluence(values, g, nil), MeanInfluence(values, nil)
	for i := range got {
		closeTo(t, "influence", got[i], mean[i]/1.25, 1e-12) // rounding
	}
}

func TestInfluenceReusesMemory(t *testing.T) {
	values, dst := []float64{3, 1, 2}, make([]float64, 8)
	for name, got := range map[string][]float64{
		"mean": MeanInfluence(values, dst), "tail": TVaRInfluence(values, level(t, "50%"), dst),
		"value at risk": VaRInfluence(values, level(t, "50%"), dst), "distorted": DistortedInfluence(values, wang(1), dst),
	} {
		if len(got) != 3 || &got[0] != &dst[0] {
			t.Errorf("%s: memory long enough was not used", name)
		}
	}
	if !slices.Equal(values, []float64{3, 1, 2}) {
		t.Errorf("the values were reordered: %v", values)
	}
	if InfluenceError([]float64{1}) != 0 || InfluenceError(nil) != 0 {
		t.Error("fewer than two values have an error")
	}
}
