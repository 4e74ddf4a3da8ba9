package optimize

import (
	"fmt"
	"math"
	"math/rand/v2"
	"slices"
	"sync"
	"testing"

	"cedewright/market"
	"cedewright/portfolio/capital"
	"cedewright/portfolio/loss"
	"cedewright/portfolio/sample"
	"cedewright/portfolio/treaty"
)

// The books and programmes below are drawn from a seed, so that a failure repeats; losses sit on a coarse grid, so that ties, exact
// hits of a retention and zeros are common.

// newRand gives a stream of random numbers of its own for a seed.
func newRand(seed uint64) *rand.Rand { return rand.New(rand.NewPCG(seed, 1)) }

// trials gives how many random cases a test draws: fewer under -short, which the race detector's tier uses.
func trials(n int) int {
	if testing.Short() {
		return n / 5
	}
	return n
}

func randomCase(t testing.TB, r *rand.Rand) Case {
	t.Helper()
	classes := []string{"a", "b", "c"}[:1+r.IntN(3)]
	perils := []string{"wind", "fire"}
	years := 20 + r.IntN(60)
	b := loss.NewBuilder(years, classes)
	add := func(row loss.Row) {
		if err := b.Add(row); err != nil {
			t.Fatal(err)
		}
	}
	for y := range years {
		for e := range r.IntN(6) {
			for range 1 + r.IntN(3) {
				row := loss.Row{Year: y + 1, Event: fmt.Sprint(e), Class: classes[r.IntN(len(classes))], Peril: perils[r.IntN(2)], Loss: float64(r.IntN(30))}
				if r.IntN(2) == 0 {
					row.Risk = fmt.Sprint(r.IntN(3))
				}
				if r.IntN(8) == 0 {
					row.Loss *= 7.3
				}
				add(row)
			}
		}
		if r.IntN(2) == 0 {
			add(loss.Row{Year: y + 1, Class: classes[0], Peril: "wind", Loss: float64(r.IntN(20))})
		}
	}
	table, err := b.Build()
	if err != nil {
		t.Fatal(err)
	}
	c := Case{
		Book: loss.Book{Table: table},
		Curves: []market.Curve{
			{Name: "w", Distortion: market.Wang{Lambda: 0.4}, Brokerage: 0.1, MinimumRateOnLine: 0.02},
			{Name: "p", Distortion: market.ProportionalHazard{Rho: 1.4}},
		},
		CostOfCapital: 0.1, OwnFunds: 100,
	}
	for _, name := range classes {
		c.Book.Classes = append(c.Book.Classes, loss.Class{Name: name, Premium: 20 + float64(r.IntN(50)), Expenses: 0.3})
	}
	level := func() sample.Level { return mustLevel([]string{"80%", "90%", "95%", "99%"}[r.IntN(4)]) }
	c.Standards = []capital.Standard{
		capital.Single("v", capital.ValueAtRisk, level(), capital.Result, ""), capital.Single("t", capital.TailValueAtRisk, level(), capital.Deviation, ""),
		capital.Single("d", capital.ValueAtRisk, level(), capital.Deviation, ""), capital.Single("u", capital.TailValueAtRisk, level(), capital.Result, ""),
	}
	return c
}

func randomProgramme(r *rand.Rand, c Case) treaty.Programme {
	p := treaty.Programme{Name: "random"}
	table := c.Book.Table
	for i := range 1 + r.IntN(5) {
		t := treaty.Treaty{Name: fmt.Sprint("t", i), Kind: treaty.Kind(1 + r.IntN(4)), Curve: []string{"w", "p"}[r.IntN(2)]}
		if r.IntN(2) == 0 {
			t.Classes = table.Classes()[:1+r.IntN(len(table.Classes()))]
		}
		if len(table.Perils()) > 0 && r.IntN(2) == 0 {
			t.Perils = table.Perils()[:1]
		}
		for j := range i {
			if r.IntN(3) == 0 {
				t.After = append(t.After, fmt.Sprint("t", j))
			}
		}
		if t.Kind == treaty.QuotaShare {
			t.Cession = float64(r.IntN(5)) / 10
			if r.IntN(2) == 0 {
				t.Commission = treaty.Some(0.25)
			}
		} else {
			t.Retention, t.Limit, t.Share = float64(r.IntN(30)), float64(1+r.IntN(40)), float64(r.IntN(11))/10
			if r.IntN(6) == 0 {
				t.Limit = math.Inf(1)
			}
			if r.IntN(5) == 0 {
				t.Premium = treaty.Some(float64(r.IntN(10)))
			}
		}
		if t.Kind == treaty.EventExcess || t.Kind == treaty.RiskExcess {
			switch r.IntN(4) {
			case 0:
				t.AnnualLimit = float64(10 + r.IntN(60))
			case 1, 2:
				if !math.IsInf(t.Limit, 1) {
					t.Reinstatements = make([]float64, r.IntN(4))
					for k := range t.Reinstatements {
						t.Reinstatements[k] = float64(r.IntN(3)) / 2
					}
				}
			}
			if r.IntN(3) == 0 {
				t.AnnualDeductible = float64(r.IntN(20))
			}
			if t.Kind == treaty.RiskExcess && r.IntN(2) == 0 {
				t.EventLimit = float64(5 + r.IntN(40))
			}
		}
		p.Treaties = append(p.Treaties, t)
	}
	return p
}

