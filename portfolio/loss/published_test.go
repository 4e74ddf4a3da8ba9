package loss_test

import (
	"fmt"
	"math"
	"math/rand/v2"
	"strings"
	"testing"

	"cedewright/portfolio/loss"
	"cedewright/portfolio/portfoliotest"
	"cedewright/portfolio/sample"
	"cedewright/portfolio/treaty"
)

const projectRoot = "../.."

// faces is the law of a die: faces[i] is the probability of a loss of i + 1.
type faces []float64

func (f faces) Mean() float64                        { return math.NaN() } // none of the three is asked for
func (f faces) Survival(float64) float64             { return math.NaN() }
func (f faces) LimitedExpectedValue(float64) float64 { return math.NaN() }
func (f faces) String() string                       { return "die" }
func (f faces) Draw(r *rand.Rand) float64 {
	u, face := r.Float64(), 1
	for _, p := range f[:len(f)-1] {
		if u < p {
			break
		}
		u -= p
		face++
	}
	return float64(face)
}

// publishedModel gives frequency and severity of a published case such as "poisson 3 exponential 1000".
func publishedModel(t *testing.T, name string) (loss.Frequency, loss.Severity) {
	t.Helper()
	exponential, err := loss.NewExponential(1000)
	if err != nil {
		t.Fatal(err)
	}
	uneven, die := faces{.5, .3, .2}, faces{1. / 6, 1. / 6, 1. / 6, 1. / 6, 1. / 6, 1. / 6}
	switch name {
	case "poisson 0.5 exponential 1000":
		return loss.Poisson{Rate: 0.5}, exponential
	case "poisson 3 exponential 1000":
		return loss.Poisson{Rate: 3}, exponential
	case "poisson 10 exponential 1000":
		return loss.Poisson{Rate: 10}, exponential
	case "geometric 2 exponential 1000": // a negative binomial of size 1
		return loss.NegativeBinomial{Expected: 2, Size: 1}, exponential
	case "negative binomial 3 1 exponential 1000": // r = 3, β = 1
		return loss.NegativeBinomial{Expected: 3, Size: 3}, exponential
	case "poisson 4 severity 1 2 3 with 1/4 1/2 1/4":
		return loss.Poisson{Rate: 4}, faces{.25, .5, .25}
	case "negative binomial 2 1 severity 1 2 3 with .5 .3 .2":
		return loss.NegativeBinomial{Expected: 2, Size: 2}, uneven
	case "binomial 5 .2 severity 1 2 3 with .5 .3 .2":
		return loss.Binomial{Trials: 5, Probability: .2}, uneven
	case "poisson 1 severity 1 2 3 4 5 6 with 1/6 each":
		return loss.Poisson{Rate: 1}, die
	}
	t.Fatalf("no model %q", name)
	return nil, nil
}

// simulatedTable gives the years of one model, alone in its book; every model has random numbers of its own.
func simulatedTable(t *testing.T, years int, f loss.Frequency, s loss.Severity) *loss.Table {
	t.Helper()
	table, err := loss.NewBuilder(years, []string{"a"}).Simulate(21, []loss.Model{{
		Name: f.String() + " of " + s.String(), Peril: "p", Frequency: f, Severity: s, Split: []loss.Share{{Class: "a", Fraction: 1}},
	}}, nil, 2)
	if err != nil {
		t.Fatal(err)
	}
	return table
}

func sampleOf(t *testing.T, values []float64) sample.Sample {
	t.Helper()
	s, err := sample.New(values)
	if err != nil {
		t.Fatal(err)
	}
	return s
}

// share gives the part of values for which a condition holds, and its standard error.
func share(values []float64, holds func(float64) bool) (value, standardError float64) {
	count, n := 0, float64(len(values))
	for _, x := range values {
		if holds(x) {
			count++
		}
	}
	p := float64(count) / n
	return p, math.Sqrt(p * (1 - p) / n)
}

// average gives the mean of f over values, and its standard error.
func average(values []float64, f func(float64) float64) (value, standardError float64) {
	terms := make([]float64, len(values))
	for i, x := range values {
		terms[i] = f(x)
	}
	return sample.Sum(terms) / float64(len(terms)), sample.InfluenceError(terms)
}

