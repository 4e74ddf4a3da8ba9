package treaty_test

import (
	"fmt"
	"math"
	"math/rand/v2"
	"slices"
	"testing"

	"cedewright/portfolio/loss"
	"cedewright/portfolio/portfoliotest"
	"cedewright/portfolio/treaty"

	"pgregory.net/rapid"
)

// hair is the tolerance between the engine and figures without rounding: 1e-9 relative to the drawn amounts, which reach 1e8; sums of some
// twenty of them err by 1e-7 at most.
const hair = 1e-9 * 1e8

// termsOf turns drawn terms into a treaty.
func termsOf(t fataler, u portfoliotest.Terms) treaty.Treaty {
	kind, err := treaty.ParseKind(u.Kind)
	if err != nil {
		t.Fatal(err)
	}
	return treaty.Treaty{
		Name: u.Name, Kind: kind, Classes: u.Classes, Perils: u.Perils, After: u.After, Cession: u.Cession,
		Retention: u.Retention, Limit: u.Limit, Share: u.Share, AnnualDeductible: u.AnnualDeductible, AnnualLimit: u.AnnualLimit,
		Reinstatements: u.Reinstatements, EventLimit: u.EventLimit,
	}
}

func programmeOf(t fataler, list []portfoliotest.Terms) treaty.Programme {
	p := treaty.Programme{Name: "drawn"}
	for _, u := range list {
		p.Treaties = append(p.Treaties, termsOf(t, u))
	}
	return p
}

func tableOfBook(t fataler, b portfoliotest.Book) *loss.Table {
	rows := make([]loss.Row, len(b.Rows))
	for i, r := range b.Rows {
		rows[i] = loss.Row(r)
	}
	return tableOf(t, b.Years, b.Classes, rows...)
}

// sameFigures compares figures within a tolerance.
func sameFigures(t *rapid.T, what string, got, want []float64, tolerance float64) {
	if len(got) != len(want) {
		t.Fatalf("%s: %d figures, want %d", what, len(got), len(want))
	}
	for i := range got {
		if !(math.Abs(got[i]-want[i]) <= tolerance) {
			t.Fatalf("%s: figure %d is %v, want %v", what, i, got[i], want[i])
		}
	}
}

// TestApplyAgainstBruteForce compares the engine with an oracle that shares no code with it and works in fractions without rounding.
func TestApplyAgainstBruteForce(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		b := portfoliotest.RandomBook(t)
		terms := portfoliotest.RandomProgramme(t, b)
		p, table := programmeOf(t, terms), tableOfBook(t, b)
		if err := p.Validate(b.Classes, b.Perils); err != nil {
			t.Fatalf("a drawn programme is refused: %v", err)
		}
		got, err := treaty.Apply(table, p)
		if err != nil {
			t.Fatal(err)
		}
		want := portfoliotest.Recoveries(b, terms)
		sameFigures(t, "gross", got.Gross, want.Gross, hair)
		sameFigures(t, "net", got.Net, want.Net, hair)
		for i, w := range want.Treaties {
			g, name := got.Treaties[i], terms[i].Name
			sameFigures(t, name+" subject", g.SubjectLoss, w.Subject, hair)
			sameFigures(t, name+" recovery", g.Recovery, w.Recovery, hair)
			sameFigures(t, name+" reinstated", g.Reinstated, w.Reinstated, 1e-9) // of the order of 1
			cells := cellsOf(table, g.RowRecovery)
			for c, x := range w.Cells {
				if c.Loss > 0 && math.Abs(cells[c]-x) > hair {
					t.Fatalf("%s: the row %+v recovers %v, want %v", name, c, cells[c], x)
				}
			}
			if g.AttachmentProbability != w.Attachment || g.ExhaustionProbability != w.Exhaustion {
				t.Fatalf("%s: attached and exhausted in %v and %v of years, want %v and %v", name, g.AttachmentProbability, g.ExhaustionProbability, w.Attachment, w.Exhaustion)
			}
		}
	})
}