// plainAppraisal works an appraisal out from treaty.Apply with full sorts, sharing nothing with the fast engine but the formulas.
func plainAppraisal(t testing.TB, c Case, p treaty.Programme) Appraisal {
	t.Helper()
	outcome, err := treaty.Apply(c.Book.Table, p)
	if err != nil {
		t.Fatal(err)
	}
	n := c.Book.Table.Years()
	losses := slices.Clone(outcome.Gross)
	constant, gross := 0.0, slices.Clone(outcome.Gross)
	var premiums []float64
	for _, class := range c.Book.Classes {
		constant += class.Premium*class.Expenses - class.Premium
		premiums = append(premiums, class.Premium)
	}
	var a Appraisal
	for i, terms := range p.Treaties {
		o, placed := outcome.Treaties[i], terms.Placed()
		if placed == 0 {
			continue
		}
		base, commission := plainPrice(t, c, p, i, o, premiums)
		a.CededPremium.Value += placed * base
		a.Commission.Value += placed * base * commission
		for y := range losses {
			a.ExpectedRecoveries.Value += placed * o.Recovery[y] / float64(n)
			a.ReinstatementPremium.Value += placed * base * o.Reinstated[y] / float64(n)
			losses[y] += placed * (base*(1+o.Reinstated[y]) - base*commission - o.Recovery[y])
		}
	}
	a.CededMargin.Value = a.CededPremium.Value + a.ReinstatementPremium.Value - a.Commission.Value - a.ExpectedRecoveries.Value
	for y := range losses {
		losses[y] += constant
		gross[y] += constant
	}
	for _, s := range c.Standards {
		k := func(values []float64) float64 {
			return plainStandard(sampleOf(t, values), s)
		}
		a.Capital = append(a.Capital, CapitalFigure{Gross: Estimate{Value: k(gross)}, Net: Estimate{Value: k(losses)}})
	}
	x := sampleOf(t, losses)
	a.NetResult = NetResult{Mean: Estimate{Value: -x.Mean()}, StandardDeviation: x.StandardDeviation(), OneIn10: Estimate{Value: -x.VaR(oneIn10)}, OneIn200: Estimate{Value: -x.VaR(oneIn200)}}
	a.TotalCost.Value = a.CededMargin.Value + c.CostOfCapital*a.Capital[0].Net.Value
	return a
}

// plainStandard works a simulated standard out from a sorted sample.
func plainStandard(x sample.Sample, s capital.Standard) float64 {
	worst, sum := math.Inf(-1), 0.0
	for _, k := range s.Criteria {
		risk := x.VaR(k.Level)
		if k.Measure == capital.TailValueAtRisk {
			risk = x.TVaR(k.Level)
		}
		if k.Basis == capital.Deviation {
			risk -= x.Mean()
		} else {
			risk = max(risk, 0)
		}
		worst, sum = max(worst, k.Ratio*risk), sum+k.Weight*k.Ratio*risk
	}
	if s.Combination == capital.Weighted {
		return sum
	}
	return worst
}

func sampleOf(t testing.TB, values []float64) sample.Sample {
	t.Helper()
	x, err := sample.New(values)
	if err != nil {
		t.Fatal(err)
	}
	return x
}

func plainPrice(t testing.TB, c Case, p treaty.Programme, i int, o treaty.TreatyOutcome, premiums []float64) (base, commission float64) {
	t.Helper()
	terms := p.Treaties[i]
	k := slices.IndexFunc(c.Curves, func(k market.Curve) bool { return k.Name == terms.Curve })
	tariff, err := market.NewTariff(c.Curves[k], c.Book.Table.Years())
	if err != nil {
		t.Fatal(err)
	}
	descending := slices.Clone(o.Recovery)
	slices.Sort(descending)
	slices.Reverse(descending)
	if terms.Kind == treaty.QuotaShare {
		base = p.SubjectPremium(i, c.Book.Table.Classes(), premiums)
		rate, err := tariff.Commission(terms, descending, base)
		if err != nil && base > 0 {
			t.Fatal(err)
		}
		return base, rate.Rate
	}
	premium, err := tariff.BasePremium(terms, descending)
	if err != nil {
		t.Fatal(err)
	}
	return premium.Base, 0
}

