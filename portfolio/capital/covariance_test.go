package capital

import (
	"fmt"
	"math"
	"slices"
	"strings"
	"testing"

	"cedewright/portfolio/fault"
	"cedewright/portfolio/portfoliotest"

	"pgregory.net/rapid"
)

func riskBased() *Covariance {
	return &Covariance{Uncorrelated: 10, Charges: [5]float64{5, 8, 12, 40, 30}, Perils: []string{"hurricane", "earthquake"}, Level: level("1 in 100"), Multiple: 1}
}

// TestCovarianceAgainstWorkedNumbers: the worked numbers of testdata/published (computed from the formula).
func TestCovarianceAgainstWorkedNumbers(t *testing.T) {
	rows := portfoliotest.PublishedValues(t, projectRoot, "covariance")
	want := func(quantity string) float64 {
		return portfoliotest.Find(t, rows, "R0 to R5 10 5 8 12 40 30", quantity).Value
	}
	c := riskBased()
	got := c.Require([]PerilLoss{{Net: 20}, {Net: 15}})
	// The values are given to eight digits.
	if math.Abs(got.Catastrophe-want("Rcat of 20 and 15")) > 1e-7 || math.Abs(got.Total-want("total")) > 1e-7 {
		t.Errorf("%+v", got)
	}
	c.ContingentCredit = 0.048
	if got := c.Require([]PerilLoss{{Net: 20, Recoverable: 80}, {Net: 15, Recoverable: 35}}); math.Abs(got.Catastrophe-want("Rcat of 20 and 15 with 4.8 % of 80 and 35")) > 1e-7 {
		t.Errorf("%+v", got)
	}
	c.ContingentCredit, c.Multiple, c.Operational = 0, 0.5, 0.03
	if got := c.Require([]PerilLoss{{Net: 20}, {Net: 15}}).Total; math.Abs(got-0.515*want("total")) > 1e-7 {
		t.Errorf("half of it, with 3 %% for operational risk, is %v", got)
	}
}

func TestCovarianceByProperty(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		money := rapid.Float64Range(0, 100)
		c := &Covariance{Uncorrelated: money.Draw(t, "r0"), ContingentCredit: rapid.Float64Range(0, 1).Draw(t, "credit"), Operational: rapid.Float64Range(0, 0.2).Draw(t, "operational"), Multiple: rapid.Float64Range(0.1, 1).Draw(t, "multiple")}
		for i := range c.Charges {
			c.Charges[i] = money.Draw(t, "charge")
		}
		c.Charges[4]++ // something under the root
		var perils []PerilLoss
		for range rapid.IntRange(1, 4).Draw(t, "perils") {
			perils = append(perils, PerilLoss{rapid.Float64Range(-20, 100).Draw(t, "net"), rapid.Float64Range(-20, 100).Draw(t, "recoverable")})
		}
		total := c.Require(perils).Total
		parts, sum := c.Parts(perils), 0.0
		for _, x := range parts.Perils {
			sum += x
		}
		for _, x := range parts.Charges {
			sum += x
		}
		if math.Abs(sum-total) > 1e-9*total {
			t.Fatalf("the parts add up to %v, the whole is %v", sum, total)
		}
		twice := *c
		twice.Uncorrelated *= 2
		for i := range twice.Charges {
			twice.Charges[i] *= 2
		}
		var doubled []PerilLoss
		for _, p := range perils {
			doubled = append(doubled, PerilLoss{2 * p.Net, 2 * p.Recoverable})
		}
		if got := twice.Require(doubled).Total; got != 2*total {
			t.Fatalf("twice everything asks %v, not twice %v", got, total)
		}
		more := *c
		more.Charges[rapid.IntRange(0, 4).Draw(t, "raised")] += money.Draw(t, "rise")
		if got := more.Require(perils).Total; got < total {
			t.Fatalf("a greater charge asks less: %v, %v", got, total)
		}
		slopes := c.Slopes(perils)
		const step = 1e-4
		for i := range perils {
			if math.Abs(perils[i].Net) < 2*step || math.Abs(perils[i].Recoverable) < 2*step {
				continue // beside a kink
			}
			for _, k := range []struct {
				at    *float64
				slope float64
			}{{&perils[i].Net, slopes[i].Net}, {&perils[i].Recoverable, slopes[i].Recoverable}} {
				before := *k.at
				*k.at = before + step
				up := c.Require(perils).Total
				*k.at = before - step
				down := c.Require(perils).Total
				*k.at = before
				// Central differences err by step² times a third derivative, at most about 1/(root²), and by rounding over the step.
				if got := (up - down) / (2 * step); math.Abs(got-k.slope) > 1e-6 {
					t.Fatalf("slope %v, the difference says %v", k.slope, got)
				}
				if up < down-1e-12*total {
					t.Fatalf("more loss asks less: %v, %v", down, up)
				}
			}
		}
	})
}

