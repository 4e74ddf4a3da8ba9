package optimize

import (
	"fmt"
	"math"
	"math/rand/v2"
	"slices"
	"testing"

	"cedewright/market"
	"cedewright/portfolio/capital"
	"cedewright/portfolio/loss"
	"cedewright/portfolio/security"
	"cedewright/portfolio/treaty"
)

// smallFactors are factors of a formula of two segments; they mean nothing.
func smallFactors() capital.Factors {
	return capital.Factors{
		Name: "small", Version: "of this test",
		Segments: []capital.Segment{
			{Number: 1, Name: "one", Premium: 0.1, Reserve: 0.09, NonProportional: 0.8}, {Number: 2, Name: "two", Premium: 0.15, Reserve: 0.11, NonProportional: 1},
		},
		SegmentCorrelation: [][]float64{{1, 0.5}, {0.5, 1}}, PremiumReserve: 0.5, Multiple: 3, Diversification: 0.25,
		Patterns: []capital.Pattern{{Kind: "windstorm", Alternatives: [][]float64{{0.8, 0.4}, {1, 0.2}}}, {Kind: "earthquake", Alternatives: [][]float64{{1}}}},
		ManMade:  []string{"fire", "liability"}, PremiumCat: 0.25,
		Modules: []string{"market", "default", "life", "health", "non-life"},
		ModuleMatrix: [][]float64{
			{1, 0.25, 0.25, 0.25, 0.25}, {0.25, 1, 0.25, 0.25, 0.5}, {0.25, 0.25, 1, 0.25, 0}, {0.25, 0.25, 0.25, 1, 0}, {0.25, 0.5, 0, 0, 1},
		},
		Steps:     []float64{0.00002, 0.0001, 0.0005, 0.0024, 0.012, 0.042, 0.042},
		Solvency:  []capital.SolvencyStep{{Ratio: 1.96, Probability: 0.0001}, {Ratio: 0.75, Probability: 0.042}},
		LossGiven: 0.5, LossGivenTied: 0.9, Mitigating: 0.5, CollateralUsed: 1, Low: 0.07, High: 0.2, LowMultiple: 3, HighMultiple: 5, TypesCross: 1.5,
	}
}

// enlarge gives a random case every kind of standard, reinsurers, and at times the rest of a company and owners with a price of risk.
func enlarge(r *rand.Rand, c Case) Case {
	mixed := func(name string, how capital.Combination) capital.Standard {
		return capital.Standard{Name: name, Combination: how, Criteria: []capital.Criterion{
			{Measure: capital.ValueAtRisk, Level: mustLevel("90%"), Basis: capital.Result, Ratio: 1.2, Weight: 0.4},
			{Measure: capital.TailValueAtRisk, Level: mustLevel("80%"), Basis: capital.Deviation, Ratio: 1, Weight: 0.6},
		}}
	}
	formula := &capital.Formula{
		Factors: smallFactors(), Default: []float64{0.1, 0.03}, Tied: []bool{false, true}, Lapse: 2, Market: 20, Operational: 3, TypeTwo: 1, Recoverables: []float64{4, 0},
		NonProportional: capital.NonProportional(r.IntN(3)),
	}
	for i := range c.Book.Classes {
		formula.Classes = append(formula.Classes, capital.FormulaClass{Segment: i % 2, Reserves: float64(r.IntN(40)), LastPremium: float64(r.IntN(60)), Diversification: 1})
	}
	for i, k := range []capital.Scenario{
		{Kind: "windstorm", Peril: "wind"}, {Kind: "earthquake", Peril: "quake"}, {Kind: "fire", Peril: "fire", OneRisk: true}, {Kind: "liability", Peril: "fire"},
	} {
		k.Name = fmt.Sprint("scenario ", i)
		for range c.Book.Classes {
			k.Losses = append(k.Losses, float64(r.IntN(50)))
		}
		formula.Scenarios = append(formula.Scenarios, k)
	}
	covariance := &capital.Covariance{Uncorrelated: 2, Charges: [5]float64{1, 2, 3, 20, 15}, Perils: []string{"wind", "fire"}, Level: mustLevel("90%"), ContingentCredit: 0.048, Operational: 0.03, Multiple: 0.5}
	c.Standards = append(c.Standards, mixed("worst", capital.Worst), mixed("weighted", capital.Weighted),
		capital.Standard{Name: "formula", Formula: formula}, capital.Standard{Name: "covariance", Covariance: covariance})
	c.Security = &security.Register{Correlation: 0.4, Seed: r.Uint64(), Reinsurers: []security.Reinsurer{
		{Name: "north", Default: 0.1, LossGiven: 0.5}, {Name: "south", Default: 0.03, LossGiven: 0.9, Tied: true},
	}}
	switch r.IntN(3) {
	case 0:
		c.Rest = &capital.Rest{Capital: 40, Correlation: 0.25}
	case 1:
		law, err := capital.RestLaw("normal", 5, 20)
		if err != nil {
			panic(err)
		}
		c.Rest = &capital.Rest{Quantile: law, RankCorrelation: 0.3, Seed: 4}
	}
	if r.IntN(3) == 0 && (c.Rest == nil || c.Rest.Quantile != nil) {
		c.Owners = []market.Distortion{market.Wang{Lambda: 0.3}, market.ConstantCostOfCapital{Iota: 0.1}}[r.IntN(2)]
	}
	for range 1 + r.IntN(3) {
		c.Drive = append(c.Drive, r.IntN(len(c.Standards)))
	}
	return c
}

