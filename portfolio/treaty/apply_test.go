package treaty_test

import (
	"fmt"
	"math"
	"os"
	"strings"
	"testing"

	"cedewright/portfolio/loss"
	"cedewright/portfolio/portfoliotest"
	"cedewright/portfolio/treaty"

	"pgregory.net/rapid"
)

// fataler is what tests and properties share.
type fataler interface{ Fatal(...any) }

func tableOf(t fataler, years int, classes []string, rows ...loss.Row) *loss.Table {
	b := loss.NewBuilder(years, classes)
	for _, r := range rows {
		if err := b.Add(r); err != nil {
			t.Fatal(err)
		}
	}
	table, err := b.Build()
	if err != nil {
		t.Fatal(err)
	}
	return table
}

func apply(t fataler, table *loss.Table, treaties ...treaty.Treaty) *treaty.Outcome {
	o, err := treaty.Apply(table, treaty.Programme{Name: "p", Treaties: treaties})
	if err != nil {
		t.Fatal(err)
	}
	return o
}

// TestYearsByHand: layer 100 xs 50, premium 20, events 90, 200, 120, 400 (testdata/published, table year by
// hand). The sums of the year do not depend on the order of events.
func TestYearsByHand(t *testing.T) {
	var rows []loss.Row
	for i, x := range []float64{90, 200, 120, 400} {
		rows = append(rows, loss.Row{Year: 1, Event: fmt.Sprint(i), Class: "a", Loss: x})
	}
	table := tableOf(t, 1, []string{"a"}, rows...)
	layer := treaty.Treaty{Name: "l", Kind: treaty.EventExcess, Retention: 50, Limit: 100, Share: 1}
	values := portfoliotest.PublishedValues(t, "../..", "year by hand")
	for _, v := range values {
		x := append(portfoliotest.Numbers(v.Case), 0) // count, charge in per cent, deductible
		layer.AnnualDeductible = x[2]
		layer.Reinstatements = make([]float64, int(x[0]))
		for k := range layer.Reinstatements {
			layer.Reinstatements[k] = x[1] / 100
		}
		o := apply(t, table, layer).Treaties[0]
		got := o.Recovery[0]
		if v.Quantity == "reinstatement premium" {
			got = 20 * o.Reinstated[0]
		}
		if got != v.Value {
			t.Errorf("%s, %s: %v, want %v", v.Case, v.Quantity, got, v.Value)
		}
	}
	layer.AnnualDeductible = 0
	for want, reinstatements := range map[float64][]float64{100: {}, 310: nil} { // by hand
		layer.Reinstatements = reinstatements
		if o := apply(t, table, layer).Treaties[0]; o.Recovery[0] != want || o.Reinstated[0] != 0 || o.AttachmentProbability != 1 || o.ExhaustionProbability != 1 {
			t.Errorf("%v: %+v, want %v", reinstatements, o, want)
		}
	}
}

// TestDanishLayers: recoveries of layers on the Danish fire losses, computed with R from the same file and recomputed with scipy.
func TestDanishLayers(t *testing.T) {
	f, err := os.Open("../../testdata/danish-fire-by-line.csv")
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	losses, err := loss.ReadHistory(f, "danish", loss.HistoryFormat{Date: "loss_date", Parts: []string{"total"}, Scale: 1})
	if err != nil {
		t.Fatal(err)
	}
	var rows []loss.Row
	for i, l := range losses {
		rows = append(rows, loss.Row{Year: l.Date.Year() - 1979, Event: fmt.Sprint(i), Risk: "r", Class: "fire", Loss: l.Total})
	}
	table := tableOf(t, 11, []string{"fire"}, rows...)
	for _, c := range []struct {
		limit, retention, ceded, worst, capped, reinstated float64
		withLoss                                           int
	}{
		{5, 5, 768.572077, 101.858028, 15, 2, 11}, {10, 10, 647.876231, 103.552796, 28.0562241818, 1.89653150909, 11},
		{20, 20, 361.696117, 72.821651, 31.7158605455, 1.33553887727, 9}, {25, 25, 300.398506, 59.141547, 27.3089550909, 1.05911621455, 9},
		{50, 50, 179.409084, 50, 16.3099167273, 0.326198334545, 6}, {100, 100, 197.0708, 100, 17.9155272727, 0.179155272727, 3},
	} {
		for _, kind := range []treaty.Kind{treaty.EventExcess, treaty.RiskExcess} {
			free := treaty.Treaty{Name: "l", Kind: kind, Retention: c.retention, Limit: c.limit, Share: 1}
			o := apply(t, table, free).Treaties[0]
			sum, worst, years := 0.0, 0.0, 0
			for _, r := range o.Recovery {
				sum += r
				worst = max(worst, r)
				if r > 0 {
					years++
				}
			}
			free.Reinstatements = []float64{1, 1}
			paid := apply(t, table, free).Treaties[0]
			capped, reinstated := 0.0, 0.0
			for y := range paid.Recovery {
				capped += paid.Recovery[y] / 11
				reinstated += paid.Reinstated[y] / 11
			}
			// 1e-9 relative: sums of some hundred numbers, printed with twelve digits.
			for _, v := range [][2]float64{{sum, c.ceded}, {worst, c.worst}, {capped, c.capped}, {reinstated, c.reinstated}} {
				if math.Abs(v[0]-v[1]) > 1e-9*v[1] {
					t.Errorf("%v xs %v, %v: %v, want %v", c.limit, c.retention, kind, v[0], v[1])
				}
			}
			if years != c.withLoss || o.AttachmentProbability != float64(c.withLoss)/11 {
				t.Errorf("%v xs %v: %d years with a loss, want %d", c.limit, c.retention, years, c.withLoss)
			}
		}
	}
}

