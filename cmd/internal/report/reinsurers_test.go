package report

import (
	"strings"
	"testing"

	"cedewright/cmd/internal/study"
	"cedewright/optimize"
	"cedewright/portfolio/treaty"
)

func TestPanelWords(t *testing.T) {
	for want, lines := range map[string][]treaty.Line{
		"": nil,
		"Harbour Re 60 % (collateral 5m), Dune Re 40 %":         {{Reinsurer: "Harbour Re", Share: 0.6, Collateral: 5e6}, {Reinsurer: "Dune Re", Share: 0.4}},
		"Harbour Re 33.33 %, the other 66.67 % free of default": {{Reinsurer: "Harbour Re", Share: 1.0 / 3}},
		"A 10 %, B 20 %, C 70 %":                                {{Reinsurer: "A", Share: 0.1}, {Reinsurer: "B", Share: 0.2}, {Reinsurer: "C", Share: 0.7}}, // 1 only but for rounding
	} {
		if got := panelWords(treaty.Treaty{Panel: lines}); got != want {
			t.Errorf("the panel reads %q, want %q", got, want)
		}
	}
}

// TestReinsurerTables: a line's part of a treaty's expected recoveries, the errors of several treaties added up.
func TestReinsurerTables(t *testing.T) {
	if tables := reinsurerTables(marramAppraised(), marramAppraised().Programmes); tables != nil {
		t.Errorf("without a register: %v", tables)
	}
	line := func(name string, share float64) []treaty.Line {
		return []treaty.Line{{Reinsurer: name, Share: share}}
	}
	p := optimize.Appraisal{Programme: treaty.Programme{Name: "p"}, Treaties: []optimize.TreatyFigure{
		{Terms: treaty.Treaty{Panel: line("Harbour Re", 0.5)}, ExpectedRecovery: est(10e6, 1e6)},
		{Terms: treaty.Treaty{Panel: line("Harbour Re", 0.25)}, ExpectedRecovery: est(4e6, 0.4e6)},
		{Terms: treaty.Treaty{Panel: line("Dune Re", 1)}, ExpectedRecovery: est(3e6, 0)},
	}}
	if got := recoverable(p, "Harbour Re"); got != est(6e6, 0.6e6) {
		t.Errorf("recoverable %v", got)
	}
	a := study.Appraised{Security: companyRegister()}
	tables := reinsurerTables(a, []optimize.Appraisal{{Programme: treaty.Programme{Name: "no cover"}}, p})
	if len(tables) != 2 || len(tables[1].Head) != 2 || tables[1].Rows[0][1] != "6.0m ± 0.6m" || tables[1].Rows[1][1] != "3m" || tables[1].Rows[2][1] != "0" {
		t.Errorf("tables %+v", tables)
	}
	if row := tables[0].Rows[2]; row[1] != "1.2 %" || row[2] != "50 %" || row[3] != "solvency ratio of 122 %; assets tied as collateral" {
		t.Errorf("a reinsurer reads %q", row)
	}
	if tables := reinsurerTables(a, nil); len(tables) != 1 {
		t.Errorf("%d tables without a programme", len(tables))
	}
	if text := securityWords(a); !strings.Contains(text, "loading of 0.3") {
		t.Errorf("failures in bad years: %q", text)
	}
	a.Security.Correlation = 0
	if text := securityWords(a); !strings.Contains(text, "good and bad years alike") {
		t.Errorf("failures in any year: %q", text)
	}
}