func withPanels(r *rand.Rand, p treaty.Programme) treaty.Programme {
	for i := range p.Treaties {
		if r.IntN(3) > 0 {
			p.Treaties[i].Panel = []treaty.Line{{Reinsurer: "north", Share: 0.6, Collateral: float64(r.IntN(3))}, {Reinsurer: "south", Share: 0.3}}
		}
	}
	return p
}

// plainCompany works every standard out from treaty.Apply: net losses of each year with what reinsurers leave unpaid, each peril alone from a table of its
// own, each scenario as a year of another table.
type plainCompany struct {
	unpaid, capitalCost float64
	capital             []float64
}

func plainCompanyOf(t testing.TB, c Case, p treaty.Programme) plainCompany {
	t.Helper()
	c.Book.Table = byFallingLoss(c.Book.Table) // draws of failures and of the rest of the company tell equal years apart by their order
	table := c.Book.Table
	n := table.Years()
	outcome, err := treaty.Apply(table, p)
	if err != nil {
		t.Fatal(err)
	}
	failures := c.Security.Fail(outcome.Gross) // any order of the years by badness: −U without cover differs by a constant
	var out plainCompany
	losses := slices.Clone(outcome.Gross)
	base := make([]float64, len(p.Treaties))
	var premiums []float64
	for _, class := range c.Book.Classes {
		for y := range losses {
			losses[y] += class.Premium*class.Expenses - class.Premium
		}
		premiums = append(premiums, class.Premium)
	}
	reinsurer := func(name string) int {
		return slices.IndexFunc(c.Security.Reinsurers, func(r security.Reinsurer) bool { return r.Name == name })
	}
	recoverable, collateral := make([]float64, 2), make([]float64, 2)
	for i, terms := range p.Treaties {
		o, placed := outcome.Treaties[i], terms.Placed()
		if placed == 0 {
			continue
		}
		var commission float64
		base[i], commission = plainPrice(t, c, p, i, o, premiums)
		mean := 0.0
		for y := range losses {
			losses[y] += placed * (base[i]*(1+o.Reinstated[y]) - base[i]*commission - o.Recovery[y])
			mean += o.Recovery[y] / float64(n)
		}
		for _, line := range terms.Panel {
			j := reinsurer(line.Reinsurer)
			for _, y := range failures.Years(j) {
				lost := c.Security.Reinsurers[j].LossGiven * max(placed*line.Share*o.Recovery[y]-line.Collateral, 0)
				losses[y] += lost
				out.unpaid += lost / float64(n)
			}
			recoverable[j] += placed * line.Share * mean
			collateral[j] += line.Collateral
		}
	}
	company := slices.Clone(losses)
	if c.Rest != nil && c.Rest.Quantile != nil {
		for y, x := range c.Rest.Years(outcome.Gross) {
			company[y] += x
		}
	}
	for _, s := range c.Standards {
		switch {
		case s.Simulated():
			k := plainStandard(sampleOf(t, company), s)
			if c.Rest != nil && c.Rest.Quantile == nil {
				k = math.Sqrt(k*k + 2*c.Rest.Correlation*k*c.Rest.Capital + c.Rest.Capital*c.Rest.Capital)
			}
			out.capital = append(out.capital, k)
		case s.Covariance != nil:
			out.capital = append(out.capital, plainCovariance(t, c, p, base, s.Covariance))
		default:
			out.capital = append(out.capital, plainFormula(t, c, p, base, recoverable, collateral, s.Formula))
		}
	}
	driver := c.Drive[0]
	for _, i := range c.Drive {
		if out.capital[i] > out.capital[driver] {
			driver = i
		}
	}
	out.capitalCost = c.CostOfCapital * out.capital[driver]
	if c.Owners != nil {
		assets := out.capital[driver]
		if s := c.Standards[driver]; len(s.Criteria) == 1 && s.Criteria[0].Basis == capital.Deviation || s.Name == "worst" && out.capital[driver] != 1.2*max(sampleOf(t, company).VaR(mustLevel("90%")), 0) {
			assets += sampleOf(t, company).Mean()
		}
		kept := slices.Clone(company)
		for y, x := range kept {
			kept[y] = min(x, assets)
		}
		z := sampleOf(t, kept)
		out.capitalCost = z.Distorted(c.Owners.At) - z.Mean()
	}
	return out
}

