package market

import (
	"fmt"
	"io"
	"slices"
	"strconv"
	"time"

	"cedewright/portfolio/csvfile"
	"cedewright/portfolio/fault"
)

// quoteColumns are the columns of a file of quotes; those of optionalColumns may be left out, or their fields be empty.
var (
	quoteColumns    = append([]string{"curve", "attachment_probability", "exhaustion_probability", "expected_loss", "rate_on_line"}, optionalColumns...)
	optionalColumns = []string{"weight", "bid", "offer", "date", "rate_change", "brokerage", "line", "name", "currency"}
)

// ReadQuotes reads market-wide quotes from a CSV file, columns in any order: curve, attachment_probability, exhaustion_probability, expected_loss,
// rate_on_line and, if wanted, weight (1 when empty), bid and offer, date (2006-01-02), rate_change since then, brokerage (included or excluded),
// line (lead or following), name and currency, which must be the one given. Rates are fractions of the limit. It fails with every fault, up
// to twenty, each with its place.
func ReadQuotes(r io.Reader, file, currency string) ([]Quote, error) {
	t, err := csvfile.Open(r, file, quoteColumns, optionalColumns...)
	if err != nil {
		return nil, err
	}
	var quotes []Quote
	for t.Next() {
		q, ok := readQuote(t, currency)
		if !ok {
			continue
		}
		for _, f := range q.problems() {
			f.File, f.Column = file, t.Place(f.Key)
			t.Add(f)
		}
		quotes = append(quotes, q)
	}
	if len(quotes) == 0 && t.Faults() == nil {
		t.Add(fault.Fault{File: file, Found: "no quote", Allowed: "at least one row below the header"})
	}
	return quotes, t.Faults()
}

// readQuote reads the current record; what is wrong with it is a fault.
func readQuote(t *csvfile.Table, currency string) (Quote, bool) {
	q := Quote{Curve: t.Text("curve"), Line: t.Line(), Name: "row " + strconv.Itoa(t.Line()), Weight: 1}
	ok := true
	for _, column := range []struct {
		name string
		to   *float64
	}{
		{"attachment_probability", &q.Attachment}, {"exhaustion_probability", &q.Exhaustion}, {"expected_loss", &q.ExpectedLoss},
		{"rate_on_line", &q.RateOnLine}, {"weight", &q.Weight}, {"bid", &q.Bid}, {"offer", &q.Offer}, {"rate_change", &q.RateChange},
	} {
		if slices.Contains(optionalColumns, column.name) && t.Text(column.name) == "" {
			continue
		}
		value, fine := t.Number(column.name)
		*column.to = value
		ok = ok && fine
	}
	bad := func(column, found, allowed string) {
		t.Bad(column, found, allowed)
		ok = false
	}
	if q.Curve == "" {
		bad("curve", "the field is empty", "the name of a curve")
	}
	if name := t.Text("name"); name != "" {
		q.Name = name
	}
	if text := t.Text("date"); text != "" {
		var err error
		if q.Date, err = time.Parse(time.DateOnly, text); err != nil {
			bad("date", fmt.Sprintf("%q is not a date", text), "a date such as 2026-11-30")
		}
	}
	switch text := t.Text("brokerage"); text {
	case "", "included":
	case "excluded":
		q.BeforeBrokerage = true
	default:
		bad("brokerage", fmt.Sprintf("%q", text), "included or excluded: whether the rates contain it")
	}
	switch text := t.Text("line"); text {
	case "", "lead":
	case "following":
		q.Following = true
	default:
		bad("line", fmt.Sprintf("%q", text), "lead or following")
	}
	if text := t.Text("currency"); text != "" && text != currency {
		bad("currency", fmt.Sprintf("%q", text), fmt.Sprintf("%q, the currency of the study", currency))
	}
	return q, ok
}
