package report

import (
	"bytes"
	"encoding/json"
	"strings"
	"testing"

	"cedewright/cmd/internal/study"
	"cedewright/optimize"
	"cedewright/portfolio/capital"
)

func TestDriving(t *testing.T) {
	a := companyAppraised()
	if got := driving(a, true); got != "the worst of “one-year” and “rating”" {
		t.Errorf("two that drive are named %s", got)
	}
	a.Drive = []string{"tail\x07"}
	if got := driving(a, false); got != "tail" {
		t.Errorf("one that drives is named %q", got)
	}
	a.Drive = nil
	if got := driving(a, false); got != "rating" {
		t.Errorf("what drives no cover is named %q", got)
	}
}

// groupNamed gives the rows of a group of figures by name.
func groupNamed(t *testing.T, groups []figureGroup, name string) map[string][]string {
	t.Helper()
	for _, g := range groups {
		if strings.HasPrefix(g.name, name) {
			rows := map[string][]string{}
			for _, r := range g.rows {
				rows[r.name] = r.cells
			}
			return rows
		}
	}
	t.Errorf("no group is named %s…", name)
	return nil
}

// TestCapitalUnderEveryStandard: the binding standard of each programme bears a mark, no other does, and with a rest of the company both sides of the
// diversification are shown.
func TestCapitalUnderEveryStandard(t *testing.T) {
	a := companyAppraised()
	a.Programmes[1].Capital[1].Binding, a.Programmes[1].Capital[3].Binding = false, true
	groups := figureGroups(a, a.Programmes)
	after := groupNamed(t, groups, "Required capital after diversification")
	for name, marks := range map[string][3]bool{"one-year (drives)": {}, "tail": {true, false, true}, "rating (drives)": {}, "formula": {false, true, false}, "charges": {}} {
		for i, cell := range after[name] {
			if strings.HasPrefix(cell, bindingMark) != marks[i] {
				t.Errorf("%s under programme %d reads %q", name, i, cell)
			}
		}
	}
	if before := groupNamed(t, groups, "Required capital of the book alone"); len(before) != 3 || before["one-year (drives)"][1] != "309m ± 7m" {
		t.Errorf("before diversification: %q", before)
	}
	if relief := groupNamed(t, groups, "Capital relief after"); len(relief) != 5 || relief["formula"][1] != "29.6m" {
		t.Errorf("reliefs %q", relief)
	}
	one := a
	for i := range one.Programmes {
		one.Programmes[i].Capital = one.Programmes[i].Capital[:1]
		one.Programmes[i].Capital[0].Binding = true
	}
	rows := groupNamed(t, figureGroups(one, one.Programmes), "Capital under the standard “one-year”")
	for _, name := range []string{"required capital, book alone", "required capital, diversified", "capital relief, book alone", "capital relief, diversified", "own funds ratio"} {
		if cells := rows[name]; len(cells) != 3 || strings.Contains(cells[0], bindingMark) {
			t.Errorf("%s under a single standard: %q", name, cells)
		}
	}
}

// TestTotalCostRows: unpaid recoveries stand in the total cost only with a register of reinsurers, the owners' price only with a distortion of theirs.
func TestTotalCostRows(t *testing.T) {
	for _, c := range []struct {
		a     study.Appraised
		name  string
		wants []string
		never []string
	}{
		{companyAppraised(), "Total cost, a year (owners' price of risk: Wang, λ 0.3)", []string{"+ expected unpaid recoveries", "+ owners' price of the risk kept", "owners' price / capital"}, []string{"+ capital cost at 9 %"}},
		{marramAppraised(), "Total cost, a year", []string{"+ capital cost at 9 %"}, []string{"+ expected unpaid recoveries", "+ owners' price of the risk kept", "owners' price / capital"}},
	} {
		rows := groupNamed(t, figureGroups(c.a, c.a.Programmes), c.name)
		for _, want := range c.wants {
			if rows[want] == nil {
				t.Errorf("%s has no row %s", c.name, want)
			}
		}
		for _, never := range c.never {
			if rows[never] != nil {
				t.Errorf("%s has the row %s", c.name, never)
			}
		}
	}
}

