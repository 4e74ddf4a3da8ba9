package loss

import (
	"math"
	"math/rand/v2"
	"strings"
	"testing"

	"cedewright/portfolio/portfoliotest"

	"gonum.org/v1/gonum/integrate/quad"
)

// lawOf gives the law that a published case names.
func lawOf(t testing.TB, name string) Severity {
	t.Helper()
	x := portfoliotest.Numbers(name)
	switch strings.Fields(name)[0] {
	case "exponential":
		return must(NewExponential(x[0]))(t)
	case "lognormal":
		return must(NewLogNormalOf(x[0], x[1]))(t)
	case "gamma":
		return must(NewGamma(x[0], x[1]))(t)
	case "lomax":
		return must(NewGeneralisedPareto(0, 1/x[0], x[1]/x[0], math.Inf(1)))(t)
	case "pareto":
		return must(NewPareto(x[0], x[1], math.Inf(1)))(t)
	}
	t.Fatalf("no law %q", name)
	return nil
}

// TestLimitedExpectedValues: testdata/published, tables limited expected value and pareto layer.
func TestLimitedExpectedValues(t *testing.T) {
	for _, p := range portfoliotest.PublishedValues(t, "../..", "limited expected value") {
		d := portfoliotest.Numbers(p.Quantity)[0]
		if got := lawOf(t, p.Case).LimitedExpectedValue(d); math.Abs(got-p.Value) > 1e-6 { // printed with six decimals
			t.Errorf("%s: E[min(X, %v)] is %.6f, want %.6f", p.Case, d, got, p.Value)
		}
	}
	for _, p := range portfoliotest.PublishedValues(t, "../..", "pareto layer") {
		law, x := lawOf(t, p.Case), portfoliotest.Numbers(p.Quantity)
		if got := law.LimitedExpectedValue(x[0]+x[1]) - law.LimitedExpectedValue(x[1]); math.Abs(got-p.Value) > 1e-10 {
			t.Errorf("%s, layer %s: %v, want %v", p.Case, p.Quantity, got, p.Value)
		}
	}
}

func laws(t testing.TB) []Severity {
	return []Severity{
		must(NewExponential(100))(t), must(NewWeibull(0.7, 50))(t), must(NewLogNormal(3, 1.2))(t), must(NewGammaOf(80, 1.5))(t),
		must(NewPareto(10, 1.4, math.Inf(1)))(t), must(NewPareto(10, 0.9, 5000))(t), must(NewGeneralisedPareto(20, 0.4, 30, math.Inf(1)))(t),
		must(NewGeneralisedPareto(20, -0.3, 30, math.Inf(1)))(t), must(NewGeneralisedPareto(20, 0, 30, 400))(t), must(NewGeneralisedPareto(5, 1, 30, 900))(t),
	}
}

// TestSeverityLaws: what must hold for every law: the limited expected value is the integral of the survival function, the mean its limit,
// and draws follow the survival function.
func TestSeverityLaws(t *testing.T) {
	r := rand.New(rand.NewPCG(2, 3))
	for _, law := range laws(t) {
		if s := law.Survival(0); s != 1 && law.Survival(-1) != 1 {
			t.Errorf("%v: survival at 0 is %v", law, s)
		}
		before, from := 1.0, 0.0
		integral := 0.0
		for _, d := range []float64{3, 9.9, 10, 20, 50, 100, 399, 400, 899, 2000} {
			// The survival functions have kinks at thresholds and ceilings, which lie on the grid.
			integral += quad.Fixed(law.Survival, from, d, 200, nil, 0)
			if got := law.LimitedExpectedValue(d); math.Abs(got-integral) > 2e-3*integral { // a kink may fall inside a panel
				t.Errorf("%v: E[min(X, %v)] is %v, the integral %v", law, d, got, integral)
			}
			if s := law.Survival(d); s > before || s < 0 {
				t.Errorf("%v: survival rises to %v at %v", law, s, d)
			} else {
				before = s
			}
			from = d
		}
		if mean := law.Mean(); math.Abs(law.LimitedExpectedValue(1e12)/mean-1) > 1e-3 {
			t.Errorf("%v: mean %v, E[min(X, 1e12)] %v", law, mean, law.LimitedExpectedValue(1e12))
		}
		const n = 50_000
		above := map[float64]int{15: 0, 60: 0, 300: 0}
		for range n {
			x := law.Draw(r)
			for level := range above {
				if x > level {
					above[level]++
				}
			}
		}
		for level, count := range above {
			p := law.Survival(level)
			if got := float64(count) / n; math.Abs(got-p) > 4*math.Sqrt(p*(1-p)/n)+1e-9 {
				t.Errorf("%v: %v of draws above %v, want %v", law, got, level, p)
			}
		}
	}
}

