package report

import (
	"bytes"
	"encoding/json"
	"strings"
	"testing"

	"cedewright/cmd/internal/study"
	"cedewright/optimize"
)

// TestAllocationTables: totals stand below the parts, and a class that needs no capital has no return.
func TestAllocationTables(t *testing.T) {
	a := optimize.Allocation{
		Standard: "one-year", Drives: true, Gross: 300e6, Net: 200e6, Certain: -500e6,
		Classes: []optimize.ClassCapital{
			{Name: "home", Gross: est(320e6, 10e6), Net: est(215e6, 8e6), GrossMean: 40e6, NetMean: 30e6},
			{Name: "motor\x07", Gross: est(-20e6, 2e6), Net: est(-15e6, 2e6), GrossMean: 10e6, NetMean: 10e6},
		},
		Perils:   []optimize.PerilCapital{{Name: "wind", Gross: est(800e6, 9e6), Net: est(700e6, 9e6)}},
		Treaties: []optimize.TreatyCapital{{Name: "layer", StandAlone: 90e6, LastIn: 100e6, Natural: est(100e6, 6e6)}},
	}
	classes := classCapitalTable(a, 0.09)
	if last := classes.Rows[len(classes.Rows)-1]; last[0] != "all classes" || last[1] != "300m" || last[2] != "50m" || last[3] != "17 %" || last[6] != "20 %" {
		t.Errorf("totals %q", last)
	}
	if classes.Rows[1][0] != "motor" || classes.Rows[1][3] != "–" {
		t.Errorf("a class without capital: %q", classes.Rows[1])
	}
	if n := len(allocationTables(a, 0.09)); n != 3 {
		t.Errorf("%d tables", n)
	}
	appraised := study.Appraised{Programmes: []optimize.Appraisal{sketch{name: "p", net: est(200e6, 8e6), tail: est(300e6, 8e6)}.appraisal()}, Allocations: [][]optimize.Allocation{{a}}}
	var b bytes.Buffer
	if err := AppraisedJSON(&b, appraised); err != nil || !json.Valid(b.Bytes()) || !strings.Contains(b.String(), `"stand_alone": 90000000`) {
		t.Errorf("%v: %s", err, b.String())
	}
	b.Reset()
	PrintAppraised(&b, appraised, Style{})
	for _, want := range []string{"Where the capital of “one-year” comes from", "expenses less premiums", "by natural allocation"} {
		if !strings.Contains(b.String(), want) {
			t.Errorf("the terminal does not say %q:\n%s", want, b.String())
		}
	}
}

// TestAllocationsByStandard: the standard that drives comes first, and a standard's tables leave out what it does not know.
func TestAllocationsByStandard(t *testing.T) {
	a := companyAppraised()
	list := allocationsOf(a, "expiring")
	if len(list) != 3 || list[0].Standard != "one-year" || list[1].Standard != "charges" || list[2].Standard != "formula" || a.Allocations[1][0].Standard != "charges" {
		t.Fatalf("allocations %v", list)
	}
	head := func(k optimize.Allocation) string {
		var heads []string
		for _, table := range allocationTables(k, 0) {
			heads = append(heads, strings.Join(table.Head, ","))
			for _, row := range table.Rows {
				if len(row) != len(table.Head) {
					t.Errorf("%s: %q under %q", k.Standard, row, table.Head)
				}
			}
		}
		return strings.Join(heads, "|")
	}
	for i, want := range []string{
		"class,gross capital,result,return,cost,net capital,result,return,cost|peril,losses in the gross capital,losses in the years that set the net capital|treaty frees,alone,last in,by natural allocation,cost a year",
		"peril, charge,gross capital,net capital|treaty frees,alone,last in,by natural allocation",
		"class,gross capital,expected result,return,net capital,expected result,return|treaty frees,alone,last in,by natural allocation",
	} {
		if got := head(list[i]); got != want {
			t.Errorf("%s has %s, want %s", list[i].Standard, got, want)
		}
	}
	rows := classCapitalTable(list[2], 0).Rows
	var names []string
	for _, row := range rows {
		names = append(names, row[0])
	}
	if got := strings.Join(names, ","); got != "household,motor,commercial,liability,all classes,default of Harbour Re,default of Dune Re,market risk,together" {
		t.Errorf("rows %s", got)
	}
	if last := rows[len(rows)-1]; last[1] != "462m" || last[2] != "–" {
		t.Errorf("together %q", last)
	}
	if charges := chargeTable(list[1]).Rows; len(charges) != 4 || charges[2][0] != "charge R1" {
		t.Errorf("charges %q", charges)
	}
	if text := allocationWords(list...); !strings.Contains(text, "size times its slope") || strings.Contains(allocationWords(list[0]), "slope") {
		t.Errorf("words %q", text)
	}
	if _, ok := drivingAllocation(a, "no such"); ok {
		t.Error("a programme that is not there has an allocation")
	}
}

// TestCostOfCapitalParts: at a flat rate a cost bears the rate times the capital's error; at the owners' own price it is shown as finely as the capital.
func TestCostOfCapitalParts(t *testing.T) {
	u := unitFor(5e6)
	if got := u.cost(9e6, est(100e6, 3e6), 0.09); got != "9.0m ± 0.3m" {
		t.Errorf("at a flat rate %s", got)
	}
	if got := u.cost(8.765e6, est(100e6, 30e6), 0); got != "9m" {
		t.Errorf("at the owners' price %s", got)
	}
	if got := u.cost(8.765e6, est(0, 0), 0); got != "8.76m" && got != "8.77m" {
		t.Errorf("without an error %s", got)
	}
}
