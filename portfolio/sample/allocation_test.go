package sample

import (
	"encoding/json"
	"fmt"
	"math"
	"math/rand/v2"
	"os"
	"strings"
	"testing"

	"cedewright/portfolio/portfoliotest"

	"gonum.org/v1/gonum/stat/distuv"
)

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
				Reverse []float64 `json:"order_dependent_lines_reversed"`
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
	known := map[string]func(float64) float64{"tvar80": tail(0.8), "tvar90": tail(0.9), "tvar93": tail(0.93), "wang05": wang(0.5),
		"ph06": func(s float64) float64 { return math.Pow(s, 0.6) }, "var90": step(0.9)}
	differing := 0
	for _, c := range o.Cases {
		h, ok := known[c.H]
		if !ok {
			t.Fatalf("distortion %q is not one of those written here", c.H)
		}
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
			got := mean(line)
			closeTo(t, fmt.Sprintf("%s: line %d", c.H, k), got, c.Expected.Lines[k], 1e-9)
			total += got
			for _, wrong := range []float64{c.Expected.Forward[k], c.Expected.Reverse[k]} {
				if math.Abs(wrong-c.Expected.Lines[k]) < 1e-6 {
					continue // the order of storage happens not to matter
				}
				if differing++; math.Abs(got-wrong) < 1e-6 {
					t.Errorf("%s: the allocation to line %d depends on the order of storage", c.H, k)
				}
			}
		}
		closeTo(t, c.H+": ceded 1", -mean(o.A1), c.Expected.Ceded[0], 1e-9)
		closeTo(t, c.H+": ceded 2", -mean(o.A2), c.Expected.Ceded[1], 1e-9)
		closeTo(t, c.H+": sum of the parts", total-mean(o.A1)-mean(o.A2), c.Expected.RhoNet, 1e-9)
	}
	if len(o.Cases) != len(known) || differing == 0 {
		t.Errorf("%d cases of %d, %d values that depend on the order", len(o.Cases), len(known), differing)
	}
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

// step is the distortion of value at risk.
func step(p float64) func(float64) float64 {
	return func(s float64) float64 {
		if s > 1-p+1e-12 { // shares of years are multiples of 1/n
			return 1
		}
		return 0
	}
}

// allocate gives the natural allocation of the sum of lines under g: the parts, then their sum.
func allocate(lines [][]float64, g func(float64) float64) []float64 {
	n := len(lines[0])
	sum, parts := make([]float64, n), make([]float64, len(lines)+1)
	for _, line := range lines {
		for i, x := range line {
			sum[i] += x
		}
	}
	xi := AllocationWeights(sum, g)
	for k, line := range lines {
		terms := make([]float64, n)
		for i, x := range line {
			terms[i] = xi[i] * x
		}
		parts[k] = Sum(terms) / float64(n)
		parts[len(lines)] += parts[k]
	}
	return parts
}

// TestTies: values within 1e-9 of the greatest size in the sample count as one atom from its top; a chain of near values is not one atom.
func TestTies(t *testing.T) {
	xi := AllocationWeights([]float64{1, 1 + 1.6e-9, 1 + 0.8e-9}, wang(0.5))
	if xi[1] != xi[2] || xi[0] >= xi[1] {
		t.Errorf("weights %v: the upper two tie, the lowest does not", xi)
	}
	// Rounding of a net result, as 0.1+0.2 against 0.3, parts no atom.
	if xi := AllocationWeights([]float64{0.1 + 0.2, 0.3, -1}, wang(0.5)); xi[0] != xi[1] {
		t.Errorf("weights %v: the first two tie", xi)
	}
	if xi := AllocationWeights([]float64{0, 0, 0, 0}, wang(0.5)); xi[0] != 1 || xi[3] != 1 {
		t.Errorf("weights %v of equal values, want 1", xi)
	}
}

// part gives which part of an allocation a published quantity means, and the text before it.
func part(t *testing.T, quantity string, lines int) (measure string, index int) {
	t.Helper()
	if measure, ok := strings.CutSuffix(quantity, " sum"); ok {
		return measure, lines
	}
	measure, number, _ := strings.Cut(quantity, " line ")
	if _, err := fmt.Sscan(number, &index); err != nil {
		t.Fatal(err)
	}
	return measure, index - 1
}