// TestInuring: a quota share of 40 % inures to an event cover, which inures to an aggregate, worked by hand.
func TestInuring(t *testing.T) {
	table := tableOf(t, 2, []string{"a", "b"},
		loss.Row{Year: 1, Event: "1", Class: "a", Loss: 100}, loss.Row{Year: 1, Event: "1", Class: "b", Loss: 20},
		loss.Row{Year: 1, Event: "2", Class: "a", Loss: 50}, loss.Row{Year: 1, Class: "a", Loss: 10},
	)
	o := apply(t, table,
		treaty.Treaty{Name: "stop", Kind: treaty.AggregateExcess, Retention: 50, Limit: 100, Share: 1, After: []string{"event", "share"}},
		treaty.Treaty{Name: "event", Kind: treaty.EventExcess, Retention: 30, Limit: 20, Share: 0.5, After: []string{"share"}},
		treaty.Treaty{Name: "share", Kind: treaty.QuotaShare, Cession: 0.4, Classes: []string{"a"}},
	)
	// Share: 160 of class a. Event 1 net: 60 + 20 = 80, layer 20; event 2 net: 30, layer 0. Year net of both: 36+60·… see below.
	// Rows net of the share: a1 60, b1 20, a2 30, attritional 6 = 116; event pays 20, half placed 10: 106; aggregate above 50: 56.
	share, event, stop := o.Treaties[2], o.Treaties[1], o.Treaties[0]
	if share.Recovery[0] != 160 || math.Abs(event.Recovery[0]-20) > 1e-12 || math.Abs(stop.Recovery[0]-56) > 1e-12 {
		t.Errorf("share %v, event %v, stop %v", share.Recovery[0], event.Recovery[0], stop.Recovery[0])
	}
	if want := 180 - 64 - 10 - 56.0; math.Abs(o.Net[0]-want) > 1e-12 || o.Gross[0] != 180 || o.Net[1] != 0 {
		t.Errorf("net %v, want %v", o.Net, want)
	}
	p := treaty.Programme{Treaties: []treaty.Treaty{
		{Name: "first", Kind: treaty.QuotaShare, Cession: 0.25, Classes: []string{"a"}},
		{Name: "second", Kind: treaty.QuotaShare, Cession: 0.5, After: []string{"first"}},
	}}
	if got := p.SubjectPremium(1, []string{"a", "b"}, []float64{100, 40}); got != 115 {
		t.Errorf("subject premium after a quota share is %v, want 75 + 40", got)
	}
}

// TestEventLimit: three risks in one event, capped together.
func TestEventLimit(t *testing.T) {
	table := tableOf(t, 1, []string{"a"},
		loss.Row{Year: 1, Event: "1", Risk: "x", Class: "a", Loss: 30}, loss.Row{Year: 1, Event: "1", Risk: "y", Class: "a", Loss: 25},
		loss.Row{Year: 1, Event: "1", Risk: "x", Class: "a", Loss: 10}, loss.Row{Year: 1, Event: "1", Class: "a", Loss: 500},
		loss.Row{Year: 1, Event: "2", Risk: "x", Class: "a", Loss: 18}, loss.Row{Year: 1, Risk: "x", Class: "a", Loss: 99},
	)
	r := treaty.Treaty{Name: "r", Kind: treaty.RiskExcess, Retention: 10, Limit: 20, Share: 1}
	if got := apply(t, table, r).Treaties[0].Recovery[0]; got != 20+15+8 {
		t.Errorf("without event limit: %v, want 43", got)
	}
	r.EventLimit = 25
	if got := apply(t, table, r).Treaties[0].Recovery[0]; got != 25+8 {
		t.Errorf("with event limit: %v, want 33", got)
	}
}

