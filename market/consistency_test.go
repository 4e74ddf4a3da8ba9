package market

import (
	"encoding/json"
	"errors"
	"math"
	"math/rand/v2"
	"os"
	"testing"

	"pgregory.net/rapid"
)

// TestOracleConsistency: least total and least worst changes, feasibility at several half-widths of bid and offer, the interval of an unquoted layer and
// the band of g, on the oracle's own grid (testdata/oracles/B1_market_fit.json, solved with HiGHS).
func TestOracleConsistency(t *testing.T) {
	var o struct {
		P        []float64
		Matrix   [][]float64 `json:"tvar_matrix"`
		Quotes   []float64
		Expected struct {
			LAD      struct{ Objective float64 } `json:"lad_relative"`
			Minimax  struct{ Objective float64 } `json:"minimax_relative"`
			BidAsk3  struct{ Violation float64 } `json:"bidask_3"`
			BidAsk5  struct{ Violation float64 } `json:"bidask_5"`
			BidAsk8  struct{ Violation float64 } `json:"bidask_8"`
			Interval struct {
				Row       []float64 `json:"tvar_row"`
				Low, High float64
			} `json:"unquoted_layer_interval"`
			G struct{ Rows [][]float64 } `json:"g_interval"`
		}
	}
	data, err := os.ReadFile("../testdata/oracles/B1_market_fit.json")
	if err != nil {
		t.Fatal(err)
	}
	if err := json.Unmarshal(data, &o); err != nil {
		t.Fatal(err)
	}
	within := func(half float64) bounds {
		var b bounds
		for j, q := range o.Quotes {
			row := make([]float64, len(o.P))
			for k := range row {
				row[k] = o.Matrix[j][k] / q
			}
			b.rows, b.low, b.high = append(b.rows, row), append(b.low, 1-half), append(b.high, 1+half)
		}
		return b
	}
	total := func(b bounds) float64 {
		w, err := b.leastTotal()
		if err != nil {
			t.Fatal(err)
		}
		sum := 0.0
		for j := range b.rows {
			sum += math.Abs(b.change(j, w))
		}
		return sum
	}
	check := func(name string, got, want float64) {
		t.Helper()
		if math.Abs(got-want) > 1e-6*max(want, 1e-3) {
			t.Errorf("%s: %.12g, want %.12g", name, got, want)
		}
	}
	check("least total", total(within(0)), o.Expected.LAD.Objective)
	check("at ±3 %", total(within(0.03)), o.Expected.BidAsk3.Violation)
	check("at ±5 %", total(within(0.05)), o.Expected.BidAsk5.Violation)
	check("at ±8 %", total(within(0.08)), o.Expected.BidAsk8.Violation)
	w, err := within(0).leastWorst()
	if err != nil {
		t.Fatal(err)
	}
	worst := 0.0
	for j := range o.Quotes {
		worst = max(worst, math.Abs(within(0).change(j, w)))
	}
	check("least worst", worst, o.Expected.Minimax.Objective)
	low, high, err := within(0.1).extremes(o.Expected.Interval.Row)
	if err != nil {
		t.Fatal(err)
	}
	check("interval, low", low, o.Expected.Interval.Low)
	check("interval, high", high, o.Expected.Interval.High)
	for _, row := range o.Expected.G.Rows {
		target := make([]float64, len(o.P))
		for k, p := range o.P {
			target[k] = 1
			if p < 1 {
				target[k] = min(row[0]/(1-p), 1)
			}
		}
		low, high, err := within(0.1).extremes(target)
		if err != nil {
			t.Fatal(err)
		}
		check("band, low", low, row[1])
		check("band, high", high, row[2])
	}
	if _, _, err := within(0.05).extremes(o.Expected.Interval.Row); !errors.Is(err, errInfeasible) {
		t.Errorf("an interval within ±5 %%: %v, want infeasible", err)
	}
}

