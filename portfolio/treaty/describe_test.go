package treaty_test

import (
	"fmt"
	"math"
	"testing"

	"cedewright/portfolio/treaty"
)

// TestDescribe: the line of terms for every kind and every term.
func TestDescribe(t *testing.T) {
	inf := math.Inf(1)
	for want, u := range map[string]treaty.Treaty{
		"20 % of every loss": {Kind: treaty.QuotaShare, Cession: 0.2},
		"60m xs 40m per event, 100 % placed, unlimited free reinstatements":                       {Kind: treaty.EventExcess, Limit: 60, Retention: 40, Share: 1},
		"unlimited xs 40m per event, 37.5 % placed, unlimited free reinstatements":                {Kind: treaty.EventExcess, Limit: inf, Retention: 40, Share: 0.375},
		"60m xs 40m per event, 50 % placed, no reinstatement":                                     {Kind: treaty.EventExcess, Limit: 60, Retention: 40, Share: 0.5, Reinstatements: []float64{}},
		"60m xs 40m per event, 50 % placed, 1 reinstatement at 100 %":                             {Kind: treaty.EventExcess, Limit: 60, Retention: 40, Share: 0.5, Reinstatements: []float64{1}},
		"60m xs 40m per event, 50 % placed, 2 reinstatements at 100 %":                            {Kind: treaty.EventExcess, Limit: 60, Retention: 40, Share: 0.5, Reinstatements: []float64{1, 1}},
		"60m xs 40m per event, 50 % placed, annual deductible 10m, 2 reinstatements at 0 %, 50 %": {Kind: treaty.EventExcess, Limit: 60, Retention: 40, Share: 0.5, Reinstatements: []float64{0, 0.5}, AnnualDeductible: 10},
		"5m xs 2m per risk, 33.33 % placed, at most 12m per event, annual limit 30m":              {Kind: treaty.RiskExcess, Limit: 5, Retention: 2, Share: 1. / 3, EventLimit: 12, AnnualLimit: 30},
		"40m xs 70m of the year's losses, 100 % placed":                                           {Kind: treaty.AggregateExcess, Limit: 40, Retention: 70, Share: 1},
	} {
		if got := u.Describe(func(x float64) string { return fmt.Sprintf("%vm", x) }); got != want {
			t.Errorf("got  %s\nwant %s", got, want)
		}
	}
}
