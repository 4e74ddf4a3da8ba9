package capital

import (
	"math"
	"strings"
	"testing"
)

func stressTable(how Combination) Standard {
	return Standard{Name: "stress", Combination: how, Criteria: []Criterion{
		{Measure: ValueAtRisk, Level: level("90%"), Basis: Result, Ratio: 1.2, Weight: 0.25},
		{Measure: TailValueAtRisk, Level: level("80%"), Basis: Result, Ratio: 1, Weight: 0.75},
		{Measure: ValueAtRisk, Level: level("50%"), Basis: Deviation, Ratio: 2, Weight: 0},
	}}
}

// TestCombinations works a table of criteria out by hand on ten years, losses 1 to 10: value at risk 90 % is 9, tail value at risk 80 % 9.5.
func TestCombinations(t *testing.T) {
	losses := []float64{4, 2, 10, 1, 9, 3, 8, 5, 7, 6}
	s := stressTable(Worst)
	if got := s.Amount(losses, 5.5); math.Abs(got-10.8) > 1e-12 {
		t.Errorf("the worst is %v, want 120 %% of 9", got)
	}
	if amount, setBy := s.Combine([]float64{10.8, 9.5, -1}); amount != 10.8 || setBy != 0 {
		t.Errorf("%v set by %d", amount, setBy)
	}
	s.Criteria[0].Ratio = 1
	if got := s.Amount(losses, 5.5); got != 9.5 {
		t.Errorf("the worst is %v, want 9.5", got)
	}
	s = stressTable(Weighted)
	s.Criteria = s.Criteria[:2]
	if err := s.Validate(); err != nil {
		t.Error(err)
	}
	if got := s.Amount(losses, 5.5); math.Abs(got-(0.25*10.8+0.75*9.5)) > 1e-12 {
		t.Errorf("weighted: %v", got)
	}
	if got := s.Shares(-1); got[0] != 0.25 || got[1] != 0.75 {
		t.Errorf("shares %v", got)
	}
	if got := stressTable(Worst).Shares(1); got[0] != 0 || got[1] != 1 || got[2] != 0 {
		t.Errorf("shares %v", got)
	}
}

func TestBadStandards(t *testing.T) {
	zero := stressTable(Worst)
	zero.Criteria[1].Ratio, zero.Criteria[1].Level = 0, level("0")
	for _, c := range []struct {
		name string
		s    Standard
		want []string
	}{
		{"no part", Standard{Name: "n"}, []string{"standard n: 0 of criteria, formula and covariance"}},
		{"two parts", Standard{Name: "n", Formula: &Formula{}, Covariance: &Covariance{}}, []string{"2 of criteria"}},
		{"weights", stressTable(Weighted), []string{"criteria[2].weight", "weights of 100 %"}[:1]},
		{"ratio and level", zero, []string{"criteria[1].level", "criteria[1].ratio"}},
		{"weights short of 100 %", Standard{Name: "n", Combination: Weighted, Criteria: []Criterion{{Measure: ValueAtRisk, Level: level("90%"), Basis: Result, Ratio: 1, Weight: 0.9}}}, []string{"weights of 90 % together"}},
	} {
		err := c.s.Validate()
		if err == nil {
			t.Errorf("%s: no fault", c.name)
			continue
		}
		for _, want := range c.want {
			if !strings.Contains(err.Error(), want) {
				t.Errorf("%s: %v, want %q", c.name, err, want)
			}
		}
	}
	for _, name := range CombinationNames() {
		if _, err := ParseCombination(name); err != nil {
			t.Error(err)
		}
	}
	if _, err := ParseCombination("best"); err == nil {
		t.Error("an unknown combination was read")
	}
}

func TestCriterionInWords(t *testing.T) {
	for want, c := range map[string]Criterion{
		"value-at-risk 99.5%":                {Measure: ValueAtRisk, Level: level("99.5%"), Ratio: 1},
		"120 % of tail-value-at-risk 99%":    {Measure: TailValueAtRisk, Level: level("99%"), Ratio: 1.2},
		"62.5 % of tail-value-at-risk 99.8%": {Measure: TailValueAtRisk, Level: level("99.8%"), Ratio: 0.625},
	} {
		if got := c.String(); got != want {
			t.Errorf("%q, want %q", got, want)
		}
	}
}
