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