// estimate gives what a published quantity names, of a simulated sample, and its standard error.
func estimate(t *testing.T, annual []float64, s sample.Sample, quantity string) (value, standardError float64) {
	t.Helper()
	at := append(portfoliotest.Numbers(quantity), 0)[0]
	mean, deviation := s.Mean(), s.StandardDeviation()
	switch name := strings.TrimRight(quantity, "0123456789.% "); name {
	case "mean":
		return mean, s.MeanError()
	case "variance", "standard deviation":
		_, squares := average(annual, func(x float64) float64 { return (x - mean) * (x - mean) })
		if name == "variance" {
			return deviation * deviation, squares
		}
		return deviation, squares / (2 * deviation)
	case "skewness":
		skewness, _ := average(annual, func(x float64) float64 {
			z := (x - mean) / deviation
			return z * z * z
		})
		_, err := average(annual, func(x float64) float64 { // the influence on a quotient of moments
			z := (x - mean) / deviation
			return z*z*z - 3*z - 1.5*skewness*z*z
		})
		return skewness, err
	case "no loss":
		return share(annual, func(x float64) bool { return x == 0 })
	case "F":
		return share(annual, func(x float64) bool { return x <= at })
	case "occurrence":
		return share(annual, func(x float64) bool { return x > at })
	case "stop loss":
		return average(annual, func(x float64) float64 { return max(x-at, 0) })
	case "VaR", "TVaR":
		l, err := sample.LevelOf(math.Round(at*10) / 1000)
		if err != nil {
			t.Fatal(err)
		}
		if name == "VaR" {
			return s.VaR(l), s.VaRError(l)
		}
		return s.TVaR(l), s.TVaRError(l)
	}
	t.Fatalf("no quantity %q", quantity)
	return 0, 0
}

// TestPublishedAggregateLosses simulates compound laws and measures them (testdata/published, tables aggregate loss and compound sum), each
// figure within four of the standard errors that are stated with it.
func TestPublishedAggregateLosses(t *testing.T) {
	years := map[string]int{"poisson 10 exponential 1000": 100_000} // others 200,000; ten events a year take time
	for _, name := range []string{"aggregate loss", "compound sum"} {
		annual, largest, samples := map[string][]float64{}, map[string][]float64{}, map[string]sample.Sample{}
		for _, p := range portfoliotest.PublishedValues(t, projectRoot, name) {
			if annual[p.Case] == nil {
				n := years[p.Case]
				if n == 0 {
					n = 200_000
				}
				f, severity := publishedModel(t, p.Case)
				table := simulatedTable(t, n, f, severity)
				annual[p.Case], largest[p.Case] = table.Annual(-1, -1), table.Largest(-1, -1)
				samples[p.Case] = sampleOf(t, annual[p.Case])
			}
			values := annual[p.Case]
			if strings.HasPrefix(p.Quantity, "occurrence") {
				values = largest[p.Case]
			}
			if name == "compound sum" && strings.HasPrefix(p.Quantity, "VaR") {
				// A step of the distribution ends so near to 99 % that the sample's quantile may be the next value: the published one must be a
				// quantile up to four errors of a share of years.
				level := portfoliotest.Numbers(p.Quantity)[0] / 100
				below, belowError := share(values, func(x float64) bool { return x < p.Value })
				upTo, upToError := share(values, func(x float64) bool { return x <= p.Value })
				if below > level+4*belowError || upTo < level-4*upToError {
					t.Errorf("%s, %s: %v of years are below %v, %v up to it", p.Case, p.Quantity, below, p.Value, upTo)
				}
				continue
			}
			got, err := estimate(t, values, samples[p.Case], p.Quantity)
			if !(math.Abs(got-p.Value) <= 4*err) || err > 0.02*math.Abs(p.Value)+0.002 { // a greater error would test little
				t.Errorf("%s, %s: %.6g ± %.2g, want %.10g", p.Case, p.Quantity, got, err, p.Value)
			}
		}
	}
}

// TestPublishedDie: sums of a Poisson number of throws of a fair die (testdata/published, table panjer).
func TestPublishedDie(t *testing.T) {
	const name = "poisson 1 severity 1 2 3 4 5 6 with 1/6 each"
	f, severity := publishedModel(t, name)
	annual, checked := simulatedTable(t, 200_000, f, severity).Annual(-1, -1), 0
	for _, p := range portfoliotest.PublishedValues(t, projectRoot, "panjer") {
		if p.Case != name {
			continue
		}
		checked++
		if got, err := share(annual, func(x float64) bool { return fmt.Sprintf("f%v", x) == p.Quantity }); math.Abs(got-p.Value) > 4*err {
			t.Errorf("%s: %v ± %.2g, want %v", p.Quantity, got, err, p.Value)
		}
	}
	if checked != 5 {
		t.Errorf("%d published values", checked)
	}
}