// TestAllocationOfNormalLaw: three normal lines with the published closed form (testdata/published, table natural allocation). The sum runs
// over a fine grid of its quantiles, each taken twice, with the lines' own scatter up and down: without chance, and full of ties.
func TestAllocationOfNormalLaw(t *testing.T) {
	const points = 100_000
	mean, covariance, deviation := []float64{100, 200, 50}, []float64{1050, 3000, 1050}, math.Sqrt(5100)
	r := rand.New(rand.NewPCG(7, 7))
	lines := [][]float64{make([]float64, 2*points), make([]float64, 2*points), make([]float64, 2*points)}
	for i := range points {
		x := deviation * distuv.UnitNormal.Quantile((float64(i)+0.5)/points)
		a, b := 10*r.NormFloat64(), 10*r.NormFloat64()
		for sign, j := 1.0, 2*i; j <= 2*i+1; sign, j = -1, j+1 {
			for k, scatter := range []float64{a, b, -a - b} {
				lines[k][j] = mean[k] + covariance[k]/5100*x + sign*scatter
			}
		}
	}
	found := map[string][]float64{}
	for _, p := range portfoliotest.PublishedValues(t, ".", "natural allocation") {
		if p.Case != "normal" {
			continue
		}
		measure, index := part(t, p.Quantity, 3)
		var g func(float64) float64
		switch name, text, _ := strings.Cut(measure, " "); name {
		case "TVaR":
			g = tail(level(t, text).Float())
		case "VaR":
			g = step(level(t, text).Float())
		default:
			g = distortionOf(t, measure)
		}
		// The grid ends at its last midpoint, 1 in 200,000: that moves the integrals by up to 1e-4 of their value.
		if found[measure] == nil {
			found[measure] = allocate(lines, g)
		}
		closeTo(t, p.Quantity, found[measure][index], p.Value, 1e-4*p.Value)
	}
}

// TestAllocationOfSimulatedLaws: gamma and exponential lines, drawn, against the published closed forms (testdata/published, table natural
// allocation), within four of the standard errors that the package itself states.
func TestAllocationOfSimulatedLaws(t *testing.T) {
	const n = 100_000
	r := rand.New(rand.NewPCG(8, 8))
	draw := map[string][]func() float64{
		"exponential": {func() float64 { return 1000 * r.ExpFloat64() }, func() float64 { return 500 * r.ExpFloat64() }},
		"gamma": {
			func() float64 { return 1000 * r.ExpFloat64() },
			func() float64 { return 1000 * (r.ExpFloat64() + r.ExpFloat64()) },
			func() float64 { return 1000 * (r.ExpFloat64() + r.ExpFloat64() + r.ExpFloat64()) },
		},
	}
	rows := portfoliotest.PublishedValues(t, ".", "natural allocation")
	for _, name := range []string{"exponential", "gamma"} {
		lines, sum := make([][]float64, len(draw[name])), make([]float64, n)
		for k, next := range draw[name] {
			lines[k] = make([]float64, n)
			for i := range sum {
				lines[k][i] = next()
				sum[i] += lines[k][i]
			}
		}
		s := sampleOf(t, sum...)
		var xi []float64
		weighed := "" // the level of xi
		for _, p := range rows {
			if p.Case != name {
				continue
			}
			measure, index := part(t, p.Quantity, len(lines))
			kind, text, _ := strings.Cut(measure, " ")
			l := level(t, text)
			switch {
			case kind == "VaR":
				closeTo(t, name+" "+p.Quantity, s.VaR(l), p.Value, 4*s.VaRError(l))
			case index == len(lines):
				closeTo(t, name+" "+p.Quantity, s.TVaR(l), p.Value, 4*s.TVaRError(l))
				closeTo(t, name+" parts of "+p.Quantity, allocate(lines, tail(l.Float()))[index], s.TVaR(l), 1e-9*p.Value) // the parts add up
			default:
				if text != weighed {
					xi, weighed = AllocationWeights(sum, tail(l.Float())), text
				}
				terms := make([]float64, n)
				for i := range terms {
					terms[i] = xi[i] * (lines[index][i] - p.Value)
				}
				// The spread of the line over the tail, around its published part, leaves out that the border of the tail moves as well, which
				// at most doubles the variance: 4·√2 of these errors are four of the whole.
				closeTo(t, name+" "+p.Quantity, p.Value+Sum(terms)/n, p.Value, 6*InfluenceError(terms))
			}
		}
	}
}
