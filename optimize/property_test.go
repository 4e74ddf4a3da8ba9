package optimize

import (
	"fmt"
	"math"
	"testing"

	"cedewright/portfolio/loss"
	"cedewright/portfolio/treaty"
)

// rebuilt gives a case whose losses are those of another with years in another order, classes in another order, and all money times a factor.
func rebuilt(t *testing.T, c Case, year func(y int) int, reverse bool, factor float64) Case {
	t.Helper()
	table := c.Book.Table
	columns := table.Columns()
	classes := append([]string(nil), table.Classes()...)
	book := append([]loss.Class(nil), c.Book.Classes...)
	if reverse {
		for i, j := 0, len(classes)-1; i < j; i, j = i+1, j-1 {
			classes[i], classes[j] = classes[j], classes[i]
			book[i], book[j] = book[j], book[i]
		}
	}
	b := loss.NewBuilder(table.Years(), classes)
	for y := range table.Years() {
		for row := columns.Offset[y]; row < columns.Offset[y+1]; row++ {
			r := loss.Row{Year: year(y) + 1, Class: table.Classes()[columns.Class[row]], Peril: table.Perils()[columns.Peril[row]], Loss: factor * columns.Loss[row]}
			if columns.Event[row] != loss.NoEvent {
				r.Event = fmt.Sprint(columns.Event[row])
			}
			if columns.Risk[row] != loss.NoRisk {
				r.Risk = fmt.Sprint(columns.Risk[row])
			}
			if err := b.Add(r); err != nil {
				t.Fatal(err)
			}
		}
	}
	var err error
	if c.Book.Table, err = b.Build(); err != nil {
		t.Fatal(err)
	}
	for i := range book {
		book[i].Premium *= factor
	}
	c.Book.Classes = book
	c.OwnFunds *= factor
	return c
}

// TestAppraisalByProperty: neither the order of years nor that of classes matters, and all money times a factor gives all results times it.
func TestAppraisalByProperty(t *testing.T) {
	for seed := range uint64(100) {
		r := newRand(seed)
		c := randomCase(t, r)
		p := randomProgramme(r, c)
		years := c.Book.Table.Years()
		scaled := treaty.Programme{Treaties: append([]treaty.Treaty(nil), p.Treaties...)}
		const factor = 4
		for i := range scaled.Treaties {
			u := &scaled.Treaties[i]
			u.Retention, u.Limit, u.AnnualDeductible, u.AnnualLimit, u.EventLimit = factor*u.Retention, factor*u.Limit, factor*u.AnnualDeductible, factor*u.AnnualLimit, factor*u.EventLimit
			u.Premium.Value *= factor
		}
		original := appraised(t, c, p)
		for _, v := range []struct {
			name   string
			c      Case
			p      treaty.Programme
			factor float64
		}{
			{"years turned round", rebuilt(t, c, func(y int) int { return years - 1 - y }, false, 1), p, 1},
			{"years shuffled", rebuilt(t, c, func(y int) int { return (y*7 + 3) % years }, false, 1), p, 1},
			{"classes turned round", rebuilt(t, c, func(y int) int { return y }, true, 1), p, 1},
			{"money times 4", rebuilt(t, c, func(y int) int { return y }, false, factor), scaled, factor},
		} {
			if v.name == "years shuffled" && years%7 == 0 {
				continue // not one to one
			}
			got := appraised(t, v.c, v.p)
			for i := range original {
				if want := v.factor * original[i]; math.Abs(got[i]-want) > 1e-9*max(100*v.factor, math.Abs(want)) {
					t.Fatalf("seed %d, %s: figure %d is %v, want %v", seed, v.name, i, got[i], want)
				}
			}
		}
	}
}

// appraised gives figures of an appraisal that are money.
func appraised(t *testing.T, c Case, p treaty.Programme) []float64 {
	t.Helper()
	a, err := NewAppraiser(c)
	if err != nil {
		t.Fatal(err)
	}
	x, err := a.Appraise(p, true)
	if err != nil {
		t.Fatal(err)
	}
	list := []float64{x.CededPremium.Value, x.CededMargin.Value, x.ExpectedRecoveries.Value, x.ReinstatementPremium.Value, x.Commission.Value, x.TotalCost.Value,
		x.CededMargin.StandardError, x.NetResult.Mean.Value, x.NetResult.StandardDeviation, x.NetResult.OneIn10.Value, x.NetResult.OneIn200.Value}
	for _, k := range x.Capital {
		list = append(list, k.Gross.Value, k.Net.Value, k.Net.StandardError, k.Relief.StandardError)
	}
	for _, f := range x.Treaties {
		list = append(list, f.Relief.Value, f.Margin.Value)
	}
	return list
}
