package market

import (
	"math"
	"strings"
	"testing"

	"pgregory.net/rapid"
)

func TestTurn(t *testing.T) {
	c := Curve{Name: "wind", Distortion: Wang{0.4}, MinimumRateOnLine: 0.01}
	hard, err := Scenario{Name: "hard", RateChange: 0.2}.Turn(c)
	if err != nil {
		t.Fatal(err)
	}
	for _, s := range []float64{0.001, 0.01, 0.1, 0.3} {
		// 0.1 %: chords of a smooth curve between knots 5 % apart.
		if got, want := hard.Distortion.At(s), 1.2*c.Distortion.At(s); math.Abs(got/want-1) > 1e-3 {
			t.Errorf("at %v: %v, want %v", s, got, want)
		}
	}
	if g := hard.Distortion.At(0.9); g > 1 {
		t.Errorf("a price above the limit: %v", g)
	}
	part, err := Scenario{Name: "top", RateChange: 0.5, From: 0, To: 0.01, MinimumRateOnLine: 0.02}.Turn(c)
	if err != nil {
		t.Fatal(err)
	}
	if got := part.Distortion.At(0.002) / c.Distortion.At(0.002); math.Abs(got-1.5) > 2e-3 {
		t.Errorf("within the range prices rise by %v", got-1)
	}
	if got := part.Distortion.At(0.2) / c.Distortion.At(0.2); got > 1.02 {
		t.Errorf("far from the range prices rise by %v", got-1)
	}
	if part.MinimumRateOnLine != 0.02 {
		t.Errorf("minimum rate on line %v", part.MinimumRateOnLine)
	}
	soft, err := Scenario{Name: "soft", RateChange: -0.9}.Turn(c)
	if err != nil || soft.Distortion.At(0.1) < 0.1 {
		t.Errorf("prices fall below the expected loss: %v (%v)", soft.Distortion.At(0.1), err)
	}
	other, err := Scenario{Name: "hard", RateChange: 0.2, Curves: []string{"casualty"}}.Turn(c)
	if err != nil || other.Distortion != c.Distortion {
		t.Errorf("a curve that is not named is turned (%v)", err)
	}
	jump, err := Scenario{Name: "hard", RateChange: 0.1}.Turn(Curve{Name: "c", Distortion: ConstantCostOfCapital{0.02}})
	if want := 1.1 * 0.02 / 1.02; err != nil || math.Abs(jump.Distortion.At(1e-9)/want-1) > 1e-3 {
		t.Errorf("a jump at 0 becomes %v, want %v (%v)", jump.Distortion.At(1e-9), want, err)
	}
	scarce, err := Scenario{Name: "scarce", CapacityTo: 250}.Turn(c)
	if err != nil || scarce.Capacity != 0.004 || scarce.Distortion != c.Distortion {
		t.Errorf("capacity up to 1 in 250 is %v (%v)", scarce.Capacity, err)
	}
	for message, s := range map[string]Scenario{
		"capacity_to: 1; allowed":                    {Name: "x", CapacityTo: 1},
		"rate_change: -1; allowed":                   {Name: "x", RateChange: -1},
		"from 0.2 to 0.1; allowed":                   {Name: "x", From: 0.2, To: 0.1},
		"minimum_rate_on_line: 2; allowed":           {Name: "x", MinimumRateOnLine: 2},
		`no curve is named "wnd"; allowed: ["wind"]`: {Name: "x", Curves: []string{"wnd"}},
		"name: no name":                              {},
	} {
		if err := s.Validate([]string{"wind"}); err == nil || !strings.Contains(err.Error(), message) {
			t.Errorf("got %v, want %s", err, message)
		}
	}
}

// TestTurnByProperty: whatever the turn, the curve stays a concave distortion, and asks no less than the turned prices.
func TestTurnByProperty(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		c := Curve{Name: "c", Distortion: anyDistortion(t)}
		s := Scenario{Name: "s", RateChange: rapid.Float64Range(-0.9, 2).Draw(t, "change")}
		if rapid.Bool().Draw(t, "range") {
			s.From = rapid.Float64Range(0, 0.5).Draw(t, "from")
			s.To = s.From + rapid.Float64Range(0.01, 0.5).Draw(t, "width")
		}
		turned, err := s.Turn(c)
		if err != nil {
			t.Fatal(err)
		}
		for _, p := range []float64{0.0003, 0.01, 0.2, 0.7} {
			want := c.Distortion.At(p)
			if s.To == 0 || p >= s.From && p <= s.To {
				want = min(max(want*(1+s.RateChange), p), 1)
			}
			if got := turned.Distortion.At(p); got < want*(1-0.013) { // chords between knots
				t.Fatalf("%v of %v at %v: %v, want at least %v", s, c.Distortion, p, got, want)
			}
		}
	})
}
