package market

import (
	"io"
	"strconv"

	"cedewright/portfolio/csvfile"
	"cedewright/portfolio/fault"
)

// ReadQuotes reads market-wide quotes from a CSV file with the columns curve, attachment_probability, exhaustion_probability,
// expected_loss, rate_on_line and, if wanted, weight (1 when missing or empty), bid and offer, in any order. Rates are fractions of the limit,
// brokerage included. It fails with every fault, up to twenty, each with its place.
func ReadQuotes(r io.Reader, file string) ([]Quote, error) {
	t, err := csvfile.Open(r, file, []string{"curve", "attachment_probability", "exhaustion_probability", "expected_loss", "rate_on_line", "weight", "bid", "offer"}, "weight", "bid", "offer")
	if err != nil {
		return nil, err
	}
	var quotes []Quote
	for t.Next() {
		q := Quote{Curve: t.Text("curve"), Line: t.Line(), Name: "row " + strconv.Itoa(t.Line()), Weight: 1}
		ok := true
		for _, column := range []struct {
			name string
			to   *float64
		}{
			{"attachment_probability", &q.Attachment}, {"exhaustion_probability", &q.Exhaustion}, {"expected_loss", &q.ExpectedLoss},
			{"rate_on_line", &q.RateOnLine}, {"weight", &q.Weight}, {"bid", &q.Bid}, {"offer", &q.Offer},
		} {
			if optional := column.to == &q.Weight || column.to == &q.Bid || column.to == &q.Offer; optional && t.Text(column.name) == "" {
				continue
			}
			value, fine := t.Number(column.name)
			*column.to = value
			ok = ok && fine
		}
		if q.Curve == "" {
			t.Bad("curve", "the field is empty", "the name of a curve")
			ok = false
		}
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
