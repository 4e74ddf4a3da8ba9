package report

import (
	"encoding/csv"
	"io"
	"strconv"
	"strings"

	"cedewright/cmd/internal/study"
)

// FrontierCSV writes the frontier, a programme a row, money in the study's currency.
func FrontierCSV(w io.Writer, s study.Searched) error {
	out := csv.NewWriter(w)
	rows := [][]string{{"programme", "capital_relief", "capital_relief_error", "ceded_margin", "ceded_margin_error", "total_cost", "total_cost_error",
		"required_capital", "ceded_premium", "rent", "treaties", "terms"}}
	number := func(x float64) string { return strconv.FormatFloat(x, 'g', 12, 64) }
	for _, p := range s.Result.Frontier {
		var terms []string
		for _, t := range p.Treaties {
			terms = append(terms, t.Terms.Name+": "+t.Terms.Describe(Money))
		}
		rent := ""
		if p.RentDefined {
			rent = number(p.Rent.Value)
		}
		c := p.Capital[0]
		rows = append(rows, []string{
			harmless(p.Programme.Name), number(c.Relief.Value), number(c.Relief.StandardError), number(p.CededMargin.Value), number(p.CededMargin.StandardError),
			number(p.TotalCost.Value), number(p.TotalCost.StandardError), number(c.Net.Value), number(p.CededPremium.Value), rent,
			strconv.Itoa(len(p.Treaties)), harmless(strings.Join(terms, "; ")),
		})
	}
	if err := out.WriteAll(rows); err != nil {
		return err
	}
	return out.Error()
}

// harmless keeps a spreadsheet from reading text as a formula.
func harmless(text string) string {
	if text != "" && strings.ContainsRune("=+-@\t\r", rune(text[0])) {
		return "'" + text
	}
	return text
}