// TestConsistencyOfOneCurve: quotes of one curve are consistent, the band holds that curve, and an outlier is named.
func TestConsistencyOfOneCurve(t *testing.T) {
	truth := Wang{0.4}
	quotes := syntheticQuotes(9, truth)
	c, err := CheckConsistency(quotes, 0)
	if err != nil || !c.Consistent || c.Total != 0 {
		t.Errorf("%+v, %v", c, err)
	}
	probabilities := []float64{0.0005, 0.002, 0.01, 0.05, 0.2, 0.6}
	band, opened, err := Band(quotes, 0, probabilities)
	if err != nil || opened > 1e-3 {
		t.Fatalf("opened %v, %v", opened, err)
	}
	for i, s := range probabilities {
		if g := truth.At(s); g < band[i].Low*0.999 || g > band[i].High*1.001 {
			t.Errorf("g(%v) = %v lies outside %+v", s, g, band[i])
		}
	}
	// Relative width: at 0.05, amid the quotes (0.003 to 0.3), and at 0.0005, beyond them.
	if inside, outside := band[3].High/band[3].Low, band[0].High/band[0].Low; inside > 1.1 || outside-1 < 5*(inside-1) {
		t.Errorf("the band is %v wide amid the quotes and %v beyond them", inside, outside)
	}
	layer := Quote{Attachment: 0.07, Exhaustion: 0.03, ExpectedLoss: 0.046, RateOnLine: 0.1}
	interval, err := RateInterval(quotes, 0, layer)
	if want := layer.rate(truth, 0); err != nil || want < interval.Low*0.999 || want > interval.High*1.001 || interval.High/interval.Low > 1.1 {
		t.Errorf("an unquoted layer costs %v, the interval is %+v (%v)", want, interval, err)
	}
	quotes[4].RateOnLine *= 1.3
	c, err = CheckConsistency(quotes, 0)
	if err != nil || c.Consistent {
		t.Fatalf("an outlier is consistent: %v", err)
	}
	for j, change := range c.LeastTotal {
		if (change.Relative != 0) != (j == 4) {
			t.Errorf("quote %d is changed by %v; only quote 4 is at fault", j, change.Relative)
		}
	}
	if r := c.LeastTotal[4].Relative; r > -0.15 || r < -0.24 {
		t.Errorf("the outlier is changed by %v, want about 1/1.3 − 1", r)
	}
	if c.Worst >= c.Total {
		t.Errorf("worst %v, total %v", c.Worst, c.Total)
	}
	quotes[4].Bid = quotes[4].RateOnLine * 0.7
	if c, err := CheckConsistency(quotes, 0); err != nil || !c.Consistent {
		t.Errorf("a bid that reaches the others: %+v, %v", c, err)
	}
	if _, err := CheckConsistency(syntheticQuotes(mostConsistent+1, truth), 0); !errors.Is(err, ErrTooManyQuotes) {
		t.Errorf("%v", err)
	}
}

// TestRateIntervalOfOwnLayers: with free and paid reinstatements the interval holds the rate of the true curve, and its ends are rates of curves that
// price all quotes, as no member of a large family of such curves lies beyond them.
func TestRateIntervalOfOwnLayers(t *testing.T) {
	const brokerage = 0.1
	truth := Wang{0.4}
	var quotes []Quote
	for _, q := range syntheticQuotes(7, truth) {
		q.RateOnLine = q.rate(truth, brokerage)
		q.Bid, q.Offer = 0.95*q.RateOnLine, min(1.05*q.RateOnLine, 1)
		quotes = append(quotes, q)
	}
	b, opened, err := openBounds(quotes, brokerage)
	if err != nil || opened != 0 {
		t.Fatalf("opened %v, %v", opened, err)
	}
	r := rand.New(rand.NewPCG(3, 4))
	for _, layer := range mixedQuotes()[4:] {
		interval, err := RateInterval(quotes, brokerage, layer)
		if err != nil {
			t.Fatal(err)
		}
		within := func(what string, rate float64) {
			if rate < interval.Low*(1-1e-6) || rate > interval.High*(1+1e-6) {
				t.Errorf("%v: %s asks %v, outside %+v", layer.Terms.Reinstatements, what, rate, interval)
			}
		}
		within("the true curve", layer.rate(truth, brokerage))
		ends := make([][]float64, 0, 12)
		for range 12 { // curves that are extreme in some other direction, and mixtures of two of them, price all quotes too
			target := make([]float64, len(b.tails)+1)
			for k := range target {
				target[k] = r.NormFloat64()
			}
			_, w, err := b.extreme(target, 1)
			if err != nil {
				t.Fatal(err)
			}
			ends = append(ends, w)
		}
		for i := range ends {
			mixed := make([]float64, len(ends[i]))
			for k := range mixed {
				mixed[k] = (ends[i][k] + ends[(i+1)%len(ends)][k]) / 2
			}
			within("a curve", layer.rate(mixtureOf(ends[i], b.tails), brokerage))
			within("a mixture of curves", layer.rate(mixtureOf(mixed, b.tails), brokerage))
		}
	}
}

// TestConsistencyByProperty: whatever the quotes, the least worst change is at most the least total one, and widened bounds hold a curve.
func TestConsistencyByProperty(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		quotes := syntheticQuotes(rapid.IntRange(1, 6).Draw(t, "n"), Wang{0.3})
		for i := range quotes {
			quotes[i].RateOnLine = min(quotes[i].RateOnLine*rapid.Float64Range(1, 1.5).Draw(t, "noise"), 1)
		}
		c, err := CheckConsistency(quotes, 0)
		if err != nil {
			t.Fatal(err)
		}
		if c.Worst > c.Total+1e-9 {
			t.Fatalf("worst %v, total %v", c.Worst, c.Total)
		}
		band, _, err := Band(quotes, 0, []float64{0.001, 0.1})
		if err != nil {
			t.Fatal(err)
		}
		for _, b := range band {
			if b.Low > b.High+1e-9 {
				t.Fatalf("band %+v", band)
			}
		}
	})
}
