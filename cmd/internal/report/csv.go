package report

import (
	"encoding/csv"
	"io"
	"strconv"
	"strings"

	"cedewright/cmd/internal/study"
)

// FrontierCSV writes the frontier, a programme a row by rising relief, money in the study's currency, terms in words. A figure without a
// value is an empty cell. Relief and required capital are of what drives; standard names the one that asks the most of the programme.
func FrontierCSV(w io.Writer, s study.Searched) error {
	rows := [][]string{{"programme", "capital_relief", "capital_relief_error", "ceded_margin", "ceded_margin_error", "total_cost", "total_cost_error",
		"required_capital", "required_capital_error", "ceded_premium", "rent", "treaties", "terms", "standard"}}
	figure := func(x float64) string {
		if !finite(x) {
			return ""
		}
		return strconv.FormatFloat(x, 'g', 12, 64)
	}
	for _, p := range s.Result.Frontier {
		var terms []string
		for _, t := range p.Treaties {
			terms = append(terms, t.Terms.Name+": "+t.Terms.Describe(Terms))
		}
		rent := ""
		if p.RentDefined {
			rent = figure(p.Rent.Value)
		}
		c := p.Driving
		rows = append(rows, []string{
			harmless(p.Programme.Name), figure(c.Relief.Value), figure(c.Relief.StandardError), figure(p.CededMargin.Value), figure(p.CededMargin.StandardError),
			figure(p.TotalCost.Value), figure(p.TotalCost.StandardError), figure(c.Net.Value), figure(c.Net.StandardError), figure(p.CededPremium.Value), rent,
			strconv.Itoa(len(p.Treaties)), harmless(strings.Join(terms, "; ")), harmless(c.Standard),
		})
	}
	out := csv.NewWriter(w)
	if err := out.WriteAll(rows); err != nil {
		return err
	}
	return out.Error()
}

// harmless keeps a spreadsheet from reading text as a formula, whatever blanks stand before its first sign.
func harmless(text string) string {
	if first := strings.TrimLeft(text, " \u00a0"); first != "" && strings.ContainsRune("=+-@\t\r\n", []rune(first)[0]) {
		return "'" + text
	}
	return text
}