// TestParts: criteria, modules and charges side by side; what sets the requirement bears a mark, what is no part of it stands below once.
func TestParts(t *testing.T) {
	a := companyAppraised()
	tables := partsTables(a, a.Programmes)
	if len(tables) != 3 {
		t.Fatalf("%d tables", len(tables))
	}
	rating, formula := tables[0], tables[1]
	if len(rating.Rows) != 3 || !strings.HasPrefix(rating.Rows[1][1], bindingMark) || strings.HasPrefix(rating.Rows[0][1], bindingMark) || rating.Rows[2][1] != "446m ± 7m" {
		t.Errorf("criteria %q", rating.Rows)
	}
	if !strings.Contains(rating.Title, "sets it") || strings.Contains(formula.Title, "sets it") {
		t.Errorf("titles %q and %q", rating.Title, formula.Title)
	}
	if last := formula.Rows[len(formula.Rows)-1]; len(formula.Rows) != 6 || last[0] != "required capital" || last[1] != "462m" {
		t.Errorf("modules %q", formula.Rows)
	}
	a.Rest, a.Standards[2].Combination = otherRisks, capital.Weighted
	a.Standards[2].Criteria[0].Weight = 0.6
	rating = partsTables(a, a.Programmes)[0]
	if len(rating.Rows) != 4 || rating.Rows[2][0] != "together, book alone" || rating.Rows[0][0] != "value-at-risk 99.5%, weight 60 %" {
		t.Errorf("weighted criteria of a book beside other risks: %q", rating.Rows)
	}
	// A part is shown no finer than the requirement.
	c := optimize.CapitalFigure{Net: est(80.5e6, 16e6), Parts: []optimize.CapitalPart{{Amount: 80.5432e6, Sets: true}, {}}}
	exact := c
	exact.Net.StandardError = 0.004e6
	u := unitFor(80e6)
	if got := partCell(exact, 0, u); got != bindingMark+"80.5m" {
		t.Errorf("a part of an almost exact requirement reads %q", got)
	}
	for n, want := range []string{bindingMark + "81m", "0", "–"} {
		if got := partCell(c, n, u); got != want {
			t.Errorf("part %d reads %q, want %q", n, got, want)
		}
	}
}

func TestStandardsWords(t *testing.T) {
	a := companyAppraised()
	text := strings.Join(standardsWords(a), "\n")
	for _, want := range []string{"one-year, which drives: value-at-risk 99.5% on basis result; source: Directive 2009/138/EC", "the worst of", "windstorm and flood each at 99%",
		"Rest of the company: a yearly loss, lognormal, mean 20m", "checked against the law in force by the responsible actuary"} {
		if !strings.Contains(text, want) {
			t.Errorf("the standards do not say %q:\n%s", want, text)
		}
	}
	a.Standards, a.Rest = a.Standards[:3], otherRisks
	text = strings.Join(standardsWords(a), "\n")
	if strings.Contains(text, formulaCaution) || !strings.Contains(text, "required capital of 150m, correlation 0.25") {
		t.Errorf("without a formula the standards say:\n%s", text)
	}
}

func TestLeftOut(t *testing.T) {
	for _, c := range []struct {
		a     study.Appraised
		want  string
		never string
	}{
		{marramAppraised(), "neither default nor dispute", "formula or a covariance"},
		{companyAppraised(), "Reinsurers fail or pay in full", "neither default nor dispute"},
		{study.Appraised{Standards: companyStandards()[3:]}, "Under a formula or a covariance", "simulated net result"},
		{study.Appraised{Standards: companyStandards()}, "Required capital under a simulated standard is", "rest of the company"},
	} {
		text := strings.Join(leftOut(c.a), "\n")
		if !strings.Contains(text, c.want) || strings.Contains(text, c.never) {
			t.Errorf("want %q and not %q in:\n%s", c.want, c.never, text)
		}
	}
}

// TestRoughRate: a ratio is shown no finer than the most that its error can be.
func TestRoughRate(t *testing.T) {
	for _, c := range []struct {
		over, under optimize.Estimate
		want        string
	}{
		{est(7.1e6, 0), est(100e6, 0), "7.1 %"},
		{est(7.123e6, 0.1e6), est(100e6, 1e6), "7.12 %"}, // the error is at most 0.17 %
		{est(7.123e6, 1e6), est(100e6, 10e6), "7.1 %"},   // at most 1.7 %
		{est(7.123e6, 2e6), est(100e6, 20e6), "7 %"},     // at most 3.4 %
		{est(1e6, 0), est(0, 0), "–"}, {est(1e6, 0), est(-5, 0), "–"},
	} {
		if got := roughRate(c.over, c.under); got != c.want {
			t.Errorf("%v over %v reads %s, want %s", c.over, c.under, got, c.want)
		}
	}
}

