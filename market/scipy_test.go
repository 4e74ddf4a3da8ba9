package market

import (
	"encoding/json"
	"math"
	"os"
	"testing"
)

// TestAgainstScipy: the quotes of the shipped study fitted with scipy 1.10 (testdata/oracles/fit_by_scipy.json, made by the script beside it): parameters and
// objectives of families with adaptive quadrature, and the free curve's least squares (SLSQP), least absolute and least worst errors (HiGHS) on
// the same knots.
func TestAgainstScipy(t *testing.T) {
	data, err := os.ReadFile("../testdata/oracles/fit_by_scipy.json")
	if err != nil {
		t.Fatal(err)
	}
	var want struct {
		Wang     struct{ Parameter, Objective float64 }
		PH       struct{ Parameter, Objective float64 } `json:"proportional_hazard"`
		Dual     struct{ Parameter, Objective float64 } `json:"dual_power"`
		Squares  float64                                `json:"free_squares"`
		Absolute float64                                `json:"free_absolute"`
		Worst    float64                                `json:"free_worst"`
	}
	if err := json.Unmarshal(data, &want); err != nil {
		t.Fatal(err)
	}
	f, err := os.Open("../configs/marram-coast-quotes.csv")
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	all, err := ReadQuotes(f, "quotes", "EUR")
	if err != nil {
		t.Fatal(err)
	}
	var quotes []Quote
	for _, q := range all {
		if q.Curve == "property" {
			quotes = append(quotes, q)
		}
	}
	for _, c := range []struct {
		family               string
		parameter, objective float64
	}{{FamilyWang, want.Wang.Parameter, want.Wang.Objective}, {FamilyProportionalHazard, want.PH.Parameter, want.PH.Objective}, {FamilyDualPower, want.Dual.Parameter, want.Dual.Objective}} {
		fit, err := FitFamily(c.family, quotes, 0.1)
		if err != nil {
			t.Fatal(err)
		}
		// The parameter of a flat minimum is known to the root of the objective's precision.
		if math.Abs(fit.Parameter/c.parameter-1) > 1e-5 || math.Abs(fit.Objective/c.objective-1) > 1e-7 {
			t.Errorf("%s: %.10g with objective %.12g, scipy %.10g with %.12g", c.family, fit.Parameter, fit.Objective, c.parameter, c.objective)
		}
	}
	b := boundsOf(quotes, 0.1)
	var rows [][]float64
	for _, row := range b.rows {
		homogeneous := make([]float64, len(row))
		for k, v := range row {
			homogeneous[k] = v - 1
		}
		rows = append(rows, homogeneous)
	}
	x, err := solveMixture(rows, len(rows[0]), nil)
	if err != nil {
		t.Fatal(err)
	}
	squares := 0.0
	for j := range rows {
		squares += (b.price(j, x) - 1) * (b.price(j, x) - 1)
	}
	total, err := b.leastTotal()
	if err != nil {
		t.Fatal(err)
	}
	least, err := b.leastWorst()
	if err != nil {
		t.Fatal(err)
	}
	absolute, worst := 0.0, 0.0
	for j := range rows {
		absolute += math.Abs(b.change(j, total))
		worst = max(worst, math.Abs(b.change(j, least)))
	}
	for _, c := range []struct {
		name      string
		got, want float64
	}{{"squares", squares, want.Squares}, {"absolute", absolute, want.Absolute}, {"worst", worst, want.Worst}} {
		if math.Abs(c.got/c.want-1) > 1e-6 {
			t.Errorf("least %s: %.12g, scipy %.12g", c.name, c.got, c.want)
		}
	}
}
