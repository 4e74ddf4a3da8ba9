package market

import (
	"math"
	"strings"
	"testing"
	"time"

	"cedewright/portfolio/treaty"
)

func day(text string) time.Time {
	d, err := time.Parse(time.DateOnly, text)
	if err != nil {
		panic(err)
	}
	return d
}

// TestCurrent: rates brought to today and to include brokerage, weights by age and place, worked by hand.
func TestCurrent(t *testing.T) {
	quotes := []Quote{
		{Name: "plain", RateOnLine: 0.1, Weight: 1},
		{Name: "last year", RateOnLine: 0.1, Bid: 0.09, Offer: 0.12, Weight: 2, Arrival: Arrival{Date: day("2025-12-01"), RateChange: 0.2}},
		{Name: "net", RateOnLine: 0.09, Weight: 1, Arrival: Arrival{BeforeBrokerage: true}},
		{Name: "following", RateOnLine: 0.1, Weight: 1, Arrival: Arrival{Following: true}},
	}
	got, err := Today{Date: day("2026-12-01"), HalfLife: 1, Brokerage: 0.1}.Current(quotes)
	if err != nil {
		t.Fatal(err)
	}
	for i, want := range []struct{ rate, bid, offer, weight float64 }{{0.1, 0, 0, 1}, {0.12, 0.108, 0.144, 1}, {0.1, 0, 0, 1}, {0.1, 0, 0, 0.5}} {
		q := got[i]
		// A year of 365 days is 0.9993 of one of 365.25.
		if math.Abs(q.RateOnLine-want.rate) > 1e-12 || math.Abs(q.Bid-want.bid) > 1e-12 || math.Abs(q.Offer-want.offer) > 1e-12 || math.Abs(q.Weight-want.weight) > 1e-3 {
			t.Errorf("%s: %+v, want %+v", q.Name, q, want)
		}
	}
	again, err := Today{Date: day("2026-12-01"), Brokerage: 0.1}.Current(got)
	if err != nil || again[1].RateOnLine != got[1].RateOnLine || again[2].RateOnLine != got[2].RateOnLine {
		t.Errorf("what is current is changed again: %+v, %v", again, err)
	}
	for message, q := range map[string]Quote{
		"late.date: 2027-01-01; allowed: a day not after 2026-12-01, the day of the study": {Name: "late", RateOnLine: 0.1, Arrival: Arrival{Date: day("2027-01-01")}},
		"wild.rate_change: -1; allowed: a fraction above −1":                               {Name: "wild", RateOnLine: 0.1, Arrival: Arrival{RateChange: -1}},
	} {
		if _, err := (Today{Date: day("2026-12-01"), HalfLife: 1}).Current([]Quote{q}); err == nil || !strings.Contains(err.Error(), message) {
			t.Errorf("got %v, want %s", err, message)
		}
	}
}

func TestReadQuotesAsTheyArrive(t *testing.T) {
	const header = "name,curve,attachment_probability,exhaustion_probability,expected_loss,rate_on_line,bid,offer,date,rate_change,brokerage,line,currency\n"
	quotes, err := ReadQuotes(strings.NewReader(header+
		"A,wind,0.1,0.04,0.065,0.15,0.14,0.16,2026-01-31,10%,excluded,lead,EUR\n"), "q.csv", "EUR")
	if err == nil {
		t.Errorf("a rate change with a per cent sign was read as a number: %+v", quotes)
	}
	quotes, err = ReadQuotes(strings.NewReader(header+
		"A,wind,0.1,0.04,0.065,0.15,0.14,0.16,2026-01-31,0.1,excluded,following,EUR\n,wind,0.1,0.04,0.065,0.15,,,,,,,\n"), "q.csv", "EUR")
	if err != nil {
		t.Fatal(err)
	}
	if q := quotes[0]; q.Name != "A" || q.Bid != 0.14 || q.Offer != 0.16 || !q.BeforeBrokerage || !q.Following || q.RateChange != 0.1 || q.Date != day("2026-01-31") {
		t.Errorf("%+v", q)
	}
	if q := quotes[1]; q.Name != "row 3" || q.BeforeBrokerage || q.Following || !q.Date.IsZero() {
		t.Errorf("%+v", q)
	}
	for row, want := range map[string]string{
		"A,wind,0.1,0.04,0.065,0.15,0.16,,,,,,":      `q.csv:2:7: bid: 0.16; allowed: above 0 and at most the rate on line 0.15`,
		"A,wind,0.1,0.04,0.065,0.15,,0.14,,,,,":      `q.csv:2:8: offer: 0.14; allowed: at least the rate on line 0.15`,
		"A,wind,0.1,0.04,0.065,0.15,,,31.1.2026,,,,": `q.csv:2:9: date: "31.1.2026" is not a date`,
		"A,wind,0.1,0.04,0.065,0.15,,,,,gross,,":     `q.csv:2:11: brokerage: "gross"; allowed: included or excluded`,
		"A,wind,0.1,0.04,0.065,0.15,,,,,,leader,":    `q.csv:2:12: line: "leader"; allowed: lead or following`,
		"A,wind,0.1,0.04,0.065,0.15,,,,,,,USD":       `q.csv:2:13: currency: "USD"; allowed: "EUR", the currency of the study`,
	} {
		if _, err := ReadQuotes(strings.NewReader(header+row+"\n"), "q.csv", "EUR"); err == nil || !strings.Contains(err.Error(), want) {
			t.Errorf("%s:\ngot  %v\nwant %s", row, err, want)
		}
	}
}