// cellsOf sums figures of rows by what the oracle knows of a row.
func cellsOf(table *loss.Table, rows []float64) map[portfoliotest.Cell]float64 {
	c, cells := table.Columns(), map[portfoliotest.Cell]float64{}
	for y := range table.Years() {
		for row := c.Offset[y]; row < c.Offset[y+1]; row++ {
			cells[portfoliotest.Cell{Year: y + 1, Class: table.Classes()[c.Class[row]], Peril: table.Perils()[c.Peril[row]], Loss: c.Loss[row]}] += rows[row]
		}
	}
	return cells
}

// drawnCase is a book as a table and a single treaty on it that none inures to.
func drawnCase(t *rapid.T, kinds ...string) (portfoliotest.Book, *loss.Table, treaty.Treaty) {
	b := portfoliotest.RandomBook(t)
	u := portfoliotest.RandomTreaty(t, b, "cover", rapid.SampledFrom(kinds).Draw(t, "kind"))
	return b, tableOfBook(t, b), termsOf(t, u)
}

// TestSharesAdd: two shares of a treaty recover what their sum recovers; the recovery at 100 % does not know the share.
func TestSharesAdd(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		_, table, cover := drawnCase(t, portfoliotest.Kinds...)
		share := func(name string, x float64) treaty.Treaty {
			c := cover
			c.Name = name
			if c.Kind == treaty.QuotaShare {
				c.Cession = x
			} else {
				c.Share = x
			}
			return c
		}
		x := float64(rapid.IntRange(0, 100).Draw(t, "share")) / 200
		y := float64(rapid.IntRange(0, 100).Draw(t, "other share")) / 200
		two, one := apply(t, table, share("a", x), share("b", y)), apply(t, table, share("a", x+y))
		sameFigures(t, "net", two.Net, one.Net, hair)
		sameFigures(t, "recovery", two.Treaties[0].Recovery, one.Treaties[0].Recovery, 0)
		sameFigures(t, "recovery", two.Treaties[1].Recovery, one.Treaties[0].Recovery, 0)
	})
}

// TestAdjacentLayersAdd: layers that touch, unlimited in the year, recover together what one layer over both recovers.
func TestAdjacentLayersAdd(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		_, table, whole := drawnCase(t, "event-excess", "risk-excess", "aggregate-excess")
		whole.AnnualDeductible, whole.AnnualLimit, whole.Reinstatements, whole.EventLimit = 0, 0, nil, 0
		low, high := whole, whole
		low.Limit = portfoliotest.Money(t, "cut", 1, 60)
		low.Name, high.Name = "low", "high"
		high.Retention += low.Limit
		whole.Limit = low.Limit + high.Limit
		parts, one := apply(t, table, low, high), apply(t, table, whole)
		sameFigures(t, "net", parts.Net, one.Net, hair)
		sum := slices.Clone(parts.Treaties[0].Recovery)
		rows := slices.Clone(parts.Treaties[0].RowRecovery)
		for y, r := range parts.Treaties[1].Recovery {
			sum[y] += r
		}
		for row, r := range parts.Treaties[1].RowRecovery {
			rows[row] += r
		}
		sameFigures(t, "recovery", sum, one.Treaties[0].Recovery, hair)
		if whole.Kind == treaty.AggregateExcess { // of a year, all rows share alike; of several events they need not
			sameFigures(t, "recovery of rows", rows, one.Treaties[0].RowRecovery, hair)
		}
	})
}

// TestQuotaShareAndExcess: after a quota share of q, an excess recovers (1 − q) times what the terms divided by 1 − q recover of the gross
// loss; before it, the quota share takes q of what the excess leaves.
func TestQuotaShareAndExcess(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		_, table, cover := drawnCase(t, "event-excess", "risk-excess", "aggregate-excess")
		cover.Classes, cover.Perils = nil, nil
		q := float64(rapid.IntRange(0, 9).Draw(t, "tenths ceded")) / 10
		share := treaty.Treaty{Name: "share", Kind: treaty.QuotaShare, Cession: q}
		after, bigger := cover, cover
		after.After = []string{"share"}
		for _, x := range []*float64{&bigger.Retention, &bigger.Limit, &bigger.AnnualDeductible, &bigger.AnnualLimit, &bigger.EventLimit} {
			*x /= 1 - q
		}
		first, gross := apply(t, table, after, share), apply(t, table, bigger)
		want := make([]float64, table.Years())
		for y := range want {
			want[y] = (1 - q) * gross.Treaties[0].Recovery[y]
		}
		sameFigures(t, "excess after quota share", first.Treaties[0].Recovery, want, hair)
		sameFigures(t, "reinstated", first.Treaties[0].Reinstated, gross.Treaties[0].Reinstated, 1e-9)

		share.After = []string{cover.Name}
		second, alone := apply(t, table, share, cover), apply(t, table, cover)
		for y := range want {
			want[y] = (1 - q) * alone.Net[y]
		}
		sameFigures(t, "net after excess and quota share", second.Net, want, hair)
	})
}

