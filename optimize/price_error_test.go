package optimize

import (
	"math"
	"math/rand/v2"
	"testing"

	"cedewright/market"
	"cedewright/portfolio/capital"
	"cedewright/portfolio/loss"
	"cedewright/portfolio/treaty"
)

// TestPriceErrorsAgainstRefitting: the error of the total cost that comes from the quotes is the spread of total costs appraised anew with each
// replicate's own curve.
func TestPriceErrorsAgainstRefitting(t *testing.T) {
	severity, err := loss.NewLogNormalOf(20, 1.5)
	if err != nil {
		t.Fatal(err)
	}
	table, err := loss.NewBuilder(3000, []string{"a"}).Simulate(1, []loss.Model{{
		Name: "m", Peril: "wind", Frequency: loss.Poisson{Rate: 1}, Severity: severity, Split: []loss.Share{{Class: "a", Fraction: 1}},
	}}, nil, 1)
	if err != nil {
		t.Fatal(err)
	}
	random := rand.New(rand.NewPCG(1, 1))
	var quotes []market.Quote
	for _, a := range []float64{0.3, 0.2, 0.1, 0.06, 0.03, 0.015, 0.007} {
		g := market.Wang{Lambda: 0.4}.At(0.65 * a)
		quotes = append(quotes, market.Quote{Curve: "w", Name: "q", Weight: 1, Attachment: a, Exhaustion: 0.4 * a, ExpectedLoss: 0.65 * a, RateOnLine: g / 0.9 * math.Exp(0.1*random.NormFloat64())})
	}
	fit, err := market.FitFamily(market.FamilyWang, quotes, 0.1)
	if err != nil {
		t.Fatal(err)
	}
	c := Case{
		Book:          loss.Book{Classes: []loss.Class{{Name: "a", Premium: 45, Expenses: 0.25}}, Table: table},
		Standards:     []capital.Standard{capital.Single("s", capital.TailValueAtRisk, mustLevel("95%"), capital.Result, "")},
		CostOfCapital: 0.1,
	}
	p := treaty.Programme{Treaties: []treaty.Treaty{
		{Name: "low", Kind: treaty.EventExcess, Retention: 30, Limit: 40, Share: 1, Reinstatements: []float64{1}, Curve: "w"},
		{Name: "high", Kind: treaty.EventExcess, Retention: 70, Limit: 80, Share: 0.5, Curve: "w"},
		{Name: "share", Kind: treaty.QuotaShare, Cession: 0.1, Curve: "w"},
	}}
	appraise := func(curve market.Curve) Appraisal {
		c.Curves = []market.Curve{curve}
		a, err := NewAppraiser(c)
		if err != nil {
			t.Fatal(err)
		}
		x, err := a.Appraise(p, true)
		if err != nil {
			t.Fatal(err)
		}
		return x
	}
	curve := market.Curve{Name: "w", Distortion: fit.Distortion, Brokerage: 0.1, Fit: fit}
	if curve.Replicates, err = market.Resample(curve, 30, 1); err != nil {
		t.Fatal(err)
	}
	stated := appraise(curve)
	var costs, margins []float64
	for i := range curve.Replicates.Count() {
		x := appraise(market.Curve{Name: "w", Distortion: curve.Replicates.Curve(i), Brokerage: 0.1})
		costs, margins = append(costs, x.TotalCost.Value), append(margins, x.CededMargin.Value)
	}
	// 3 %: capital is taken to move by its derivative.
	if got, want := stated.CostPriceError, spread(costs); math.Abs(got/want-1) > 0.03 || want == 0 {
		t.Errorf("error of the total cost from prices is %v, appraised anew %v", got, want)
	}
	if got, want := stated.MarginPriceError, spread(margins); math.Abs(got/want-1) > 1e-6 {
		t.Errorf("error of the margin from prices is %v, appraised anew %v", got, want)
	}
	apart := math.Hypot(stated.Treaties[0].PriceError, stated.Treaties[1].PriceError)
	if together := stated.Treaties[0].PriceError + stated.Treaties[1].PriceError; stated.MarginPriceError < 1.05*apart || stated.MarginPriceError < 0.9*together {
		t.Errorf("treaties on one curve do not err together: %v of %v and %v", stated.MarginPriceError, stated.Treaties[0].PriceError, stated.Treaties[1].PriceError)
	}
	if stated.Treaties[1].Reliance != market.Interpolated || stated.Treaties[2].Reliance != market.Extrapolated {
		t.Errorf("reliance %v and %v", stated.Treaties[1].Reliance, stated.Treaties[2].Reliance)
	}
	if d := ComparePrices(stated, stated); d != 0 {
		t.Errorf("a programme differs from itself by %v", d)
	}
}
