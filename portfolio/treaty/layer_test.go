package treaty_test

import (
	"bufio"
	"fmt"
	"math"
	"os"
	"strconv"
	"strings"
	"testing"

	"cedewright/portfolio/loss"
	"cedewright/portfolio/treaty"
)

// TestLayerArithmetic: edges of a layer and of its annual terms, by hand.
func TestLayerArithmetic(t *testing.T) {
	inf := math.Inf(1)
	layer := treaty.Treaty{Kind: treaty.EventExcess, Retention: 50, Limit: 100}
	for x, want := range map[float64]float64{0: 0, 49.5: 0, 50: 0, 50.25: 0.25, 149: 99, 150: 100, 1e12: 100} {
		if got := layer.LayerLoss(x); got != want {
			t.Errorf("100 xs 50 of %v: %v, want %v", x, got, want)
		}
	}
	if got := (treaty.Treaty{Kind: treaty.QuotaShare, Cession: 0.2}).LayerLoss(7); got != 7 {
		t.Errorf("quota share of 7: %v, want all of it", got)
	}
	for _, c := range []struct {
		terms                   treaty.Treaty
		limit                   float64 // of a year
		layers, recovery, again float64 // layer losses of a year, what of it is recovered, fraction of the premium due again
	}{
		{treaty.Treaty{Kind: treaty.QuotaShare, Cession: 0.5}, inf, 70, 70, 0},
		{treaty.Treaty{Kind: treaty.AggregateExcess, Limit: 40}, 40, 40, 40, 0},
		{treaty.Treaty{Kind: treaty.EventExcess, Limit: 100}, inf, 700, 700, 0},
		{treaty.Treaty{Kind: treaty.RiskExcess, Limit: inf, AnnualDeductible: 10}, inf, 8, 0, 0},
		{treaty.Treaty{Kind: treaty.RiskExcess, Limit: inf, AnnualDeductible: 10, AnnualLimit: 30}, 30, 41, 30, 0},
		{treaty.Treaty{Kind: treaty.EventExcess, Limit: 100, Reinstatements: []float64{}}, 100, 150, 100, 0},
		{treaty.Treaty{Kind: treaty.EventExcess, Limit: 100, Reinstatements: []float64{1}}, 200, 150, 150, 1},
		{treaty.Treaty{Kind: treaty.EventExcess, Limit: 100, Reinstatements: []float64{1, 0.5}}, 300, 150, 150, 1.25},
		{treaty.Treaty{Kind: treaty.EventExcess, Limit: 100, Reinstatements: []float64{0, 0.5}}, 300, 150, 150, 0.25},
		{treaty.Treaty{Kind: treaty.EventExcess, Limit: 100, Reinstatements: []float64{1, 0.5}, AnnualDeductible: 50}, 300, 500, 300, 1.5},
		{treaty.Treaty{Kind: treaty.EventExcess, Limit: 100, Reinstatements: []float64{1, 1}}, 300, 25, 25, 0.25},
	} {
		recovery := c.terms.AnnualRecovery(c.layers)
		if limit := c.terms.AnnualRecoveryLimit(); limit != c.limit || recovery != c.recovery || c.terms.Reinstated(recovery) != c.again {
			t.Errorf("%+v: limit %v, recovery %v, reinstated %v", c, limit, recovery, c.terms.Reinstated(recovery))
		}
	}
}