// near compares two figures of a book whose amounts are of the order of 100: 1e-9 relative to that.
func near(a, b float64) bool {
	return a == b || math.Abs(a-b) <= 1e-9*max(100, math.Abs(a), math.Abs(b))
}

// TestFastEngineAgreesWithPlain compares the appraiser with the plain engine on random books and programmes of every kind of treaty, with
// inuring, annual terms, event limits, reinstatements, ties and zeros.
func TestFastEngineAgreesWithPlain(t *testing.T) {
	kinds := map[treaty.Kind]int{}
	for seed := range uint64(trials(400)) {
		r := rand.New(rand.NewPCG(seed, 1))
		c := randomCase(t, r)
		a, err := NewAppraiser(c)
		if err != nil {
			t.Fatal(err)
		}
		for range 8 {
			p := randomProgramme(r, c)
			for _, terms := range p.Treaties {
				kinds[terms.Kind]++
			}
			got, err := a.Appraise(p, false)
			if err != nil {
				t.Fatalf("seed %d: %v", seed, err)
			}
			want := plainAppraisal(t, c, p)
			check := func(name string, got, want float64) {
				t.Helper()
				if !near(got, want) {
					t.Fatalf("seed %d: %s is %v, the plain engine says %v\n%+v", seed, name, got, want, p)
				}
			}
			check("ceded premium", got.CededPremium.Value, want.CededPremium.Value)
			check("recoveries", got.ExpectedRecoveries.Value, want.ExpectedRecoveries.Value)
			check("reinstatement premium", got.ReinstatementPremium.Value, want.ReinstatementPremium.Value)
			check("commission", got.Commission.Value, want.Commission.Value)
			check("margin", got.CededMargin.Value, want.CededMargin.Value)
			check("total cost", got.TotalCost.Value, want.TotalCost.Value)
			for i := range want.Capital {
				check("gross capital", got.Capital[i].Gross.Value, want.Capital[i].Gross.Value)
				check("net capital", got.Capital[i].Net.Value, want.Capital[i].Net.Value)
			}
			check("mean result", got.NetResult.Mean.Value, want.NetResult.Mean.Value)
			check("standard deviation", got.NetResult.StandardDeviation, want.NetResult.StandardDeviation)
			check("1-in-10", got.NetResult.OneIn10.Value, want.NetResult.OneIn10.Value)
			check("1-in-200", got.NetResult.OneIn200.Value, want.NetResult.OneIn200.Value)
			outcome, err := treaty.Apply(c.Book.Table, p)
			if err != nil {
				t.Fatal(err)
			}
			for i, f := range got.Treaties {
				if f.Terms.Placed() > 0 {
					check("attachment", f.AttachmentProbability.Value, outcome.Treaties[i].AttachmentProbability)
					check("exhaustion", f.ExhaustionProbability.Value, outcome.Treaties[i].ExhaustionProbability)
				}
			}
		}
	}
	for k := treaty.QuotaShare; k <= treaty.AggregateExcess; k++ {
		if kinds[k] < trials(100) {
			t.Errorf("only %d treaties of kind %v were compared", kinds[k], k)
		}
	}
}

// TestAppraiseIsPure: the same bits with and without detail, from a fresh appraiser or one that has seen other programmes, and from many
// goroutines at once.
func TestAppraiseIsPure(t *testing.T) {
	r := rand.New(rand.NewPCG(7, 7))
	c := randomCase(t, r)
	var programmes []treaty.Programme
	for range 12 {
		programmes = append(programmes, randomProgramme(r, c))
	}
	used, err := NewAppraiser(c)
	if err != nil {
		t.Fatal(err)
	}
	figures := func(a *Appraiser, p treaty.Programme, detail bool) [6]float64 {
		x, err := a.Appraise(p, detail)
		if err != nil {
			t.Error(err)
			return [6]float64{}
		}
		return [6]float64{x.CededPremium.Value, x.CededMargin.Value, x.Capital[0].Net.Value, x.Capital[1].Net.Value, x.TotalCost.Value, x.NetResult.StandardDeviation}
	}
	var group sync.WaitGroup
	for range 4 {
		group.Go(func() {
			for _, p := range programmes {
				fresh, err := NewAppraiser(c)
				if err != nil {
					t.Error(err)
					return
				}
				want := figures(fresh, p, false)
				if got := figures(used, p, false); got != want {
					t.Errorf("used appraiser: %v, fresh: %v", got, want)
				}
				if got := figures(used, p, true); got != want {
					t.Errorf("with detail: %v, without: %v", got, want)
				}
			}
		})
	}
	group.Wait()
}
