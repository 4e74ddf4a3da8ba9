package market

import (
	"fmt"
	"math"
	"time"

	"cedewright/portfolio/fault"
)

// Arrival is what is said of a quote when it comes in, before it can be compared with others.
type Arrival struct {
	Date            time.Time // when it was given; zero = today
	RateChange      float64   // change of the market since then, as a fraction: 0.1 brings a rate of 5 % to 5.5 %; above −1
	BeforeBrokerage bool      // its rates leave brokerage out
	Following       bool      // a reinsurer's that follows the terms of another: it speaks half as much
}

// followingWeight is the weight of a following quote beside the lead's (our own choice: it repeats terms more than it sets them).
const followingWeight = 0.5

// Today says how quotes of different ages become comparable.
type Today struct {
	Date      time.Time // zero: ages are not looked at
	HalfLife  float64   // years after which a quote counts half; 0 = age does not matter
	Brokerage float64   // of the curve, fraction of premium
}

// Current brings quotes to today: rates by their rate change and to include brokerage, weights by their age and place. It gives new quotes and reports
// every one that cannot be brought.
func (t Today) Current(quotes []Quote) ([]Quote, error) {
	var faults fault.List
	current := make([]Quote, len(quotes))
	for i, q := range quotes {
		add := func(key, found, allowed string) {
			if q.Name != "" {
				key = q.Name + "." + key
			}
			faults.Add(fault.Fault{Line: q.Line, Key: key, Found: found, Allowed: allowed})
		}
		if !(q.RateChange > -1) || math.IsInf(q.RateChange, 0) {
			add("rate_change", fmt.Sprint(q.RateChange), "a fraction above −1, such as 10%")
			continue
		}
		factor := 1 + q.RateChange
		if q.BeforeBrokerage {
			factor /= 1 - t.Brokerage
		}
		q.RateOnLine *= factor
		q.Bid *= factor
		q.Offer *= factor
		if q.Following {
			q.Weight *= followingWeight
		}
		if t.HalfLife > 0 && !q.Date.IsZero() && !t.Date.IsZero() {
			years := t.Date.Sub(q.Date).Hours() / 24 / 365.25
			if years < 0 {
				add("date", q.Date.Format(time.DateOnly), "a day not after "+t.Date.Format(time.DateOnly)+", the day of the study")
				continue
			}
			q.Weight *= math.Exp2(-years / t.HalfLife)
		}
		q.Arrival = Arrival{Date: q.Date}
		current[i] = q
	}
	return current, faults.Err()
}