// drawn is a small book with ties and zeros and a valid programme.
type drawn struct {
	classes []string
	rows    []loss.Row
	years   int
	p       treaty.Programme
}

func draw(t *rapid.T) drawn {
	d := drawn{classes: []string{"a", "b"}, years: rapid.IntRange(1, 6).Draw(t, "years")}
	for range rapid.IntRange(0, 20).Draw(t, "rows") {
		r := loss.Row{
			Year: rapid.IntRange(1, d.years).Draw(t, "year"), Class: rapid.SampledFrom(d.classes).Draw(t, "class"),
			Event: rapid.SampledFrom([]string{"", "1", "2", "3"}).Draw(t, "event"), Peril: rapid.SampledFrom([]string{"wind", "fire"}).Draw(t, "peril"),
			Risk: rapid.SampledFrom([]string{"", "x", "y"}).Draw(t, "risk"), Loss: float64(rapid.IntRange(0, 60).Draw(t, "loss")),
		}
		d.rows = append(d.rows, r)
	}
	for i := range rapid.IntRange(1, 4).Draw(t, "treaties") {
		u := treaty.Treaty{Name: fmt.Sprint("t", i), Kind: treaty.Kind(rapid.IntRange(1, 4).Draw(t, "kind"))}
		if rapid.Bool().Draw(t, "one class") {
			u.Classes = d.classes[:1]
		}
		for j := range i {
			if rapid.Bool().Draw(t, "after") {
				u.After = append(u.After, fmt.Sprint("t", j))
			}
		}
		share := float64(rapid.IntRange(0, 4).Draw(t, "share")) / 4
		if u.Kind == treaty.QuotaShare {
			u.Cession = share
		} else {
			u.Share, u.Retention, u.Limit = share, float64(rapid.IntRange(0, 40).Draw(t, "retention")), float64(rapid.IntRange(1, 50).Draw(t, "limit"))
		}
		if u.Kind == treaty.EventExcess || u.Kind == treaty.RiskExcess {
			u.AnnualDeductible = float64(rapid.IntRange(0, 20).Draw(t, "deductible"))
			if rapid.Bool().Draw(t, "reinstatements") {
				u.Reinstatements = []float64{1, 0.5}[:rapid.IntRange(0, 2).Draw(t, "count")]
			}
		}
		if u.Kind == treaty.RiskExcess {
			u.EventLimit = float64(rapid.IntRange(0, 40).Draw(t, "event limit"))
		}
		d.p.Treaties = append(d.p.Treaties, u)
	}
	return d
}

func (d drawn) outcome(t fataler, rows []loss.Row, classes []string, p treaty.Programme) *treaty.Outcome {
	return apply(t, tableOf(t, d.years, classes, rows...), p.Treaties...)
}

