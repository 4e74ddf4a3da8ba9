package optimize

import (
	"math"
	"testing"

	"cedewright/market"
	"cedewright/portfolio/capital"
	"cedewright/portfolio/loss"
	"cedewright/portfolio/treaty"
)

// replicate appraises two programmes on a freshly simulated book.
func replicate(t testing.TB, seed uint64) (full, half Appraisal) {
	t.Helper()
	severity, err := loss.NewLogNormalOf(20, 1.5)
	if err != nil {
		t.Fatal(err)
	}
	table, err := loss.NewBuilder(4000, []string{"a"}).Simulate(seed, []loss.Model{{
		Name: "m", Peril: "wind", Frequency: loss.Poisson{Rate: 1}, Severity: severity, Split: []loss.Share{{Class: "a", Fraction: 1}},
	}}, nil, 1)
	if err != nil {
		t.Fatal(err)
	}
	a, err := NewAppraiser(Case{
		Book: loss.Book{Classes: []loss.Class{{Name: "a", Premium: 45, Expenses: 0.25}}, Table: table},
		Curves: []market.Curve{
			{Name: "w", Distortion: market.Wang{Lambda: 0.3}, Brokerage: 0.1},
			{Name: "low", Distortion: market.Wang{Lambda: 0.1}, Brokerage: 0.02},
		},
		Standards: []capital.Standard{
			capital.Single("var", capital.ValueAtRisk, mustLevel("98%"), capital.Result, ""),
			capital.Single("tvar", capital.TailValueAtRisk, mustLevel("95%"), capital.Deviation, ""),
			capital.Single("tvar result", capital.TailValueAtRisk, mustLevel("95%"), capital.Result, ""),
		},
		CostOfCapital: 0.1, OwnFunds: 200,
	})
	if err != nil {
		t.Fatal(err)
	}
	p := treaty.Programme{Name: "full", Treaties: []treaty.Treaty{
		{Name: "share", Kind: treaty.QuotaShare, Cession: 0.2, Curve: "low"},
		{Name: "layer", Kind: treaty.EventExcess, Retention: 40, Limit: 80, Share: 0.9, Reinstatements: []float64{1, 0.5}, Curve: "w"},
	}}
	if full, err = a.Appraise(p, true); err != nil {
		t.Fatal(err)
	}
	p.Name, p.Treaties = "half", p.Treaties[1:]
	if half, err = a.Appraise(p, true); err != nil {
		t.Fatal(err)
	}
	return full, half
}

// TestStandardErrorsAgainstReplication simulates the same book many times and compares the spread of every figure with the standard error
// that one appraisal states for it.
func TestStandardErrorsAgainstReplication(t *testing.T) {
	const runs = 160
	read := []struct {
		name string
		from func(full, half Appraisal) Estimate
	}{
		{"ceded premium", func(f, _ Appraisal) Estimate { return f.CededPremium }},
		{"expected recoveries", func(f, _ Appraisal) Estimate { return f.ExpectedRecoveries }},
		{"reinstatement premium", func(f, _ Appraisal) Estimate { return f.ReinstatementPremium }},
		{"commission", func(f, _ Appraisal) Estimate { return f.Commission }},
		{"ceded margin", func(f, _ Appraisal) Estimate { return f.CededMargin }},
		{"value at risk", func(f, _ Appraisal) Estimate { return f.Capital[0].Net }},
		{"gross value at risk", func(f, _ Appraisal) Estimate { return f.Capital[0].Gross }},
		{"relief, value at risk", func(f, _ Appraisal) Estimate { return f.Capital[0].Relief }},
		{"tail value at risk, deviation", func(f, _ Appraisal) Estimate { return f.Capital[1].Net }},
		{"relief, deviation", func(f, _ Appraisal) Estimate { return f.Capital[1].Relief }},
		{"tail value at risk, result", func(f, _ Appraisal) Estimate { return f.Capital[2].Net }},
		{"total cost", func(f, _ Appraisal) Estimate { return f.TotalCost }},
		{"rent", func(f, _ Appraisal) Estimate { return f.Rent }},
		{"mean result", func(f, _ Appraisal) Estimate { return f.NetResult.Mean }},
		{"1-in-10 result", func(f, _ Appraisal) Estimate { return f.NetResult.OneIn10 }},
		{"layer premium", func(f, _ Appraisal) Estimate { return f.Treaties[1].Premium }},
		{"layer margin", func(f, _ Appraisal) Estimate { return f.Treaties[1].Margin }},
		{"layer attachment", func(f, _ Appraisal) Estimate { return f.Treaties[1].AttachmentProbability }},
		{"layer relief", func(f, _ Appraisal) Estimate { return f.Treaties[1].Relief }},
		{"difference in cost", func(f, h Appraisal) Estimate { return CompareCost(f, h) }},
	}
	sums, squares, stated := make([]float64, len(read)), make([]float64, len(read)), make([]float64, len(read))
	for seed := range uint64(runs) {
		full, half := replicate(t, seed)
		for i, r := range read {
			e := r.from(full, half)
			sums[i] += e.Value
			squares[i] += e.Value * e.Value
			stated[i] += e.StandardError / runs
		}
	}
	for i, r := range read {
		mean := sums[i] / runs
		spread := math.Sqrt((squares[i] - runs*mean*mean) / (runs - 1))
		// The spread of 160 runs is itself known to 1/√320 = 5.6 %; four of these, and for quantiles, whose density is estimated, as much again
		// of bias, make 25 %.
		if ratio := stated[i] / spread; !(ratio > 0.75 && ratio < 1.25) {
			t.Errorf("%s: stated error %.4g, spread over %d runs %.4g, ratio %.3f (mean %.4g)", r.name, stated[i], runs, spread, ratio, mean)
		}
	}
}

// TestReliefsOfTreaties: the last-in relief is the difference of two appraisals.
func TestReliefsOfTreaties(t *testing.T) {
	full, half := replicate(t, 3)
	if got, want := full.Treaties[0].Relief.Value, half.Capital[0].Net.Value-full.Capital[0].Net.Value; math.Abs(got-want) > 1e-9*math.Abs(want) {
		t.Errorf("relief of the quota share is %v, without it capital moves by %v", got, want)
	}
	if full.Capital[0].Relief.Value != full.Capital[0].Gross.Value-full.Capital[0].Net.Value {
		t.Error("relief is not gross less net")
	}
}