// TestLogNormalTail: far in the tail, where 1 − erf has no digit left (φ(z)/z·(1 − 1/z² + 3/z⁴ − 15/z⁶), asymptotic).
func TestLogNormalTail(t *testing.T) {
	law := must(NewLogNormal(0, 1))(t)
	for _, z := range []float64{9, 12, 20} {
		want := math.Exp(-z*z/2) / math.Sqrt(2*math.Pi) / z * (1 - 1/(z*z) + 3/math.Pow(z, 4) - 15/math.Pow(z, 6))
		if got := law.Survival(math.Exp(z)); math.Abs(got/want-1) > 105/math.Pow(z, 8) { // the next term of the series
			t.Errorf("survival at %v deviations is %v, want %v", z, got, want)
		}
	}
}

func TestSeverityRefuses(t *testing.T) {
	inf := math.Inf(1)
	for name, err := range map[string]error{
		"sigma 0": second(NewLogNormal(1, 0)), "mu NaN": second(NewLogNormal(math.NaN(), 1)), "mean -1": second(NewLogNormalOf(-1, 1)), "cv 0": second(NewLogNormalOf(1, 0)),
		"shape 0": second(NewGamma(0, 1)), "scale inf": second(NewGamma(1, inf)), "weibull": second(NewWeibull(-1, 1)), "exponential": second(NewExponential(0)),
		"threshold 0": second(NewPareto(0, 1, inf)), "alpha 0": second(NewPareto(1, 0, inf)), "ceiling below": second(NewPareto(10, 1, 5)), "beta": second(NewGeneralisedPareto(1, 0.5, 0, inf)),
		"xi NaN": second(NewGeneralisedPareto(1, math.NaN(), 1, inf)), "negative threshold": second(NewGeneralisedPareto(-1, 0.5, 1, inf)),
	} {
		if err == nil {
			t.Errorf("%s was accepted", name)
		}
	}
}

// TestEventHistory: simulated totals follow the fitted law, and the parts keep the dependence between classes.
func TestEventHistory(t *testing.T) {
	losses := danish(t)
	h := must(NewEventHistory(losses, []string{"b", "c", "p"}, 10, 1000))(t)
	if h.Fit().Count != 109 || h.Losses() != 2167 || h.Largest() != 263.250366 {
		t.Errorf("fit %+v, %d losses, largest %v", h.Fit(), h.Losses(), h.Largest())
	}
	// Empirical below the threshold; GPD tail: VaR .99 = 27.29 without the ceiling, 27.2 with it (data facts: 27.2899876449).
	if s := h.Survival(10); math.Abs(s-109.0/2167) > 1e-12 {
		t.Errorf("survival at the threshold %v", s)
	}
	if s := h.Survival(27.2899876449); math.Abs(s-0.01) > 2e-4 { // the cut at 1000 takes about 1e-4 off
		t.Errorf("survival at the published quantile %v, want .01", s)
	}
	r := rand.New(rand.NewPCG(1, 1))
	const n = 100_000
	class := map[string]uint16{"b": 0, "c": 1, "p": 2}
	sums, hits, both := [3]float64{}, [3]int{}, 0
	for range n {
		rows := h.appendEvent(nil, canonical{}, class, r)
		for _, row := range rows {
			sums[row.class] += row.loss / n
			hits[row.class]++
		}
		if len(rows) == 3 {
			both++
		}
	}
	// Shares of losses that hit each part: 1990, 1679, 616 of 2167, all three 517 (data facts). Means within 5 %: the tail is modelled.
	for k, want := range []float64{1990, 1679, 616} {
		if p := want / 2167; math.Abs(float64(hits[k])/n-p) > 4*math.Sqrt(p*(1-p)/n)+0.01 {
			t.Errorf("part %d is hit in %v of events, history %v", k, float64(hits[k])/n, p)
		}
	}
	if math.Abs(float64(both)/n-517.0/2167) > 0.012 {
		t.Errorf("all parts hit in %v of events, history %v", float64(both)/n, 517.0/2167)
	}
	for k, want := range []float64{1.82440805166, 1.31854437264, 0.242135874275} {
		if math.Abs(sums[k]/want-1) > 0.06 {
			t.Errorf("mean of part %d is %v, history %v", k, sums[k], want)
		}
	}
	if _, err := NewEventHistory(losses, []string{"b", "c", "p"}, 50, math.Inf(1)); err == nil {
		t.Error("a tail without a mean (threshold 50, ξ > 1) was accepted")
	}
	if _, err := NewEventHistory(losses, []string{"b", "c", "p"}, 250, math.Inf(1)); err == nil {
		t.Error("a tail of one loss was accepted")
	}
}