// TestOneAfterAnother: when every treaty comes after all before it, no loss is recovered twice.
func TestOneAfterAnother(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		b := portfoliotest.RandomBook(t)
		var list []treaty.Treaty
		for i := range rapid.IntRange(1, 4).Draw(t, "treaties") {
			u := portfoliotest.RandomTreaty(t, b, fmt.Sprint("t", i), rapid.SampledFrom(portfoliotest.Kinds).Draw(t, "kind"))
			for _, earlier := range list {
				u.After = append(u.After, earlier.Name)
			}
			list = append(list, termsOf(t, u))
		}
		o := apply(t, tableOfBook(t, b), list...)
		for y, x := range o.Net {
			if x < -hair || x > o.Gross[y]+hair {
				t.Fatalf("year %d: net %v of gross %v", y, x, o.Gross[y])
			}
		}
	})
}

// TestYearsAreAlone: turning the years round turns the results round; a year without a loss recovers nothing.
func TestYearsAreAlone(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		b := portfoliotest.RandomBook(t)
		p := programmeOf(t, portfoliotest.RandomProgramme(t, b))
		turned := b
		turned.Years++ // the year 0 of the turned book has no loss
		turned.Rows = slices.Clone(b.Rows)
		for i := range turned.Rows {
			turned.Rows[i].Year = turned.Years + 1 - turned.Rows[i].Year
		}
		was, is := apply(t, tableOfBook(t, b), p.Treaties...), apply(t, tableOfBook(t, turned), p.Treaties...)
		sameFigures(t, "net", is.Net, append([]float64{0}, reversed(was.Net)...), 0)
		for i := range p.Treaties {
			sameFigures(t, "recovery", is.Treaties[i].Recovery, append([]float64{0}, reversed(was.Treaties[i].Recovery)...), 0)
			sameFigures(t, "reinstated", is.Treaties[i].Reinstated, append([]float64{0}, reversed(was.Treaties[i].Reinstated)...), 0)
		}
	})
}

// TestExactlyARetentionIsLeft: what a layer leaves of a loss over two classes is exactly its retention, which the rounding of the rows must
// not turn into an attachment, nor hide an exhaustion.
func TestExactlyARetentionIsLeft(t *testing.T) {
	const years = 2000
	r := rand.New(rand.NewPCG(1, 1))
	var rows []loss.Row
	for y := range years {
		for _, class := range []string{"a", "b"} {
			rows = append(rows, loss.Row{Year: y + 1, Event: "1", Class: class, Loss: 20.5e6 + 25e6*r.Float64()})
		}
	}
	cover := func(name string, retention, limit float64, after ...string) treaty.Treaty {
		return treaty.Treaty{Name: name, Kind: treaty.EventExcess, Retention: retention, Limit: limit, Share: 1, After: after}
	}
	o := apply(t, tableOf(t, years, []string{"a", "b"}, rows...),
		cover("upper", 40e6, 60e6), cover("lower", 0, 40e6), // both of the gross loss, all of it
		cover("at the retention", 40e6, 60e6, "upper"), cover("to the retention", 10e6, 30e6, "upper"), cover("of nothing", 0, 5e6, "upper", "lower"))
	for i, want := range [][2]float64{{1, 0}, {1, 1}, {0, 0}, {1, 1}, {0, 0}} {
		if got := o.Treaties[i]; got.AttachmentProbability != want[0] || got.ExhaustionProbability != want[1] {
			t.Errorf("treaty %d attaches in %v and is exhausted in %v of years, want %v", i, got.AttachmentProbability, got.ExhaustionProbability, want)
		}
	}
}
