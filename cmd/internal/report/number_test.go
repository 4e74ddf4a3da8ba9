package report

import (
	"math"
	"testing"

	"cedewright/optimize"
)

func TestNumbersShowWhatTheErrorAllows(t *testing.T) {
	for _, c := range []struct {
		value, err float64
		want       string
	}{
		{12.34567e6, 0.4321e6, "12.3m ± 0.4m"}, {12.34567e6, 0.1321e6, "12.35m ± 0.13m"}, {12.34567e6, 2.3e6, "12m ± 2m"},
		{368.4e6, 11.2e6, "368m ± 11m"}, {1.5e9, 0.21e9, "1.5bn ± 0.2bn"}, {-13.02e6, 0.42e6, "−13.0m ± 0.4m"},
		{0, 0, "0"}, {1234, 0, "1.234k"}, {999.9e6, 0, "999.9m"}, {math.NaN(), 1, "–"}, {math.Inf(1), 0, "–"},
		{0.4e6, 0.5e6, "400k ± 500k"}, {5e6, 60e6, "10m ± 60m"}, {-0.2, 3, "0 ± 3"},
	} {
		if got := Estimated(optimize.Estimate{Value: c.value, StandardError: c.err}); got != c.want {
			t.Errorf("%v ± %v is written %q, want %q", c.value, c.err, got, c.want)
		}
	}
	for _, c := range []struct {
		value, err float64
		want       string
	}{{0.0553, 0.0041, "5.5 % ± 0.4 %"}, {1.8912, 0.052, "189 % ± 5 %"}, {0.09, 0, "9 %"}} {
		if got := EstimatedPercent(optimize.Estimate{Value: c.value, StandardError: c.err}); got != c.want {
			t.Errorf("%v ± %v is written %q, want %q", c.value, c.err, got, c.want)
		}
	}
	for x, want := range map[float64]string{0: "0", 25e6: "25m", 1.5e9: "1.5bn", 750e3: "750k", 999999.9: "1m", 12: "12", math.Inf(1): "unlimited", -2.5e6: "−2.5m", 0.3e6: "300k"} {
		if got := Money(x); got != want {
			t.Errorf("money %v is written %q, want %q", x, got, want)
		}
	}
	for p, want := range map[float64]string{0: "never", 1: "every year", 0.05: "1 in 20", 0.027: "1 in 37", 0.9: "1 in 1.11"} {
		if got := ReturnPeriod(p); got != want {
			t.Errorf("probability %v is written %q, want %q", p, got, want)
		}
	}
	for text, want := range map[string]string{"=1+1": "'=1+1", "+x": "'+x", "-x": "'-x", "@x": "'@x", "\tx": "'\tx", "plain": "plain", "": ""} {
		if got := harmless(text); got != want {
			t.Errorf("%q becomes %q, want %q", text, got, want)
		}
	}
}

func TestNiceNumbers(t *testing.T) {
	for x, want := range map[float64]float64{0.3: 0.5, 1: 1, 1.1: 2, 3: 5, 7: 10, 0: 1} {
		if got := niceStep(x); got != want {
			t.Errorf("step for %v is %v, want %v", x, got, want)
		}
	}
	a := axis{low: 0, high: 103, from: 0, to: 100}
	if ticks := a.ticks(5); len(ticks) < 3 || len(ticks) > 7 {
		t.Errorf("ticks %v", ticks)
	}
	if a.at(-5) != 0 || a.at(1e9) != 100 || a.at(51.5) != 50 {
		t.Errorf("places %v %v %v", a.at(-5), a.at(1e9), a.at(51.5))
	}
}
