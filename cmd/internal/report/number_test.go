package report

import (
	"math"
	"strconv"
	"strings"
	"testing"

	"cedewright/optimize"

	"pgregory.net/rapid"
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
		{12.34567e6, 0.1951e6, "12.3m ± 0.2m"}, {12.34567e6, 0.0996e6, "12.35m ± 0.10m"}, // rounding an error up must not show a digit less or more
		{5e6, math.NaN(), "5m"}, {5e6, math.Inf(1), "5m"}, {-5e6, -1, "−5m"},
	} {
		if got := Estimated(est(c.value, c.err)); got != c.want {
			t.Errorf("%v ± %v is written %q, want %q", c.value, c.err, got, c.want)
		}
	}
	for _, c := range []struct {
		value, err float64
		want       string
	}{{0.0553, 0.0041, "5.5 % ± 0.4 %"}, {1.8912, 0.052, "189 % ± 5 %"}, {0.09, 0, "9 %"}, {math.NaN(), 0, "–"}} {
		if got := EstimatedPercent(est(c.value, c.err)); got != c.want {
			t.Errorf("%v ± %v is written %q, want %q", c.value, c.err, got, c.want)
		}
	}
}

func TestNumbersWithoutError(t *testing.T) {
	for x, want := range map[float64]string{0: "0", 25e6: "25m", 1.5e9: "1.5bn", 750e3: "750k", 999999.9: "1m", 12: "12", math.Inf(1): "unlimited", -2.5e6: "−2.5m", 0.3e6: "300k"} {
		if got := Money(x); got != want {
			t.Errorf("money %v is written %q, want %q", x, got, want)
		}
	}
	// A contract's terms keep their digits.
	for x, want := range map[float64]string{12_345_678: "12.345678m", 40e6: "40m", 0.1 + 0.2: "0.3", math.Inf(1): "unlimited", 1_000_000_001: "1.000000001bn"} {
		if got := Terms(x); got != want {
			t.Errorf("terms %v are written %q, want %q", x, got, want)
		}
	}
	for p, want := range map[float64]string{0: "never", 1: "every year", 0.05: "1 in 20", 0.027: "1 in 37", 0.9: "1 in 1.11", 1e-5: "1 in 100,000"} {
		if got := ReturnPeriod(p); got != want {
			t.Errorf("probability %v is written %q, want %q", p, got, want)
		}
	}
	if got := ReturnPeriod(math.NaN()); got != "–" {
		t.Errorf("no probability is written %q", got)
	}
	for _, c := range []struct {
		p, err float64
		want   string
	}{{0.05, 0.0007, "1 in 20.0"}, {0.43, 0.0016, "1 in 2.33"}, {1 / 649.0, 0.00012, "1 in 650"}, {1 / 649.0, 0.0009, "1 in 600"}, {0, 0, "never"}, {0.1, 0, "1 in 10"}} {
		if got := estimatedPeriod(est(c.p, c.err)); got != c.want {
			t.Errorf("probability %v ± %v is written %q, want %q", c.p, c.err, got, c.want)
		}
	}
	for want, amounts := range map[string][]float64{"m": {1003e6, 0.2e6, math.NaN(), math.Inf(1)}, "bn": {10e9}, "k": {2e3}, "": {0}} {
		if got := unitOf(amounts...).suffix; got != want {
			t.Errorf("%v are shown in %q, want %q", amounts, got, want)
		}
	}
	for x, want := range map[float64]string{1234: "1234", 12345: "12,345", -1234567: "−1,234,567", 0.004: "0", -0.004: "0"} {
		if got := fixed(x, 0); got != want {
			t.Errorf("%v is written %q, want %q", x, got, want)
		}
	}
	if got := percentTo(0.0144, 1, true) + percentTo(-0.02, 1, true) + percentTo(math.NaN(), 1, true); got != "+1.4 %−2.0 %–" {
		t.Errorf("percentages %q", got)
	}
}

// TestFiguresAreNoFinerThanTheirError reads back what was written: figure and error are whole multiples of a grain, a power of ten between
// a twentieth of the error and the error, and lie within half a grain of what they stand for.
func TestFiguresAreNoFinerThanTheirError(t *testing.T) {
	read := func(text string) (float64, error) {
		text = strings.NewReplacer("−", "-", ",", "", plusMinus, "").Replace(text)
		for _, u := range moneyUnits {
			if rest, ok := strings.CutSuffix(text, u.suffix); ok && u.suffix != "" {
				x, err := strconv.ParseFloat(rest, 64)
				return x * u.factor, err
			}
		}
		return strconv.ParseFloat(text, 64)
	}
	rapid.Check(t, func(t *rapid.T) {
		value, err := rapid.Float64Range(-5e9, 5e9).Draw(t, "value"), math.Pow(10, rapid.Float64Range(2, 9).Draw(t, "power"))
		text := Estimated(optimize.Estimate{Value: value, StandardError: err})
		figure, shown := split(text)
		x, bad := read(figure)
		if bad != nil {
			t.Fatalf("%q: %v", text, bad)
		}
		e, bad := read(shown)
		if bad != nil {
			t.Fatalf("%q: %v", text, bad)
		}
		grain := math.Pow(10, math.Floor(math.Log10(err)))
		if err < 1.95*grain {
			grain /= 10
		}
		const slack = 1 + 1e-6 // arithmetic of the check itself
		coarse := grain        // of the figure, which has four digits at most, counted where it starts before it is rounded
		if value != 0 {
			coarse = max(grain, math.Pow(10, math.Floor(math.Log10(math.Abs(value)))-3))
		}
		for i, pair := range [][2]float64{{x, value}, {e, err}} {
			grain := []float64{coarse, grain}[i]
			if math.Abs(pair[0]-pair[1]) > 0.5*grain*slack {
				t.Fatalf("%v ± %v is written %q: %v is off by more than half a grain of %v", value, err, text, pair[0], grain)
			}
			if k := pair[0] / grain; math.Abs(k-math.Round(k)) > 1e-6*max(1, math.Abs(k)) {
				t.Fatalf("%v ± %v is written %q: finer than the grain %v", value, err, text, grain)
			}
		}
	})
}

func TestHarmless(t *testing.T) {
	for text, want := range map[string]string{
		"=1+1": "'=1+1", "+x": "'+x", "-x": "'-x", "@x": "'@x", "\tx": "'\tx", "\rx": "'\rx", " =1": "' =1", "\u00a0=1": "'\u00a0=1", "plain": "plain", "": "", "a=1": "a=1", "60m": "60m",
	} {
		if got := harmless(text); got != want {
			t.Errorf("%q becomes %q, want %q", text, got, want)
		}
	}
	if got := clean("a\x1b[31mb\nc\u202ed"); got != "a[31mb cd" {
		t.Errorf("clean gives %q", got)
	}
}