// TestBidAndOffer: an outlier with a bid and an offer is priced between them, both by squares and by absolute errors; the others move as little as
// they must.
func TestBidAndOffer(t *testing.T) {
	quotes := syntheticQuotes(8, Wang{0.4})
	quotes[3].RateOnLine *= 1.25
	quotes[3].Bid, quotes[3].Offer = quotes[3].RateOnLine*0.97, quotes[3].RateOnLine*1.03
	for _, absolute := range []bool{false, true} {
		for _, pull := range []float64{0, 1} {
			m, err := fitMixture(quotes, 0, Wang{0.4}, pull, absolute)
			if err != nil {
				t.Fatal(err)
			}
			if err := Check(m); err != nil {
				t.Error(err)
			}
			if p := quotes[3].rate(m, 0); p < quotes[3].Bid*(1-1e-6) || p > quotes[3].Offer*(1+1e-6) {
				t.Errorf("absolute %v, pull %v: priced %v, bid %v, offer %v", absolute, pull, p, quotes[3].Bid, quotes[3].Offer)
			}
		}
	}
	plain := syntheticQuotes(8, Wang{0.4})
	plain[3].RateOnLine *= 1.25
	f, err := FitFree(plain, 0, FreeOptions{Absolute: true})
	if err != nil {
		t.Fatal(err)
	}
	// Absolute errors leave an outlier alone: the others are met, but for the pull towards a family (squares would move them by up to 7 %).
	for i, q := range f.Quotes {
		if i != 3 && math.Abs(q.Residual) > 0.02 {
			t.Errorf("quote %d: residual %v", i, q.Residual)
		}
	}
	toward, err := FitFree(plain[:2], 0, FreeOptions{Toward: Loaded{Wang{0.4}, 0.1}, Name: "wind"})
	if err != nil || toward.Toward != "wind" || toward.Pull == 0 {
		t.Errorf("leaning on another curve: %+v, %v", toward, err)
	}
	if g := toward.Distortion.At(0.002); math.Abs(g/(Loaded{Wang{0.4}, 0.1}).At(0.002)-1) > 0.15 {
		t.Errorf("where no quote speaks the curve asks %v, the one it leans on %v", g, Loaded{Wang{0.4}, 0.1}.At(0.002))
	}
}

// TestQuotaShareQuote: a commission is a quote of the price of the whole subject loss.
func TestQuotaShareQuote(t *testing.T) {
	truth, brokerage := Wang{0.2}, 0.02
	var losses []float64
	for i := range 500 {
		losses = append(losses, 60+40*math.Exp(-float64(i)/80))
	}
	tariff, err := NewTariff(Curve{Name: "c", Distortion: truth}, len(losses))
	if err != nil {
		t.Fatal(err)
	}
	const premium = 100.0
	commission := 1 - brokerage - tariff.Price(losses)/premium
	q := Quote{Curve: "c", Name: "share", Weight: 1, RateOnLine: 1 - commission, Terms: &treaty.Treaty{Kind: treaty.QuotaShare, Limit: premium}, Recoveries: losses, Years: len(losses)}
	if got := q.rate(truth, brokerage); math.Abs(got-q.RateOnLine) > 1e-12 {
		t.Errorf("priced %v, quoted %v", got, q.RateOnLine)
	}
	quotes := append(syntheticQuotes(6, truth), q)
	for i := range quotes[:6] {
		quotes[i].RateOnLine /= 1 - brokerage
	}
	f, err := FitFamily(FamilyWang, quotes, brokerage)
	if err != nil || math.Abs(f.Parameter-0.2) > 1e-6 {
		t.Errorf("λ %v, want .2 (%v)", f.Parameter, err)
	}
	free, err := FitFree(quotes, brokerage, FreeOptions{})
	if err != nil || math.Abs(free.Quotes[6].Residual) > 1e-3 {
		t.Errorf("free curve: residual %v (%v)", free.Quotes[6].Residual, err)
	}
}