// TestOwnersWords: with a price of risk of the owners' own, rent is compared with what they would ask, and nowhere is a flat rate spoken of.
func TestOwnersWords(t *testing.T) {
	s := companySearched()
	for _, want := range []string{"against about 7.1 % that the owners would ask for that risk", "required capital (the worst of one-year and rating)", "Margin, unpaid recoveries and the owners' price of the risk kept together are"} {
		if text := Recommendation(s); !strings.Contains(text, want) {
			t.Errorf("%q does not say %q", text, want)
		}
	}
	var page bytes.Buffer
	if err := Paper(&page, s, nil); err != nil {
		t.Fatal(err)
	}
	for _, never := range []string{"own capital costs", "costs less than own capital", "costs less a year than own capital", "0 %</b>"} {
		if strings.Contains(page.String(), never) {
			t.Errorf("the page says %q", never)
		}
	}
	s.Owners, s.CostOfCapital, s.Security = "", 0.09, nil
	if text := Recommendation(s); !strings.Contains(text, "against a cost of capital of 9 %") || !strings.Contains(text, "Margin and cost of capital together are") {
		t.Errorf("at a flat rate: %s", text)
	}
}

// TestCapitalFields: the fields that scripts read of capital and security.
func TestCapitalFields(t *testing.T) {
	var b bytes.Buffer
	a := companyAppraised()
	if err := AppraisedJSON(&b, a); err != nil {
		t.Fatal(err)
	}
	var d struct {
		Drive         []string
		Owners        *string
		CostOfCapital *float64 `json:"cost_of_capital"`
		Rest          struct{ Law string }
		Standards     []struct{ Name, Kind, Source string }
		Security      struct {
			Correlation float64
			Reinsurers  []struct {
				Name     string
				Default  float64 `json:"default_probability"`
				Step     *int    `json:"credit_quality_step"`
				Expected []struct{ Value float64 }
			}
		}
		Programmes []struct {
			Unpaid  float64 `json:"expected_unpaid"`
			Driving struct{ Standard string }
			Capital []struct {
				Binding bool
				Alone   *struct{ Net float64 }
				Parts   []struct {
					Name       string
					Gross, Net float64
					Sets       bool
				}
			}
			Treaties []struct {
				Unpaid float64 `json:"expected_unpaid"`
				Panel  []struct {
					Reinsurer         string
					Share, Collateral float64
				}
			}
		}
		Allocations []struct {
			Programme, Standard string
			Drives              bool
			Others              []struct{ Name string }
		}
	}
	if err := json.Unmarshal(b.Bytes(), &d); err != nil {
		t.Fatal(err)
	}
	p := d.Programmes[1]
	if len(d.Drive) != 2 || d.Owners == nil || *d.Owners != a.Owners || d.CostOfCapital != nil || d.Rest.Law != companyRest.Law || len(d.Standards) != 5 || d.Standards[3].Kind != "formula" {
		t.Errorf("settings %+v", d)
	}
	if len(d.Security.Reinsurers) != 3 || d.Security.Reinsurers[2].Step != nil || *d.Security.Reinsurers[0].Step != 2 {
		t.Errorf("reinsurers %+v", d.Security)
	}
	if p.Driving.Standard != "rating" || !p.Capital[1].Binding || p.Capital[0].Binding || p.Capital[0].Alone == nil || p.Capital[3].Alone != nil || !p.Capital[2].Parts[1].Sets || len(p.Capital[0].Parts) != 0 {
		t.Errorf("programme %+v", p)
	}
	if p.Unpaid != a.Programmes[1].ExpectedUnpaid.Value || p.Treaties[1].Unpaid != a.Programmes[1].Treaties[1].ExpectedUnpaid.Value || p.Treaties[1].Panel[0].Collateral != 5e6 {
		t.Errorf("unpaid %v, treaty %+v", p.Unpaid, p.Treaties[1])
	}
	if len(d.Allocations) != 9 || d.Allocations[1].Standard != "one-year" || !d.Allocations[1].Drives || len(d.Allocations[1].Others) != 1 {
		t.Errorf("allocations %+v", d.Allocations)
	}
}