func plainCovariance(t testing.TB, c Case, p treaty.Programme, base []float64, k *capital.Covariance) float64 {
	t.Helper()
	var list []capital.PerilLoss
	for _, peril := range k.Perils {
		columns := c.Book.Table.Columns()
		b := loss.NewBuilder(c.Book.Table.Years(), c.Book.Table.Classes())
		for y := range c.Book.Table.Years() {
			for row := columns.Offset[y]; row < columns.Offset[y+1]; row++ {
				if c.Book.Table.Perils()[columns.Peril[row]] != peril {
					continue
				}
				one := loss.Row{Year: y + 1, Class: c.Book.Table.Classes()[columns.Class[row]], Peril: peril, Loss: columns.Loss[row]}
				if columns.Event[row] != loss.NoEvent {
					one.Event = fmt.Sprint(columns.Event[row])
				}
				if columns.Risk[row] != loss.NoRisk {
					one.Risk = fmt.Sprint(columns.Risk[row])
				}
				if err := b.Add(one); err != nil {
					t.Fatal(err)
				}
			}
		}
		table, err := b.Build()
		if err != nil {
			t.Fatal(err)
		}
		outcome, err := treaty.Apply(table, p)
		if err != nil {
			t.Fatal(err)
		}
		net := outcome.Net
		for i, terms := range p.Treaties {
			for y, f := range outcome.Treaties[i].Reinstated {
				net[y] += terms.Placed() * base[i] * f
			}
		}
		gross := sampleOf(t, outcome.Gross).VaR(k.Level)
		at := sampleOf(t, net).VaR(k.Level)
		list = append(list, capital.PerilLoss{Net: at, Recoverable: gross - at})
	}
	return k.Require(list).Total
}