// TestSubjectPremium: premiums 100 and 40 of two classes, by hand.
func TestSubjectPremium(t *testing.T) {
	p := treaty.Programme{Treaties: []treaty.Treaty{
		{Name: "first", Kind: treaty.QuotaShare, Cession: 0.25, Classes: []string{"a"}},
		{Name: "cover", Kind: treaty.EventExcess, Limit: 1, Share: 1},
		{Name: "second", Kind: treaty.QuotaShare, Cession: 0.5, After: []string{"first", "cover"}},
		{Name: "third", Kind: treaty.QuotaShare, Cession: 0.1, After: []string{"first", "second"}},
		{Name: "other", Kind: treaty.QuotaShare, Cession: 0.1, Classes: []string{"b"}, After: []string{"first"}},
		{Name: "last", Kind: treaty.QuotaShare, Cession: 1, After: []string{"other", "second"}},
	}}
	for i, want := range map[int]float64{
		0: 100,
		2: 75 + 40,        // an excess cover takes no part of the premium
		3: 37.5 + 20,      // a: 100 less 25, less half of the 75; b: 40 less half
		4: 40,             // of b, of which first takes nothing
		5: 62.5 + 40 - 24, // a: 100 less the 37.5 of second; b: 40 less 4 of other and 20 of second
	} {
		if got := p.SubjectPremium(i, []string{"a", "b"}, []float64{100, 40}); math.Abs(got-want) > 1e-12 { // some roundings of numbers of 100
			t.Errorf("%s: %v, want %v", p.Treaties[i].Name, got, want)
		}
	}
}

// TestDanishLayersByLine: layers on the parts of the Danish fire losses (testdata/danish-layers.csv, computed with R from the same file and
// recomputed with scipy): what each line loses, through treaties that cover that class alone.
func TestDanishLayersByLine(t *testing.T) {
	f, err := os.Open("../../testdata/danish-fire-by-line.csv")
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	lines := []string{"buildings", "contents", "profits"}
	history, err := loss.ReadHistory(f, "danish", loss.HistoryFormat{Date: "loss_date", Parts: lines, Scale: 1})
	if err != nil {
		t.Fatal(err)
	}
	var rows []loss.Row
	for i, l := range history {
		for k, part := range l.Parts {
			rows = append(rows, loss.Row{Year: l.Date.Year() - 1979, Event: fmt.Sprint(i), Class: lines[k], Loss: part})
		}
	}
	table := tableOf(t, 11, lines, rows...)
	expected, err := os.Open("testdata/danish-layers.csv")
	if err != nil {
		t.Fatal(err)
	}
	defer expected.Close()
	tested := 0
	for scanner := bufio.NewScanner(expected); scanner.Scan(); {
		fields := strings.Split(scanner.Text(), ",")
		if strings.HasPrefix(scanner.Text(), "#") || fields[0] == "line" {
			continue
		}
		x := make([]float64, len(fields)-1)
		for i := range x {
			if x[i], err = strconv.ParseFloat(fields[i+1], 64); err != nil {
				t.Fatal(err)
			}
		}
		checkDanishLayer(t, table, fields[0], x)
		tested++
	}
	if tested != 9 {
		t.Errorf("%d layers compared, want 9", tested)
	}
}

// checkDanishLayer compares a layer with a row of danish-layers.csv after its line.
func checkDanishLayer(t *testing.T, table *loss.Table, line string, x []float64) {
	cover := treaty.Treaty{Name: "l", Kind: treaty.EventExcess, Classes: []string{line}, Limit: x[0], Retention: x[1], Share: 1}
	free := apply(t, table, cover).Treaties[0]
	cover.Reinstatements = []float64{1, 1}
	paid := apply(t, table, cover).Treaties[0]
	sum, worst, squares, withLoss, capped, reinstated := 0.0, 0.0, 0.0, 0.0, 0.0, 0.0
	for y, r := range free.Recovery {
		sum, worst = sum+r, max(worst, r)
		capped, reinstated = capped+paid.Recovery[y]/11, reinstated+paid.Reinstated[y]/11
		if r > 0 {
			withLoss++
		}
	}
	for _, r := range free.Recovery {
		squares += (r - sum/11) * (r - sum/11)
	}
	attached := 0.0
	for _, r := range free.RowRecovery {
		if r > 0 {
			attached++
		}
	}
	// the columns after limit and retention; 1e-9 relative: sums of some hundred numbers, printed with twelve digits.
	for i, got := range []float64{attached, sum, sum / 11, math.Sqrt(squares / 10), withLoss, worst, capped, reinstated, capped / (1 + reinstated)} {
		if want := x[2+i]; math.Abs(got-want) > 1e-9*want {
			t.Errorf("%s %v xs %v, column %d: %v, want %v", line, x[0], x[1], 2+i, got, want)
		}
	}
}