// TestPublishedReturnPeriods: the rates of events above a loss by frequency and severity, and the largest event of a year that they let expect
// (testdata/published, tables occurrence rate and return period).
func TestPublishedReturnPeriods(t *testing.T) {
	f, severity := publishedModel(t, "poisson 3 exponential 1000")
	for _, p := range portfoliotest.PublishedValues(t, projectRoot, "occurrence rate") {
		if got := f.Mean() * severity.Survival(portfoliotest.Numbers(p.Quantity)[0]); math.Abs(got-p.Value) > 0.6e-10 { // printed with ten decimals
			t.Errorf("rate above %s: %.12f, want %v", p.Quantity, got, p.Value)
		}
	}
	rows := portfoliotest.PublishedValues(t, projectRoot, "return period")
	largest := sampleOf(t, simulatedTable(t, 200_000, f, severity).Largest(-1, -1))
	for _, period := range []string{"1 in 2", "1 in 10", "1 in 100", "1 in 200", "1 in 250"} {
		l, err := sample.ParseLevel(period)
		if err != nil {
			t.Fatal(err)
		}
		rate := portfoliotest.Find(t, rows, rows[0].Case, period+" rate").Value
		if got := -math.Log(l.Float()); math.Abs(got-rate) > 0.6e-10 { // printed with ten decimals
			t.Errorf("%s: rate %.12f, want %v", period, got, rate)
		}
		x := portfoliotest.Find(t, rows, rows[0].Case, period+" loss").Value
		if got := f.Mean() * severity.Survival(x); math.Abs(got/rate-1) > 0.6e-7 { // half of the fourth decimal of x, over the mean of 1,000
			t.Errorf("%s: the loss %v is exceeded at the rate %v, want %v", period, x, got, rate)
		}
		if got, err := largest.VaR(l), largest.VaRError(l); math.Abs(got-x) > 4*err || err > 0.02*x {
			t.Errorf("%s: largest event %v ± %.3g, want %v", period, got, err, x)
		}
	}
	if len(rows) != 10 {
		t.Errorf("%d rows", len(rows))
	}
}

// TestPublishedLayersOfEvents applies a layer without an annual limit to simulated years of Pareto events (testdata/published, table layer of
// events): moments within four standard errors; mean and rates also from frequency and severity, exactly.
func TestPublishedLayersOfEvents(t *testing.T) {
	const years = 200_000
	rows := portfoliotest.PublishedValues(t, projectRoot, "layer of events")
	for _, c := range []struct {
		name                                     string
		rate, threshold, alpha, limit, retention float64
	}{{"poisson 2 pareto 1 1.5 layer 3 xs 2", 2, 1, 1.5, 3, 2}, {"poisson 0.5 pareto 1 1.2 layer 15 xs 5", 0.5, 1, 1.2, 15, 5}} {
		want := func(quantity string) float64 { return portfoliotest.Find(t, rows, c.name, quantity).Value }
		severity, err := loss.NewPareto(c.threshold, c.alpha, math.Inf(1))
		if err != nil {
			t.Fatal(err)
		}
		top := c.retention + c.limit
		for quantity, got := range map[string]float64{
			"mean":            c.rate * (severity.LimitedExpectedValue(top) - severity.LimitedExpectedValue(c.retention)),
			"entry rate":      c.rate * severity.Survival(c.retention),
			"exhaustion rate": c.rate * severity.Survival(top),
			"no loss":         math.Exp(-c.rate * severity.Survival(c.retention)),
		} {
			if math.Abs(got-want(quantity)) > 0.6e-10 { // printed with ten decimals
				t.Errorf("%s, %s: %.12f, want %v", c.name, quantity, got, want(quantity))
			}
		}
		outcome, err := treaty.Apply(simulatedTable(t, years, loss.Poisson{Rate: c.rate}, severity), treaty.Programme{Treaties: []treaty.Treaty{
			{Name: "layer", Kind: treaty.EventExcess, Retention: c.retention, Limit: c.limit, Share: 1},
		}})
		if err != nil {
			t.Fatal(err)
		}
		layer := outcome.Treaties[0]
		s := sampleOf(t, layer.Recovery)
		for _, quantity := range []string{"mean", "variance", "no loss"} {
			if got, err := estimate(t, layer.Recovery, s, quantity); math.Abs(got-want(quantity)) > 4*err || err > 0.02*want(quantity) {
				t.Errorf("%s, %s: %v ± %.2g, want %v", c.name, quantity, got, err, want(quantity))
			}
		}
		// Years with at least one event above either end: 1 − exp(−rate).
		for quantity, got := range map[string]float64{"entry rate": layer.AttachmentProbability, "exhaustion rate": layer.ExhaustionProbability} {
			p := -math.Expm1(-want(quantity))
			if math.Abs(got-p) > 4*math.Sqrt(p*(1-p)/years) {
				t.Errorf("%s, %s: in %v of years, want %v", c.name, quantity, got, p)
			}
		}
	}
}