// TestApplyByProperty: what holds for every book and programme.
func TestApplyByProperty(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		d := draw(t)
		o := d.outcome(t, d.rows, d.classes, d.p)
		const rounding = 1e-9 // of sums of twenty numbers up to 60
		for y := range d.years {
			ceded := 0.0
			for i, u := range d.p.Treaties {
				r := o.Treaties[i]
				ceded += u.Placed() * r.Recovery[y]
				if r.Recovery[y] > r.SubjectLoss[y]+rounding || r.Recovery[y] > u.AnnualRecoveryLimit()+rounding || r.Recovery[y] < 0 {
					t.Fatalf("year %d: %s recovers %v of %v, limit %v", y, u.Name, r.Recovery[y], r.SubjectLoss[y], u.AnnualRecoveryLimit())
				}
			}
			if math.Abs(ceded+o.Net[y]-o.Gross[y]) > rounding {
				t.Fatalf("year %d: ceded %v and net %v are not gross %v", y, ceded, o.Net[y], o.Gross[y])
			}
		}
		for i := range d.p.Treaties {
			recovered, rows := 0.0, 0.0
			for _, r := range o.Treaties[i].Recovery {
				recovered += r
			}
			for _, r := range o.Treaties[i].RowRecovery {
				rows += r
			}
			if math.Abs(recovered-rows) > rounding {
				t.Fatalf("treaty %d: rows share %v of %v", i, rows, recovered)
			}
		}

		same := func(what string, other *treaty.Outcome, factor float64, place func(i int) int) {
			for y := range d.years {
				if math.Abs(other.Net[y]-factor*o.Net[y]) > rounding*factor {
					t.Fatalf("%s: net of year %d is %v, was %v", what, y, other.Net[y], o.Net[y])
				}
				for i := range d.p.Treaties {
					if math.Abs(other.Treaties[place(i)].Recovery[y]-factor*o.Treaties[i].Recovery[y]) > rounding*factor {
						t.Fatalf("%s: recovery of treaty %d in year %d is %v, was %v", what, i, y, other.Treaties[place(i)].Recovery[y], o.Treaties[i].Recovery[y])
					}
				}
			}
		}
		stay := func(i int) int { return i }
		turn := func(i int) int { return len(d.p.Treaties) - 1 - i }
		rows, scaled := reversed(d.rows), append([]loss.Row(nil), d.rows...)
		same("order of rows", d.outcome(t, rows, d.classes, d.p), 1, stay)
		same("order of classes", d.outcome(t, d.rows, []string{"b", "a"}, d.p), 1, stay)
		same("order of treaties", d.outcome(t, d.rows, d.classes, treaty.Programme{Treaties: reversed(d.p.Treaties)}), 1, turn)
		bigger := treaty.Programme{Treaties: append([]treaty.Treaty(nil), d.p.Treaties...)}
		for i := range scaled {
			scaled[i].Loss *= 3
		}
		for i := range bigger.Treaties {
			u := &bigger.Treaties[i]
			u.Retention, u.Limit, u.AnnualDeductible, u.EventLimit = 3*u.Retention, 3*u.Limit, 3*u.AnnualDeductible, 3*u.EventLimit
		}
		same("all money threefold", d.outcome(t, scaled, d.classes, bigger), 3, stay)
	})
}

// TestRecoveryRisesWithTheLoss: without inuring, a greater loss never lowers a recovery.
func TestRecoveryRisesWithTheLoss(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		d := draw(t)
		for i := range d.p.Treaties {
			d.p.Treaties[i].After = nil
		}
		o := d.outcome(t, d.rows, d.classes, d.p)
		if len(d.rows) == 0 {
			return
		}
		worse := append([]loss.Row(nil), d.rows...)
		worse[rapid.IntRange(0, len(worse)-1).Draw(t, "row")].Loss += float64(rapid.IntRange(1, 50).Draw(t, "more"))
		after := d.outcome(t, worse, d.classes, d.p)
		for i := range d.p.Treaties {
			for y := range d.years {
				if after.Treaties[i].Recovery[y] < o.Treaties[i].Recovery[y]-1e-9 {
					t.Fatalf("treaty %d year %d: %v, before the loss rose %v", i, y, after.Treaties[i].Recovery[y], o.Treaties[i].Recovery[y])
				}
			}
		}
	})
}

func reversed[T any](x []T) []T {
	r := make([]T, len(x))
	for i := range x {
		r[len(x)-1-i] = x[i]
	}
	return r
}

func ExampleApply() {
	b := loss.NewBuilder(2, []string{"household"})
	_ = b.Add(loss.Row{Year: 1, Event: "storm", Class: "household", Peril: "wind", Loss: 90e6})
	table, _ := b.Build()
	outcome, _ := treaty.Apply(table, treaty.Programme{Treaties: []treaty.Treaty{
		{Name: "wind", Kind: treaty.EventExcess, Retention: 40e6, Limit: 60e6, Share: 0.8, Reinstatements: []float64{1}},
	}})
	fmt.Printf("recovered %.0f for 100 %%, net %.0f, %.0f %% of the premium due again\n",
		outcome.Treaties[0].Recovery[0], outcome.Net[0], 100*outcome.Treaties[0].Reinstated[0])
	// Output: recovered 50000000 for 100 %, net 50000000, 83 % of the premium due again
}

func ExampleTreaty_Describe() {
	t := treaty.Treaty{Kind: treaty.EventExcess, Retention: 40, Limit: 60, Share: 1, Reinstatements: []float64{1}}
	fmt.Println(t.Describe(func(x float64) string { return strings.TrimSuffix(fmt.Sprintf("%.1fm", x), ".0m") + "m" }))
	// Output: 60m xs 40m per event, 100 % placed, 1 reinstatement at 100 %
}