func TestCovarianceOfNothing(t *testing.T) {
	c := &Covariance{Perils: []string{"a"}, Level: level("99%"), Multiple: 1}
	none := []PerilLoss{{}}
	if got := c.Require(none).Total; got != 0 {
		t.Errorf("nothing asks %v", got)
	}
	if s := c.Slopes(none); s[0] != (PerilLoss{}) {
		t.Errorf("slopes %v", s)
	}
	if p := c.Parts(none); p.Perils[0] != 0 || p.Charges != [6]float64{} {
		t.Errorf("parts %v", p)
	}
}

func TestBadCovariances(t *testing.T) {
	if err := riskBased().Validate(); err != nil {
		t.Fatal(err)
	}
	for want, spoil := range map[string]func(c *Covariance){
		"charges.r0: -1; allowed: money of at least 0":  func(c *Covariance) { c.Uncorrelated = -1 },
		"charges.r3: NaN; allowed: money of at least 0": func(c *Covariance) { c.Charges[2] = math.NaN() },
		"perils: no peril":              func(c *Covariance) { c.Perils = nil },
		`perils[1]: "hurricane" twice`:  func(c *Covariance) { c.Perils[1] = "hurricane" },
		"level: 0":                      func(c *Covariance) { c.Level = level("0") },
		"contingent_credit: 1.5":        func(c *Covariance) { c.ContingentCredit = 1.5 },
		"operational: -0.1":             func(c *Covariance) { c.Operational = -0.1 },
		"multiple: 0; allowed: above 0": func(c *Covariance) { c.Multiple = 0 },
	} {
		c := riskBased()
		spoil(c)
		if err := c.Validate(); err == nil || !strings.Contains(err.Error(), want) || strings.Contains(err.Error(), "\n") {
			t.Errorf("%v, want %s", err, want)
		}
	}
	all := &Covariance{
		Uncorrelated: math.Inf(1), Charges: [5]float64{-1, 0, 0, 0, math.NaN()}, Perils: []string{"a", "b", "a", "a"},
		ContingentCredit: -1, Operational: math.NaN(), Multiple: math.NaN(),
	}
	var keys []string
	for _, f := range fault.All(all.Validate()) {
		keys = append(keys, f.Key)
	}
	want := []string{"charges.r0", "charges.r1", "charges.r5", "perils[2]", "perils[3]", "level", "contingent_credit", "operational", "multiple"}
	if !slices.Equal(keys, want) {
		t.Errorf("faults at %q, want %q", keys, want)
	}
}

// TestCovarianceWhereNothingIsModelled: with Rcat 0 the given charges alone are asked for, no peril has a slope or a part, and losses below 0 count as 0.
func TestCovarianceWhereNothingIsModelled(t *testing.T) {
	c := riskBased()
	c.ContingentCredit = 0.048
	for _, perils := range [][]PerilLoss{nil, {{}, {}}, {{Net: -5, Recoverable: -7}, {Net: -1}}} {
		got := c.Require(perils)
		if want := 10 + math.Sqrt(5*5+8*8+12*12+40*40+30*30); got.Catastrophe != 0 || math.Abs(got.Total-want) > 1e-13 { // one rounding
			t.Errorf("%+v, want %v", got, want)
		}
		for i, s := range c.Slopes(perils) {
			if s != (PerilLoss{}) || c.Parts(perils).Perils[i] != 0 {
				t.Errorf("peril %d: slope %+v, part %v", i, s, c.Parts(perils).Perils[i])
			}
		}
	}
}

func TestCovarianceAllocatesNothing(t *testing.T) {
	c, perils := riskBased(), []PerilLoss{{20, 80}, {15, 35}}
	if n := testing.AllocsPerRun(10, func() { c.Require(perils) }); n != 0 {
		t.Errorf("%v allocations a run", n)
	}
}

func ExampleCovariance_Require() {
	c := Covariance{Uncorrelated: 10, Charges: [5]float64{5, 8, 12, 40, 30}, Perils: []string{"windstorm"}, ContingentCredit: 0.05, Multiple: 0.5}
	f := c.Require([]PerilLoss{{Net: 25, Recoverable: 100}})
	fmt.Printf("%.1f %.2f\n", f.Catastrophe, f.Total)
	// Output: 30.0 35.14
}
