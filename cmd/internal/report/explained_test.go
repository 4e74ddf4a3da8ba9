package report

import (
	"bytes"
	"encoding/json"
	"encoding/xml"
	"errors"
	"io"
	"math"
	"strings"
	"testing"

	"cedewright/cmd/internal/study"
	"cedewright/market"
	"cedewright/optimize"
)

func explainedPrices(name string) []optimize.ExplainedPrice {
	return []optimize.ExplainedPrice{
		{Treaty: name, Allowed: &market.Interval{Low: 0.091, High: 0.12}, Explanation: market.Explanation{Expected: 2e6, Distorted: 5e6, Base: 5.2e6, Reinstatement: 0.2e6, Brokerage: 0.5e6, Multiple: 2.6, RateOnLine: 0.1,
			Slices: []market.Slice{{From: 0, To: 20e6, Hit: 0.05, Expected: 0.9e6, Price: 2e6}, {From: 20e6, To: 35e6, Hit: 0.03, Expected: 1.1e6, Price: 3e6}}}},
		{Treaty: "quoted", Explanation: market.Explanation{Expected: 1e6, Distorted: math.NaN(), Base: 2e6, Multiple: 2, RateOnLine: math.NaN(),
			Slices: []market.Slice{{From: 0, To: 1e6, Hit: 0.01, Expected: 1e6, Price: math.NaN()}}}},
		{Treaty: "never hit", Explanation: market.Explanation{Distorted: 0, Base: 1e5, Multiple: math.NaN(), RateOnLine: 0.01}},
	}
}

func TestExplainedPrices(t *testing.T) {
	prices := explainedPrices(`<wind> & "fire"`)
	table := priceTable(prices)
	if len(table.Rows) != 3 || table.Rows[0][4] != "2.60" || table.Rows[1][2] != "–" || table.Rows[1][5] != "–" || table.Rows[0][6] != "9.10–12.00 %" || table.Rows[1][6] != "–" || table.Rows[2][4] != "–" {
		t.Errorf("table %q", table.Rows)
	}
	panels := string(pricePanels(prices, "EUR"))
	if strings.Count(panels, "<figure>") != 1 { // a price without a curve, or of a layer that is never hit, has no picture
		t.Errorf("panels %s", panels)
	}
	d := xml.NewDecoder(strings.NewReader("<all>" + panels + "</all>"))
	for {
		if _, err := d.Token(); errors.Is(err, io.EOF) {
			break
		} else if err != nil {
			t.Fatalf("%v in %s", err, panels)
		}
	}
	var b bytes.Buffer
	a := study.Appraised{Programmes: []optimize.Appraisal{{}}, Prices: [][]optimize.ExplainedPrice{prices}}
	if err := AppraisedJSON(&b, a); err != nil || !json.Valid(b.Bytes()) || !strings.Contains(b.String(), `"thin_layers"`) {
		t.Errorf("%v: %s", err, b.String())
	}
}