func plainFormula(t testing.TB, c Case, p treaty.Programme, base, recoverable, collateral []float64, f *capital.Formula) float64 {
	t.Helper()
	classes := c.Book.Table.Classes()
	position := capital.FormulaPosition{ExcessCover: make([]bool, len(classes)), Recoverable: recoverable, Collateral: collateral}
	none := capital.FormulaPosition{ExcessCover: make([]bool, len(classes)), Recoverable: make([]float64, 2), Collateral: make([]float64, 2)}
	for _, class := range c.Book.Classes {
		position.Premium, none.Premium = append(position.Premium, class.Premium), append(none.Premium, class.Premium)
	}
	outcome, err := treaty.Apply(c.Book.Table, p)
	if err != nil {
		t.Fatal(err)
	}
	columns := c.Book.Table.Columns()
	for i, terms := range p.Treaties {
		if terms.Placed() == 0 {
			continue
		}
		parts, total := make([]float64, len(classes)), 0.0
		for k, class := range classes {
			if terms.Kind == treaty.QuotaShare {
				parts[k] = p.SubjectFraction(i, class) * c.Book.Classes[k].Premium
				total += parts[k]
			}
		}
		if terms.Kind != treaty.QuotaShare { // what each class brings into the subject, net of the treaties before it
			for row := range columns.Loss {
				class, peril := classes[columns.Class[row]], c.Book.Table.Perils()[columns.Peril[row]]
				if len(terms.Classes) > 0 && !slices.Contains(terms.Classes, class) || len(terms.Perils) > 0 && !slices.Contains(terms.Perils, peril) ||
					terms.Kind != treaty.AggregateExcess && columns.Event[row] == loss.NoEvent || terms.Kind == treaty.RiskExcess && columns.Risk[row] == loss.NoRisk {
					continue
				}
				recovered := 0.0
				for _, name := range terms.After {
					j := slices.IndexFunc(p.Treaties, func(u treaty.Treaty) bool { return u.Name == name })
					recovered += p.Treaties[j].Placed() * outcome.Treaties[j].RowRecovery[row]
				}
				x := treaty.NetOf(columns.Loss[row], recovered)
				parts[columns.Class[row]] += x
				total += x
			}
		}
		for k := range classes {
			if parts[k] > 0 {
				position.Premium[k] -= terms.Placed() * base[i] * parts[k] / total
				if terms.Kind == treaty.EventExcess || terms.Kind == treaty.RiskExcess {
					position.ExcessCover[k] = true
				}
			}
		}
	}
	for _, s := range f.Scenarios {
		var net, gross []float64
		for _, events := range f.Factors.Alternatives(s.Kind) {
			b := loss.NewBuilder(1, classes)
			for e, fraction := range events {
				for k, x := range s.Losses {
					row := loss.Row{Year: 1, Event: fmt.Sprint("e", e), Class: classes[k], Peril: s.Peril, Loss: fraction * x}
					if s.OneRisk {
						row.Risk = "r"
					}
					if err := b.Add(row); err != nil {
						t.Fatal(err)
					}
				}
			}
			table, err := b.Build()
			if err != nil {
				t.Fatal(err)
			}
			o, err := treaty.Apply(table, p)
			if err != nil {
				t.Fatal(err)
			}
			after := o.Net[0]
			for i, terms := range p.Treaties {
				after += terms.Placed() * base[i] * o.Treaties[i].Reinstated[0]
			}
			net, gross = append(net, after), append(gross, o.Gross[0])
		}
		position.Scenario, none.Scenario = append(position.Scenario, net), append(none.Scenario, gross)
	}
	var scratch capital.FormulaScratch
	nonLife := f.Require(none, 0, &scratch).NonLife
	return f.Require(position, nonLife, &scratch).Total
}

// TestCompanyAgreesWithPlain compares every kind of standard, unpaid recoveries, the rest of the company and the owners' price with the plain engine.
func TestCompanyAgreesWithPlain(t *testing.T) {
	seen := map[string]int{}
	for seed := range uint64(trials(250)) {
		r := newRand(seed)
		c := enlarge(r, randomCase(t, r))
		a, err := NewAppraiser(c)
		if err != nil {
			t.Fatalf("seed %d: %v", seed, err)
		}
		for range 4 {
			p := withPanels(r, randomProgramme(r, c))
			got, err := a.Appraise(p, false)
			if err != nil {
				t.Fatalf("seed %d: %v", seed, err)
			}
			want := plainCompanyOf(t, c, p)
			check := func(name string, got, want float64) {
				t.Helper()
				if !near(got, want) {
					t.Fatalf("seed %d: %s is %v, the plain engine says %v\n%+v", seed, name, got, want, p)
				}
			}
			for i, k := range want.capital {
				check("capital under "+c.Standards[i].Name, got.Capital[i].Net.Value, k)
			}
			check("unpaid recoveries", got.ExpectedUnpaid.Value, want.unpaid)
			check("capital cost", got.CapitalCost.Value, want.capitalCost)
			check("total cost", got.TotalCost.Value, got.CededMargin.Value+want.unpaid+want.capitalCost)
			if got.ExpectedUnpaid.Value > 0 {
				seen["unpaid"]++
			}
			if c.Owners != nil {
				seen["owners"]++
			}
			if c.Rest != nil {
				seen["rest"]++
			}
			seen["drives "+got.Driving.Standard]++
		}
	}
	for _, what := range []string{"unpaid", "owners", "rest", "drives formula", "drives covariance", "drives worst", "drives weighted"} {
		if seen[what] < trials(15) {
			t.Errorf("%s: compared %d times", what, seen[what])
		}
	}
}
